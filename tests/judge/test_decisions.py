"""Decisions: a truth table for every rule, published probabilities, and what is missing."""

from dataclasses import replace
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from coldwork.inputs.method import Limit
from coldwork.judge.decisions import (
    CONFORMING,
    DECISIONS,
    NON_CONFORMING,
    NONE,
    UNDECIDED,
    Decided,
    Evidence,
    conformance_probability,
    decide,
    decision_texts,
    worst,
)

NAN: Final = np.nan
C, N, U = CONFORMING, NON_CONFORMING, UNDECIDED


def limit(
    lower: float | None,
    upper: float | None,
    rule: str = "guarded",
    at_least: float | None = None,
    max_relative_u: float | None = None,
) -> Limit:
    column = "stored_energy_j_per_g"
    return Limit("window", column, lower, upper, rule, "total", at_least, max_relative_u)


def evidence(
    held: Limit, value: float | list[float], u: float | list[float], coverage: float = 0.95
) -> Evidence:
    """Normal quantities: bounds and probabilities from scipy.special."""
    y, s = np.broadcast_arrays(np.atleast_1d(np.array(value, dtype=float)), np.array(u))
    k = ndtri(coverage)
    low = NAN if held.lower is None else held.lower
    high = NAN if held.upper is None else held.upper
    no = np.zeros(y.shape, dtype=np.bool_)
    return Evidence(
        value=y,
        u=np.array(s, dtype=float),
        lower_bound=y - k * s,
        upper_bound=y + k * s,
        above_lower=ndtr((y - low) / s),
        above_upper=ndtr((y - high) / s),
        blocked=no,
        with_indent=no,
        coverage=coverage,
        unit="J/g",
    )


def only_bounds(value: float, low: float, high: float) -> Evidence:
    """A quantity of which nothing but the bounds is known."""
    found = evidence(limit(0.0, None), value, 0.01)
    return replace(
        found,
        lower_bound=np.array([low]),
        upper_bound=np.array([high]),
        above_lower=np.array([NAN]),
        above_upper=np.array([NAN]),
    )


# Published conformance probabilities: JCGM 106:2012, examples to 7.4 (attribution from memory,
# numbers recomputed: Phi(1.4), and Phi(1.5) - Phi(-0.611)).


def test_zener_diode() -> None:
    # Breakdown voltage at most -5.40 V, here as a magnitude: 5.47 V, u = 0.05 V.
    held = limit(5.40, None, "probability", at_least=0.9)
    found = decide(held, evidence(held, 5.47, 0.05))
    assert_allclose(found.probability, 0.919, atol=5e-4)
    assert found.code.tolist() == [CONFORMING]


def test_sae_40_oil() -> None:
    # Kinematic viscosity from 12.5 to 16.3 mm2/s: 13.6 mm2/s, u = 1.8 mm2/s.
    held = limit(12.5, 16.3, "probability", at_least=0.95)
    found = decide(held, evidence(held, 13.6, 1.8))
    assert_allclose(found.probability, 0.66, atol=5e-3)
    assert found.code.tolist() == [UNDECIDED]


@pytest.mark.parametrize(("lower", "upper"), [(0.1, None), (None, 0.3), (0.1, 0.3)])
def test_the_probability_of_two_limits_is_the_sum_of_both_less_one(
    lower: float | None, upper: float | None
) -> None:
    held = limit(lower, upper, "probability", at_least=0.95)
    y = np.linspace(0.0, 0.5, 11)
    above = np.ones(11) if lower is None else ndtr((y - lower) / 0.05)
    below = np.ones(11) if upper is None else ndtr((upper - y) / 0.05)
    found = conformance_probability(held, evidence(held, list(y), 0.05))
    assert_allclose(found, above + below - 1.0, atol=1e-15)


# Guarded: value 0.2 to 0.4 against limits 0.1 and 0.3; only the bounds decide.


