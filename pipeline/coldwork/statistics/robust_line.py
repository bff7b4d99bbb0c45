"""A straight line through points that are noisy in both coordinates, outliers held down."""

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite, not_negative
from coldwork.statistics.noise import long_run_ratio

__all__ = ["Line", "robust_line"]

FloatArray = NDArray[np.float64]

_FULL_WEIGHT: Final = 2.0  # residuals beyond this many standard deviations count less [1]
_TO_SD: Final = 1.482602  # median absolute deviation to standard deviation, normal [1]
_ROUNDS: Final = 30
_STILL: Final = 1e-12  # relative change of the slope at which it stands


@dataclass(frozen=True)
class Line:
    """A fitted line, y = intercept + slope x.

    Attributes
    ----------
    intercept : float
        At x = 0. [unit of y]
    slope : float
        [unit of y over unit of x]
    covariance : ndarray of float64, shape (2, 2)
        Of intercept and slope, as a standard uncertainty takes it: with the factor
        nu / (nu - 2) for few points.
    residual_sd : float
        Of a point about the line, in y. [unit of y]
    points : int
        How many.
    """

    intercept: float
    slope: float
    covariance: FloatArray
    residual_sd: float
    points: int

    def at(self, x: FloatArray | float) -> FloatArray:
        """Give y [its unit] on the line."""
        return np.asarray(self.intercept + self.slope * x)


def robust_line(
    x: ArrayLike,
    y: ArrayLike,
    noise_x: float = 0.0,
    noise_y: float = 0.0,
    slope: float | None = None,
    long_run: float = 1.0,
) -> Line:
    r"""Fit a line whose slope does not suffer from noise in x, by Huber's weights.

    .. math:: m = \frac{2 s_{xy}}{d + \sqrt{d^2 + 4 s_{xy}^2 / \delta}}, \qquad
              d = s_{xx} - s_{yy} / \delta, \quad \delta = u_y^2 / u_x^2

    Parameters
    ----------
    x, y : array_like, shape (n,)
        The points, in the order in which they were taken; 3 or more. [any units]
    noise_x, noise_y : float
        Standard deviation of a point in each; only their ratio counts, and 0 for x is
        ordinary regression of y. [those units]
    slope : float, optional
        Held fixed, so that only the intercept is fitted. [unit of y over unit of x]
    long_run : float
        Variance of a mean of many points over that of independent ones, where it is known
        to be above 1; the residuals may show still more.

    Returns
    -------
    Line
        The line and its covariance, which is that of the points about it, blown up
        where neighbouring residuals are alike.

    Raises
    ------
    InvalidArgument
        If there are fewer than 3 points, they differ in number, all share one x, or
        a value is infinite.

    References
    ----------
    .. [1] Deming, Statistical Adjustment of Data, Wiley 1943 (line with errors in both).
    .. [2] Huber, Ann. Math. Statist. 35 (1964) 73-101, doi:10.1214/aoms/1177703732.
    .. [3] JCGM 101:2008, 6.4.9.4: standard uncertainty of a scaled and shifted t.
    """
    a, b = finite("x", x), finite("y", y)
    if a.shape != b.shape or a.size < 3:
        message = f"x and y must be 3 points or more in pairs (shapes {a.shape} and {b.shape})"
        raise InvalidArgument(message)
    if float(np.ptp(a)) == 0.0:
        message = f"x must not be the same for all points (it is {a[0]:g})"
        raise InvalidArgument(message)
    not_negative("noise_x", noise_x), not_negative("noise_y", noise_y)
    ratio = (noise_x / noise_y) ** 2 if noise_y > 0.0 else 0.0  # 1 / delta
    weight = np.ones_like(a)
    before = np.nan
    line = (0.0, 0.0)
    for _ in range(_ROUNDS):
        line = _weighted(a, b, weight, ratio, slope)
        residual = b - line[0] - line[1] * a
        scale = _TO_SD * float(np.median(np.abs(residual)))
        if scale == 0.0 or abs(line[1] - before) <= _STILL * abs(line[1]):
            break
        before = line[1] if slope is None else before
        weight = _FULL_WEIGHT / np.maximum(np.abs(residual) / scale, _FULL_WEIGHT)
    residual = b - line[0] - line[1] * a
    variance_ratio = max(long_run, long_run_ratio(residual))
    found = _with_covariance(a, residual, weight, line, noise_x, slope is None)
    return replace(found, covariance=found.covariance * variance_ratio)


def _weighted(
    x: FloatArray, y: FloatArray, weight: FloatArray, ratio: float, slope: float | None
) -> tuple[float, float]:
    """Intercept and slope for given weights."""
    total = weight.sum()
    mean_x, mean_y = float(weight @ x / total), float(weight @ y / total)
    if slope is None:
        dx, dy = x - mean_x, y - mean_y
        xx, yy, xy = weight @ dx**2, weight @ dy**2, weight @ (dx * dy)
        d = xx - yy * ratio
        reach = float(d + np.sqrt(d**2 + 4.0 * xy**2 * ratio))
        slope = float(2.0 * xy) / reach if reach > 0.0 else 0.0
    return mean_y - slope * mean_x, slope


def _with_covariance(
    x: FloatArray,
    residual: FloatArray,
    weight: FloatArray,
    line: tuple[float, float],
    noise_x: float,
    both: bool,
) -> Line:
    n = x.size
    freedom = n - (2 if both else 1)
    pulled = weight * residual
    inner = float(np.mean(weight == 1.0))  # mean derivative of Huber's function
    variance = float(pulled @ pulled) / max(freedom, 1) / max(inner, 0.5) ** 2
    few = freedom / (freedom - 2.0) if freedom > 4 else 3.0
    size = variance * few
    mean = float(x.mean())
    spread = float(((x - mean) ** 2).sum())
    spread = max(spread - n * noise_x**2, 0.5 * spread)  # of the points without their noise
    of_slope = size / spread if both else 0.0
    covariance = np.array(
        [
            [size / n + mean**2 * of_slope, -mean * of_slope],
            [-mean * of_slope, of_slope],
        ]
    )
    return Line(line[0], line[1], covariance, float(np.sqrt(variance)), n)
