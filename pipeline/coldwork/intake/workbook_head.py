"""What stands over the table of a sheet: where its columns are, and what must not be there."""

from collections import Counter
from collections.abc import Mapping, Sequence
from typing import Final, NamedTuple

from coldwork.contracts import Contract
from coldwork.errors import Cause
from coldwork.inputs.layout import Layout
from coldwork.inputs.words import listed, shown
from coldwork.intake.laid_out_head import (
    AboveLine,
    AboveValue,
    above_values,
    find_columns,
    unit_causes,
)
from coldwork.intake.workbooks.book import BookSheet, SheetRows
from coldwork.intake.workbooks.faults import cell_name, column_letters
from coldwork.intake.workbooks.grid import Mark

__all__ = ["SheetHead", "read_head"]

_ALONE: Final = "A header has one name in one cell."
_SEEN: Final = "What nobody sees is not read as results."
_SHOW: Final = "Show it, look at it, and save the workbook."


class SheetHead(NamedTuple):
    """What stands over the rows of a sheet.

    Attributes
    ----------
    header : tuple of str
        Cells of the header, from column A on.
    places : mapping of str to int
        By the contract's column: place in the header, from 0.
    unused : tuple of str
        Columns that the layout passes over.
    above : mapping of str to AboveValue
        Values over the table.
    stored : set of str
        Those of them that are stored numbers or times.
    causes : list of Cause
        Why the sheet cannot be read through the layout.
    """

    header: tuple[str, ...]
    places: Mapping[str, int]
    unused: tuple[str, ...]
    above: Mapping[str, AboveValue]
    stored: set[str]
    causes: list[Cause]


def read_head(
    sheet: BookSheet, rows: SheetRows, layout: Layout, contract: Contract, name: str
) -> SheetHead:
    """Read the rows over the table and the header.

    Parameters
    ----------
    sheet : BookSheet
        The sheet.
    rows : SheetRows
        Its first rows, down to the header and the units row.
    layout : Layout
        Of a workbook.
    contract : Contract
        The table's contract.
    name : str
        What messages call the file and the sheet.

    Returns
    -------
    SheetHead
    """
    first = layout.workbook.first_row if layout.workbook else 1
    header = rows.row(first)
    causes = _twice(header, layout, f"{name}, row {first}")
    if causes:
        return SheetHead(header, {}, (), {}, set(), causes)
    found = find_columns(header, layout, f"{name}, row {first}")
    last = first + layout.units_line
    causes = _merged(sheet, (first, last), found.places, bool(found.causes), name)
    causes = causes or found.causes
    if not causes:
        causes = _hidden(sheet, first, found.places, name)
    if not causes and layout.units_line:
        where = f"{name}, row {last}"
        causes = unit_causes(rows.row(last), found.places, layout, contract, where)
    lines = [
        AboveLine(f"{name}, row {number}", rows.row(number))
        for number in range(1, first)
        if any(rows.row(number))
    ]
    above, wrong = above_values(lines, layout, contract, name)
    stored, odd = _above_cells(sheet, rows, layout, contract, name)
    causes = [*causes, *(odd or wrong)]
    return SheetHead(header, found.places, found.unused, above, stored, causes)


def _twice(header: Sequence[str], layout: Layout, where: str) -> list[Cause]:
    """Find columns that the layout names and the header has more than once."""
    count = Counter(header)
    row = int(where.rpartition(" ")[2])
    causes = []
    for filled in layout.columns:
        if count[filled.source] > 1:
            at = [cell_name(row, p) for p, cell in enumerate(header, 1) if cell == filled.source]
            what = f"column {shown(filled.source)} stands {len(at)} times, in {listed(at)}"
            why = f"Layout {layout.id} fills {filled.name} from one of them and cannot tell which."
            causes.append(Cause(where, what, why, "Rename the others in the workbook."))
    return causes


def _merged(
    sheet: BookSheet, span: tuple[int, int], places: Mapping[str, int], lost: bool, name: str
) -> list[Cause]:
    """Find merged cells in the header that a wanted column may hide behind."""
    used = set(places.values())
    causes = []
    for block in sheet.grid.merges:
        if block.bottom < span[0] or block.top > span[1]:
            continue
        if lost or any(block.left <= place + 1 <= block.right for place in used):
            where = f"{name}, cells {block}"
            mend = "Unmerge them, and give each column its own name."
            causes.append(Cause(where, "header cells are merged", _ALONE, mend))
    return causes


def _hidden(sheet: BookSheet, row: int, places: Mapping[str, int], name: str) -> list[Cause]:
    causes = []
    for column, place in places.items():
        if sheet.grid.is_hidden(place + 1):
            where = f"{name}, column {column_letters(place + 1)}"
            what = f"the column that fills {column} is hidden"
            causes.append(Cause(where, what, _SEEN, _SHOW))
    if any(block.top <= row <= block.bottom for block in sheet.grid.hidden_rows):
        causes.append(Cause(f"{name}, row {row}", "the header's row is hidden", _SEEN, _SHOW))
    return causes


def _above_cells(
    sheet: BookSheet, rows: SheetRows, layout: Layout, contract: Contract, name: str
) -> tuple[set[str], list[Cause]]:
    """Tell which values over the table are stored as numbers or times, and which are odd."""
    first = layout.workbook.first_row if layout.workbook else 1
    stored: set[str] = set()
    causes: list[Cause] = []
    for filled in layout.above:
        for number in range(1, first):
            cells = rows.row(number)
            if filled.source not in cells:
                continue
            place = cells.index(filled.source) + 1
            if place >= len(cells):
                continue
            here = number - rows.first
            if rows.numbers[place][here] or rows.dates[place][here]:
                stored.add(filled.name)
            why_odd = _odd(sheet, rows, number, place, contract.field(filled.name).type)
            if why_odd:
                where = f"{name}, cell {cell_name(number, place + 1)}"
                why = f"Every row of the table takes its {filled.name} from there."
                causes.append(Cause(where, why_odd, why, "Mend the cell in the workbook."))
    return stored, causes


def _odd(sheet: BookSheet, rows: SheetRows, number: int, place: int, kind: str) -> str:
    one = rows.between(number, number + 1).rows
    merged = sheet.grid.rows_merged(one, place + 1) | sheet.grid.rows_merged(one, place)
    if merged.any():
        return "the label or its value is merged with other cells"
    if sheet.marked(Mark.UNVALUED, place + 1, one).any():
        return "the value is a formula without a value"
    if sheet.marked(Mark.ERROR, place + 1, one).any():
        return "the value is an error of the spreadsheet"
    if kind != "datetime" and rows.dates[place][number - rows.first]:
        return "the value is stored as a date or a time"
    return ""
