"""`coldwork inspect` on the command line: words out, exit codes."""

import json
import tomllib
from collections.abc import Callable
from pathlib import Path

from typer.testing import Result

Cw = Callable[..., Result]


def test_a_table_gives_a_layout(cw: Cw, tmp_path: Path) -> None:
    (tmp_path / "a.txt").write_text("no;d1;d2\n1;0,18;0,19\n2;0,18;0,19\n", encoding="utf-8")
    result = cw("inspect", str(tmp_path / "a.txt"))
    assert result.exit_code == 0
    assert tomllib.loads(result.stdout)["text"]["decimal"] == ","
    document = json.loads(cw("inspect", str(tmp_path / "a.txt"), "--json").stdout)
    assert tomllib.loads(document["layout"])["text"]["delimiter"] == ";"
    assert document["columns"][1] == {
        "name": "d1", "unit": "", "samples": ["0,18"], "numbers": True
    }  # fmt: skip


def test_no_table_asks_for_a_person(cw: Cw, tmp_path: Path) -> None:
    (tmp_path / "a.txt").write_text("a letter to nobody\n", encoding="utf-8")
    result = cw("inspect", str(tmp_path / "a.txt"))
    assert result.exit_code == 3
    assert "No table was found" in result.stdout


def test_a_missing_file_is_the_callers_mistake(cw: Cw, tmp_path: Path) -> None:
    result = cw("inspect", str(tmp_path / "b.txt"))
    assert result.exit_code == 2
    assert "does not exist" in result.stderr
