"""The copper strip as the benches wrote it: the same results as the tidy table, bit for bit.

What differs is where things stood: file, line, raw cells, and times that knew no zone.
"""

import csv
import json
from collections.abc import Iterator, Mapping
from datetime import UTC, datetime, timedelta, timezone
from pathlib import Path
from typing import Any, Final

import pytest

from coldwork.jobs.run import run
from coldwork.jobs.trace import trace

SAMPLE_DATA: Final = Path(__file__).resolve().parents[2] / "sample_data"
WALL: Final = timezone(timedelta(hours=2))  # what that batch sheet names: Etc/GMT-2
PROVENANCE: Final = {"record_sha256", "file", "line"}
BENCHES: Final = ("copper-benches/bench-text", "copper-benches/bench-utf-16")

Results = Mapping[str, Path]


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Results:
    return {
        batch: run(SAMPLE_DATA / batch, tmp_path_factory.mktemp("out"), plots=False).path
        for batch in ("copper-strip", *BENCHES)
    }


def rows(path: Path) -> Iterator[Mapping[str, str]]:
    with path.open(encoding="utf-8", newline="") as stream:
        for row in csv.DictReader(stream):
            kept = {name: cell for name, cell in row.items() if name not in PROVENANCE}
            if kept.get("measured_at"):
                time = datetime.fromisoformat(kept["measured_at"])
                zoned = time if time.tzinfo else time.replace(tzinfo=WALL)
                kept["measured_at"] = zoned.astimezone(UTC).isoformat()
            yield kept


def document(path: Path) -> dict[str, Any]:
    content: dict[str, Any] = json.loads(path.read_text(encoding="utf-8"))
    return content


@pytest.mark.parametrize("bench", BENCHES)
@pytest.mark.parametrize(
    "name", ["quantities", "budget", "lots", "decisions", "flags", "set_aside"]
)
def test_results_are_the_same_bytes(results: Results, bench: str, name: str) -> None:
    theirs = (results["copper-strip"] / f"{name}.csv").read_bytes()
    assert (results[bench] / f"{name}.csv").read_bytes() == theirs


@pytest.mark.parametrize("bench", BENCHES)
@pytest.mark.parametrize("name", ["coupons", "readings"])
def test_tables_are_the_same_but_for_where_things_stood(
    results: Results, bench: str, name: str
) -> None:
    ours, theirs = (list(rows(results[each] / f"{name}.csv")) for each in (bench, "copper-strip"))
    assert ours == theirs
    assert len(ours) == {"coupons": 35, "readings": 245}[name]


def test_the_manifest_tells_what_was_passed_over_and_kept(results: Results) -> None:
    text, wide = (document(results[bench] / "manifest.json") for bench in BENCHES)
    assert text["unused_columns"]["raw/CS00-1.txt"] == ["remark"]
    assert wide["unused_columns"] == {"cut.txt": ["no."], "indents.txt": ["Mean", "HV"]}
    kept = text["kept_lines"]["raw/CS40-5.txt"]
    assert [each["text"].split(";")[0] for each in kept] == ["average", "spread"]
    read = [entry["path"] for entry in wide["inputs"] if entry["table"] == "layout"]
    assert read == ["../layouts/cutting-list.toml", "../layouts/bench-2.toml"]
    assert text["reconciled"]["readings_used"] == 245


def test_the_method_tells_where_each_column_came_from(results: Results) -> None:
    (layout,) = document(results[BENCHES[0]] / "method.json")["layouts"]
    assert layout["id"] == "bench-1"
    assert len(layout["files"]) == 35
    assert layout["columns"]["d1_um"] == {"from": "across", "unit": "mm"}
    assert layout["columns"]["coupon_id"] == {"from": "above: piece:", "unit": None}


def test_trace_shows_the_cells_as_the_machine_wrote_them(results: Results) -> None:
    told = trace(results[BENCHES[0]], "CS20-3").text()
    assert "raw/CS20-3.txt, line 11: " in told
    for word in ("across 0,", "above: load: 98,07", "when 28.07.2026", "constant: scale HV"):
        assert word in told
    wide = trace(results[BENCHES[1]], "CS20-3").text()
    assert "cut.txt, line 25: " in wide  # the 23rd of the list, under a header and a remark
    assert "grain  0.020 " in wide  # filled up with spaces
    work = next(line for line in wide.splitlines() if "from prior_plastic_work" in line)
    assert "(cut.txt, line 25)" in work
