"""`coldwork compare`: words, JSON, exit codes."""

import json
from collections.abc import Callable
from pathlib import Path

import pytest
from typer.testing import Result

Cw = Callable[..., Result]
Batch = Callable[..., Path]
VARIED = ("--vary", "hardening.coefficient=0.25,0.35")


def test_words_and_json_stand_on_stdout(cw: Cw, batch: Batch) -> None:
    folder = batch()
    words = cw("compare", folder, *VARIED)
    assert words.exit_code == 0
    assert words.stderr == ""
    assert "Which choice is right is not told" in words.stdout
    assert max(map(len, words.stdout.splitlines())) <= 100
    found = json.loads(cw("compare", folder, *VARIED, "--json").stdout, parse_constant=pytest.fail)
    assert found["command"] == "compare"
    assert [row["choice_no"] for row in found["rows"]] == [0, 1, 2, 0, 1, 2]


def test_what_is_wrong_is_told_with_its_code(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder = batch()
    assert cw("compare", folder).exit_code == 2
    refused = cw("compare", folder, "--vary", "strength.route=flow")
    assert refused.exit_code == 2
    assert "strength.route" in refused.stderr
    assert cw("compare", tmp_path / "none", *VARIED).exit_code == 4
    into = tmp_path / "choices"
    first = cw("compare", folder, *VARIED, "--into", into, "--no-plots")
    assert first.exit_code == 0
    assert f"written: {into}" in first.stderr
    assert cw("compare", folder, *VARIED, "--into", into, "--no-plots").exit_code == 5
