"""What a sheet's own XML says of its cells, beyond the values: the odd ones, and where.

Rows and columns are counted from 1, as spreadsheets show them.
"""

import re
from array import array
from collections.abc import Iterator
from dataclasses import dataclass, field
from enum import StrEnum
from math import isfinite
from typing import Final, NamedTuple

import numpy as np
from numpy.typing import NDArray

from coldwork.intake.workbooks.faults import BookFaultError, cell_name

__all__ = [
    "LONGEST_TEXT",
    "MOST_CELLS",
    "MOST_COLUMNS",
    "MOST_ROWS",
    "Block",
    "Grid",
    "Mark",
    "Marked",
    "stored_number",
]

MOST_ROWS: Final = 1 << 20  # of a sheet, .xlsx and .ods alike (ECMA-376, 18.3.1.73)
MOST_COLUMNS: Final = 1 << 14
MOST_CELLS: Final = 20_000_000  # of the rectangle that holds all filled cells
LONGEST_TEXT: Final = 32_767  # characters of one cell, as spreadsheets have it
MOST_TEXT: Final = 512 << 20  # characters of all cells together
_MOST_BLOCKS: Final = 100_000  # merged or hidden
_NUMBER: Final = re.compile(r"-?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?", re.ASCII)
_LONGEST_NUMBER: Final = 40  # characters, as in the number grammar
_ZEROS: Final = frozenset("0.-")


class Mark(StrEnum):
    """What is odd about a cell."""

    ERROR = "error"  # such as #N/A
    UNVALUED = "formula without a value"  # or with one that the workbook itself calls outdated
    COMPUTED = "formula"  # with its value
    DATE = "date"
    PERCENT = "percent"
    SCALED = "scaled"  # its format shows thousands or millions
    FORMATTED = "formatted"  # a number that may be shown otherwise than it is stored
    AS_WRITTEN = "as written"  # what is written there stands for the value


class Block(NamedTuple):
    """A rectangle of cells, its ends included."""

    top: int
    left: int
    bottom: int
    right: int

    def __str__(self) -> str:
        return f"{cell_name(self.top, self.left)}:{cell_name(self.bottom, self.right)}"


@dataclass
class Marked:
    """The cells of one column that share a mark, in the order of their rows."""

    rows: "array[int]" = field(default_factory=lambda: array("q"))
    raws: list[str] = field(default_factory=list)

    @property
    def places(self) -> NDArray[np.int64]:
        """The rows once more, shape (n,); a view."""
        return np.frombuffer(self.rows, np.int64) if self.rows else np.empty(0, np.int64)


@dataclass
class _Numbers:
    rows: "array[int]" = field(default_factory=lambda: array("q"))
    values: "array[float]" = field(default_factory=lambda: array("d"))


