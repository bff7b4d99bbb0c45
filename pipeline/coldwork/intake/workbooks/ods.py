"""Workbooks of the .ods kind: their sheets, and what the XML says of their cells.

References
----------
.. [1] OASIS, Open Document Format for Office Applications 1.3 (2021), part 3: 9.1
   (tables: number-columns-repeated, number-rows-repeated, covered cells, spans), 19.385
   (office:value), 19.389 (office:value-type), 19.642 (table:formula), 19.749
   (table:visibility), 20.423 (table:display).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Final

from coldwork.inputs.words import shown
from coldwork.intake.workbooks.faults import BookFaultError, cell_name
from coldwork.intake.workbooks.grid import (
    MOST_COLUMNS,
    MOST_ROWS,
    Block,
    Grid,
    Mark,
    stored_number,
)
from coldwork.intake.workbooks.package import Package
from coldwork.intake.workbooks.walk import walk

__all__ = ["OdsBook", "OdsSheet"]

_CONTENT: Final = "content.xml"
_KIND: Final = "mimetype"
_MANIFEST: Final = "META-INF/manifest.xml"
_NEW_MANIFEST: Final = (
    '<?xml version="1.0" encoding="UTF-8"?><manifest:manifest '
    'xmlns:manifest="urn:oasis:names:tc:opendocument:xmlns:manifest:1.0"><manifest:file-entry '
    'manifest:full-path="/" '
    'manifest:media-type="application/vnd.oasis.opendocument.spreadsheet"/></manifest:manifest>'
)
_CELLS: Final = {"table-cell", "covered-table-cell"}
_HOLDING: Final = {"office:value-type", "table:formula"}
_NUMBERS: Final = {"float", "currency", "percentage"}
_DATES: Final = {"date", "time"}
_ASIDE: Final = {"shapes", "tracked-changes", "dde-link"}  # of a sheet
_WRITTEN: Final = {"span", "a", "s", "tab", "line-break"}  # in a paragraph; comments, drawings not
_MOST_REPEATED: Final = 1_000_000  # filled cells that stand for one that is written
_ERRORS: Final = ("#", "Err:")
_MEND: Final = "Save it anew with a spreadsheet program."


@dataclass
class OdsSheet:
    """A sheet and what is odd about its cells.

    Attributes
    ----------
    name : str
        As its tab shows it.
    hidden : bool
        Whether the tab is hidden.
    grid : Grid
        Its cells.
    """

    name: str
    hidden: bool
    grid: Grid = field(default_factory=Grid)


@dataclass
class _Cell:
    attributes: Mapping[str, str]
    paragraphs: int = 0
    pieces: list[str] = field(default_factory=list)

    @property
    def text(self) -> str:
        return "".join(self.pieces)


class OdsBook:
    """The content of an .ods file.

    Parameters
    ----------
    package : Package
        The zip.

    Attributes
    ----------
    sheets : tuple of OdsSheet
        In the order of their tabs.

    Raises
    ------
    BookFaultError
        If it is damaged, locked or too large.
    """

    def __init__(self, package: Package) -> None:
        self._package = package
        self._refuse_locked()
        found = _Walk()
        walk(package.read(_CONTENT), _CONTENT, found.start, found.end, found.text)
        self.sheets = tuple(found.sheets)

    def parts(self) -> Mapping[str, bytes]:
        """Give the parts that another reader needs; `sheets` came out of them."""
        own = {name: self._package.read(name) for name in (_KIND, _CONTENT)}
        return own | {_MANIFEST: _NEW_MANIFEST.encode()}

    def _refuse_locked(self) -> None:
        locked = []

        def start(name: str, _attributes: Mapping[str, str]) -> None:
            if name == "encryption-data":
                locked.append(name)

        if _MANIFEST in self._package:
            walk(self._package.read(_MANIFEST), _MANIFEST, start, lambda _name: None)
        if locked:
            why = "Workbooks are read unlocked."
            what = "is locked by a password"
            raise BookFaultError(what, why, "Save it without a password.")


class _Walk:
    """Goes over the content; `sheets` is what it found."""

    def __init__(self) -> None:
        self.sheets: list[OdsSheet] = []
        self._hidden_styles: set[str] = set()
        self._style = ""
        self._sheet: OdsSheet | None = None
        self._row = self._column = 0
        self._rows = 1  # how many rows this one stands for
        self._columns = 0  # that were declared
        self._cell: _Cell | None = None
        self._aside = 0  # how deep inside what is no cell's own text
        self._paragraph = 0
        self._repeated = 0
        self._starts: Mapping[str, Callable[[Mapping[str, str]], None]] = {
            "style": self._start_style,
            "table-properties": self._start_properties,
            "table": self._start_table,
            "table-column": self._start_column,
            "table-row": self._start_row,
            "p": self._start_paragraph,
            "s": self._space,
            "tab": lambda _: self._write("\t"),
            "line-break": lambda _: self._write("\n"),
        }

    def start(self, name: str, attributes: Mapping[str, str]) -> None:
        """Take note of an element that begins."""
        if self._aside or self._stands_aside(name):
            self._aside += 1
        elif name in _CELLS:
            self._cell = _Cell(attributes)
        elif name in self._starts:
            self._starts[name](attributes)

    def end(self, name: str) -> None:
        """Take note of an element that ends."""
        if self._aside:
            self._aside -= 1
        elif name in _CELLS and self._cell is not None:
            cell, self._cell = self._cell, None
            self._take(cell)
        elif name == "table-row":
            self._row += self._rows - 1
        elif name == "table":
            self._sheet = None
        elif name == "p":
            self._paragraph -= 1

    def text(self, piece: str) -> None:
        """Take note of text."""
        if self._paragraph > 0 and not self._aside:
            self._write(piece)

    def _write(self, piece: str) -> None:
        if self._cell is not None:
            self._cell.pieces.append(piece)

    def _start_style(self, attributes: Mapping[str, str]) -> None:
        self._style = attributes.get("style:name", "")

    def _start_properties(self, attributes: Mapping[str, str]) -> None:
        if attributes.get("table:display") == "false":
            self._hidden_styles.add(self._style)

    def _start_table(self, attributes: Mapping[str, str]) -> None:
        hidden = attributes.get("table:style-name", "") in self._hidden_styles
        self._sheet = OdsSheet(attributes.get("table:name", ""), hidden)
        self.sheets.append(self._sheet)
        self._row = self._columns = 0

    def _start_column(self, attributes: Mapping[str, str]) -> None:
        count = _repeats(attributes, "table:number-columns-repeated", MOST_COLUMNS)
        first, self._columns = self._columns + 1, self._columns + count
        if self._sheet is not None and attributes.get("table:visibility", "visible") != "visible":
            self._sheet.grid.hide_columns(first, self._columns)

    def _start_row(self, attributes: Mapping[str, str]) -> None:
        self._rows = _repeats(attributes, "table:number-rows-repeated", MOST_ROWS)
        self._row, self._column = self._row + 1, 0
        if self._sheet is not None and attributes.get("table:visibility", "visible") != "visible":
            self._sheet.grid.hide_rows(self._row, self._row + self._rows - 1)

    def _stands_aside(self, name: str) -> bool:
        """Whether an element holds what is no cell's own text."""
        if self._cell is None:
            return name in _ASIDE
        return name not in _WRITTEN if self._paragraph else name != "p"

    def _start_paragraph(self, _attributes: Mapping[str, str]) -> None:
        self._paragraph += 1
        if self._cell is not None:
            if self._cell.paragraphs:
                self._write("\n")
            self._cell.paragraphs += 1

    def _space(self, attributes: Mapping[str, str]) -> None:
        self._write(" " * _repeats(attributes, "text:c", MOST_COLUMNS))

    def _take(self, cell: _Cell) -> None:
        """Classify a cell that is complete, for each place that it stands for."""
        count = _repeats(cell.attributes, "table:number-columns-repeated", MOST_COLUMNS)
        first, self._column = self._column + 1, self._column + count
        if self._sheet is None:
            return
        grid = self._sheet.grid
        self._merge(grid, cell.attributes, first)
        if not cell.text and not _HOLDING & cell.attributes.keys():
            return
        last = self._row + self._rows - 1
        self._refuse_repeats(self._rows * count - 1)
        grid.fill(last, self._column)
        for row in range(self._row, last + 1):
            for column in range(first, self._column + 1):
                _note(grid, row, column, cell)

    def _refuse_repeats(self, count: int) -> None:
        """Refuse a few written cells that would stand for a flood of them."""
        self._repeated += count
        last = self._row + self._rows - 1
        if self._repeated > _MOST_REPEATED or last > MOST_ROWS or self._column > MOST_COLUMNS:
            what = f"repeats filled cells as far as {cell_name(last, self._column)}"
            why = f"At most {_MOST_REPEATED} filled cells may be repeats, in the bounds of a sheet."
            mend = "Delete what was filled down or across by mistake, or save the sheet as CSV."
            raise BookFaultError(what, why, mend)

    def _merge(self, grid: Grid, attributes: Mapping[str, str], column: int) -> None:
        rows = _repeats(attributes, "table:number-rows-spanned", MOST_ROWS)
        columns = _repeats(attributes, "table:number-columns-spanned", MOST_COLUMNS)
        if rows > 1 or columns > 1:
            bottom = self._row + rows - 1
            grid.merge(Block(self._row, column, bottom, column + columns - 1))


