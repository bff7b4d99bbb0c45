"""Published tables of a slice: from SI arrays to the columns and units of the contracts."""

from collections.abc import Mapping, Sequence
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.inputs.method import Method
from coldwork.interval.combine import Spread
from coldwork.interval.lots import LotMean
from coldwork.jobs.evaluate import FLOW_REPEATABILITY, GRAIN, QUANTITIES, REPEATABILITY
from coldwork.jobs.figures import Figures
from coldwork.jobs.gather import Gathered
from coldwork.rules.bits import emptied
from coldwork.rules.forces import force_labels

__all__ = [
    "WITH_UNCERTAINTY",
    "budget_table",
    "coupons_table",
    "lots_table",
    "quantities_table",
    "unit_of",
    "unit_of_mean",
]

_Floats = NDArray[np.float64]
_Column: TypeAlias = "pa.Array[Any]"

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
_SPREAD: Final = ("u_own", "u_shared", "u", "lower", "upper")


def unit_of(quantity: str) -> str:
    """Give the unit in which a quantity is published (UCUM)."""
    return contracts.load("out/coupons").field(quantity).unit or "1"


def unit_of_mean(method: Method) -> str:
    """Give the unit in which the mean of the readings is published (UCUM)."""
    return unit_of("flow_stress_mpa" if method.laws.route == "flow" else "hardness")


def coupons_table(
    batch: Gathered,
    rows: slice,
    figures: Mapping[str, Figures],
    test_strain: _Floats,
    rest: Mapping[str, _Column],
) -> pa.Table:
    """Build a slice of ``coupons.csv``.

    Parameters
    ----------
    batch : Gathered
        The batch.
    rows : slice
        Which coupons, n of them.
    figures : mapping of str to Figures
        Their quantities, emptied where errors say so. [SI]
    test_strain : ndarray, shape (n,)
        Plastic strain that the test added to the state. [1]
    rest : mapping of str to pyarrow.Array
        Columns that the judge and the records fill.

    Returns
    -------
    pyarrow.Table
        In the contract's order and units.
    """
    n = test_strain.shape[0]
    method, coupons, reduced = batch.method, batch.coupons, batch.reduced
    bits = batch.findings.bits[rows]
    label = force_labels(reduced.scale[rows], reduced.force[rows], reduced.ball[rows])
    gone = pa.array(emptied("hardness_scale", bits))
    columns: dict[str, _Column] = {
        "batch_id": pa.repeat(method.batch_id, n),
        "coupon_id": coupons.ids[rows],
        "lot_id": coupons.lot_ids[rows],
        "condition": coupons.conditions[rows],
        "material": pa.repeat(method.material, n),
        "route": pa.repeat(method.laws.route, n),
        "test_strain": pa.array(np.where(emptied("test_strain", bits), np.nan, test_strain)),
        "hardness_scale": pc.if_else(gone, pa.scalar(None, pa.string()), label),
        **rest,
    }
    for name in QUANTITIES:
        columns[name] = _published(name, figures[name].result.value if name in figures else None, n)
    for name in WITH_UNCERTAINTY:
        columns |= _published_spread(name, figures.get(name), n)
        sd = figures[name].sd if name in figures else None
        columns[f"sd_{name}"] = _published(name, sd, n)
    return pa.table({name: columns[name] for name in contracts.load("out/coupons").columns})


def quantities_table(batch: Gathered, rows: slice, figures: Mapping[str, Figures]) -> pa.Table:
    """Build a slice of ``quantities.csv``: every quantity of every coupon on a row of its own.

    Parameters
    ----------
    batch, rows, figures
        As for `coupons_table`.

    Returns
    -------
    pyarrow.Table
        Coupon by coupon, n times the number of quantities rows.
    """
    names = [name for name in QUANTITIES if name in figures]
    ids = batch.coupons.ids[rows]
    n = len(ids)

    def interleaved(columns: Sequence[_Floats | None]) -> pa.DoubleArray:
        filled = [_published(q, c, n) for q, c in zip(names, columns, strict=True)]
        return pa.array(_flat([c.to_numpy() for c in filled]), pa.float64())

    spread = [_spread_columns(figures[name]) for name in names]
    return pa.table(
        {
            "coupon_id": _each(ids, len(names)),
            "quantity": pa.array(names * n, pa.string()),
            "value": interleaved([figures[q].result.value for q in names]),
            "unit": pa.array([unit_of(q) for q in names] * n, pa.string()),
            **{key: interleaved([columns[key] for columns in spread]) for key in _SPREAD},
            "coverage": pa.array(np.full(n * len(names), batch.method.coverage)),
            "degrees_of_freedom": pa.array(_flat([_freedom(figures[name]) for name in names])),
        }
    )


