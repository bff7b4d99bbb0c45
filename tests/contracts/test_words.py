"""What `coldwork contract` shows: complete, narrow enough, and helpful when a name is wrong."""

import json

import pytest

from coldwork import contracts
from coldwork.errors import UsageError
from coldwork.jobs import contract as job

ALL = [*contracts.names(), *contracts.documents()]


@pytest.mark.parametrize("name", ALL)
def test_no_line_is_longer_than_a_hundred_columns(name: str) -> None:
    assert max(map(len, job.render(name).splitlines())) <= 100


@pytest.mark.parametrize("name", contracts.names())
def test_every_column_unit_and_check_is_shown(name: str) -> None:
    text = job.render(name)
    contract = contracts.load(name)
    for field in contract.fields:
        head = next(line for line in text.splitlines() if line.startswith(f"  {field.name}  ["))
        assert ("required" in head) == field.required
        if field.unit and field.unit != "1" and "{" not in field.unit:
            assert f", {field.unit};" in head
    for check in contract.checks:
        assert f"  {check}: " in text


def test_the_sheet_is_shown_down_to_the_keys_of_its_tables() -> None:
    text = job.render("batch_sheet")
    for key in (
        "batch.id  [text; required]",
        "indentation.HBW.strain_ratio",
        "character.mix[].angle_deg",
        "limits[].quantity",
        "{...}.factor",
    ):
        assert f"  {key}" in text
    assert "default { value = 3.06, u = 0.15 }" in " ".join(text.split())
    assert "default true" in text


@pytest.mark.parametrize("name", ["coupons", "coupons.csv"])
def test_a_base_name_shows_both_directions(name: str) -> None:
    text = job.render(name)
    assert "in/coupons: " in text
    assert "out/coupons: " in text
    assert set(job.as_json(name)["tables"]) == {"in/coupons", "out/coupons"}


def test_a_base_name_of_one_direction_shows_that_one() -> None:
    assert job.render("indents") == job.render("in/indents")
    assert job.render("batch.toml") == job.render("batch_sheet")


@pytest.mark.parametrize(
    ("wrong", "nearest"),
    [("cupons", "coupons"), ("in/indent", "in/indents"), ("manifests", "manifest")],
)
def test_an_unknown_name_is_refused_with_the_nearest(wrong: str, nearest: str) -> None:
    with pytest.raises(UsageError, match=f"the nearest is '{nearest}'"):
        job.render(wrong)
    with pytest.raises(UsageError, match=f"the nearest is '{nearest}'"):
        job.as_json(wrong)


def test_a_name_near_nothing_is_refused_with_all_that_there_are() -> None:
    with pytest.raises(UsageError, match=r"known are in/coupons, .*record"):
        job.render("zzz")


def test_the_overview_lists_everything() -> None:
    lines = job.overview().splitlines()
    for name in ALL:
        assert any(line.split()[:1] == [name] for line in lines), name
    assert max(map(len, lines)) <= 100


@pytest.mark.parametrize("name", [None, *ALL])
def test_data_is_json_without_surprises(name: str | None) -> None:
    data = job.as_json(name)
    assert json.loads(json.dumps(data, allow_nan=False))["tables"].keys() == data["tables"].keys()


def test_data_of_a_table_has_what_a_program_needs() -> None:
    table = job.as_json("in/indents")["tables"]["in/indents"]
    force = next(field for field in table["fields"] if field["name"] == "force_n")
    assert (force["unit"], force["required"], force["exclusive_minimum"]) == ("N", True, 0)
    assert table["checks"]["ball-for-brinell"].endswith(".")
