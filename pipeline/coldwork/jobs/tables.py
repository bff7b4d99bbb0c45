"""Published tables of a slice: from SI arrays to the columns and units of the contracts."""

from collections.abc import Mapping, Sequence
from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.interval.combine import Spread
from coldwork.interval.lots import LotMean
from coldwork.jobs.evaluate import GRAIN, QUANTITIES, REPEATABILITY
from coldwork.jobs.figures import Figures, emptied
from coldwork.reduce.reduced import Reduced
from coldwork.rules.forces import force_labels

__all__ = [
    "WITH_UNCERTAINTY",
    "budget_table",
    "coupons_table",
    "lots_table",
    "quantities_table",
    "unit_of",
]

_Floats = NDArray[np.float64]

WITH_UNCERTAINTY: Final = (
    "hardness",
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "line_energy_j_per_m",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_mol",
    "stored_energy_j_per_g",
)


def unit_of(quantity: str) -> str:
    """Unit in which a quantity is published (UCUM)."""
    return contracts.load("out/coupons").field(quantity).unit or "1"


def coupons_table(
    method: Method,
    coupons: Coupons,
    reduced: Reduced,
    rows: slice,
    figures: Mapping[str, Figures],
    test_strain: _Floats,
    bits: NDArray[np.uint64],
    rest: Mapping[str, pa.Array],
) -> pa.Table:
    """Build a slice of ``coupons.csv``.

    Parameters
    ----------
    method, coupons, reduced
        The batch.
    rows : slice
        Which coupons, n of them.
    figures : mapping of str to Figures
        Their quantities, emptied where errors say so. [SI]
    test_strain : ndarray, shape (n,)
        Plastic strain that the test added to the state. [1]
    bits : ndarray of uint64, shape (n,)
        Their findings.
    rest : mapping of str to pyarrow.Array
        Columns that the judge and the records fill.

    Returns
    -------
    pyarrow.Table
        In the contract's order and units.
    """
    n = test_strain.shape[0]

    def same(text: str) -> pa.Array:
        return pa.repeat(pa.scalar(text, pa.string()), n)

    label = force_labels(reduced.scale[rows], reduced.force[rows], reduced.ball[rows])
    gone = pa.array(emptied("hardness_scale", bits))
    columns: dict[str, pa.Array] = {
        "batch_id": same(method.batch_id),
        "coupon_id": coupons.ids[rows],
        "lot_id": coupons.lot_ids[rows],
        "condition": coupons.conditions[rows],
        "material": same(method.material),
        "route": same(method.laws.route),
        "test_strain": pa.array(np.where(emptied("test_strain", bits), np.nan, test_strain)),
        "readings_used": pa.array(reduced.used[rows]),
        "hardness_scale": pc.if_else(gone, pa.scalar(None, pa.string()), label),
        **rest,
    }
    for name in QUANTITIES:
        columns[name] = _published(name, figures[name].result.value if name in figures else None, n)
    for name in WITH_UNCERTAINTY:
        found = figures.get(name)
        for prefix, values in _spread_columns(found).items():
            columns[f"{prefix}_{name}"] = _published(name, values, n)
    return pa.table({name: columns[name] for name in contracts.load("out/coupons").columns})


def quantities_table(
    method: Method, coupons: Coupons, rows: slice, figures: Mapping[str, Figures]
) -> pa.Table:
    """Build a slice of ``quantities.csv``: every quantity of every coupon on a row of its own.

    Returns
    -------
    pyarrow.Table
        Coupon by coupon, n times the number of quantities rows.
    """
    names = [name for name in QUANTITIES if name in figures]
    n = len(coupons.ids[rows])

    def interleaved(columns: Sequence[_Floats | None]) -> pa.Array:
        filled = [_published(q, c, n) for q, c in zip(names, columns, strict=True)]
        return pa.array(np.stack([c.to_numpy() for c in filled], axis=1).ravel())

    spread = [_spread_columns(figures[name]) for name in names]
    freedom = [np.where(np.isinf(x), np.nan, x) for x in _freedom(figures, names)]
    return pa.table(
        {
            "coupon_id": _each(coupons.ids[rows], len(names)),
            "quantity": pa.array(names * n, pa.string()),
            "value": interleaved([figures[q].result.value for q in names]),
            "unit": pa.array([unit_of(q) for q in names] * n, pa.string()),
            **{
                key: interleaved([columns[key] for columns in spread])
                for key in ("u_own", "u_shared", "u", "lower", "upper")
            },
            "coverage": pa.array(np.full(n * len(names), method.coverage)),
            "degrees_of_freedom": pa.array(np.stack(freedom, axis=1).ravel()),
        }
    )


