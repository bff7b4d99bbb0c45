"""Local polynomials: exact for polynomials, corners left out, uncertainty that holds."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument
from coldwork.statistics.local_polynomial import (
    LEAST_POINTS,
    Window,
    choose_window,
    fit_window,
)

X = np.linspace(0.0, 1.0, 4001)
FloatArray = NDArray[np.float64]


def bent(x: FloatArray) -> FloatArray:
    """A course with every power of x: 1 - exp(-4 x)."""
    return np.asarray(-np.expm1(-4.0 * x))


@pytest.mark.parametrize("points", [11, 200, 4001])
def test_a_quartic_is_read_exactly_through_any_number_of_means(points: int) -> None:
    power = np.polynomial.Polynomial([2.0, -1.0, 3.0, 0.5, -4.0])
    start = (4001 - points) // 2
    fit = fit_window(X, power(X), Window(start, start + points, 0.5, 4))
    assert_allclose(fit.value(0.51), power(0.51), rtol=1e-10)
    assert_allclose(fit.slope(0.51), power.deriv()(0.51), rtol=1e-8)
    assert_allclose(fit.bend(0.51), power.deriv(2)(0.51), rtol=1e-6)


def test_without_noise_the_window_is_small_and_the_error_falls_with_the_spacing() -> None:
    errors = []
    for count in (101, 201, 401):
        x = np.linspace(0.0, 1.0, count)
        window = choose_window(x, bent(x), 0.337, (0, count))
        assert window.stop - window.start <= 3 * LEAST_POINTS
        errors.append(abs(fit_window(x, bent(x), window).slope(0.337) - 4.0 * np.exp(-1.348)))
    assert errors[1] < errors[0] / 4.0
    assert errors[2] < errors[1] / 4.0


def test_under_noise_the_window_is_wide_and_the_uncertainty_holds() -> None:
    rng = np.random.default_rng(8)
    z_value, z_slope, widths = [], [], []
    for _ in range(300):
        y = bent(X) + 0.01 * rng.standard_normal(X.size)
        window = choose_window(X, y, 0.4, (0, X.size))
        fit = fit_window(X, y, window)
        z_value.append((fit.value(0.4) - bent(np.array(0.4))) / fit.u_value(0.4))
        z_slope.append((fit.slope(0.4) - 4.0 * np.exp(-1.6)) / fit.u_slope(0.4))
        widths.append(window.stop - window.start)
    for z in (np.array(z_value), np.array(z_slope)):
        assert abs(z.mean()) < 0.2  # 0.06 of it by chance
        assert (np.abs(z) <= 2.0).mean() > 0.91
    assert np.median(widths) > 400


def test_noise_that_is_alike_next_to_each_other_is_seen() -> None:
    # Moving means of 5 points: the variance of wide means is that of 5 times fewer points.
    rng = np.random.default_rng(9)
    z = []
    for _ in range(200):
        noise = np.convolve(rng.standard_normal(X.size + 4), np.ones(5) / np.sqrt(5), "valid")
        fit = fit_window(X, bent(X) + 0.01 * noise, Window(1000, 2200, 0.4, 4))
        z.append((fit.value(0.4) - bent(np.array(0.4))) / fit.u_value(0.4))
    assert (np.abs(z) <= 2.0).mean() > 0.88


def test_noise_that_a_filter_left_is_not_taken_for_the_curve() -> None:
    rng = np.random.default_rng(19)
    z = []
    for _ in range(200):
        noise = np.convolve(rng.standard_normal(X.size + 4), np.ones(5) / np.sqrt(5), "valid")
        y = bent(X) + 0.01 * noise
        fit = fit_window(X, y, choose_window(X, y, 0.4, (0, X.size), alike=8))
        z.append((fit.value(0.4) - bent(np.array(0.4))) / fit.u_value(0.4))
    assert (np.abs(z) <= 2.0).mean() > 0.91


def test_steps_of_the_reading_are_not_taken_for_the_curve() -> None:
    # Rounded to a hundredth and no noise: without being told it follows the steps.
    y = np.round(bent(X), 2)
    lasting = 0.01 / (np.pi * np.sqrt(2.0))
    told = choose_window(X, y, 0.7, (0, X.size), lasting=lasting)
    assert told.stop - told.start > 5 * LEAST_POINTS
    fit = fit_window(X, y, told)
    assert abs(fit.value(0.7) - bent(np.array(0.7))) < 2.0 * fit.u_value(0.7)
    assert fit.u_value(0.7) < 0.01


def test_a_corner_stays_out_of_the_window() -> None:
    rng = np.random.default_rng(10)
    y = np.where(X < 0.3, 10.0 * X, 3.0 + 0.5 * (X - 0.3)) + 0.01 * rng.standard_normal(X.size)
    window = choose_window(X, y, 0.4, (0, X.size))
    assert X[window.start] > 0.29
    assert abs(fit_window(X, y, window).slope(0.4) - 0.5) < 0.1


def test_finds_where_it_meets_a_line_and_where_it_is_greatest() -> None:
    y = 1.0 - (X - 0.52) ** 2
    fit = fit_window(X, y, Window(1600, 2600, 0.5, 4))
    assert_allclose(fit.top(0.5), 0.52, rtol=1e-9)
    assert_allclose(fit.root(0.0, 1.0 - 0.02**2, 0.49), 0.50, rtol=1e-9)
    assert np.isnan(fit_window(X, -y, Window(1600, 2600, 0.5, 4)).top(0.5))
    flat = fit_window(X, np.ones_like(X), Window(1600, 2600, 0.5, 0))
    assert np.isnan(flat.root(0.0, 2.0, 0.5))


def test_few_points_bear_a_lower_order() -> None:
    x = np.arange(5.0)
    window = choose_window(x, 2.0 * x, 2.0, (0, 5))
    assert window == Window(0, 5, 2.0, 2)
    assert_allclose(fit_window(x, 2.0 * x, window).slope(2.0), 2.0, rtol=1e-12)


def test_refuses_fewer_than_three_points() -> None:
    with pytest.raises(InvalidArgument, match="between must hold 3 points or more"):
        choose_window(X, X, 0.5, (10, 12))
