"""Curves of a batch to one summary per coupon: the shell around the reduction of one curve.

Streams like the readings do: a coupon's points are put together, reduced, and let go
before the next coupon's. What is kept of a curve does not grow with its points.
"""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Final, Protocol

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.errors import Cause
from coldwork.inputs.method import Method, Tensile
from coldwork.intake.coupons import Coupons
from coldwork.intake.curve_columns import LENGTHS
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import ReadingStream
from coldwork.reduce.curve import (
    SLOPE,
    Curve,
    CurveFault,
    CurveResult,
    CurveSettings,
    FaultKind,
    Geometry,
    StrainPoint,
)
from coldwork.reduce.curve_reduction import reduce_curve
from coldwork.reduce.picture import Picture, picture_of
from coldwork.reduce.readings import Readings, ScatteredCoupons, regrouped, whole_coupons
from coldwork.reduce.reduced import Reduced
from coldwork.reduce.stream import Byproducts, put_aside
from coldwork.rules import curve as rules
from coldwork.rules.coupon import NO_FLOW_STRESS_AT_STRAIN
from coldwork.rules.reasons import REPEATED_READING
from coldwork.rules.rule import Level, Rule

__all__ = [
    "CurveKeep",
    "CurveSummary",
    "Curves",
    "flow_of_curves",
    "reduce_curves",
    "settings_of",
]

FloatArray = NDArray[np.float64]

_NOTHING: Final = np.empty(0)
_SAME: Final = 1e-12  # two strains of the sheet are one within this [1]
_RULES: Final[Mapping[FaultKind, Rule]] = {
    FaultKind.TOO_FEW_POINTS: rules.TOO_FEW_POINTS,
    FaultKind.FEW_ELASTIC_POINTS: rules.FEW_ELASTIC_POINTS,
    FaultKind.ENDS_BEFORE_YIELD: rules.ENDS_BEFORE_YIELD,
    FaultKind.STRESS_IMPOSSIBLE: rules.STRESS_IMPOSSIBLE,
    FaultKind.SLOPE_IMPOSSIBLE: rules.SLOPE_IMPOSSIBLE,
    FaultKind.ZERO_OFFSET: rules.ZERO_OFFSET,
    FaultKind.GRIP_SLIP: rules.GRIP_SLIP,
    FaultKind.EXTENSOMETER_SLIP: rules.EXTENSOMETER_SLIP,
    FaultKind.EXTENSOMETER_OFF: rules.EXTENSOMETER_OFF,
    FaultKind.SATURATION: rules.SATURATION,
    FaultKind.TIME_BACKWARD: rules.TIME_BACKWARD,
    FaultKind.TIME_STANDING: rules.TIME_STANDING,
    FaultKind.UNLOADING_LOOP: rules.UNLOADING_LOOP,
    FaultKind.SERRATIONS: rules.SERRATIONS,
    FaultKind.LUEDERS_PLATEAU: rules.LUEDERS_PLATEAU,
    FaultKind.NO_MAXIMUM: rules.NO_MAXIMUM,
    FaultKind.BARRELLING: rules.BARRELLING,
    FaultKind.FRICTION: rules.FRICTION,
}


class CurveKeep(Protocol):
    """Where the points of curves are kept."""

    def restart(self) -> None:
        """Forget what was kept."""

    def add(self, coupon_id: str, file: str, points: Readings, result: CurveResult) -> None:
        """Keep the points of one curve with what came of them."""


