"""A fitted line: a certified data set, weights and their covariance, refusals."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.optimize import curve_fit

from coldwork.errors import InvalidArgument
from coldwork.statistics.line_fit import fit_line

NORRIS = tomllib.loads((Path(__file__).parents[1] / "reference" / "norris.toml").read_text("utf-8"))
Y, X = np.array(NORRIS["rows"]).T


def test_the_certified_line_of_norris() -> None:
    # NIST StRD, linear regression, to nine digits and more.
    line = fit_line(X, Y)
    assert_allclose(line.intercept, NORRIS["intercept"], rtol=1e-9)
    assert_allclose(line.slope, NORRIS["slope"], rtol=1e-12)
    assert_allclose(line.u, [NORRIS["u_intercept"], NORRIS["u_slope"]], rtol=1e-10)
    assert_allclose(np.sqrt(line.residual_variance), NORRIS["residual_sd"], rtol=1e-11)
    assert_allclose(line.weighted_sum, NORRIS["residual_sum_of_squares"], rtol=1e-10)
    assert line.degrees_of_freedom == 34
    # Correlation of both: -mean(x) / sqrt(mean(x^2)), from the data alone.
    assert_allclose(line.correlation, -X.mean() / np.sqrt((X**2).mean()), rtol=1e-12)


def test_three_points_by_hand() -> None:
    # x 0 1 2, y 1 2 4: slope 3/2, intercept 5/6, residuals 1/6 -1/3 1/6; weights 4 (u = 1/2).
    line = fit_line([0.0, 1.0, 2.0], [1.0, 2.0, 4.0], 4.0)
    assert_allclose(line.value, [5.0 / 6.0, 1.5], rtol=1e-14)
    assert_allclose(line.weighted_sum, 4.0 / 6.0, rtol=1e-13)
    # Normal matrix 4 [[3, 3], [3, 5]]: inverse [[5, -3], [-3, 3]] / 24.
    assert_allclose(line.cofactor, np.array([[5.0, -3.0], [-3.0, 3.0]]) / 24.0, rtol=1e-13)
    assert_allclose(line.u_stated, np.sqrt([5.0 / 24.0, 3.0 / 24.0]), rtol=1e-13)
    assert_allclose(line.scattered, line.cofactor * 4.0 / 6.0, rtol=1e-13)
    assert_allclose(line.correlation, -3.0 / np.sqrt(15.0), rtol=1e-13)
    assert_allclose(line.at([0.0, 3.0]), [5.0 / 6.0, 5.0 / 6.0 + 4.5], rtol=1e-14)


def test_uneven_weights_against_a_general_fit() -> None:
    rng = np.random.default_rng(7)
    x = np.sort(rng.uniform(1e5, 5e6, 12))
    u = rng.uniform(1e15, 2e16, 12)
    y = 7e17 + 3.2e11 * x + rng.normal(0.0, u)
    line = fit_line(x, y, 1.0 / u**2)
    for absolute, covariance in ((True, line.cofactor), (False, line.scattered)):
        # In units in which the general fit is well conditioned.
        scale = np.array([1e17, 1e11])
        value, found = curve_fit(
            lambda t, a, s: a + s * t, x / 1e6, y / 1e17, [5.0, 1.0], u / 1e17, absolute
        )
        scale = np.array([1e17, 1e11])
        assert_allclose(line.value, value * scale, rtol=1e-6)
        assert_allclose(covariance, found * np.outer(scale, scale), rtol=1e-5)


def test_a_point_of_twice_the_weight_is_that_point_twice() -> None:
    once = fit_line([1.0, 2.0, 5.0], [3.0, 1.0, 2.0], [1.0, 2.0, 1.0])
    twice = fit_line([1.0, 2.0, 2.0, 5.0], [3.0, 1.0, 1.0, 2.0])
    assert_allclose(once.value, twice.value, rtol=1e-14)
    assert_allclose(once.cofactor, twice.cofactor, rtol=1e-14)
    assert_allclose(once.weighted_sum, twice.weighted_sum, rtol=1e-13)


def test_a_change_of_units_changes_nothing_else() -> None:
    line, scaled = fit_line(X, Y), fit_line(3.0 * X, 7.0 * Y, 2.0)
    assert_allclose(scaled.value, line.value * [7.0, 7.0 / 3.0], rtol=1e-10)
    assert_allclose(scaled.u, line.u * [7.0, 7.0 / 3.0], rtol=1e-11)
    assert_allclose(scaled.u_stated, line.u_stated * [1.0, 1.0 / 3.0] / np.sqrt(2.0), rtol=1e-12)


def test_two_points_leave_no_scatter_to_judge_by() -> None:
    line = fit_line([1.0, 2.0], [3.0, 5.0], 4.0)
    assert_allclose(line.value, [1.0, 2.0], rtol=1e-14)
    assert line.degrees_of_freedom == 0
    assert np.isnan(line.residual_variance)
    assert np.isnan(line.u).all()
    assert_allclose(line.u_stated, np.sqrt([5.0 / 2.0 / 2.0, 0.5]), rtol=1e-13)


@pytest.mark.parametrize(
    ("x", "y", "weights", "what"),
    [
        ([1.0], [2.0], 1.0, r"^x and y must be 2 points or more in pairs"),
        ([1.0, 2.0], [2.0], 1.0, r"^x and y must be 2 points or more in pairs"),
        ([1.0, 1.0], [2.0, 3.0], 1.0, r"^x must not be the same for all points \(it is 1\)"),
        ([1.0, 2.0], [2.0, np.nan], 1.0, r"^y must be present \(1 of 2 missing\)"),
        ([1.0, np.inf], [2.0, 3.0], 1.0, r"^x must be finite"),
        ([1.0, 2.0], [2.0, 3.0], [1.0, 0.0], r"^weights must be positive"),
        ([1.0, 2.0], [2.0, 3.0], np.nan, r"^weights must be present \(2 of 2 missing\)"),
    ],
)
def test_refuses_points_that_make_no_line(
    x: list[float], y: list[float], weights: float, what: str
) -> None:
    with pytest.raises(InvalidArgument, match=what):
        fit_line(x, y, weights)
