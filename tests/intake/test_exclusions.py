"""exclusions.csv: every cell counts, and so does every row."""

from collections.abc import Callable

import numpy as np
import pytest

from coldwork.errors import BatchRefused
from coldwork.intake.coupons import Coupons, read_coupons
from coldwork.intake.exclusions import Exclusions, no_exclusions, read_exclusions
from coldwork.intake.files import TableFiles

Tables = Callable[..., TableFiles]
HEADER = "coupon_id,reading_no,excluded_by,excluded_at,reason"
REST = "operator-1,2026-03-31T10:00:00Z,scratch"


@pytest.fixture
def coupons(tables: Tables) -> Coupons:
    return read_coupons(tables("coupons", "coupon_id\nA\nB\n0012\n"), "UTC")


def read(tables: Tables, coupons: Coupons, *rows: str) -> Exclusions:
    return read_exclusions(tables("exclusions", "\n".join([HEADER, *rows])), coupons, "UTC")


def find(exclusions: Exclusions, coupon: list[int], number: list[int]) -> list[int]:
    found = exclusions.find(np.array(coupon, np.int32), np.array(number, np.int64))
    return [int(each) for each in found]


def test_finds_the_readings_that_are_taken_out(tables: Tables, coupons: Coupons) -> None:
    exclusions = read(
        tables, coupons, f"0012,7,{REST}", "A,1000000000,op,2026-04-01,slipped", f"A,0,{REST}"
    )
    assert find(exclusions, [0, 0, 2, 2, 1, -1, 0], [0, 10**9, 7, 0, 7, 0, -1]) == [
        0,
        1,
        2,
        -1,
        -1,
        -1,
        -1,
    ]
    assert exclusions.by[1].as_py() == "op"
    assert exclusions.at[1].as_py() == "2026-04-01"
    assert exclusions.because[1].as_py() == "slipped"
    assert exclusions.sources[0].rows_read == 3


def test_says_which_match_no_reading(tables: Tables, coupons: Coupons) -> None:
    exclusions = read(tables, coupons, f"B,3,{REST}", f"A,3,{REST}")
    (cause,) = exclusions.unmatched(np.array([True, False]))
    assert cause.where == "exclusions-1.csv, line 2"
    assert "'B'" in cause.what
    assert "3" in cause.what
    assert exclusions.unmatched(np.array([True, True])) == []


@pytest.mark.parametrize(
    ("row", "where"),
    [
        (f",1,{REST}", "column coupon_id"),
        (f"A,,{REST}", "column reading_no"),
        ("A,1,,2026-03-31,scratch", "column excluded_by"),
        ("A,1,op,,scratch", "column excluded_at"),
        ("A,1,op,2026-03-31,", "column reason"),
        (f"A,1.5,{REST}", "column reading_no"),
        (f"A,-1,{REST}", "column reading_no"),
        ("A,1,op,yesterday,scratch", "column excluded_at"),
        (f"C,1,{REST}", "line 3"),
        (f"12,1,{REST}", "line 3"),
        (f"B,1,{REST}", "line 3"),
        ("A,1,op,2026-03-31", "line 3"),
    ],
)
def test_a_faulty_row_refuses_the_batch(
    tables: Tables, coupons: Coupons, row: str, where: str
) -> None:
    with pytest.raises(BatchRefused) as refused:
        read(tables, coupons, f"B,1,{REST}", row)
    (cause,) = refused.value.causes
    assert cause.where.startswith("exclusions-1.csv, line 3")
    assert cause.where.endswith(where)


def test_all_faults_come_together(tables: Tables, coupons: Coupons) -> None:
    with pytest.raises(BatchRefused) as refused:
        read(tables, coupons, f"C,1,{REST}", f"A,x,{REST}", "A,1,op,never,")
    assert len(refused.value.causes) == 4


def test_no_exclusions_at_all(tables: Tables, coupons: Coupons) -> None:
    for exclusions in (no_exclusions(), read(tables, coupons)):
        assert len(exclusions) == 0
        assert find(exclusions, [0, 1], [1, 2]) == [-1, -1]
        assert exclusions.unmatched(np.empty(0, np.bool_)) == []
