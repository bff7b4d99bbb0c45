"""A curve thinned for a picture: per pixel column the ends and the extremes stay.

Numbers never come out of here. A curve of 200,000 points drawn on a panel of a few
hundred pixels looks the same when of every pixel column its first, last, lowest and
highest point are kept: not one extreme is lost.
"""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import CurveResult

__all__ = ["Picture", "picture_of", "thinned"]

FloatArray = NDArray[np.float64]

_COLUMNS: Final = 480  # pixel columns; a panel of three inches has as many [1]
_BEYOND: Final = 2.5  # the part about yield reaches so many times the strain of the proof stress
_LEAST: Final = 0.025  # and this far at least, so that coupons can be drawn alike [1]
_OFFSET: Final = 0.002  # of that proof stress [1]


@dataclass(frozen=True)
class Picture:
    """A curve as it is drawn: engineering, the strain corrected for its toe.

    Attributes
    ----------
    strain, stress : ndarray of float64, shape (k,)
        All of it, thinned. [1], [Pa]
    yield_strain, yield_stress : ndarray of float64, shape (j,)
        The part about yield, thinned for a panel of its own. [1], [Pa]
    """

    strain: FloatArray
    stress: FloatArray
    yield_strain: FloatArray
    yield_stress: FloatArray


def picture_of(result: CurveResult) -> Picture:
    """Thin a curve for its picture.

    Parameters
    ----------
    result : CurveResult
        With all points of the curve.

    Returns
    -------
    Picture
        At most four points of each pixel column.
    """
    strain, stress = result.engineering_strain, result.engineering_stress
    known = np.isfinite(strain) & np.isfinite(stress)
    strain, stress = strain[known], stress[known]
    begin = strain[: _end_of_yield(strain, result)]
    whole, part = thinned(strain, stress), thinned(begin, stress[: begin.size])
    return Picture(strain[whole], stress[whole], strain[part], stress[part])


def thinned(x: FloatArray, y: FloatArray, columns: int = _COLUMNS) -> NDArray[np.intp]:
    """Choose the points that a picture of a curve needs.

    A pixel column holds the points from where the curve first reaches it to where it
    first reaches the next one; a loop back stays in the column where it began, and keeps
    its own extremes along both axes.

    Parameters
    ----------
    x, y : ndarray of float64, shape (n,)
        The curve, without NaN.
    columns : int, optional
        Pixel columns of the picture. [1]

    Returns
    -------
    ndarray of intp, shape (k,)
        Places of the chosen points, rising: of each column the first, the last, and the
        first of those with the least and the greatest `x` and `y`.
    """
    n = x.size
    if n <= 4 * columns:
        return np.arange(n)
    reached = np.maximum.accumulate(x)
    span = reached[-1] - reached[0]
    scale = columns / span if span > 0.0 else 0.0
    column = np.minimum((reached - reached[0]) * scale, columns - 1.0).astype(np.int64)
    starts = np.flatnonzero(np.concatenate([[True], column[1:] != column[:-1]]))
    count = np.diff(np.append(starts, n))
    keep = np.zeros(n, dtype=np.bool_)
    keep[starts] = True
    keep[starts + count - 1] = True
    for values in (x, y):
        for extreme in (np.minimum.reduceat(values, starts), np.maximum.reduceat(values, starts)):
            at = np.flatnonzero(values == np.repeat(extreme, count))
            group = np.searchsorted(starts, at, side="right")
            keep[at[np.concatenate([[True], group[1:] != group[:-1]])]] = True
    return np.flatnonzero(keep)


def _end_of_yield(strain: FloatArray, result: CurveResult) -> int:
    """How many points belong to the part about yield."""
    proof = result.proof.get(_OFFSET)
    if proof is None or result.slope is None:
        return int(strain.size)
    limit = max(_LEAST, _BEYOND * (_OFFSET + proof.value / result.slope.value))
    beyond = np.flatnonzero(strain > limit)
    return int(beyond[0]) if beyond.size else int(strain.size)
