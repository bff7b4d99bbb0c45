"""Records: every number and every raw cell of a coupon, on one line that has a digest."""

import hashlib
import json
import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pyarrow as pa
import pytest

from coldwork.results.documents import violations
from coldwork.results.records import Common, Slice, Step, build, seal

TableOf = Callable[..., pa.Table]
NAMES = ["=7/A ä<b>", "NA", "0012"]


@pytest.fixture
def common() -> Common:
    return Common("B-1", "a" * 64, {"indentation.constraint_factor": {"value": 3.0, "u": 0.15}})


@pytest.fixture
def part(table_of: TableOf) -> Slice:
    """Three coupons: two with a reading, one with nothing."""
    readings = table_of(
        "readings",
        3,
        coupon_id=["0012", "=7/A ä<b>", "0012"],
        reading_no=[1, 1, 2],
        flow_stress_mpa=[230.0, 240.0, math.nan],
        line=[2, 3, 4],
    )
    raw = pa.table({"flow_stress_mpa": ["230", " 240.0", ""], "tester": ["T1", None, "=T2"]})
    steps = [
        Step(
            "mean",
            "mean of readings",
            "flow_stress_mpa",
            "MPa",
            np.array([240.0, np.nan, 230.0]),
            "The mean of the readings.",
            ("readings",),
        ),
        Step(
            "pressure",
            "relation 2",
            "pressure",
            "MPa",
            np.array([720.0, np.nan, 690.0]),
            "",
            ("flow_stress_mpa", "indentation.constraint_factor"),
        ),
    ]
    return Slice(
        coupons=table_of(
            "coupons",
            3,
            coupon_id=NAMES,
            lot_id=["L", "", None],
            decision=["undecided", None, "conforming"],
        ),
        files=["coupons.csv"] * 3,
        lines=[2, 3, 5],
        raw=pa.table({"coupon_id": ["'=7/A ä<b>", "NA", "0012"], "lot_id": ["L", "", ""]}),
        readings=readings,
        raw_readings=raw,
        set_aside=table_of(
            "set_aside", 2, coupon_id=["NA", "unlisted"], line=[7, 8], raw=["1,5", "x"]
        ),
        quantities=table_of(
            "quantities",
            2,
            coupon_id=["0012", "0012"],
            quantity=["flow_stress_mpa", "mean_spacing_nm"],
            value=[230.0, math.nan],
        ),
        flags=table_of("flags", 2, coupon_id=["NA", None], rule=["no-readings", "batch-rule"]),
        decisions=table_of("decisions", 1, coupon_id=["0012"], limit_id=["window"]),
        repeatability=[{"basis": "pooled", "u": np.float64(1.5), "freedom": math.inf}] * 3,
        steps=steps,
    )


def test_each_coupon_gets_what_is_its_own(common: Common, part: Slice) -> None:
    first, second, third = build(common, part)
    assert [r["coupon_id"] for r in (first, second, third)] == NAMES
    assert [r["line"] for r in third["readings"]] == [2, 4]
    assert [r["reading_no"] for r in first["readings"]] == [1]
    assert second["readings"] == []
    assert [r["line"] for r in second["set_aside"]] == [7]
    assert [f["rule"] for f in second["flags"]] == ["no-readings"]
    assert first["flags"] == third["flags"] == []
    assert [d["limit_id"] for d in third["decisions"]] == ["window"]
    assert set(third["quantities"]) == {"flow_stress_mpa", "mean_spacing_nm"}
    assert (first["decision"], second["decision"]) == ("undecided", None)
    assert first["method_sha256"] == common.method_sha256


def test_raw_cells_are_as_written(common: Common, part: Slice) -> None:
    first, _, third = build(common, part)
    assert first["coupon"] == {
        "file": "coupons.csv",
        "line": 2,
        "raw": {"coupon_id": "'=7/A ä<b>", "lot_id": "L"},
    }
    assert first["readings"][0]["raw"] == {"flow_stress_mpa": " 240.0"}  # its file has no tester
    assert [r["raw"]["tester"] for r in third["readings"]] == ["T1", "=T2"]


def test_what_does_not_exist_is_null(common: Common, part: Slice) -> None:
    first, second, third = build(common, part)
    assert (second["lot_id"], third["lot_id"], first["lot_id"]) == (None, None, "L")
    assert third["readings"][1]["flow_stress_mpa"] is None
    assert third["quantities"]["mean_spacing_nm"]["value"] is None
    assert second["steps"][0]["value"] is None
    assert first["repeatability"] == {"basis": "pooled", "u": 1.5, "freedom": None}


def test_a_step_names_what_went_in_with_its_numbers(common: Common, part: Slice) -> None:
    first, second, _ = build(common, part)
    assert first["steps"][0]["from"] == {"readings": None}
    assert first["steps"][1]["from"] == {
        "flow_stress_mpa": 240.0,
        "indentation.constraint_factor": 3.0,
    }
    assert second["steps"][1]["from"]["flow_stress_mpa"] is None


def test_a_step_leaves_out_what_a_coupon_does_not_have(common: Common, part: Slice) -> None:
    name = "indentation.constraint_factor"
    step = replace(part.steps[1], only={name: np.array([True, False, True])})
    told = [r["steps"][0]["from"] for r in build(common, replace(part, steps=[step]))]
    assert [name in inputs for inputs in told] == [True, False, True]


def test_a_sealed_record_is_one_line_that_keeps_its_schema(common: Common, part: Slice) -> None:
    for record in build(common, part):
        sealed = seal(record)
        assert b"\n" not in sealed.line
        assert sealed.sha256 == hashlib.sha256(sealed.line).hexdigest()
        assert json.loads(sealed.line) == record
        assert violations("record", record) == []
        assert seal(dict(reversed(record.items()))) == sealed


def test_a_slice_of_one_gives_the_same_record(common: Common, part: Slice) -> None:
    alone = replace(
        part,
        coupons=part.coupons.slice(2, 1),
        files=part.files[2:],
        lines=part.lines[2:],
        raw=part.raw.slice(2, 1),
        repeatability=part.repeatability[2:],
        steps=[replace(step, values=step.values[2:]) for step in part.steps],
    )
    assert build(common, alone) == build(common, part)[2:]


def test_a_record_that_breaks_its_schema_is_refused(common: Common, part: Slice) -> None:
    record: dict[str, Any] = build(common, part)[0] | {"decision": "perhaps"}
    with pytest.raises(RuntimeError, match="record breaks its schema: decision: 'perhaps'"):
        seal(record)
