"""Nominal test forces of the hardness scales, and how a scale is written.

Scales are coded 0 for HV, 1 for HBW, 2 for HK.
"""

from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import units
from coldwork.rules.rule import Fired

__all__ = [
    "FORCE_TOLERANCE",
    "HBW",
    "HK",
    "HV",
    "SCALES",
    "SECTIONS",
    "force_labels",
    "force_not_nominal",
    "nominal_force",
]

FloatArray = NDArray[np.float64]

SCALES: Final = ("HV", "HBW", "HK")
SECTIONS: Final = ("indentation", "indentation.HBW", "indentation.HK")
"""Where the sheet holds the constants of each scale."""
HV: Final = 0
HBW: Final = 1
HK: Final = 2

FORCE_TOLERANCE: Final = 0.01  # of a test force against its nominal value [1]

# ISO 6507-1:2018 and ISO 4545-1:2017, tables of test forces, in kgf (from memory; the
# forces from HV0.1 on agree with those that ISO 6507-1 prints in newton to four figures).
_VICKERS_KGF: Final = np.array(
    [
        *(0.001, 0.002, 0.003, 0.005, 0.01, 0.015, 0.02, 0.025, 0.05, 0.1, 0.2, 0.3, 0.5),
        *(1.0, 2.0, 3.0, 5.0, 10.0, 20.0, 30.0, 50.0, 100.0),
    ]
)
_KNOOP_KGF: Final = np.array(
    [0.001, 0.002, 0.005, 0.01, 0.02, 0.025, 0.05, 0.1, 0.2, 0.3, 0.5, 1.0, 2.0]
)
# ISO 6506-1: 0.102 F / D^2 in N/mm2, that is kgf/mm2 (from memory).
_BRINELL_KGF_PER_MM2: Final = np.array([1.0, 2.5, 5.0, 10.0, 15.0, 30.0])

_SNAP: Final = 0.05  # a force this near to a nominal one is meant to be it [1]


def nominal_force(scale: NDArray[np.int8], force: FloatArray, ball: FloatArray) -> FloatArray:
    """Give the force that a test was meant to have.

    The nearest one of the scale's table where that is within 5 %: whether it is
    within tolerance is `force_not_nominal`'s to say, and a force of 97 N is still
    a bad HV10 rather than a force of its own. Elsewhere the force rounded to two
    figures of kgf, so that coupons of one odd force stay one group.

    Parameters
    ----------
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK.
    force : ndarray of float64, shape (n,)
        Test force. [N]
    ball : ndarray of float64, shape (n,)
        Ball diameter, used where `scale` is HBW. [m]

    Returns
    -------
    ndarray of float64, shape (n,)
        Nominal force, NaN where a needed input is. [N]
    """
    nearest = _nearest(scale, force, ball)
    with np.errstate(invalid="ignore", divide="ignore"):
        near = np.abs(force / nearest - 1.0) <= _SNAP
        kgf = force / units.STANDARD_GRAVITY
        place = 10.0 ** (np.floor(np.log10(kgf)) - 1.0)
        rounded = np.rint(kgf / place) * place * units.STANDARD_GRAVITY
    return np.where(near, nearest, np.where(np.isnan(nearest), np.nan, rounded))


def force_not_nominal(scale: NDArray[np.int8], force: FloatArray, ball: FloatArray) -> Fired:
    """Find forces that differ by more than 1 % from the nearest one of their scale.

    Parameters
    ----------
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK.
    force : ndarray of float64, shape (n,)
        Test force. [N]
    ball : ndarray of float64, shape (n,)
        Ball diameter, used where `scale` is HBW. [m]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        Force over nominal force less 1. [1]
    """
    value = force / _nearest(scale, force, ball) - 1.0
    return np.abs(value) > FORCE_TOLERANCE, value


def force_labels(scale: NDArray[np.int8], nominal: FloatArray, ball: FloatArray) -> pa.StringArray:
    """Write the scale with its force, as in ``HV10``, ``HK0.1``, ``HBW 5/250``.

    Parameters
    ----------
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK; another code gives null.
    nominal : ndarray of float64, shape (n,)
        Nominal force. [N]
    ball : ndarray of float64, shape (n,)
        Ball diameter, used where `scale` is HBW. [m]

    Returns
    -------
    pyarrow.StringArray, length n
        Null where the force, or a ball that is needed, is NaN.
    """
    sized = np.where(scale == HBW, ball, 0.0)
    known = (scale >= 0) & (scale < len(SCALES)) & np.isfinite(nominal) & np.isfinite(sized)
    keys = np.stack([scale[known].astype(np.float64), nominal[known], sized[known]], axis=-1)
    inverse, distinct = _distinct_rows(keys)
    texts = pa.array([_label(int(s), float(f), float(b)) for s, f, b in distinct], pa.string())
    place = np.zeros(scale.shape, dtype=np.int64)
    place[known] = inverse
    return texts.take(pa.array(place, pa.int64(), mask=~known))


def _label(scale: int, force: float, ball: float) -> str:
    kgf = f"{force / units.STANDARD_GRAVITY:.6g}"
    if scale == HBW:
        return f"HBW {float(units.from_si(np.array(ball), 'mm')):.6g}/{kgf}"
    return f"{SCALES[scale]}{kgf}"


def _distinct_rows(keys: FloatArray) -> tuple[NDArray[np.int64], FloatArray]:
    """Give equal rows one number; a batch of one scale and force is not sorted for it."""
    if len(keys) and bool((keys == keys[0]).all()):
        return np.zeros(len(keys), dtype=np.int64), keys[:1]
    distinct, inverse = np.unique(keys, axis=0, return_inverse=True)
    return inverse.reshape(-1).astype(np.int64), distinct


def _nearest(scale: NDArray[np.int8], force: FloatArray, ball: FloatArray) -> FloatArray:
    """Give the force of the scale's table that is nearest in ratio, in newton."""
    if len(force) > 1 and all(_one_value(x) for x in (scale, force, ball)):
        return np.broadcast_to(_nearest(scale[:1], force[:1], ball[:1]), force.shape)
    kgf = force / units.STANDARD_GRAVITY
    square = units.from_si(ball, "mm") ** 2
    with np.errstate(invalid="ignore", divide="ignore"):
        brinell = _nearest_of(_BRINELL_KGF_PER_MM2, kgf / square) * square
    nearest = np.select(
        [scale == HV, scale == HBW, scale == HK],
        [_nearest_of(_VICKERS_KGF, kgf), brinell, _nearest_of(_KNOOP_KGF, kgf)],
        default=np.nan,
    )
    return np.asarray(nearest * units.STANDARD_GRAVITY)


def _one_value(x: NDArray[np.int8] | FloatArray) -> bool:
    """Say whether all values are one, or all are missing; most blocks of a file are such."""
    return bool((x == x[0]).all() or (x != x).all())


def _nearest_of(table: FloatArray, value: FloatArray) -> FloatArray:
    middles = np.sqrt(table[1:] * table[:-1])
    nearest = table[np.searchsorted(middles, value)]
    return np.where(np.isnan(value), np.nan, nearest)
