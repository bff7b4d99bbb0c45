"""Points of a flow curve to the flow stress at the stated plastic strain."""

from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.inputs.method import Method
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import ReadingResults, Reduced
from coldwork.reduce.temperatures import reduce_temperatures
from coldwork.reduce.testers import corrected, note_testers
from coldwork.rules import reading as rules
from coldwork.rules.coupon import NO_FLOW_STRESS_AT_STRAIN
from coldwork.statistics.outliers import grubbs_critical

__all__ = ["reduce_flow"]

_Floats = NDArray[np.float64]
_REPEAT: Final = 0.0005 * (1.0 + 1e-9)  # points this near to the stated strain are repeats [1]


def reduce_flow(
    readings: Readings, method: Method, reduced: Reduced, marks: Marks
) -> ReadingResults:
    """Reduce a stretch of flow-stress points; fill the rows of its coupons.

    Points near the stated strain are repeats of one another. Where a coupon has
    none, its stress is interpolated between the neighbours on both sides, and
    never extrapolated.

    Parameters
    ----------
    readings : Readings
        Whole coupons.
    method : Method
        The stated strain, testers.
    reduced : Reduced
        The batch's table; the rows of these coupons are written.
    marks : Marks
        Where findings on these readings and their coupons go.

    Returns
    -------
    ReadingResults
        What each point came to; its weight is 0 where the result did not need it.
    """
    strain = readings.column("plastic_strain")
    read = units.to_si(readings.column("flow_stress_mpa"), "MPa")
    stress, tester = corrected(readings, method, read)
    note_testers(readings, method, tester, marks)
    starts = readings.starts
    count = np.diff(np.append(starts, len(readings)))
    rows = readings.coupon[starts]
    near = np.abs(strain - method.plastic_strain) <= _REPEAT
    repeats = np.add.reduceat(near.astype(np.int64), starts)
    weight = _weights(strain, near, repeats, method.plastic_strain, starts, count)
    mean = np.add.reduceat(np.where(weight > 0, weight * stress, 0.0), starts)
    total = np.add.reduceat(weight, starts)
    mean = np.where(total > 0.5, mean, np.nan)  # weights sum to 1, or there are none
    deviation = np.where(near, stress - np.repeat(mean, count), 0.0)
    with np.errstate(invalid="ignore", divide="ignore"):
        sd = np.sqrt(np.add.reduceat(deviation**2, starts) / (repeats - 1))
        sd = np.where(repeats > 1, sd, np.nan)
        effective = mean**2 / np.add.reduceat((weight * stress) ** 2, starts)
        effective = np.where(repeats > 0, repeats, effective)
        critical = np.repeat(grubbs_critical(repeats), count)
        distance = np.abs(deviation) / np.repeat(sd, count)
    marks.note(rules.OUTLYING_READING, near & (distance > critical), distance, critical)
    reduced.used[rows] = count
    reduced.repeats[rows] = repeats
    reduced.effective[rows] = effective
    reduced.sd[rows] = sd
    reduced.mean[rows] = mean
    for i, share in enumerate(reduced.shares.values()):
        part = np.where(tester == i, weight * stress, 0.0)
        share[rows] = np.add.reduceat(part, starts) / mean
    reduce_temperatures(readings, method, reduced, marks)
    missing = rows[np.isnan(mean)]
    if missing.size:
        marks.note_coupons(NO_FLOW_STRESS_AT_STRAIN, missing, limit=method.plastic_strain)
    blank = np.full(len(readings), np.nan)
    return ReadingResults(
        scale=np.full(len(readings), -1, dtype=np.int8),
        force=blank,
        mean_diagonal=blank,
        strength=stress,
        plastic_strain=strain,
        weight=weight,
        marks=marks.bits,
    )


def _weights(
    strain: _Floats,
    near: NDArray[np.bool_],
    repeats: NDArray[np.int64],
    target: float,
    starts: NDArray[np.intp],
    count: NDArray[np.intp],
) -> _Floats:
    """Share of each point in its coupon's flow stress; all zero where there is none."""
    low = np.maximum.reduceat(np.where(strain < target, strain, -np.inf), starts)
    high = np.minimum.reduceat(np.where(strain > target, strain, np.inf), starts)
    low_point, high_point = strain == np.repeat(low, count), strain == np.repeat(high, count)
    with np.errstate(invalid="ignore", divide="ignore"):
        step = (target - low) / (high - low)  # NaN or 0 / infinite where a side is missing
        per_low = (1.0 - step) / np.add.reduceat(low_point.astype(float), starts)
        per_high = step / np.add.reduceat(high_point.astype(float), starts)
    between = np.isfinite(low) & np.isfinite(high) & (repeats == 0)
    weight = np.where(low_point, np.repeat(np.where(between, per_low, 0.0), count), 0.0)
    weight = np.where(high_point, np.repeat(np.where(between, per_high, 0.0), count), weight)
    with np.errstate(divide="ignore"):
        shared = np.repeat(np.where(repeats > 0, 1.0 / repeats, 0.0), count)
    return np.where(near, shared, weight)
