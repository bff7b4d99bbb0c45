"""Findings: what goes in comes out, in order, and fast for many coupons."""

import numpy as np
import pyarrow as pa
import pytest

from coldwork import contracts
from coldwork.rules import RULES
from coldwork.rules.batch import SKEWED_INPUT
from coldwork.rules.coupon import (
    FEW_READINGS,
    NO_READINGS,
    THIN_COUPON,
)
from coldwork.rules.findings import Findings
from coldwork.rules.reading import DWELL_TIME, UNEQUAL_DIAGONALS

IDS = pa.array(["A", "B", "C"])
LOTS = pa.array(["lot 1", "", "lot 2"])


def example() -> Findings:
    findings = Findings(3)
    findings.add(
        UNEQUAL_DIAGONALS,
        np.array([2, 0, 0]),
        reading_no=np.array([7, 9, 4]),
        value=np.array([0.07, 0.06, 0.08]),
        file=pa.array(["b.csv", "a.csv", "a.csv"]),
        line=np.array([12, 10, 5]),
    )
    findings.add(FEW_READINGS, np.array([2]), value=2.0)
    findings.add(NO_READINGS, np.array([1], dtype=np.int32), value=0, detail="all set aside")
    findings.add_batch(SKEWED_INPUT, "material.shear_modulus_gpa", value=0.2)
    return findings


def test_rows_stand_by_coupon_then_rule_then_reading() -> None:
    table = example().table(IDS, LOTS)
    rows = [(r["coupon_id"], r["rule"], r["reading_no"]) for r in table.to_pylist()]
    assert rows == [
        (None, "skewed-input", None),
        ("A", "unequal-diagonals", 4),
        ("A", "unequal-diagonals", 9),
        ("B", "no-readings", None),
        ("C", "unequal-diagonals", 7),
        ("C", "few-readings", None),
    ]


def test_a_row_says_everything() -> None:
    rows = example().table(IDS, LOTS).to_pylist()
    assert rows[1] == {
        "level": "warning",
        "coupon_id": "A",
        "lot_id": "lot 1",
        "reading_no": 4,
        "rule": "unequal-diagonals",
        "statement": UNEQUAL_DIAGONALS.statement,
        "value": 0.08,
        "limit": 0.05,
        "unit": "1",
        "empties": None,
        "source": UNEQUAL_DIAGONALS.source,
        "file": "a.csv",
        "line": 5,
        "detail": None,
    }
    assert rows[3]["empties"] == ";".join(NO_READINGS.empties)
    assert rows[3]["detail"] == "all set aside"
    assert rows[0]["lot_id"] is None
    assert rows[0]["detail"] == "material.shear_modulus_gpa"


def test_columns_are_those_of_the_contract() -> None:
    table = example().table(IDS, LOTS)
    assert tuple(table.column_names) == tuple(contracts.load("out/flags").columns)


def test_the_limit_of_a_range_is_the_end_that_was_passed() -> None:
    findings = Findings(2)
    findings.add(DWELL_TIME, np.array([0, 1]), value=np.array([8.0, 20.0]))
    assert findings.table(IDS[:2], LOTS[:2])["limit"].to_pylist() == [10.0, 15.0]


def test_a_limit_of_the_coupons_own_replaces_that_of_the_rule() -> None:
    findings = Findings(3)
    findings.add(THIN_COUPON, np.array([0, 1]), value=1.0, limit=np.array([1.5, np.nan]))
    findings.add(THIN_COUPON, np.array([2]), value=np.nan, limit=3.0)
    table = findings.table(IDS, LOTS)
    assert table["limit"].to_pylist() == [1.5, None, 3.0]
    assert table["value"].to_pylist() == [1.0, 1.0, None]


def test_which_rules_fired_on_which_coupons() -> None:
    findings = example()
    assert findings.has(UNEQUAL_DIAGONALS).tolist() == [True, False, True]
    assert findings.has(SKEWED_INPUT).tolist() == [False] * 3
    assert findings.text().to_pylist() == [
        "unequal-diagonals",
        "no-readings",
        "unequal-diagonals;few-readings",
    ]
    rows = [int.from_bytes(row.tobytes(), "little") for row in findings.bits]
    assert [[rule.id for i, rule in enumerate(RULES) if row >> i & 1] for row in rows] == [
        ["unequal-diagonals"],
        ["no-readings"],
        ["unequal-diagonals", "few-readings"],
    ]
    assert findings.counts == {
        "no-readings": 1,
        "unequal-diagonals": 3,
        "few-readings": 1,
        "skewed-input": 1,
    }


def test_no_findings_are_a_table_without_rows() -> None:
    findings = Findings(3)
    findings.add(FEW_READINGS, np.array([], dtype=np.int64))
    table = findings.table(IDS, LOTS)
    assert table.num_rows == 0
    assert tuple(table.column_names) == tuple(contracts.load("out/flags").columns)
    assert findings.text().to_pylist() == ["", "", ""]
    assert Findings(0).table(IDS[:0], LOTS[:0]).num_rows == 0


def test_a_restart_forgets() -> None:
    findings = example()
    findings.restart()
    assert not findings.bits.any()
    assert findings.table(IDS, LOTS).num_rows == 0
    assert findings.counts == {}


@pytest.mark.parametrize("rows", [1, 2, 4, 100])
def test_slices_are_the_table_in_pieces(rows: int) -> None:
    findings = example()
    pieces = list(findings.slices(IDS, LOTS, rows))
    assert pa.concat_tables(pieces).equals(findings.table(IDS, LOTS))
    assert max(piece.num_rows for piece in pieces) <= rows


def test_the_order_of_adding_does_not_matter() -> None:
    again = Findings(3)
    again.add_batch(SKEWED_INPUT, "material.shear_modulus_gpa", value=0.2)
    again.add(NO_READINGS, np.array([1]), value=0, detail="all set aside")
    again.add(
        UNEQUAL_DIAGONALS,
        np.array([0, 0, 2]),
        reading_no=np.array([4, 9, 7]),
        value=np.array([0.08, 0.06, 0.07]),
        file=pa.array(["a.csv", "a.csv", "b.csv"]),
        line=np.array([5, 10, 12]),
    )
    again.add(FEW_READINGS, np.array([2]), value=2.0)
    assert again.table(IDS, LOTS).equals(example().table(IDS, LOTS))


def test_findings_on_a_hundred_thousand_coupons() -> None:
    n = 100_000
    findings = Findings(n)
    every = np.arange(n)
    for step, rule in enumerate(RULES, 1):
        findings.add(rule, every[::step], value=every[::step])
    names = pa.array([f"c{i}" for i in range(n)])
    table = findings.table(names, names)
    assert table.num_rows == sum(len(every[::step]) for step in range(1, len(RULES) + 1))
    texts = findings.text().to_pylist()
    assert texts[0] == ";".join(rule.id for rule in RULES)
    assert texts[1] == RULES[0].id
    assert texts[6] == ";".join(RULES[k - 1].id for k in (1, 2, 3, 6))  # the divisors of 6
