"""One curve to its results: the steps in order."""

from dataclasses import replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import (
    AREA,
    EXTENSION,
    FORCE,
    Curve,
    CurveFault,
    CurveResult,
    CurveSettings,
    FaultKind,
    Fit,
    Geometry,
    StrainPoint,
    Valued,
)
from coldwork.reduce.curve_branch import Branch, find_branch, moving_mean
from coldwork.reduce.curve_choices import choose, fitted_places, is_by_crosshead
from coldwork.reduce.curve_elastic import PROOF_OFFSET, Elastic, find_elastic
from coldwork.reduce.curve_findings import faults_of_record, faults_of_test, in_order
from coldwork.reduce.curve_laws import fit_hollomon, fit_voce, rate_along
from coldwork.reduce.curve_machine_faults import (
    NOTHING_LEFT,
    extensometer_off,
    saturation,
)
from coldwork.reduce.curve_neck import neck_point
from coldwork.reduce.curve_points import Points, engineering_points, plastic_part
from coldwork.reduce.curve_rates import rate_changes
from coldwork.reduce.curve_uncertainty import Budget, budget_of
from coldwork.reduce.curve_values import Choices
from coldwork.reduce.curve_yield import Yield, find_yield
from coldwork.statistics.noise import point_noise

__all__ = ["LEAST_POINTS", "reduce_curve"]

FloatArray = NDArray[np.float64]

LEAST_POINTS: Final = 20  # with both stress and strain, below which a curve is not reduced


def reduce_curve(curve: Curve, geometry: Geometry, settings: CurveSettings) -> CurveResult:
    """Reduce one coupon's curve after ISO 6892-1.

    Parameters
    ----------
    curve : Curve
        The points, n of them.
    geometry : Geometry
        Dimensions.
    settings : CurveSettings
        What the sheet says.

    Returns
    -------
    CurveResult
        All that the curve gives; what it does not give is None, with a fault that says why.

    Raises
    ------
    InvalidArgument
        If the settings contradict each other or the curve, an array has another length
        than the rest, or a needed dimension is missing.
    """
    points = engineering_points(curve, geometry, settings)
    if len(points) < LEAST_POINTS:
        return _unreduced(points, [_too_few(points, len(points))])
    whole = find_branch(points, len(points))
    last = int(whole.place[-1])
    within, capped, saturated = saturation(points)
    stop, off = extensometer_off(points, whole.noise_strain, last)
    stop = min(stop, within)
    faults = [*faults_of_record(points), *saturated, *off]
    if stop < LEAST_POINTS:
        return _unreduced(points, [*faults, _too_few(points, stop)])
    branch = whole if stop == len(points) else find_branch(points, stop)
    elastic = find_elastic(branch, settings.slope_between, settings.slope)
    if elastic is None or not _leaves_a_length(points, branch, elastic, settings):
        faults.append(points.fault(FaultKind.FEW_ELASTIC_POINTS, (0, stop), 0.0, 3.0))
        return _unreduced(points, faults)
    faults += faults_of_test(points, branch, elastic, last, settings, geometry)
    yielding = find_yield(branch, elastic)
    choices = choose(branch, elastic, settings, yielding, points.sense)
    faults += _unfinished(points, branch, elastic, choices, cut=bool(saturated or off))
    budget = budget_of(branch, choices, settings)
    result = CurveResult(
        faults=in_order(faults),
        noise_stress=branch.noise_stress,
        noise_strain=branch.noise_strain,
        engineering_stress=_full(points, points.stress),
        engineering_strain=_full(points, points.strain - budget.values["toe", 0.0]),
        true_stress=budget.state.stress,
        true_plastic_strain=budget.state.strain,
        true_start=int(points.index[branch.place[choices.begin]]),
        slope_is_modulus=not choices.by_crosshead,
        rate_changes=rate_changes(points, int(branch.place[-1]), branch.noise_strain),
    )
    result = _with_line(result, points, branch, choices, budget)
    if points.sense > 0:
        result = _with_strengths(result, points, branch, yielding, budget)
    if capped:
        result = replace(result, tensile_strength=None, tensile_strength_bias=float("nan"))
    result = _with_laws(result, choices, settings, yielding, budget)
    if settings.bridgman:
        neck = neck_point(points, geometry, last, branch.noise_stress, settings.force_u_rel)
        result = replace(result, neck=neck)
    return result


def _leaves_a_length(
    points: Points, branch: Branch, elastic: Elastic, settings: CurveSettings
) -> bool:
    """Whether the toe-corrected strains can be a coupon's: wrong units may end up here."""
    line = elastic.line
    strain = branch.strain + line.intercept / line.slope
    if is_by_crosshead(settings):
        strain = plastic_part(strain, branch.stress, line.slope)
    return bool((points.sense * strain).min() > NOTHING_LEFT)


def _full(points: Points, values: FloatArray) -> FloatArray:
    """Spread values over all points of the file, NaN where there is none."""
    if len(points) == points.count:
        return values
    full = np.full(points.count, np.nan)
    full[points.index] = values
    return full


def _unreduced(points: Points, faults: list[CurveFault]) -> CurveResult:
    """Keep what is left of a curve without an elastic part: its points and its findings."""
    nothing = np.zeros(0)
    return CurveResult(
        faults=in_order(faults),
        noise_stress=point_noise(points.stress),
        noise_strain=point_noise(points.strain),
        engineering_stress=_full(points, points.stress),
        engineering_strain=_full(points, points.strain),
        true_stress=nothing,
        true_plastic_strain=nothing,
    )


