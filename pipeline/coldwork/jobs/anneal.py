"""From results to the furnace: pressures, sizes, recovery, recrystallisation, heat."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from importlib.metadata import version
from math import isfinite
from pathlib import Path
from typing import Any, Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

import coldwork
from coldwork import contracts, materials
from coldwork.errors import UsageError
from coldwork.formulas.schedule import Schedule
from coldwork.inputs.furnace import Furnace, read_furnace
from coldwork.inputs.numbers import Given
from coldwork.inputs.quantity import Input
from coldwork.intake.schedule import read_schedule
from coldwork.interval.combine import Ends, Spread, combine
from coldwork.interval.onward import Outcome, Pivot, onward
from coldwork.jobs.annealing.coupons import Worked, read_worked, scaled
from coldwork.jobs.annealing.states import (
    ENERGY,
    REACTION,
    RECOVERED,
    STRESS,
    Row,
    States,
    reaction_of,
)
from coldwork.jobs.annealing.table import anneal_table
from coldwork.jobs.annealing.words import sentences, text_of
from coldwork.measured import Measured, Value, value_of
from coldwork.results.apart import open_apart
from coldwork.results.disk import shown
from coldwork.results.read import sha256_of
from coldwork.statistics.student import student_quantile

__all__ = ["Anneal", "anneal"]

_BOUNDARY: Final = "boundary.energy_j_per_m2"
_COMPUTING: Final = ("numpy", "scipy", "pyarrow")


@dataclass(frozen=True)
class Anneal:
    """What the stored energy of a batch's coupons does in the furnace.

    Attributes
    ----------
    worked : Worked
        The coupons.
    furnace : Furnace
        What was given, with the library's boundary energy where that was taken.
    schedule : Schedule or None
        Temperature over time.
    states : States
        What the outcomes were computed from.
    spreads : mapping of str to Spread
        Of every input.
    outcomes : mapping of Row to Outcome
        By state and quantity, n coupons each. [SI]
    table : pyarrow.Table
        ``anneal.csv``.
    said : tuple of str
        What it leans on, what could not be predicted, and cautions.
    read : tuple of (str, str)
        Name and SHA-256 of every file that was read.
    """

    worked: Worked
    furnace: Furnace
    schedule: Schedule | None
    states: States
    spreads: Mapping[str, Spread]
    outcomes: Mapping[Row, Outcome]
    table: pa.Table
    said: tuple[str, ...]
    read: tuple[tuple[str, str], ...]

    def text(self) -> str:
        """Tell it to a person, rounded."""
        return text_of(self.worked, self.outcomes, self.said)

    def account(self) -> dict[str, Any]:
        """Give what the table leans on, but for the files that are written."""
        return {
            "schema_version": contracts.document("account")["version"],
            "command": "anneal",
            "batch_id": self.worked.method["batch_id"],
            "material": self.worked.metal,
            "coverage": self.worked.coverage,
            "read": [{"path": path, "sha256": digest} for path, digest in self.read],
            "inputs": {name: _entry(given) for name, given in self.furnace.numbers.items()},
            "choices": [],
            "said": list(self.said),
            "versions": {"coldwork": coldwork.__version__}
            | {name: version(name) for name in _COMPUTING},
        }

    def as_json(self) -> dict[str, Any]:
        """Give account and table for a program to read; what is absent is null."""
        rows = [
            {
                key: None if isinstance(cell, float) and not isfinite(cell) else cell
                for key, cell in row.items()
            }
            for row in self.table.to_pylist()
        ]
        return self.account() | {"rows": rows}

    def write(self, folder: Path, *, plots: bool = True) -> Path:
        """Write table, account and plots into a new folder, whole or not at all.

        Raises
        ------
        ResultsNotWritten
            If it is there already or cannot be written.
        """
        with open_apart(folder) as apart:
            apart.add("anneal", self.table)
            if plots:
                from coldwork.jobs.annealing.drawing import drawn  # here: it takes half a second

                for name, data in drawn(self.worked, self.states, self.spreads, self.table):
                    apart.write(name, data)
            return apart.commit(self.account())


def anneal(folder: Path, furnace: Path | None = None, schedule: Path | None = None) -> Anneal:
    """Take the coupons of results through a furnace.

    Parameters
    ----------
    folder : Path
        The results of one batch, in full detail.
    furnace : Path, optional
        A furnace file.
    schedule : Path, optional
        A schedule as CSV.

    Returns
    -------
    Anneal
        What can be predicted of each coupon, and what cannot.

    Raises
    ------
    UsageError
        If a file or the results are not there, or the results are a summary.
    BatchRefused
        If a file that was given does not fit.
    """
    for path in (furnace, schedule):
        if path is not None and not path.is_file():
            message = f"{shown(path)}: there is no such file"
            raise UsageError(message)
    worked = read_worked(folder)
    given = _completed(worked, Furnace() if furnace is None else read_furnace(furnace))
    heating, source = (None, None) if schedule is None else read_schedule(schedule)
    numbers, spreads = _numbers(worked, given)
    hold = given.hold_temperature
    if hold is None and heating is not None:
        hold = float(heating.temperatures.max())
    asked = (hold, given.hold_time, given.fractions)
    states = States(numbers, worked.energy.value, worked.stress.value, heating, *asked)
    outcomes = _outcomes(worked, states, spreads)
    read = [("manifest.json", sha256_of(folder / "manifest.json")), *given.file]
    read += [(source.path, source.sha256)] if source is not None else []
    return Anneal(
        worked=worked,
        furnace=given,
        schedule=heating,
        states=states,
        spreads=spreads,
        outcomes=outcomes,
        table=anneal_table(worked.ids, outcomes, worked.coverage),
        said=sentences(worked, given, states, outcomes),
        read=tuple(read),
    )


def _outcomes(worked: Worked, states: States, spreads: Mapping[str, Spread]) -> dict[Row, Outcome]:
    """Compute every state: what recovery leaves first, then what that drives and holds."""
    coverage = worked.coverage
    pivots, first = {ENERGY: worked.energy}, {}
    drives = worked.energy.value.value
    if states.recovers:
        pivots[STRESS] = worked.stress
        first = onward(states.recovery, {STRESS: worked.stress}, spreads, coverage)
        left = first[Row("recovered", "driving_pressure_mpa")]
        pivots[RECOVERED] = Pivot(left.result, left.ends)
        drives = left.value
    if states.has_kinetics and states.heating is not None:
        free = drives - sum(value_of(drag) for drag in states.drags.values()) > 0.0
        pivots[REACTION] = _reaction(states, states.heating, spreads, free, coverage)
    rows = onward(states.work, pivots, spreads, coverage)
    stress = {row: x for row, x in first.items() if row not in rows}
    before = [row for row in rows if row.state == "cold-worked"]
    return {row: rows[row] for row in before} | stress | rows


def _completed(worked: Worked, given: Furnace) -> Furnace:
    """Take the boundary energy from the library where the file gives none, and refuse gaps."""
    numbers = dict(given.numbers)
    if _BOUNDARY not in numbers and worked.metal in materials.names():
        entry = materials.load(worked.metal).values.get("boundary_energy_j_per_m2")
        if entry is not None:
            found = Input(_BOUNDARY, entry.value, entry.u, "J/m2", source=entry.source)
            numbers[_BOUNDARY] = Given(replace(found, origin="library"), entry.value, entry.u)
    needs = [s for s in ("particles", "boundary") if given.has(s)]
    if needs and _BOUNDARY not in numbers:
        message = (
            f"the library has no boundary energy of {worked.metal!r}: say [boundary] "
            "energy_j_per_m2 in the furnace file"
        )
        raise UsageError(message)
    if given.has("recovery"):
        for key in ("taylor_factor", "coefficient"):
            if f"recovery.{key}" not in numbers and f"hardening.{key}" not in worked.constants:
                message = (
                    f"the batch gave its slope as one number: say [recovery] {key} in the "
                    "furnace file"
                )
                raise UsageError(message)
    return replace(given, numbers=numbers)


def _numbers(worked: Worked, given: Furnace) -> tuple[dict[str, Value], dict[str, Spread]]:
    """Join the numbers of batch and furnace file; ln B_0 and Q may share an error."""
    numbers, spreads = dict(worked.constants), dict(worked.spreads)
    for key in ("taylor_factor", "coefficient"):
        if given.has("recovery") and f"hardening.{key}" in numbers:
            numbers[f"recovery.{key}"] = numbers[f"hardening.{key}"]
    for name, x in given.numbers.items():
        numbers[name], spreads[name] = scaled(
            name,
            x.input.value,
            x.input.u,
            shared=x.input.shared,
            degrees_of_freedom=x.input.degrees_of_freedom,
        )
    first, second = (
        f"recrystallisation.{key}" for key in ("prefactor_per_s", "activation_energy_kj_per_mol")
    )
    b, q, r = numbers.get(first), numbers.get(second), given.correlation
    if isinstance(b, Measured) and isinstance(q, Measured) and r:
        u = q.sensitivities[second]
        numbers[second] = Measured(q.value, {first: r * u, second: np.sqrt(1.0 - r**2) * u})
    return numbers, spreads


def _reaction(
    states: States,
    heating: Schedule,
    spreads: Mapping[str, Spread],
    free: NDArray[np.bool_],
    coverage: float,
) -> Pivot:
    """Give ln(-ln(1 - X)) of every coupon whose boundary is not held, with its interval."""
    one = reaction_of(states.numbers, heating)
    value = Measured(np.where(free, one.value, np.nan), one.sensitivities)
    known = combine(value, spreads)
    reach = student_quantile((1.0 + coverage) / 2.0, known.degrees_of_freedom) * known.u
    return Pivot(value, Ends(value.value - reach, value.value + reach))


def _entry(given: Given) -> dict[str, object]:
    found = given.input
    freedom = found.degrees_of_freedom
    return {
        "value": given.value,
        "u": given.u,
        "unit": found.unit,
        "shape": found.shape,
        "factor": found.factor,
        "shared": found.shared,
        "degrees_of_freedom": freedom if isfinite(freedom) else None,
        "source": found.source or None,
        "origin": found.origin,
    }
