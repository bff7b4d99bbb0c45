"""How commands end: the code, the words, and what is left behind."""

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from typer.testing import Result

from coldwork.jobs.gather import gather

Cw = Callable[..., Result]
Batch = Callable[..., Path]


def process(cw: Cw, *words: str | Path) -> Result:
    return cw("process", *words, "--no-plots")


def test_done(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    result = process(cw, batch(), "--into", tmp_path / "out")
    assert result.exit_code == 0
    assert result.stderr.count("asks for a person") == 0


@pytest.mark.parametrize(
    ("lower", "bad_cell", "word"),
    [
        (0.5, False, "non-conforming"),
        (0.073, False, "undecided"),  # near the first coupon's energy
        (0.001, True, "set-aside"),
    ],
)
def test_something_asks_for_a_person(
    cw: Cw, batch: Batch, tmp_path: Path, lower: float, bad_cell: bool, word: str
) -> None:
    folder = batch(lower=lower, bad_cell=bad_cell)
    result = process(cw, folder, "--into", tmp_path / "a")
    assert result.exit_code == 3
    assert word in result.stderr
    assert process(cw, folder, "--into", tmp_path / "b", "--accept", word).exit_code == 0
    others = {"non-conforming", "undecided", "set-aside", "errors", "incomplete"} - {word}
    flags = [x for other in sorted(others) for x in ("--accept", other)]
    assert process(cw, folder, "--into", tmp_path / "c", *flags).exit_code == 3


def test_an_error_asks_for_a_person(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder = batch()
    (folder / "coupons.csv").write_text("coupon_id\nA1\nA2\nA3\n", encoding="utf-8")  # A3 unread
    result = process(cw, folder, "--into", tmp_path / "out")
    assert result.exit_code == 3
    assert "3 coupons; 10 readings read" in result.stderr
    assert "asks for a person: 1 with errors\n" in result.stderr
    assert "1 error (1 no-readings)" in result.stderr
    assert process(cw, folder, "--into", tmp_path / "b", "--accept", "errors").exit_code == 0


def test_a_batch_without_any_density_asks_for_a_person(
    cw: Cw, batch: Batch, tmp_path: Path
) -> None:
    folder = batch()
    sheet = folder / "batch.toml"
    text = sheet.read_text(encoding="utf-8").replace("value = 50.0", "value = 5000.0")
    sheet.write_text(text, encoding="utf-8")
    result = process(cw, folder, "--into", tmp_path / "out")
    assert result.exit_code == 3
    assert "4 warnings (2 below-baseline, 2 baseline-contradicted)" in result.stderr
    assert "asks for a person: 2 incomplete" in result.stderr
    fine = ["--accept", "incomplete", "--json"]
    result = process(cw, folder, "--into", tmp_path / "b", *fine)
    assert result.exit_code == 0
    (told,) = json.loads(result.stdout)
    assert told["flags"]["warning"] == {"below-baseline": 2, "baseline-contradicted": 2}
    assert told["attention"] == {"incomplete": 2}


def test_a_lone_reading_without_a_pool_asks_for_a_person(
    cw: Cw, batch: Batch, tmp_path: Path
) -> None:
    folder = batch()
    (folder / "coupons.csv").write_text("coupon_id\nA1\n", encoding="utf-8")
    row = "coupon_id,indent_no,force_n,hardness\nA1,1,98.07,90\n"
    (folder / "indents.csv").write_text(row, encoding="utf-8")
    result = process(cw, folder, "--into", tmp_path / "out")  # a density without an interval
    assert result.exit_code == 3
    assert "1 coupon; 1 reading read, 1 used" in result.stderr
    assert "asks for a person: 1 incomplete" in result.stderr


@pytest.mark.parametrize(
    "words",
    [
        ["nonsense"],
        ["process"],
        ["process", "BATCH"],  # no --into
        ["process", "BATCH", "--into", "OUT", "--replace"],
        ["process", "BATCH", "--into", "OUT", "--replace", "--reason", "  "],
        ["process", "BATCH", "--into", "OUT", "--reason", "why not"],
        ["process", "BATCH", "--into", "OUT", "--accept", "anything"],
        ["process", "--colour", "BATCH", "--into", "OUT"],
        ["trace", "OUT", "A1"],  # no results there
        ["materials", "unobtainium"],
        ["contract", "coupon"],
        ["estimate", "copper"],
        ["estimate", "copper", "--density", "1e14", "--stress", "100"],
        ["estimate", "copper", "--density=-1e14"],
        ["estimate", "copper", "--density", "nan"],
        ["estimate", "copper", "--hardness", "90", "--baseline", "50", "--scale", "HRC"],
        ["estimate", "copper", "--hardness", "90"],  # no baseline
        ["estimate", "unobtainium", "--density", "1e14"],
        ["estimate", "copper", "--density", "1e14", "--set", "material.shear_modulus_gpa"],
        ["estimate", "copper", "--density", "1e14", "--set", "material.sheer_modulus_gpa = 4"],
    ],
    ids=" ".join,
)
def test_usage(cw: Cw, batch: Batch, tmp_path: Path, words: list[str]) -> None:
    places = {"BATCH": str(batch()), "OUT": str(tmp_path / "out")}
    result = cw(*(places.get(word, word) for word in words))
    assert result.exit_code == 2
    assert result.stdout == ""
    assert len(result.stderr) > 10
    assert not (tmp_path / "out").exists()


def test_a_coupon_that_is_not_there_is_told_its_neighbours(
    cw: Cw, batch: Batch, tmp_path: Path
) -> None:
    process(cw, batch(), "--into", tmp_path / "out")
    result = cw("trace", tmp_path / "out" / "tidy", "A-1")
    assert result.exit_code == 2
    assert "'A1'" in result.stderr
    above = cw("trace", tmp_path / "out", "A1")  # the folder of all results
    assert above.exit_code == 2
    assert "tidy" in above.stderr


@pytest.mark.parametrize("command", ["check", "process"])
def test_a_batch_that_is_not_there(cw: Cw, tmp_path: Path, command: str) -> None:
    into = ["--into", str(tmp_path / "out")] if command == "process" else []
    result = cw(command, tmp_path / "nowhere", *into)
    assert result.exit_code == 4
    assert "nowhere" in result.stderr
    assert "there is no such folder" in result.stderr
    assert list(tmp_path.iterdir()) == []


def test_refused_tells_every_cause_and_writes_nothing(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder = batch()
    (folder / "coupons.csv").write_text("coupon_id,colour\nA1,red\nA1,red\n", encoding="utf-8")
    text = "coupon_id,indent_no,forcen,hardness\nA1,1,98.07,90\n"
    (folder / "indents.csv").write_text(text, encoding="utf-8")
    result = process(cw, folder, "--into", tmp_path / "out")
    assert result.exit_code == 4
    assert result.stdout == ""
    assert "colour" in result.stderr
    assert "force_n" in result.stderr  # the nearest known name
    assert not (tmp_path / "out").exists()


def test_results_that_exist_are_not_touched(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder, out = batch(), tmp_path / "out"
    assert process(cw, folder, "--into", out).exit_code == 0
    before = {p: p.read_bytes() for p in out.rglob("*") if p.is_file()}
    result = process(cw, folder, "--into", out)
    assert result.exit_code == 5
    assert result.stdout == ""
    assert "--replace" in result.stderr
    assert {p: p.read_bytes() for p in out.rglob("*") if p.is_file()} == before
    why = ["--replace", "--reason", "another tester's bias"]
    assert process(cw, folder, "--into", out, *why).exit_code == 0
    kept = list((out / "replaced").iterdir())
    assert len(kept) == 1
    assert {p.read_bytes() for p in kept[0].rglob("*") if p.is_file()} == set(before.values())
    assert "another tester's bias" in (out / "tidy" / "manifest.json").read_text(encoding="utf-8")


def test_a_file_in_the_way_of_the_results(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    (tmp_path / "out").write_text("a note", encoding="utf-8")
    result = process(cw, batch(), "--into", tmp_path / "out")
    assert result.exit_code == 5
    assert result.stdout == ""
    assert len(result.stderr.strip().splitlines()) == 1
    assert (tmp_path / "out").read_text(encoding="utf-8") == "a note"


def test_of_several_batches_the_gravest_ending_wins(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    good, asks, out = batch("good"), batch("asks", bad_cell=True), tmp_path / "out"
    refused = batch("refused")
    (refused / "indents.csv").unlink()
    result = process(cw, good, asks, "--into", out)
    assert result.exit_code == 3
    assert result.stdout.splitlines() == [str(out / "good"), str(out / "asks")]
    again = tmp_path / "again"
    result = process(cw, refused, good, asks, "--into", again)
    assert result.exit_code == 4
    assert sorted(p.name for p in again.iterdir()) == ["asks", "good"]  # the others are done
    result = process(cw, refused, good, "--into", again)  # good stands there by now
    assert result.exit_code == 5
    assert "refused" in result.stderr


def test_two_batches_of_one_id_do_not_overwrite_each_other(
    cw: Cw, batch: Batch, tmp_path: Path
) -> None:
    folder = batch()
    result = process(cw, folder, folder, "--into", tmp_path / "out")
    assert result.exit_code == 5
    assert (tmp_path / "out" / "tidy" / "manifest.json").is_file()


def test_an_internal_error_is_one_and_says_so(
    cw: Cw, batch: Batch, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def breaks(*_: object) -> None:
        message = "a fault"
        raise RuntimeError(message)

    monkeypatch.setattr("coldwork.jobs.run.Lots", breaks)
    result = process(cw, batch(), "--into", tmp_path / "out")
    assert result.exit_code == 1
    assert "internal error" in result.stderr
    assert "nothing half-written was left behind" in result.stderr
    assert not (tmp_path / "out").exists()


def test_an_internal_error_in_one_batch_does_not_hide_the_others(
    cw: Cw, batch: Batch, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # gravest of all, yet what was finished before it stays and is named
    first, second = batch("first"), batch("second")
    calls = []

    def gathered(*words: Any, **named: Any) -> Any:  # noqa: ANN401 - as `gather` has them
        calls.append(words)
        if len(calls) == 2:
            message = "a fault"
            raise RuntimeError(message)
        return gather(*words, **named)

    monkeypatch.setattr("coldwork.jobs.run.gather", gathered)
    result = process(cw, first, second, "--into", tmp_path / "out")
    assert result.exit_code == 1
    assert str(tmp_path / "out" / "first") in result.stdout
    assert "nothing was written" not in result.stderr
