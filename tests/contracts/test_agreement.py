"""Two gates from one contract: array checks and pandera give the same verdict.

Each case is good or bad by the way it is made, so neither gate is the measure
of the other.
"""

from collections.abc import Iterator
from dataclasses import replace
from itertools import cycle, islice
from math import inf, nan
from typing import Any

import numpy as np
import pandas as pd
import pyarrow as pa
import pytest

from coldwork import contracts
from coldwork.contracts import Contract, Field, arrays, frames

ROWS = 3
PER_ROW: dict[str, list[Any]] = {  # what the general filling below cannot know
    "u_own": [0.3] * ROWS,
    "u_shared": [0.4] * ROWS,
    "coupons": [2] * ROWS,
    "coupons_averaged": [1, 2, 0],
    "conforming": [2, 1, 0],
    "non_conforming": [0, 1, 0],
    "undecided": [0, 0, 0],
    "lower_limit": [0.1, None, 0.1],
    "upper_limit": [0.9, 0.9, None],
    "excluded_by": ["operator-1", None, None],
    "excluded_at": ["2026-03-01T10:00:00+01:00", None, None],
    "empties": ["hardness;hardness_scale", None, None],
    "level": ["error", "warning", "information"],
    "reading_no": [1, 2, 3],
    "indent_no": [1, 2, 3],
    "rule": ["few-readings", "scatter", "outlier"],
    "flags": ["few-readings", None, "scatter;outlier"],
    "record_sha256": ["0" * 64, None, "f" * 64],
}
PER_TABLE: dict[str, dict[str, list[Any]]] = {
    "in/exclusions": {"excluded_by": ["operator-1"] * ROWS, "excluded_at": ["2026-03-01"] * ROWS},
    "out/set_aside": {"reason": ["scratch under the indent", None, None]},
    "out/compare_choices": {"choice_no": [1, 2, 3]},
    "out/plan": {"indents_per_coupon": [1, 2, 3]},
    "out/decisions": {
        "rule": ["simple", "guarded", "probability"],
        "to_settle": ["no number of readings", "7 more readings", None],
    },
}
SAMPLE = {"datetime": "2026-03-01T10:00:00Z", "string": "text", "boolean": True}


def good_table(contract: Contract) -> pa.Table:
    return pa.table(
        {
            field.name: pa.array(_good(contract, field), arrays.arrow_type(field))
            for field in contract.fields
        }
    )


def _good(contract: Contract, field: Field) -> list[Any]:
    known = PER_ROW | PER_TABLE.get(contract.name, {})
    for key in (field.name, field.name[: len("u_shared")], field.name[: len("u_own")]):
        if key in known:
            return known[key]
    if field.type == "string" and (field.name in contract.primary_key or field.unique):
        return list(islice(cycle(field.enum or ("=7/A ä<b>", "NA", "0012")), ROWS))
    if field.numeric:
        return [1 if field.type == "integer" else 0.5] * ROWS
    return [field.enum[0] if field.enum else SAMPLE[field.type]] * ROWS


def alone(name: str, column: str) -> Contract:
    """Make a contract of one column, so that nothing else can object."""
    contract = contracts.load(name)
    field = replace(contract.field(column), checks=())
    return replace(contract, fields=(field,), checks=(), primary_key=())


def verdicts(contract: Contract, table: pa.Table) -> tuple[list[str], list[str]]:
    return (
        arrays.check_table(contract, table),
        frames.check(contract, frames.frame(contract, table)),
    )


def column_of(contract: Contract, values: list[Any]) -> pa.Table:
    field = contract.fields[0]
    return pa.table({field.name: pa.array(values, arrays.arrow_type(field))})


def _bad_cells(field: Field) -> Iterator[tuple[str, Any]]:
    if field.required:
        yield from _absent(field)
    if field.numeric:
        yield from _bad_numbers(field)
    if field.enum:
        yield "not in the list", f"{field.enum[0]} "
    if field.max_length is not None:
        yield "too long", "x" * (field.max_length + 1)
    if field.pattern or field.type == "datetime":
        yield "line break", "x\ny"
        yield "line break at the end", "2026-03-01\n"
        yield "control character", "a\x07"
    if field.type == "datetime":
        yield "another calendar", "01.03.2026 10:00"


def _bad_numbers(field: Field) -> Iterator[tuple[str, Any]]:
    step = 1 if field.type == "integer" else 1e-6
    if field.type == "number":
        yield "inf", inf
        yield "minus inf", -inf
    if field.minimum is not None:
        yield "below the minimum", field.minimum - step
    if field.exclusive_minimum is not None:
        yield "at the open lower end", field.exclusive_minimum
    if field.maximum is not None:
        yield "above the maximum", field.maximum + step
    if field.exclusive_maximum is not None:
        yield "at the open upper end", field.exclusive_maximum


