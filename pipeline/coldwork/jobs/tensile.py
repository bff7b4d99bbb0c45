"""What the curves of a slice of coupons came to: ``tensile.csv`` and the records' part of it."""

from collections.abc import Mapping, Sequence
from math import isnan
from typing import Any, Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.intake.coupons import Coupons
from coldwork.interval.combine import Combined
from coldwork.jobs.gather import Gathered
from coldwork.jobs.offered import Baseline, Offered, offered, sheet_lines
from coldwork.measured import Measured
from coldwork.reduce.curve import CurveResult, Fit, Valued
from coldwork.reduce.tensile import Curves, CurveSummary
from coldwork.rules.bits import bit_of, rule_ids
from coldwork.rules.curve import CURVE_RULES

__all__ = ["baselines", "curve_records", "tensile_table"]

FloatArray = NDArray[np.float64]

_OFFSET: Final = 0.002  # of the proof stress that has a column [1]
_OF_RESULT: Final[Mapping[str, str]] = {  # column: attribute of the result
    "slope_gpa": "slope",
    "toe_strain": "toe_strain",
    "upper_yield_mpa": "upper_yield",
    "lower_yield_mpa": "lower_yield",
    "yield_elongation": "yield_elongation",
    "tensile_strength_mpa": "tensile_strength",
    "uniform_elongation": "uniform_elongation",
    "elongation_at_maximum_force": "total_elongation_at_max",
    "uniform_plastic_strain": "uniform_plastic_strain",
    "work_to_uniform_strain_j_per_m3": "work_to_uniform",
}
_OF_FITS: Final[Mapping[str, tuple[str, str]]] = {  # column: law and parameter
    "hardening_at_zero_stress_mpa": ("kocks-mecking", "initial_hardening"),
    "stress_at_zero_hardening_mpa": ("kocks-mecking", "saturation_stress"),
    "voce_yield_stress_mpa": ("voce", "yield_stress"),
    "voce_saturation_stress_mpa": ("voce", "saturation_stress"),
    "voce_initial_hardening_mpa": ("voce", "initial_hardening"),
    "hollomon_coefficient_mpa": ("hollomon", "coefficient"),
    "hollomon_exponent": ("hollomon", "exponent"),
}
_MISFITS: Final = {
    "line_misfit": "kocks-mecking",
    "voce_misfit": "voce",
    "hollomon_misfit": "hollomon",
}
_CURVE_BITS: Final = np.bitwise_or.reduce([bit_of(rule) for rule in CURVE_RULES], axis=0)
_SPREAD: Final = ("u_own", "u_shared", "u")


def baselines(result: Measured, combined: Combined) -> list[Baseline]:
    """Take the baseline of each coupon of a slice out of the chain. [Pa]."""
    columns = (np.broadcast_to(result.value, combined.u.shape), combined.u_own, combined.u_shared)
    return [Baseline(*row) for row in zip(*(c.tolist() for c in columns), strict=True)]


def tensile_table(batch: Gathered, rows: slice, baseline: Sequence[Baseline]) -> pa.Table:
    """Build a slice of ``tensile.csv``.

    Parameters
    ----------
    batch : Gathered
        A batch with curves.
    rows : slice
        Which coupons, n of them.
    baseline : sequence of Baseline
        Theirs, n of them.

    Returns
    -------
    pyarrow.Table
        In the contract's order and units, a row per coupon.
    """
    curves, coupons = _curves(batch), batch.coupons
    found = [curves.summaries.get(i) for i in range(rows.start, rows.stop)]
    cells = [_cells(one, base) for one, base in zip(found, baseline, strict=True)]
    contract = contracts.load("out/tensile")
    tensile = batch.method.tensile
    columns: dict[str, Any] = {
        "coupon_id": coupons.ids[rows],
        "lot_id": coupons.lot_ids[rows],
        "condition": coupons.conditions[rows],
        "mode": pa.repeat(tensile.mode if tensile else "", len(found)),
        **_place(found),
        "points_set_aside": pa.array(curves.beside.set_aside.per_coupon[rows]),
        "flags": _flags(curves, rows),
    }
    for field in contract.fields:
        if field.name not in columns:
            values = np.array([one.get(field.name, np.nan) for one in cells])
            columns[field.name] = _published(values, field.unit or "1", whole=field.type)
    return pa.table({name: columns[name] for name in contract.columns})


def curve_records(
    batch: Gathered, rows: slice, baseline: Sequence[Baseline]
) -> list[dict[str, Any] | None]:
    """Tell of each coupon's curve what its record keeps.

    Parameters
    ----------
    batch, rows, baseline
        As for `tensile_table`.

    Returns
    -------
    list of dict or None
        n of them: where the curve stands, the row of ``tensile.csv``, proof stresses at
        all offsets, and the constants of relation 6 as lines for another sheet; None
        for a coupon without a curve.
    """
    curves = _curves(batch)
    row = tensile_table(batch, rows, baseline).to_pylist()
    told: list[dict[str, Any] | None] = []
    for i, base in zip(range(rows.start, rows.stop), baseline, strict=True):
        summary = curves.summaries.get(i)
        told.append(
            None
            if summary is None
            else _record(batch, batch.coupons, i, summary, row[i - rows.start], base)
        )
    return told