def _too_few(points: Points, count: int) -> CurveFault:
    stop = int(points.index[-1]) + 1 if len(points) else 0
    return CurveFault(FaultKind.TOO_FEW_POINTS, 0, stop, float(count), float(LEAST_POINTS))


def _unfinished(
    points: Points, branch: Branch, elastic: Elastic, choices: Choices, *, cut: bool
) -> list[CurveFault]:
    """Say where a curve ends before its proof stress, or before its greatest force."""
    span = int(branch.place[0]), int(branch.place[-1]) + 1
    if elastic.proof_at is None:
        toe = -elastic.line.intercept / elastic.line.slope
        reached = float(branch.strain[-1]) - toe - float(branch.stress[-1]) / elastic.line.slope
        return [points.fault(FaultKind.ENDS_BEFORE_YIELD, span, reached, PROOF_OFFSET)]
    if choices.top is None and points.sense > 0 and not cut:
        greatest = float(branch.mean.max())
        fall = 1.0 - float(branch.stress[-5:].mean()) / greatest
        return [points.fault(FaultKind.NO_MAXIMUM, span, fall, 0.0)]
    return []


def _with_line(
    result: CurveResult, points: Points, branch: Branch, choices: Choices, budget: Budget
) -> CurveResult:
    """Add slope, toe, proof stresses and what is read at the reported strains."""
    places = branch.place[[choices.elastic[0], choices.elastic[1] - 1]]
    first, last = (int(k) for k in points.index[places])
    proof = {offset: budget.valued(("proof", offset)) for offset in choices.proof}
    at_strains = []
    for strain in choices.strains:
        flow, work, rate = (budget.valued((name, strain)) for name in ("flow", "work", "rate"))
        if flow is not None and work is not None and rate is not None:
            at_strains.append(StrainPoint(strain, flow, work, rate))
    return replace(
        result,
        slope=budget.valued(("slope", 0.0)),
        slope_range=(first, last + 1) if choices.stated is None else (0, 0),
        toe_strain=budget.valued(("toe", 0.0)),
        proof={offset: value for offset, value in proof.items() if value is not None},
        at_strains=tuple(at_strains),
    )


def _with_strengths(
    result: CurveResult, points: Points, branch: Branch, yielding: Yield | None, budget: Budget
) -> CurveResult:
    """Add the greatest force, where it is, and the yield point. Tension only."""
    begin = 0 if yielding is None else int(branch.place[yielding.end])
    greatest = float(points.stress[begin:].max())
    top = budget.valued(("top", 0.0))
    smooth = float(moving_mean(points.stress[begin:]).max()) if top is None else top.value
    u_smooth = branch.noise_stress if top is None else top.u_own
    bias = greatest - smooth
    result = replace(
        result,
        tensile_strength=budget.recorded(greatest, float(np.hypot(bias, u_smooth))),
        tensile_strength_bias=bias,
        uniform_elongation=budget.valued(("elongation", 0.0)),
        total_elongation_at_max=budget.valued(("total_at_top", 0.0)),
        uniform_plastic_strain=budget.valued(("uniform", 0.0)),
        work_to_uniform=budget.valued(("work_to_uniform", 0.0)),
    )
    return result if yielding is None else _with_yield(result, branch, yielding, budget)


def _with_yield(
    result: CurveResult, branch: Branch, yielding: Yield, budget: Budget
) -> CurveResult:
    """Add upper yield (the greatest recorded point), lower yield and the plateau's length."""
    noise = branch.noise_stress
    around = branch.stress[max(yielding.upper - 2, 0) : yielding.upper + 3]
    low = max(yielding.lower - yielding.length // 2, 0)
    lower = float(branch.stress[low : low + yielding.length].mean())
    length = float(np.diff(branch.run[[yielding.upper, yielding.end]])[0])
    by_strain = {FORCE: 0.0, EXTENSION: length, AREA: 0.0}
    shared = {name: c * budget.units[name] for name, c in by_strain.items()}
    return replace(
        result,
        upper_yield=budget.recorded(float(around.max()), noise),
        lower_yield=budget.recorded(lower, noise),
        yield_elongation=Valued(length, branch.noise_strain, by_strain, shared),
    )


def _with_laws(
    result: CurveResult,
    choices: Choices,
    settings: CurveSettings,
    yielding: Yield | None,
    budget: Budget,
) -> CurveResult:
    """Add the fitted laws, the line of rate against stress, and the rate along the curve."""
    places = fitted_places(budget.state, choices, settings, yielding)
    stress, strain = budget.state.stress[places], budget.state.strain[places]
    fits = {}
    fitted = fit_voce(stress, strain)
    voce = None if fitted is None else budget.fit("voce", fitted, places)
    if voce is not None and "voce" in settings.fit:
        fits["voce"] = voce
    hollomon = fit_hollomon(stress, strain) if "hollomon" in settings.fit else None
    if hollomon is not None:
        fits["hollomon"] = budget.fit("hollomon", hollomon, places)
    rate = None
    if strain.size:
        branch = budget.state.branch
        ends = float(strain[0]), float(strain[-1])
        rate = rate_along(stress, strain, ends, branch.alike, branch.lasting)
    return replace(
        result, fits=fits, kocks_mecking=None if voce is None else _line_of(voce), rate=rate
    )


def _line_of(voce: Fit) -> Fit:
    """Take the line of rate against stress that, integrated, is Voce's law."""
    names = ("initial_hardening", "saturation_stress")
    places = [voce.names.index(name) for name in names]
    return replace(
        voce,
        law="kocks-mecking",
        names=names,
        parameters=voce.parameters[places],
        covariance=voce.covariance[np.ix_(places, places)],
        u_shared={name: c[places] for name, c in voce.u_shared.items()},
    )
