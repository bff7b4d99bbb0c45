"""The XML of one sheet of an .xlsx file, gone over cell by cell."""

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final, NoReturn

from coldwork.inputs.words import shown
from coldwork.intake.workbooks.faults import BookFaultError, cell_name
from coldwork.intake.workbooks.formats import Shown
from coldwork.intake.workbooks.grid import (
    MOST_COLUMNS,
    MOST_ROWS,
    Block,
    Grid,
    Mark,
    stored_number,
)

__all__ = ["SheetWalk", "Surroundings"]

_CELL: Final = re.compile(r"\$?([A-Z]{1,3})\$?([1-9][0-9]{0,6})")
_DAMAGED: Final = "Every cell of a sheet stands once, in its place, with one value."
_MEND: Final = "It is damaged: copy it again, or save it anew with a spreadsheet program."
_OF_SHOWN: Final[Mapping[Shown, Mark]] = {
    Shown.DATE: Mark.DATE,
    Shown.PERCENT: Mark.PERCENT,
    Shown.SCALED: Mark.SCALED,
    Shown.OTHER: Mark.FORMATTED,
}


@dataclass(frozen=True)
class Surroundings:
    """What the rest of the workbook says that a cell needs.

    Attributes
    ----------
    string_lengths : list of int
        Of each shared string. [character]
    shown : list of Shown
        What each cell style does to a number.
    outdated : bool
        Whether the workbook asks for its formulas to be worked out anew.
    """

    string_lengths: list[int]
    shown: list[Shown]
    outdated: bool


@dataclass
class _Cell:
    """The cell that is being read."""

    row: int
    column: int
    type: str
    style: int | None
    formula: str | None = None
    value: str | None = None
    text: str | None = None


