"""Indents of whole coupons to mean hardness, with the rules that look at readings."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork import units
from coldwork.formulas.hardness import (
    brinell_diameter,
    brinell_hardness,
    knoop_diagonal,
    knoop_hardness,
    vickers_diagonal,
    vickers_hardness,
)
from coldwork.inputs.method import Method
from coldwork.reduce.force_cells import Indented, join_forces
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import ReadingResults, Reduced
from coldwork.reduce.temperatures import reduce_temperatures
from coldwork.reduce.testers import corrected, note_testers
from coldwork.rules import coupon as coupon_rules
from coldwork.rules import reading as rules
from coldwork.rules.forces import HBW, HK, HV, SCALES, force_not_nominal, nominal_force
from coldwork.rules.spacing import centres_too_near, edge_too_near
from coldwork.statistics.outliers import grubbs_critical

__all__ = ["reduce_indents"]

_Floats = NDArray[np.float64]
_SAME: Final = 1e-9  # two nominal forces, or balls, are one within this [1]


@dataclass(frozen=True)
class _Indents:
    """A stretch of n indents with what each was made with.

    Attributes
    ----------
    readings : Readings
        Whole coupons.
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK.
    force, ball : ndarray, shape (n,)
        Test force and ball diameter, NaN where there is none. [N], [m]
    """

    readings: Readings
    scale: NDArray[np.int8]
    force: _Floats
    ball: _Floats

    def lengths(self, column: str, unit: str = "mm") -> _Floats:
        """Give a column of lengths in metre, NaN where absent; shape (n,)."""
        return units.to_si(self.readings.column(column), unit)


def reduce_indents(
    readings: Readings, method: Method, reduced: Reduced, marks: Marks
) -> ReadingResults:
    """Reduce a stretch of indents; fill the rows of its coupons.

    Parameters
    ----------
    readings : Readings
        Whole coupons.
    method : Method
        Testers and distances.
    reduced : Reduced
        The batch's table; the rows of these coupons are written.
    marks : Marks
        Where findings on these readings and their coupons go.

    Returns
    -------
    ReadingResults
        What each reading came to.
    """
    force = units.to_si(readings.column("force_n"), "N")
    ball = units.to_si(readings.column("ball_mm"), "mm")
    scale = _scale_codes(readings)
    indents = _Indents(readings, scale, force, ball)
    hardness, diagonal = _hardness(indents, marks)
    nominal = nominal_force(scale, force, ball)
    _note_readings(indents, diagonal, method, marks)
    value, tester = corrected(readings, method, hardness)
    note_testers(readings, method, tester, marks)
    starts = readings.starts
    count = np.diff(np.append(starts, len(readings)))
    rows = readings.coupon[starts]
    mean = np.add.reduceat(value, starts) / count
    deviation = value - np.repeat(mean, count)
    with np.errstate(invalid="ignore", divide="ignore"):
        sd = np.sqrt(np.add.reduceat(deviation**2, starts) / (count - 1))
        sd = np.where(count > 1, sd, np.nan)
    reduced.used[rows] = count
    reduced.repeats[rows] = count
    reduced.effective[rows] = count
    reduced.sd[rows] = sd
    reduced.mean[rows] = mean
    reduced.scale[rows] = scale[starts]
    reduced.force[rows] = nominal[starts]
    reduced.ball[rows] = np.where(scale[starts] == HBW, ball[starts], np.nan)
    reduced.mean_diagonal[rows] = np.add.reduceat(diagonal, starts) / count
    reduced.applied_force[rows] = np.add.reduceat(force, starts) / count
    for i, share in enumerate(reduced.shares.values()):
        part = np.where(tester == i, value, 0.0)
        share[rows] = np.add.reduceat(part, starts) / (mean * count)
    weight = np.repeat(1.0 / count, count)
    cell = np.repeat(np.arange(len(starts)), count)
    sized = method.laws.size_effect != "none"
    if sized:
        _join_forces(indents, nominal, value, tester, reduced, (cell, weight))
    _note_outliers(value, cell, marks)
    _refuse_mixtures(indents, nominal, reduced, marks, sized=sized)
    reduce_temperatures(readings, method, reduced, marks)
    return ReadingResults(
        scale=scale,
        force=force,
        mean_diagonal=diagonal,
        strength=value,
        plastic_strain=np.full(len(readings), np.nan),
        weight=weight,
        marks=marks.bits,
    )


def _scale_codes(readings: Readings) -> NDArray[np.int8]:
    text = readings.texts.get("scale")
    if text is None:
        return np.full(len(readings), HV, dtype=np.int8)
    codes = pc.index_in(text, value_set=pa.array(SCALES)).fill_null(HV)
    return codes.to_numpy(zero_copy_only=False).astype(np.int8)


def _hardness(indents: _Indents, marks: Marks) -> tuple[_Floats, _Floats]:
    """Give hardness and mean diagonal of each reading in SI, from diagonals where it has them."""
    scale, force, ball = indents.scale, indents.force, indents.ball
    d1, d2 = indents.lengths("d1_um", "um"), indents.lengths("d2_um", "um")
    given = units.to_si(indents.readings.column("hardness"), "kgf/mm2")
    hardness = np.full(scale.shape, np.nan)
    diagonal = np.full(scale.shape, np.nan)
    for code in np.unique(scale):
        on = scale == code
        whole = bool(on.all())
        rows = slice(None) if whole else np.flatnonzero(on)
        measured, back = _forms(int(code), force[rows], ball[rows])
        h = measured(d1[rows], d2[rows])
        d = d1[rows] if code == HK else (d1[rows] + d2[rows]) / 2.0
        known = np.isfinite(h)
        if not known.all():
            h = np.where(known, h, given[rows])
            d = np.where(known, d, back(h))
        hardness[rows], diagonal[rows] = h, d
    both = np.isfinite(given) & np.isfinite(d1)
    if both.any():
        fired, value = rules.hardness_contradicts(given, hardness)
        marks.note(rules.HARDNESS_CONTRADICTS_DIAGONALS, fired & both, value)
    fired, value = rules.unequal_diagonals(d1, d2)
    marks.note(rules.UNEQUAL_DIAGONALS, fired & (scale != HK), value)
    return hardness, diagonal


def _forms(
    code: int, force: _Floats, ball: _Floats
) -> tuple[Callable[[_Floats, _Floats], _Floats], Callable[[_Floats], _Floats]]:
    """Give the scale's hardness from two lengths, and its mean diagonal from the hardness."""
    if code == HBW:
        return (
            lambda a, b: brinell_hardness(force, a, b, ball),
            lambda h: brinell_diameter(force, h, ball),
        )
    if code == HK:
        return lambda a, _: knoop_hardness(force, a), lambda h: knoop_diagonal(force, h)
    return lambda a, b: vickers_hardness(force, a, b), lambda h: vickers_diagonal(force, h)


