"""The list of rules: names, order, and what each says of itself."""

import re
from typing import Final

import pytest

from coldwork import contracts
from coldwork.rules import REASONS, RULES, Level, Reason, Rule
from coldwork.rules import coupon as rules

ID: Final = re.compile(r"[a-z0-9]+(-[a-z0-9]+)*")


def by_id(rule: Rule | Reason) -> str:
    return rule.id


def test_errors_stand_first_then_warnings_then_information() -> None:
    ranks = [list(Level).index(rule.level) for rule in RULES]
    assert ranks == sorted(ranks)
    assert [level.value for level in Level] == ["error", "warning", "information"]


@pytest.mark.parametrize("listed", [RULES, REASONS], ids=["rules", "reasons"])
def test_names_are_words_joined_by_hyphens_and_stand_once(
    listed: tuple[Rule | Reason, ...],
) -> None:
    names = [one.id for one in listed]
    assert len(set(names)) == len(names)
    assert all(ID.fullmatch(name) for name in names)


@pytest.mark.parametrize("rule", RULES, ids=by_id)
def test_a_rule_says_what_it_found_where_that_comes_from_and_why(rule: Rule) -> None:
    assert rule.statement
    assert not rule.statement.endswith(".")
    assert rule.source
    assert rule.reason.endswith(".")
    assert rule.reason[0].isupper()


@pytest.mark.parametrize("reason", REASONS, ids=by_id)
def test_a_reason_says_what_it_found_and_how_to_mend_it(reason: Reason) -> None:
    assert reason.statement
    assert reason.hint
    assert reason.source
    assert not reason.statement.endswith(".")
    assert not reason.hint.endswith(".")


@pytest.mark.parametrize("rule", RULES, ids=by_id)
def test_errors_name_what_they_empty_and_nothing_else_empties(rule: Rule) -> None:
    # The agreed meaning of an error: it names the quantities that it empties.
    assert bool(rule.empties) == (rule.level is Level.ERROR)
    assert set(rule.empties) <= set(contracts.load("out/coupons").columns)
    assert len(set(rule.empties)) == len(rule.empties)


@pytest.mark.parametrize("rule", RULES, ids=by_id)
def test_a_limit_has_a_unit_and_a_range_runs_upwards(rule: Rule) -> None:
    if rule.limit is not None:
        assert rule.unit is not None
    if rule.upper is not None:
        assert rule.limit is not None
        assert rule.limit < rule.upper


# What hangs on what, by the order of the relations: a stored energy is density times line
# energy, a density comes from a stress, a stress from a hardness.
CHAIN: Final = (
    "hardness",
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "line_energy_j_per_m",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_g",
    "temperature_rise_k",
)


@pytest.mark.parametrize("rule", [r for r in RULES if r.empties], ids=by_id)
def test_an_emptied_quantity_takes_all_that_follow_from_it_along(rule: Rule) -> None:
    emptied = [name in rule.empties for name in CHAIN]
    assert emptied == sorted(emptied)


def test_below_what_metals_hold_the_interval_still_stands() -> None:
    assert [rule for rule in RULES if rule.ends_stay] == [rules.DENSITY_TOO_LOW]