def _curves(batch: Gathered) -> Curves:
    if batch.curves is None:
        message = "the batch has no curves"
        raise RuntimeError(message)
    return batch.curves


def _record(
    batch: Gathered,
    coupons: Coupons,
    i: int,
    summary: CurveSummary,
    row: Mapping[str, Any],
    baseline: Baseline,
) -> dict[str, Any]:
    result = _trusted(summary)
    constants = None if result is None else offered(result.kocks_mecking, baseline)
    source = (
        f"curve of coupon {coupons.ids[i].as_py()}, batch {batch.method.batch_id}: "
        f"{summary.file}, lines {summary.first_line} to {summary.last_line}"
    )
    names = {"coupon_id", "lot_id", "condition"}
    results = {k: x for k, x in row.items() if k not in names and _is_something(x)}
    proof = {} if result is None else result.proof
    return {
        "file": summary.file,
        "first_line": summary.first_line,
        "last_line": summary.last_line,
        "read_at": dict(summary.read_at),
        "results": results,
        "proof_stresses_mpa": [
            {"offset": offset, **_told(x, "MPa")} for offset, x in sorted(proof.items())
        ],
        "for_another_sheet": None if constants is None else sheet_lines(constants, source),
    }


def _told(x: Valued, unit: str) -> dict[str, float]:
    value, u = units.from_si(np.array([x.value, x.u]), unit).tolist()
    return {"value": value, "u": u}


def _is_something(x: object) -> bool:
    return x is not None and x != "" and not (isinstance(x, float) and isnan(x))


def _trusted(summary: CurveSummary | None) -> CurveResult | None:
    return summary.result if summary is not None and summary.trusted else None


def _cells(summary: CurveSummary | None, baseline: Baseline) -> dict[str, float]:
    """Give the numbers of one row in SI, those that are not there left out."""
    result = _trusted(summary)
    if result is None:
        return {}
    cells: dict[str, float] = {}
    for column, x in _valued(result).items():
        if x is not None:
            shared = float(np.sqrt(sum(c**2 for c in x.u_shared.values())))
            _fill(cells, column, x.value, x.u_own, shared)
    constants = offered(result.kocks_mecking, baseline)
    if constants is not None:
        cells |= _relation_6(constants)
    for column, law in _MISFITS.items():
        fit = _fit(result, law)
        if fit is not None:
            cells[column] = fit.misfit
    cells["tensile_strength_bias_mpa"] = result.tensile_strength_bias
    if result.neck is not None:
        cells["neck_strain"] = result.neck.strain
    if result.rate_changes:
        longest = max(result.rate_changes, key=lambda part: part.stop - part.start)
        cells["strain_rate_per_s"] = longest.strain_rate
        cells["rate_changes"] = float(len(result.rate_changes) - 1)
    return cells


def _valued(result: CurveResult) -> dict[str, Valued | None]:
    found: dict[str, Valued | None] = {
        column: getattr(result, name) for column, name in _OF_RESULT.items()
    }
    if not result.slope_is_modulus:
        found["slope_gpa"] = None
    found["proof_stress_0_2_mpa"] = result.proof.get(_OFFSET)
    found["neck_stress_mpa"] = None if result.neck is None else result.neck.flow_stress
    for column, (law, name) in _OF_FITS.items():
        fit = _fit(result, law)
        found[column] = None if fit is None else fit.valued(name)
    return found


def _fit(result: CurveResult, law: str) -> Fit | None:
    return result.kocks_mecking if law == "kocks-mecking" else result.fits.get(law)


def _relation_6(found: Offered) -> dict[str, float]:
    cells = {"correlation_hardening_saturation": found.correlation}
    for i, column in enumerate(("initial_hardening_mpa", "saturation_stress_mpa")):
        own, shared = float(np.sqrt(found.own[i, i])), float(np.sqrt(found.shared[i, i]))
        _fill(cells, column, float(found.values[i]), own, shared)
    return cells


def _fill(cells: dict[str, float], column: str, value: float, own: float, shared: float) -> None:
    cells[column] = value
    for prefix, u in zip(_SPREAD, (own, shared, float(np.hypot(own, shared))), strict=True):
        cells[f"{prefix}_{column}"] = u


def _place(found: Sequence[CurveSummary | None]) -> dict[str, Any]:
    def each(name: str, kind: pa.DataType) -> Any:  # noqa: ANN401 - an Arrow array of any kind
        return pa.array([None if one is None else getattr(one, name) for one in found], kind)

    points = [0 if one is None else one.points for one in found]
    return {
        "strain_from": each("lengths", pa.string()),
        "file": each("file", pa.string()),
        "first_line": each("first_line", pa.int64()),
        "last_line": each("last_line", pa.int64()),
        "points_used": pa.array(points, pa.int64()),
    }


def _flags(curves: Curves, rows: slice) -> pa.StringArray:
    """Join the ids of the rules on each curve; not those on the coupon's other readings."""
    return rule_ids(curves.beside.findings.bits[rows] & _CURVE_BITS)


def _published(values: FloatArray, unit: str, *, whole: str) -> Any:  # noqa: ANN401 - Arrow
    if whole == "integer":
        known = np.isfinite(values)
        return pa.array(np.where(known, values, 0.0).astype(np.int64), mask=~known)
    return pa.array(units.from_si(values, unit))
