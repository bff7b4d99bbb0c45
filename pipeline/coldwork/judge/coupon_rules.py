"""Rules that look at coupons, told to the findings a slice of coupons at a time.

Rules about what was read (`outlying-reading`, `mixed-forces`, testers) fire where readings
are reduced, `scatter` where they are pooled.
"""

from dataclasses import dataclass
from typing import Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import units
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.rules import coupon as rules
from coldwork.rules.findings import Findings
from coldwork.rules.forces import SECTIONS
from coldwork.rules.rule import Rule
from coldwork.rules.spacing import least_thickness_ratio, too_thin

__all__ = [
    "Route",
    "State",
    "judge_coupon_cells",
    "judge_coupons",
    "judge_readings",
    "judge_scales",
    "judge_thickness",
]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
Route: TypeAlias = str | NDArray[np.str_]

_GRAIN_COLUMNS: Final = ("grain_size_um", "u_grain_size_um")


@dataclass(frozen=True)
class State:
    """What a slice of n coupons came to: SI, arrays of shape (n,), NaN where there is nothing.

    Attributes
    ----------
    coupon : ndarray of int
        Index of each coupon in the batch.
    route : str, or ndarray of str
        ``indent`` or ``flow``; of both routes, ``indent`` where indents took part.
    readings_used : ndarray of int64
        Readings used. [1]
    repeatability : ndarray of float64
        Standard uncertainty of the mean reading, NaN where nothing tells it. [Pa]
    scale : ndarray of int8
        0 HV, 1 HBW, 2 HK, -1 where there is none.
    thickness, mean_diagonal, ball : ndarray of float64
        Of the coupon, of its indents, of the ball. [m]
    stress, u_stress, upper_stress_end : ndarray of float64
        Dislocation stress in the state that is reported, its standard uncertainty, and
        the upper end of its interval. [Pa]
    unwinding : bool
        Whether the method takes the indent's own strain out.
    unwound : ndarray of bool
        Where it was taken out.
    indented_stress : ndarray of float64
        Dislocation stress as tested, before unwinding. [Pa]
    saturation_stress : float
        That of the method, NaN where it does not unwind. [Pa]
    density : ndarray of float64
        Dislocation density. [1/m^2]
    densest : ndarray of float64, optional
        That of the densest region, where there are several. [1/m^2]
    routes_error : ndarray of float64, optional
        Normalised error of two routes, NaN where a coupon has one. [1]
    radius_ratio : ndarray of float64
        Outer over core radius. [1]
    stored_fraction : ndarray of float64
        Stored energy over plastic work. [1]
    """

    coupon: NDArray[np.int64] | NDArray[np.int32]
    route: Route
    readings_used: NDArray[np.int64]
    repeatability: FloatArray
    scale: NDArray[np.int8]
    thickness: FloatArray
    mean_diagonal: FloatArray
    ball: FloatArray
    stress: FloatArray
    u_stress: FloatArray
    upper_stress_end: FloatArray
    unwinding: bool
    unwound: BoolArray
    indented_stress: FloatArray
    saturation_stress: float
    density: FloatArray
    radius_ratio: FloatArray
    stored_fraction: FloatArray
    densest: FloatArray | None = None
    routes_error: FloatArray | None = None


def judge_coupons(findings: Findings, state: State) -> None:
    """Hold a slice of coupons against every rule that looks at a coupon's results.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    state : State
        The slice.
    """
    judge_readings(
        findings, state.coupon, state.readings_used, state.repeatability, route=state.route
    )
    judge_thickness(
        findings, state.coupon, state.thickness, state.scale, state.mean_diagonal, state.ball
    )
    if state.routes_error is not None:
        apart = rules.ROUTES_DISAGREE.above(state.routes_error)
        _note(findings, state, rules.ROUTES_DISAGREE, apart, state.routes_error)
    _stress(findings, state)
    _indent_strain(findings, state)
    _density(findings, state)
    _energy(findings, state)


