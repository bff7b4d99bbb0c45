"""Looking at a workbook."""

from collections.abc import Sequence
from pathlib import Path
from typing import Final

from coldwork.inputs.words import shown
from coldwork.intake.workbooks.book import Book, BookSheet, SheetRows
from coldwork.intake.workbooks.faults import BookFaultError, cell_name, column_letters
from coldwork.intake.workbooks.grid import Mark
from coldwork.jobs.looks.seen import Entry, Oddity, Seen
from coldwork.jobs.looks.shape import Shape, find_shape
from coldwork.jobs.looks.signs import is_number
from coldwork.jobs.looks.table import add_table, closing_words, labels_in

__all__ = ["look_at_book"]

_ROWS: Final = 5000  # that are looked at, at the begin
_LAST: Final = 40  # rows at the end that may close the table
_MOST_ODD: Final = 20
_ODD: Final = {
    Mark.UNVALUED: "a formula without a value that can be trusted",
    Mark.ERROR: "an error of the spreadsheet",
    Mark.COMPUTED: "a formula",
    Mark.DATE: "a date or a time",
    Mark.PERCENT: "a number that is shown as a percentage",
    Mark.SCALED: "a number that is shown in thousands or millions",
}


def look_at_book(seen: Seen, path: Path) -> None:
    """Add what a workbook shows.

    Parameters
    ----------
    seen : Seen
        Where to add it.
    path : Path
        The file.
    """
    try:
        book = Book(path)
    except BookFaultError as fault:
        cause = fault.cause(seen.name)
        seen.facts.append(("refused", f"{cause.what}. {cause.mend}"))
        return
    seen.kind = "workbook"
    best: tuple[BookSheet, Shape, list[list[str]], list[list[str]]] | None = None
    tables = 0
    odd: list[Oddity] = []
    for name, hidden in book.sheets:
        words = "hidden" if hidden else "no table of numbers"
        try:
            sheet = book.sheet(name, hidden=True)
            rows, last = _rows(sheet)
            shape = find_shape(rows)
        except BookFaultError as fault:
            cause = fault.cause(seen.name)
            seen.facts.append((f"sheet {shown(name)}", f"refused: {cause.what} ({cause.where})"))
            continue
        if shape is not None:
            words = (
                f"{'hidden; ' * hidden}a table in rows {shape.first + 1} to {sheet.grid.last_row}"
            )
            tables += 1
            if best is None and not hidden:
                best = sheet, shape, rows, last
        seen.facts.append((f"sheet {shown(name)}", words))
    if best is None:
        return
    sheet, shape, rows, last = best
    several = "another sheet holds a table too" if tables > 1 else ""
    seen.form.append(Entry("sheet", sheet.name, several, decide=tables > 1))
    _add_shape(seen, rows, shape)
    lead = next((p for p, cell in enumerate(rows[shape.header or 0]) if cell), 0)
    words_below = closing_words(
        [row[lead:] for row in last], lead_is_number=is_number(rows[shape.first][lead])
    )
    if words_below:
        note = "these rows close the table; each is kept, means and scatters are compared"
        seen.form.append(Entry("ends_before", words_below, note))
    typed = _typed_numbers(sheet, shape)
    add_table(seen, rows, shape, text=typed)
    odd += _oddities(sheet, shape, set(seen.times))
    seen.oddities = odd[:_MOST_ODD]


def _rows(sheet: BookSheet) -> tuple[list[list[str]], list[list[str]]]:
    """Give the first rows of a sheet, and those after the last reading among its last."""
    first: list[list[str]] = []
    last: list[list[str]] = []
    for block in sheet.rows(_ROWS):
        rows = [list(row) for row in zip(*block.columns, strict=True)]
        first = first or rows
        last = [*last, *rows][-_LAST:]
    readings = [place for place, row in enumerate(last) if sum(map(is_number, row)) > 1]
    closing = [
        row
        for place, row in enumerate(last)
        if not readings or place > readings[-1] or not is_number(row[0])
    ]
    return first, closing


def _add_shape(seen: Seen, rows: Sequence[Sequence[str]], shape: Shape) -> None:
    if shape.header is None:
        seen.facts.append(("header", "no row over the readings names the columns"))
        note = "which row names the columns? a layout needs one"
        seen.form.append(Entry("first_row", shape.first or 1, note, decide=True))
        return
    named = ", ".join(shown(cell) for cell in rows[shape.header] if cell)
    seen.facts.append(("header", f"row {shape.header + 1}: {named}"))
    seen.form.append(Entry("first_row", shape.header + 1, "the header's row"))
    seen.above = labels_in(rows[: shape.header])
    if shape.units is not None:
        units = ", ".join(shown(cell) for cell in rows[shape.units] if cell)
        seen.facts.append(("units", f"row {shape.units + 1}: {units}"))
        seen.form.append(Entry("units_line", value=True))


def _typed_numbers(sheet: BookSheet, shape: Shape) -> bool:
    """Whether some numbers among the first rows are text, so that their signs matter."""
    first: SheetRows = next(iter(sheet.rows(_ROWS)))
    part = first.between(shape.first + 1, shape.last + 2)
    return any(
        is_number(cell) and not stored
        for cells, numbers in zip(part.columns, part.numbers, strict=True)
        for cell, stored in zip(cells, numbers, strict=True)
    )


def _oddities(sheet: BookSheet, shape: Shape, times: set[int]) -> list[Oddity]:
    grid = sheet.grid
    found = [Oddity(f"cells {block}", "they are merged") for block in grid.merges[:_MOST_ODD]]
    found += [
        Oddity(f"rows {block.top} to {block.bottom}", "they are hidden")
        for block in grid.hidden_rows[:_MOST_ODD]
    ]
    for block in grid.hidden_columns[:_MOST_ODD]:
        ends = f"{column_letters(block.left)} to {column_letters(block.right)}"
        found.append(Oddity(f"columns {ends}", "they are hidden"))
    for mark, column, marked in grid.marks():
        rows = [row for row in marked.rows if row > shape.first]
        meant = mark is Mark.DATE and column - 1 in times
        if mark in _ODD and rows and not meant:
            more = f", and {len(rows) - 1} more below" if len(rows) > 1 else ""
            what = f"{_ODD[mark]}{more}"
            found.append(Oddity(f"cell {cell_name(rows[0], column)}", what))
    return found