def budget_table(
    method: Method,
    coupons: Coupons,
    rows: slice,
    figures: Mapping[str, Figures],
    spreads: Mapping[str, Spread],
    own_values: Mapping[str, _Floats],
) -> pa.Table:
    """Build a slice of ``budget.csv``: every input of every quantity of every coupon.

    Parameters
    ----------
    method, coupons, rows, figures
        As above.
    spreads : mapping of str to Spread
        Every input's uncertainty. [SI]
    own_values : mapping of str to ndarray, shape (n,)
        Values of the coupons' own inputs. [SI]

    Returns
    -------
    pyarrow.Table
        By coupon, then quantity, then input; only where there is a value.
    """
    pairs = [
        (quantity, source)
        for quantity in QUANTITIES
        if quantity in figures
        for source in figures[quantity].result.sensitivities
    ]
    n = len(coupons.ids[rows])
    parts: dict[str, list[_Floats]] = {
        key: []
        for key in ("value", "u", "sensitivity", "contribution", "freedom", "share")
    }
    units_in: list[str] = []
    for quantity, source in pairs:
        unit_in, unit_out = _input_unit(method, source), unit_of(quantity)
        units_in.append(unit_in)
        spread = spreads[source]
        c = np.broadcast_to(figures[quantity].result.sensitivities[source], (n,))
        known = np.isfinite(figures[quantity].result.value)
        c = np.where(known, c, np.nan)
        u = np.broadcast_to(spread.u, (n,))
        value = own_values.get(source)
        value = np.full(n, method.inputs[source].value) if value is None else value
        freedom = np.broadcast_to(spread.degrees_of_freedom, (n,))
        with np.errstate(invalid="ignore", divide="ignore"):
            share = (c * u / figures[quantity].combined.u) ** 2
        parts["value"].append(units.from_si(value, unit_in))
        parts["u"].append(u / _size(unit_in))
        parts["sensitivity"].append(c * _size(unit_in) / _size(unit_out))
        parts["contribution"].append(c * u / _size(unit_out))
        parts["freedom"].append(np.where(np.isinf(freedom), np.nan, freedom))
        parts["share"].append(share)
    flat = {key: np.stack(columns, axis=1).ravel() for key, columns in parts.items()}
    keep = np.flatnonzero(np.isfinite(flat["sensitivity"]))
    shared = ["shared" if spreads[s].shared else "own" for _, s in pairs]
    table = pa.table(
        {
            "coupon_id": _each(coupons.ids[rows], len(pairs)),
            "quantity": pa.array([q for q, _ in pairs] * n, pa.string()),
            "input": pa.array([s for _, s in pairs] * n, pa.string()),
            "value": pa.array(flat["value"]),
            "unit": pa.array(units_in * n, pa.string()),
            "u": pa.array(flat["u"]),
            "sensitivity": pa.array(flat["sensitivity"]),
            "contribution": pa.array(flat["contribution"]),
            "contribution_unit": pa.array([unit_of(q) for q, _ in pairs] * n, pa.string()),
            "own_or_shared": pa.array(shared * n, pa.string()),
            "degrees_of_freedom": pa.array(flat["freedom"]),
            "share_of_u2": pa.array(flat["share"]),
        }
    )
    return table.take(pa.array(keep))


def lots_table(
    keys: Sequence[tuple[str, str]],
    counts: Mapping[str, NDArray[np.int64]],
    decisions: Sequence[str],
    means: Mapping[str, LotMean],
) -> pa.Table:
    """Build ``lots.csv``.

    Parameters
    ----------
    keys : sequence of tuple
        Lot and condition of each row.
    counts : mapping of str to ndarray of int64
        Coupons in all, averaged, and by decision.
    decisions : sequence of str
        Of each lot; empty where there is no limit.
    means : mapping of str to LotMean
        By column name. [SI]

    Returns
    -------
    pyarrow.Table
        In the contract's order and units.
    """
    n = len(keys)
    columns: dict[str, pa.Array] = {
        "lot_id": pa.array([lot for lot, _ in keys], pa.string()),
        "condition": pa.array([condition for _, condition in keys], pa.string()),
        **{name: pa.array(count) for name, count in counts.items()},
        "decision": pa.array([d or None for d in decisions], pa.string()),
    }
    for name in WITH_UNCERTAINTY:
        mean = means.get(name)
        columns[f"mean_{name}"] = _published(name, None if mean is None else mean.value, n)
        for prefix, values in _spread_columns(mean).items():
            columns[f"{prefix}_{name}"] = _published(name, values, n)
    return pa.table({name: columns[name] for name in contracts.load("out/lots").columns})


def _spread_columns(x: Figures | LotMean | None) -> dict[str, _Floats | None]:
    if x is None:
        return dict.fromkeys(("u_own", "u_shared", "u", "lower", "upper"))
    return {
        "u_own": x.combined.u_own,
        "u_shared": x.combined.u_shared,
        "u": x.combined.u,
        "lower": x.ends.lower,
        "upper": x.ends.upper,
    }


def _freedom(figures: Mapping[str, Figures], names: Sequence[str]) -> list[_Floats]:
    return [
        np.where(
            np.isfinite(figures[q].combined.u), figures[q].combined.degrees_of_freedom, np.nan
        )
        for q in names
    ]


def _published(quantity: str, values: _Floats | None, n: int) -> pa.Array:
    """A quantity's values, or its uncertainty: quantities have units without offset."""
    if values is None:
        return pa.array(np.full(n, np.nan))
    return pa.array(units.from_si(np.broadcast_to(values, (n,)), unit_of(quantity)))


def _input_unit(method: Method, source: str) -> str:
    if source == GRAIN:
        return "um"
    if source == REPEATABILITY:
        return "MPa" if method.laws.route == "flow" else "kgf/mm2"
    return method.inputs[source].unit


def _size(unit: str) -> float:
    """SI size of one unit, any offset aside."""
    return float(units.to_si(1.0, unit) - units.to_si(0.0, unit))


def _each(ids: pa.StringArray, times: int) -> pa.Array:
    return ids.take(pa.array(np.repeat(np.arange(len(ids)), times)))
