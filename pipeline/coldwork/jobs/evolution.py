"""The chain along the strain: ``evolution.csv``, a state for each reported strain of a curve."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.chain import Start
from coldwork.interval.combine import Combined, Ends, Spread, combine, strength_ends
from coldwork.jobs.evaluate import (
    REPEATABILITY,
    Evaluated,
    evaluate,
    inputs_of,
    start_of,
)
from coldwork.jobs.figures import Figures, figures_of
from coldwork.jobs.gather import Gathered
from coldwork.judge.coupon_rules import State, judge_coupons
from coldwork.measured import Measured, Value
from coldwork.reduce.curve import StrainPoint, Valued
from coldwork.rules.findings import Findings

__all__ = ["evolution_table"]

FloatArray = NDArray[np.float64]

WORK: Final = "work_repeatability"  # the input that a curve's noise makes of its plastic work
_WORK_COLUMN: Final = "plastic_work_j_per_m3"
_OF_CHAIN: Final = (
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_g",
    "stored_fraction_of_work",
)
_SPREAD: Final = ("u_own", "u_shared", "u", "lower", "upper")


@dataclass(frozen=True)
class _State:
    """All coupons of a slice at one strain; figures in SI, shape (n,) each."""

    strain: float
    figures: Mapping[str, Figures]
    reasons: list[str]
    flags: pa.StringArray


def evolution_table(batch: Gathered, rows: slice) -> pa.Table:
    """Build a slice of ``evolution.csv``.

    The plastic work that energy is held against is what came before the test, as
    ``coupons.csv`` has it, plus the test's own: the stored energy is that of both. Where
    the former is not known, there is no fraction; where there was no prior strain, it is 0.

    Parameters
    ----------
    batch : Gathered
        A batch of the flow route with curves.
    rows : slice
        Which coupons, n of them.

    Returns
    -------
    pyarrow.Table
        In the contract's order and units: coupon by coupon, strain by strain.
    """
    tensile = batch.method.tensile
    if tensile is None or batch.curves is None:
        message = "the batch has no curves"
        raise RuntimeError(message)
    prior = _prior_work(batch, rows)
    states = [_state(batch, rows, strain, prior) for strain in tensile.reported_strains]
    return _table(batch, rows, states, prior)


def _prior_work(batch: Gathered, rows: slice) -> FloatArray:
    """Work before the test; 0 where no strain came before it. [J/m^3]."""
    work, stated = batch.coupons.prior_plastic_work[rows], batch.coupons.work_stated
    if stated is not None:  # one along a curve has an uncertainty that a column cannot hold
        work = np.where(stated[rows], work, np.nan)
    unstrained = batch.coupons.prior_true_strain[rows] == 0.0
    return np.where(np.isnan(work) & unstrained, 0.0, work)


def _state(batch: Gathered, rows: slice, strain: float, prior: FloatArray) -> _State:
    method = batch.method
    found, reasons = _points(batch, rows, strain)
    inputs, spreads = inputs_of(method)
    start, own = start_of(method, batch.coupons, batch.reduced, batch.scatter, rows)
    stress, noise = _gathered([None if p is None else p.flow_stress for p in found], REPEATABILITY)
    work, work_noise = _gathered([None if p is None else p.work for p in found], WORK)
    spreads |= own | {REPEATABILITY: noise, WORK: work_noise}
    stress, work = (_known_inputs(x, spreads) for x in (stress, work))
    total: Value = Measured(work.value + prior, work.sensitivities)
    start = _at(start, stress, total, strain)
    evaluated = evaluate(method, inputs, spreads, start, _OF_CHAIN)
    findings = Findings(len(reasons))
    _judge(findings, evaluated)
    figures = figures_of(evaluated, findings.bits)
    figures[_WORK_COLUMN] = _figures_of_work(work, spreads, method.coverage)
    return _State(strain, figures, reasons, findings.text())


def _points(
    batch: Gathered, rows: slice, strain: float
) -> tuple[list[StrainPoint | None], list[str]]:
    """Look up the state of every curve at a strain, and why there is none."""
    summaries = batch.curves.summaries if batch.curves else {}
    found: list[StrainPoint | None] = []
    reasons = []
    for i in range(rows.start, rows.stop):
        summary = summaries.get(i)
        point = None if summary is None else summary.at(strain)
        found.append(point)
        if summary is None:
            reasons.append("no curve")
        elif not summary.trusted:
            reasons.append("curve not trusted")
        else:
            reasons.append("" if point is not None else "beyond uniform strain")
    return found, reasons


def _gathered(found: list[Valued | None], noise: str) -> tuple[Measured, Spread]:
    """Put results of n curves side by side: `noise` names the input of their own noise."""
    values = np.array([np.nan if x is None else x.value for x in found])
    names = dict.fromkeys(name for x in found if x is not None for name in x.sensitivities)
    slopes: dict[str, FloatArray] = {noise: np.asarray(1.0)}
    for name in names:
        slopes[name] = np.array([0.0 if x is None else x.sensitivities[name] for x in found])
    u = np.array([np.nan if x is None else x.u_own for x in found])
    return Measured(values, slopes), Spread(u, shared=False, degrees_of_freedom=np.inf)


def _known_inputs(x: Measured, spreads: Mapping[str, Spread]) -> Measured:
    """Leave out inputs that are exact."""
    kept = {n: c for n, c in x.sensitivities.items() if np.any(np.asarray(spreads[n].u) > 0.0)}
    return Measured(x.value, kept)


def _at(start: Start, stress: Measured, work: Value, strain: float) -> Start:
    n = stress.value.shape[0]
    none = np.full(n, np.nan)
    scale = np.full(n, -1, dtype=np.int8)
    return replace(
        start,
        mean=stress,
        scale=scale,
        force=none,
        ball=none,
        plastic_work=work,
        plastic_strain=strain,
    )


def _judge(findings: Findings, evaluated: Evaluated) -> None:
    """Hold a state against the rules that empty impossible densities and energies."""
    results, n = evaluated.results, len(evaluated.stress.value)
    nothing = np.full(n, np.nan)
    judge_coupons(
        findings,
        State(
            coupon=np.arange(n),
            route="flow",
            readings_used=np.ones(n, dtype=np.int64),
            repeatability=np.zeros(n),
            scale=np.full(n, -1, dtype=np.int8),
            thickness=nothing,
            mean_diagonal=nothing,
            ball=nothing,
            stress=evaluated.stress.value,
            u_stress=evaluated.reach.u_stress.u,
            upper_stress_end=evaluated.ends["dislocation_stress_mpa"].upper,
            unwinding=False,
            unwound=np.zeros(n, dtype=np.bool_),
            indented_stress=nothing,
            saturation_stress=np.nan,
            density=results["dislocation_density_per_m2"].value,
            radius_ratio=evaluated.reach.radius_ratio,
            stored_fraction=results["stored_fraction_of_work"].value,
            densest=evaluated.reach.densest,
        ),
    )


def _figures_of_work(work: Measured, spreads: Mapping[str, Spread], coverage: float) -> Figures:
    combined = combine(work, spreads)
    ends = strength_ends(work.value, combined, (1.0 + coverage) / 2.0)
    return Figures(work, combined, Ends(np.maximum(ends.lower, 0.0), ends.upper))


def _table(batch: Gathered, rows: slice, states: list[_State], prior: FloatArray) -> pa.Table:
    coupons, k = batch.coupons, len(states)
    n = rows.stop - rows.start
    each = pa.array(np.repeat(np.arange(rows.start, rows.stop), k))

    def woven(parts: list[FloatArray]) -> FloatArray:
        return np.stack(parts, axis=1).ravel()

    def texts(parts: Sequence[Sequence[str | None]]) -> pa.StringArray:
        rowwise = [part[i] or None for i in range(n) for part in parts]
        return pa.array(rowwise, pa.string())

    columns: dict[str, Any] = {
        "coupon_id": coupons.ids.take(each),
        "lot_id": coupons.lot_ids.take(each),
        "condition": coupons.conditions.take(each),
        "test_strain": pa.array(np.tile([state.strain for state in states], n)),
        "prior_true_strain": pa.array(np.repeat(coupons.prior_true_strain[rows], k)),
        "prior_plastic_work_j_per_m3": pa.array(np.repeat(prior, k)),
        "reason": texts([state.reasons for state in states]),
        "flags": texts([state.flags.to_pylist() for state in states]),
    }
    contract = contracts.load("out/evolution")
    for name in (*_OF_CHAIN, _WORK_COLUMN):
        unit = contract.field(name).unit or "1"
        parts = [state.figures[name] for state in states]
        values = {name: [figure.result.value for figure in parts]}
        for prefix in _SPREAD:
            values[f"{prefix}_{name}"] = [_part(figure, prefix) for figure in parts]
        for column, arrays in values.items():
            columns[column] = pa.array(units.from_si(woven(arrays), unit))
    return pa.table({name: columns[name] for name in contract.columns})


def _part(figure: Figures, name: str) -> FloatArray:
    combined: Combined = figure.combined
    ends = {"lower": figure.ends.lower, "upper": figure.ends.upper}
    spread = {"u_own": combined.u_own, "u_shared": combined.u_shared, "u": combined.u}
    return (ends | spread)[name]
