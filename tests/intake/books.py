"""Workbooks made by hand, part by part, so that each can be wrong in one way."""

import io
import zipfile
from collections.abc import Mapping, Sequence

__all__ = [
    "LAYOUT",
    "OdsCell",
    "cell",
    "ods",
    "ods_cell",
    "ods_row",
    "parts_of",
    "row",
    "xlsx",
    "zipped",
]

OdsCell = str
_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE = "http://schemas.openxmlformats.org/package/2006"
_FORMATS = {  # by cell style: number of the format and, where it is not built in, its code
    1: (14, ""),  # a date
    2: (10, ""),  # 0.00%
    3: (164, "0000"),
    4: (165, "0.0,"),
    5: (166, "0.0000 &quot;mm&quot;"),
    6: (167, "[h]:mm:ss"),
    7: (168, "[Red]0.00;[Blue]-0.00"),
}
LAYOUT = """\
[layout]
id = "book"
fills = "indents"
[workbook]
sheet = "Indents"
first_row = 3
units_line = true
{more}
[above]
tester = "Tester:"
[columns]
coupon_id = "Coupon"
force_n = {{ from = "Load", unit = "N" }}
d1_um = {{ from = "Across", unit = "mm" }}
d2_um = {{ from = "Down", unit = "mm" }}
"""


def cell(
    name: str,
    value: str | None,
    kind: str = "",
    style: int | None = None,
    formula: str | None = None,
) -> str:
    """One cell of an .xlsx sheet."""
    attributes = f' t="{kind}"' if kind else ""
    attributes += "" if style is None else f' s="{style}"'
    inside = "" if formula is None else f"<f>{formula}</f>"
    if kind == "inlineStr":
        inside += f"<is><t>{value}</t></is>"
    elif value is not None:
        inside += f"<v>{value}</v>"
    return f'<c r="{name}"{attributes}>{inside}</c>'


def row(number: int, *values: str | float | None, more: str = "", **attributes: str) -> str:
    """One row of an .xlsx sheet: text in place, numbers as stored; `more` cells follow."""
    cells = ""
    for place, value in enumerate(values):
        name = f"{chr(ord('A') + place)}{number}"
        if isinstance(value, str):
            cells += value if value.startswith("<c ") else cell(name, value, "inlineStr")
        elif value is not None:
            cells += cell(name, repr(value))
    words = "".join(f' {key}="{word}"' for key, word in attributes.items())
    return f'<row r="{number}"{words}>{cells}{more}</row>'


def parts_of(
    sheets: Mapping[str, str] | Sequence[tuple[str, str]],
    *,
    settings: str = "",
    states: Mapping[str, str] | None = None,
    after: str = "",
    before: str = "",
    strings: Sequence[str] = (),
) -> dict[str, str]:
    """The parts of an .xlsx file: sheets by name, as rows of XML."""
    pairs = list(sheets.items()) if isinstance(sheets, Mapping) else list(sheets)
    listed = "".join(
        f'<sheet name="{name}" sheetId="{n}" r:id="rId{n}"'
        + (f' state="{states[name]}"' if states and name in states else "")
        + "/>"
        for n, (name, _) in enumerate(pairs, 1)
    )
    files = [f"worksheets/sheet{n}.xml" for n in range(1, len(pairs) + 1)]
    kinds = ["worksheet"] * len(pairs) + ["styles", "sharedStrings"]
    relations = "".join(
        f'<Relationship Id="rId{n}" Type="{_OFFICE}/{kind}" Target="{file}"/>'
        for n, (kind, file) in enumerate(
            zip(kinds, [*files, "styles.xml", "sharedStrings.xml"], strict=True), 1
        )
    )
    formats = "".join(
        f'<numFmt numFmtId="{number}" formatCode="{code}"/>'
        for number, code in _FORMATS.values()
        if code
    )
    styles = '<xf numFmtId="0"/>' + "".join(f'<xf numFmtId="{n}"/>' for n, _ in _FORMATS.values())
    texts = "".join(f"<si><t>{text}</t></si>" for text in strings)
    parts = {
        "[Content_Types].xml": f'<Types xmlns="{_PACKAGE}/content-types"/>',
        "_rels/.rels": f'<Relationships xmlns="{_PACKAGE}/relationships"><Relationship Id="r" '
        f'Type="{_OFFICE}/officeDocument" Target="xl/workbook.xml"/></Relationships>',
        "xl/workbook.xml": f'<workbook xmlns="{_MAIN}" xmlns:r="{_OFFICE}">{settings}<sheets>'
        f"{listed}</sheets></workbook>",
        "xl/_rels/workbook.xml.rels": f'<Relationships xmlns="{_PACKAGE}/relationships">'
        f"{relations}</Relationships>",
        "xl/styles.xml": f'<styleSheet xmlns="{_MAIN}"><numFmts>{formats}</numFmts><cellXfs>'
        f"{styles}</cellXfs></styleSheet>",
        "xl/sharedStrings.xml": f'<sst xmlns="{_MAIN}">{texts}</sst>',
    }
    for file, (_, rows) in zip(files, pairs, strict=True):
        parts[f"xl/{file}"] = (
            f'<?xml version="1.0" encoding="UTF-8"?><worksheet xmlns="{_MAIN}">{before}<sheetData>'
            f"{rows}</sheetData>{after}</worksheet>"
        )
    return parts