def _note_readings(indents: _Indents, diagonal: _Floats, method: Method, marks: Marks) -> None:
    readings = indents.readings
    fired = force_not_nominal(indents.scale, indents.force, indents.ball)
    marks.note(rules.FORCE_NOT_NOMINAL, *fired)
    marks.note(rules.SMALL_DIAGONAL, *rules.too_small(diagonal))
    if "edge_mm" in readings.floats:
        ratio = method.edge_distance_d
        fired = edge_too_near(indents.lengths("edge_mm"), diagonal, ratio)
        marks.note(rules.EDGE_DISTANCE, *fired, ratio)
    if "x_mm" in readings.floats and "y_mm" in readings.floats:
        ratio = method.centre_distance_d
        x, y = indents.lengths("x_mm"), indents.lengths("y_mm")
        fired = centres_too_near(x, y, diagonal, readings.coupon, ratio)
        marks.note(rules.CENTRE_DISTANCE, *fired, ratio)
    if "dwell_s" in readings.floats:
        marks.note(rules.DWELL_TIME, *rules.dwell_outside(readings.column("dwell_s")))


def _join_forces(
    indents: _Indents,
    nominal: _Floats,
    value: _Floats,
    tester: NDArray[np.int64],
    reduced: Reduced,
    told: tuple[NDArray[np.int64], _Floats],
) -> None:
    """Join several forces on the pyramid (relation 3); tell each indent's cell and weight."""
    rows = np.flatnonzero(indents.scale == HV)
    if not rows.size:
        return
    coupon = indents.readings.coupon[rows]
    made = Indented(coupon, value[rows], indents.force[rows], nominal[rows], tester[rows])
    cell, weight = told
    inside, weight[rows] = join_forces(made, reduced)
    cell[rows] = inside + len(cell)


def _note_outliers(value: _Floats, cell: NDArray[np.int64], marks: Marks) -> None:
    """Find readings that stand out among those of their coupon at their force."""
    count = np.bincount(cell)
    with np.errstate(invalid="ignore", divide="ignore"):
        deviation = value - (np.bincount(cell, value) / count)[cell]
        sd = np.sqrt(np.bincount(cell, deviation**2) / (count - 1))
        distance = np.abs(deviation) / sd[cell]
    critical = grubbs_critical(count)[cell]
    marks.note(rules.OUTLYING_READING, distance > critical, distance, critical)


def _refuse_mixtures(
    indents: _Indents, nominal: _Floats, reduced: Reduced, marks: Marks, *, sized: bool
) -> None:
    """Take the mean away where readings of one coupon have no common one."""
    readings, scale = indents.readings, indents.scale
    starts = readings.starts
    count = np.diff(np.append(starts, len(readings)))

    def differs(x: NDArray[np.generic], tolerance: float) -> NDArray[np.bool_]:
        first = np.repeat(x[starts], count).astype(float)
        with np.errstate(invalid="ignore"):
            apart = np.abs(x.astype(float) - first) > tolerance * np.abs(first)
        return np.logical_or.reduceat(apart, starts)

    scales = differs(scale, 0.0)
    balls = np.where(scale == HBW, indents.ball, 0.0)
    forces = (differs(nominal, _SAME) | differs(balls, _SAME)) & ~scales
    if sized:
        forces &= scale[starts] != HV
    for rule, mixed in (
        (coupon_rules.MIXED_SCALES, scales),
        (coupon_rules.MIXED_FORCES, forces),
    ):
        bad = readings.coupon[starts][mixed]
        if bad.size:
            marks.note_coupons(rule, bad)
            reduced.mean[bad] = np.nan
            reduced.sd[bad] = np.nan
            reduced.scale[bad] = np.int8(-1)
