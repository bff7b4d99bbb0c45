"""How noisy a series of points is, read off the series itself."""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.guards import finite

__all__ = ["long_run_ratio", "point_noise"]

_KEPT: Final = 0.95  # of the differences, the smallest; jumps and corners are in the rest [1]
_SHARE: Final = 0.7588416  # of the variance of a normal that its inner 95 % carry [1]
_WEIGHTS: Final = 20.0  # 1 + 9 + 9 + 1: variance of a third difference over that of a point [1]
_REPEATS: Final = 0.3  # share of equal neighbours from which the steps of the reading show [1]
_BATCHES: Final = 20  # stretches that `long_run_ratio` compares
_SIGNIFICANT: Final = 1.6  # chi-squared over its 19 degrees of freedom exceeds it in 5 % [1]


def point_noise(series: ArrayLike) -> float:
    r"""Estimate the standard deviation of one point about the smooth course of a series.

    From third differences, in which a course that is smooth over four points leaves
    nothing; the largest 5 % are left out, so that corners and jumps do not count.

    .. math:: s^2 = \frac{\overline{(\Delta^3 y)^2}}{20}

    Parameters
    ----------
    series : array_like, shape (n,)
        Points in their order. [any unit]

    Returns
    -------
    float
        Standard deviation; where the reading moves in steps, at least the step over
        root 12; 0 for fewer than 8 points. [unit of `series`]

    Raises
    ------
    InvalidArgument
        If a point is infinite.

    Notes
    -----
    For noise that is independent from point to point. A filtered signal looks better
    than it is: see `long_run_ratio`.

    References
    ----------
    Gasser, Sroka and Jennen-Steinmetz, Biometrika 73 (1986) 625-633,
    doi:10.2307/2336527 (idea, second differences); step / sqrt(12): JCGM 100:2008, F.2.2.1.
    """
    y = finite("series", series)
    y = y[np.isfinite(y)]
    if y.size < 8:
        return 0.0
    squares = np.diff(y, 3) ** 2
    kept = max(1, int(_KEPT * squares.size))
    inner = np.partition(squares, kept - 1)[:kept]
    noise = float(np.sqrt(inner.mean() / (_WEIGHTS * _SHARE)))
    steps = np.abs(np.diff(y))
    if np.mean(steps == 0.0) > _REPEATS and steps.any():
        noise = max(noise, float(steps[steps > 0.0].min()) / np.sqrt(12.0))
    return noise


def long_run_ratio(residuals: ArrayLike) -> float:
    r"""Compute by how much means of residuals scatter more than independent points would.

    .. math:: m\, \mathrm{var}(\bar r) / \mathrm{var}(r)

    over 20 stretches of m points each.

    Parameters
    ----------
    residuals : array_like, shape (n,)
        In the order of the points. [any unit]

    Returns
    -------
    float
        The ratio where it is significant, else 1; 1 for fewer than 100 points. A variance
        estimated as if the points were independent is to be multiplied by it. [1]

    Raises
    ------
    InvalidArgument
        If a residual is infinite.

    References
    ----------
    Method of batch means; Law and Kelton, Simulation Modeling and Analysis (from memory).
    """
    r = finite("residuals", residuals)
    size = r.size // _BATCHES
    if size < 5:
        return 1.0
    batches: NDArray[np.float64] = r[: size * _BATCHES].reshape(_BATCHES, size)
    within = float(batches.var())
    if within == 0.0:
        return 1.0
    ratio = size * float(batches.mean(axis=1).var(ddof=1)) / within
    return ratio if ratio > _SIGNIFICANT else 1.0
