"""A workbook through its layout: what is read, and what is set aside where and why.

The values stand in the XML that the tests write; what the cells must become follows from
the number grammar, from the layout and from the definition of the units (1 mm = 1000 um).
"""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from tests.intake.books import LAYOUT, cell, ods, ods_cell, ods_row, row, xlsx

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.inputs.layout import read_layout
from coldwork.intake.coupons import Coupons, read_coupons
from coldwork.intake.files import TableFiles
from coldwork.intake.sources import check_headers, table_text
from coldwork.intake.text import TextBlock

Blocks = Callable[..., list[TextBlock]]
HEADER = (
    row(1, "Tester:", "T1"),
    row(3, "Coupon", "Load", "Across", "Down", "Remark"),
    row(4, None, "N", "mm", "mm"),
)
TIMES = {"d1_um =": 'measured_at = "Remark"\nd1_um ='}
GOOD = row(5, "A-1", 98.07, 0.1821, 0.1833)
ODS_HEADER = (
    ods_row("Tester:", "T1"),
    ods_row(None),
    ods_row("Coupon", "Load", "Across", "Down", "Remark"),
    ods_row(None, "N", "mm", "mm"),
)


def files_of(folder: Path, data: bytes, name: str, more: str, edit: dict[str, str]) -> TableFiles:
    text = LAYOUT.format(more=more)
    for old, new in edit.items():
        assert old in text
        text = text.replace(old, new)
    (folder / "book.toml").write_text(text, encoding="utf-8")
    (folder / name).write_bytes(data)
    layout = read_layout("book.toml", folder)
    return TableFiles(contracts.load("in/indents"), folder, (folder / name,), (layout,))


@pytest.fixture
def blocks(tmp_path: Path) -> Blocks:
    """Read a workbook through the layout of these tests."""

    def read(
        data: bytes, *, name: str = "b.xlsx", more: str = "", edit: dict[str, str] | None = None
    ) -> list[TextBlock]:
        return list(table_text(files_of(tmp_path, data, name, more, edit or {}), 0))

    return read


def column(blocks: list[TextBlock], name: str) -> list[str]:
    return [str(each) for block in blocks for each in block.cells.column(name).to_pylist()]


def set_aside(blocks: list[TextBlock]) -> list[tuple[str, int, str, str]]:
    """Row by row: the reason, the row, our column and the cell as written."""
    found = []
    for block in blocks:
        for fault in block.faults:
            rows = fault.rows.nonzero()[0]
            raws = block.written(fault.column, rows)
            found += [
                (fault.reason.id, int(block.lines[r]), fault.column, raw)
                for r, raw in zip(rows, raws, strict=True)
            ]
    return sorted(found, key=lambda each: each[1])


def test_numbers_as_stored_text_as_text(blocks: Blocks) -> None:
    # 0.1821 as spreadsheet programs may store it, with the 17 digits of the same double.
    found = blocks(
        xlsx(
            *HEADER,
            row(5, "A-1", 98.07, more=cell("C5", "0.18210000000000001") + cell("D5", "1E-1")),
        )
    )
    assert column(found, "coupon_id") == ["A-1"]
    assert column(found, "force_n") == ["98.07"]
    assert column(found, "d1_um") == ["182.1"]
    assert column(found, "d2_um") == ["100"]
    assert column(found, "tester") == ["T1"]
    assert found[0].written("d1_um", found[0].lines.nonzero()[0]) == ["0.1821"]
    assert found[0].lines.tolist() == [5]
    assert not found[0].faults


def test_text_is_what_its_xml_means(blocks: Blocks) -> None:
    # Character references and entities (XML 1.0, 4.1 and 4.6), shared and in place.
    data = xlsx(
        *HEADER,
        row(5, "A&#45;1&#x2F;2 &amp; &lt;B&gt;", 98.07, 0.18, 0.18),
        row(6, cell("A6", "0", "s"), 98.07, 0.18, 0.18),
        strings=["A&#45;1&#x2F;2 &amp; &lt;B&gt;"],
    )
    assert column(blocks(data), "coupon_id") == ["A-1/2 & <B>"] * 2


def test_the_same_from_ods(blocks: Blocks) -> None:
    data = ods(*ODS_HEADER, ods_row("A-1", 98.07, 0.1821, 0.1833))
    found = blocks(data, name="b.ods")
    assert column(found, "d1_um") == ["182.1"]
    assert column(found, "d2_um") == ["183.3"]
    assert found[0].lines.tolist() == [5]


