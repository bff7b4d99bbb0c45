"""Tables that are short, are taken whole, and in which no row may be lost."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Final, cast

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.intake.cells import column_of, decoded
from coldwork.intake.column import Column, Fault, read_column, with_layout_faults
from coldwork.intake.files import KeptLine, SourceFile, TableFiles
from coldwork.intake.rows import Torn
from coldwork.intake.sources import table_text
from coldwork.intake.text import TextBlock
from coldwork.rules.reasons import CUT_OFF

__all__ = ["MOST_CAUSES", "WholeTable", "capped", "read_whole"]

MOST_CAUSES: Final = 20  # of one kind that a message lists


@dataclass(frozen=True)
class WholeTable:
    """All rows of all files of one table, n of them, in order.

    Attributes
    ----------
    files : TableFiles
        The table.
    cells : pyarrow.Table, n rows
        The cells in the contract's form and order, one chunk a column. A column that
        only some of the files have is empty for the others; one that none has is
        left out.
    raw : pyarrow.Table, n rows
        The cells as written, under the files' own names; null where a file of another
        form has no such column.
    file : ndarray of int32, shape (n,)
        Which file a row stands in.
    line : ndarray of int64, shape (n,)
        In which line of it.
    sources : tuple of SourceFile
        What was read.
    faults : tuple of Fault
        Cells that a layout refuses.
    """

    files: TableFiles
    cells: pa.Table
    raw: pa.Table
    file: NDArray[np.int32]
    line: NDArray[np.int64]
    sources: tuple[SourceFile, ...]
    faults: tuple[Fault, ...]

    def where(self, row: int, column: str) -> str:
        """Say where a cell stands."""
        file = int(self.file[row])
        own = self.files.raw_name(file, column)
        return f"{self.files.names[file]}, line {self.line[row]}, column {own}"

    def written(self, row: int, column: str) -> str:
        """Give a cell as written, empty where its file has no such column."""
        name = self.files.raw_name(int(self.file[row]), column)
        if name not in self.raw.column_names:
            return ""
        return str(self.raw.column(name)[row].as_py() or "")

    def hinted(self, fault: Fault) -> Iterator[tuple[int, str, str]]:
        """Give each row of a fault, its cell as written, and what to do about it."""
        for row in map(int, np.flatnonzero(fault.rows)):
            raw = self.written(row, fault.column)
            cell = raw
            if not fault.of_raw and fault.column in self.cells.column_names:
                cell = str(self.cells.column(fault.column)[row].as_py())
            words = fault.hint(cell) if fault.hint else ""
            yield row, raw, words or fault.reason.hint

    def columns(self, zone: str) -> Mapping[str, Column]:
        """Parse every column, by name; times without a zone are meant in `zone`."""
        fields = self.files.contract.field
        return {
            name: with_layout_faults(
                read_column(fields(name), cast("pa.StringArray", column.chunk(0)), zone),
                self.faults,
            )
            for name, column in zip(self.cells.column_names, self.cells.columns, strict=True)
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
        text = table_text(files, file, block_bytes)
        before = len(blocks)
        try:
            blocks.extend(text)
        except BatchRefused as refused:
            causes += refused.causes
        here = blocks[before:]
        causes += _torn_causes(name, [row for block in here for row in block.torn])
        causes += _cut_off_causes(name, here)
        count = sum(len(block.lines) for block in here)
        source = files.source(file, text.sha256, text.size, count, 0)
        kept = tuple(KeptLine(line.line, line.text) for line in text.closing)
        sources.append(replace(source, unused_columns=text.unused_columns, kept_lines=kept))
    if causes:
        raise BatchRefused(str(files.folder), causes)
    return WholeTable(
        files,
        _joined([block.cells for block in blocks], files.contract.columns, ""),
        _joined([_raw(block) for block in blocks], files.raw_names(), None),
        np.concatenate([np.empty(0, np.int32), *(_places(block) for block in blocks)]),
        np.concatenate([np.empty(0, np.int64), *(block.lines for block in blocks)]),
        tuple(sources),
        _faults(blocks),
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


def _cut_off_causes(name: str, blocks: list[TextBlock]) -> list[Cause]:
    lines = [
        int(line)
        for block in blocks
        for fault in block.faults
        if fault.reason is CUT_OFF
        for line in block.lines[fault.rows]
    ]
    why = "No row of this table may be lost."
    mend = f"{CUT_OFF.hint[0].upper()}{CUT_OFF.hint[1:]}."
    return [Cause(f"{name}, line {line}", CUT_OFF.statement, why, mend) for line in lines]


def _places(block: TextBlock) -> NDArray[np.int32]:
    return np.full(len(block.lines), block.file, dtype=np.int32)


def _raw(block: TextBlock) -> pa.RecordBatch:
    return block.cells if block.raw is None else block.raw


def _joined(
    blocks: list[pa.RecordBatch], columns: tuple[str, ...], lacking: str | None
) -> pa.Table:
    """Put blocks under one another; where one lacks a column its cells are `lacking`."""
    present = {name for block in blocks for name in block.schema.names}
    names = [name for name in columns if name in present]
    joined = []
    for name in names:
        parts = [_cells(block, name, lacking) for block in blocks]
        joined.append(pa.concat_arrays(parts))
    return pa.Table.from_arrays(joined, names=names)


def _cells(block: pa.RecordBatch, name: str, lacking: str | None) -> pa.StringArray:
    if name in block.schema.names:
        return decoded(column_of(block, name))
    if lacking is None:
        return pa.nulls(block.num_rows, pa.string())
    return pa.repeat(lacking, block.num_rows)


def _faults(blocks: list[TextBlock]) -> tuple[Fault, ...]:
    """Give the faults of all blocks, each as rows of the whole."""
    found = []
    total, before = sum(len(block.lines) for block in blocks), 0
    for block in blocks:
        for fault in block.faults:
            rows = np.zeros(total, dtype=np.bool_)
            rows[before : before + len(block.lines)] = fault.rows
            found.append(replace(fault, rows=rows))
        before += len(block.lines)
    return tuple(found)