@pytest.mark.parametrize(
    ("lower", "upper", "low", "high", "expected", "bound"),
    [
        # one sided, below
        (0.10, None, 0.11, 0.40, C, 0.11),
        (0.10, None, 0.10, 0.40, C, 0.10),
        (0.10, None, 0.09, 0.40, U, NAN),
        (0.10, None, 0.05, 0.10, U, NAN),
        (0.10, None, 0.05, 0.09, N, 0.09),
        # one sided, above
        (None, 0.30, 0.11, 0.29, C, 0.29),
        (None, 0.30, 0.11, 0.30, C, 0.30),
        (None, 0.30, 0.11, 0.31, U, NAN),
        (None, 0.30, 0.30, 0.40, U, NAN),
        (None, 0.30, 0.31, 0.40, N, 0.31),
        # two sided; of two bounds that clear their limits the nearer one decides
        (0.10, 0.30, 0.11, 0.25, C, 0.11),
        (0.10, 0.30, 0.15, 0.29, C, 0.29),
        (0.10, 0.30, 0.09, 0.29, U, NAN),
        (0.10, 0.30, 0.11, 0.31, U, NAN),
        (0.10, 0.30, 0.01, 0.09, N, 0.09),
        (0.10, 0.30, 0.31, 0.90, N, 0.31),
        (0.10, 0.30, 0.09, 0.31, U, NAN),
        # ends that do not exist clear nothing
        (0.10, None, NAN, 0.40, U, NAN),
        (0.10, None, 0.11, NAN, C, 0.11),
        (None, 0.30, 0.11, NAN, U, NAN),
        (None, 0.30, 0.31, NAN, N, 0.31),
        (None, 0.30, NAN, 0.29, C, 0.29),
        (0.10, 0.30, 0.11, NAN, U, NAN),
        (0.10, 0.30, NAN, NAN, U, NAN),
    ],
)
def test_guarded(
    lower: float | None,
    upper: float | None,
    low: float,
    high: float,
    expected: int,
    bound: float,
) -> None:
    found = decide(limit(lower, upper), only_bounds(0.2, low, high))
    assert DECISIONS[found.code[0]] == DECISIONS[expected]
    assert_allclose(found.bound, bound)


@pytest.mark.parametrize(
    ("lower", "upper", "high", "expected"),
    [
        (0.10, None, 0.09, N),  # the upper bound is under the lower limit
        (0.10, None, 0.10, U),
        (0.10, None, NAN, U),
        (None, 0.30, 0.29, C),  # under the upper limit, and there is no lower one
        (None, 0.30, 0.31, U),
        (None, 0.30, NAN, U),
        (0.10, 0.30, 0.09, N),
        (0.10, 0.30, 0.20, U),  # the lower limit is not settled by it
    ],
)
@pytest.mark.parametrize("rule", ["guarded", "simple"])
def test_without_a_value_only_the_upper_bound_settles_it(
    rule: str, lower: float | None, upper: float | None, high: float, expected: int
) -> None:
    held = limit(lower, upper, rule, max_relative_u=0.1)
    found = decide(held, replace(only_bounds(NAN, 0.0, high), u=np.array([NAN])))
    assert DECISIONS[found.code[0]] == DECISIONS[expected]
    assert_allclose(found.bound, NAN if expected == U else high)


@pytest.mark.parametrize(
    ("above_lower", "expected"),
    [(0.96, C), (0.95, C), (0.94, U), (0.06, U), (1.0 - 0.95, N), (0.01, N), (NAN, U)],
)
@pytest.mark.parametrize("value", [0.2, NAN])
def test_by_probability(above_lower: float, expected: int, value: float) -> None:
    held = limit(0.1, None, "probability", at_least=0.95)
    found = decide(held, replace(only_bounds(value, NAN, 0.3), above_lower=np.array([above_lower])))
    assert DECISIONS[found.code[0]] == DECISIONS[expected]
    assert_allclose(found.probability, above_lower)
    assert np.isnan(found.bound).all()


@pytest.mark.parametrize("rule", ["guarded", "probability"])
def test_with_neither_value_nor_upper_bound_no_probability_is_told(rule: str) -> None:
    held = limit(0.1, 0.3, rule, at_least=0.95)
    low, high = np.array([0.99]), np.array([0.01])
    found = decide(held, replace(only_bounds(NAN, 0.0, NAN), above_lower=low, above_upper=high))
    assert DECISIONS[found.code[0]] == "undecided"
    assert np.isnan(found.probability).all()


def test_rounding_is_no_probability() -> None:
    # one below the other by the last place of a double, as sums of P and 1 - P come out
    held = limit(0.1, 0.3)
    above = np.array([1.0, 0.5, 1e-20])
    less = np.nextafter(above, 0.0)
    base = only_bounds(0.2, 0.0, 1.0)
    two = replace(base, above_lower=above, above_upper=less)
    assert (conformance_probability(held, two) == 0.0).all()
    alone = replace(base, above_lower=np.array([1e-20]))
    assert conformance_probability(limit(0.1, None), alone) == 1e-20  # no sum, no rounding


def test_probability_and_guard_agree_for_one_limit() -> None:
    # One-sided bounds at the coverage and P >= coverage are one criterion (JCGM 106, 8.3).
    y = np.linspace(0.0, 0.3, 301)
    held = limit(0.1, None)
    found = evidence(held, list(y), 0.03)
    by_bounds = decide(held, found).code
    by_chance = decide(replace(held, rule="probability", at_least=0.95), found).code
    assert by_bounds.tolist() == by_chance.tolist()
    assert set(by_bounds.tolist()) == {C, N, U}


