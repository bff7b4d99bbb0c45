"""How well each coupon's mean is known: scatter pooled over the batch.

The last place where coupons look at one another before the lots. It gives each
coupon the standard uncertainty of its mean, with its degrees of freedom, and
names those whose scatter does not belong with the others' (Cochran's rule for
equal numbers; the F quantile at 1 % over the coupons of the group otherwise).
"""

from dataclasses import dataclass
from math import sqrt
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.formulas.hardness import BRINELL_HARDNESS
from coldwork.inputs.method import Method
from coldwork.reduce.reduced import Reduced
from coldwork.rules.forces import HBW
from coldwork.statistics.pooling import leave_noisy_out

__all__ = ["BASES", "Repeatability", "repeatability"]

_ENOUGH: Final = 10  # readings from which a coupon's own scatter is used


@dataclass(frozen=True)
class Repeatability:
    """Repeatability of each coupon's mean; all arrays of shape (n,).

    Attributes
    ----------
    u : ndarray
        Standard uncertainty of the mean; NaN where there is nothing to judge it by. [Pa]
    degrees_of_freedom : ndarray
        Of `u`. [1]
    relative_s : ndarray
        The coupon's own relative standard deviation, NaN below two repeats. [1]
    group : ndarray of int64
        Coupons that are pooled together bear one number.
    pooled : ndarray
        Relative standard deviation pooled over the coupon's group, NaN where none. [1]
    pooled_freedom : ndarray
        Its degrees of freedom. [1]
    limit : ndarray
        Relative standard deviation above which the coupon leaves the pool, NaN where
        there is no other to compare it with. [1]
    ratio, ratio_limit : ndarray
        The coupon's variance over that of the others of its group, and what it may not
        exceed. [1]
    left : ndarray of bool
        Whether it left.
    basis : ndarray of int8
        0 nothing, 1 own, 2 pooled, 3 stated in the sheet, 4 resolution of the diagonal,
        5 noise of the curve.
    floor : ndarray
        What `u` does not fall below, however many readings there are. [Pa]
    """

    u: NDArray[np.float64]
    degrees_of_freedom: NDArray[np.float64]
    relative_s: NDArray[np.float64]
    group: NDArray[np.int64]
    pooled: NDArray[np.float64]
    pooled_freedom: NDArray[np.float64]
    limit: NDArray[np.float64]
    ratio: NDArray[np.float64]
    ratio_limit: NDArray[np.float64]
    left: NDArray[np.bool_]
    basis: NDArray[np.int8]
    floor: NDArray[np.float64]


BASES: Final = ("nothing", "own", "pooled", "stated", "resolution", "curve")


