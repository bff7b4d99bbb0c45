"""Quoted cells, held against RFC 4180 and the standard library's csv."""

import csv
import io

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.intake.quotes import split_cells, with_clean_quotes


def by_csv(line: str) -> list[str]:
    return next(csv.reader(io.StringIO(line), strict=True), [""])


CELL = st.text(st.characters(exclude_characters="\r\n\0", exclude_categories=["Cs"]), max_size=6)


@settings(deadline=None, max_examples=300)
@given(st.lists(CELL, min_size=1, max_size=5))
def test_splits_what_csv_writes(cells: list[str]) -> None:
    out = io.StringIO()
    csv.writer(out, quoting=csv.QUOTE_ALL, lineterminator="").writerow(cells)
    assert split_cells(out.getvalue()) == cells
    data = (out.getvalue() + "\n").encode()
    assert with_clean_quotes(data) == (data, None)


@pytest.mark.parametrize(
    ("line", "cells"),
    [
        ("", [""]),
        (",", ["", ""]),
        ('"a","b,c"', ["a", "b,c"]),
        ('"say ""x"""', ['say "x"']),
        ('"",""', ["", ""]),
        ('5" plate,x', ['5" plate', "x"]),
        ('"12"34,x', ['"12"34', "x"]),  # as written, so that it is no number
        ('a "b" c,d', ['a "b" c', "d"]),
        (' "a,b"', [' "a', 'b"']),
    ],
)
def test_keeps_cells_that_are_quoted_in_part_as_written(line: str, cells: list[str]) -> None:
    assert split_cells(line) == cells
    data, broken = with_clean_quotes(f"x,y\n{line}\nz\n".encode())
    assert broken is None
    lines = data.decode().split("\n")
    assert lines[0] == "x,y"
    assert lines[2:] == ["z", ""]
    assert by_csv(lines[1]) == cells


@pytest.mark.parametrize("line", ['"a', 'x,"a,b', '"a""', 'a,"b"",c', '"a","b', '5" x,"open', '"'])
def test_finds_the_line_with_a_cell_left_open(line: str) -> None:
    assert split_cells(line) is None
    assert with_clean_quotes(f'a,"b"\nc,d"\n{line}\n"e"\n'.encode())[1] == 2
    assert with_clean_quotes(line.encode())[1] == 0


def test_leaves_text_without_quotes_alone() -> None:
    data = b"a,b\n1,2\n"
    assert with_clean_quotes(data) == (data, None)
