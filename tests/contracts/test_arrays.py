"""Array checks: masks, messages, encodings; and pandera's reports kept short."""

import os
import subprocess
import sys
from dataclasses import replace
from math import inf, nan

import numpy as np
import pandas as pd
import pyarrow as pa
import pytest

from coldwork import contracts
from coldwork.contracts import Field, arrays, frames

FIELD = Field("share", "number", "Share", "A share.", unit="1", minimum=0.0, exclusive_maximum=1.0)


def test_violations_marks_what_is_outside_and_lets_absent_cells_pass() -> None:
    values = np.array([0.0, -1e-300, 0.999, 1.0, nan, inf, -inf, -0.0])
    marked = [False, True, False, True, False, True, True, False]
    assert arrays.violations(FIELD, values).tolist() == marked


def test_violations_takes_whole_numbers_too() -> None:
    field = replace(FIELD, type="integer", exclusive_maximum=None, maximum=10**9)
    counts = np.array([0, -1, 10**9, 10**9 + 1])
    assert arrays.violations(field, counts).tolist() == [False, True, False, True]


@pytest.mark.parametrize("shape", [(0,), (5,)])
def test_violations_keeps_the_shape(shape: tuple[int, ...]) -> None:
    assert arrays.violations(FIELD, np.zeros(shape)).shape == shape


def test_an_infinite_value_is_refused_even_without_a_range() -> None:
    free = Field("x_mm", "number", "x", "A place.", unit="mm")
    assert arrays.violations(free, np.array([1e308, inf, nan])).tolist() == [False, True, False]


def _exclusions() -> pa.Table:
    return pa.table(
        {
            "coupon_id": ["=7/A ä<b>", "NA", "0012"],
            "reading_no": [1, 1, 1],
            "excluded_by": ["operator-1"] * 3,
            "excluded_at": ["2026-03-01T10:00Z"] * 3,
            "reason": ["scratch under the indent"] * 3,
        }
    )


def test_a_message_tells_column_rule_count_and_first_row() -> None:
    table = _exclusions().set_column(1, "reading_no", pa.array([1, -4, -5]))
    (problem,) = arrays.check_table(contracts.load("in/exclusions"), table)
    words = "must be at least 0 and at most 1000000000"
    assert problem == f"column reading_no: {words}: 2 of 3 rows, first row 2: -4"


def test_dictionary_encoded_and_chunked_text_is_text() -> None:
    contract = contracts.load("in/exclusions")
    table = _exclusions()
    encoded = table.set_column(2, "excluded_by", table["excluded_by"].dictionary_encode())
    assert arrays.check_table(contract, encoded) == []
    assert frames.check(contract, frames.frame(contract, encoded)) == []
    second = table.set_column(1, "reading_no", pa.array([2, 2, 2]))
    assert arrays.check_table(contract, pa.concat_tables([table, second])) == []


def test_a_dictionary_of_numbers_is_not_text() -> None:
    table = _exclusions().set_column(2, "excluded_by", pa.array([1, 2, 1]).dictionary_encode())
    (problem,) = arrays.check_table(contracts.load("in/exclusions"), table)
    assert "excluded_by: must be string" in problem


def test_narrower_numbers_are_not_taken_for_the_declared_ones() -> None:
    table = _exclusions().set_column(1, "reading_no", pa.array([1, 1, 1], pa.int32()))
    (problem,) = arrays.check_table(contracts.load("in/exclusions"), table)
    assert problem == "column reading_no: must be int64, not int32"


def test_a_long_cell_is_cut_in_the_message() -> None:
    table = _exclusions().set_column(2, "excluded_by", pa.array(["x" * 10_000] * 3))
    (problem,) = arrays.check_table(contracts.load("in/exclusions"), table)
    assert len(problem) < 200


def test_a_frame_with_a_million_faults_gets_a_short_report() -> None:
    contract = contracts.load("in/flow_stress")
    n = 20_000
    frame = pd.DataFrame(
        {
            "coupon_id": pd.Series(["y" * 500] * n, dtype="str"),
            "reading_no": np.full(n, -1),
            "plastic_strain": np.full(n, -1.0),
            "flow_stress_mpa": np.full(n, inf),
        }
    )
    problems = frames.check(contract, frame)
    assert 4 <= len(problems) <= 50
    assert sum(map(len, problems)) < 5_000


def test_rows_are_counted_whatever_the_index_is() -> None:
    contract = contracts.load("in/exclusions")
    frame = frames.frame(contract, _exclusions()).assign(reading_no=[1, 1, -7])
    (problem,) = frames.check(contract, frame.set_index(pd.Index(["a", "b", "c"])))
    assert "1 of 3 rows, first row 3" in problem


def test_nothing_is_coerced() -> None:
    # pandera with coercion turns 1.5 into 1 in silence.
    contract = contracts.load("in/exclusions")
    frame = frames.frame(contract, _exclusions()).assign(reading_no=[1.5, 1.0, 1.0])
    assert any("int64" in problem for problem in frames.check(contract, frame))


def test_a_frame_has_the_types_that_its_contract_names() -> None:
    table = pa.table({"line": [1, 2], "reading_no": [3, None], "raw": ["1,5", None]})
    frame = frames.frame(contracts.load("out/set_aside"), table)
    kinds = frame.dtypes.astype(str)
    assert kinds.to_dict() == {"line": "int64", "reading_no": "Int64", "raw": "str"}
    assert frame["reading_no"][0] == 3  # an absent count does not turn the others into floats


def test_the_schema_carries_units_and_is_made_once() -> None:
    contract = contracts.load("out/coupons")
    schema = frames.schema(contract)
    assert schema is frames.schema(contract)
    metadata = schema.columns["hardness"].metadata
    assert metadata is not None
    assert metadata["unit"] == "kgf/mm2"


def test_pandera_is_imported_by_frames_alone() -> None:
    # Start-up: pandas takes 0.4 s, pandera 0.6 s (measured on the development machine).
    code = (
        "import sys; from coldwork import contracts; from coldwork.contracts import arrays; "
        "contracts.load('out/coupons'); "
        "sys.exit('pandas' in sys.modules or 'pandera' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", code], check=False, env=_environment())
    assert done.returncode == 0


def _environment() -> dict[str, str]:
    return os.environ | {"PYTHONPATH": os.pathsep.join(path for path in sys.path if path)}
