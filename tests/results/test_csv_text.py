"""Lines of CSV: they read back with the standard library's reader, and none runs as a formula."""

import csv
import io
import math
from typing import Any

import pyarrow as pa
import pytest
from hypothesis import given
from hypothesis import strategies as st

from coldwork.results.csv_text import csv_header, csv_lines, guarded, unguarded

# RFC 4180 is the outside check: what is written is read back by Python's csv module,
# which follows it.


def lines_of(**columns: "pa.Array[Any]") -> str:
    return bytes(csv_lines(pa.table(columns))).decode()


def read_back(text: str) -> list[list[str]]:
    return list(csv.reader(io.StringIO(text, newline=""), strict=True))


def test_the_header_is_plain() -> None:
    assert csv_header(["a", "b_mpa", "c"]) == b"a,b_mpa,c\n"


def test_numbers_text_and_absent_values_stand_plainly() -> None:
    text = lines_of(
        name=pa.array(["A-1", "", None]),
        x=pa.array([0.1, None, -0.0]),
        n=pa.array([3, 0, None]),
        b=pa.array([True, None, False]),
    )
    assert text == "A-1,0.1,3,true\n,,0,\n,-0,,false\n"


def test_only_a_cell_that_needs_quotes_has_them() -> None:
    text = lines_of(a=pa.array(["x, y", 'say "no"', "plain"]), b=pa.array(["1", "2;3", "4"]))
    assert text == '"x, y",1\n"say ""no""",2;3\nplain,4\n'


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r", "'"])
def test_text_that_a_spreadsheet_would_run_stands_behind_an_apostrophe(start: str) -> None:
    # OWASP, "CSV Injection": cells that begin with = + - @ tab or return.
    texts = pa.array([f"{start}1+2", "plain", None, ""])
    assert guarded(texts).to_pylist() == [f"'{start}1+2", "plain", None, ""]
    assert unguarded(guarded(texts)).to_pylist() == texts.to_pylist()


def test_numbers_are_never_put_behind_an_apostrophe() -> None:
    assert lines_of(x=pa.array([-1.5, -2.0]), n=pa.array([-1, 1])) == "-1.5,-1\n-2,1\n"


def test_a_line_break_in_a_text_stays_on_its_line() -> None:
    text = lines_of(
        a=pa.array(["one\ntwo", "three\r\nfour", "\rfive"]), b=pa.array(["1", "2", "3"])
    )
    assert text.splitlines() == ["one␊two,1", "three␍␊four,2", "'␍five,3"]


def test_hard_names_go_through() -> None:
    names = ["=7/A ä<b>", "NA", "0012", "nan", "", " spaces ", "'", "''a"]
    column = pa.array(names)
    cells = [row[0] for row in read_back(lines_of(name=column, n=pa.array(range(len(names)))))]
    assert unguarded(pa.array(cells)).to_pylist() == names
    assert cells[0] == "'=7/A ä<b>"
    assert cells[1:4] == ["NA", "0012", "nan"]


def test_a_slice_of_a_longer_column_is_written_alone() -> None:
    column = pa.array(["=skip", "a,b", "c", "=skip"]).slice(1, 2)
    assert lines_of(a=column, x=pa.array([9.0, 1.0, 2.0]).slice(1)) == '"a,b",1\nc,2\n'


def test_no_rows_are_no_lines() -> None:
    assert lines_of(a=pa.array([], pa.string()), x=pa.array([], pa.float64())) == ""


printable = st.text(st.characters(codec="utf-8", exclude_characters="\n\r\0"), max_size=8)
any_text = st.text(st.characters(codec="utf-8", exclude_characters="\0"), max_size=8)


@given(st.lists(st.tuples(printable, any_text), min_size=1, max_size=20))
def test_any_text_reads_back(rows: list[tuple[str, str]]) -> None:
    first, second = zip(*rows, strict=True)
    text = lines_of(a=pa.array(first), b=pa.array(second), z=pa.array([1.0] * len(rows)))
    assert text.count("\n") == len(rows)
    assert "\r" not in text
    cells = read_back(text)
    assert unguarded(pa.array([row[0] for row in cells])).to_pylist() == list(first)
    symbols = [s.replace("\n", "␊").replace("\r", "␍") for s in second]
    back = unguarded(pa.array([row[1] for row in cells])).to_pylist()
    assert back == symbols


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1, max_size=50))
def test_any_number_reads_back_to_itself_in_its_shortest_form(numbers: list[float]) -> None:
    written = lines_of(x=pa.array(numbers)).split()
    assert [math.copysign(1, float(w)) * abs(float(w)) for w in written] == numbers
    digits = [_significant(w) for w in written]
    # Python's repr is the shortest form that reads back (David Gay's algorithm).
    assert digits == [_significant(repr(x)) for x in numbers]


def _significant(number: str) -> str:
    mantissa = number.lower().lstrip("-").partition("e")[0]
    return mantissa.replace(".", "").strip("0")
