"""Lines of a table to rows of cells, each with its line; rows of another width set apart."""

from collections.abc import Sequence
from typing import IO, Literal, NamedTuple, cast

import numpy as np
import pyarrow as pa
import pyarrow.csv as pv
from numpy.typing import NDArray

from coldwork.intake.files import Lines

__all__ = ["Rows", "Torn", "rows_of"]


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


class Rows(NamedTuple):
    """Rows of a stretch of lines, n of them.

    Attributes
    ----------
    cells : pyarrow.RecordBatch, n rows
        The cells as text, without nulls.
    lines : ndarray of int64, shape (n,)
        Number of each row's line.
    torn : list of Torn
        Rows of another width; they are not among the n.
    """

    cells: pa.RecordBatch
    lines: NDArray[np.int64]
    torn: list[Torn]


def rows_of(
    lines: Lines,
    data: bytes,
    columns: Sequence[str],
    *,
    delimiter: str = ",",
    quotes: bool = True,
    kept: Sequence[str] | None = None,
) -> Rows:
    """Split lines into rows of cells.

    Parameters
    ----------
    lines : Lines
        The lines as they were written.
    data : bytes
        The same lines with clean quotes; what is no row of theirs may be blanked.
    columns : sequence of str
        Name of each cell of a row; no two are equal.
    delimiter : str, optional
        What stands between cells.
    quotes : bool, optional
        Whether a quote may hold a cell together.
    kept : sequence of str, optional
        The columns that are wanted; all of them otherwise.

    Returns
    -------
    Rows
        A blank line is none.
    """
    misfits: list[_Misfit] = []
    cells = _parse(data, columns, delimiter, quotes and b'"' in data, kept or columns, misfits)
    numbers = lines.first + _filled(data, lines.lines, cells.num_rows + len(misfits))
    if not misfits:
        return Rows(cells, numbers, [])
    places = [misfit.place for misfit in misfits]
    texts = lines.data.split(b"\n")
    torn = []
    for place, misfit in zip(places, misfits, strict=True):
        line = int(numbers[place])
        text = texts[line - lines.first].decode("utf-8")
        if text.strip(" \t"):  # a line of spaces is a blank one
            torn.append(Torn(line, text, misfit.found, len(columns)))
    return Rows(cells, np.delete(numbers, places), torn)


class _Misfit(NamedTuple):
    """A row of another width: its index among the rows, and how many cells were found."""

    place: int
    found: int


def _parse(
    data: bytes,
    columns: Sequence[str],
    delimiter: str,
    quoted: bool,
    kept: Sequence[str],
    misfits: list[_Misfit],
) -> pa.RecordBatch:
    """Turn lines into columns of text; rows of another width are noted in `misfits`."""

    def set_apart(row: pv.InvalidRow) -> Literal["skip", "error"]:
        if row.number is None:  # it is counted where one thread reads
            return "error"
        misfits.append(_Misfit(row.number - 1, row.actual_columns))
        return "skip"

    schema = pa.schema([(column, pa.string()) for column in kept])
    if not data.strip(b"\n"):
        return pa.RecordBatch.from_pylist([], schema)
    table = pv.read_csv(
        cast("IO[bytes]", pa.BufferReader(data)),
        read_options=pv.ReadOptions(
            use_threads=False, block_size=len(data) + 1, column_names=list(columns)
        ),
        parse_options=pv.ParseOptions(
            delimiter=delimiter, quote_char='"' if quoted else False, invalid_row_handler=set_apart
        ),
        convert_options=pv.ConvertOptions(
            check_utf8=False,
            strings_can_be_null=False,
            column_types=schema,
            include_columns=list(kept),
        ),
    )
    batches = table.combine_chunks().to_batches()
    return batches[0] if batches else pa.RecordBatch.from_pylist([], schema)


def _filled(data: bytes, count: int, rows: int) -> NDArray[np.int64]:
    """Index of the line of each row: of each line that is not empty."""
    if rows == count:
        return np.arange(rows, dtype=np.int64)
    feeds = np.flatnonzero(np.frombuffer(data, dtype=np.uint8) == ord("\n"))
    starts = np.concatenate(([0], feeds + 1))
    ends = np.concatenate((feeds, [len(data)]))
    filled = np.flatnonzero(ends > starts).astype(np.int64)
    if len(filled) != rows:
        message = f"{len(filled)} filled lines, but {rows} rows"
        raise RuntimeError(message)
    return filled
