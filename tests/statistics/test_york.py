"""Errors in both variables: published line and errors, an independent library, limits, refusals."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray
from odrpack import odr_fit
from scipy.optimize import least_squares

from coldwork.errors import InvalidArgument
from coldwork.statistics.line_fit import fit_line
from coldwork.statistics.york import fit_york

FOLDER = Path(__file__).parents[1] / "reference"
PEARSON = tomllib.loads((FOLDER / "pearson_york.toml").read_text("utf-8"))
NORRIS = tomllib.loads((FOLDER / "norris.toml").read_text("utf-8"))
X, Y = np.array(PEARSON["x"]), np.array(PEARSON["y"])
U_X, U_Y = np.array(PEARSON["weight_x"]) ** -0.5, np.array(PEARSON["weight_y"]) ** -0.5

Floats = NDArray[np.float64]


def test_pearsons_data_with_yorks_weights() -> None:
    found = fit_york(X, Y, U_X, U_Y)
    line = found.line
    assert_allclose(line.value, [PEARSON["intercept"], PEARSON["slope"]], rtol=3e-11)
    assert_allclose(line.u, PEARSON["u_scaled"], rtol=3e-11)
    assert_allclose(line.u_stated, PEARSON["u_stated"], atol=5e-5)
    assert_allclose(line.weighted_sum, PEARSON["chi_squared"], atol=5e-5)
    assert line.degrees_of_freedom == 8
    assert_allclose(found.residual @ found.residual, line.weighted_sum, rtol=1e-13)
    assert_allclose(found.leverage.sum(), 2.0, rtol=1e-13)


def test_orthogonal_distances_where_all_errors_are_alike() -> None:
    line = fit_york(X, Y, 1.0, 1.0).line
    assert_allclose(line.slope, PEARSON["orthogonal_slope"], atol=5e-4)
    # The first principal component of the points, from the data alone.
    _, axes = np.linalg.eigh(np.cov(X, Y))
    assert_allclose(line.slope, axes[1, 1] / axes[0, 1], rtol=1e-12)


def test_against_a_library_of_orthogonal_distances() -> None:
    # ODRPACK95 (the NIST library) by way of odrpack; its covariance is scaled by the scatter.
    def model(x: Floats, beta: Floats) -> Floats:
        return np.asarray(beta[0] + beta[1] * x)

    theirs = odr_fit(
        model,
        X,
        Y,
        beta0=np.array([5.0, -0.5]),
        weight_x=U_X**-2,
        weight_y=U_Y**-2,
        diff_scheme="central",
        sstol=1e-14,
        partol=1e-14,
        maxit=500,
    )
    line = fit_york(X, Y, U_X, U_Y).line
    assert_allclose(line.value, theirs.beta, rtol=1e-8)
    assert_allclose(line.weighted_sum, theirs.sum_square, rtol=1e-10)
    # Its linearised errors differ from those at the adjusted points in the second digit here.
    assert_allclose(line.u, theirs.sd_beta, rtol=0.03)


@pytest.mark.parametrize("r", [-0.7, 0.4, 0.9])
def test_correlated_errors_minimise_the_distance_in_their_own_metric(r: float) -> None:
    # Minimum over line and true places of sum (d^T C^-1 d), written out in full.
    roots = [
        np.linalg.cholesky(np.linalg.inv(np.array([[a * a, r * a * b], [r * a * b, b * b]]))).T
        for a, b in zip(U_X, U_Y, strict=True)
    ]

    def distances(p: Floats) -> Floats:
        off = np.stack([X - p[2:], Y - p[0] - p[1] * p[2:]], axis=1)
        return np.concatenate([root @ d for root, d in zip(roots, off, strict=True)])

    start = np.array([5.5, -0.5, *X])
    best = least_squares(distances, start, xtol=1e-15, ftol=1e-15, gtol=1e-15)
    line = fit_york(X, Y, U_X, U_Y, r).line
    assert_allclose(line.value, best.x[:2], rtol=1e-6)
    assert_allclose(line.weighted_sum, 2.0 * best.cost, rtol=1e-10)
    jac = np.asarray(best.jac, dtype=np.float64)
    hidden = np.linalg.inv(jac.T @ jac)[:2, :2]
    assert_allclose(line.cofactor, hidden, rtol=0.15)  # the same to first order in the residuals


def test_without_error_in_x_it_is_least_squares() -> None:
    rows = np.array(NORRIS["rows"]).T
    ours = fit_york(rows[1], rows[0], 0.0, 2.0).line
    known = fit_line(rows[1], rows[0], 0.25)
    assert_allclose(ours.value, known.value, rtol=1e-10)
    assert_allclose(ours.cofactor, known.cofactor, rtol=1e-10)
    assert_allclose(ours.u, [NORRIS["u_intercept"], NORRIS["u_slope"]], rtol=1e-9)


def test_turning_the_axes_turns_the_line() -> None:
    there = fit_york(X, Y, U_X, U_Y, 0.3).line
    back = fit_york(Y, X, U_Y, U_X, 0.3).line
    assert_allclose(back.slope, 1.0 / there.slope, rtol=1e-11)
    assert_allclose(back.intercept, -there.intercept / there.slope, rtol=1e-11)
    assert_allclose(back.weighted_sum, there.weighted_sum, rtol=1e-11)


def test_scales_with_the_units() -> None:
    a, b = 3e7, 2e-9  # density in 1/m^2 under stress in GPa, and the like
    line, moved = fit_york(X, Y, U_X, U_Y).line, fit_york(a * X, b * Y, a * U_X, b * U_Y).line
    size = np.array([b, b / a])
    assert_allclose(moved.value, line.value * size, rtol=1e-12)
    assert_allclose(moved.cofactor, line.cofactor * np.outer(size, size), rtol=1e-12)
    assert_allclose(moved.weighted_sum, line.weighted_sum, rtol=1e-12)


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (([1.0, 2.0], [1.0, 2.0], 1.0, 1.0), "3 points or more"),
        (([1.0, 2.0, 3.0], [1.0, 2.0], 1.0, 1.0), "in pairs"),
        (([1.0, 1.0, 1.0], [1.0, 2.0, 3.0], 1.0, 1.0), "x must not be the same"),
        (([1.0, 2.0, 3.0], [1.0, 2.0, 3.0], -1.0, 1.0), "u_x"),
        (([1.0, 2.0, 3.0], [1.0, 2.0, 3.0], 0.0, [1.0, 0.0, 1.0]), "must not both be zero"),
        (([1.0, 2.0, np.nan], [1.0, 2.0, 3.0], 1.0, 1.0), "x must be present"),
        (([1.0, 2.0, 3.0], [1.0, 2.0, 3.0], 1.0, 1.0, 1.0), "correlation"),
    ],
)
def test_refusals(arguments: tuple[object, ...], said: str) -> None:
    with pytest.raises(InvalidArgument, match=said):
        fit_york(*arguments)  # type: ignore[arg-type]
