"""Malformed workbooks, each with its one verdict: which hazard, where, and what to do."""

import io
import struct
import zipfile
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from tests.intake.books import cell, ods, ods_cell, ods_row, parts_of, row, xlsx, zipped
from tests.intake.test_workbook import GOOD, HEADER, ODS_HEADER, files_of

from coldwork.errors import BatchRefused, Cause
from coldwork.intake.sources import table_text
from coldwork.intake.workbooks.grid import Grid
from coldwork.intake.workbooks.xlsx import XlsxBook

Verdict = tuple[str, str, str]  # parts of where, what and mend
ENTITIES: Final = (
    '<!DOCTYPE lolz [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;&a;&a;&a;&a;&a;&a;">'
    '<!ENTITY c "&b;&b;&b;&b;&b;&b;&b;&b;&b;&b;">]>'
)
SHEET: Final = "xl/worksheets/sheet1.xml"
REPEATED: Final = 'table:number-rows-repeated="1048000"'
LOCKED: Final = '<m:manifest xmlns:m="m"><m:encryption-data/></m:manifest>'
BOOK: Final = xlsx(*HEADER, GOOD)


def with_part(name: str, edit: Callable[[str], str]) -> bytes:
    parts = parts_of({"Indents": "".join((*HEADER, GOOD))})
    parts[name] = edit(parts[name])
    return zipped(parts)


def sheet_of(*rows: str, **more: str) -> bytes:
    return xlsx(*HEADER, *rows, **more)


def with_merged(reference: str) -> bytes:
    return sheet_of(GOOD, after=f'<mergeCells><mergeCell ref="{reference}"/></mergeCells>')


def bomb() -> bytes:
    # 64 MiB of blanks in front of the rows: deflate packs them a thousandfold.
    return with_part(
        SHEET,
        lambda xml: xml.replace("<sheetData>", " " * (64 << 20) + "<sheetData>"),
    )


def lying_bomb() -> bytes:
    """The same with a directory that promises a few bytes."""
    data = bytearray(bomb())
    real = struct.pack("<I", (64 << 20) + len(parts_of({"Indents": "".join((*HEADER, GOOD))})
                                              ["xl/worksheets/sheet1.xml"].encode()))  # fmt: skip
    assert data.count(real) == 2
    return bytes(data.replace(real, struct.pack("<I", 900)))


def twice_in_the_zip() -> bytes:
    parts = parts_of({"Indents": "".join((*HEADER, GOOD))})
    target = io.BytesIO()
    with zipfile.ZipFile(target, "w") as file:
        for name, text in parts.items():
            file.writestr(name, text)
        with pytest.warns(UserWarning, match="Duplicate name"):
            file.writestr("xl/styles.xml", parts["xl/styles.xml"])
    return target.getvalue()


def locked() -> bytes:
    data = bytearray(BOOK)
    at = data.index(b"PK\x01\x02")
    data[at + 8] |= 1  # bit 0 of the flags: encrypted
    return bytes(data)


def several(*names: str, states: Mapping[str, str] | None = None) -> bytes:
    rows = "".join((*HEADER, GOOD))
    return zipped(parts_of([(name, rows) for name in names], states=states))