@dataclass(frozen=True)
class CurveSummary:
    """What is kept of one coupon's curve.

    Attributes
    ----------
    file : str
        The file that it was read from.
    first_line, last_line : int
        Lines of its first and its last point.
    points : int
        Points used.
    lengths : str
        ``extension``, ``crosshead``, or ``given`` where the curve brought a strain.
    result : CurveResult or None
        What it came to, without its points; None where it could not be reduced at all.
    trusted : bool
        Whether no error was found on it.
    read_at : mapping of str to object
        Number, line and raw cells of the point at or next above the strain that the flow
        route reports; empty where there is none.
    picture : Picture or None
        The curve thinned, if pictures are wanted.
    """

    file: str
    first_line: int
    last_line: int
    points: int
    lengths: str
    result: CurveResult | None
    trusted: bool
    read_at: Mapping[str, object]
    picture: Picture | None

    def at(self, strain: float) -> StrainPoint | None:
        """Give the state at a true plastic strain [1], None beyond uniform strain or trust."""
        if self.result is None or not self.trusted:
            return None
        near = [p for p in self.result.at_strains if abs(p.strain - strain) <= _SAME]
        return near[0] if near else None


@dataclass(frozen=True)
class Curves:
    """The curves of a batch, reduced.

    Attributes
    ----------
    summaries : mapping of int to CurveSummary
        By row of ``coupons.csv``; a coupon without a point has none.
    beside : Byproducts
        What was found on them and set aside of them: the batch's own where they give its
        flow stresses, apart from it where they stand beside its readings.
    causes : tuple of Cause
        Why the batch must be refused.
    """

    summaries: Mapping[int, CurveSummary]
    beside: Byproducts
    causes: tuple[Cause, ...]

    @property
    def points(self) -> int:
        """Points used, of all curves."""
        return sum(one.points for one in self.summaries.values())


def settings_of(method: Method, tensile: Tensile) -> CurveSettings:
    """Make the settings of a curve's reduction from the sheet.

    Parameters
    ----------
    method : Method
        Its inputs, and the strain that the flow route reports.
    tensile : Tensile
        What the sheet says of curves.

    Returns
    -------
    CurveSettings
        SI; the strain that the flow route reports is among the reported ones.
    """
    slope = method.inputs.get(SLOPE)
    strains = set(tensile.reported_strains)
    if method.laws.flow_from == "curves":
        strains.add(method.plastic_strain)
    return CurveSettings(
        mode=tensile.mode,
        strain_from=tensile.strain_from,
        stress_is=tensile.stress_is,
        slope_between=tensile.slope_between,
        slope=None if slope is None else slope.value,
        slope_u=0.0 if slope is None else slope.u,
        offsets=tensile.offsets,
        reported_strains=tuple(sorted(strains)),
        fit=tensile.fit,
        fit_between=tensile.fit_between,
        force_u_rel=method.inputs["tensile.force_u_rel"].u,
        extension_u_rel=method.inputs["tensile.extension_u_rel"].u,
        area_u_rel=method.inputs["tensile.area_u_rel"].u,
        bridgman=tensile.bridgman,
    )


def reduce_curves(
    stream: ReadingStream,
    files: TableFiles,
    method: Method,
    coupons: Coupons,
    beside: Byproducts,
    *,
    pictures: bool = False,
    keep: CurveKeep | None = None,
) -> Curves:
    """Reduce all curves of a batch, coupon by coupon.

    Parameters
    ----------
    stream : ReadingStream
        Their points; read twice where coupons are scattered over it, and then held
        together in memory.
    files : TableFiles
        The stream's files.
    method, coupons
        The batch; the method says how curves are reduced.
    beside : Byproducts
        Still empty; the stream sets points aside in the same one.
    pictures : bool, optional
        Whether thinned curves are kept for plots.
    keep : CurveKeep, optional
        Where the points of each curve are kept, if they are.

    Returns
    -------
    Curves
        A summary of each.
    """
    if method.tensile is None:
        message = "the method says nothing of curves"
        raise RuntimeError(message)
    shell = _Shell(files, method, method.tensile, coupons, beside, pictures=pictures, keep=keep)
    try:
        return shell.run(whole_coupons(iter(stream), len(coupons)))
    except ScatteredCoupons:
        beside.restart()
        if keep is not None:
            keep.restart()
        return shell.run(regrouped(iter(stream)))


