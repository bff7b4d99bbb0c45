"""Every command: help, a place in the README, data on stdout alone, JSON where asked."""

import json
import re
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from typing import Final

import pytest
from typer.main import get_command
from typer.testing import Result

from coldwork.cli import app

Cw = Callable[..., Result]
Batch = Callable[..., Path]

ROOT: Final = Path(__file__).parents[2]
COMMANDS: Final = sorted(getattr(get_command(app), "commands"))  # noqa: B009 - a group's own
PROMISED: Final = {"new", "process", "check", "estimate", "trace", "materials", "contract"}
COLOUR: Final = re.compile(r"\x1b\[[0-9;]*[349][0-7]")


def test_the_commands_of_the_design_are_there() -> None:
    assert set(COMMANDS) >= PROMISED  # DESIGN section 6


@pytest.mark.parametrize("command", [[], *([name] for name in COMMANDS)], ids=str)
def test_every_command_has_help(cw: Cw, command: list[str]) -> None:
    result = cw(*command, "--help")
    assert result.exit_code == 0
    assert len(result.stdout.split()) > 20
    assert result.stderr == ""


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_says_in_one_line_what_it_does(cw: Cw, command: str) -> None:
    listed = [line for line in cw("--help").stdout.splitlines() if f" {command} " in line]
    assert any(len(line.split()) > 5 for line in listed)


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_is_in_the_readme(command: str) -> None:
    assert f"coldwork {command}" in (ROOT / "README.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("command", COMMANDS)
def test_every_option_has_help(command: str) -> None:
    group = get_command(app)
    parameters = getattr(group, "commands")[command].params  # noqa: B009
    for parameter in parameters:
        if parameter.name != "help":
            assert getattr(parameter, "help", None), f"{command}: {parameter.name}"


def test_exit_codes_stand_in_the_help(cw: Cw) -> None:
    said = " ".join(cw("--help").stdout.split())
    for code in ("0", "1", "2", "3", "4", "5", "130"):
        assert re.search(rf"\b{code} \w", said), code


def parsed(result: Result) -> object:
    assert result.stdout.endswith("\n")
    return json.loads(result.stdout, parse_constant=pytest.fail)  # no NaN, no Infinity


@pytest.fixture
def results(cw: Cw, batch: Batch, tmp_path: Path) -> Path:
    assert cw("process", batch(), "--into", tmp_path / "out", "--no-plots").exit_code == 0
    return tmp_path / "out" / "tidy"


@pytest.mark.parametrize(
    "words",
    [
        ["materials"],
        ["materials", "copper"],
        ["contract"],
        ["contract", "out/coupons"],
        ["estimate", "copper", "--density", "1e14", "--volume", "1000"],
        ["estimate", "copper", "--stress", "30", "--baseline", "50"],
        ["estimate", "copper", "--hardness", "90", "--u", "1", "--baseline", "50"],
    ],
    ids=" ".join,
)
def test_json_is_json_and_stands_alone(cw: Cw, words: list[str]) -> None:
    result = cw(*words, "--json")
    assert result.exit_code == 0
    assert parsed(result)
    assert result.stderr == ""
    plain = cw(*words)
    assert plain.exit_code == 0
    assert plain.stderr == ""
    assert len(plain.stdout) > 50


def test_json_of_a_batch(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder = batch(bad_cell=True)
    checked = cw("check", folder, "--json")
    assert checked.exit_code == 3
    found = parsed(checked)
    assert isinstance(found, dict)
    assert found["readings"] == {"read": 11, "used": 10, "set_aside": 1}
    assert found["set_aside"][0]["raw"] == "about 97"
    ran = cw("process", folder, "--into", tmp_path / "out", "--no-plots", "--json")
    outcomes = parsed(ran)
    assert isinstance(outcomes, list)
    assert outcomes[0]["readings"] == {"read": 11, "used": 10, "set_aside": 1}
    assert outcomes[0]["attention"] == {"set-aside": 1}
    assert Path(outcomes[0]["path"]) == tmp_path / "out" / "tidy"


def test_json_of_a_trace(cw: Cw, results: Path) -> None:
    found = parsed(cw("trace", results, "A1", "--json"))
    assert isinstance(found, dict)
    assert found["coupon"]["coupon_id"] == "A1"
    assert len(found["record"]["readings"]) == 5


def test_stdout_of_process_is_the_path_alone(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    result = cw("process", batch(), "--into", tmp_path / "out", "--no-plots")
    assert result.stdout == f"{tmp_path / 'out' / 'tidy'}\n"
    assert "2 coupons" in result.stderr  # words for a person


def test_plots_are_drawn_unless_they_are_not_wanted(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    cw("process", batch(), "--into", tmp_path / "out")
    plots = {p.suffix for p in (tmp_path / "out" / "tidy" / "plots").iterdir()}
    assert plots == {".svg", ".png"}
    cw("process", batch("bare"), "--into", tmp_path / "out", "--no-plots")
    assert not (tmp_path / "out" / "bare" / "plots").exists()


def test_check_names_coupons_with_few_readings(cw: Cw, batch: Batch) -> None:
    folder = batch()
    (folder / "coupons.csv").write_text("coupon_id\nA1\nA2\nA3\nA4\n", encoding="utf-8")
    rows = [*(f"A1,{i},98.07,90" for i in range(4)), "A2,1,98.07,96", "A4,1,49.03,96"]
    text = "\n".join(["coupon_id,indent_no,force_n,hardness", *rows, ""])
    (folder / "indents.csv").write_text(text, encoding="utf-8")
    result = cw("check", folder)
    assert result.exit_code == 3
    told = " ".join(result.stdout.split())
    assert "4 coupons, 1 of them without" in told
    assert "error, 1 x no-readings: the coupon has no reading that could be used: A3" in told
    assert "2 x few-readings: the coupon has fewer than three readings: A2, A4" in told
    assert "1 x under-five-readings: the coupon has fewer than five readings: A1" in told
    assert "1 x no-repeatability: there is nothing to judge the scatter of the readings by: A4" in (
        told
    )
    assert check_and_process_agree(cw, folder)


def check_and_process_agree(cw: Cw, folder: Path) -> bool:
    """Say whether what `check` finds is what a run finds of the same rules."""
    checked = parsed(cw("check", folder, "--json"))
    ran = parsed(cw("process", folder, "--into", folder.parent / "o", "--no-plots", "--json"))
    assert isinstance(checked, dict)
    assert isinstance(ran, list)
    counts = Counter((flag["level"], flag["rule"]) for flag in checked["flags"])
    found = {(level, rule): n for level, x in ran[0]["flags"].items() for rule, n in x.items()}
    return counts.items() <= found.items()


def test_check_writes_nothing(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder = batch()
    before = sorted(p.name for p in tmp_path.rglob("*"))
    result = cw("check", folder)
    assert result.exit_code == 0
    assert "10 readings read" in result.stdout
    assert sorted(p.name for p in tmp_path.rglob("*")) == before


def test_new_starts_a_batch_that_check_asks_to_fill(cw: Cw, tmp_path: Path) -> None:
    result = cw("new", tmp_path / "fresh")
    assert result.exit_code == 0
    assert result.stdout.splitlines()[0] == str(tmp_path / "fresh" / "batch.toml")
    assert cw("check", tmp_path / "fresh").exit_code == 4
    again = cw("new", tmp_path / "fresh")
    assert again.exit_code == 2
    assert "nothing there is touched" in again.stderr


@pytest.mark.parametrize("words", [["--help"], ["estimate"], ["nonsense"], ["process"]], ids=str)
def test_no_color_is_kept(cw: Cw, words: list[str]) -> None:
    result = cw(*words, NO_COLOR="1", FORCE_COLOR="1", TERM="xterm-256color")
    assert not COLOUR.search(result.output)


def test_estimate_agrees_with_the_published_rule_of_thumb(cw: Cw) -> None:
    # G b^2 / 2 of copper, G 44 GPa and b = 0.361 nm / sqrt 2: 1.4335e-9 J/m (a textbook's
    # inputs, worked out apart from this package), and 1 mm3 at 1e14 per m2 holds 1e5 m of line.
    found = parsed(
        cw(
            *("estimate", "copper", "--density", "1e14", "--volume", "1", "--json"),
            *("--set", "material.shear_modulus_gpa = 44.0"),
            *("--set", f"material.burgers_vector_nm = {0.361 / 2**0.5!r}"),
        )
    )
    assert isinstance(found, dict)
    assert found["rule_of_thumb_line_energy_j_per_m"] == pytest.approx(1.4335e-9, abs=0.5e-13)
    assert found["total_line_length_m"]["value"] == pytest.approx(1e5, rel=1e-12)
    energy = found["stored_energy_j_per_m3"]["value"]
    assert found["total_stored_energy_j"]["value"] == pytest.approx(energy * 1e-9, rel=1e-12)
    ratio = found["rule_of_thumb_over_line_energy"]
    line = found["line_energy_j_per_m"]["value"]
    assert ratio == pytest.approx(found["rule_of_thumb_line_energy_j_per_m"] / line, rel=1e-12)


def test_estimate_gives_what_the_pipeline_gives(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder = batch()
    cw("process", folder, "--into", tmp_path / "out", "--no-plots")
    traced = parsed(cw("trace", tmp_path / "out" / "tidy", "A1", "--json"))
    assert isinstance(traced, dict)
    row = traced["coupon"]
    found = parsed(cw("estimate", "--sheet", folder, "--hardness", repr(row["hardness"]), "--json"))
    assert isinstance(found, dict)
    for name in ("dislocation_density_per_m2", "stored_energy_j_per_g", "line_energy_j_per_m"):
        assert found[name]["value"] == pytest.approx(row[name], rel=1e-12)
        assert found[name]["u"] == pytest.approx(row[f"u_shared_{name}"], rel=1e-9)
