"""How fast a test ran, and where it changed its speed."""

from itertools import pairwise
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import RateChange
from coldwork.reduce.curve_points import Points

__all__ = ["RATE_CHANGE", "rate_changes"]

FloatArray = NDArray[np.float64]

RATE_CHANGE: Final = 1.5  # factor between two stretches that makes them two
_STRETCHES: Final = 100
_LEAST: Final = 3  # stretches of one rate


def rate_changes(points: Points, last: int, noise: float) -> tuple[RateChange, ...]:
    """Divide a test into stretches of one rate of straining.

    Parameters
    ----------
    points : Points
        The curve.
    last : int
        Place of the break, or of the end.
    noise : float
        Of one strain: a stretch must strain by more than it. [1]

    Returns
    -------
    tuple of RateChange
        In order; empty without time, or where it runs back or stands still throughout.

    References
    ----------
    ISO 6892-1, method A: each rate is to be kept to 20 % (from memory); a change by half is
    more than that.
    """
    if points.time is None or last < 4 * _STRETCHES:
        return ()
    edges = np.linspace(0, last, _STRETCHES + 1).astype(np.int64)
    step = max(2, (last // _STRETCHES) // 8)
    strain = np.array([points.strain[max(k - step, 0) : k + step + 1].mean() for k in edges])
    time = np.array([points.time[max(k - step, 0) : k + step + 1].mean() for k in edges])
    gained, took = np.diff(strain), np.diff(time)
    if not (np.isfinite(took).all() and (took > 0.0).all()):
        return ()
    rate = gained / took
    moving = gained > 8.0 * noise / np.sqrt(step)
    level = np.log(np.where(moving, rate, np.nan))
    cuts = [0, *_corners(level), _STRETCHES]
    found = []
    for first, after in pairwise(cuts):
        inner = rate[first:after][moving[first:after]]
        if inner.size >= _LEAST:
            span = points.index[edges[first]], points.index[edges[after]]
            found.append(RateChange(int(span[0]), int(span[1]), float(np.median(inner))))
    return tuple(found)


def _corners(level: FloatArray) -> list[int]:
    """Where the median of the next few stretches leaves that of the last few for good."""
    found: list[int] = []
    threshold = np.log(RATE_CHANGE)
    begun = 0
    for k in range(_LEAST, level.size - _LEAST):
        before, after = level[max(begun, k - 2 * _LEAST) : k], level[k : k + _LEAST]
        if k - begun < _LEAST or np.isnan(before).all() or np.isnan(after).any():
            continue
        if abs(float(np.median(after)) - float(np.nanmedian(before))) > threshold:
            jumped = np.abs(after - np.nanmedian(before)) > threshold
            found.append(k + int(np.argmax(jumped)))
            begun = found[-1]
    return sorted(set(found))
