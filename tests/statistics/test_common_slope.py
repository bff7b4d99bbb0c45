"""Parallel lines: exact data, least squares by a general library, refusals."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.statistics.common_slope import fit_parallel_lines

GROUP = np.array([3, 3, 3, 7, 7, 9])
X = np.array([0.1, 0.5, 2.0, 0.3, 1.0, 5.0])
RNG = np.random.default_rng(2)
Y = np.array([1.0, 1.0, 1.0, 4.0, 4.0, 9.0]) + 0.7 * X + 0.1 * RNG.standard_normal(6)
WEIGHTS = np.array([1.0, 2.0, 4.0, 1.0, 3.0, 100.0])


def test_lines_without_scatter_come_back() -> None:
    exact = np.array([1.0, 1.0, 1.0, 4.0, 4.0, 9.0]) + 0.7 * X
    fit = fit_parallel_lines(GROUP, X, exact, WEIGHTS)
    assert_allclose(fit.slope, 0.7, rtol=1e-13)
    assert_allclose(fit.intercepts, [1.0, 4.0, 9.0], rtol=1e-13)


def test_against_least_squares_with_a_column_for_each_group() -> None:
    columns = np.stack([*(g == GROUP for g in (3, 7, 9)), X], axis=1).astype(float)
    root = np.sqrt(WEIGHTS)
    found = np.linalg.lstsq(columns * root[:, None], Y * root, rcond=None)[0]
    fit = fit_parallel_lines(GROUP, X, Y, WEIGHTS)
    assert_allclose([*fit.intercepts, fit.slope], found, rtol=1e-12)
    assert fit.group.tolist() == [0, 0, 0, 1, 1, 2]


@pytest.mark.parametrize("i", range(6))
def test_derivatives_are_differences_since_all_is_linear(i: int) -> None:
    fit = fit_parallel_lines(GROUP, X, Y, WEIGHTS)
    moved = fit_parallel_lines(GROUP, X, Y + (np.arange(6) == i), WEIGHTS)
    assert_allclose(moved.slope - fit.slope, fit.slope_by_y[i], atol=1e-12)
    assert_allclose(moved.intercept - fit.intercept, fit.intercept_by_y[i], atol=1e-12)


def test_scales_with_the_units_of_both_axes() -> None:
    fit, scaled = (
        fit_parallel_lines(GROUP, X * a, Y * b, WEIGHTS) for a, b in ((1, 1), (1e-6, 1e18))
    )
    assert_allclose(scaled.slope, fit.slope * 1e24, rtol=1e-12)
    assert_allclose(scaled.intercepts, fit.intercepts * 1e18, rtol=1e-12)


@pytest.mark.parametrize(
    ("name", "bad"), [("x", np.inf), ("y", -np.inf), ("weights", 0.0), ("weights", -1.0)]
)
def test_refuses_by_name(name: str, bad: float) -> None:
    good = {"x": X, "y": Y, "weights": WEIGHTS}
    with pytest.raises(InvalidArgument, match=rf"^{name} must be"):
        fit_parallel_lines(GROUP, **(good | {name: np.array([bad, *good[name][1:]])}))


def test_refuses_groups_of_one_place() -> None:
    with pytest.raises(InvalidArgument, match="x must differ inside a group"):
        fit_parallel_lines([1, 1, 2], [0.3, 0.3, 0.9], [1.0, 1.1, 2.0], np.ones(3))
