"""Every planted fault is found where it was planted, and nothing else is.

The list was written with the batches, by ``sample_data/generate.py``, from what was
planted; no line of it came out of the code under test.
"""

import csv
import os
import subprocess
import sys
from functools import cache
from pathlib import Path

import pandas as pd
import pytest

import coldwork
from coldwork import rules
from coldwork.jobs.run import run
from coldwork.rules.curve import CURVE_RULES

SHELF = Path(__file__).resolve().parents[2] / "sample_data" / "planted-faults"
BATCHES = sorted(path.parent.name for path in SHELF.glob("*/batch.toml"))

Spot = tuple[str, str, str]  # coupon, reading, rule; empty text where there is none


def listed(batch: str) -> list[dict[str, str]]:
    with (SHELF / "FAULTS.csv").open(encoding="utf-8", newline="") as stream:
        return [fault for fault in csv.DictReader(stream) if fault["batch"] == batch]


def spot(fault: dict[str, str]) -> Spot:
    name = fault["coupon_id"].removeprefix("'")
    return name, fault["reading_no"], fault["rule_or_reason"]


@cache
def frames(batch: str) -> dict[str, pd.DataFrame]:
    return dict(coldwork.process(SHELF / batch).frames)


def rows(frame: pd.DataFrame) -> list[dict[str, str]]:
    """Give a frame's rows as text, whole numbers without a point, absent cells empty."""
    columns = {
        str(name): ["" if pd.isna(cell) else str(cell).removesuffix(".0") for cell in frame[name]]
        for name in frame.columns
    }
    return [dict(zip(columns, cells, strict=True)) for cells in zip(*columns.values(), strict=True)]


def flags(batch: str) -> list[dict[str, str]]:
    return rows(frames(batch)["flags"])


def set_aside(batch: str) -> list[dict[str, str]]:
    return rows(frames(batch)["set_aside"])


def flag_spot(flag: dict[str, str]) -> Spot:
    return flag["coupon_id"], flag["reading_no"], flag["rule"]


def near(fault: dict[str, str], line: str) -> bool:
    """On a curve of hundreds of points a fault begins where it can be told from the metal."""
    planted, of_a_curve = int(fault["line"]), fault["rule_or_reason"] in CURVE_RULE_IDS
    return of_a_curve and abs(int(line) - planted) <= 30


RULE_IDS = {rule.id for rule in rules.RULES}
CURVE_RULE_IDS = {rule.id for rule in CURVE_RULES}
REASON_IDS = {reason.id for reason in rules.REASONS}


def test_there_are_a_few_batches() -> None:
    assert len(BATCHES) >= 3


@pytest.mark.parametrize("batch", BATCHES)
def test_each_planted_rule_fires_where_the_list_says(batch: str) -> None:
    found = {flag_spot(flag): (flag["file"], flag["line"]) for flag in flags(batch)}
    for fault in listed(batch):
        if fault["rule_or_reason"] not in RULE_IDS:
            continue
        assert spot(fault) in found
        file, line = found[spot(fault)]
        assert file in ("", fault["file"])
        assert line in ("", fault["line"]) or near(fault, line)
        assert fault["reading_no"] == "" or line  # a finding on a reading says where it is


@pytest.mark.parametrize("batch", BATCHES)
def test_each_planted_reading_is_set_aside_where_the_list_says(batch: str) -> None:
    found = {(row["file"], row["line"]): row for row in set_aside(batch)}
    planted = [fault for fault in listed(batch) if fault["rule_or_reason"] in REASON_IDS]
    for fault in planted:
        row = found[fault["file"], fault["line"]]
        name, number, reason = spot(fault)
        assert row["rule"] == reason
        assert not name or row["coupon_id"] == name
        assert not number or row["reading_no"] == number
    assert len(found) == len(planted)


@pytest.mark.parametrize("batch", BATCHES)
def test_no_error_and_no_warning_is_missing_on_the_list(batch: str) -> None:
    planted = {spot(fault) for fault in listed(batch)}
    grave = {flag_spot(flag) for flag in flags(batch) if flag["level"] != "information"}
    assert grave - planted == set()


def test_every_rule_and_every_reason_was_planted_and_fires() -> None:
    planted = {fault["rule_or_reason"] for batch in BATCHES for fault in listed(batch)}
    fired = {flag["rule"] for batch in BATCHES for flag in flags(batch)}
    fired |= {row["rule"] for batch in BATCHES for row in set_aside(batch)}
    assert planted == RULE_IDS | REASON_IDS
    assert fired == RULE_IDS | REASON_IDS


def test_a_second_fault_of_a_row_is_told_too() -> None:
    row = next(row for row in set_aside("set-aside") if row["raw"] == "n/a")
    assert row["column"] == "d1_um"
    assert "dwell_s" in row["also"]


def test_a_person_answers_for_what_was_taken_out() -> None:
    row = next(row for row in set_aside("set-aside") if row["rule"] == "excluded")
    assert row["excluded_by"] == "head of laboratory"
    assert "scratch" in row["reason"]


def test_odd_names_stay_as_they_were_written() -> None:
    found = frames("set-aside")["coupons"]["coupon_id"].tolist()
    assert found[:3] == ["=7/A ä<b>", "NA", "0012"]


def test_the_shelf_is_processed_and_asks_for_a_person(tmp_path: Path) -> None:
    command = [sys.executable, "-c", "import sys; from coldwork.cli import main; sys.exit(main())"]
    folders = [str(SHELF / batch) for batch in BATCHES]
    environment = os.environ | {"PYTHONPATH": os.pathsep.join(sys.path)}
    done = subprocess.run(
        [*command, "process", *folders, "--no-plots", "--into", str(tmp_path / "results")],
        capture_output=True,
        text=True,
        check=False,
        env=environment,
    )
    assert done.returncode == 3, done.stderr
    assert len(list((tmp_path / "results").glob("*/manifest.json"))) == len(BATCHES)


def test_pictures_bear_odd_names(tmp_path: Path) -> None:
    outcome = run(SHELF / "set-aside", tmp_path)
    drawn = list((outcome.path / "plots").glob("*.svg"))
    assert outcome.plots == f"{len(drawn)} drawn"
    assert len(drawn) >= 7
