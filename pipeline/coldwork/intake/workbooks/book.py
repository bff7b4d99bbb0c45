"""A workbook as a whole: its sheets by name, and their rows as text, held cell against cell.

The values are those that python-calamine reads. What it does not tell comes from the
sheet's own XML; where the two do not see the same number in the same cell, the workbook
is refused.
"""

import datetime as dt
import os
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from hashlib import sha256
from itertools import islice
from pathlib import Path
from typing import Final, TypeAlias

import numpy as np
from numpy.typing import NDArray
from python_calamine import CalamineError, CalamineSheet, CalamineWorkbook

from coldwork.inputs.words import nearest, shown
from coldwork.intake.workbooks.faults import BookFaultError, cell_name
from coldwork.intake.workbooks.grid import Grid, Mark, Marked
from coldwork.intake.workbooks.ods import OdsBook, OdsSheet
from coldwork.intake.workbooks.package import LARGEST_BOOK, Package, repacked
from coldwork.intake.workbooks.xlsx import SheetPart, XlsxBook

__all__ = ["Book", "BookSheet", "SheetRows", "Value", "number_text"]

Value: TypeAlias = float | str | bool | dt.date | dt.time | dt.timedelta
_ODS_KIND: Final = b"application/vnd.oasis.opendocument.spreadsheet"
_WRITTEN: Final = (Mark.AS_WRITTEN, Mark.ERROR, Mark.UNVALUED)  # these replace the value
_DATES: Final = (dt.date, dt.time, dt.timedelta)
_WHY_ONE: Final = "What is read must not depend on who reads it."


@dataclass(frozen=True)
class SheetRows:
    """Some rows of a sheet, n of them.

    Attributes
    ----------
    first : int
        Number of the first row.
    columns : tuple of list of str, n each
        The cells as text, from column A on; empty where there is nothing.
    numbers, dates : tuple of ndarray of bool, shape (n,)
        By column, which cells hold a stored number, and which a stored date, time or
        duration; the others hold text or nothing.
    """

    first: int
    columns: tuple[list[str], ...]
    numbers: tuple[NDArray[np.bool_], ...]
    dates: tuple[NDArray[np.bool_], ...]

    def __len__(self) -> int:
        """Give the number of rows."""
        return len(self.columns[0]) if self.columns else 0

    @property
    def rows(self) -> NDArray[np.int64]:
        """Number of each row, shape (n,)."""
        return np.arange(self.first, self.first + len(self), dtype=np.int64)

    def row(self, number: int) -> tuple[str, ...]:
        """Give the cells of one row."""
        return tuple(column[number - self.first] for column in self.columns)

    def between(self, first: int, end: int) -> "SheetRows":
        """Give the rows from `first` on and before `end`."""
        part = slice(first - self.first, end - self.first)
        return SheetRows(
            first,
            tuple(column[part] for column in self.columns),
            tuple(column[part] for column in self.numbers),
            tuple(column[part] for column in self.dates),
        )


