"""How noisy a series of points is, read off the series itself."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.guards import finite

__all__ = ["Noise", "long_run_ratio", "noise_of", "point_noise", "quiet_noise", "roughness"]

_KEPT: Final = 0.95  # of the differences, the smallest; jumps and corners are in the rest [1]
_SHARE: Final = 0.7588416  # of the variance of a normal that its inner 95 % carry [1]
_WEIGHTS: Final = 20.0  # 1 + 9 + 9 + 1: variance of a third difference over that of a point [1]
_REPEATS: Final = 0.1  # share of equal neighbours from which the steps of the reading show [1]
_GROWS: Final = 1.15  # factor by which the estimate may rise when the lag is doubled
_LONGEST: Final = 32  # lag that is tried, and its double
_ROOM: Final = 20  # lags that a series must hold
_STRETCHES: Final = 16  # that `quiet_noise` looks at
_STRETCH: Final = 50  # points that each must hold
_BATCHES: Final = 20  # stretches that `long_run_ratio` compares
_SIGNIFICANT: Final = 1.6  # chi-squared over its 19 degrees of freedom exceeds it in 5 % [1]


@dataclass(frozen=True)
class Noise:
    """The noise of a series.

    Attributes
    ----------
    sd : float
        Standard deviation of one point. [unit of the series]
    alike : int
        Over how many points the noise is alike, as a filter leaves it; 1 where every point
        has noise of its own.
    long_run : float
        Variance of a mean of many points over what it would be if they were independent.
    lasting : float
        Part of the standard deviation that a mean does not lose: what the steps of the
        reading leave while the series stands within one of them, and noise too small to
        carry it over their edges. [unit of the series]
    """

    sd: float
    alike: int = 1
    long_run: float = 1.0
    lasting: float = 0.0


def noise_of(series: ArrayLike) -> Noise:
    r"""Estimate the noise about the smooth course of a series.

    From third differences over a lag d, in which a course that is smooth over 3 d points
    leaves nothing; the largest 5 % are left out, so that corners and jumps do not count.

    .. math:: s_d^2 = \overline{(y_{i+3d} - 3 y_{i+2d} + 3 y_{i+d} - y_i)^2} / 20

    The noise of a filter's output shows only from a lag that is longer than its memory:
    the lag is doubled until the estimate no longer grows. Where it never stops growing
    it is the course that is seen, and lag 1 counts.

    Parameters
    ----------
    series : array_like, shape (n,)
        Points in their order. [any unit]

    Returns
    -------
    Noise
        Where the reading moves in steps, the standard deviation is at least the step over
        root 12; 0 for fewer than 8 points.

    Raises
    ------
    InvalidArgument
        If a point is infinite.

    References
    ----------
    Gasser, Sroka and Jennen-Steinmetz, Biometrika 73 (1986) 625-633,
    doi:10.2307/2336527 (idea, second differences); Herrmann, Gasser and Kneip, Biometrika
    79 (1992) 783-795, doi:10.1093/biomet/79.4.783 (correlated noise, by lags);
    step / sqrt(12): JCGM 100:2008, F.2.2.1. What lasts is the first harmonic of a
    quantiser's error under normal noise: Widrow and Kollar, Quantization Noise, Cambridge
    2008 (from memory).
    """
    y = finite("series", series)
    y = y[np.isfinite(y)]
    if y.size < 8:
        return Noise(0.0)
    alike, sd = _plateau(y)
    long_run = 1.0
    length = alike * int(np.clip(y.size // (16 * alike), 4, 8))
    if alike > 1 and sd > 0.0:
        means = y[: y.size // length * length].reshape(-1, length).mean(axis=1)
        ratio = length * (_third(means, 1) / sd) ** 2
        long_run = float(np.clip(ratio, 1.0, length))  # no mean scatters more than a point
    steps = np.abs(np.diff(y))
    if not steps.any() or np.mean(steps == 0.0) <= _REPEATS:
        return Noise(sd, alike, long_run)
    step = float(steps[steps > 0.0].min())
    sd = max(sd, step / np.sqrt(12.0))
    rest = sd**2 / step**2 - 1.0 / 12.0  # of the noise before it was read in steps
    lasting = step / (np.pi * np.sqrt(2.0)) * float(np.exp(-2.0 * np.pi**2 * rest))
    return Noise(sd, alike, long_run, lasting)


def point_noise(series: ArrayLike) -> float:
    """Estimate the standard deviation of one point [unit of `series`], as `noise_of` does.

    Parameters
    ----------
    series : array_like, shape (n,)
        Points in their order. [any unit]

    Returns
    -------
    float
        Standard deviation. [unit of `series`]

    Raises
    ------
    InvalidArgument
        If a point is infinite.
    """
    return noise_of(series).sd


def quiet_noise(series: ArrayLike) -> float:
    """Estimate the noise [unit of `series`] of the quieter stretches of a series.

    The lower quartile of `noise_of` over 16 stretches, so that what disturbs the others,
    such as serrations, does not count as noise; `noise_of` itself for fewer than 800 points.

    Parameters
    ----------
    series : array_like, shape (n,)
        Points in their order. [any unit]

    Returns
    -------
    float
        Standard deviation of a point. [unit of `series`]

    Raises
    ------
    InvalidArgument
        If a point is infinite.
    """
    y = finite("series", series)
    if y.size < _STRETCHES * _STRETCH:
        return noise_of(y).sd
    return float(np.quantile([noise_of(part).sd for part in np.array_split(y, _STRETCHES)], 0.25))


def roughness(series: NDArray[np.float64]) -> float:
    """Estimate the noise [unit of `series`] of points that are independent: lag 1 alone."""
    return _third(series, 1)


def _plateau(y: NDArray[np.float64]) -> tuple[int, float]:
    """Find the lag from which the estimate no longer grows, and the estimate there."""
    first = here = _third(y, 1)
    lag = 1
    while lag <= _LONGEST and _ROOM * 2 * lag < y.size:
        further = _third(y, 2 * lag)
        if further <= _GROWS * here:
            return lag, here
        lag, here = 2 * lag, further
    return 1, first


def _third(y: NDArray[np.float64], lag: int) -> float:
    """Take the standard deviation from third differences over a lag, the largest 5 % left out."""
    d = y[lag:] - y[:-lag]
    d = d[lag:] - d[:-lag]
    squares = (d[lag:] - d[:-lag]) ** 2
    if squares.size == 0:
        return 0.0
    kept = max(1, int(_KEPT * squares.size))
    inner = np.partition(squares, kept - 1)[:kept]
    return float(np.sqrt(inner.mean() / (_WEIGHTS * _SHARE)))


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
