"""Workbooks of the .xlsx kind: their sheets, and what the XML of a sheet says of its cells.

References
----------
.. [1] ECMA-376-1:2016, Office Open XML, part 1: 18.2 (workbook), 18.3 (worksheets: 18.3.1.4
   c, 18.3.1.13 col, 18.3.1.40 f, 18.3.1.55 mergeCell, 18.3.1.73 row), 18.4 (shared strings),
   18.8 (styles). Part 2, 9.3: relationships.
"""

import posixpath
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Final

from coldwork.inputs.words import shown
from coldwork.intake.workbooks.faults import BookFaultError
from coldwork.intake.workbooks.formats import Shown, shown_by
from coldwork.intake.workbooks.grid import Grid
from coldwork.intake.workbooks.package import Package
from coldwork.intake.workbooks.walk import local_attributes, walk
from coldwork.intake.workbooks.xlsx_sheet import SheetWalk, Surroundings

__all__ = ["SheetPart", "XlsxBook"]

_TYPES: Final = "[Content_Types].xml"
_ROOT_RELATIONS: Final = "_rels/.rels"
_MAIN: Final = "/officeDocument"
_WORKSHEET: Final = "/worksheet"
_HEAD: Final = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>'
_PACKAGE: Final = "http://schemas.openxmlformats.org/package/2006"
_OFFICE: Final = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_MEDIA: Final = "application/vnd.openxmlformats-officedocument.spreadsheetml"
_MADE_ANEW: Final = "Save it anew with a spreadsheet program."


@dataclass(frozen=True)
class SheetPart:
    """A sheet as the workbook lists it.

    Attributes
    ----------
    name : str
        As its tab shows it.
    part : str
        Its path in the zip.
    hidden : bool
        Whether the tab is hidden.
    cells : bool
        Whether it is a sheet of cells, not a chart.
    """

    name: str
    part: str
    hidden: bool
    cells: bool


@dataclass
class _Listed:
    """What the workbook part says: the sheets with their relationships, and its settings."""

    sheets: list[tuple[str, str, bool]] = field(default_factory=list)
    since_1904: bool = False
    outdated: bool = False

    def start(self, name: str, written: Mapping[str, str]) -> None:
        attributes = local_attributes(written)
        if name == "sheet":
            hidden = attributes.get("state", "visible") != "visible"
            self.sheets.append((attributes.get("name", ""), attributes.get("id", ""), hidden))
        elif name == "workbookPr":
            self.since_1904 = _is_true(attributes.get("date1904"))
        elif name == "calcPr":
            by_hand = attributes.get("calcMode") == "manual"
            self.outdated = (
                _is_true(attributes.get("fullCalcOnLoad"))
                or not _is_true(attributes.get("calcCompleted", "1"))
                or (by_hand and not _is_true(attributes.get("calcOnSave", "1")))
            )


class XlsxBook:
    """The parts of an .xlsx file that matter for cells.

    Parameters
    ----------
    package : Package
        The zip.

    Attributes
    ----------
    sheets : tuple of SheetPart
        In the order of their tabs.

    Raises
    ------
    BookFaultError
        If it is no workbook of this kind, or damaged.
    """

    def __init__(self, package: Package) -> None:
        self._package = package
        main = _main_part(package)
        kind_of, target_of = _relations(package, main)
        listed = _Listed()
        walk(package.read(main), main, listed.start, _nothing)
        self._since_1904 = listed.since_1904
        self._outdated = listed.outdated
        self._strings = _first(kind_of, target_of, "/sharedStrings", package)
        self._styles = _first(kind_of, target_of, "/styles", package)
        self.sheets = tuple(
            SheetPart(name, target_of.get(key, ""), hidden, kind_of.get(key) == _WORKSHEET)
            for name, key, hidden in listed.sheets
        )

    def grid(self, sheet: SheetPart) -> Grid:
        """Go over a sheet's XML and note what is odd about its cells.

        Parameters
        ----------
        sheet : SheetPart
            One of `sheets`.

        Returns
        -------
        Grid

        Raises
        ------
        BookFaultError
            If it is damaged or too large.
        """
        around = Surroundings(self._string_lengths(), self._shown(), self._outdated)
        pass_over = SheetWalk(around)
        data = self._package.read(sheet.part)
        walk(data, sheet.part, pass_over.start, pass_over.end, pass_over.text)
        return pass_over.grid

    def parts_for(self, sheet: SheetPart) -> Mapping[str, bytes]:
        """Give a workbook of this sheet alone for another reader, part by part.

        Only the sheet, the shared strings and the styles are the file's own, and `grid`
        has been over them; the parts that hold them together are written anew.
        """
        date = ' date1904="1"' if self._since_1904 else ""
        files = {"worksheet": "xl/worksheets/sheet1.xml"}
        parts = {files["worksheet"]: self._package.read(sheet.part)}
        for kind, name, part in (
            ("sharedStrings", "xl/sharedStrings.xml", self._strings),
            ("styles", "xl/styles.xml", self._styles),
        ):
            if part is not None:
                files[kind] = name
                parts[name] = self._package.read(part)
        return {
            _TYPES: _content_types(files).encode(),
            _ROOT_RELATIONS: _relations_of({"officeDocument": "xl/workbook.xml"}, "").encode(),
            "xl/workbook.xml": (
                f'{_HEAD}<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"'
                f' xmlns:r="{_OFFICE}"><workbookPr{date}/><sheets>'
                '<sheet name="1" sheetId="1" r:id="worksheet"/></sheets></workbook>'
            ).encode(),
            "xl/_rels/workbook.xml.rels": _relations_of(files, "xl/").encode(),
            **parts,
        }

    def _string_lengths(self) -> list[int]:
        """How long each shared string is; phonetic hints are not part of it."""
        if self._strings is None:
            return []
        found = _Strings()
        walk(self._package.read(self._strings), self._strings, found.start, found.end, found.text)
        return found.lengths

    def _shown(self) -> list[Shown]:
        """Say what each cell style does to a number."""
        if self._styles is None:
            return []
        found = _Styles()
        walk(self._package.read(self._styles), self._styles, found.start, found.end)
        return [shown_by(number, found.codes.get(number)) for number in found.numbers]