def _good_cells(field: Field) -> Iterator[Any]:
    if not field.required:
        yield from (value for _, value in _absent(field))
    if field.minimum is not None:
        yield field.minimum
    if field.maximum is not None:
        yield field.maximum
    for end, inside in ((field.exclusive_minimum, inf), (field.exclusive_maximum, -inf)):
        if end is not None:
            yield float(np.nextafter(end, inside))
    yield from field.enum
    if field.type == "datetime":
        yield from ("2026-03-01", "2026-03-01T10:00", "2026-03-01 10:00:00.25+01:00")


def _absent(field: Field) -> Iterator[tuple[str, Any]]:
    yield "empty", None
    if field.text:
        yield "empty text", ""
    if field.type == "number":
        yield "NaN", nan


def _columns() -> list[tuple[str, Field]]:
    """One column for each way of being constrained: the first that has it."""
    kinds: dict[Field, tuple[str, Field]] = {}
    for name in contracts.names():
        for field in contracts.load(name).fields:
            kind = replace(field, name="", title="", description="", unit="", source="", checks=())
            kinds.setdefault(kind, (name, field))
    return list(kinds.values())


BAD_CELLS = [
    pytest.param(name, field.name, value, id=f"{name}.{field.name}-{what}")
    for name, field in _columns()
    for what, value in _bad_cells(field)
]
GOOD_CELLS = [
    pytest.param(name, field.name, list(_good_cells(field)), id=f"{name}.{field.name}")
    for name, field in _columns()
]


@pytest.mark.parametrize("name", contracts.names())
def test_a_good_table_passes_both(name: str) -> None:
    contract = contracts.load(name)
    assert verdicts(contract, good_table(contract)) == ([], [])


@pytest.mark.parametrize(("name", "column", "value"), BAD_CELLS)
def test_a_bad_cell_fails_both(name: str, column: str, value: object) -> None:
    contract = alone(name, column)
    good = good_table(contracts.load(name)).column(column).to_pylist()[0]
    by_arrays, by_frames = verdicts(contract, column_of(contract, [good, value]))
    assert any(column in problem and "first row 2" in problem for problem in by_arrays)
    assert any(column in problem for problem in by_frames)


@pytest.mark.parametrize(("name", "column", "values"), GOOD_CELLS)
def test_cells_on_the_safe_side_pass_both(name: str, column: str, values: list[Any]) -> None:
    contract = alone(name, column)
    assert verdicts(contract, column_of(contract, values)) == ([], [])


@pytest.mark.parametrize("name", contracts.names())
@pytest.mark.parametrize("fault", ["missing", "extra", "twice", "type"])
def test_wrong_columns_fail_both(name: str, fault: str) -> None:
    contract = contracts.load(name)
    table = good_table(contract)
    first = contract.required_columns[0]
    if fault == "missing":
        table = table.drop_columns([first])
    elif fault == "extra":
        table = table.append_column("coupon", table.column(first))
    elif fault == "type":
        numbers = pa.array(np.arange(ROWS) + 0.5)
        words = pa.array([f"word {i}" for i in range(ROWS)])
        wrong = words if contract.field(first).type == "number" else numbers
        table = table.set_column(table.column_names.index(first), first, wrong)
    else:
        table = table.append_column(first, table.column(first))
    assert all(verdicts(contract, table))


@pytest.mark.parametrize("name", contracts.names())
def test_order_binds_what_goes_out_and_not_what_comes_in(name: str) -> None:
    contract = contracts.load(name)
    turned = good_table(contract).select(list(reversed(contract.columns)))
    by_arrays, by_frames = verdicts(contract, turned)
    assert bool(by_arrays) == bool(by_frames) == (contract.direction == "out")


@pytest.mark.parametrize("name", contracts.names())
def test_what_comes_in_may_leave_optional_columns_out(name: str) -> None:
    contract = contracts.load(name)
    keep = [*contract.required_columns]
    keep += ["hardness"] if name == "in/indents" else []
    keep += ["stress_mpa", "strain"] if name == "in/curves" else []
    few = good_table(contract).select([each for each in contract.columns if each in keep])
    assert verdicts(contract, few) == ([], [])


@pytest.mark.parametrize("name", contracts.names())
def test_an_empty_table_passes_only_where_nothing_is_an_answer(name: str) -> None:
    contract = contracts.load(name)
    filled = name in ("in/coupons", "in/pairs", "in/verification", "out/coupons", "out/lots")
    by_arrays, by_frames = verdicts(contract, good_table(contract).slice(0, 0))
    assert bool(by_arrays) == bool(by_frames) == filled


@pytest.mark.parametrize("name", contracts.names())
def test_an_empty_frame_of_no_types_fails(name: str) -> None:
    contract = contracts.load(name)
    bare = pd.DataFrame({column: [] for column in contract.columns}, dtype=object)
    assert frames.check(contract, bare)
    assert arrays.check_table(contract, pa.table({c: pa.nulls(0) for c in contract.columns}))