def flow_of_curves(curves: Curves, method: Method, n: int) -> Reduced:
    """Take the flow stress that the sheet reports from each coupon's curve.

    Parameters
    ----------
    curves : Curves
        Of a batch whose flow stresses they give; what is missing goes to its findings.
    method : Method
        The strain that is reported, and the machine's inputs.
    n : int
        Coupons of the batch.

    Returns
    -------
    Reduced
        With the noise of the curve in place of a scatter of readings.
    """
    reduced = Reduced.empty(n, tuple(tester.id for tester in method.testers))
    reduced.own_u = np.full(n, np.nan)
    missing = []
    for i, summary in curves.summaries.items():
        reduced.used[i] = summary.points
        point = summary.at(method.plastic_strain)
        if point is None:
            missing += [i] if summary.trusted else []
            continue
        stress = point.flow_stress
        reduced.mean[i], reduced.own_u[i] = stress.value, stress.u_own
        for name, slope in stress.sensitivities.items():
            reduced.machine.setdefault(name, np.zeros(n))[i] = slope
    curves.beside.findings.add(
        NO_FLOW_STRESS_AT_STRAIN, np.array(missing, dtype=np.int64), limit=method.plastic_strain
    )
    return reduced


class _Shell:
    """Takes stretches of whole coupons apart and reduces each."""

    def __init__(
        self,
        files: TableFiles,
        method: Method,
        tensile: Tensile,
        coupons: Coupons,
        beside: Byproducts,
        *,
        pictures: bool,
        keep: CurveKeep | None,
    ) -> None:
        self._files = files
        self._names = files.names
        self._settings = settings_of(method, tensile)
        self._flow_strain = method.plastic_strain if method.laws.flow_from == "curves" else None
        self._coupons = coupons
        self._beside = beside
        self._pictures = pictures
        self._keep = keep

    def run(self, stretches: Iterable[tuple[Readings, Readings]]) -> Curves:
        summaries: dict[int, CurveSummary] = {}
        causes: list[Cause] = []
        for readings, repeats in stretches:
            put_aside(repeats, REPEATED_READING, self._files, self._coupons, self._beside.set_aside)
            for points in _coupon_by_coupon(readings):
                causes += self._split_causes(points)
                summaries[int(points.coupon[0])] = self._reduced(points)
        return Curves(summaries, self._beside, tuple(causes))

    def _reduced(self, points: Readings) -> CurveSummary:
        coupon = int(points.coupon[0])
        curve, lengths = _curve(points, self._settings)
        geometry = _geometry(self._coupons, coupon, self._settings)
        result = None
        if curve.force is not None and not _measured(geometry):
            self._note(rules.CURVE_WITHOUT_GEOMETRY, points, None)
            trusted = False
        else:
            result = reduce_curve(curve, geometry, self._settings)
            if self._keep is not None:
                name = self._coupons.ids[coupon].as_py()
                self._keep.add(name, self._names[points.file[0]], points, result)
            trusted = self._note_faults(points, result)
        return CurveSummary(
            file=self._names[points.file[0]],
            first_line=int(points.lines[0]),
            last_line=int(points.lines[-1]),
            points=len(points),
            lengths=lengths,
            result=None if result is None else _without_points(result),
            trusted=trusted,
            read_at={} if result is None else self._read_at(points, result),
            picture=picture_of(result) if self._pictures and result is not None else None,
        )

    def _note_faults(self, points: Readings, result: CurveResult) -> bool:
        trusted = True
        for fault in result.faults:
            rule = _RULES[fault.kind]
            self._note(rule, points, fault)
            trusted = trusted and rule.level is not Level.ERROR
        return trusted

    def _note(self, rule: Rule, points: Readings, fault: CurveFault | None) -> None:
        first = 0 if fault is None else min(fault.start, len(points) - 1)
        last = len(points) - 1 if fault is None else max(first, min(fault.stop, len(points)) - 1)
        where = f"lines {points.lines[first]} to {points.lines[last]}"
        if first == last:
            where = f"line {points.lines[first]}"
        value, limit = (None, None) if fault is None else _in_unit_of(rule, fault)
        self._beside.findings.add(
            rule,
            points.coupon[:1],
            value=value,
            limit=limit,
            file=self._names[points.file[first]],
            line=int(points.lines[first]),
            detail=f"points {points.number[first]} to {points.number[last]}, {where}",
        )

    def _read_at(self, points: Readings, result: CurveResult) -> dict[str, object]:
        """Find the point at which the flow stress was read: the first at or above its strain."""
        if self._flow_strain is None:
            return {}
        above = np.flatnonzero(result.true_plastic_strain >= self._flow_strain)
        if not above.size:
            return {}
        place = min(result.true_start + int(above[0]), len(points) - 1)
        raw = points.raw.slice(place, 1).to_pylist()[0]
        return {
            "point_no": int(points.number[place]),
            "line": int(points.lines[place]),
            "raw": {name: cell for name, cell in raw.items() if cell is not None},
        }

    def _split_causes(self, points: Readings) -> list[Cause]:
        """Refuse a curve that stands in two files: they may be two tests."""
        if points.file.min() == points.file.max():
            return []
        name = self._coupons.ids[int(points.coupon[0])].as_py()
        first, last = (self._names[points.file[i]] for i in (0, -1))
        return [
            Cause(
                last,
                f"coupon {name!r} has points here and in {first}",
                "A coupon has one curve, in one file; two may be two tests.",
                "Put the curve into one file, or name one of the two in [files] curves.",
            )
        ]


