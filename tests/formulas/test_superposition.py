"""Superposition: right triangles, limits, what the exponent does, refusals."""

import mpmath  # type: ignore[import-untyped]
import numpy as np
import pytest
from mpmath import mpf
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.superposition import (
    combined_stress,
    superposed_stress,
    superposed_stress_sensitivities,
)


@pytest.mark.parametrize(("whole", "one", "other"), [(5, 3, 4), (13, 5, 12), (17, 8, 15)])
def test_exponent_2_is_pythagoras(whole: float, one: float, other: float) -> None:
    assert_allclose(superposed_stress(whole * 1e7, one * 1e7, 2.0), other * 1e7, rtol=1e-14)
    assert_allclose(combined_stress(other * 1e7, one * 1e7, 2.0), whole * 1e7, rtol=1e-14)


def test_exponent_1_is_a_difference() -> None:
    assert_allclose(superposed_stress(250e6, 90e6, 1.0), 160e6, rtol=1e-14)
    slopes = superposed_stress_sensitivities(250e6, [90e6, 0.0], 1.0)
    assert_allclose(slopes["excess"], 1.0, rtol=1e-14)
    assert_allclose(slopes["obstacle"], -1.0, rtol=1e-14)


def test_without_obstacles_all_is_left() -> None:
    excess = np.array([1e5, 3e8])
    for q in (1.0, 1.37, 2.0):
        assert_allclose(superposed_stress(excess, 0.0, q), excess, rtol=1e-15)
        slopes = superposed_stress_sensitivities(excess, 0.0, q)
        assert_allclose(slopes["excess"], 1.0, rtol=1e-15)
        assert_allclose(slopes["exponent"], 0.0, atol=0.0)


@pytest.mark.parametrize("exponent", [1.0, 1.5, 2.0])
def test_at_and_below_the_obstacle_nothing_is_left(exponent: float) -> None:
    excess = np.array([90e6 * (1.0 + 1e-12), 90e6, 80e6, 0.0, -50e6])
    assert np.isnan(superposed_stress(excess, 90e6, exponent)).tolist() == [False] + 4 * [True]
    for slope in superposed_stress_sensitivities(excess, 90e6, exponent).values():
        assert np.isnan(np.broadcast_to(slope, 5)).tolist() == [False] + 4 * [True]
    assert np.isnan(superposed_stress([0.0, -1.0], 0.0, exponent)).all()


@pytest.mark.parametrize("above", [1e-15, 1e-12, 1e-8, 1e-4])
@pytest.mark.parametrize("exponent", [1.0, 1.3, 2.0])
def test_no_digits_are_lost_next_to_the_obstacle(above: float, exponent: float) -> None:
    # The definition at 50 digits, at the very doubles that went in.
    excess = 90e6 * (1.0 + above)
    with mpmath.workdps(50):
        q = mpf(exponent)
        exact = float((mpf(excess) ** q - mpf(90e6) ** q) ** (1 / q))
    assert_allclose(superposed_stress(excess, 90e6, exponent), exact, rtol=2e-15)


def test_the_slope_diverges_near_the_obstacle_for_exponents_above_1() -> None:
    # d sigma_d / d excess = (excess / sigma_d)^(q - 1): at q = 2, excess 41, obstacle 40 it is
    # 41/9 (a right triangle again).
    slopes = superposed_stress_sensitivities(41e6, 40e6, 2.0)
    assert_allclose(slopes["excess"], 41.0 / 9.0, rtol=1e-13)
    assert_allclose(slopes["obstacle"], -40.0 / 9.0, rtol=1e-13)
    near = superposed_stress_sensitivities(40e6 * (1.0 + 1e-10), 40e6, 2.0)
    assert near["excess"] > 1e4


def test_there_and_back() -> None:
    stress = np.geomspace(1e4, 1e9, 21)[:, None]
    q = np.linspace(1.0, 2.0, 11)
    both = combined_stress(stress, 30e6, q)
    left = superposed_stress(both, 30e6, q)
    gain = (both / stress) ** q  # what a rounding of `both` becomes
    assert np.all(np.abs(left / stress - 1.0) < 4e-16 * (4.0 + gain))


def test_terms_come_together_in_any_order() -> None:
    terms = (40e6, 25e6, 70e6)
    one = combined_stress(combined_stress(terms[0], terms[1], 1.4), terms[2], 1.4)
    other = combined_stress(terms[1], combined_stress(terms[2], terms[0], 1.4), 1.4)
    assert_allclose(one, other, rtol=1e-14)
    assert_allclose(one, sum(t**1.4 for t in terms) ** (1.0 / 1.4), rtol=1e-14)


def test_a_larger_exponent_leaves_more() -> None:
    left = superposed_stress(250e6, 90e6, np.linspace(1.0, 2.0, 21))
    assert np.all(np.diff(left) > 0.0)


@pytest.mark.parametrize("bad", [0.999, 2.001, 0.0, -1.0, 7.0])
def test_refuses_an_exponent_out_of_range_by_name(bad: float) -> None:
    for function in (superposed_stress, combined_stress):
        with pytest.raises(InvalidArgument, match=r"^exponent must be from 1 to 2 \(1 bad of 2"):
            function(250e6, 90e6, [1.5, bad])