def judge_scales(findings: Findings, method: Method, scale: NDArray[np.int8]) -> None:
    """Find coupons whose scale the sheet gives no constants for.

    A scale needs a constraint factor, and a strain where the indent is unwound.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    method : Method
        The batch's method; by the flow route there is nothing to find.
    scale : ndarray of int8, shape (coupons,)
        0 HV, 1 HBW, 2 HK, -1 where there is none.
    """
    if method.laws.route != "indent":
        return
    for code, section in enumerate(SECTIONS):
        strains = (f"{section}.representative_strain", f"{section}.strain_ratio")
        able = f"{section}.constraint_factor" in method.inputs
        if method.laws.unwinding:
            able = able and any(key in method.inputs for key in strains)
        if not able:
            where = np.flatnonzero(scale == code)
            findings.add(
                rules.SCALE_WITHOUT_CONSTANTS, where, detail=f"the sheet has no [{section}] for it"
            )


def judge_coupon_cells(findings: Findings, method: Method, coupons: Coupons) -> None:
    """Judge cells of coupons.csv that cannot be read or that the method misses.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    method : Method
        Says whether a grain size is needed, and for what.
    coupons : Coupons
        The coupons with their bad cells.
    """
    parts = method.laws.baseline == "parts" and "strength.hall_petch_mpa_m05" in method.inputs
    bad_rule, missing_rule = rules.BAD_COUPON_CELL, None
    if parts:
        bad_rule, missing_rule = rules.BAD_COUPON_CELL_NEEDED, rules.GRAIN_SIZE_MISSING
    elif method.laws.outer_radius == "grain":
        bad_rule = rules.BAD_COUPON_CELL_NEEDED_RADIUS
        missing_rule = rules.GRAIN_SIZE_MISSING_RADIUS
    for rule, needed in ((bad_rule, True), (rules.BAD_COUPON_CELL, False)):
        cells = [c for c in coupons.bad_cells if (c.column in _GRAIN_COLUMNS) == needed]
        where = np.array([c.coupon for c in cells], dtype=np.int64)
        paths = [coupons.sources[coupons.file[i]].path for i in where]
        told = [f"{c.column} holds {c.raw!r}: {c.hint}" for c in cells]
        findings.add(
            rule,
            where,
            file=pa.array(paths, pa.string()),
            line=coupons.line[where],
            detail=pa.array(told, pa.string()),
        )
    if missing_rule is not None:
        missing = np.isnan(coupons.grain_size) & ~findings.has(bad_rule)
        findings.add(missing_rule, np.flatnonzero(missing))


def _note(
    findings: Findings,
    state: State,
    rule: Rule,
    fired: BoolArray,
    value: FloatArray | None = None,
    limit: FloatArray | float | None = None,
) -> None:
    rows = np.flatnonzero(fired)
    if rows.size == 0:
        return
    found = None if value is None else value[rows]
    held = limit[rows] if isinstance(limit, np.ndarray) else limit
    findings.add(rule, state.coupon[rows], value=found, limit=held)


def judge_readings(
    findings: Findings,
    coupon: NDArray[np.int64] | NDArray[np.int32],
    used: NDArray[np.int64],
    repeatability: FloatArray,
    *,
    route: Route,
) -> None:
    """Find coupons with too few readings; nothing need be computed for it.

    Points of a flow curve are not repeats, and are not counted.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    coupon : ndarray of int, shape (n,)
        Index of each coupon in the batch.
    used : ndarray of int64, shape (n,)
        Readings used. [1]
    repeatability : ndarray of float64, shape (n,)
        Standard uncertainty of the mean reading, NaN where nothing tells it. [Pa]
    route : str, or ndarray of str, shape (n,)
        ``indent`` or ``flow``.
    """
    count = used.astype(np.float64)
    none = count == 0.0
    indents = ~none & (np.asarray(route) == "indent")
    few = indents & rules.FEW_READINGS.below(count)
    under = indents & ~few & rules.UNDER_FIVE_READINGS.below(count)
    found = (
        (rules.NO_READINGS, none),
        (rules.FEW_READINGS, few),
        (rules.UNDER_FIVE_READINGS, under),
    )
    for rule, fired in found:
        rows = np.flatnonzero(fired)
        findings.add(rule, coupon[rows], value=count[rows])
    lone = np.flatnonzero(~none & np.isnan(repeatability))
    findings.add(rules.NO_REPEATABILITY, coupon[lone])


