"""A workbook of the .xlsx kind, written part by part so that its bytes never change.

The parts are not compressed: packed bytes differ from one version of zlib to the next.
Numbers are written with 17 digits, as spreadsheet programs store them, so that 0.1371
may stand there as 0.13710000000000000.
"""

import io
import zipfile
from collections.abc import Collection, Mapping, Sequence
from datetime import datetime
from typing import Final, TypeAlias
from xml.sax.saxutils import escape, quoteattr

__all__ = ["Cell", "Formula", "Percentage", "Trouble", "workbook"]

_HEAD: Final = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
_SHEETS: Final = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_OFFICE: Final = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE: Final = "http://schemas.openxmlformats.org/package/2006"
_MEDIA: Final = "application/vnd.openxmlformats-officedocument.spreadsheetml"
_DAY_ZERO: Final = datetime(1899, 12, 30)  # noqa: DTZ001 - workbooks know no zones
_TIME_STYLE: Final = 1
_PERCENTAGE_STYLE: Final = 2
_STYLES: Final = (
    f'{_HEAD}<styleSheet xmlns="{_SHEETS}"><numFmts count="1"><numFmt numFmtId="164" '
    'formatCode="yyyy\\-mm\\-dd\\ hh:mm:ss"/></numFmts><fonts count="1"><font><sz val="11"/>'
    '<name val="Calibri"/></font></fonts><fills count="2"><fill><patternFill patternType="none"/>'
    '</fill><fill><patternFill patternType="gray125"/></fill></fills><borders count="1"><border>'
    '<left/><right/><top/><bottom/><diagonal/></border></borders><cellStyleXfs count="1">'
    '<xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs><cellXfs count="3">'
    '<xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/><xf numFmtId="164" fontId="0" '
    'fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/><xf numFmtId="10" fontId="0" '
    'fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/></cellXfs></styleSheet>'
)


class Formula:
    """A formula and the value that was worked out when the workbook was saved, if it was."""

    def __init__(self, text: str, value: float | None = None) -> None:
        self.text = text
        self.value = value


class Percentage:
    """A number that is shown as a percentage."""

    def __init__(self, value: float) -> None:
        self.value = value


class Trouble:
    """An error of the spreadsheet, such as ``#N/A``."""

    def __init__(self, code: str) -> None:
        self.code = code


Cell: TypeAlias = str | float | datetime | Formula | Percentage | Trouble | None


def workbook(
    sheets: Mapping[str, Sequence[Sequence[Cell]]],
    hidden: Collection[int] = (),
    merged: Sequence[str] = (),
) -> bytes:
    """Write a workbook.

    Parameters
    ----------
    sheets : mapping of str to rows of cells
        By name; None is an empty cell. A time is meant as the clock on the wall showed it.
    hidden : collection of int
        Rows that every sheet hides, from 1.
    merged : sequence of str
        Ranges that every sheet merges, such as ``D7:D8``.

    Returns
    -------
    bytes
        The file, the same every time.
    """
    strings: dict[str, int] = {}
    parts = {
        f"xl/worksheets/sheet{number}.xml": _sheet(rows, strings, hidden, merged)
        for number, rows in enumerate(sheets.values(), 1)
    }
    parts = {
        "[Content_Types].xml": _types(len(sheets)),
        "_rels/.rels": _relations([("officeDocument", "xl/workbook.xml")]),
        "xl/workbook.xml": _book(list(sheets)),
        "xl/_rels/workbook.xml.rels": _relations(
            [
                *(("worksheet", f"worksheets/sheet{n}.xml") for n in range(1, len(sheets) + 1)),
                ("sharedStrings", "sharedStrings.xml"),
                ("styles", "styles.xml"),
            ]
        ),
        **parts,
        "xl/sharedStrings.xml": _shared(strings),
        "xl/styles.xml": _STYLES,
    }
    return _zipped(parts)


