"""verification.csv: readings of testers on reference blocks, every row of it or nothing."""

from collections.abc import Mapping
from datetime import UTC, date, datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.words import shown
from coldwork.intake.column import Column
from coldwork.intake.files import BLOCK_BYTES, SourceFile, TableFiles
from coldwork.intake.whole import WholeTable, capped, read_whole
from coldwork.statistics.tester_checks import Check

__all__ = ["Checks", "read_verification"]

Checks = Mapping[str, list[tuple[date, Check]]]
"""By tester: its checks with their days, in the order of the days."""

_WHY = "A tester is judged by every reading of its checks."
_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


def read_verification(files: TableFiles, zone: str) -> tuple[Checks, tuple[SourceFile, ...]]:
    """Read the daily checks of testers.

    Parameters
    ----------
    files : TableFiles
        The file and its contract, ``in/verification``.
    zone : str
        IANA name of the zone in which a time without one is meant, and whose days count.

    Returns
    -------
    Checks
        One for each tester, block and day.
    tuple of SourceFile
        What was read.

    Raises
    ------
    BatchRefused
        If the file cannot be trusted as a whole, a cell cannot be read, or a block has two
        certified values on one day.
    """
    table = read_whole(files, BLOCK_BYTES)
    columns = table.columns(zone)
    causes = [cause for column in columns.values() for cause in _cell_causes(column, table)]
    if causes:
        raise BatchRefused(str(files.folder), causes)
    numbers = {
        name: np.asarray(columns[name].values, dtype=np.float64)
        for name in ("hardness", "certified_hardness", "u_certified_hardness")
    }
    times = np.asarray(columns["measured_at"].values, dtype=np.int64)
    here = ZoneInfo(zone)
    rows: dict[tuple[str, date, str], list[int]] = {}
    for row in range(len(times)):
        day = (_EPOCH + timedelta(microseconds=int(times[row]))).astimezone(here).date()
        tester, block = (str(columns[name].text[row]) for name in ("tester", "block_id"))
        rows.setdefault((tester, day, block), []).append(row)
    found: dict[str, list[tuple[date, Check]]] = {}
    for (tester, day, block), some in sorted(rows.items()):
        certified, u = (numbers[n][some] for n in ("certified_hardness", "u_certified_hardness"))
        if np.ptp(certified) > 0.0 or np.ptp(u) > 0.0:
            what = f"block {shown(block)} has two certified values on one day"
            where = table.where(some[0], "certified_hardness")
            causes.append(Cause(where, what, "A block has one.", "Correct one of the two."))
            continue
        check = Check(numbers["hardness"][some], float(certified[0]), float(u[0]))
        found.setdefault(tester, []).append((day, check))
    if causes:
        raise BatchRefused(str(files.folder), capped(causes))
    return found, table.sources


def _cell_causes(column: Column, table: WholeTable) -> list[Cause]:
    causes = []
    for fault in column.faults:
        for row, raw, words in table.hinted(fault):
            what = f"{fault.reason.statement}: {shown(raw)}" if raw else "the cell is empty"
            mend = f"{words[0].upper()}{words[1:]}." if raw else "Fill it."
            causes.append(Cause(table.where(row, fault.column), what, _WHY, mend))
    return capped(causes)
