"""What would settle an undecided coupon: how many more readings, or that none would.

More readings make one part of u smaller: their own scatter. The k at which the interval's end
meets the limit goes with 1 / u, so that the u which would decide is known from today's k.
"""

from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray
from scipy.special import ndtri, stdtrit

from coldwork.inputs.method import Limit
from coldwork.judge.evidence import UNDECIDED, Evidence

__all__ = ["Averaging", "more_readings", "settling_texts"]

_MOST: Final = 1000  # more readings that are counted; beyond that it is only said [1]
_NORMAL_FROM: Final = 1e8  # degrees of freedom from which Student's k is the normal one [1]
_NONE: Final = -1.0

_Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Averaging:
    """What the readings of n coupons do to one quantity; arrays of shape (n,).

    Attributes
    ----------
    count : ndarray
        Readings that are averaged. [1]
    u : ndarray
        Part of the quantity's u that goes with 1 over the root of `count`; NaN where this is not
        how it comes about. [limit's unit]
    least : ndarray
        What that part does not fall below. [limit's unit]
    degrees_of_freedom : ndarray
        Effective, of the quantity. [1]
    """

    count: _Floats
    u: _Floats
    least: _Floats
    degrees_of_freedom: _Floats


def more_readings(
    limit: Limit, evidence: Evidence, code: NDArray[np.int8], averaging: Averaging
) -> _Floats:
    r"""Compute how many more readings would decide, if the value stays where it is.

    .. math:: u_{need} = u\, k / k_{need}, \qquad
        N = n\, u_r^2 / (u_{need}^2 - (u^2 - u_r^2))

    Parameters
    ----------
    limit : Limit
        The limit.
    evidence : Evidence
        What it was held against, n coupons.
    code : ndarray of int8, shape (n,)
        The decisions.
    averaging : Averaging
        What readings do to u.

    Returns
    -------
    ndarray of float64, shape (n,)
        N less the readings there are, a whole number; -1 where no number of them would; NaN where
        the coupon is decided or this is not known. [1]
    """
    found = np.full(code.shape, np.nan)
    asked = (code == UNDECIDED) & ~evidence.blocked & np.isfinite(averaging.u)
    asked &= np.isfinite(evidence.value) & (evidence.u > 0.0)
    rows = np.flatnonzero(asked)
    if not rows.size:
        return found
    need = _ratio(limit, evidence, averaging, rows) ** 2 * evidence.u[rows] ** 2
    part = averaging.u[rows] ** 2
    least = np.minimum(averaging.least[rows] ** 2, part)
    room = need - np.maximum(evidence.u[rows] ** 2 - part, 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        total = np.ceil(averaging.count[rows] * part / room)
    possible = (room > 0.0) & (room >= least)
    more = np.maximum(total - averaging.count[rows], 1.0)
    more = np.where(possible & (part > least), np.ceil(more), _NONE)
    found[rows] = np.where(np.isnan(need), np.nan, more)
    return found


def settling_texts(more: _Floats) -> pa.StringArray:
    """Write what would settle each coupon; null where there is nothing to say.

    Parameters
    ----------
    more : ndarray of float64, shape (n,)
        From `more_readings`. [1]

    Returns
    -------
    pyarrow.StringArray, length n
    """
    return pa.array([_text(x) for x in more.tolist()], pa.string())


def _text(more: float) -> str | None:
    if np.isnan(more):
        return None
    if more == _NONE:
        return "no number of readings"
    if more > _MOST:
        return f"more than {_MOST} more readings"
    return "1 more reading" if more == 1.0 else f"{more:.0f} more readings"


def _ratio(
    limit: Limit, evidence: Evidence, averaging: Averaging, rows: NDArray[np.intp]
) -> _Floats:
    """Give the u that would decide over the u that there is; NaN where it is not known."""
    if limit.rule == "simple":
        most = 0.0 if limit.max_relative_u is None else limit.max_relative_u
        return np.asarray(most * np.abs(evidence.value[rows]) / evidence.u[rows])
    needed = evidence.coverage if limit.rule == "guarded" else limit.at_least or 1.0
    freedom = averaging.degrees_of_freedom[rows]
    inside, outside = np.full(rows.shape, np.inf), np.full(rows.shape, -np.inf)
    for end, above, sign in (
        (limit.lower, evidence.above_lower, 1.0),
        (limit.upper, evidence.above_upper, -1.0),
    ):
        if end is not None:
            k = sign * _k(above[rows], freedom)  # how far on the good side of this limit
            inside, outside = np.minimum(inside, k), np.maximum(outside, -k)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(np.maximum(inside, outside) / _k(np.full(rows.shape, needed), freedom))


def _k(probability: _Floats, freedom: _Floats) -> _Floats:
    """Give Student's k, coupon by coupon."""
    normal = ~(freedom < _NORMAL_FROM)
    held = np.where(normal, 1.0, np.maximum(freedom, 1.0))
    return np.where(normal, ndtri(probability), stdtrit(held, probability))
