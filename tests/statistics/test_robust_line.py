"""The robust line: published fit with errors in both, regression, coverage, outliers."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.statistics.robust_line import robust_line

# Pearson, Phil. Mag. 2 (1901) 559-572: x, y and the line of closest fit by right angles,
# printed 5.7857 - 0.546 x, rounded on the way; unrounded 5.784044 - 0.545561 x (York 1966).
PEARSON_X = [0.0, 0.9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4]
PEARSON_Y = [5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5]


def test_agrees_with_pearsons_line_of_closest_fit() -> None:
    # Equal noise in both is the orthogonal line; none of his points is an outlier by much,
    # so that Huber's weights move it by less than the last printed digit.
    line = robust_line(PEARSON_X, PEARSON_Y, 1.0, 1.0)
    assert_allclose(line.slope, -0.546, atol=2e-3)
    assert_allclose(line.intercept, 5.7857, atol=1e-2)


def test_without_noise_in_x_it_is_ordinary_regression() -> None:
    # Against numpy's polynomial fit, on points within 2 standard deviations.
    rng = np.random.default_rng(1)
    x = np.linspace(0.0, 1.0, 60)
    y = 2.0 + 3.0 * x + 0.1 * rng.uniform(-1.0, 1.0, x.size)
    line = robust_line(x, y, 0.0, 1.0)
    slope, intercept = np.polyfit(x, y, 1)
    assert_allclose([line.slope, line.intercept], [slope, intercept], rtol=1e-12)


def test_noise_in_x_does_not_flatten_it() -> None:
    # Ordinary regression flattens by noise^2 / spread^2, 1 / (1 + 12 / 25) here.
    rng = np.random.default_rng(2)
    truth = np.repeat(np.linspace(0.0, 1.0, 100), 100)
    x = truth + 0.2 * rng.standard_normal(truth.size)
    y = 5.0 * truth + 0.4 * rng.standard_normal(truth.size)
    plain = robust_line(x, y).slope
    assert_allclose(plain, 5.0 / (1.0 + 0.2**2 * 12.0), rtol=0.03)
    line = robust_line(x, y, 0.2, 0.4)
    assert abs(line.slope - 5.0) < 3.0 * np.sqrt(line.covariance[1, 1])


def test_its_uncertainty_holds() -> None:
    # 1000 lines of 40 points with noise in both: k = 2 covers near 95 %, and the
    # covariance with the intercept has the right sign and size.
    rng = np.random.default_rng(3)
    truth = np.linspace(1.0, 2.0, 40)
    errors, normalised, joint = [], [], []
    for _ in range(1000):
        x = truth + 0.003 * rng.standard_normal(truth.size)
        y = 10.0 * truth - 4.0 + 0.05 * rng.standard_normal(truth.size)
        line = robust_line(x, y, 0.003, 0.05)
        errors.append((line.intercept + 4.0, line.slope - 10.0))
        normalised.append(errors[-1] / np.sqrt(np.diagonal(line.covariance)))
        joint.append(line.covariance[0, 1])
    z = np.array(normalised)
    assert (np.abs(z) <= 2.0).mean(axis=0).min() > 0.93
    assert np.abs(z.mean(axis=0)).max() < 0.1
    assert_allclose(np.cov(np.array(errors).T)[0, 1], np.mean(joint), rtol=0.2)


def test_outliers_are_held_down() -> None:
    rng = np.random.default_rng(4)
    x = np.linspace(0.0, 1.0, 100)
    y = 7.0 * x + 0.01 * rng.standard_normal(x.size)
    y[-5:] -= 3.0
    line = robust_line(x, y, 0.0, 0.01)
    assert abs(line.slope - 7.0) < 0.05
    assert abs(float(np.polyfit(x, y, 1)[0]) - 7.0) > 0.5


def test_a_given_slope_stays_and_the_intercept_is_fitted() -> None:
    line = robust_line([0.0, 1.0, 2.0, 3.0], [1.0, 3.1, 4.9, 7.0], slope=2.0)
    assert line.slope == 2.0
    assert_allclose(line.intercept, 1.0, atol=1e-12)
    assert line.covariance[1, 1] == 0.0


def test_exact_points_give_an_exact_line() -> None:
    x = np.linspace(0.0, 1e-3, 50)
    line = robust_line(x, 2e6 + 115e9 * x, 1e-6, 1e4)
    assert_allclose([line.intercept, line.slope], [2e6, 115e9], rtol=1e-12)
    assert_allclose(line.at(0.5e-3), 2e6 + 57.5e6, rtol=1e-12)


def test_another_unit_scales_it() -> None:
    rng = np.random.default_rng(6)
    x = np.linspace(0.0, 1.0, 50)
    y = 3.0 * x + 0.1 * rng.standard_normal(x.size)
    plain = robust_line(x, y, 0.01, 0.1)
    scaled = robust_line(1e-3 * x, 1e6 * y, 1e-5, 1e5)
    assert_allclose(scaled.slope, 1e9 * plain.slope, rtol=1e-12)
    assert_allclose(scaled.covariance[1, 1], 1e18 * plain.covariance[1, 1], rtol=1e-9)


def test_a_known_filter_widens_its_uncertainty() -> None:
    rng = np.random.default_rng(16)
    x = np.linspace(0.0, 1.0, 60)
    y = 3.0 * x + 0.1 * rng.standard_normal(x.size)
    plain, told = robust_line(x, y), robust_line(x, y, long_run=4.0)
    assert_allclose(told.covariance, 4.0 * plain.covariance, rtol=1e-12)
    assert told.slope == plain.slope


def test_refuses_by_name() -> None:
    with pytest.raises(InvalidArgument, match="3 points or more in pairs"):
        robust_line([0.0, 1.0], [0.0, 1.0])
    with pytest.raises(InvalidArgument, match="3 points or more in pairs"):
        robust_line([0.0, 1.0, 2.0], [0.0, 1.0])
    with pytest.raises(InvalidArgument, match="x must not be the same"):
        robust_line([1.0, 1.0, 1.0], [0.0, 1.0, 2.0])
    with pytest.raises(InvalidArgument, match="y must be finite"):
        robust_line([0.0, 1.0, 2.0], [0.0, np.inf, 2.0])
    with pytest.raises(InvalidArgument, match="noise_x must be zero or positive"):
        robust_line([0.0, 1.0, 2.0], [0.0, 1.0, 2.0], -1.0)