@dataclass
class Grid:
    """One sheet's cells, without the values of the sound ones.

    Attributes
    ----------
    last_row, last_column : int
        Of the filled cells; 0 where there is none.
    hidden_columns, hidden_rows, merges : list of Block
        As ranges.
    """

    last_row: int = 0
    last_column: int = 0
    hidden_rows: list[Block] = field(default_factory=list)
    hidden_columns: list[Block] = field(default_factory=list)
    merges: list[Block] = field(default_factory=list)
    _marks: dict[tuple[Mark, int], Marked] = field(default_factory=dict)
    _numbers: dict[int, _Numbers] = field(default_factory=dict)
    _text: int = 0

    def fill(self, row: int, column: int) -> None:
        """Note that a cell is filled; refuse a sheet that would be too large."""
        if row > self.last_row or column > self.last_column:
            self.last_row = max(row, self.last_row)
            self.last_column = max(column, self.last_column)
            if self.last_row * self.last_column > MOST_CELLS:
                what = (
                    f"its filled cells reach as far as {cell_name(self.last_row, self.last_column)}"
                    f", a rectangle of more than {MOST_CELLS // 1_000_000} million cells"
                )
                raise BookFaultError(
                    what,
                    "Workbooks are held in memory while they are read.",
                    "Delete what stands far from the table, or save the sheet as CSV.",
                )

    def mark(self, mark: Mark, row: int, column: int, raw: str = "") -> None:
        """Note an odd cell and what is written there."""
        key = (mark, column)
        marked = self._marks.get(key)
        if marked is None:
            marked = self._marks[key] = Marked()
        marked.rows.append(row)
        marked.raws.append(raw)

    def number(self, row: int, column: int, value: float) -> None:
        """Note a number, to hold the other reader against."""
        numbers = self._numbers.get(column)
        if numbers is None:
            numbers = self._numbers[column] = _Numbers()
        numbers.rows.append(row)
        numbers.values.append(value)

    def text(self, row: int, column: int, length: int) -> None:
        """Note how long a cell's text is; refuse what no spreadsheet holds."""
        self._text += length
        if length > LONGEST_TEXT or self._text > MOST_TEXT:
            what = f"holds a text of {length} characters"
            if length <= LONGEST_TEXT:
                what = f"holds more than {MOST_TEXT >> 20} million characters of text up to here"
            why = f"A cell holds at most {LONGEST_TEXT} characters, and a workbook fits in memory."
            place = f"cell {cell_name(row, column)}"
            raise BookFaultError(what, why, "Ask where the file comes from.", place)

    def hide_rows(self, first: int, last: int) -> None:
        """Note that rows are hidden."""
        if self.hidden_rows and self.hidden_rows[-1].bottom + 1 == first:
            first = self.hidden_rows.pop().top
        self.hidden_rows.append(Block(first, 1, last, MOST_COLUMNS))
        _refuse_many(self.hidden_rows)

    def hide_columns(self, first: int, last: int) -> None:
        """Note that columns are hidden."""
        self.hidden_columns.append(Block(1, first, MOST_ROWS, last))
        _refuse_many(self.hidden_columns)

    def merge(self, block: Block) -> None:
        """Note that cells are merged."""
        self.merges.append(block)
        _refuse_many(self.merges)

    def marked(self, mark: Mark, column: int) -> Marked:
        """Give the cells of a column with a mark."""
        return self._marks.get((mark, column), Marked())

    def marks(self) -> Iterator[tuple[Mark, int, Marked]]:
        """Give all odd cells, mark by mark and column by column."""
        for (mark, column), marked in sorted(self._marks.items()):
            yield mark, column, marked

    def numbers(self, column: int) -> tuple[NDArray[np.int64], NDArray[np.float64]]:
        """Give the rows and the values of the numbers of a column, each of shape (n,)."""
        numbers = self._numbers.get(column)
        if numbers is None:
            return np.empty(0, np.int64), np.empty(0, np.float64)
        return np.frombuffer(numbers.rows, np.int64), np.frombuffer(numbers.values, np.float64)

    def rows_hidden(self, rows: NDArray[np.int64]) -> NDArray[np.bool_]:
        """Tell which of these rows, in rising order, are hidden; shape (n,)."""
        return _within(rows, self.hidden_rows)

    def rows_merged(self, rows: NDArray[np.int64], column: int) -> NDArray[np.bool_]:
        """Tell in which of these rows, in rising order, the column's cell is merged; shape (n,)."""
        return _within(rows, [m for m in self.merges if m.left <= column <= m.right])

    def is_hidden(self, column: int) -> bool:
        """Tell whether a column is hidden."""
        return any(block.left <= column <= block.right for block in self.hidden_columns)


def stored_number(raw: str) -> float | None:
    """Give the double that a number's text in the XML stands for.

    Parameters
    ----------
    raw : str
        As written.

    Returns
    -------
    float or None
        None for what is no number of the grammar, is not finite or would become zero.
    """
    if len(raw) > _LONGEST_NUMBER or not _NUMBER.fullmatch(raw):
        return None
    value = float(raw)
    if not isfinite(value):
        return None
    if value == 0.0 and set(raw.lower().partition("e")[0]) - _ZEROS:
        return None
    return value


def _within(rows: NDArray[np.int64], blocks: list[Block]) -> NDArray[np.bool_]:
    inside = np.zeros(len(rows), dtype=np.bool_)
    for block in blocks:
        begin, end = np.searchsorted(rows, (block.top, block.bottom + 1))
        inside[begin:end] = True
    return inside


def _refuse_many(blocks: list[Block]) -> None:
    if len(blocks) > _MOST_BLOCKS:
        what = f"has more than {_MOST_BLOCKS} merged or hidden stretches"
        mend = "Unmerge the cells and show all rows, or save the sheet as CSV."
        raise BookFaultError(what, "A table is a plain grid.", mend)
