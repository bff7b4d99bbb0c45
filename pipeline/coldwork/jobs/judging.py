"""Limits held against a slice of coupons: what is known of each, and the decisions."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import units
from coldwork.inputs.method import Limit, Method
from coldwork.interval.combine import (
    Combined,
    Ends,
    combine,
    strength_ends,
    strength_probability_above,
)
from coldwork.interval.reach import LATE, Reach
from coldwork.jobs.drawn import by_draws
from coldwork.jobs.evaluate import REPEATABILITY, Evaluated
from coldwork.jobs.figures import Figures
from coldwork.jobs.gather import Gathered
from coldwork.jobs.tables import unit_of
from coldwork.judge.calibrations import judge_ranges
from coldwork.judge.coupon_rules import Route, State, judge_coupons
from coldwork.judge.decisions import Decided, Evidence, decide, decision_texts
from coldwork.judge.settling import Averaging, more_readings, settling_texts
from coldwork.judge.size_effects import judge_size_effects
from coldwork.judge.temperatures import judge_temperatures
from coldwork.measured import value_of
from coldwork.rules.bits import emptied
from coldwork.sampling.sampler import Sampled
from coldwork.scatter import BASES

__all__ = ["Held", "decide_slice", "decisions_table", "find_in_slice"]

_Floats = NDArray[np.float64]
_Column: TypeAlias = "pa.Array[Any]"
_REPEATS: Final = tuple(BASES.index(name) for name in ("own", "pooled", "stated", "resolution"))
_STRESS: Final = "dislocation_stress_mpa"


def find_in_slice(batch: Gathered, rows: slice, evaluated: Evaluated) -> None:
    """Hold a slice of coupons against the rules that look at their results.

    Parameters
    ----------
    batch : Gathered
        The batch; its findings are told.
    rows : slice
        Place of the slice in it.
    evaluated : Evaluated
        The slice.
    """
    method, reduced = batch.method, batch.reduced
    route, used, repeatability = _as_taken(batch, rows, evaluated)
    saturation = method.inputs.get("indentation.saturation_stress_mpa")
    results, half = evaluated.results, evaluated.strength
    judge_temperatures(
        batch.findings, method, np.arange(rows.start, rows.stop), reduced.temperature[rows]
    )
    if half.bulk_hardness is not None:
        judge_size_effects(
            batch.findings,
            method.laws,
            np.arange(rows.start, rows.stop),
            reduced.scale[rows],
            reduced.line[rows],
            (reduced.mean[rows], value_of(half.bulk_hardness)),
        )
    judge_coupons(
        batch.findings,
        State(
            coupon=np.arange(rows.start, rows.stop),
            route=route,
            readings_used=used,
            repeatability=repeatability,
            scale=reduced.scale[rows],
            thickness=batch.coupons.thickness[rows],
            mean_diagonal=reduced.mean_diagonal[rows],
            ball=reduced.ball[rows],
            stress=evaluated.stress.value,
            u_stress=evaluated.reach.u_stress.u,
            upper_stress_end=evaluated.ends["dislocation_stress_mpa"].upper,
            unwinding=method.laws.unwinding,
            unwound=half.unwound,
            indented_stress=value_of(half.tested_stress),
            saturation_stress=np.nan if saturation is None else saturation.value,
            density=results["dislocation_density_per_m2"].value,
            radius_ratio=evaluated.reach.radius_ratio,
            stored_fraction=results["stored_fraction_of_work"].value,
            densest=evaluated.reach.densest,
            routes_error=None if evaluated.routes is None else evaluated.routes.agreement.error,
        ),
    )
    if method.calibrations:
        values = {name: units.from_si(x.value, unit_of(name)) for name, x in results.items()}
        values["grain_size_um"] = units.from_si(batch.coupons.grain_size[rows], "um")
        place = np.arange(rows.start, rows.stop)
        judge_ranges(batch.findings, method.calibrations, place, values, reduced.scale[rows])


def _as_taken(
    batch: Gathered, rows: slice, evaluated: Evaluated
) -> tuple[Route, NDArray[np.int64], _Floats]:
    """Give route, readings and repeatability of what each coupon's stress is from."""
    used, u = batch.reduced.used[rows], batch.repeatability[rows]
    routes, flow = evaluated.routes, batch.flow
    if routes is None or flow is None:
        return batch.method.laws.route, used, u
    alone = routes.flow_alone
    by_flow = np.where(np.isfinite(flow.reduced.mean[rows]), flow.scatter.u[rows], 0.0)
    return (
        np.where(alone, "flow", "indent"),
        np.where(alone, flow.reduced.used[rows], used),
        np.where(alone, by_flow, u).astype(np.float64),
    )