def _zipped(parts: Mapping[str, str]) -> bytes:
    target = io.BytesIO()
    with zipfile.ZipFile(target, "w", zipfile.ZIP_STORED) as file:
        for name, text in parts.items():
            part = zipfile.ZipInfo(name, date_time=(1980, 1, 1, 0, 0, 0))
            part.create_system = 0  # the same on every system
            file.writestr(part, text.encode("utf-8"))
    return target.getvalue()


def _sheet(
    rows: Sequence[Sequence[Cell]],
    strings: dict[str, int],
    hidden: Collection[int],
    merged: Sequence[str],
) -> str:
    state = {True: ' hidden="1"', False: ""}
    body = "".join(
        f'<row r="{number}"{state[number in hidden]}>{_row(number, row, strings)}</row>'
        for number, row in enumerate(rows, 1)
        if any(cell is not None for cell in row)
    )
    ranges = "".join(f'<mergeCell ref="{each}"/>' for each in merged)
    after = f'<mergeCells count="{len(merged)}">{ranges}</mergeCells>' if merged else ""
    return f'{_HEAD}<worksheet xmlns="{_SHEETS}"><sheetData>{body}</sheetData>{after}</worksheet>'


def _row(number: int, row: Sequence[Cell], strings: dict[str, int]) -> str:
    return "".join(
        _cell(f"{chr(ord('A') + place)}{number}", cell, strings)
        for place, cell in enumerate(row)
        if cell is not None
    )


def _cell(name: str, cell: Cell, strings: dict[str, int]) -> str:
    if isinstance(cell, str):
        return f'<c r="{name}" t="s"><v>{strings.setdefault(cell, len(strings))}</v></c>'
    if isinstance(cell, datetime):
        since = cell - _DAY_ZERO
        days = since.days + since.seconds / 86400
        return f'<c r="{name}" s="{_TIME_STYLE}"><v>{days:.17g}</v></c>'
    if isinstance(cell, Formula):
        value = "" if cell.value is None else f"<v>{cell.value:.17g}</v>"
        return f'<c r="{name}"><f>{escape(cell.text)}</f>{value}</c>'
    if isinstance(cell, Trouble):
        return f'<c r="{name}" t="e"><v>{cell.code}</v></c>'
    if isinstance(cell, Percentage):
        return f'<c r="{name}" s="{_PERCENTAGE_STYLE}"><v>{cell.value:.17g}</v></c>'
    return f'<c r="{name}"><v>{cell:.17g}</v></c>'


def _shared(strings: Mapping[str, int]) -> str:
    each = "".join(f'<si><t xml:space="preserve">{escape(text)}</t></si>' for text in strings)
    return f'{_HEAD}<sst xmlns="{_SHEETS}" uniqueCount="{len(strings)}">{each}</sst>'


def _book(names: Sequence[str]) -> str:
    each = "".join(
        f'<sheet name={quoteattr(name)} sheetId="{number}" r:id="rId{number}"/>'
        for number, name in enumerate(names, 1)
    )
    return (
        f'{_HEAD}<workbook xmlns="{_SHEETS}" xmlns:r="{_OFFICE}"><sheets>{each}</sheets></workbook>'
    )


def _relations(targets: Sequence[tuple[str, str]]) -> str:
    each = "".join(
        f'<Relationship Id="rId{number}" Type="{_OFFICE}/{kind}" Target="{target}"/>'
        for number, (kind, target) in enumerate(targets, 1)
    )
    return f'{_HEAD}<Relationships xmlns="{_PACKAGE}/relationships">{each}</Relationships>'


def _types(sheets: int) -> str:
    files = {"workbook.xml": "sheet.main", "sharedStrings.xml": "sharedStrings"}
    files |= {"styles.xml": "styles"}
    files |= {f"worksheets/sheet{number}.xml": "worksheet" for number in range(1, sheets + 1)}
    each = "".join(
        f'<Override PartName="/xl/{name}" ContentType="{_MEDIA}.{kind}+xml"/>'
        for name, kind in files.items()
    )
    return (
        f'{_HEAD}<Types xmlns="{_PACKAGE}/content-types"><Default Extension="rels" ContentType='
        f'"application/vnd.openxmlformats-package.relationships+xml"/>{each}</Types>'
    )