@dataclass
class _Strings:
    lengths: list[int] = field(default_factory=list)
    _open: list[str] = field(default_factory=list)

    def start(self, name: str, _attributes: Mapping[str, str]) -> None:
        self._open.append(name)
        if name == "si":
            self.lengths.append(0)

    def end(self, _name: str) -> None:
        self._open.pop()

    def text(self, piece: str) -> None:
        if self.lengths and self._open[-1] == "t" and "rPh" not in self._open:
            self.lengths[-1] += len(piece)


@dataclass
class _Styles:
    codes: dict[int, str] = field(default_factory=dict)
    numbers: list[int] = field(default_factory=list)
    _inside: bool = False

    def start(self, name: str, attributes: Mapping[str, str]) -> None:
        if name == "numFmt":
            self.codes[_whole(attributes.get("numFmtId"))] = attributes.get("formatCode", "")
        elif name == "cellXfs":
            self._inside = True
        elif name == "xf" and self._inside:
            self.numbers.append(_whole(attributes.get("numFmtId", "0")))

    def end(self, name: str) -> None:
        if name == "cellXfs":
            self._inside = False


def _main_part(package: Package) -> str:
    why = "A workbook is a zip of XML, .xlsx or .ods."
    kind_of, target_of = _relations(package, "")
    for key, kind in kind_of.items():
        if kind == _MAIN:
            main = target_of[key]
            if main.endswith(".bin"):
                what = "is a workbook of the binary kind (.xlsb)"
                raise BookFaultError(what, why, "Save it as .xlsx.")
            if main.partition("/")[0] in {"word", "ppt"}:
                what = f"is no workbook: it holds {shown(main)}"
                raise BookFaultError(what, why, "Name the workbook in [files].")
            return main
    what = "is no workbook: nothing in it says which part holds the sheets"
    raise BookFaultError(what, why, "Name the workbook in [files].")


def _relations(package: Package, source: str) -> tuple[dict[str, str], dict[str, str]]:
    """By key, what each part that `source` refers to is, and its path in the zip."""
    folder, name = posixpath.split(source)
    part = posixpath.join(folder, "_rels", f"{name}.rels")
    kind_of: dict[str, str] = {}
    target_of: dict[str, str] = {}

    def start(element: str, attributes: Mapping[str, str]) -> None:
        if element == "Relationship" and attributes.get("TargetMode") != "External":
            key, target = attributes.get("Id", ""), attributes.get("Target", "")
            kind_of[key] = "/" + attributes.get("Type", "").rpartition("/")[2]
            target_of[key] = posixpath.normpath(posixpath.join("/", folder, target)).lstrip("/")

    walk(package.read(part), part, start, _nothing)
    return kind_of, target_of


def _first(
    kind_of: Mapping[str, str], target_of: Mapping[str, str], kind: str, package: Package
) -> str | None:
    for key, each in kind_of.items():
        if each == kind and target_of[key] in package:
            return target_of[key]
    return None


def _relations_of(files: Mapping[str, str], base: str) -> str:
    each = "".join(
        f'<Relationship Id="{kind}" Type="{_OFFICE}/{kind}" Target="{name.removeprefix(base)}"/>'
        for kind, name in files.items()
    )
    return f'{_HEAD}<Relationships xmlns="{_PACKAGE}/relationships">{each}</Relationships>'


def _content_types(files: Mapping[str, str]) -> str:
    each = "".join(
        f'<Override PartName="/{name}" ContentType="{_MEDIA}.{kind}+xml"/>'
        for kind, name in ({"sheet.main": "xl/workbook.xml"} | dict(files)).items()
    )
    return (
        f'{_HEAD}<Types xmlns="{_PACKAGE}/content-types"><Default Extension="rels" '
        f'ContentType="application/vnd.openxmlformats-package.relationships+xml"/>{each}</Types>'
    )


def _whole(text: str | None) -> int:
    if text is None or not (text.isascii() and text.isdigit()) or len(text) > 9:
        what = f"its styles hold a number format {shown(text)}"
        raise BookFaultError(what, "Number formats are numbered.", _MADE_ANEW)
    return int(text)


def _is_true(text: str | None) -> bool:
    return text in {"1", "true", "on"}


def _nothing(_name: str) -> None:
    """Take no note of an element's end."""