@dataclass(frozen=True)
class Held:
    """One limit held against a slice of coupons.

    Attributes
    ----------
    limit : Limit
        The limit.
    evidence : Evidence
        What is known of the quantity, on the limit's basis and in its unit.
    decided : Decided
        What follows.
    to_settle : pyarrow.StringArray
        What would settle each undecided coupon, null where there is nothing to say.
    """

    limit: Limit
    evidence: Evidence
    decided: Decided
    to_settle: pa.StringArray


def decide_slice(
    batch: Gathered,
    rows: slice,
    evaluated: Evaluated,
    figures: Mapping[str, Figures],
    bits: NDArray[np.uint64],
) -> list[Held]:
    """Decide every limit on a slice of coupons.

    Parameters
    ----------
    batch : Gathered
        The batch, with its limits, coverage and scatter.
    rows : slice
        Place of the slice in it.
    evaluated : Evaluated
        The slice.
    figures : mapping of str to Figures
        Its quantities, emptied where errors say so. [SI]
    bits : ndarray of uint64, shape (n, words)
        Findings of its coupons.

    Returns
    -------
    list of Held
        In the sheet's order of limits; one on a quantity that the route does not have
        is left out.
    """
    held = []
    for limit in batch.method.limits:
        if limit.quantity in figures:
            found = figures[limit.quantity]
            on_basis = _on_basis(limit, evaluated, found)
            evidence = _evidence(limit, batch.method, evaluated, found, on_basis, bits)
            decided = decide(limit, evidence)
            averaging = _averaging(batch, rows, limit, found, on_basis[0])
            more = more_readings(limit, evidence, decided.code, averaging)
            held.append(Held(limit, evidence, decided, settling_texts(more)))
    return held


def _on_basis(limit: Limit, evaluated: Evaluated, found: Figures) -> tuple[Combined, Reach]:
    """Give uncertainty and reach on the limit's basis."""
    if limit.basis != "own":
        return found.combined, evaluated.reach
    reach = evaluated.reach.with_shared_exact()
    if limit.quantity in LATE:
        return reach.combined[limit.quantity], reach
    return combine(found.result, evaluated.spreads, own_only=True), reach


def _averaging(
    batch: Gathered, rows: slice, limit: Limit, found: Figures, combined: Combined
) -> Averaging:
    """Tell what more readings would do to a quantity; nothing where u is no scatter of repeats."""
    scatter, unit = batch.scatter, unit_of(limit.quantity)
    slope = found.result.sensitivities.get(REPEATABILITY, np.float64(0.0))
    known = np.isin(scatter.basis[rows], _REPEATS)
    part = np.where(known, np.abs(slope) * scatter.u[rows], np.nan)
    return Averaging(
        batch.reduced.effective[rows],
        units.from_si(part, unit),
        units.from_si(np.abs(slope) * scatter.floor[rows], unit),
        combined.degrees_of_freedom,
    )


def decisions_table(method: Method, ids: pa.StringArray, decided: Sequence[Held]) -> pa.Table:
    """Build a slice of ``decisions.csv``: every limit on every coupon.

    Parameters
    ----------
    method : Method
        For its coverage.
    ids : pyarrow.StringArray of n
        The coupons.
    decided : sequence of Held
        From `decide_slice`; at least one.

    Returns
    -------
    pyarrow.Table
        Coupon by coupon, in the sheet's order of limits within each.
    """
    n = len(ids)
    table = pa.concat_tables([_of_one_limit(method, ids, held) for held in decided])
    order = np.arange(n * len(decided)).reshape(len(decided), n).T.ravel()
    return table.take(pa.array(order, pa.int64()))


