"""A file of a table as blocks of cells, each row with the line that it stands in."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.intake.cells import column_of, take
from coldwork.intake.closing import ClosingLine
from coldwork.intake.column import Fault
from coldwork.intake.files import BLOCK_BYTES, LineReader, Lines, TableFiles
from coldwork.intake.header import header_causes
from coldwork.intake.quotes import split_cells, with_clean_quotes
from coldwork.intake.rows import Torn, rows_of

__all__ = ["REFUSED", "TableText", "TextBlock"]

REFUSED: Final = "\N{REPLACEMENT CHARACTER}"  # stands for a cell that its layout refuses
_OPEN: Final = "A cell must end in the line in which it begins."


@dataclass(frozen=True)
class TextBlock:
    """Some rows of one file, as text.

    Attributes
    ----------
    file : int
        Index of the file in its table.
    lines : ndarray of int64, shape (n,)
        Number of each row's line, from 1.
    cells : pyarrow.RecordBatch, n rows
        The cells as written, columns in the header's order, no nulls. Behind a layout,
        numbers may be encoded in a dictionary.
    torn : list of Torn
        The rows of these lines that do not fit the header; they are not among the n.
    raw : pyarrow.RecordBatch, n rows, or None
        Where a layout turned the cells into those of the contract: the cells as the
        machine wrote them, under the file's own names. None where `cells` are that.
    raw_columns : mapping of str to str
        From the contract's columns to those of `raw`.
    faults : tuple of Fault
        Cells that the layout refuses; `cells` hold `REFUSED` there, which is no number, no
        time and no word of a contract.
    """

    file: int
    lines: NDArray[np.int64]
    cells: pa.RecordBatch
    torn: list[Torn]
    raw: pa.RecordBatch | None = None
    raw_columns: Mapping[str, str] = field(default_factory=dict)
    faults: tuple[Fault, ...] = ()

    def written(self, column: str, rows: NDArray[np.intp]) -> list[str]:
        """Give the cells of one of the contract's columns as written, empty where there is none."""
        batch = self.cells if self.raw is None else self.raw
        name = self.raw_columns.get(column, column)
        if name not in batch.schema.names:  # such as ball_mm where a file has none
            return [""] * len(rows)
        return take(column_of(batch, name), rows)


class TableText:
    """One file of a table as blocks of text.

    Parameters
    ----------
    files : TableFiles
        The table.
    file : int
        Which of its files.
    block_bytes : int
        How much is read at once. [byte]

    Attributes
    ----------
    columns : tuple of str
        The header, once it was read.
    unused_columns, closing : tuple
        Empty: a tidy file has no column and no line beyond its table.
    sha256 : str
        Digest of what was read, at the end.
    size : int
        How much that was. [byte]
    """

    def __init__(self, files: TableFiles, file: int, block_bytes: int = BLOCK_BYTES) -> None:
        self._files = files
        self._file = file
        self._name = files.names[file]
        self._reader = LineReader(files.paths[file], self._name, block_bytes)
        self.columns: tuple[str, ...] = ()
        self.unused_columns: tuple[str, ...] = ()
        self.closing: tuple[ClosingLine, ...] = ()

    @property
    def sha256(self) -> str:
        """Digest of what was read; empty before the end."""
        return self._reader.sha256

    @property
    def size(self) -> int:
        """How much was read so far [byte]."""
        return self._reader.size

    def __iter__(self) -> Iterator[TextBlock]:
        """Read the file from front to back.

        Raises
        ------
        BatchRefused
            At the end, with all that is wrong with the file as a whole.
        """
        causes: list[Cause] = []
        for lines in self._reader:
            if causes:
                continue
            below = lines
            if not self.columns:
                below, causes = self._take_header(lines)
            data, broken = with_clean_quotes(below.data)
            if broken is not None and not causes:
                causes = [self._left_open(below.first + broken)]
            if not causes and data:
                yield self._block(below, data)
        causes = [*self._reader.causes, *causes]
        if not causes and not self.columns:
            causes = [
                Cause(self._name, "is empty", "A table has a header.", "Add one, or the file.")
            ]
        if causes:
            raise BatchRefused(str(self._files.folder), causes)

    def header_causes(self) -> list[Cause]:
        """Read up to the header and say what is wrong up to there; nothing is raised."""
        for lines in self._reader:
            causes = self._take_header(lines)[1]
            if self.columns or causes:
                return causes
        if self._reader.causes:
            return self._reader.causes
        return [Cause(self._name, "is empty", "A table has a header.", "Add one, or the file.")]

    def _take_header(self, lines: Lines) -> tuple[Lines, list[Cause]]:
        """Split off the header, the first line that is not blank; say what is wrong with it."""
        data, number, start = lines.data, lines.first, 0
        head = b""
        while start < len(data) and not head.strip(b" \t"):
            end = data.find(b"\n", start)
            end = len(data) if end < 0 else end
            head = data[start:end]
            number, start = number + 1, end + 1
        rest = Lines(data[start:], number, lines.first + lines.lines - number)
        if not head.strip(b" \t"):
            return rest, []
        columns = split_cells(head.decode("utf-8"))
        if columns is None:
            return rest, [self._left_open(number - 1)]
        self.columns = tuple(columns)
        where = f"{self._name}, line {number - 1}"
        return rest, header_causes(columns, self._files.contract, where)

    def _left_open(self, line: int) -> Cause:
        what = "a quoted cell is still open at the end of the line"
        mend = "Close the quote, or take the line break out of the cell."
        return Cause(f"{self._name}, line {line}", what, _OPEN, mend)

    def _block(self, lines: Lines, data: bytes) -> TextBlock:
        rows = rows_of(lines, data, self.columns)
        return TextBlock(self._file, rows.lines, rows.cells, rows.torn)
