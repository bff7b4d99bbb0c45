"""A batch of bench files from folder to results: what is flagged, set aside, kept and traced."""

import csv
import json
import shutil
from functools import partial
from pathlib import Path
from typing import Final

import pytest

from coldwork.errors import BatchRefused, UsageError
from coldwork.jobs.run import record_again, run
from coldwork.jobs.trace import trace

BENCHES: Final = Path(__file__).resolve().parents[2] / "sample_data" / "copper-benches"


@pytest.fixture
def batch(tmp_path: Path) -> Path:
    """A copy of the older bench's batch with its layouts; three coupons are enough."""
    folder = tmp_path / "bench-text"
    folder.mkdir()
    shutil.copytree(BENCHES / "layouts", tmp_path / "layouts")
    listed = (BENCHES / "bench-text/coupons.csv").read_text(encoding="utf-8").splitlines()
    kept = [
        listed[0],
        *(line for line in listed if line.startswith(("CS20-1", "CS20-2", "CS20-3"))),
    ]
    (folder / "coupons.csv").write_text("\n".join(kept) + "\n", encoding="utf-8")
    (folder / "raw").mkdir()
    for name in ("CS20-1.txt", "CS20-2.txt", "CS20-3.txt"):
        shutil.copy(BENCHES / "bench-text/raw" / name, folder / "raw")
    shutil.copy(BENCHES / "bench-text/batch.toml", folder)
    return folder


def changed(path: Path, line: int, old: str, new: str) -> None:
    """Change one line of a bench's file; its lines end in a return and a feed."""
    lines = path.read_bytes().decode("cp1252").split("\r\n")
    assert old in lines[line - 1]
    lines[line - 1] = lines[line - 1].replace(old, new, 1)
    path.write_bytes("\r\n".join(lines).encode("cp1252"))


def table(results: Path, name: str) -> list[dict[str, str]]:
    with (results / f"{name}.csv").open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


def test_a_mean_that_the_file_prints_and_its_rows_do_not_give(batch: Path, tmp_path: Path) -> None:
    changed(batch / "raw/CS20-2.txt", 19, "average;0,", "average;9,")
    outcome = run(batch, tmp_path / "out", plots=False)
    (flag,) = [row for row in table(outcome.path, "flags") if row["rule"] == "printed-mean-differs"]
    assert (flag["level"], flag["coupon_id"]) == ("warning", "CS20-2")
    assert (flag["file"], flag["line"]) == ("raw/CS20-2.txt", "19")
    assert float(flag["value"]) > float(flag["limit"]) == 1.0
    assert "mean of d1_um: printed 9," in flag["detail"]
    assert outcome.readings_used == 21  # a warning takes nothing out
    assert "printed-mean-differs" in trace(outcome.path, "CS20-2").text()


def test_a_cell_that_cannot_be_read_is_told_as_it_was_written(batch: Path, tmp_path: Path) -> None:
    changed(batch / "raw/CS20-1.txt", 12, ";0,", ";O,")
    outcome = run(batch, tmp_path / "out", plots=False)
    assert (outcome.readings_used, outcome.readings_set_aside) == (20, 1)
    (row,) = table(outcome.path, "set_aside")
    assert (row["file"], row["line"], row["column"]) == ("raw/CS20-1.txt", "12", "across")
    assert row["raw"].startswith("O,")
    assert (row["rule"], row["coupon_id"], row["reading_no"]) == ("not-a-number", "CS20-1", "2")
    told = trace(outcome.path, "CS20-1").text()
    assert 'raw/CS20-1.txt, line 12: across "O,' in told
    # and the printed mean shows that a row is missing
    assert "printed-mean-differs" in {flag["rule"] for flag in table(outcome.path, "flags")}


def test_a_summary_is_computed_again_through_the_same_layout(batch: Path, tmp_path: Path) -> None:
    sheet = batch / "batch.toml"
    sheet.write_text(f'{sheet.read_text(encoding="utf-8")}\n[output]\ndetail = "summary"\n')
    results = run(batch, tmp_path / "out", plots=False).path
    again = partial(trace, results, "CS20-3", batch=batch, retrace=record_again)
    assert "raw/CS20-3.txt, line 11: " in again().text()
    layout = batch / "../layouts/bench-1.toml"
    layout.write_text(layout.read_text(encoding="utf-8").replace('"mm"', '"um"'), encoding="utf-8")
    with pytest.raises(UsageError, match=r"bench-1\.toml has changed"):
        again()


def test_one_file_that_cannot_be_trusted_refuses_the_batch(batch: Path, tmp_path: Path) -> None:
    changed(batch / "raw/CS20-1.txt", 10, ";mm;mm", ";um;mm")
    changed(batch / "raw/CS20-3.txt", 2, "piece:", "coupon:")
    with pytest.raises(BatchRefused) as refused:
        run(batch, tmp_path / "out", plots=False)
    wheres = [cause.where for cause in refused.value.causes]
    assert wheres == ["raw/CS20-1.txt, line 10, column across", "raw/CS20-3.txt"]
    assert not (tmp_path / "out/CS-2026-31").exists()


def test_the_same_batch_gives_the_same_bytes(batch: Path, tmp_path: Path) -> None:
    first, second = (run(batch, tmp_path / name, plots=False).path for name in ("a", "b"))
    for path in sorted(first.iterdir()):
        if path.is_file() and path.name != "manifest.json":
            assert path.read_bytes() == (second / path.name).read_bytes()
    manifests = [json.loads((each / "manifest.json").read_text()) for each in (first, second)]
    assert [manifest.pop("run") is not None for manifest in manifests] == [True, True]
    assert manifests[0] == manifests[1]