def test_signs_are_for_text_alone(blocks: Blocks) -> None:
    # The layout's decimal comma is for typed numbers; 1.234 as stored is a double.
    data = xlsx(*HEADER, row(5, "A-1", 98.07, "0,1821", 1.234))
    found = blocks(data, more='decimal = ","')
    assert column(found, "d1_um") == ["182.1"]
    assert column(found, "d2_um") == ["1234"]


def test_a_typed_number_of_two_readings_is_refused(blocks: Blocks) -> None:
    with pytest.raises(BatchRefused, match=r"b\.xlsx!Indents, row 5, column Across.*'1\.234' is"):
        blocks(xlsx(*HEADER, row(5, "A-1", 98.07, "1.234", 0.18)))


def test_times_are_iso_without_a_zone(blocks: Blocks) -> None:
    # 46231.25 days after 1899-12-30 is 2026-07-28 06:00 (ECMA-376-1, 18.17.4.1).
    data = xlsx(*HEADER, row(5, "A-1", 98.07, 0.18, 0.18, cell("E5", "46231.25", style=1)))
    assert column(blocks(data, edit=TIMES), "measured_at") == ["2026-07-28T06:00:00"]


def test_days_since_1904(blocks: Blocks) -> None:
    # The same day counts 1462 fewer (ECMA-376-1, 18.17.4.1).
    data = xlsx(
        *HEADER,
        row(5, "A-1", 98.07, 0.18, 0.18, cell("E5", "44769.25", style=1)),
        settings='<workbookPr date1904="1"/>',
    )
    assert column(blocks(data, edit=TIMES), "measured_at") == ["2026-07-28T06:00:00"]


def test_a_formula_with_its_value_counts(blocks: Blocks) -> None:
    data = xlsx(*HEADER, row(5, "A-1", 98.07, cell("C5", "0.1821", formula="C1*2"), 0.18))
    assert column(blocks(data), "d1_um") == ["182.1"]


OUTDATED = [
    '<calcPr fullCalcOnLoad="1"/>',
    '<calcPr calcCompleted="0"/>',
    '<calcPr calcMode="manual" calcOnSave="0"/>',
]


@pytest.mark.parametrize("settings", OUTDATED)
def test_a_formula_is_not_trusted_where_the_workbook_does_not(
    blocks: Blocks, settings: str
) -> None:
    # Programs that write formulas without working them out leave 0 and such a mark.
    data = xlsx(
        *HEADER, row(5, "A-1", 98.07, cell("C5", "0", formula="C1*2"), 0.18), settings=settings
    )
    assert set_aside(blocks(data)) == [("formula-without-value", 5, "d1_um", "=C1*2")]


