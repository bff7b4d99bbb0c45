"""Blocks of text: cells, line numbers and torn rows, whatever the block's size."""

import csv
import io
from collections.abc import Callable
from hashlib import sha256
from pathlib import Path
from tempfile import TemporaryDirectory

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.intake.files import TableFiles
from coldwork.intake.rows import Torn
from coldwork.intake.sources import check_headers
from coldwork.intake.text import TableText

Tables = Callable[..., TableFiles]
Row = tuple[int, tuple[str, ...]]
HEADER = "coupon_id,lot_id,condition"


def read(files: TableFiles, block_bytes: int = 64) -> tuple[list[Row], list[Torn], TableText]:
    text = TableText(files, 0, block_bytes)
    rows: list[Row] = []
    torn: list[Torn] = []
    for block in text:
        columns = [block.cells.column(i).to_pylist() for i in range(block.cells.num_columns)]
        cells = zip(*columns, strict=True)
        rows += [(int(n), tuple(map(str, row))) for n, row in zip(block.lines, cells, strict=True)]
        torn += block.torn
        assert block.cells.schema.names == list(text.columns)
    return rows, torn, text


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("bom", ["", "\ufeff"])
@pytest.mark.parametrize("last", [True, False])
def test_reads_ordinary_files(tables: Tables, end: str, bom: str, last: bool) -> None:
    lines = [bom + HEADER, "0012,NA,nan", '"a,b",,"say ""x"""', " =1 , ,'x"]
    content = end.join(lines) + end * last
    rows, torn, text = read(tables("coupons", content))
    assert rows == [
        (2, ("0012", "NA", "nan")),
        (3, ("a,b", "", 'say "x"')),
        (4, (" =1 ", " ", "'x")),
    ]
    assert torn == []
    assert text.columns == ("coupon_id", "lot_id", "condition")
    assert text.sha256 == sha256(content.encode()).hexdigest()
    assert text.size == len(content.encode())


@pytest.mark.parametrize("block_bytes", [16, 64, 1024])
@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_line_numbers_stay_right_after_blank_and_torn_rows(
    tables: Tables, block_bytes: int, end: str
) -> None:
    lines = ["", "  ", HEADER, "a,1,x", "", "b,2", "c,3,x", "\t ", "", "d,4,x,y,", "e,5,x", "f",
             "", "g,7,x", ""]  # fmt: skip
    rows, torn, _ = read(tables("coupons", end.join(lines)), block_bytes)
    assert [(n, row[0]) for n, row in rows] == [(4, "a"), (7, "c"), (11, "e"), (14, "g")]
    assert torn == [Torn(6, "b,2", 2, 3), Torn(10, "d,4,x,y,", 5, 3), Torn(12, "f", 1, 3)]


def test_a_row_of_commas_is_a_row(tables: Tables) -> None:
    rows, torn, _ = read(tables("coupons", f"{HEADER}\n,,\n,\n"))
    assert rows == [(2, ("", "", ""))]
    assert torn == [Torn(3, ",", 2, 3)]


def test_a_torn_row_with_quotes_comes_back_as_written(tables: Tables) -> None:
    _, torn, _ = read(tables("coupons", f'{HEADER}\n5" x,"a,b"\n"q"r,1,2,3\n'))
    assert [row.text for row in torn] == ['5" x,"a,b"', '"q"r,1,2,3']
    assert [row.found for row in torn] == [2, 4]


def test_a_file_in_which_every_row_is_torn(tables: Tables) -> None:
    rows, torn, _ = read(tables("coupons", f"{HEADER}\na\nb,c\n"))
    assert rows == []
    assert [row.line for row in torn] == [2, 3]


def test_a_cell_longer_than_a_block(tables: Tables) -> None:
    long = "x" * 100_000
    rows, _, _ = read(tables("coupons", f'{HEADER}\na,{long},1\nb,"{long},",2\nc,d,3\n'), 64)
    assert rows == [(2, ("a", long, "1")), (3, ("b", long + ",", "2")), (4, ("c", "d", "3"))]


def test_one_column_alone(tables: Tables) -> None:
    rows, torn, _ = read(tables("coupons", 'coupon_id\na\n\n""\n"b,c"\n'))
    assert rows == [(2, ("a",)), (4, ("",)), (5, ("b,c",))]
    assert torn == []


CELLS = st.text(st.characters(exclude_characters="\r\n\0", exclude_categories=["Cs"]), max_size=8)
FORMS = st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL])


