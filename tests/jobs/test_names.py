"""Names that spreadsheets, number readers and HTML trip over go unharmed through every output."""

import csv
import json
from collections.abc import Callable
from pathlib import Path
from typing import Final
from xml.etree import ElementTree

import pyarrow.parquet as pq
import pytest

import coldwork
from coldwork.jobs.process import Processed
from coldwork.jobs.trace import trace
from coldwork.results.read import read_results

Make = Callable[..., Path]

NAMES: Final = [
    "=7/A ä<b>",
    "NA",
    "0012",
    "12",
    "-2",
    "+x",
    "@y",
    "'quoted",
    "a,b",
    'say "8"',
    "1e3",
]
HARMLESS: Final = {name: name for name in NAMES} | {
    # behind one apostrophe: what begins with = + - @, a tab, a return or an apostrophe
    name: "'" + name
    for name in NAMES
    if name[0] in "=+-@'"
}
LOT: Final = "=1+1"
CONDITION: Final = "-5 % <i>rolled</i> & 'old'"
SHEET: Final = """
[batch]
id = "names"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 5.0 }
[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
[character]
screw = 0.5
edge = 0.5
[output]
tables = ["csv", "parquet"]
[[limits]]
id = "window"
quantity = "stored_energy_j_per_g"
lower = 0.068
"""


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Processed:
    folder = tmp_path_factory.mktemp("names")
    (folder / "batch.toml").write_text(SHEET, encoding="utf-8")

    def write(name: str, rows: list[list[object]]) -> None:
        with (folder / name).open("w", encoding="utf-8", newline="") as file:
            csv.writer(file).writerows(rows)

    # Written as the documented rule has it: a reader strips one apostrophe.
    listed: list[list[object]] = [["coupon_id", "lot_id", "condition", "thickness_mm"]]
    listed += [[HARMLESS[name], "'" + LOT, "'" + CONDITION, 5] for name in NAMES]
    write("coupons.csv", listed)
    rows: list[list[object]] = [["coupon_id", "indent_no", "force_n", "hardness", "operator"]]
    for place, name in enumerate(NAMES):
        rows += [[HARMLESS[name], i, 98.07, 90 + place + i / 10, "operator-1"] for i in range(5)]
    rows.append([HARMLESS[NAMES[0]], 9, 98.07, "=2*45", "operator-1"])  # set aside, raw text kept
    write("indents.csv", rows)
    return coldwork.process(folder, folder.parent / f"{folder.name}-results", plots=True)


def raw(results: Processed, table: str) -> list[dict[str, str]]:
    with (results.outcome.path / f"{table}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


@pytest.mark.parametrize("table", ["coupons", "quantities", "budget", "readings", "decisions"])
def test_csv_holds_them_behind_an_apostrophe(results: Processed, table: str) -> None:
    written = [row["coupon_id"] for row in raw(results, table)]
    assert list(dict.fromkeys(written)) == [HARMLESS[name] for name in NAMES]


def test_no_cell_of_any_table_is_a_live_formula(results: Processed) -> None:
    for path in sorted(results.outcome.path.glob("*.csv")):
        with path.open(encoding="utf-8", newline="") as file:
            reader = csv.reader(file)
            header = next(reader)
            for row in reader:
                for column, cell in zip(header, row, strict=True):
                    number = cell.startswith("-") and _is_number(cell)
                    assert number or not cell.startswith(("=", "+", "-", "@", "\t", "\r")), (
                        path.name,
                        column,
                        cell,
                    )


def _is_number(cell: str) -> bool:
    try:
        float(cell)
    except ValueError:
        return False
    return True


@pytest.mark.parametrize("table", ["coupons", "quantities", "budget", "readings", "decisions"])
def test_frames_hold_them_as_they_are(results: Processed, table: str) -> None:
    found = read_results(results.outcome.path).frames[table]["coupon_id"]
    assert list(dict.fromkeys(found)) == NAMES


def test_lots_and_conditions_too(results: Processed) -> None:
    frame = results.frames["coupons"]
    assert set(frame["lot_id"]) == {LOT}
    assert set(frame["condition"]) == {CONDITION}
    lot = results.frames["lots"].iloc[0]
    assert (lot["lot_id"], lot["condition"]) == (LOT, CONDITION)
    assert raw(results, "lots")[0]["lot_id"] == "'" + LOT


def test_a_formula_that_was_set_aside_is_kept_harmless(results: Processed) -> None:
    row = results.frames["set_aside"].iloc[0]
    assert (row["coupon_id"], row["raw"], row["rule"]) == (NAMES[0], "=2*45", "not-a-number")
    assert raw(results, "set_aside")[0]["raw"] == "'=2*45"


def test_parquet_holds_them_as_they_are(results: Processed) -> None:
    for table in ("coupons", "readings", "decisions", "budget"):
        found = pq.read_table(results.outcome.path / f"{table}.parquet")["coupon_id"].to_pylist()
        assert list(dict.fromkeys(found)) == NAMES


def test_records_hold_them_as_they_are(results: Processed) -> None:
    text = (results.outcome.path / "records.jsonl").read_text(encoding="utf-8")
    records = [json.loads(line) for line in text.splitlines()]
    assert [record["coupon_id"] for record in records] == NAMES


@pytest.mark.parametrize("name", NAMES)
def test_trace_finds_each(results: Processed, name: str) -> None:
    found = trace(results.outcome.path, name)
    assert found.as_json()["coupon"]["coupon_id"] == name
    assert f"coupon {name}" in found.text()
    readings = results.frames["readings"]
    line = readings["line"][readings["coupon_id"] == name].min()
    assert f"line {line}" in found.text()


def test_plots_hold_them_escaped(results: Processed) -> None:
    # Letters are drawn as paths; each text stands beside its paths as a comment.
    plots = sorted((results.outcome.path / "plots").glob("*.svg"))
    assert len(plots) >= 5
    everything = ""
    for path in plots:
        text = path.read_text(encoding="utf-8")
        assert "<b>" not in text
        assert "<i>" not in text
        ElementTree.fromstring(text)  # noqa: S314 - written by the code under test
        everything += text
    for name in ("=7/A ä&lt;b&gt;", "NA", "0012"):
        assert f"<!-- {name} -->" in everything, name


def test_names_reach_no_path(results: Processed) -> None:
    paths = [p.relative_to(results.outcome.path) for p in results.outcome.path.rglob("*")]
    assert not [p for p in paths if any(name in str(p) for name in ("=7", "NA", "0012"))]