def budget_table(
    batch: Gathered,
    rows: slice,
    figures: Mapping[str, Figures],
    spreads: Mapping[str, Spread],
    own_values: Mapping[str, _Floats],
) -> pa.Table:
    """Build a slice of ``budget.csv``: every input of every quantity of every coupon.

    Parameters
    ----------
    batch, rows, figures
        As for `coupons_table`.
    spreads : mapping of str to Spread
        Every input's uncertainty. [SI]
    own_values : mapping of str to ndarray, shape (n,)
        Values of the coupons' own inputs. [SI]

    Returns
    -------
    pyarrow.Table
        By coupon, then quantity, then input; only where there is a value that depends on it.
    """
    method = batch.method
    pairs = [
        (quantity, source)
        for quantity in QUANTITIES
        if quantity in figures
        for source in figures[quantity].result.sensitivities
    ]
    ids = batch.coupons.ids[rows]
    n = len(ids)
    parts: dict[str, list[_Floats]] = {key: [] for key in _BUDGET_NUMBERS}
    for quantity, source in pairs:
        value = own_values.get(source)
        value = np.full(n, method.inputs[source].value) if value is None else value
        unit_in, unit_out = _input_unit(method, source), unit_of(quantity)
        figure, spread = figures[quantity], spreads[source]
        line = _budget_numbers(value, spread, figure, source, unit_in, unit_out)
        for key, column in line.items():
            parts[key].append(column)
    flat = {key: _flat(columns) for key, columns in parts.items()}
    texts = {
        "quantity": [quantity for quantity, _ in pairs],
        "input": [source for _, source in pairs],
        "unit": [_input_unit(method, source) for _, source in pairs],
        "contribution_unit": [unit_of(quantity) for quantity, _ in pairs],
        "own_or_shared": ["shared" if spreads[source].shared else "own" for _, source in pairs],
    }
    columns: dict[str, _Column] = {
        "coupon_id": _each(ids, len(pairs)),
        **{key: pa.array(each * n, pa.string()) for key, each in texts.items()},
        **{key: pa.array(column) for key, column in flat.items()},
    }
    table = pa.table({name: columns[name] for name in contracts.load("out/budget").columns})
    acts = np.isfinite(flat["sensitivity"]) & (flat["sensitivity"] != 0.0)
    return table.take(pa.array(np.flatnonzero(acts), pa.int64()))


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
    columns: dict[str, _Column] = {
        "lot_id": pa.array([lot for lot, _ in keys], pa.string()),
        "condition": pa.array([condition for _, condition in keys], pa.string()),
        **{name: pa.array(count) for name, count in counts.items()},
        "decision": pa.array([d or None for d in decisions], pa.string()),
    }
    for name in WITH_UNCERTAINTY:
        mean = means.get(name)
        columns[f"mean_{name}"] = _published(name, None if mean is None else mean.value, n)
        columns |= _published_spread(name, mean, n)
    return pa.table({name: columns[name] for name in contracts.load("out/lots").columns})


_BUDGET_NUMBERS: Final = (
    "value",
    "u",
    "sensitivity",
    "contribution",
    "degrees_of_freedom",
    "share_of_u2",
)


def _budget_numbers(
    value: _Floats, spread: Spread, figure: Figures, source: str, unit_in: str, unit_out: str
) -> dict[str, _Floats]:
    """Give the numbers of one input of one quantity, n coupons each."""
    size_in, size_out = _size(unit_in), _size(unit_out)
    shape = value.shape
    c = np.broadcast_to(figure.result.sensitivities[source], shape)
    c = np.where(np.isfinite(figure.result.value), c, np.nan)
    u = np.broadcast_to(spread.u, shape)
    freedom = np.broadcast_to(spread.degrees_of_freedom, shape)
    with np.errstate(invalid="ignore", divide="ignore"):
        share = (c * u / figure.combined.u) ** 2
    numbers = (
        units.from_si(value, unit_in),
        u / size_in,
        c * size_in / size_out,
        c * u / size_out,
        np.where(np.isinf(freedom), np.nan, freedom),
        share,
    )
    return dict(zip(_BUDGET_NUMBERS, numbers, strict=True))


def _spread_columns(x: Figures | LotMean | None) -> dict[str, _Floats | None]:
    if x is None:
        return dict.fromkeys(_SPREAD)
    c = x.combined
    return dict(zip(_SPREAD, (c.u_own, c.u_shared, c.u, x.ends.lower, x.ends.upper), strict=True))


def _published_spread(quantity: str, x: Figures | LotMean | None, n: int) -> dict[str, _Column]:
    """Give the columns of uncertainties and interval ends, by name."""
    return {
        f"{prefix}_{quantity}": _published(quantity, values, n)
        for prefix, values in _spread_columns(x).items()
    }


def _freedom(x: Figures) -> _Floats:
    """Give effective degrees of freedom, NaN where they are infinite or u is not known."""
    nu = x.combined.degrees_of_freedom
    return np.where(np.isfinite(x.combined.u) & ~np.isinf(nu), nu, np.nan)


def _published(quantity: str, values: _Floats | None, n: int) -> pa.DoubleArray:
    """Convert a quantity's values, or its uncertainty: quantities have units without offset."""
    if values is None:
        return pa.array(np.full(n, np.nan), pa.float64())
    shown = units.from_si(np.broadcast_to(values, (n,)), unit_of(quantity))
    return pa.array(shown, pa.float64())


def _input_unit(method: Method, source: str) -> str:
    if source == GRAIN:
        return "um"
    if source == REPEATABILITY:
        return unit_of_mean(method)
    if source == FLOW_REPEATABILITY:
        return unit_of("flow_stress_mpa")
    return method.inputs[source].unit


def _size(unit: str) -> float:
    """Give the size of one unit in SI, any offset aside."""
    return float(units.to_si(1.0, unit) - units.to_si(0.0, unit))


def _flat(columns: Sequence[_Floats]) -> _Floats:
    """Lay columns of shape (n,) side by side and read them row by row."""
    return np.stack(columns, axis=1).ravel()


def _each(ids: pa.StringArray, times: int) -> pa.StringArray:
    return ids.take(pa.array(np.repeat(np.arange(len(ids)), times), pa.int64()))
