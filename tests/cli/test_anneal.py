"""`coldwork anneal`: words, JSON, exit codes, nothing written where something is."""

import json
from collections.abc import Callable
from pathlib import Path

import pytest
from typer.testing import Result

Cw = Callable[..., Result]
Batch = Callable[..., Path]


@pytest.fixture
def results(cw: Cw, batch: Batch, tmp_path: Path) -> Path:
    assert cw("process", batch(), "--into", tmp_path / "out", "--no-plots").exit_code == 0
    return tmp_path / "out" / "tidy"


def test_words_and_json_stand_on_stdout(cw: Cw, results: Path) -> None:
    words = cw("anneal", results)
    assert words.exit_code == 0
    assert words.stderr == ""
    assert "None of them replaces a furnace trial" in words.stdout
    found = json.loads(cw("anneal", results, "--json").stdout, parse_constant=pytest.fail)
    assert found["command"] == "anneal"
    assert {row["coupon_id"] for row in found["rows"]} == {"A1", "A2"}
    assert found["inputs"]["boundary.energy_j_per_m2"]["origin"] == "library"


def test_a_folder_that_is_there_stays(cw: Cw, results: Path, tmp_path: Path) -> None:
    into = tmp_path / "furnace"
    first = cw("anneal", results, "--into", into, "--no-plots")
    assert first.exit_code == 0
    assert f"written: {into}" in first.stderr
    before = (into / "anneal.csv").read_bytes()
    again = cw("anneal", results, "--into", into, "--no-plots")
    assert again.exit_code == 5
    assert "something of that name is there" in again.stderr
    assert (into / "anneal.csv").read_bytes() == before
    assert sorted(p.name for p in into.parent.iterdir() if p.name.startswith(".")) == []


def test_what_is_wrong_is_told_with_its_code(cw: Cw, results: Path, tmp_path: Path) -> None:
    assert cw("anneal", tmp_path).exit_code == 2
    assert cw("anneal", results, "--furnace", tmp_path / "none.toml").exit_code == 2
    path = tmp_path / "furnace.toml"
    path.write_text("[particles]\nfraction = 0.1\nradius_nm = -5.0\n", encoding="utf-8")
    refused = cw("anneal", results, "--furnace", path)
    assert refused.exit_code == 4
    assert "line 3, key [particles] radius_nm" in refused.stderr
    assert refused.stdout == ""