def _of_one_limit(method: Method, ids: pa.StringArray, held: Held) -> pa.Table:
    n = len(ids)
    limit, one = held.limit, held.decided

    def number(x: float | None) -> pa.DoubleArray:
        return pa.nulls(n, pa.float64()) if x is None else pa.repeat(float(x), n)

    columns: dict[str, _Column] = {
        "coupon_id": ids,
        "limit_id": pa.repeat(limit.id, n),
        "quantity": pa.repeat(limit.quantity, n),
        "value": pa.array(held.evidence.value),
        "u": pa.array(held.evidence.u),
        "lower_limit": number(limit.lower),
        "upper_limit": number(limit.upper),
        "bound": pa.array(one.bound),
        "rule": pa.repeat(limit.rule, n),
        "basis": pa.repeat(limit.basis, n),
        "coverage": number(method.coverage),
        "probability": pa.array(one.probability),
        "decision": decision_texts(one.code),
        "reason": one.reason,
        "to_settle": held.to_settle,
    }
    return pa.table(columns)


def _evidence(
    limit: Limit,
    method: Method,
    evaluated: Evaluated,
    found: Figures,
    on_basis: tuple[Combined, Reach],
    bits: NDArray[np.uint64],
) -> Evidence:
    unit = unit_of(limit.quantity)
    combined, reach = on_basis
    sampled = by_draws(evaluated, limit.basis)
    bounds = (
        _one_sided(limit.quantity, found, combined, reach, method.coverage)
        if sampled is None
        else sampled.bounds[limit.quantity]
    )
    added = np.full(len(bits), method.laws.route == "indent" and not method.laws.unwinding)
    if evaluated.routes is not None:
        added = added & ~evaluated.routes.flow_alone
    value = units.from_si(found.result.value, unit)
    return Evidence(
        value=value,
        u=np.where(np.isnan(value), np.nan, units.from_si(combined.u, unit)),
        lower_bound=units.from_si(bounds.lower, unit),
        upper_bound=units.from_si(bounds.upper, unit),
        above_lower=_above(limit.lower, limit.quantity, unit, found, combined, reach)
        if sampled is None
        else _drawn_above(limit.lower, limit.quantity, unit, sampled).lower,
        above_upper=_above(limit.upper, limit.quantity, unit, found, combined, reach)
        if sampled is None
        else _drawn_above(limit.upper, limit.quantity, unit, sampled).upper,
        blocked=emptied(limit.quantity, bits, ends=True),
        with_indent=added,
        coverage=method.coverage,
        unit=unit,
    )


def _drawn_above(limit: float | None, quantity: str, unit: str, sampled: Sampled) -> Ends:
    """Give the least and the largest share of draws above a limit."""
    if limit is None:
        blank = np.full(sampled.draws.shape, np.nan)
        return Ends(blank, blank)
    return sampled.above[quantity, float(units.to_si(limit, unit))]


def _one_sided(
    quantity: str, found: Figures, combined: Combined, reach: Reach, coverage: float
) -> Ends:
    if quantity in LATE:
        return reach.interval(quantity, coverage)
    if quantity == _STRESS and reach.mapped:
        return reach.stress_interval(coverage)
    return strength_ends(found.result.value, combined, coverage)


def _above(
    limit: float | None,
    quantity: str,
    unit: str,
    found: Figures,
    combined: Combined,
    reach: Reach,
) -> _Floats:
    value = found.result.value
    if limit is None:
        return np.full(value.shape, np.nan)
    si = float(units.to_si(limit, unit))
    if quantity in LATE:
        return reach.probability_above(quantity, si)
    if quantity == _STRESS and reach.mapped:
        return reach.stress_above(si)
    return strength_probability_above(value, combined, si)