REFUSED: dict[str, tuple[Callable[[], bytes], Verdict]] = {
    "empty": (lambda: b"", ("b.xlsx", "is empty", "needs a layout with [text]")),
    "no zip": (
        lambda: b"Coupon;Load\nA-1;98.07\n",
        ("b.xlsx", "is no workbook: it does not begin like a zip", "a layout with [text]"),
    ),
    "cut off": (
        lambda: BOOK[: len(BOOK) // 2],
        ("b.xlsx", "damaged or cut-off zip", "Copy it again"),
    ),
    "one byte changed": (
        lambda: BOOK.replace(b"PK\x03\x04", b"PK\x03\x05"),
        ("b.xlsx", "is damaged (Bad magic number", "Copy it again"),
    ),
    "old binary kind": (
        lambda: b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(600),
        ("b.xlsx", "locked by a password, or is a workbook of the old binary", "save it as .xlsx"),
    ),
    "locked part": (locked, ("b.xlsx", "is locked by a password", "without a password")),
    "another zip": (
        lambda: zipped({"a.txt": "hello"}),
        ("b.xlsx", "is a zip, but no workbook", "Name the workbook"),
    ),
    "a text document": (
        lambda: zipped({"mimetype": "application/vnd.oasis.opendocument.text"}),
        ("b.xlsx", "opendocument.text", "Name the workbook"),
    ),
    "a letter": (
        lambda: with_part("_rels/.rels", lambda xml: xml.replace("xl/workbook", "word/document")),
        ("b.xlsx", "it holds 'word/document.xml'", "Name the workbook"),
    ),
    "binary sheets": (
        lambda: with_part("_rels/.rels", lambda xml: xml.replace("workbook.xml", "workbook.bin")),
        ("b.xlsx", "binary kind (.xlsb)", "Save it as .xlsx"),
    ),
    "a part twice": (twice_in_the_zip, ("b.xlsx", "holds its part", "Save it anew")),
    "a part missing": (
        lambda: with_part(
            "xl/_rels/workbook.xml.rels", lambda xml: xml.replace("sheet1.xml", "sheet9.xml")
        ),
        ("sheet 'Indents'", "its part 'xl/worksheets/sheet9.xml' is not there", "Copy it again"),
    ),
    "zip bomb": (bomb, ("b.xlsx", "would unpack to", "Ask where the file comes from")),
    "zip bomb that lies": (lying_bomb, ("sheet 'Indents'", "is damaged", "Copy it again")),
    "entity bomb": (
        lambda: with_part(SHEET, lambda xml: xml.replace("<worksheet", f"{ENTITIES}<worksheet")),
        ("sheet 'Indents'", "declares a document type, as entity bombs do", "Save it anew"),
    ),
    "entity bomb in the texts": (
        lambda: with_part("xl/sharedStrings.xml", lambda xml: ENTITIES + xml),
        ("sheet 'Indents'", "declares a document type", "Save it anew"),
    ),
    "outside entity": (
        lambda: with_part(
            "xl/workbook.xml",
            lambda xml: '<!DOCTYPE w [<!ENTITY x SYSTEM "file:///etc/passwd">]>' + xml,
        ),
        ("b.xlsx", "declares a document type", "Save it anew"),
    ),
    "broken xml": (
        lambda: with_part(SHEET, lambda xml: xml[:-20]),
        ("sheet 'Indents'", "no well-formed XML", "copy it again"),
    ),
    "wrong sheet": (
        lambda: several("Indent", "Notes"),
        ("b.xlsx", "has no sheet 'Indents'", "The nearest sheet is 'Indent'"),
    ),
    "duplicate sheets": (
        lambda: several("Indents", "INDENTS"),
        ("b.xlsx", "has 2 sheets of the name 'indents'", "Rename one of them"),
    ),
    "hidden sheet": (
        lambda: several("Indents", "Notes", states={"Indents": "hidden"}),
        ("sheet 'Indents'", "is hidden", "Show the sheet"),
    ),
    "very hidden sheet": (
        lambda: several("Indents", "Notes", states={"Indents": "veryHidden"}),
        ("sheet 'Indents'", "is hidden", "Show the sheet"),
    ),
    "chart": (
        lambda: with_part(
            "xl/_rels/workbook.xml.rels", lambda xml: xml.replace("/worksheet\"", "/chartsheet\"")
        ),
        ("sheet 'Indents'", "holds no cells", "Name the sheet that holds the table"),
    ),
    "empty sheet": (lambda: xlsx(), ("b.xlsx!Indents", "has no row 3 for its header", "first_row")),
    "merged header": (
        lambda: with_merged("C3:D3"),
        ("b.xlsx!Indents, cells C3:D3", "header cells are merged", "Unmerge them"),
    ),
    "merged with the row above": (
        lambda: xlsx(
            row(1, "Tester:", "T1"), row(2, None, None, "Across"),
            row(3, "Coupon", "Load", None, "Down"), row(4, None, "N", "mm", "mm"), GOOD,
            after='<mergeCells><mergeCell ref="C2:C3"/></mergeCells>',
        ),
        ("b.xlsx!Indents, cells C2:C3", "header cells are merged", "Unmerge them"),
    ),
    "header twice": (
        lambda: xlsx(
            HEADER[0], row(3, "Coupon", "Load", "Across", "Down", "Across"), HEADER[2], GOOD
        ),
        ("b.xlsx!Indents, row 3", "column 'Across' stands 2 times, in C3, E3", "Rename the others"),
    ),
    "header misspelt": (
        lambda: xlsx(HEADER[0], row(3, "Coupon", "Load", "Acros", "Down"), HEADER[2], GOOD),
        ("b.xlsx!Indents, row 3", "there is no column 'Across'", "'Acros'"),
    ),
    "units that contradict": (
        lambda: xlsx(*HEADER[:2], row(4, None, "kN", "mm", "mm"), GOOD),
        ("b.xlsx!Indents, row 4, column Load", "the units line says 'kN' and the layout N", "kN"),
    ),
    "hidden column": (
        lambda: sheet_of(GOOD, before='<cols><col min="3" max="3" hidden="1"/></cols>'),
        ("b.xlsx!Indents, column C", "the column that fills d1_um is hidden", "Show it"),
    ),
    "column without width": (
        lambda: sheet_of(GOOD, before='<cols><col min="2" max="2" width="0"/></cols>'),
        ("b.xlsx!Indents, column B", "the column that fills force_n is hidden", "Show it"),
    ),
    "label missing": (
        lambda: xlsx(row(1, "Testers", "T1"), *HEADER[1:], GOOD),
        ("b.xlsx!Indents", "the label 'Tester:' does not stand over the table", "Testers"),
    ),
    "merged label": (
        lambda: xlsx(
            row(1, "Tester:", None, "T1"), *HEADER[1:], GOOD,
            after='<mergeCells><mergeCell ref="A1:B1"/></mergeCells>',
        ),
        ("b.xlsx!Indents, cell B1", "the label or its value is merged", "Mend the cell"),
    ),
    "value above without a value": (
        lambda: xlsx(row(1, "Tester:", cell("B1", None, formula="X1")), *HEADER[1:], GOOD),
        ("b.xlsx!Indents, cell B1", "the value is a formula without a value", "Mend the cell"),
    ),
    "header again": (
        lambda: sheet_of(GOOD, row(6, "Coupon", "Load", "Across", "Down")),
        ("b.xlsx!Indents, row 6", "the header stands again", "a sheet of its own"),
    ),
    "far cell": (
        lambda: sheet_of(GOOD, '<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'),
        ("sheet 'Indents'", "reach as far as XFD1048576", "Delete what stands far"),
    ),
    "cell in another row": (
        lambda: sheet_of(row(5, more=cell("A9", "1"))),
        ("sheet 'Indents'", "cell 'A9' stands in row 5", "copy it again"),
    ),
    "cell twice": (
        lambda: sheet_of(row(5, more=cell("A5", "1") + cell("A5", "2"))),
        ("sheet 'Indents'", "cell 'A5' follows cell A5", "copy it again"),
    ),
    "rows out of order": (
        lambda: sheet_of(row(7, "A-1"), row(6, "A-2")),
        ("sheet 'Indents'", "row 6 follows row 7", "copy it again"),
    ),
    "text that is not there": (
        lambda: sheet_of(row(5, more=cell("A5", "77", "s"))),
        ("sheet 'Indents'", "cell A5 refers to a text that is not there", "copy it again"),
    ),
    "text of 6 MB": (
        lambda: sheet_of(row(5, "A" * 6_000_000)),
        ("sheet 'Indents', cell A5", "a text of 6000000 characters", "Ask where"),
    ),
}  # fmt: skip


def refusal(folder: Path, data: bytes, name: str) -> Cause:
    with pytest.raises(BatchRefused) as caught:
        list(table_text(files_of(folder, data, name, "", {}), 0))
    assert len(caught.value.causes) == 1, caught.value
    return caught.value.causes[0]


@pytest.mark.parametrize("case", REFUSED)
def test_a_malformed_workbook_has_one_verdict(tmp_path: Path, case: str) -> None:
    make, (where, what, mend) = REFUSED[case]
    cause = refusal(tmp_path, make(), "b.xlsx")
    assert where in cause.where
    assert what in cause.what
    assert mend in cause.mend
    # It is said from the header on as well, before anything else is read.
    files = files_of(tmp_path, make(), "b.xlsx", "", {})
    if case != "header again":
        assert table_text(files, 0).header_causes() == [cause]


ODS_REFUSED: dict[str, tuple[Callable[[], bytes], Verdict]] = {
    "hidden sheet": (
        lambda: ods(
            *ODS_HEADER,
            styles='<style:style style:name="ta2"><style:table-properties table:display="false"/>'
            "</style:style>",
            style=' table:style-name="ta2"',
        ),
        ("sheet 'Indents'", "is hidden", "Show the sheet"),
    ),
    "duplicate sheets": (
        lambda: ods(*ODS_HEADER, more='<table:table table:name="Indents"/>'),
        ("b.ods", "has 2 sheets", "Rename one"),
    ),
    "flood of repeats": (
        lambda: ods(
            *ODS_HEADER, ods_row("A", 1.0, 0.1, 0.1, attributes=REPEATED)
        ),
        ("b.ods", "repeats filled cells as far as A1048004", "filled down or across"),
    ),
    "repeats beyond a sheet": (
        lambda: ods(ods_row(ods_cell(1.0, 'table:number-columns-repeated="99999999999"'))),
        ("b.ods", "number-columns-repeated says '99999999999'", "Save it anew"),
    ),
    "hidden column": (
        lambda: ods(
            '<table:table-column table:number-columns-repeated="2"/>'
            '<table:table-column table:visibility="collapse"/>',
            *ODS_HEADER, ods_row("A-1", 98.07, 0.1821, 0.1833),
        ),
        ("b.ods!Indents, column C", "the column that fills d1_um is hidden", "Show it"),
    ),
    "merged header": (
        lambda: ods(
            *ODS_HEADER[:2],
            ods_row("Coupon", "Load", ods_cell("Across", 'table:number-columns-spanned="2"')),
            ODS_HEADER[3], ods_row("A-1", 98.07, 0.1821, 0.1833),
        ),
        ("b.ods!Indents, cells C3:D3", "header cells are merged", "Unmerge them"),
    ),
    "locked": (
        lambda: zipped(
            {
                "mimetype": "application/vnd.oasis.opendocument.spreadsheet",
                "META-INF/manifest.xml": LOCKED,
                "content.xml": "\0\1\2",
            }
        ),
        ("b.ods", "is locked by a password", "without a password"),
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", ODS_REFUSED)
def test_a_malformed_ods_has_one_verdict(tmp_path: Path, case: str) -> None:
    make, (where, what, mend) = ODS_REFUSED[case]
    cause = refusal(tmp_path, make(), "b.ods")
    assert where in cause.where
    assert what in cause.what
    assert mend in cause.mend


def test_two_readers_must_see_the_same_numbers(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # As if the values came from another cell, or from another sheet, than the XML's.
    other = Grid()
    other.fill(5, 5)
    for column, value in ((2, 98.07), (3, 0.1821), (4, 0.1834)):
        other.number(5, column, value)
    monkeypatch.setattr(XlsxBook, "grid", lambda _self, _sheet: other)
    cause = refusal(tmp_path, BOOK, "b.xlsx")
    assert cause.where == "b.xlsx, sheet 'Indents', cell D5"
    assert "two readers see different values" in cause.what
    assert "tampered with" in cause.mend


def test_a_number_that_a_comment_splits_is_whole_or_refused(tmp_path: Path) -> None:
    data = sheet_of(row(5, "A-1", cell("B5", "9<!-- -->8"), 0.18, 0.18))
    files = files_of(tmp_path, data, "b.xlsx", "", {})
    try:
        (block,) = table_text(files, 0)
    except BatchRefused:
        return
    assert block.cells.column("force_n").to_pylist() == ["98"]


def test_a_changed_byte_is_refused_or_changes_nothing(tmp_path: Path) -> None:
    # Every part of a zip carries its checksum (CRC-32), so that no number changes in silence.
    random = np.random.default_rng(20261201)
    files = files_of(tmp_path, BOOK, "b.xlsx", "", {})
    (whole,) = table_text(files, 0)
    for _ in range(300):
        changed = bytearray(BOOK)
        changed[random.integers(len(BOOK))] = int(random.integers(256))
        (tmp_path / "b.xlsx").write_bytes(changed)
        try:
            found = list(table_text(files, 0))
        except BatchRefused:
            continue
        assert [block.cells for block in found] == [whole.cells]


def test_a_missing_workbook_is_named(tmp_path: Path) -> None:
    files = files_of(tmp_path, BOOK, "b.xlsx", "", {})
    (tmp_path / "b.xlsx").unlink()
    (cause,) = table_text(files, 0).header_causes()
    assert (cause.where, cause.what) == ("b.xlsx", "does not exist")
