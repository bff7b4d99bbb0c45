"""schedule.csv: a furnace's temperature over time, read whole or refused."""

from pathlib import Path
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.errors import BatchRefused, Cause
from coldwork.formulas.schedule import Schedule, schedule
from coldwork.inputs.words import shown
from coldwork.intake.files import BLOCK_BYTES, SourceFile, TableFiles
from coldwork.intake.whole import WholeTable, capped, read_whole
from coldwork.units import to_si

__all__ = ["read_schedule"]

_WHY: Final = "A row is a time and the temperature at that time."


def read_schedule(path: Path) -> tuple[Schedule, SourceFile]:
    """Read a furnace schedule.

    Parameters
    ----------
    path : Path
        A CSV in the form of ``in/schedule``.

    Returns
    -------
    Schedule
        Temperature over time. [K], [s]
    SourceFile
        What was read.

    Raises
    ------
    BatchRefused
        If the file cannot be read, a cell is empty or no number in its range, a time lies
        before the one above it, or nothing lasts any time.
    """
    files = TableFiles(contracts.load("in/schedule"), path.parent.resolve(), (path.resolve(),))
    table = read_whole(files, BLOCK_BYTES)
    columns = table.columns("UTC")
    causes = []
    for name, column in columns.items():
        for fault in column.faults:
            for row, raw, words in table.hinted(fault):
                what = f"{fault.reason.statement}: {shown(raw)}" if raw else "the cell is empty"
                mend = f"{words[0].upper()}{words[1:]}." if raw else "Fill it."
                causes.append(Cause(table.where(row, name), what, _WHY, mend))
    causes = capped(causes)
    if not causes:
        times = np.asarray(columns["time_s"].values if columns else [], dtype=np.float64)
        causes = _disorder(times, table)
    if causes:
        raise BatchRefused(str(path), causes)
    kelvin = to_si(np.asarray(columns["temperature_c"].values, dtype=np.float64), "Cel")
    return schedule(times, kelvin), table.sources[0]


def _disorder(times: NDArray[np.float64], table: WholeTable) -> list[Cause]:
    if times.size < 2 or times[-1] <= times[0]:
        return [
            Cause(
                table.files.names[0],
                f"it has {times.size} rows and lasts {np.ptp(times) if times.size else 0.0:g} s",
                "A schedule has two rows or more, and the last is later than the first.",
                "Write begin and end of every stretch.",
            )
        ]
    return capped(
        [
            Cause(
                table.where(row + 1, "time_s"),
                f"{times[row + 1]:g} s comes after {times[row]:g} s",
                "Times do not fall from row to row.",
                "Put the rows in order; one time on two rows is a jump.",
            )
            for row in map(int, np.flatnonzero(np.diff(times) < 0.0))
        ]
    )
