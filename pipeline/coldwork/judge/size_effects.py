"""Rules about the size effect of small indents, where one is taken out."""

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.inputs.method import Laws
from coldwork.rules import coupon as rules
from coldwork.rules.findings import Findings
from coldwork.rules.forces import HV

__all__ = ["judge_size_effects"]


def judge_size_effects(
    findings: Findings,
    laws: Laws,
    coupon: NDArray[np.int64],
    scale: NDArray[np.int8],
    line: NDArray[np.int64],
    hardness: tuple[NDArray[np.float64], NDArray[np.float64]],
) -> None:
    """Find coupons whose size effect is not known, or is more than there can be.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    laws : Laws
        Say whether there is a size effect, and where it comes from.
    coupon : ndarray of int, shape (n,)
        Index of each coupon in the batch.
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK, -1 where there is none.
    line : ndarray of int64, shape (n,)
        Which fitted size effect is the coupon's, -1 where there is none.
    hardness : tuple of ndarray, shape (n,)
        As read, and without the effect; NaN where there is none. [Pa]
    """
    if laws.size_effect == "none":
        return
    read, bulk = hardness
    unfitted = (scale == HV) & (line < 0) & np.isfinite(read) & (laws.size_effect == "fitted")
    findings.add(rules.SIZE_EFFECT_UNFITTED, coupon[unfitted])
    gone = (scale == HV) & np.isfinite(read) & np.isnan(bulk) & ~unfitted
    value = units.from_si(read[gone], "kgf/mm2")
    findings.add(rules.SIZE_EFFECT_TOO_LARGE, coupon[gone], value=value)