@pytest.mark.parametrize("name", [n for n in contracts.names() if contracts.load(n).primary_key])
def test_a_repeated_key_fails_both(name: str) -> None:
    contract = contracts.load(name)
    table = good_table(contract)
    by_arrays, by_frames = verdicts(contract, pa.concat_tables([table, table.slice(0, 1)]))
    assert any("unique" in problem for problem in by_arrays)
    assert by_frames


def test_half_a_key_may_repeat() -> None:
    contract = contracts.load("in/indents")
    table = good_table(contract)
    one = pa.array(["C1"] * ROWS)
    assert verdicts(contract, table.set_column(0, "coupon_id", one)) == ([], [])


BROKEN: list[tuple[str, str, dict[str, list[Any]]]] = [
    ("uncertainty-has-its-value", "in/coupons", {"grain_size_um": [None, 0.5, 0.5]}),
    ("hardness-or-diagonals", "in/indents", {"hardness": [None] * 3, "d2_um": [None, 9.0, 9.0]}),
    (
        "ball-for-brinell",
        "in/indents",
        {"scale": ["HV", "HBW", None], "ball_mm": [None] * 3},
    ),
    ("own-and-shared-add-up", "out/coupons", {"u_hardness": [0.5, 0.5, 0.6]}),
    ("own-and-shared-add-up", "out/lots", {"u_line_energy_j_per_m": [0.5, 0.0, 0.5]}),
    ("own-and-shared-add-up", "out/quantities", {"u": [0.7, 0.5, 0.5]}),
    ("interval-holds-value", "out/coupons", {"lower_hardness": [0.5, 0.6, 0.5]}),
    ("interval-holds-value", "out/lots", {"upper_hardness": [0.5, 0.4, 0.5]}),
    (
        "interval-holds-value",
        "out/quantities",
        {"value": [None] * 3, "lower": [0.5, 0.5, 0.6]},
    ),
    ("decisions-add-up", "out/lots", {"undecided": [0, 1, 0]}),
    ("decisions-add-up", "out/lots", {"coupons_averaged": [0, 3, 0]}),
    ("limits-in-order", "out/decisions", {"lower_limit": [0.9, None, 0.1]}),
    ("limits-in-order", "out/decisions", {"upper_limit": [0.9, None, None]}),
    ("exclusion-is-whole", "out/set_aside", {"excluded_by": ["operator-1", "operator-2", None]}),
    ("only-errors-empty", "out/flags", {"empties": [None, "hardness", None]}),
    ("route-has-its-columns", "out/readings", {"force_n": [None, 9.8, 9.8]}),
    (
        "route-has-its-columns",
        "out/readings",
        {"route": ["indent", "flow", "flow"], "plastic_strain": [None, 0.002, None]},
    ),
]


@pytest.mark.parametrize(("check", "name", "changes"), BROKEN)
def test_a_broken_cross_column_rule_fails_both_by_name(
    check: str, name: str, changes: dict[str, list[Any]]
) -> None:
    contract = contracts.load(name)
    for problems in verdicts(contract, _changed(contract, changes)):
        assert [problem.partition(":")[0] for problem in problems] == [f"check {check}"]


KEPT: list[tuple[str, dict[str, list[Any]]]] = [
    (
        "in/indents",
        {"scale": ["HK", None, "HV"], "hardness": [None, 1.0, None], "d2_um": [None, None, 1.0]},
    ),
    ("in/coupons", {"u_grain_size_um": [None] * 3, "grain_size_um": [None, 0.5, 0.5]}),
    ("out/coupons", {"u_own_hardness": [None] * 3, "u_hardness": [None] * 3}),
    # At or below the baseline: no value, lower end 0, an upper end that may be missing.
    (
        "out/coupons",
        {
            "dislocation_density_per_m2": [None] * 3,
            "lower_dislocation_density_per_m2": [0.0] * 3,
            "upper_dislocation_density_per_m2": [1e13, None, 0.0],
        },
    ),
    ("out/lots", {"conforming": [0] * 3, "non_conforming": [0] * 3}),
    ("out/readings", {"route": ["flow"] * 3, "scale": [None] * 3, "hardness": [None] * 3}),
]


@pytest.mark.parametrize(("name", "changes"), KEPT)
def test_a_kept_cross_column_rule_passes_both(name: str, changes: dict[str, list[Any]]) -> None:
    contract = contracts.load(name)
    assert verdicts(contract, _changed(contract, changes)) == ([], [])


def _changed(contract: Contract, changes: dict[str, list[Any]]) -> pa.Table:
    table = good_table(contract)
    for column, values in changes.items():
        array = pa.array(values, arrays.arrow_type(contract.field(column)))
        table = table.set_column(contract.columns.index(column), column, array)
    return table