def zipped(parts: Mapping[str, str | bytes], packed: bool = True) -> bytes:
    """A zip of parts."""
    target = io.BytesIO()
    method = zipfile.ZIP_DEFLATED if packed else zipfile.ZIP_STORED
    with zipfile.ZipFile(target, "w", method) as file:
        for name, text in parts.items():
            file.writestr(name, text)
    return target.getvalue()


def xlsx(*rows: str, sheet: str = "Indents", **more: object) -> bytes:
    """An .xlsx file of one sheet."""
    return zipped(parts_of({sheet: "".join(rows)}, **more))  # type: ignore[arg-type]


_ODS = (
    'xmlns:office="urn:oasis:names:tc:opendocument:xmlns:office:1.0" '
    'xmlns:table="urn:oasis:names:tc:opendocument:xmlns:table:1.0" '
    'xmlns:text="urn:oasis:names:tc:opendocument:xmlns:text:1.0" '
    'xmlns:style="urn:oasis:names:tc:opendocument:xmlns:style:1.0" '
    'xmlns:calcext="urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0"'
)


def ods_cell(value: str | float | None, attributes: str = "") -> OdsCell:
    """One cell of an .ods sheet."""
    if value is None:
        return f"<table:table-cell {attributes}/>"
    if isinstance(value, str):
        return (
            f'<table:table-cell office:value-type="string" {attributes}><text:p>{value}</text:p>'
            "</table:table-cell>"
        )
    return (
        f'<table:table-cell office:value-type="float" office:value="{value!r}" {attributes}>'
        f"<text:p>{value!r}</text:p></table:table-cell>"
    )


def ods_row(*cells: str | float | None, attributes: str = "") -> str:
    """One row of an .ods sheet."""
    inside = "".join(
        each if isinstance(each, str) and each.startswith("<") else ods_cell(each) for each in cells
    )
    return f"<table:table-row {attributes}>{inside}</table:table-row>"


def ods(
    *rows: str, sheet: str = "Indents", styles: str = "", style: str = "", more: str = ""
) -> bytes:
    """An .ods file of one sheet."""
    content = (
        f'<?xml version="1.0" encoding="UTF-8"?><office:document-content {_ODS}>'
        f"<office:automatic-styles>{styles}</office:automatic-styles><office:body>"
        f'<office:spreadsheet><table:table table:name="{sheet}"{style}>{"".join(rows)}'
        f"</table:table>{more}</office:spreadsheet></office:body></office:document-content>"
    )
    kind = "application/vnd.oasis.opendocument.spreadsheet"
    return zipped({"mimetype": kind, "content.xml": content})
