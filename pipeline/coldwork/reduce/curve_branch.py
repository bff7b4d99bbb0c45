"""The part of a curve that is reduced: from the start to the break, without unloading loops."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve_points import Points
from coldwork.statistics.noise import noise_of

__all__ = ["LOOP_DROP", "Branch", "Loop", "find_branch", "moving_mean"]

FloatArray = NDArray[np.float64]

LOOP_DROP: Final = 0.05  # of R_m: a fall of the stress along the elastic line counts from here
_NOISE_DROP: Final = 8.0  # and from this many times the noise
_SAME: Final = 4.0  # times the noise: two stresses this near are one
_ELASTIC: Final = 0.5  # the strain goes back by at least this part of the elastic strain
_BROKEN: Final = 0.5  # of the greatest stress; below it the coupon has broken
_STEEP: Final = 20.0  # times the usual step past the greatest stress: a break falls by more
_SUDDEN: Final = 6.0  # times the usual one of the steps before: a neck falls ever faster
_BEFORE: Final = 15  # steps; a break takes less than half as many
_SMOOTH: Final = 5  # points of the mean that looks for landmarks


@dataclass(frozen=True)
class Loop:
    """An unloading and reloading, by places in `Points`; `bottom` is the lowest stress."""

    start: int
    bottom: int
    stop: int
    drop: float  # [Pa]


@dataclass(frozen=True)
class Branch:
    """Points from the start to the break, without loops.

    Attributes
    ----------
    place : ndarray of int64, shape (k,)
        Places in `Points`.
    stress, strain : ndarray of float64, shape (k,)
        As in `Points`. [Pa], [1]
    mean, run : ndarray of float64, shape (k,)
        Stress and strain averaged over 5 points about each, for landmarks. [Pa], [1]
    noise_stress, noise_strain : float
        Of one point. [Pa], [1]
    alike : int
        Over how many points the noise is alike, as a filter leaves it.
    long_run : float
        Variance of a mean of many points over that of independent ones.
    lasting : float
        Error of the stress that means do not lose, where it is read in steps. [Pa]
    peak : int
        Place in the branch of the greatest stress (smoothed); in compression its end.
    loops : tuple of Loop
        What was taken out.
    """

    place: NDArray[np.int64]
    stress: FloatArray
    strain: FloatArray
    mean: FloatArray
    run: FloatArray
    noise_stress: float
    noise_strain: float
    alike: int
    long_run: float
    lasting: float
    peak: int
    loops: tuple[Loop, ...]

    def __len__(self) -> int:
        return int(self.place.size)


def moving_mean(series: FloatArray, length: int = _SMOOTH) -> FloatArray:
    """Average `length` points (odd) about each; fewer at the ends. [unit of `series`]."""
    if length <= 1 or series.size < length:
        return series
    half = length // 2
    sums = np.concatenate([[0.0], np.cumsum(series - series[0])])
    mean = np.empty_like(series)
    mean[half : series.size - half] = (sums[length:] - sums[:-length]) / length
    count = np.arange(half + 1, length)
    mean[:half] = sums[count] / count
    mean[series.size - half :] = ((sums[-1] - sums[-1 - count]) / count)[::-1]
    return np.asarray(mean + series[0])


def find_branch(points: Points, stop: int) -> Branch:
    """Find the part of a curve that is reduced.

    Parameters
    ----------
    points : Points
        The whole curve.
    stop : int
        Place up to which the strain can be trusted.

    Returns
    -------
    Branch
        The part.
    """
    stress, strain = points.stress[:stop], points.strain[:stop]
    noise_s, noise_e = noise_of(stress), noise_of(strain)
    mean = moving_mean(stress)
    last = (
        _last_before_break(stress, mean)
        if points.sense > 0
        else int(np.argmax(moving_mean(strain)))
    )
    slope = _steepest(mean, strain, last)
    loops = _loops(mean[: last + 1], strain[: last + 1], slope, noise_s.sd)
    keep = np.ones(last + 1, dtype=np.bool_)
    for loop in loops:
        keep[loop.start + 1 : loop.stop] = False
    place = np.flatnonzero(keep)
    kept = mean[place]
    peak = int(np.argmax(kept)) if points.sense > 0 else place.size - 1
    return Branch(
        place=place,
        stress=stress[place],
        strain=strain[place],
        mean=kept,
        run=moving_mean(strain)[place],
        noise_stress=noise_s.sd,
        noise_strain=noise_e.sd,
        alike=max(noise_s.alike, noise_e.alike),
        long_run=max(noise_s.long_run, noise_e.long_run),
        lasting=noise_s.lasting,
        peak=peak,
        loops=loops,
    )


def _last_before_break(stress: FloatArray, mean: FloatArray) -> int:
    """Find the last point before the force is lost for good."""
    peak = int(np.argmax(mean))
    low = np.flatnonzero(stress[peak:] < _BROKEN * mean[peak])
    if low.size == 0:
        return stress.size - 1
    last = peak + int(low[0])
    falls = -np.diff(stress[: last + 1])
    sizes = np.abs(falls)
    typical = max(float(np.median(sizes[peak:])), 1e-300) if last > peak else 0.0
    while last > peak:
        before = sizes[max(last - 1 - _BEFORE, 0) : last - 1]
        usual = float(np.median(before)) if before.size else 0.0
        if falls[last - 1] <= max(_STEEP * typical, _SUDDEN * usual):
            break
        last -= 1
    return last


def _steepest(mean: FloatArray, strain: FloatArray, last: int) -> float:
    """Take the steepest chord between fixed fractions of the greatest stress."""
    top = float(mean[: last + 1].max())
    rising = np.maximum.accumulate(mean[: last + 1])
    levels = np.linspace(0.05, 0.5, 10) * top
    at = np.minimum(np.searchsorted(rising, levels), last)
    run = moving_mean(strain)[at]
    with np.errstate(divide="ignore", invalid="ignore"):
        slopes = np.diff(mean[at]) / np.diff(run)
    usable = slopes[np.isfinite(slopes) & (slopes > 0.0)]
    return float(np.max(usable)) if usable.size else float("inf")


def _loops(mean: FloatArray, strain: FloatArray, slope: float, noise: float) -> tuple[Loop, ...]:
    """Stretches in which the stress falls along the elastic line and comes back."""
    best = np.maximum.accumulate(mean)
    least = max(LOOP_DROP * float(best[-1]), _NOISE_DROP * noise)
    low = mean < best - least
    edges = np.flatnonzero(np.diff(np.concatenate([[False], low, [False]]).astype(np.int8)))
    found: list[Loop] = []
    for first, after in edges.reshape(-1, 2):
        if after >= mean.size:
            continue  # never came back
        level = float(best[first]) - _SAME * noise
        start = int(np.flatnonzero(mean[:first] >= level)[-1])
        bottom = int(first + np.argmin(mean[first:after]))
        drop = float(best[first] - mean[bottom])
        back = float(strain[start] - strain[bottom])
        if back < _ELASTIC * drop / slope:
            continue
        again = np.flatnonzero(mean[after:] >= level)
        stop = int(after + again[0]) if again.size else int(after)
        if found and start < found[-1].stop:
            continue
        found.append(Loop(start, bottom, stop, drop))
    return tuple(found)
