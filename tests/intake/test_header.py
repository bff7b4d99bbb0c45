"""Headers: every fault is named with its place, the nearest known name and a remedy."""

import pytest

from coldwork import contracts
from coldwork.errors import Cause
from coldwork.intake.header import header_causes


def causes(*columns: str, table: str = "indents") -> list[Cause]:
    return header_causes(list(columns), contracts.load(f"in/{table}"), "f.csv, line 1")


GOOD = ("coupon_id", "indent_no", "force_n", "d1_um", "d2_um")


@pytest.mark.parametrize(
    "columns",
    [
        GOOD,
        tuple(reversed(GOOD)),
        ("coupon_id", "indent_no", "force_n", "hardness"),
        ("coupon_id", "indent_no", "force_n", "scale", "d1_um"),  # Knoop has one diagonal
        contracts.load("in/indents").columns,
    ],
)
def test_takes_a_header_that_fits(columns: tuple[str, ...]) -> None:
    assert causes(*columns) == []


@pytest.mark.parametrize("table", ["coupons", "flow_stress", "exclusions"])
def test_takes_the_headers_of_the_other_tables(table: str) -> None:
    contract = contracts.load(f"in/{table}")
    assert causes(*contract.columns, table=table) == []
    assert causes(*contract.required_columns, table=table) == []


def test_names_the_nearest_column_for_an_unknown_one() -> None:
    (cause,) = causes(*GOOD, "temprature_c")
    assert "'temprature_c'" in cause.what
    assert "'temperature_c'" in cause.mend
    assert cause.where == "f.csv, line 1"


@pytest.mark.parametrize(("name", "near"), [("Tester", "tester"), (" tester", "tester")])
def test_takes_no_name_that_is_only_alike(name: str, near: str) -> None:
    (cause,) = causes(*GOOD, name)
    assert f"'{near}'" in cause.mend


def test_names_a_column_that_stands_twice() -> None:
    (cause,) = causes(*GOOD, "d2_um")
    assert "'d2_um'" in cause.what
    assert "2 times" in cause.what


def test_names_all_that_is_missing_at_once() -> None:
    (cause,) = causes("indent_no", "d1_um", "d2_um")
    assert "coupon_id" in cause.what
    assert "force_n" in cause.what


@pytest.mark.parametrize("sizes", [(), ("d1_um",), ("d2_um",), ("scale",), ("scale", "d2_um")])
def test_indents_need_diagonals_or_hardness(sizes: tuple[str, ...]) -> None:
    (cause,) = causes("coupon_id", "indent_no", "force_n", *sizes)
    assert "hardness" in cause.what


def test_names_a_column_without_a_name_by_its_place() -> None:
    (cause,) = causes(*GOOD, "", table="indents")
    assert "column 6" in cause.what


@pytest.mark.parametrize(("mark", "word"), [(";", "semicolons"), ("\t", "tabs")])
def test_knows_another_separator(mark: str, word: str) -> None:
    (cause,) = causes(mark.join(GOOD))
    assert word in cause.what


def test_gives_all_faults_together() -> None:
    assert len(causes("coupon_id", "coupon_id", "colour", "force_n", "hardness")) == 3