@settings(deadline=None, max_examples=80)
@given(
    st.lists(st.tuples(CELLS, CELLS, CELLS), max_size=12),
    st.lists(st.integers(0, 2), min_size=12, max_size=12),
    st.sampled_from(["\n", "\r\n", "\r"]),
    FORMS,
    st.booleans(),
    st.integers(16, 200),
)
def test_gives_back_what_csv_writes_whatever_the_block(
    rows: list[tuple[str, str, str]],
    blanks: list[int],
    end: str,
    form: int,
    last: bool,
    block_bytes: int,
) -> None:
    out = io.StringIO()
    out.write(HEADER + end)
    expected: list[Row] = []
    line = 2
    for row, blank in zip(rows, blanks, strict=False):
        out.write(end * blank)
        line += blank
        csv.writer(out, quoting=form, lineterminator=end).writerow(row)  # type: ignore[arg-type]
        expected.append((line, row))
        line += 1
    content = out.getvalue() if last else out.getvalue().removesuffix(end)
    with TemporaryDirectory() as folder:
        path = Path(folder) / "coupons.csv"
        path.write_bytes(content.encode())
        files = TableFiles(contracts.load("in/coupons"), Path(folder), (path,))
        for size in (block_bytes, 2 << 20):
            found, torn, _ = read(files, size)
            assert found == expected
            assert torn == []


@pytest.mark.parametrize("block_bytes", [64, 65, 100, 1000, 4096, 2 << 20])
def test_blocks_of_any_size_give_the_same_in_total(tables: Tables, block_bytes: int) -> None:
    lines = [f"c{i},l{i % 3},{'x' * (i % 50)}" + ",torn" * (i % 7 == 3) for i in range(500)]
    content = "\n".join([HEADER, *lines[:200], "", *lines[200:]])
    rows, torn, text = read(tables("coupons", content), block_bytes)
    assert [row[1][0] for row in rows] == [f"c{i}" for i in range(500) if i % 7 != 3]
    assert [row[0] for row in rows] == [i + 2 + (i >= 200) for i in range(500) if i % 7 != 3]
    assert [row.line for row in torn] == [i + 2 + (i >= 200) for i in range(500) if i % 7 == 3]
    assert text.sha256 == sha256(content.encode()).hexdigest()


def refusal(files: TableFiles) -> list[str]:
    with pytest.raises(BatchRefused) as refused:
        read(files)
    return [f"{cause.where}: {cause.what}" for cause in refused.value.causes]


@pytest.mark.parametrize("row", ['"a\nb",1,x', 'a,"1', 'a,"l,x\nb,1,"y"'])
def test_a_line_break_inside_a_quoted_cell_is_refused(tables: Tables, row: str) -> None:
    causes = refusal(tables("coupons", f"{HEADER}\nz,1,x\n\n{row}\nc,1,x\n"))
    assert causes == ["coupons-1.csv, line 4: a quoted cell is still open at the end of the line"]


def test_an_open_quote_in_the_header_is_refused(tables: Tables) -> None:
    causes = refusal(tables("coupons", 'coupon_id,"lot_id\na,b\n'))
    assert causes == ["coupons-1.csv, line 1: a quoted cell is still open at the end of the line"]


@pytest.mark.parametrize("content", [b"", b"\n\n", b"  \n\t\n", b"\xef\xbb\xbf"])
def test_an_empty_file_is_refused(tables: Tables, content: bytes) -> None:
    files = tables("coupons", content)
    assert refusal(files) == ["coupons-1.csv: is empty"]
    assert [cause.what for cause in check_headers(files)] == ["is empty"]


def test_all_that_is_wrong_with_a_file_is_said_at_once(tables: Tables) -> None:
    content = f"{HEADER},colour\n".encode() + b"a,b,c,d\n" * 50 + b"\0\n" + b"x\n" * 50 + b"\xff\n"
    files = tables("coupons", content)
    causes = refusal(files)
    assert len(causes) == 3
    assert any("colour" in cause for cause in causes)
    assert any("NUL" in cause and "(line 52)" in cause for cause in causes)
    assert any("UTF-8" in cause and "(line 103)" in cause for cause in causes)


def test_headers_are_checked_before_anything_is_read(tables: Tables) -> None:
    files = tables("coupons", HEADER, "lot_id\n", "coupon_id,lot\n", "")
    files = TableFiles(files.contract, files.folder, (*files.paths, files.folder / "no.csv"))
    wheres = [cause.where for cause in check_headers(files)]
    assert wheres == ["coupons-2.csv, line 1", "coupons-3.csv, line 1", "coupons-4.csv", "no.csv"]


def test_a_quoted_header_and_one_below_blank_lines(tables: Tables) -> None:
    rows, _, text = read(tables("coupons", '\n\n"coupon_id","lot_id"\n\na,b\n'))
    assert text.columns == ("coupon_id", "lot_id")
    assert rows == [(5, ("a", "b"))]


def test_a_file_in_a_folder_of_the_batch_is_named_by_its_path(tmp_path: Path) -> None:
    (tmp_path / "day 1").mkdir()
    files = TableFiles(contracts.load("in/coupons"), tmp_path, (tmp_path / "day 1" / "c.csv",))
    assert files.names == ("day 1/c.csv",)
