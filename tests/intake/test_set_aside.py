"""What was set aside: counts, order and the published table."""

import numpy as np
import pyarrow as pa
import pytest

from coldwork import contracts
from coldwork.contracts.arrays import check_table
from coldwork.intake.set_aside import SetAside
from coldwork.rules import reasons

CONTRACT = contracts.load("out/set_aside")


@pytest.fixture
def filled() -> SetAside:
    aside = SetAside(4)
    aside.add(
        reasons.REPEATED_READING,
        table="indents",
        file="b.csv",
        lines=np.array([9, 3]),
        column="indent_no",
        raw=pa.array(["1", "2"]),
        coupon=np.array([3, 0], dtype=np.int32),
        coupon_ids=["D", "A"],
        reading_no=np.array([1, 2]),
    )
    aside.add(reasons.ROW_WIDTH, table="indents", file="a.csv", lines=[20], column="", raw="x,y")
    aside.add(
        reasons.EXCLUDED,
        table="indents",
        file="a.csv",
        lines=7,
        column="indent_no",
        raw="5",
        coupon=3,
        coupon_ids="D",
        reading_no=5,
        also=["d1_um: not-a-number ('x')"],
        excluded_by="operator-1",
        excluded_at="2026-03-31",
        excluded_because="sat on a scratch",
    )
    return aside


def test_counts_by_coupon_and_by_file(filled: SetAside) -> None:
    assert filled.per_coupon.tolist() == [1, 0, 0, 2]
    assert filled.count == 4
    assert filled.count_in("indents", "a.csv") == 2
    assert filled.count_in("indents", "c.csv") == 0


def test_the_table_keeps_its_contract_and_its_order(filled: SetAside) -> None:
    table = filled.table()
    assert check_table(CONTRACT, table) == []
    rows = table.to_pylist()
    assert [(row["file"], row["line"]) for row in rows] == [
        ("a.csv", 7),
        ("a.csv", 20),
        ("b.csv", 3),
        ("b.csv", 9),
    ]
    excluded, torn, second, first = rows
    assert excluded["excluded_by"] == "operator-1"
    assert excluded["reason"] == "sat on a scratch"
    assert excluded["also"] == "d1_um: not-a-number ('x')"
    assert torn["coupon_id"] is None
    assert torn["reading_no"] is None
    assert torn["raw"] == "x,y"
    assert (second["coupon_id"], second["reading_no"]) == ("A", 2)
    assert first["rule"] == "repeated-reading"
    assert first["hint"] == reasons.REPEATED_READING.hint


def test_begins_again(filled: SetAside) -> None:
    filled.restart()
    assert filled.count == 0
    assert not filled.per_coupon.any()
    assert filled.table().num_rows == 0
    assert filled.table().column_names == list(CONTRACT.columns)
    assert check_table(CONTRACT, filled.table()) == []


def test_adding_nothing_adds_nothing() -> None:
    aside = SetAside(0)
    aside.add(reasons.EXCLUDED, table="indents", file="a.csv", lines=[], column=[], raw=[])
    assert aside.count == 0


def test_a_reading_of_no_listed_coupon_belongs_to_none() -> None:
    aside = SetAside(2)
    aside.add(
        reasons.UNLISTED_COUPON, table="flow_stress", file="f.csv", lines=[2, 3],
        column="coupon_id", raw=["X", "A"], coupon=[-1, 0], coupon_ids=["X", "A"],
        reading_no=[1, -1], hint=["look", None],
    )  # fmt: skip
    assert aside.per_coupon.tolist() == [1, 0]
    rows = aside.table().to_pylist()
    assert [row["hint"] for row in rows] == ["look", reasons.UNLISTED_COUPON.hint]
    assert [row["reading_no"] for row in rows] == [1, None]
