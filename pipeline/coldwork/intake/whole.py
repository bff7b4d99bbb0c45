"""Tables that are short, are taken whole, and in which no row may be lost."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final, cast

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.intake.cells import column_of
from coldwork.intake.column import Column, read_column
from coldwork.intake.files import SourceFile, TableFiles
from coldwork.intake.rows import Torn
from coldwork.intake.text import TableText, TextBlock

__all__ = ["MOST_CAUSES", "WholeTable", "capped", "read_whole"]

MOST_CAUSES: Final = 20  # of one kind that a message lists


@dataclass(frozen=True)
class WholeTable:
    """All rows of all files of one table, n of them, in order.

    Attributes
    ----------
    files : TableFiles
        The table.
    raw : pyarrow.Table, n rows
        The cells as written, in the contract's order, one chunk a column. A column
        that only some of the files have is empty for the others; one that none
        has is left out.
    file : ndarray of int32, shape (n,)
        Which file a row stands in.
    line : ndarray of int64, shape (n,)
        In which line of it.
    sources : tuple of SourceFile
        What was read.
    """

    files: TableFiles
    raw: pa.Table
    file: NDArray[np.int32]
    line: NDArray[np.int64]
    sources: tuple[SourceFile, ...]

    def where(self, row: int, column: str) -> str:
        """Say where a cell stands."""
        return f"{self.files.names[self.file[row]]}, line {self.line[row]}, column {column}"

    def cells(self, column: str) -> pa.StringArray:
        """Give the cells of a column as written, n of them."""
        return cast("pa.StringArray", self.raw.column(column).chunk(0))

    def columns(self, zone: str) -> Mapping[str, Column]:
        """Parse every column, by name; times without a zone are meant in `zone`."""
        fields = self.files.contract.field
        return {
            name: read_column(fields(name), self.cells(name), zone)
            for name in self.raw.column_names
        }


def read_whole(files: TableFiles, block_bytes: int) -> WholeTable:
    """Read all files of a table to their ends.

    Parameters
    ----------
    files : TableFiles
        They and their contract.
    block_bytes : int
        How much is read at once. [byte]

    Returns
    -------
    WholeTable
        Every row.

    Raises
    ------
    BatchRefused
        With all that is wrong with the files as wholes, and their torn rows.
    """
    blocks: list[TextBlock] = []
    sources: list[SourceFile] = []
    causes: list[Cause] = []
    for file, name in enumerate(files.names):
        text = TableText(files, file, block_bytes)
        before = len(blocks)
        try:
            blocks.extend(text)
        except BatchRefused as refused:
            causes += refused.causes
        here = blocks[before:]
        causes += _torn_causes(name, [row for block in here for row in block.torn])
        count = sum(len(block.lines) for block in here)
        table = files.contract.table
        sources.append(SourceFile(name, table, text.sha256, text.size, count, count, 0))
    if causes:
        raise BatchRefused(str(files.folder), causes)
    return WholeTable(
        files,
        _joined(blocks, files.contract.columns),
        np.concatenate([np.empty(0, np.int32), *(_places(block) for block in blocks)]),
        np.concatenate([np.empty(0, np.int64), *(block.lines for block in blocks)]),
        tuple(sources),
    )


def capped(causes: list[Cause]) -> list[Cause]:
    """Keep the first `MOST_CAUSES` causes of one kind and count the rest in the last of them."""
    if len(causes) <= MOST_CAUSES:
        return causes
    last = causes[MOST_CAUSES - 1]
    what = f"{last.what} (and {len(causes) - MOST_CAUSES} more of this kind)"
    return [*causes[: MOST_CAUSES - 1], Cause(last.where, what, last.why, last.mend)]


def _torn_causes(name: str, torn: list[Torn]) -> list[Cause]:
    why = "No row of this table may be lost."
    mend = "Look for a missing comma, or quote the cell that holds one."
    causes = []
    for row in torn:
        what = f"the row has {row.found} cells where the header has {row.expected}"
        causes.append(Cause(f"{name}, line {row.line}", what, why, mend))
    return capped(causes)


def _places(block: TextBlock) -> NDArray[np.int32]:
    return np.full(len(block.lines), block.file, dtype=np.int32)


def _joined(blocks: list[TextBlock], columns: tuple[str, ...]) -> pa.Table:
    present = {name for block in blocks for name in block.cells.schema.names}
    names = [name for name in columns if name in present]
    joined = []
    for name in names:
        parts = [_cells(block, name) for block in blocks]
        joined.append(pa.concat_arrays(parts))
    return pa.Table.from_arrays(joined, names=names)


def _cells(block: TextBlock, name: str) -> pa.StringArray:
    if name in block.cells.schema.names:
        return column_of(block.cells, name)
    return pa.repeat("", block.cells.num_rows)