@pytest.mark.parametrize(
    ("value", "u", "most", "expected"),
    [
        (0.20, 0.019, 0.10, C),
        (0.20, 0.020, 0.10, C),
        (0.20, 0.021, 0.10, U),
        (0.10, 0.005, 0.10, C),
        (0.30, 0.005, 0.10, C),
        (0.09, 0.005, 0.10, N),
        (0.31, 0.005, 0.10, N),
        (0.31, 0.050, 0.10, U),
        (0.20, 0.001, None, U),  # not said: not to be decided by the value alone
        (0.00, 0.001, 0.10, U),
        (0.00, 0.000, 0.10, N),
        (-0.2, 0.001, 0.10, N),
    ],
)
def test_simple(value: float, u: float, most: float | None, expected: int) -> None:
    held = limit(0.1, 0.3, "simple", max_relative_u=most)
    found = decide(held, replace(only_bounds(value, NAN, NAN), u=np.array([u])))
    assert DECISIONS[found.code[0]] == DECISIONS[expected]
    assert np.isnan(found.bound).all()


@pytest.mark.parametrize("rule", ["guarded", "probability", "simple"])
def test_an_error_leaves_it_undecided_whatever_else_is_known(rule: str) -> None:
    held = limit(0.1, None, rule, at_least=0.95, max_relative_u=1.0)
    found = evidence(held, [0.2, 0.2, 0.01], 0.001)
    blocked = decide(held, replace(found, blocked=np.array([True, False, True])))
    assert blocked.code.tolist() == [U, C, U]
    assert np.isnan(blocked.probability).tolist() == [True, False, True]
    assert np.isnan(blocked.bound[[0, 2]]).all()


@pytest.mark.parametrize("rule", ["guarded", "probability", "simple"])
def test_a_value_without_uncertainty_is_undecided(rule: str) -> None:
    held = limit(0.1, None, rule, at_least=0.95, max_relative_u=1.0)
    found = decide(held, replace(evidence(held, 0.2, 0.001), u=np.array([NAN])))
    assert found.code.tolist() == [U]
    assert np.isnan(found.probability).all()


def test_an_exact_value_is_decided_by_itself() -> None:
    held = limit(0.1, None)
    exact = replace(only_bounds(0.1, 0.1, 0.1), u=np.array([0.0]))
    assert decide(held, exact).code.tolist() == [C]


def test_no_coupons() -> None:
    held = limit(0.1, None)
    found = decide(held, evidence(held, [], 0.1))
    assert found.code.shape == (0,)
    assert len(found.reason) == 0


def test_at_most_one_in_twenty_just_outside_is_called_conforming() -> None:
    # What the guard promises: a truth at the limit is passed with 1 - coverage.
    rng = np.random.default_rng(20260731)
    held = limit(0.1, 0.3)
    for truth in (0.1, 0.3):
        y = rng.normal(truth, 0.02, 20_000)
        share = np.mean(decide(held, evidence(held, list(y), 0.02)).code == C)
        assert abs(share - 0.05) < 0.006  # four standard deviations of the share


# The worst of several limits.


def decided(code: int, probability: float) -> Decided:
    held = limit(0.1, None)
    found = decide(held, evidence(held, 0.2, 0.001))
    return replace(
        found,
        code=np.array([code], dtype=np.int8),
        probability=np.array([probability]),
    )


@pytest.mark.parametrize(
    ("several", "expected"),
    [
        ([], (NONE, -1, NAN)),
        ([(C, 0.99)], (C, 0, 0.99)),
        ([(C, 0.99), (U, 0.5)], (U, 1, 0.5)),
        ([(N, 0.04), (U, 0.5), (C, 0.99)], (N, 0, 0.04)),
        ([(U, 0.01), (N, 0.04)], (N, 1, 0.04)),
        ([(C, 0.99), (C, 0.96), (C, 0.97)], (C, 1, 0.96)),  # the lower probability
        ([(U, NAN), (U, 0.5)], (U, 1, 0.5)),  # a known one first
        ([(U, 0.5), (U, NAN)], (U, 0, 0.5)),
        ([(U, NAN), (U, NAN)], (U, 0, NAN)),  # then the sheet's order
        ([(C, 0.96), (C, 0.96)], (C, 0, 0.96)),
    ],
)
def test_the_worst_limit_counts(
    several: list[tuple[int, float]], expected: tuple[int, int, float]
) -> None:
    found = worst([decided(*one) for one in several], 1)
    assert (found.code[0], found.limit[0]) == expected[:2]
    assert_allclose(found.probability, expected[2])


def test_decisions_are_written_as_the_contract_has_them() -> None:
    codes: NDArray[np.int8] = np.array([C, N, U, NONE], dtype=np.int8)
    texts = decision_texts(codes).to_pylist()
    assert texts == ["conforming", "non-conforming", "undecided", None]