class SheetWalk:
    """Goes over one sheet; `start`, `end` and `text` are for `walk`, `grid` is what it found."""

    def __init__(self, around: Surroundings) -> None:
        self.grid = Grid()
        self._around = around
        self._row = 0
        self._column = 0
        self._cell: _Cell | None = None
        self._capture = ""  # the element whose text is wanted
        self._pieces: list[str] = []
        self._phonetic = False
        self._letters: dict[str, int] = {}
        self._starts: Mapping[str, Callable[[Mapping[str, str]], None]] = {
            "row": self._start_row,
            "c": self._start_cell,
            "f": self._start_formula,
            "v": self._start_value,
            "t": self._start_text,
            "rPh": self._start_phonetic,
            "col": self._start_columns,
            "mergeCell": self._start_merge,
        }
        self._endings: Mapping[str, Callable[[_Cell, str], None]] = {
            "f": self._end_formula,
            "v": self._end_value,
            "t": self._end_text,
        }

    def start(self, name: str, attributes: Mapping[str, str]) -> None:
        """Take note of an element that begins."""
        begin = self._starts.get(name)
        if begin is not None:
            begin(attributes)

    def end(self, name: str) -> None:
        """Take note of an element that ends."""
        if self._capture == name and self._cell is not None:
            piece = "".join(self._pieces)
            self._capture, self._pieces = "", []
            self._endings[name](self._cell, piece)
        elif name == "c" and self._cell is not None:
            cell, self._cell = self._cell, None
            self._take(cell)
        elif name == "rPh":
            self._phonetic = False

    def text(self, piece: str) -> None:
        """Take note of text."""
        if self._capture:
            self._pieces.append(piece)

    def _start_row(self, attributes: Mapping[str, str]) -> None:
        row = _counted(attributes.get("r"), self._row + 1, MOST_ROWS, "row")
        if row <= self._row:
            _refuse(f"row {row} follows row {self._row}")
        self._row, self._column = row, 0
        if _is_true(attributes.get("hidden")) or _is_nothing(attributes.get("ht")):
            self.grid.hide_rows(row, row)

    def _start_cell(self, attributes: Mapping[str, str]) -> None:
        reference = attributes.get("r")
        column = self._column + 1 if reference is None else self._column_of(reference)
        if column <= self._column or column > MOST_COLUMNS:
            _refuse(f"cell {shown(reference)} follows {self._place(self._column)}")
        self._column = column
        style = attributes.get("s")
        self._cell = _Cell(
            self._row,
            column,
            attributes.get("t", "n"),
            None if style is None else _counted(style, 0, 1 << 20, "style"),
        )

    def _column_of(self, reference: str) -> int:
        match = _CELL.fullmatch(reference)
        if match is None or int(match[2]) != self._row or not self._row:
            _refuse(f"cell {shown(reference)} stands in row {self._row}")
        return self._number(match[1])

    def _number(self, letters: str) -> int:
        number = self._letters.get(letters)
        if number is None:
            number = 0
            for letter in letters:
                number = number * 26 + ord(letter) - ord("A") + 1
            self._letters[letters] = number
        return number

    def _start_formula(self, _attributes: Mapping[str, str]) -> None:
        self._begin("f")

    def _start_value(self, _attributes: Mapping[str, str]) -> None:
        self._begin("v")

    def _start_text(self, _attributes: Mapping[str, str]) -> None:
        if not self._phonetic:
            self._begin("t")

    def _begin(self, name: str) -> None:
        if self._cell is not None:
            self._capture, self._pieces = name, []

    def _start_phonetic(self, _attributes: Mapping[str, str]) -> None:
        self._phonetic = True

    def _end_formula(self, cell: _Cell, piece: str) -> None:
        cell.formula = f"={piece}"

    def _end_value(self, cell: _Cell, piece: str) -> None:
        if cell.value is not None:
            _refuse(f"{self._place(cell.column)} has two values")
        cell.value = piece

    def _end_text(self, cell: _Cell, piece: str) -> None:
        cell.text = (cell.text or "") + piece

    def _start_columns(self, attributes: Mapping[str, str]) -> None:
        if _is_true(attributes.get("hidden")) or _is_nothing(attributes.get("width")):
            first = _counted(attributes.get("min"), 1, MOST_COLUMNS, "column")
            last = _counted(attributes.get("max"), first, MOST_COLUMNS, "column")
            self.grid.hide_columns(first, last)

    def _start_merge(self, attributes: Mapping[str, str]) -> None:
        reference = attributes.get("ref", "")
        ends = [_CELL.fullmatch(end) for end in reference.split(":")]
        if not ends or len(ends) > 2 or None in ends:
            _refuse(f"it merges the cells {shown(reference)}")
        (top, left), (bottom, right) = (
            (int(end[2]), self._number(end[1])) for end in (ends[0], ends[-1]) if end
        )
        self.grid.merge(Block(top, left, bottom, right))

    def _take(self, cell: _Cell) -> None:
        """Classify a cell that is complete."""
        if cell.formula is not None and self._is_unvalued(cell):
            self.grid.fill(cell.row, cell.column)
            self.grid.mark(Mark.UNVALUED, cell.row, cell.column, cell.formula)
            return
        written = cell.text if cell.type == "inlineStr" else cell.value
        if written is None or (not written and cell.type in {"n", "str"}):
            return
        self.grid.fill(cell.row, cell.column)
        if cell.formula is not None:
            self.grid.mark(Mark.COMPUTED, cell.row, cell.column, cell.formula)
        self._take_value(cell, written)

    def _is_unvalued(self, cell: _Cell) -> bool:
        """Whether a formula has no value, or one that the workbook calls outdated."""
        if self._around.outdated or cell.value is None:
            return True
        return not cell.value and cell.type != "str"

    def _take_value(self, cell: _Cell, written: str) -> None:
        place = (cell.row, cell.column)
        if cell.type == "n":
            self._take_number(cell, written)
        elif cell.type == "s":
            self.grid.text(*place, self._string_length(cell, written))
        elif cell.type in {"str", "inlineStr"}:
            self.grid.text(*place, len(written))
        elif cell.type == "e":
            self.grid.mark(Mark.ERROR, *place, written)
        elif cell.type == "d":
            self.grid.mark(Mark.DATE, *place, written)
        elif cell.type != "b" or written not in {"0", "1"}:
            what = f"{self._place(cell.column)} holds {shown(written)} of type {shown(cell.type)}"
            _refuse(what)

    def _take_number(self, cell: _Cell, written: str) -> None:
        place = (cell.row, cell.column)
        value = stored_number(written)
        if value is None:
            self.grid.mark(Mark.AS_WRITTEN, *place, written)
            return
        look = self._look(cell.style)
        mark = _OF_SHOWN.get(look)
        if mark is not Mark.DATE:
            self.grid.number(*place, value)
        if mark is not None:
            self.grid.mark(mark, *place, written)

    def _look(self, style: int | None) -> Shown:
        styles = self._around.shown
        if not styles:
            return Shown.PLAIN
        index = style or 0
        if index >= len(styles):
            _refuse(f"{self._place(self._column)} has a style that is not there")
        return styles[index]

    def _string_length(self, cell: _Cell, written: str) -> int:
        lengths = self._around.string_lengths
        index = int(written) if written.isascii() and written.isdigit() else len(lengths)
        if index >= len(lengths):
            _refuse(f"{self._place(cell.column)} refers to a text that is not there")
        return lengths[index]

    def _place(self, column: int) -> str:
        return f"cell {cell_name(self._row, column)}" if column else f"the begin of row {self._row}"


def _counted(text: str | None, default: int, most: int, what: str) -> int:
    if text is None:
        return default
    number = int(text) if text.isascii() and text.isdigit() and len(text) < 9 else -1
    if not 0 <= number <= most or (number == 0 and what != "style"):
        _refuse(f"it holds a {what} {shown(text)}")
    return number


def _is_true(text: str | None) -> bool:
    return text in {"1", "true"}


def _is_nothing(size: str | None) -> bool:
    """Whether a height or a width is zero."""
    return size is not None and stored_number(size) == 0.0


def _refuse(what: str) -> NoReturn:
    raise BookFaultError(what, _DAMAGED, _MEND)