def _note(grid: Grid, row: int, column: int, cell: _Cell) -> None:
    """Note what is odd about a cell that holds something."""
    kind, text = cell.attributes.get("office:value-type"), cell.text
    formula = cell.attributes.get("table:formula")
    if formula is not None:
        formula = "=" + formula.partition("=")[2]
    if formula is not None and kind is None:
        grid.mark(Mark.UNVALUED, row, column, formula)
        return
    is_error = cell.attributes.get("calcext:value-type", kind) == "error"
    if formula is not None:
        grid.mark(Mark.COMPUTED, row, column, formula)
    if is_error or (formula is not None and text.startswith(_ERRORS)):
        grid.mark(Mark.ERROR, row, column, text)
    elif kind in _NUMBERS:
        _note_number(grid, row, column, cell)
    elif kind in _DATES:
        grid.mark(Mark.DATE, row, column, text)
    elif kind == "string" or kind is None:
        text = cell.attributes.get("office:string-value", text)
        grid.text(row, column, len(text))
        grid.mark(Mark.AS_WRITTEN, row, column, text)


def _note_number(grid: Grid, row: int, column: int, cell: _Cell) -> None:
    written = cell.attributes.get("office:value", "")
    value = stored_number(written)
    if value is None:
        grid.mark(Mark.AS_WRITTEN, row, column, written)
        return
    grid.number(row, column, value)
    if cell.attributes.get("office:value-type") == "percentage":
        grid.mark(Mark.PERCENT, row, column, written)
    elif cell.text and cell.text != written:
        grid.mark(Mark.FORMATTED, row, column, written)


def _repeats(attributes: Mapping[str, str], name: str, most: int) -> int:
    text = attributes.get(name, "1")
    count = int(text) if text.isascii() and text.isdigit() and len(text) < 9 else 0
    if not 1 <= count <= most:
        what = f"its {name} says {shown(text)}"
        raise BookFaultError(what, f"It is a number from 1 to {most}.", _MEND)
    return count