def repeatability(method: Method, reduced: Reduced, conditions: pa.StringArray) -> Repeatability:
    """Judge the repeatability of every coupon of a batch.

    Parameters
    ----------
    method : Method
        Says whether scatter is pooled, the resolution, and what is stated.
    reduced : Reduced
        The coupons.
    conditions : pyarrow.StringArray of n
        The condition of each coupon.

    Returns
    -------
    Repeatability
        Arrays of shape (n,).
    """
    n = len(reduced)
    if reduced.own_u is not None:
        return _of_curves(reduced.own_u)
    with np.errstate(invalid="ignore", divide="ignore"):
        relative = reduced.sd / np.abs(reduced.mean)
    freedom = np.where(np.isfinite(relative), reduced.repeats - 1.0, 0.0)
    group = _groups(reduced, conditions)
    pooled, pooled_freedom = np.full(n, np.nan), np.zeros(n)
    limit, left = np.full(n, np.nan), np.zeros(n, dtype=bool)
    ratio, ratio_limit = np.full(n, np.nan), np.full(n, np.nan)
    if method.repeatability == "pooled":
        for rows in _members(group):
            outcome = leave_noisy_out(relative[rows] ** 2, freedom[rows])
            pooled[rows] = np.sqrt(outcome.variance)
            pooled_freedom[rows] = outcome.degrees_of_freedom
            with np.errstate(invalid="ignore", divide="ignore"):
                others = np.sqrt(relative[rows] ** 2 / outcome.ratio)
            limit[rows] = others * np.sqrt(outcome.limit)
            left[rows] = outcome.left_out
            ratio[rows], ratio_limit[rows] = outcome.ratio, outcome.limit
    use_pool = (pooled_freedom > 0) & (reduced.repeats < _ENOUGH) & ~left
    stated = method.repeatability_rel
    use_stated = (reduced.repeats < 2) & (stated is not None) & (reduced.used > 0)
    use_pool &= ~use_stated
    use_own = (freedom > 0) & ~use_pool
    s = np.select([use_stated, use_pool, use_own], [stated or 0.0, pooled, relative], np.nan)
    nu = np.select([use_stated, use_pool, use_own], [np.inf, pooled_freedom, freedom], np.nan)
    basis = np.select([use_stated, use_pool, use_own], [3, 2, 1], 0).astype(np.int8)
    with np.errstate(invalid="ignore", divide="ignore"):
        u = s * np.abs(reduced.mean) / np.sqrt(reduced.effective)
    floor = _resolution_floor(method, reduced)
    coarse = np.isfinite(u) & (floor > u)
    return Repeatability(
        u=np.where(coarse, floor, u),
        degrees_of_freedom=np.where(coarse, np.inf, nu),
        relative_s=relative,
        group=group,
        pooled=pooled,
        pooled_freedom=pooled_freedom,
        limit=limit,
        ratio=ratio,
        ratio_limit=ratio_limit,
        left=left,
        basis=np.where(coarse, np.int8(4), basis),
        floor=floor,
    )


def _of_curves(u: NDArray[np.float64]) -> Repeatability:
    """Take the noise of each coupon's own curve; there is nothing to pool."""
    n, known = len(u), np.isfinite(u)
    blank, nothing = np.full(n, np.nan), np.zeros(n)
    return Repeatability(
        u=u,
        degrees_of_freedom=np.where(known, np.inf, np.nan),
        relative_s=blank,
        group=np.arange(n, dtype=np.int64),
        pooled=blank,
        pooled_freedom=nothing,
        limit=blank,
        ratio=blank,
        ratio_limit=blank,
        left=np.zeros(n, dtype=bool),
        basis=np.where(known, 5, 0).astype(np.int8),
        floor=u,
    )


def _groups(reduced: Reduced, conditions: pa.StringArray) -> NDArray[np.int64]:
    """Give one number to coupons of one scale, nominal force, ball and condition."""
    codes = conditions.dictionary_encode().indices.to_numpy(zero_copy_only=False)
    group = np.asarray(codes, dtype=np.int64)
    for key in (reduced.scale, reduced.force, reduced.ball):
        _, number = np.unique(key, return_inverse=True, equal_nan=True)
        if number.size and number.max() > 0:
            group = np.unique(group * (int(number.max()) + 1) + number, return_inverse=True)[1]
    return group.astype(np.int64)


def _members(group: NDArray[np.int64]) -> list[NDArray[np.intp]]:
    if not group.size:
        return []
    order = np.argsort(group, kind="stable")
    return np.split(order, np.flatnonzero(np.diff(group[order])) + 1)


def _resolution_floor(method: Method, reduced: Reduced) -> NDArray[np.float64]:
    """Give the least u of the mean, in Pa: resolution / sqrt(12) of the mean diagonal."""
    if method.resolution is None:
        return np.zeros(len(reduced))
    step = method.resolution / sqrt(12.0)
    d = reduced.mean_diagonal
    with np.errstate(invalid="ignore", divide="ignore"):
        floor = 2.0 * reduced.mean / d * step  # hardness goes with 1 / d^2
    balls = np.flatnonzero(reduced.scale == HBW)
    if balls.size:
        slopes = BRINELL_HARDNESS.sensitivities(
            force=reduced.applied_force[balls],
            diameter_1=d[balls],
            diameter_2=d[balls],
            ball=reduced.ball[balls],
        )
        floor[balls] = np.abs(slopes["diameter_1"] + slopes["diameter_2"]) * step
    return np.nan_to_num(floor)