class BookSheet:
    """One sheet of cells.

    Attributes
    ----------
    name : str
        As its tab shows it.
    grid : Grid
        What is odd about its cells.
    """

    def __init__(self, name: str, grid: Grid, values: CalamineSheet) -> None:
        self.name = name
        self.grid = grid
        self._values = values
        self._left = values.start[1] if values.start else 0

    def rows(self, count: int) -> Iterator[SheetRows]:
        """Give all rows down to the last filled one, from the first on.

        Parameters
        ----------
        count : int
            How many rows at once.

        Yields
        ------
        SheetRows

        Raises
        ------
        BookFaultError
            If two readers see different numbers in one cell.
        """
        lines = self._values.iter_rows() if self._values.start else iter(())
        for first in range(1, self.grid.last_row + 1, count):
            here = min(count, self.grid.last_row + 1 - first)
            columns = self._padded(list(islice(lines, here)), here)
            dates = tuple(
                self._settled(first, number, values) for number, values in enumerate(columns, 1)
            )
            numbers = tuple(_are_numbers(values) for values in columns)
            texts = tuple([_text(value) for value in values] for values in columns)
            yield SheetRows(first, texts, numbers, dates)

    def marked(self, mark: Mark, column: int, rows: NDArray[np.int64]) -> NDArray[np.bool_]:
        """Tell which of these rows, in rising order, have a cell of that mark; shape (n,)."""
        if not len(rows):
            return np.zeros(0, dtype=np.bool_)
        places = self.grid.marked(mark, column).places
        begin, stop = np.searchsorted(places, (rows[0], rows[-1] + 1))
        return np.isin(rows, places[begin:stop])

    def _padded(self, lines: list[list[Value]], rows: int) -> list[list[Value]]:
        """Values by column, from A to the last filled one, `rows` each."""
        columns: list[list[Value]] = [[""] * rows for _ in range(self.grid.last_column)]
        for place, column in enumerate(zip(*lines, strict=True), self._left):
            if place < len(columns):
                columns[place][: len(column)] = column
            elif any(value != "" for value in column):
                raise self._disagreement(1, place + 1)
        return columns

    def _settled(self, first: int, column: int, values: list[Value]) -> NDArray[np.bool_]:
        """Put what is written over the values, and hold the numbers against the XML's."""
        end = first + len(values)
        dated = np.array([isinstance(value, _DATES) for value in values], dtype=np.bool_)
        for row, raw in _between(self.grid.marked(Mark.DATE, column), first, end):
            dated[row - first] = True
            if isinstance(values[row - first], float):
                values[row - first] = raw
        for mark in _WRITTEN:
            for row, raw in _between(self.grid.marked(mark, column), first, end):
                values[row - first] = raw
        self._compare(first, column, values, dated)
        return dated

    def _compare(
        self, first: int, column: int, values: list[Value], dated: NDArray[np.bool_]
    ) -> None:
        places = np.flatnonzero(_are_numbers(values))
        theirs = np.array([values[place] for place in places], np.float64)
        rows, ours = self.grid.numbers(column)
        begin, stop = np.searchsorted(rows, (first, first + len(values)))
        rows, ours = rows[begin:stop] - first, ours[begin:stop]
        undated = ~dated[rows]
        rows, ours = rows[undated], ours[undated]
        if np.array_equal(places, rows) and np.array_equal(theirs, ours):
            return
        seen = dict(zip(rows.tolist(), ours.tolist(), strict=True))
        also = dict(zip(places.tolist(), theirs.tolist(), strict=True))
        place = min(p for p in seen.keys() | also.keys() if seen.get(p) != also.get(p))
        raise self._disagreement(first + place, column)

    def _disagreement(self, row: int, column: int) -> BookFaultError:
        what = "two readers see different values there"
        mend = "The file is damaged or was tampered with: save it anew with a spreadsheet program."
        place = f"sheet {shown(self.name)}, cell {cell_name(row, column)}"
        return BookFaultError(what, _WHY_ONE, mend, place)


class Book:
    """A workbook, read whole.

    Parameters
    ----------
    path : Path
        The file.

    Attributes
    ----------
    sha256 : str
        Digest of the bytes that were read.
    size : int
        How many those were. [byte]

    Raises
    ------
    BookFaultError
        If it is no workbook that can be trusted.
    OSError
        If it cannot be read.
    """

    def __init__(self, path: Path) -> None:
        data = _bytes_of(path)
        self.sha256 = sha256(data).hexdigest()
        self.size = len(data)
        package = Package(data)
        self._package = package
        self._ods: OdsBook | None = None
        self._xlsx: XlsxBook | None = None
        if "mimetype" in package and "[Content_Types].xml" not in package:
            _refuse_other_kind(package)
            self._ods = OdsBook(package)
        elif "[Content_Types].xml" in package:
            self._xlsx = XlsxBook(package)
        else:
            what = "is a zip, but no workbook"
            why = "A workbook is a zip of XML, .xlsx or .ods."
            raise BookFaultError(what, why, "Name the workbook in [files].")
        self._sheets: tuple[SheetPart, ...] | tuple[OdsSheet, ...] = (
            self._ods.sheets if self._ods else self._xlsx.sheets if self._xlsx else ()
        )

    @property
    def sheets(self) -> tuple[tuple[str, bool], ...]:
        """Name of each sheet in the order of the tabs, and whether it is hidden."""
        return tuple((sheet.name, sheet.hidden) for sheet in self._sheets)

    def sheet(self, name: str, *, hidden: bool = False) -> BookSheet:
        """Open a sheet.

        Parameters
        ----------
        name : str
            As its tab shows it.
        hidden : bool, optional
            Whether a hidden one is opened too.

        Returns
        -------
        BookSheet

        Raises
        ------
        BookFaultError
            If there is no such sheet or more than one, it is hidden, holds no cells, or
            is damaged.
        """
        self._refuse_name(name)
        place = [sheet.name for sheet in self._sheets].index(name)
        where = f"sheet {shown(name)}"
        if self._sheets[place].hidden and not hidden:
            what, why = "is hidden", "What nobody sees is not read as results."
            mend = "Show the sheet, look at it, and save the workbook; or name another."
            raise BookFaultError(what, why, mend, where)
        try:
            return self._opened(place)
        except BookFaultError as fault:
            place_inside = f"{where}, {fault.place}" if fault.place else where
            raise BookFaultError(fault.what, fault.why, fault.mend, place_inside) from fault
        except BaseException as error:
            if not _is_readers(error):
                raise
            what = f"cannot be read ({str(error)[:200]})"
            mend = "It is damaged: copy it again, or save it anew with a spreadsheet program."
            raise BookFaultError(what, "A workbook must be whole.", mend, where) from error

    def _opened(self, place: int) -> BookSheet:
        chosen = self._sheets[place]
        if isinstance(chosen, OdsSheet) and self._ods is not None:
            values = CalamineWorkbook.from_filelike(repacked(self._ods.parts()))
            return BookSheet(chosen.name, chosen.grid, values.get_sheet_by_index(place))
        if not isinstance(chosen, SheetPart) or self._xlsx is None or not chosen.cells:
            what, why = "holds no cells", "A table stands in the cells of a sheet."
            raise BookFaultError(what, why, "Name the sheet that holds the table.")
        grid = self._xlsx.grid(chosen)
        values = CalamineWorkbook.from_filelike(repacked(self._xlsx.parts_for(chosen)))
        return BookSheet(chosen.name, grid, values.get_sheet_by_index(0))

    def _refuse_name(self, name: str) -> None:
        names = [sheet.name for sheet in self._sheets]
        twice = [n for n, count in Counter(n.casefold() for n in names).items() if count > 1]
        if twice:
            what = f"has {names_count(names, twice[0])} sheets of the name {shown(twice[0])}"
            why = "A sheet is found by its name."
            raise BookFaultError(what, why, "Rename one of them with a spreadsheet program.")
        if name not in names:
            what = f"has no sheet {shown(name)}"
            mend = f"{_nearest(name, names)} Mend the layout, or rename the sheet."
            raise BookFaultError(what, "The layout names the sheet that holds the table.", mend)