ASIDE = {
    "formula": (
        row(5, "A-1", 98.07, cell("C5", None, formula="B5/2"), 0.18),
        ("formula-without-value", 5, "d1_um", "=B5/2"),
    ),
    "error": (
        row(5, "A-1", 98.07, 0.18, cell("D5", "#N/A", "e")),
        ("cell-error", 5, "d2_um", "#N/A"),
    ),
    "error of a formula": (
        row(5, "A-1", cell("B5", "#DIV/0!", "e", formula="1/0"), 0.18, 0.18),
        ("cell-error", 5, "force_n", "#DIV/0!"),
    ),
    "date for a number": (
        row(5, "A-1", 98.07, cell("C5", "46231", style=1), 0.18),
        ("date-in-cell", 5, "d1_um", "2026-07-28"),
    ),
    "duration for a number": (
        row(5, "A-1", 98.07, cell("C5", "0.5", style=6), 0.18),
        ("date-in-cell", 5, "d1_um", "12:00:00"),
    ),
    "date for a name": (
        row(5, cell("A5", "46025", style=1), 98.07, 0.18, 0.18),
        ("date-in-cell", 5, "coupon_id", "2026-01-03"),
    ),
    "zeros that only the format shows": (
        row(5, cell("A5", "12", style=3), 98.07, 0.18, 0.18),
        ("shown-otherwise", 5, "coupon_id", "12"),
    ),
    "percent": (
        row(5, "A-1", 98.07, cell("C5", "0.18", style=2), 0.18),
        ("shown-otherwise", 5, "d1_um", "0.18"),
    ),
    "thousands": (
        row(5, "A-1", cell("B5", "98070", style=4), 0.18, 0.18),
        ("shown-otherwise", 5, "force_n", "98070"),
    ),
    "hidden": (
        row(5, "A-1", 98.07, 0.18, 0.18, hidden="1"),
        ("hidden-row", 5, "coupon_id", "A-1"),
    ),
    "no height": (
        row(5, "A-1", 98.07, 0.18, 0.18, ht="0"),
        ("hidden-row", 5, "coupon_id", "A-1"),
    ),
    "infinite": (
        row(5, "A-1", cell("B5", "1e999"), 0.18, 0.18),
        ("not-a-number", 5, "force_n", "1e999"),
    ),
    "not a number": (
        row(5, "A-1", cell("B5", "nan"), 0.18, 0.18),
        ("not-a-number", 5, "force_n", "nan"),
    ),
    "too small for a double": (
        row(5, "A-1", cell("B5", "1E-400"), 0.18, 0.18),
        ("not-a-number", 5, "force_n", "1E-400"),
    ),
    "logical": (
        row(5, "A-1", cell("B5", "1", "b"), 0.18, 0.18),
        ("not-a-number", 5, "force_n", "TRUE"),
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", ASIDE)
def test_a_cell_that_must_not_be_guessed_sets_its_row_aside(blocks: Blocks, case: str) -> None:
    bad, verdict = ASIDE[case]
    found = blocks(xlsx(*HEADER, bad, row(6, "A-2", 98.07, 0.19, 0.19)))
    grammar = verdict[0] == "not-a-number" and not set_aside(found)
    if not grammar:  # the number grammar refuses the text itself, further on
        assert set_aside(found) == [verdict]
    else:
        assert verdict[3] in column(found, verdict[2])
    assert column(found, "d1_um")[1] == "190"


def test_a_merged_cell_sets_each_of_its_rows_aside(blocks: Blocks) -> None:
    data = xlsx(
        *HEADER,
        row(5, "A-1", 98.07, 0.18, 0.18),
        row(6, None, 98.07, 0.18, 0.18),
        row(7, "A-2", 98.07, 0.18, 0.18),
        after='<mergeCells><mergeCell ref="A5:A6"/></mergeCells>',
    )
    assert set_aside(blocks(data)) == [
        ("merged-cell", 5, "coupon_id", "A-1"),
        ("merged-cell", 6, "coupon_id", ""),
    ]


def test_formats_that_change_nothing_pass(blocks: Blocks) -> None:
    # Words in quotes and colours hold d, m and s, and are no dates.
    data = xlsx(
        *HEADER,
        row(5, "A-1", cell("B5", "98.07", style=7), cell("C5", "0.1821", style=5), 0.18),
    )
    found = blocks(data)
    assert not found[0].faults
    assert column(found, "d1_um") == ["182.1"]


def test_what_the_layout_passes_over_may_be_odd(blocks: Blocks) -> None:
    data = xlsx(
        *HEADER,
        row(5, "A-1", 98.07, 0.18, 0.18, cell("E5", "#REF!", "e"), cell("F5", None, formula="A1")),
        after='<mergeCells><mergeCell ref="E5:F5"/></mergeCells>',
        before='<cols><col min="5" max="6" hidden="1"/></cols>',
    )
    assert set_aside(blocks(data)) == []


def test_formulas_that_were_filled_down_make_no_row(blocks: Blocks) -> None:
    more = [
        row(n, None, None, None, None, cell(f"E{n}", "#DIV/0!", "e", formula="C/D")) for n in (6, 7)
    ]
    assert column(blocks(xlsx(*HEADER, GOOD, *more)), "coupon_id") == ["A-1"]


def test_blank_rows_keep_the_numbers_of_the_others(blocks: Blocks) -> None:
    data = xlsx(*HEADER, GOOD, row(9, "A-2", 98.07, 0.19, 0.19))
    assert [int(line) for block in blocks(data) for line in block.lines] == [5, 9]


def test_hidden_rows_and_errors_of_ods(blocks: Blocks) -> None:
    data = ods(
        *ODS_HEADER,
        ods_row("A-1", 98.07, 0.18, 0.18, attributes='table:visibility="collapse"'),
        ods_row("A-1", 98.07, ods_cell("#N/A", 'calcext:value-type="error"'), 0.18),
        ods_row("A-1", 98.07, ods_cell(None, 'table:formula="of:=[.B5]/2"'), 0.18),
        ods_row("A-1", 98.07, 0.18, '<table:table-cell office:value-type="date" '
                'office:date-value="2026-05-03"><text:p>3.5.</text:p></table:table-cell>'),
        ods_row(ods_cell("A-1", 'table:number-columns-spanned="2"'), None, 0.18, 0.18),
    )  # fmt: skip
    assert set_aside(blocks(data, name="b.ods")) == [
        ("hidden-row", 5, "coupon_id", "A-1"),
        ("cell-error", 6, "d1_um", "#N/A"),
        ("formula-without-value", 7, "d1_um", "=[.B5]/2"),
        ("date-in-cell", 8, "d2_um", "2026-05-03"),
        ("merged-cell", 9, "coupon_id", "A-1"),
        ("merged-cell", 9, "force_n", ""),
    ]


def test_comments_in_cells_of_ods_are_not_their_text(blocks: Blocks) -> None:
    note = "<office:annotation><text:p>see book</text:p></office:annotation>"
    odd = f'<table:table-cell office:value-type="string">{note}<text:p>A-1</text:p>'
    odd += "</table:table-cell>"
    found = blocks(ods(*ODS_HEADER, ods_row(odd, 98.07, 0.18, 0.18)), name="b.ods")
    assert column(found, "coupon_id") == ["A-1"]


def test_repeated_cells_of_ods_are_unrolled(blocks: Blocks) -> None:
    twice = ods_cell(0.18, 'table:number-columns-repeated="2"')
    rows = ods_row("A-1", 98.07, twice, attributes='table:number-rows-repeated="3"')
    found = blocks(ods(*ODS_HEADER, rows, ods_row("A-2", 98.07, 0.19, 0.19)), name="b.ods")
    assert column(found, "d2_um") == ["180", "180", "180", "190"]
    assert found[0].lines.tolist() == [5, 6, 7, 8]


def test_rows_that_close_the_table_are_kept_and_read(tmp_path: Path) -> None:
    data = xlsx(
        *HEADER, GOOD, row(6, "average", 98.07, cell("C6", "0.1821", formula="C5"), "0.1833")
    )
    files = files_of(tmp_path, data, "b.xlsx", 'ends_before = ["average"]', {})
    text = table_text(files, 0)
    found = list(text)
    assert column(found, "coupon_id") == ["A-1"]
    (closing,) = text.closing
    assert closing.line == 6
    assert closing.cells == {"force_n": "98.07", "d1_um": "182.1", "d2_um": "183.3"}
    assert text.unused_columns == ("Remark",)
    assert text.columns == ("Coupon", "Load", "Across", "Down", "Remark")
    assert text.size == len(data)


def test_headers_are_checked_before_anything_is_read(tmp_path: Path) -> None:
    files = files_of(tmp_path, xlsx(*HEADER, GOOD), "b.xlsx", "", {})
    assert check_headers(files) == []


COUPONS = """\
[layout]
id = "list"
fills = "coupons"
[workbook]
sheet = "Indents"
[columns]
coupon_id = "Coupon"
thickness_mm = "Thickness"
"""
LISTED = {
    "hidden": (row(3, "A-2", 2.5, hidden="1"), "", "row is hidden", "Show the row"),
    "zeros": (row(3, cell("A3", "12", style=3), 2.5), "", "shows another value", "as General"),
    "merged": (
        row(3, None, 2.5),
        '<mergeCells><mergeCell ref="A2:A3"/></mergeCells>',
        "merged with others",
        "unmerge the cells",
    ),
}


def listed(folder: Path, *rows: str, after: str = "") -> Coupons:
    (folder / "list.toml").write_text(COUPONS, encoding="utf-8")
    (folder / "c.xlsx").write_bytes(xlsx(row(1, "Coupon", "Thickness"), *rows, after=after))
    layout = read_layout("list.toml", folder)
    contract = contracts.load("in/coupons")
    files = TableFiles(contract, folder, (folder / "c.xlsx",), (layout,))
    return read_coupons(files, "UTC")


@pytest.mark.parametrize("case", LISTED)
def test_a_coupon_that_must_not_be_guessed_refuses_the_batch(tmp_path: Path, case: str) -> None:
    bad, after, what, mend = LISTED[case]
    with pytest.raises(BatchRefused) as caught:
        listed(tmp_path, row(2, "A-1", 2.5), bad, after=after)
    cause = caught.value.causes[-1]
    assert cause.where == "c.xlsx!Indents, line 3, column Coupon"
    assert what in cause.what
    assert mend in cause.mend


def test_an_error_in_an_optional_cell_of_a_coupon_counts_as_absent(tmp_path: Path) -> None:
    coupons = listed(tmp_path, row(2, "A-1", 2.5), row(3, "A-2", cell("B3", "#N/A", "e")))
    assert coupons.thickness[0] == 0.0025
    assert np.isnan(coupons.thickness[1])
    (bad,) = coupons.bad_cells
    assert (bad.column, bad.raw, bad.rule) == ("thickness_mm", "#N/A", "cell-error")
