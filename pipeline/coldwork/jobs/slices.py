"""One slice of coupons worked: chain, rules, decisions, and the tables that come of it."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.interval.combine import Spread
from coldwork.jobs.drawn import verdicts, with_draws
from coldwork.jobs.evaluate import (
    FLOW_REPEATABILITY,
    GRAIN,
    QUANTITIES,
    REPEATABILITY,
    Evaluated,
    evaluate,
    inputs_of,
    start_of,
)
from coldwork.jobs.evolution import evolution_table
from coldwork.jobs.expected_heat import (
    HEAT_TABLE,
    expected_heat,
    expected_heat_table,
    has_heat,
)
from coldwork.jobs.figures import Figures, figures_of
from coldwork.jobs.gather import FlowSide, Gathered
from coldwork.jobs.judging import Held, decide_slice, decisions_table, find_in_slice
from coldwork.jobs.kept import KeptReadings
from coldwork.jobs.offered import Baseline
from coldwork.jobs.routes import ROUTES_TABLE, Beside, routes_table
from coldwork.jobs.steps import repeatability_of, steps_of
from coldwork.jobs.tables import (
    WITH_UNCERTAINTY,
    budget_table,
    coupons_table,
    quantities_table,
    unit_of_mean,
)
from coldwork.jobs.tensile import baselines, curve_records, tensile_table
from coldwork.judge.decisions import Worst, decision_texts, worst
from coldwork.judge.temperatures import judge_temperatures
from coldwork.measured import value_of
from coldwork.results.records import Step
from coldwork.rules.bits import emptied

__all__ = ["Sliced", "work_slice"]

_Column: TypeAlias = "pa.Array[Any]"


@dataclass(frozen=True)
class Sliced:
    """A slice of n coupons, worked.

    Attributes
    ----------
    batch : Gathered
        The batch.
    rows : slice
        The slice's place in it.
    evaluated : Evaluated
        Chain and intervals, before errors empty anything. [SI]
    figures : mapping of str to Figures
        Quantities as they may be published. [SI]
    decided : list of Held
        Every limit.
    worst : Worst
        The coupons' decisions.
    kept : pyarrow.Table or None
        Their readings, where those are kept.
    """

    batch: Gathered
    rows: slice
    evaluated: Evaluated
    figures: Mapping[str, Figures]
    decided: list[Held]
    worst: Worst
    kept: pa.Table | None

    @property
    def n(self) -> int:
        """Number of coupons."""
        return int(self.rows.stop - self.rows.start)

    @property
    def ids(self) -> pa.StringArray:
        """Their names."""
        return self.batch.coupons.ids[self.rows]

    @property
    def spreads(self) -> Mapping[str, Spread]:
        """Uncertainty of every input, in SI."""
        return self.evaluated.spreads

    def tables(self, shas: pa.StringArray) -> dict[str, pa.Table]:
        """Give the published tables of the slice.

        Parameters
        ----------
        shas : pyarrow.StringArray of n
            Digests of the coupons' records, null without records.

        Returns
        -------
        dict of str to pyarrow.Table
            By name; readings, quantities and budget only where readings are kept.
        """
        coupons = self._coupons
        place = coupons.column_names.index("record_sha256")
        found = {
            "coupons": coupons.set_column(place, "record_sha256", shas),
            "decisions": self._decisions,
        }
        return found | self._of_heat | self._of_curves | self._of_routes | self._details

    @cached_property
    def _coupons(self) -> pa.Table:
        batch, worst_one = self.batch, self.worst
        names = pa.array([held.limit.id for held in self.decided], pa.string())
        deciding = pa.array(worst_one.limit, pa.int64(), mask=worst_one.limit < 0)
        sampled = self.evaluated.sampled
        below = np.full(self.n, np.nan) if sampled is None else sampled.below_baseline
        gone = emptied("dislocation_stress_mpa", batch.findings.bits[self.rows])
        rest: dict[str, _Column] = {
            "p_below_baseline": pa.array(np.where(gone, np.nan, below)),
            "readings_used": pa.array(batch.used_per_coupon[self.rows]),
            "readings_set_aside": pa.array(batch.set_aside_per_coupon[self.rows]),
            "decision": decision_texts(worst_one.code),
            "deciding_limit": names.take(deciding),
            "conformance_probability": pa.array(worst_one.probability),
            "flags": batch.rules_on(self.rows),
            "record_sha256": pa.nulls(self.n, pa.string()),
        }
        if self.evaluated.routes is not None:
            rest["route"] = pa.array(self.evaluated.routes.taken.tolist(), pa.string())
        return coupons_table(batch, self.rows, self.figures, self._test_strain, rest)

    @cached_property
    def _decisions(self) -> pa.Table:
        if not self.decided:
            return _empty("decisions")
        return decisions_table(self.batch.method, self.ids, self.decided)

    @cached_property
    def _details(self) -> dict[str, pa.Table]:
        if self.kept is None:
            return {}
        batch = self.batch
        own = {
            REPEATABILITY: value_of(self.evaluated.start.mean),
            GRAIN: batch.coupons.grain_size[self.rows],
        }
        readings = [
            KeptReadings.published(
                self.kept, batch.coupons, batch.method.laws.route, list(batch.files)
            )
        ]
        if self._points is not None and batch.flow is not None:
            files = list(batch.flow.files)
            readings.append(KeptReadings.published(self._points, batch.coupons, "flow", files))
        if self.evaluated.routes is not None:
            own[FLOW_REPEATABILITY] = value_of(self.evaluated.routes.beside.start.mean)
        return {
            "readings": pa.concat_tables(readings),
            "quantities": quantities_table(batch, self.rows, self.figures),
            "budget": budget_table(batch, self.rows, self.figures, self.spreads, own),
        }

    @cached_property
    def _points(self) -> pa.Table | None:
        """The points of the flow curves beside indents, where those are kept."""
        flow = self.batch.flow
        return None if flow is None or flow.kept is None else flow.kept.of(self.rows)

    @cached_property
    def _of_routes(self) -> dict[str, pa.Table]:
        routes = self.evaluated.routes
        if routes is None:
            return {}
        gone = emptied("dislocation_stress_mpa", self.batch.findings.bits[self.rows])
        return {ROUTES_TABLE: routes_table(self.batch.method, self.ids, routes, gone)}

    @cached_property
    def _of_heat(self) -> dict[str, pa.Table]:
        method = self.batch.method
        if not has_heat(method):
            return {}
        stored = self.figures["stored_energy_j_per_g"]
        heat = expected_heat(method, inputs_of(method)[0], self.spreads, stored)
        return {HEAT_TABLE: expected_heat_table(self.ids, stored, heat)}

    @cached_property
    def _of_curves(self) -> dict[str, pa.Table]:
        batch = self.batch
        if batch.curves is None:
            return {}
        found = {"tensile": tensile_table(batch, self.rows, self._baselines)}
        if batch.method.laws.route == "flow":
            found["evolution"] = evolution_table(batch, self.rows)
        return found

    @cached_property
    def _baselines(self) -> list[Baseline]:
        name = "baseline_stress_mpa"
        laws = self.batch.method.laws  # a curve's line must be that of dislocations alone
        if laws.superposed or laws.temperature != "none":
            return [Baseline(np.nan, np.nan, np.nan)] * self.n
        return baselines(self.evaluated.results[name], self.evaluated.combined[name])

    def curves(self) -> list[dict[str, Any] | None] | None:
        """Tell of each coupon's curve what its record keeps; None where there are none."""
        if self.batch.curves is None:
            return None
        return curve_records(self.batch, self.rows, self._baselines)

    def sampling(self) -> list[dict[str, object] | None] | None:
        """Tell what each coupon's draws came to; None by first order."""
        how = self.batch.method.draws
        return None if how is None else verdicts(how, self.evaluated)

    @property
    def raw_readings(self) -> pa.Table:
        """The readings' cells as written, row for row with the table of readings."""
        raw = [KeptReadings.raw(kept) for kept in (self.kept, self._points) if kept is not None]
        return pa.concat_tables(raw, promote_options="default") if raw else pa.table({})

    def flags(self) -> pa.Table:
        """Give the findings on the slice's coupons."""
        return self.batch.flags_of(self.rows)

    def repeatability(self) -> list[dict[str, object]]:
        """Tell what each coupon's scatter was judged by."""
        unit = unit_of_mean(self.batch.method)
        told = repeatability_of(self.batch.scatter, self.rows, unit)
        flow = self.batch.flow
        if flow is None:
            return told
        others = repeatability_of(flow.scatter, self.rows, unit_of_mean(flow.method))
        return [
            one | {f"flow_{name}": x for name, x in other.items()}
            for one, other in zip(told, others, strict=True)
        ]

    def steps(self) -> list[Step]:
        """Tell the chain step by step."""
        return steps_of(self.batch.method, self.evaluated)

    @property
    def _test_strain(self) -> NDArray[np.float64]:
        strain = self.evaluated.strength.test_strain
        mean = value_of(self.evaluated.start.mean)
        if self.evaluated.routes is not None:
            mean = self.evaluated.stress.value
        return np.where(np.isnan(mean), np.nan, strain)