def names_count(names: list[str], folded: str) -> int:
    """Count the names that are equal but for capitals."""
    return sum(name.casefold() == folded for name in names)


def number_text(value: float) -> str:
    """Write a double in the fewest digits that give it back, a whole one without a point."""
    return repr(value).removesuffix(".0")


def _is_readers(error: BaseException) -> bool:
    """Whether the other reader gave up; a panic of it is no ordinary exception."""
    kinds = (CalamineError, ValueError, OSError)
    return isinstance(error, kinds) or type(error).__name__ == "PanicException"


def _nearest(name: str, names: list[str]) -> str:
    return nearest(name, names).replace("known name", "sheet")


def _are_numbers(values: list[Value]) -> NDArray[np.bool_]:
    return np.array([type(value) is float for value in values], dtype=np.bool_)


def _text(value: Value) -> str:
    if type(value) is str:
        return value
    if type(value) is float:
        return number_text(value)
    if isinstance(value, bool):
        return str(value).upper()
    if isinstance(value, (dt.date, dt.time)):  # a datetime is a date
        return value.isoformat()
    return str(value)


def _between(marked: Marked, first: int, end: int) -> Iterator[tuple[int, str]]:
    begin, stop = np.searchsorted(marked.places, (first, end))
    yield from zip(marked.rows[begin:stop], marked.raws[begin:stop], strict=True)


def _bytes_of(path: Path) -> bytes:
    """Read the whole file; refuse one that is too large or that changes meanwhile."""
    before = path.stat()
    if before.st_size > LARGEST_BOOK:
        what = f"is larger than {LARGEST_BOOK >> 20} MiB"
        why = "Workbooks are held in memory while they are read."
        raise BookFaultError(what, why, "Save the sheet as CSV: text is read in a stream.")
    data = path.read_bytes()
    after = path.stat()
    if _mark(before) != _mark(after) or len(data) != after.st_size:
        what, why = "changed while it was read", "What was read would be neither."
        mend = "Wait until whatever writes it has finished, then run the batch again."
        raise BookFaultError(what, why, mend)
    return data


def _mark(status: os.stat_result) -> tuple[int, int, int]:
    return status.st_ino, status.st_size, status.st_mtime_ns


def _refuse_other_kind(package: Package) -> None:
    kind = package.read("mimetype").strip()
    if kind != _ODS_KIND:
        what = f"is no workbook: it says that it is {shown(kind[:80].decode('ascii', 'replace'))}"
        why = "A workbook is a zip of XML, .xlsx or .ods."
        raise BookFaultError(what, why, "Name the workbook in [files].")
