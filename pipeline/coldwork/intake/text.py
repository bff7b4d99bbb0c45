"""A file of a table as blocks of cells, each row with the line that it stands in."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import IO, Final, Literal, NamedTuple, cast

import numpy as np
import pyarrow as pa
import pyarrow.csv as pv
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.intake.files import BLOCK_BYTES, LineReader, Lines, TableFiles
from coldwork.intake.header import header_causes
from coldwork.intake.quotes import split_cells, with_clean_quotes

__all__ = ["TableText", "TextBlock", "Torn", "check_headers"]

_OPEN: Final = "A cell must end in the line in which it begins."


class Torn(NamedTuple):
    """A row that has more or fewer cells than the header.

    Attributes
    ----------
    line : int
        Number of its line.
    text : str
        The line.
    found, expected : int
        How many cells it has, and the header.
    """

    line: int
    text: str
    found: int
    expected: int


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
        The cells as written, columns in the header's order, no nulls.
    torn : list of Torn
        The rows of these lines that do not fit the header; they are not among the n.
    """

    file: int
    lines: NDArray[np.int64]
    cells: pa.RecordBatch
    torn: list[Torn]


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
        cells, misfits = _parse(data, self.columns)
        numbers = lines.first + _filled(lines, cells.num_rows + len(misfits))
        places = [misfit.place for misfit in misfits]
        torn = []
        if misfits:
            texts = lines.data.split(b"\n")
            for place, misfit in zip(places, misfits, strict=True):
                line = int(numbers[place])
                text = texts[line - lines.first].decode("utf-8")
                if text.strip(" \t"):  # a line of spaces is a blank one
                    torn.append(Torn(line, text, misfit.found, len(self.columns)))
        return TextBlock(self._file, np.delete(numbers, places), cells, torn)


def check_headers(files: TableFiles) -> list[Cause]:
    """Say why the files of a table cannot be read, as far as their headers tell.

    Parameters
    ----------
    files : TableFiles
        The table.

    Returns
    -------
    list of Cause
        Files that are missing, unreadable or empty, and headers that do not fit the
        contract; empty where all is well so far.
    """
    texts = (TableText(files, file) for file in range(len(files.paths)))
    return [cause for text in texts for cause in text.header_causes()]


class _Misfit(NamedTuple):
    """A row of another width: its index among the rows, and how many cells were found."""

    place: int
    found: int


def _parse(data: bytes, columns: tuple[str, ...]) -> tuple[pa.RecordBatch, list[_Misfit]]:
    """Turn lines into columns of text; rows of another width come back beside them."""
    misfits: list[_Misfit] = []

    def set_apart(row: pv.InvalidRow) -> Literal["skip", "error"]:
        if row.number is None:  # it is counted where one thread reads
            return "error"
        misfits.append(_Misfit(row.number - 1, row.actual_columns))
        return "skip"

    schema = pa.schema([(column, pa.string()) for column in columns])
    if not data.strip(b"\n"):
        return pa.RecordBatch.from_pylist([], schema), misfits
    table = pv.read_csv(
        cast("IO[bytes]", pa.BufferReader(data)),
        read_options=pv.ReadOptions(
            use_threads=False, block_size=len(data) + 1, column_names=list(columns)
        ),
        parse_options=pv.ParseOptions(
            quote_char='"' if b'"' in data else False, invalid_row_handler=set_apart
        ),
        convert_options=pv.ConvertOptions(
            check_utf8=False, strings_can_be_null=False, column_types=schema
        ),
    )
    batches = table.combine_chunks().to_batches()
    return (batches[0] if batches else pa.RecordBatch.from_pylist([], schema)), misfits


def _filled(lines: Lines, rows: int) -> NDArray[np.int64]:
    """Index of the line of each row: of each line that is not empty."""
    if rows == lines.lines:
        return np.arange(rows, dtype=np.int64)
    feeds = np.flatnonzero(np.frombuffer(lines.data, dtype=np.uint8) == ord("\n"))
    starts = np.concatenate(([0], feeds + 1))
    ends = np.concatenate((feeds, [len(lines.data)]))
    filled = np.flatnonzero(ends > starts).astype(np.int64)
    if len(filled) != rows:
        message = f"{len(filled)} filled lines, but {rows} rows"
        raise RuntimeError(message)
    return filled
