"""The coupons of results, ready for the furnace: stored energy and stress with their inputs.

Results keep for every input of every coupon what it contributes to a quantity. So each input
comes in here scaled to a standard uncertainty of 1, and its sensitivity is that contribution.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.errors import UsageError
from coldwork.interval.combine import Ends, Spread
from coldwork.interval.onward import Pivot
from coldwork.measured import Measured, Value
from coldwork.results.disk import shown
from coldwork.results.read import blocks, document, read_table
from coldwork.units import to_si

__all__ = ["Worked", "read_worked", "scaled", "size_of"]

_Floats: TypeAlias = NDArray[np.float64]
ENERGY: Final = "stored_energy_j_per_m3"
STRESS: Final = "dislocation_stress_mpa"
_LABELS: Final = ("coupon_id", "lot_id", "condition")
_UNIT: Final = {ENERGY: "J/m3", STRESS: "MPa"}


@dataclass(frozen=True)
class Worked:
    """The n coupons of results. SI.

    Attributes
    ----------
    labels : mapping of str to tuple of str
        Columns ``coupon_id``, ``lot_id`` and ``condition``.
    energy : Pivot
        Stored energy per volume with its published interval. [J/m^3]
    stress : Pivot
        Dislocation stress that goes with it, above zero. [Pa]
    constants : mapping of str to Value
        The method's inputs by name.
    spreads : mapping of str to Spread
        Every input of these; each is scaled to a standard uncertainty of 1.
    method : mapping
        ``method.json``.
    """

    labels: Mapping[str, tuple[str, ...]]
    energy: Pivot
    stress: Pivot
    constants: Mapping[str, Value]
    spreads: Mapping[str, Spread]
    method: Mapping[str, Any]

    @property
    def ids(self) -> tuple[str, ...]:
        """Names of the coupons."""
        return self.labels["coupon_id"]

    @property
    def coverage(self) -> float:
        """Of the batch's intervals. [1]."""
        return float(self.method["uncertainty"]["coverage"])

    @property
    def metal(self) -> str:
        """Name of the metal."""
        return str(self.method["material"]["name"])


def read_worked(folder: Path) -> Worked:
    """Read what the furnace needs of results.

    Parameters
    ----------
    folder : Path
        The results of one batch, in full detail.

    Returns
    -------
    Worked
        Coupons in the order of ``coupons.csv``.

    Raises
    ------
    UsageError
        If no results are there, or they are a summary.
    """
    method = document(folder, "method")
    if method["output"]["detail"] != "full":
        message = (
            f"{shown(folder)}: these results are a summary and hold no budgets; "
            "process the batch with [output] detail = 'full'"
        )
        raise UsageError(message)
    listed = read_table(folder, "coupons")
    labels = {name: tuple(map(str, listed.column(name).to_pylist())) for name in _LABELS}
    ids = pa.array(labels["coupon_id"], pa.string())
    given = {name: _quantity(folder, name) for name in _UNIT}
    acting = _of_budget(folder, ids)
    constants, spreads = {}, {}
    for name, entry in method["inputs"].items():
        constants[name], spreads[name] = scaled(
            name,
            float(to_si(entry["value"], entry["unit"])),
            entry["u"] * size_of(entry["unit"]),
            shared=entry["shared"],
            degrees_of_freedom=entry["degrees_of_freedom"],
        )
    slopes: dict[str, dict[str, _Floats]] = {name: {} for name in _UNIT}
    for (quantity, source), part in acting.items():
        slopes[quantity][source] = part.contribution
        spreads[source] = Spread(1.0, part.shared, part.degrees_of_freedom)
    energy, stress = given[ENERGY], given[STRESS]
    return Worked(
        labels=labels,
        energy=Pivot(Measured(energy["value"], slopes[ENERGY]), _ends(energy)),
        stress=_above_zero(Pivot(Measured(stress["value"], slopes[STRESS]), _ends(stress))),
        constants=constants,
        spreads=spreads,
        method=method,
    )


def scaled(
    name: str, value: float, u: float, *, shared: bool, degrees_of_freedom: float | None
) -> tuple[Value, Spread]:
    """Make an input that is scaled to a standard uncertainty of 1. [SI]."""
    exact = np.float64(value)
    measured = Measured(np.asarray(value), {name: np.asarray(u)}) if u > 0.0 else exact
    return measured, Spread(1.0, shared, degrees_of_freedom or np.inf)


def size_of(unit: str) -> float:
    """Give the size of one unit in SI, any offset aside."""
    return float(to_si(1.0, unit) - to_si(0.0, unit))


@dataclass(frozen=True)
class _Part:
    """What one input contributes to one quantity, shape (n,) each."""

    contribution: _Floats
    shared: bool
    degrees_of_freedom: _Floats


def _quantity(folder: Path, quantity: str) -> dict[str, _Floats]:
    """Read value and ends of a quantity, a row a coupon. [SI]."""
    picked = [
        block.filter(pc.equal(block.column("quantity"), pa.scalar(quantity)))
        for block in blocks(folder, "quantities")
    ]
    table = pa.Table.from_batches(picked)
    return {
        name: to_si(_numbers(table, name), _UNIT[quantity]) for name in ("value", "lower", "upper")
    }


def _ends(given: Mapping[str, _Floats]) -> Ends:
    return Ends(given["lower"], given["upper"])


def _above_zero(given: Pivot) -> Pivot:
    """Blank a stress that is none, and cut the ends at zero."""
    x, ends = given.value, given.ends
    value = np.where(x.value > 0.0, x.value, np.nan)
    cut = Ends(np.maximum(ends.lower, 0.0), np.where(ends.upper > 0.0, ends.upper, np.nan))
    return Pivot(Measured(value, x.sensitivities), cut)


def _of_budget(folder: Path, ids: pa.StringArray) -> dict[tuple[str, str], _Part]:
    """Read what every input contributes to stored energy and stress. [SI]."""
    found: dict[tuple[str, str], _Part] = {}
    for block in blocks(folder, "budget"):
        for quantity, unit in _UNIT.items():
            mine = block.filter(pc.equal(block.column("quantity"), pa.scalar(quantity)))
            table = pa.Table.from_batches([mine])
            size = size_of(unit)
            for source in map(str, pc.unique(table.column("input")).to_pylist()):
                rows = table.filter(pc.equal(table.column("input"), pa.scalar(source)))
                place = pc.index_in(rows.column("coupon_id"), value_set=ids).to_numpy()
                part = found.setdefault((quantity, source), _nothing(rows, len(ids)))
                part.contribution[place] = _numbers(rows, "contribution") * size
                freedom = _numbers(rows, "degrees_of_freedom")
                part.degrees_of_freedom[place] = np.where(np.isnan(freedom), np.inf, freedom)
    return found


def _nothing(rows: pa.Table, n: int) -> _Part:
    shared = rows.column("own_or_shared")[0].as_py() == "shared"
    return _Part(np.zeros(n), shared, np.full(n, np.inf))


def _numbers(table: pa.Table, name: str) -> _Floats:
    column = table.column(name).to_numpy(zero_copy_only=False)
    return np.asarray(column, dtype=np.float64)
