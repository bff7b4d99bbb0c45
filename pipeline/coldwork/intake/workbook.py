"""A sheet of a workbook, read through its layout as blocks of our cells."""

from collections.abc import Iterator, Mapping
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.layout import Layout, WorkbookForm
from coldwork.inputs.words import listed, shown
from coldwork.intake.closing import ClosingLine
from coldwork.intake.files import TableFiles
from coldwork.intake.laid_out_lines import WrittenClosing
from coldwork.intake.text import TextBlock
from coldwork.intake.workbook_cells import WorkbookCells
from coldwork.intake.workbook_head import SheetHead, read_head
from coldwork.intake.workbooks.book import Book, BookSheet, SheetRows
from coldwork.intake.workbooks.faults import BookFaultError
from coldwork.intake.workbooks.grid import Mark

__all__ = ["WorkbookText"]

_BLOCK_ROWS: Final = 16_384
_ONE_TABLE: Final = "A sheet holds one table; what stands over it belongs to every row."


class WorkbookText:
    """One sheet of a workbook as blocks of text, read through its layout.

    Lines are rows of the sheet. A row is none if nothing stands in it, or nothing but
    formulas outside the columns that the layout names, as where they were filled down.

    Parameters
    ----------
    files : TableFiles
        The table; this file has a layout of a workbook.
    file : int
        Which of its files.

    Attributes
    ----------
    columns : tuple of str
        The sheet's own header, once it was read.
    unused_columns : tuple of str
        Those of them that the layout passes over.
    closing : list of ClosingLine
        The rows that close the table, at the end.
    sha256 : str
        Digest of the file; empty before it was read.
    size : int
        How much that was. [byte]
    """

    def __init__(self, files: TableFiles, file: int) -> None:
        layout = files.layout(file)
        if layout is None or layout.workbook is None:
            message = f"{files.names[file]} has no layout of a workbook"
            raise ValueError(message)
        self._files = files
        self._file = file
        self._name = files.names[file]
        self._layout: Layout = layout
        self._form: WorkbookForm = layout.workbook
        self._cells = WorkbookCells(files.contract, layout)
        self._head: SheetHead | None = None
        self._lead = 0
        self._leads_with_number: bool | None = None
        self.columns: tuple[str, ...] = ()
        self.unused_columns: tuple[str, ...] = ()
        self.closing: list[ClosingLine] = []
        self.sha256 = ""
        self.size = 0

    def __iter__(self) -> Iterator[TextBlock]:
        """Read the sheet from top to bottom.

        Raises
        ------
        BatchRefused
            With all that is wrong with the workbook or the sheet as a whole.
        """
        causes: list[Cause] = []
        try:
            sheet = self._opened()
            for rows in sheet.rows(_BLOCK_ROWS):
                below, wrong = self._below_head(sheet, rows)
                causes += wrong
                block, wrong = (None, []) if causes else self._block(sheet, below)
                causes += wrong
                if block is not None and not causes:
                    yield block
                if causes:
                    break
            causes = causes or self._causes_at_the_end()
        except BookFaultError as fault:
            causes = [fault.cause(self._path)]
        except OSError as error:
            causes = [self._unreadable(error)]
        if causes:
            raise BatchRefused(str(self._files.folder), causes)

    def header_causes(self) -> list[Cause]:
        """Read up to the header and say what is wrong up to there; nothing is raised."""
        try:
            sheet = self._opened()
            for rows in sheet.rows(_BLOCK_ROWS):
                return self._below_head(sheet, rows)[1]
        except BookFaultError as fault:
            return [fault.cause(self._path)]
        except OSError as error:
            return [self._unreadable(error)]
        return self._causes_at_the_end()

    @property
    def _path(self) -> str:
        return self._name.removesuffix(f"!{self._form.sheet}")

    def _opened(self) -> BookSheet:
        book = Book(self._files.paths[self._file])
        self.sha256, self.size = book.sha256, book.size
        return book.sheet(self._form.sheet)

    def _unreadable(self, error: OSError) -> Cause:
        if isinstance(error, FileNotFoundError):
            mend = "Add it or mend [files]."
            return Cause(self._path, "does not exist", "The sheet names it.", mend)
        what = f"cannot be read ({error.strerror or error})"
        mend = "Mend the file or its permissions."
        return Cause(self._path, what, "Every table must be readable.", mend)

    def _below_head(self, sheet: BookSheet, rows: SheetRows) -> tuple[SheetRows, list[Cause]]:
        """Take the head off the first rows; give the others as they are."""
        if self._head is not None:
            return rows, []
        end = self._form.first_row + self._layout.units_line + 1
        if len(rows) < end - 1:
            return rows, [self._no_header()]
        head = read_head(sheet, rows, self._layout, self._files.contract, self._name)
        self._head = head
        self.columns = tuple(cell for cell in head.header if cell)
        self.unused_columns = head.unused
        self._lead = next((place for place, cell in enumerate(head.header) if cell), 0)
        where = f"{self._name}, row {self._form.first_row}"
        causes = [*head.causes, *self._cells.missing(where)]
        if not causes:
            causes = self._cells.take_above(head.above, head.stored)
        return rows.between(end, rows.first + len(rows)), causes

    def _no_header(self) -> Cause:
        what = f"has no row {self._form.first_row} for its header"
        if self._layout.units_line:
            what += ", with a row of units under it"
        why, mend = "A table has a header.", "Mend first_row in the layout, or the sheet."
        return Cause(self._name, what, why, mend)

    def _causes_at_the_end(self) -> list[Cause]:
        if self._head is None:
            return [self._no_header()]
        if self._layout.ends_before and not self.closing:
            labels = [shown(closing.label) for closing in self._layout.ends_before]
            what = f"the table is not closed: no row begins with {listed(labels)}"
            why = "The layout says that such a row ends it; something may be missing."
            mend = "Look for the end of the table, or take ends_before out of the layout."
            return [Cause(self._name, what, why, mend)]
        return []

    def _block(self, sheet: BookSheet, rows: SheetRows) -> tuple[TextBlock | None, list[Cause]]:
        if self._head is None or not len(rows):
            return None, []
        kept = _filled(sheet, rows, set(self._head.places.values()))
        closing, causes = self._closing_rows(rows, kept)
        for place in closing:
            kept[place] = False
        causes = causes or self._odd_rows(rows, kept)
        if causes or not kept.any():
            return None, causes
        turned = self._cells.block(sheet, rows, kept, self._head.places)
        numbers = rows.rows[kept]
        if turned.ambiguous is not None:
            column, row, raw = turned.ambiguous
            what, mend = self._cells.ambiguity(column, raw)
            own = self._layout.raw_columns[column]
            where = f"{self._name}, row {numbers[row]}, column {own}"
            why = "A cell is read in one way, the one that is declared."
            return None, [Cause(where, what, why, mend)]
        block = TextBlock(
            file=self._file,
            lines=numbers,
            cells=turned.cells,
            torn=[],
            raw=turned.raw,
            raw_columns=self._layout.raw_columns,
            faults=turned.faults,
        )
        return block, []

    def _closing_rows(
        self, rows: SheetRows, kept: NDArray[np.bool_]
    ) -> tuple[list[int], list[Cause]]:
        """Find the rows that close the table and read them; from there on are no others."""
        labels = {closing.label: closing for closing in self._layout.ends_before}
        if not labels:
            return [], []
        leads = rows.columns[self._lead]
        found: list[int] = []
        for place in map(int, np.flatnonzero(kept)):
            closing = labels.get(leads[place])
            number = rows.first + place
            if closing is None:
                if not self.closing:
                    continue
                what = "a row follows that closes no table"
                why = "After a row that ends the table there are no readings."
                mend = "Name its first cell under ends_before, or move it to a sheet of its own."
                return found, [Cause(f"{self._name}, row {number}", what, why, mend)]
            cells, stored = self._closing_cells(rows, place)
            text = "\t".join(rows.row(number)[self._lead :]).rstrip("\t")
            line = WrittenClosing(number, text, closing, cells)
            self.closing.append(self._cells.closed(line, stored))
            found.append(place)
        return found, []

    def _closing_cells(self, rows: SheetRows, place: int) -> tuple[Mapping[str, str], set[str]]:
        """Cells of a closing row by the contract's column, and which are stored numbers."""
        cells, stored = {}, set()
        for name, column in self._head.places.items() if self._head else ():
            if column != self._lead:
                cells[name] = rows.columns[column][place]
                if rows.numbers[column][place]:
                    stored.add(name)
        return cells, stored

    def _odd_rows(self, rows: SheetRows, kept: NDArray[np.bool_]) -> list[Cause]:
        """Find the header standing again, and rows that begin unlike the first one."""
        head = self._head
        leads, numeric = rows.columns[self._lead], rows.numbers[self._lead]
        used = set(head.places.values()) if head else set()
        watched = self._lead not in used
        for place in map(int, np.flatnonzero(kept)):
            where = f"{self._name}, row {rows.first + place}"
            if head and all(rows.columns[p][place] == head.header[p] for p in used):
                mend = "Move the second table to a sheet of its own, or delete the repeated header."
                return [Cause(where, "the header stands again", _ONE_TABLE, mend)]
            if self._leads_with_number is None:
                self._leads_with_number = bool(numeric[place])
            if watched and self._leads_with_number and leads[place] and not numeric[place]:
                what = f"the row begins with {shown(leads[place])}, the first one with a number"
                why = "A row that is no reading must not pass for one."
                mend = "Name it under ends_before if it closes the table; otherwise take it out."
                return [Cause(where, what, why, mend)]
        return []


def _filled(sheet: BookSheet, rows: SheetRows, used: set[int]) -> NDArray[np.bool_]:
    """Tell which rows hold something that a person or a machine put there, shape (n,)."""
    filled = np.zeros(len(rows), dtype=np.bool_)
    for place, column in enumerate(rows.columns):
        here = np.array([cell != "" for cell in column], dtype=np.bool_)
        if place not in used:
            here &= ~sheet.marked(Mark.COMPUTED, place + 1, rows.rows)
            here &= ~sheet.marked(Mark.UNVALUED, place + 1, rows.rows)
        filled |= here
    return filled