def judge_thickness(
    findings: Findings,
    coupon: NDArray[np.int64] | NDArray[np.int32],
    thickness: FloatArray,
    scale: NDArray[np.int8],
    mean_diagonal: FloatArray,
    ball: FloatArray,
) -> None:
    """Find coupons that are too thin for their indents; nothing need be computed for it.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    coupon : ndarray of int, shape (n,)
        Index of each coupon in the batch.
    thickness, mean_diagonal, ball : ndarray of float64, shape (n,)
        Of the coupon, of its indents, of the ball. [m]
    scale : ndarray of int8, shape (n,)
        0 HV, 1 HBW, 2 HK, -1 where there is none.
    """
    least = least_thickness_ratio(scale, mean_diagonal, ball)
    fired, value = too_thin(thickness, mean_diagonal, least)
    rows = np.flatnonzero(fired)
    findings.add(rules.THIN_COUPON, coupon[rows], value=value[rows], limit=least[rows])


def _stress(findings: Findings, state: State) -> None:
    stress = units.from_si(state.stress, "MPa")
    end = units.from_si(state.upper_stress_end, "MPa")
    below = state.stress <= 0.0
    _note(findings, state, rules.BELOW_BASELINE, below, stress)
    contradicted = below & (state.upper_stress_end <= 0.0)
    _note(findings, state, rules.BASELINE_CONTRADICTED, contradicted, end)
    with np.errstate(divide="ignore", invalid="ignore"):
        relative = state.u_stress / state.stress
    weak = ~below & (relative >= (rules.WEAK_SIGNAL.limit or 0.0))
    _note(findings, state, rules.WEAK_SIGNAL, weak, relative)


def _indent_strain(findings: Findings, state: State) -> None:
    strong = np.isfinite(state.indented_stress) & (
        (np.asarray(state.route) == "indent") | state.unwinding
    )
    if not state.unwinding:
        _note(findings, state, rules.INDENT_ADDS_STRAIN, strong)
        return
    value = units.from_si(state.indented_stress, "MPa")
    limit = float(units.from_si(state.saturation_stress, "MPa"))
    _note(findings, state, rules.ABOVE_SATURATION, strong & ~state.unwound, value, limit)


def _density(findings: Findings, state: State) -> None:
    density = state.density
    densest = density if state.densest is None else state.densest
    high = rules.DENSITY_IMPOSSIBLE.above(densest)
    past = (state.stress > 0.0) & np.isnan(density)
    _note(findings, state, rules.STRESS_PAST_BRANCH, past, units.from_si(state.stress, "MPa"))
    low = rules.DENSITY_TOO_LOW.below(density)
    _note(findings, state, rules.DENSITY_IMPOSSIBLE, high, densest)
    _note(findings, state, rules.DENSITY_TOO_LOW, low, density)
    unusual = rules.DENSITY_UNUSUAL.outside(density) & ~high & ~low
    _note(findings, state, rules.DENSITY_UNUSUAL, unusual, density)


def _energy(findings: Findings, state: State) -> None:
    ratio, fraction = state.radius_ratio, state.stored_fraction
    none = ratio <= (rules.NO_LINE_ENERGY.limit or 0.0)
    _note(findings, state, rules.NO_LINE_ENERGY, none, ratio)
    few = ~none & rules.FEW_CORE_RADII.below(ratio)
    _note(findings, state, rules.FEW_CORE_RADII, few, ratio)
    impossible = rules.STORED_FRACTION_IMPOSSIBLE.above(fraction)
    _note(findings, state, rules.STORED_FRACTION_IMPOSSIBLE, impossible, fraction)
    unusual = rules.STORED_FRACTION_UNUSUAL.outside(fraction) & ~impossible
    _note(findings, state, rules.STORED_FRACTION_UNUSUAL, unusual, fraction)
