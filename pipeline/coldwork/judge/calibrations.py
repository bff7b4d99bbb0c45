"""Coupons that lie outside the range of a calibration that they are worked with."""

from collections.abc import Mapping, Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.inputs.calibration import Calibration
from coldwork.rules.coupon import OUTSIDE_CALIBRATION
from coldwork.rules.findings import Findings
from coldwork.rules.forces import SECTIONS

__all__ = ["judge_ranges"]

_SLACK: Final = 1e-9  # of the range: a coupon that was itself a point may differ in rounding [1]


def judge_ranges(
    findings: Findings,
    calibrations: Sequence[Calibration],
    coupon: NDArray[np.int64] | NDArray[np.int32],
    values: Mapping[str, NDArray[np.float64]],
    scale: NDArray[np.int8],
) -> None:
    """Find coupons outside the range of a calibration.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    calibrations : sequence of Calibration
        Those of the method.
    coupon : ndarray of int, shape (n,)
        Index of each coupon in the batch.
    values : mapping of str to ndarray of float64, shape (n,)
        By column, NaN where a coupon has no value. [the column's unit]
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK, -1 where there is none: a calibration of one hardness scale looks
        at coupons of that scale alone.
    """
    for found in calibrations:
        if found.quantity not in values:
            continue
        place = (values[found.quantity] - found.low) / (found.high - found.low)
        if found.quantity == "hardness":
            section = found.parameters[0].key.rpartition(".")[0]
            place = np.where(scale == SECTIONS.index(section), place, np.nan)
        rows = np.flatnonzero((place < -_SLACK) | (place > 1.0 + _SLACK))
        findings.add(
            OUTSIDE_CALIBRATION,
            coupon[rows],
            value=place[rows],
            detail=f"calibration {found.id} holds for {found.quantity} from {found.low:.6g} to"
            f" {found.high:.6g}",
        )
