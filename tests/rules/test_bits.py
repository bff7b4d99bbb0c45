"""Words of rules: their ids, what they empty, and which of them are errors."""

import numpy as np
import pytest

from coldwork.rules import RULES
from coldwork.rules.bits import bit_of, blank, emptied, fired, place_of, rule_ids, with_error
from coldwork.rules.coupon import (
    DENSITY_IMPOSSIBLE,
    DENSITY_TOO_LOW,
    FEW_READINGS,
    NO_READINGS,
)
from coldwork.rules.reading import UNEQUAL_DIAGONALS
from coldwork.rules.rule import Level, Rule

NOTHING = blank(1)[0]


def words(*fired: tuple[Rule, ...]) -> np.ndarray:
    return np.array([np.bitwise_or.reduce([NOTHING, *map(bit_of, rules)]) for rules in fired])


@pytest.mark.parametrize("rule", RULES, ids=[rule.id for rule in RULES])
def test_every_rule_has_the_bit_of_its_place(rule: Rule) -> None:
    assert RULES[place_of(rule)] is rule
    assert int.from_bytes(bit_of(rule).tobytes(), "little") == 2 ** RULES.index(rule)
    assert rule_ids(words((rule,))).to_pylist() == [rule.id]
    assert with_error(words((rule,))).tolist() == [rule.level is Level.ERROR]


def test_ids_stand_in_the_order_of_the_rules() -> None:
    told = rule_ids(words((FEW_READINGS, UNEQUAL_DIAGONALS), (), (NO_READINGS,)))
    assert told.to_pylist() == ["unequal-diagonals;few-readings", "", "no-readings"]


def test_rules_that_fired_are_found_in_any_word() -> None:
    every = words(*((rule,) for rule in RULES), ())
    assert rule_ids(every).to_pylist() == [*(rule.id for rule in RULES), ""]
    for i, rule in enumerate(RULES):
        assert np.flatnonzero(fired(bit_of(rule), every)).tolist() == [i]
    ends = bit_of(RULES[0]) | bit_of(RULES[-1])
    assert np.flatnonzero(fired(ends, every)).tolist() == [0, len(RULES) - 1]


def test_no_rows_have_no_ids() -> None:
    assert rule_ids(blank(0)).to_pylist() == []


def test_errors_empty_columns_and_some_leave_the_ends() -> None:
    bits = words((DENSITY_IMPOSSIBLE,), (DENSITY_TOO_LOW,), (UNEQUAL_DIAGONALS,), ())
    density = "dislocation_density_per_m2"
    assert emptied(density, bits).tolist() == [True, True, False, False]
    assert emptied(density, bits, ends=True).tolist() == [True, False, False, False]
    assert emptied("hardness", bits).tolist() == [False] * 4
    assert emptied("no such column", bits).tolist() == [False] * 4
    assert with_error(bits).tolist() == [True, True, False, False]