def _coupon_by_coupon(readings: Readings) -> Iterator[Readings]:
    starts = readings.starts
    for begin, end in zip(starts, np.append(starts[1:], len(readings)), strict=True):
        yield readings.part(int(begin), int(end))


def _curve(points: Readings, settings: CurveSettings) -> tuple[Curve, str]:
    time = points.column("time_s")
    clock = time if np.isfinite(time).any() else None
    force = points.column("force_n")
    if settings.strain_from is not None and np.isfinite(force).any():
        length = units.to_si(points.column(LENGTHS[settings.strain_from]), "mm")
        return Curve(clock, units.to_si(force, "N"), length), settings.strain_from
    stress = units.to_si(points.column("stress_mpa"), "MPa")
    return Curve(clock, stress=stress, strain=points.column("strain")), "given"


def _geometry(coupons: Coupons, coupon: int, settings: CurveSettings) -> Geometry:
    def size(name: str) -> float:
        column = coupons.dimensions.get(name)
        return float("nan") if column is None else float(column[coupon])

    round_area = np.pi / 4.0 * size("initial_diameter_mm") ** 2
    flat_area = size("width_mm") * size("thickness_mm")
    final = np.pi / 4.0 * size("final_diameter_mm") ** 2
    radius = size("neck_radius_mm")
    neck = settings.bridgman and np.isfinite(radius)
    return Geometry(
        gauge_length=size("gauge_length_mm"),
        area=float(round_area if np.isfinite(round_area) else flat_area),
        final_area=float(final) if np.isfinite(final) else None,
        neck_profile_radius=radius if neck else None,
    )


def _measured(geometry: Geometry) -> bool:
    return bool(np.isfinite(geometry.gauge_length) and np.isfinite(geometry.area))


def _without_points(result: CurveResult) -> CurveResult:
    return replace(
        result,
        engineering_stress=_NOTHING,
        engineering_strain=_NOTHING,
        true_stress=_NOTHING,
        true_plastic_strain=_NOTHING,
    )


def _in_unit_of(rule: Rule, fault: CurveFault) -> tuple[float | None, float | None]:
    """Give value and limit of a fault in its rule's unit. [`rule.unit`]."""
    if rule.unit is None:
        return None, None
    value, limit = units.from_si(np.array([fault.value, fault.limit]), rule.unit).tolist()
    return value, limit
