"""Distances of indents from edges, from each other, and through the coupon."""

from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.rules.forces import HBW, HK, HV
from coldwork.rules.rule import Fired

__all__ = ["centres_too_near", "edge_too_near", "least_thickness_ratio", "too_thin"]

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64] | NDArray[np.int32]

_VICKERS_RATIO: Final = 1.5  # thickness over diagonal, ISO 6507-1 [1]
_BRINELL_DEPTHS: Final = 8.0  # thickness over depth of the indent, ISO 6506-1 (from memory) [1]
_KNOOP_RATIO: Final = 1.0 / 3.0  # thickness over long diagonal: ten depths, common practice [1]


def edge_too_near(edge: FloatArray, diagonal: FloatArray, ratio: float) -> Fired:
    """Find indents whose centre is too close to an edge.

    Parameters
    ----------
    edge : ndarray of float64, shape (n,)
        Distance of the centre to the nearest edge, NaN where it is not known. [m]
    diagonal : ndarray of float64, shape (n,)
        Mean diagonal or diameter; for Knoop the long one, which is on the safe side. [m]
    ratio : float
        Least distance in diagonals: 2.5, light metals 3. [1]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        Distance over diagonal. [1]
    """
    value = edge / diagonal
    return value < ratio * (1.0 - 1e-9), value


def centres_too_near(
    x: FloatArray, y: FloatArray, diagonal: FloatArray, coupon: IntArray, ratio: float
) -> Fired:
    """Find indents whose centre is too close to that of another on the same coupon.

    Centres are sorted along the longer side of their coupon's field and compared with
    the next, the one after, and so on, until all that follow are too far away along
    that side alone: n times a few steps, for maps of many thousand indents too.

    Parameters
    ----------
    x, y : ndarray of float64, shape (n,)
        Centre on the coupon, NaN where it is not known. [m]
    diagonal : ndarray of float64, shape (n,)
        Mean diagonal or diameter. [m]
    coupon : ndarray of int, shape (n,)
        Index of the coupon, in any order.
    ratio : float
        Least distance in diagonals: 3, light metals 6. [1]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        Distance over the larger of the two diagonals, the least over the coupon's other
        indents; NaN where the rule does not fire. [1]
    """
    least = np.full(x.shape, np.inf)
    here = np.flatnonzero(np.isfinite(x) & np.isfinite(y) & np.isfinite(diagonal))
    if here.size > 1:
        least[here] = _least_spacing(x[here], y[here], diagonal[here], coupon[here], ratio)
    fired = least < ratio * (1.0 - 1e-9)
    return fired, np.where(fired, least, np.nan)


def least_thickness_ratio(
    scale: NDArray[np.int8], diagonal: FloatArray, ball: FloatArray
) -> FloatArray:
    r"""Give the least thickness of a coupon in diagonals of its indents.

    For Vickers 1.5, for Brinell eight depths of the cap,
    :math:`8 h / d` with :math:`h = (D - \sqrt{D^2 - d^2}) / 2`, for Knoop a third.

    Parameters
    ----------
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK.
    diagonal : ndarray of float64, shape (n,)
        Mean diagonal or diameter; for Knoop the long one. [m]
    ball : ndarray of float64, shape (n,)
        Ball diameter, used where `scale` is HBW. [m]

    Returns
    -------
    ndarray of float64, shape (n,)
        Least thickness over diagonal, NaN where it is not known. [1]
    """
    with np.errstate(invalid="ignore", divide="ignore"):
        depth = 0.5 * (ball - np.sqrt(ball**2 - diagonal**2))
        brinell = _BRINELL_DEPTHS * depth / diagonal
    ratio = np.select(
        [scale == HV, scale == HBW, scale == HK],
        [_VICKERS_RATIO, brinell, _KNOOP_RATIO],
        default=np.nan,
    )
    return np.asarray(ratio, dtype=np.float64)


def too_thin(thickness: FloatArray, diagonal: FloatArray, least_ratio: FloatArray) -> Fired:
    """Find coupons that are too thin for their indents.

    Parameters
    ----------
    thickness : ndarray of float64, shape (n,)
        Thickness of the coupon, NaN where it is not known. [m]
    diagonal : ndarray of float64, shape (n,)
        Mean diagonal of its indents. [m]
    least_ratio : ndarray of float64, shape (n,)
        What `least_thickness_ratio` gives: the limit. [1]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        Thickness over diagonal. [1]
    """
    value = thickness / diagonal
    return value < least_ratio * (1.0 - 1e-9), value


def _least_spacing(
    x: FloatArray, y: FloatArray, diagonal: FloatArray, coupon: IntArray, ratio: float
) -> FloatArray:
    """Give the least spacing in diagonals, infinite where no other indent is in reach."""
    along, across, order = _sorted_along(x, y, coupon)
    group, size = coupon[order], diagonal[order]
    again = np.zeros(x.size, dtype=np.bool_)  # at the very place of the one before it
    again[1:] = (np.diff(along) == 0.0) & (np.diff(across) == 0.0) & (group[1:] == group[:-1])
    places = np.flatnonzero(~again)
    least = _sweep(
        along[places],
        across[places],
        np.maximum.reduceat(size, places),
        group[places],
        ratio,
    )
    counts = np.diff(np.r_[places, x.size])
    result = np.empty(x.shape)
    result[order] = np.repeat(np.where(counts > 1, 0.0, least), counts)
    return result


def _sweep(
    along: FloatArray, across: FloatArray, size: FloatArray, group: IntArray, ratio: float
) -> FloatArray:
    """Compare places that are sorted by group and along one side, step by step."""
    reach = ratio * _group_largest(size, group)
    least = np.full(along.shape, np.inf)
    first = np.arange(along.size)  # those that a later one may still be near to
    lag = 1
    while first.size:
        first = first[first + lag < along.size]
        other = first + lag
        gap = along[other] - along[first]
        first = first[(group[other] == group[first]) & (gap <= reach[first])]
        other = first + lag
        distance = np.hypot(along[other] - along[first], across[other] - across[first])
        spacing = distance / np.maximum(size[first], size[other])
        least[first] = np.minimum(least[first], spacing)
        least[other] = np.minimum(least[other], spacing)
        lag += 1
    return least


def _sorted_along(
    x: FloatArray, y: FloatArray, coupon: IntArray
) -> tuple[FloatArray, FloatArray, NDArray[np.intp]]:
    """Sort by coupon, then along the longer side of each coupon's field."""
    by_coupon = np.argsort(coupon, kind="stable")
    group = coupon[by_coupon]
    starts, counts = _runs(group)
    sides = [
        np.maximum.reduceat(v, starts) - np.minimum.reduceat(v, starts)
        for v in (x[by_coupon], y[by_coupon])
    ]
    wide = np.repeat(sides[0] >= sides[1], counts)
    along = np.where(wide, x[by_coupon], y[by_coupon])
    across = np.where(wide, y[by_coupon], x[by_coupon])
    inner = np.lexsort((across, along, group))
    return along[inner], across[inner], by_coupon[inner]


def _group_largest(size: FloatArray, group: IntArray) -> FloatArray:
    starts, counts = _runs(group)
    return np.repeat(np.maximum.reduceat(size, starts), counts)


def _runs(group: IntArray) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Give where each run of equal values starts, and how long it is."""
    starts = np.flatnonzero(np.r_[True, group[1:] != group[:-1]])
    return starts, np.diff(np.r_[starts, group.size])