def work_slice(batch: Gathered, rows: slice, kept: KeptReadings | None = None) -> Sliced:
    """Work a slice of coupons.

    Parameters
    ----------
    batch : Gathered
        The batch; what rules find on the slice goes to its findings.
    rows : slice
        Which coupons.
    kept : KeptReadings, optional
        Their readings, where those are kept.

    Returns
    -------
    Sliced
        The slice.
    """
    method = batch.method
    inputs, spreads = inputs_of(method)
    start, own = start_of(method, batch.coupons, batch.reduced, batch.scatter, rows)
    with_ends = WITH_UNCERTAINTY if kept is None else QUANTITIES
    beside = None
    if batch.flow is not None:
        beside, of_flow = _beside(batch, batch.flow, rows)
        own |= of_flow
    evaluated = evaluate(method, inputs, {**spreads, **own}, start, with_ends, beside)
    if batch.pools is not None:
        names = [str(name) for name in batch.coupons.ids[rows].to_pylist()]
        evaluated = with_draws(method, batch.pools, names, evaluated, with_ends)
    find_in_slice(batch, rows, evaluated)
    bits = batch.findings.bits[rows]
    figures = figures_of(evaluated, bits)
    decided = decide_slice(batch, rows, evaluated, figures, bits)
    n = int(rows.stop - rows.start)
    return Sliced(
        batch,
        rows,
        evaluated,
        figures,
        decided,
        worst([held.decided for held in decided], n),
        None if kept is None else kept.of(rows),
    )


def _beside(batch: Gathered, flow: FlowSide, rows: slice) -> tuple[Beside, dict[str, Spread]]:
    """Bring the flow curves of a slice of both routes, and say which of them are sound."""
    findings, place = flow.told.findings, np.arange(rows.start, rows.stop)
    judge_temperatures(findings, flow.method, place, flow.reduced.temperature[rows])
    start, own = start_of(flow.method, batch.coupons, flow.reduced, flow.scatter, rows)
    sound, indents_sound = (
        ~emptied("dislocation_stress_mpa", found.bits[rows]) for found in (findings, batch.findings)
    )
    return Beside(start, sound, indents_sound), own


def _empty(name: str) -> pa.Table:
    fields = contracts.load(f"out/{name}").fields
    kinds = {"number": pa.float64(), "integer": pa.int64()}
    return pa.table({f.name: pa.array([], kinds.get(f.type, pa.string())) for f in fields})
