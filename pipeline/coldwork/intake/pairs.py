"""The table of a calibration: paired measurements, every row of it or nothing."""

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.words import listed, shown
from coldwork.intake.column import Column
from coldwork.intake.files import BLOCK_BYTES, TableFiles
from coldwork.intake.sources import check_headers
from coldwork.intake.whole import WholeTable, capped, read_whole

__all__ = ["Pairs", "read_pairs"]

FloatArray = NDArray[np.float64]
_WHY = "A calibration stands on every row of its table."


@dataclass(frozen=True)
class Pairs:
    """Paired measurements of n coupons.

    Attributes
    ----------
    name : str
        The table's file, as messages call it.
    digest : str
        SHA-256 of its bytes.
    ids : tuple of str, n
        The coupons.
    columns : dict of str to ndarray of float64, shape (n,)
        Every column of numbers that the table has, NaN where a cell is empty.
        [the column's unit]
    lines : ndarray of int64, shape (n,)
        Where each row stands.
    """

    name: str
    digest: str
    ids: tuple[str, ...]
    columns: dict[str, FloatArray]
    lines: NDArray[np.int64]

    def lacking(self, column: str) -> list[Cause]:
        """Say where a column that is needed has no number."""
        if column not in self.columns:
            here = listed(sorted(self.columns))
            what, mend = f"the column {column} is missing", f"Add it; there are {here}."
            return [Cause(self.name, what, "This kind of calibration needs it.", mend)]
        rows = np.flatnonzero(np.isnan(self.columns[column]))
        where = (f"{self.name}, line {self.lines[row]}, column {column}" for row in rows)
        return capped([Cause(at, "the cell is empty", _WHY, "Fill it.") for at in where])


def read_pairs(path: Path) -> Pairs:
    """Read the table of a calibration.

    Parameters
    ----------
    path : Path
        A CSV file after the contract ``in/pairs``.

    Returns
    -------
    Pairs
        Every row.

    Raises
    ------
    BatchRefused
        If the file cannot be trusted as a whole, or a cell cannot be read.
    """
    files = TableFiles(contracts.load("in/pairs"), path.parent, (path,))
    causes = check_headers(files)
    if causes:
        raise BatchRefused(str(path), causes)
    table = read_whole(files, BLOCK_BYTES)
    if not table.raw.num_rows:
        cause = Cause(path.name, "lists no coupon", "A calibration has points.", "List them.")
        raise BatchRefused(str(path), [cause])
    columns = table.columns("UTC")
    causes = [cause for column in columns.values() for cause in _cell_causes(column, table)]
    ids = [str(name) for name in columns["coupon_id"].text.to_pylist()]
    causes += capped(list(_repeats(ids, table)))
    if causes:
        raise BatchRefused(str(path), causes)
    numbers = {
        name: np.asarray(column.values, dtype=np.float64)
        for name, column in columns.items()
        if column.field.numeric
    }
    return Pairs(path.name, table.sources[0].sha256, tuple(ids), numbers, table.line)


def _cell_causes(column: Column, table: WholeTable) -> list[Cause]:
    causes = []
    for fault in column.faults:
        for row, raw, words in table.hinted(fault):
            what = f"{fault.reason.statement}: {shown(raw)}" if raw else "the cell is empty"
            mend = f"{words[0].upper()}{words[1:]}." if raw else "Fill it."
            causes.append(Cause(table.where(row, fault.column), what, _WHY, mend))
    return capped(causes)


def _repeats(ids: list[str], table: WholeTable) -> Iterator[Cause]:
    first: dict[str, int] = {}
    for row, name in enumerate(ids):
        if name and first.setdefault(name, row) != row:
            before = table.where(first[name], "coupon_id")
            what = f"coupon {shown(name)} is listed again; first in {before}"
            mend = "Take the mean of the two, or give the other its own name."
            yield Cause(table.where(row, "coupon_id"), what, "A coupon is one point.", mend)
