"""A lot's decision: that of its worst coupon."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coldwork.judge.evidence import CONFORMING, NON_CONFORMING, NONE, UNDECIDED, severity

__all__ = ["LotDecision", "lot_decision"]


@dataclass(frozen=True)
class LotDecision:
    """Decisions of m lots, arrays of shape (m,).

    Attributes
    ----------
    code : ndarray of int8
        Place in `DECISIONS`: the gravest among the lot's coupons; -1 where none was decided.
    conforming, non_conforming, undecided : ndarray of int64
        Coupons by decision.
    """

    code: NDArray[np.int8]
    conforming: NDArray[np.int64]
    non_conforming: NDArray[np.int64]
    undecided: NDArray[np.int64]


def lot_decision(
    lot: NDArray[np.int64] | NDArray[np.int32], n_lots: int, code: NDArray[np.int8]
) -> LotDecision:
    """Count the decisions in each lot and take the gravest.

    Parameters
    ----------
    lot : ndarray of int, shape (n,)
        Index of each coupon's lot, from 0 to `n_lots` - 1.
    n_lots : int
        How many lots there are.
    code : ndarray of int8, shape (n,)
        Decision on each coupon, its worst limit's; -1 where it has none.

    Returns
    -------
    LotDecision
    """

    def count(decision: int) -> NDArray[np.int64]:
        return np.bincount(lot[code == decision], minlength=n_lots).astype(np.int64)

    counts = {d: count(d) for d in (NONE, CONFORMING, UNDECIDED, NON_CONFORMING)}
    gravest = np.full(n_lots, NONE, dtype=np.int8)
    for decision in sorted(counts, key=lambda d: int(severity(np.array([d], dtype=np.int8))[0])):
        gravest[counts[decision] > 0] = decision
    return LotDecision(gravest, counts[CONFORMING], counts[NON_CONFORMING], counts[UNDECIDED])
