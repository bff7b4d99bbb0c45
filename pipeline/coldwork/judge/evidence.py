"""What a limit is held against, and what came of it."""

from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

__all__ = [
    "CONFORMING",
    "DECISIONS",
    "NONE",
    "NON_CONFORMING",
    "UNDECIDED",
    "Decided",
    "Evidence",
    "decision_texts",
    "severity",
]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

DECISIONS: Final = ("conforming", "non-conforming", "undecided")
CONFORMING: Final = 0
NON_CONFORMING: Final = 1
UNDECIDED: Final = 2
NONE: Final = -1
"""Code of a coupon that no limit applies to."""

_SEVERITY: Final = np.array([1, 3, 2, 0], dtype=np.int8)  # the last one is for NONE, -1


@dataclass(frozen=True)
class Evidence:
    """What is known of one quantity of n coupons, in the unit of the limit.

    Attributes
    ----------
    value : ndarray of float64, shape (n,)
        The quantity, NaN where it does not exist. [limit's unit]
    u : ndarray of float64, shape (n,)
        Standard uncertainty on the limit's basis, NaN where it is not known. [limit's unit]
    lower_bound, upper_bound : ndarray of float64, shape (n,)
        One-sided bounds at `coverage`, NaN where there is none or it is infinite.
        [limit's unit]
    above_lower, above_upper : ndarray of float64, shape (n,)
        Probability that the truth is above the lower and the upper limit, NaN where it is
        not known; not looked at where there is no such limit. [1]
    blocked : ndarray of bool, shape (n,)
        Where an error empties the quantity with its ends: undecided whatever else is known.
    with_indent : ndarray of bool, shape (n,)
        Where the state includes the indent's own strain, which the reason then says.
    coverage : float
        Probability of a one-sided bound. [1]
    unit : str
        Unit as a sentence writes it; ``1`` or nothing where there is none.
    """

    value: FloatArray
    u: FloatArray
    lower_bound: FloatArray
    upper_bound: FloatArray
    above_lower: FloatArray
    above_upper: FloatArray
    blocked: BoolArray
    with_indent: BoolArray
    coverage: float
    unit: str = ""


@dataclass(frozen=True)
class Decided:
    """What one limit says of n coupons.

    Attributes
    ----------
    code : ndarray of int8, shape (n,)
        Place in `DECISIONS`: 0 conforming, 1 non-conforming, 2 undecided.
    probability : ndarray of float64, shape (n,)
        Conformance probability, NaN where it is not known. [1]
    bound : ndarray of float64, shape (n,)
        The one-sided bound that decided, NaN where none did. [limit's unit]
    reason : pyarrow.StringArray, length n
        Why, in one sentence without a stop.
    """

    code: NDArray[np.int8]
    probability: FloatArray
    bound: FloatArray
    reason: pa.StringArray


def decision_texts(code: NDArray[np.int8]) -> pa.StringArray:
    """Write decisions out.

    Parameters
    ----------
    code : ndarray of int8, shape (n,)
        Place in `DECISIONS`, -1 for none.

    Returns
    -------
    pyarrow.StringArray, length n
        Null for none.
    """
    place = pa.array(code.astype(np.int64), pa.int64(), mask=code < 0)
    return pa.array(DECISIONS, pa.string()).take(place)


def severity(code: NDArray[np.int8]) -> NDArray[np.int8]:
    """Rank decisions: 3 non-conforming, 2 undecided, 1 conforming, 0 none.

    Parameters
    ----------
    code : ndarray of int8, shape (n,)
        Place in `DECISIONS`, -1 for none.

    Returns
    -------
    ndarray of int8, shape (n,)
    """
    return _SEVERITY[code]
