"""Order, files, line ends and blocks move no number; the same input gives the same bytes."""

import json
import os
import random
import subprocess
import sys
from collections.abc import Callable
from functools import partial
from pathlib import Path
from typing import Final

import pandas as pd
import pytest

import coldwork
from coldwork.jobs.gather import gather
from coldwork.jobs.run import run
from coldwork.results.read import read_results

Make = Callable[..., Path]

SHEET: Final = """
[batch]
id = "order"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = {files}
[strength]
route = "indent"
friction_mpa = {{ value = 25.5, u = 4.0 }}
hall_petch_mpa_m05 = {{ value = 0.11, u = 0.02 }}
[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1
[hardening]
coefficient = {{ value = 0.30, factor = 1.2{own} }}
taylor_factor = {{ value = 3.06, u = 0.15{own} }}
[character]
mix = "uniform"
[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
[[testers]]
id = "T2"
bias_rel = -0.01
u_rel = 0.005
[[limits]]
id = "window"
quantity = "stored_energy_j_per_g"
lower = 0.05
upper = 0.30
"""
ONE_FILE: Final = SHEET.format(files='"indents.csv"', own="")
TWO_FILES: Final = SHEET.format(files='"part-*.csv"', own="")
LISTED: Final = SHEET.format(files='["part-2.csv", "part-1.csv"]', own="")

HEADER: Final = "coupon_id,indent_no,force_n,d1_um,d2_um,edge_mm,tester"
COUPONS: Final = "coupon_id,lot_id,condition,grain_size_um,u_grain_size_um\n" + "".join(
    f"C{i},lot {i % 2},{'rolled' if i < 4 else 'annealed'},{18 + i},2\n" for i in range(7)
)


def lines() -> list[str]:
    """Seven coupons of three to six indents; the sixth has none, two read on both testers."""
    rng = random.Random(7)  # noqa: S311 - invented readings, no secret
    found = []
    for i in (0, 1, 2, 3, 4, 6):
        middle = 440.0 if i < 4 else 560.0
        for k in range(1, 4 + i % 4):
            d1, d2 = (middle + 5 * i + rng.uniform(-4, 4) for _ in range(2))
            tester = "T2" if i in (2, 3) and k % 2 else "T1"
            found.append(f"C{i},{k},98.07,{d1:.1f},{d2:.1f},{2 + k},{tester}")
    return found


LINES: Final = lines()


def table(rows: list[str], *, end: str = "\n", last: str | None = None, head: str = "") -> bytes:
    text = end.join([HEADER, *rows])
    return (head + text + (end if last is None else last)).encode()


def numbers(frame: pd.DataFrame) -> pd.DataFrame:
    """Number columns and what was decided on them; not what names a file or a digest."""
    kept = frame.select_dtypes("number").copy()
    for name in ("coupon_id", "decision", "flags", "hardness_scale"):
        kept[name] = frame[name]
    return kept


@pytest.fixture(scope="module")
def plain(make_once: Make) -> pd.DataFrame:
    folder = make_once(ONE_FILE, name="plain", coupons=COUPONS, indents=table(LINES))
    return numbers(coldwork.process(folder).frames["coupons"])


def same(plain: pd.DataFrame, folder: Path) -> None:
    found = coldwork.process(folder)
    pd.testing.assert_frame_equal(numbers(found.frames["coupons"]), plain, check_exact=True)
    reconciled = found.manifest["reconciled"]
    assert reconciled["readings_used"] == len(LINES)


@pytest.mark.parametrize("seed", range(3))
def test_shuffled_rows(make: Make, plain: pd.DataFrame, seed: int) -> None:
    shuffled = LINES.copy()
    random.Random(seed).shuffle(shuffled)  # noqa: S311 - no secret
    same(plain, make(ONE_FILE, coupons=COUPONS, indents=table(shuffled)))


def test_rows_dealt_out_like_cards_are_regrouped(make: Make, plain: pd.DataFrame) -> None:
    dealt = sorted(LINES, key=lambda line: line.split(",")[1])  # all first indents, then all second
    same(plain, make(ONE_FILE, coupons=COUPONS, indents=table(dealt)))


@pytest.mark.parametrize("sheet", [TWO_FILES, LISTED], ids=["pattern", "list"])
@pytest.mark.parametrize("cut", [1, 10, len(LINES) - 1])
def test_split_files(make: Make, plain: pd.DataFrame, sheet: str, cut: int) -> None:
    parts = {"part-1": table(LINES[:cut]), "part-2": table(LINES[cut:])}
    same(plain, make(sheet, coupons=COUPONS, **parts))


@pytest.mark.parametrize(
    "indents",
    [
        table(LINES, end="\r\n"),
        table(LINES, last=""),
        table(LINES, head="\ufeff"),
        table([line.replace(",98.07,", ',"98.07",') for line in LINES]),
        table(LINES, end="\n\n"),
    ],
    ids=["CRLF", "no last newline", "byte order mark", "quoted", "blank lines"],
)
def test_ordinary_ways_to_write_csv(make: Make, plain: pd.DataFrame, indents: bytes) -> None:
    same(plain, make(ONE_FILE, coupons=COUPONS, indents=indents))


def test_order_of_columns(make: Make, plain: pd.DataFrame) -> None:
    rows = [line.split(",")[::-1] for line in [HEADER, *LINES]]
    backwards = "\n".join(map(",".join, rows))
    same(plain, make(ONE_FILE, coupons=COUPONS, indents=backwards))


@pytest.mark.parametrize("block_bytes", [40, 97, 300, 1000])
def test_blocks_give_the_same_bytes(
    make: Make, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, block_bytes: int
) -> None:
    folder = make(ONE_FILE, coupons=COUPONS, indents=table(LINES))
    run(folder, tmp_path / "one", plots=False)
    monkeypatch.setattr("coldwork.jobs.run.gather", partial(gather, block_bytes=block_bytes))
    run(folder, tmp_path / "two", plots=False)
    assert contents(tmp_path / "one" / "order") == contents(tmp_path / "two" / "order")


def test_slices_give_the_same_bytes(
    make: Make, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = make(ONE_FILE, coupons=COUPONS, indents=table(LINES))
    run(folder, tmp_path / "one", plots=False)
    monkeypatch.setattr("coldwork.jobs.run._FULL_SLICE", 2)
    run(folder, tmp_path / "two", plots=False)
    one, two = (contents(tmp_path / name / "order") for name in ("one", "two"))
    differing = [name for name in one if one[name] != two[name]]
    # sums over a lot are added slice by slice, so their last digit may differ
    assert set(differing) <= {"lots.csv", "manifest.json"}
    first, second = (
        read_results(tmp_path / name / "order").frames["lots"] for name in ("one", "two")
    )
    pd.testing.assert_frame_equal(first, second, rtol=1e-12)


def contents(results: Path) -> dict[str, bytes | str]:
    """Every file; of the manifest all but what varies from run to run."""
    found: dict[str, bytes | str] = {}
    for path in sorted(p for p in results.rglob("*") if p.is_file()):
        found[path.relative_to(results).as_posix()] = path.read_bytes()
    manifest = json.loads(found["manifest.json"])
    del manifest["run"]
    found["manifest.json"] = json.dumps(manifest, sort_keys=True)
    return found


def test_the_same_input_gives_the_same_bytes_plots_too(make: Make, tmp_path: Path) -> None:
    sheet = ONE_FILE + '[output]\ntables = ["csv", "parquet"]\n'
    folder = make(sheet, coupons=COUPONS, indents=table(LINES))
    for name in ("one", "two"):
        run(folder, tmp_path / name, plots=True)
    one, two = (contents(tmp_path / name / "order") for name in ("one", "two"))
    assert [name for name in one if one[name] != two[name]] == []
    assert any(name.endswith(".svg") for name in one)
    assert any(name.endswith(".parquet") for name in one)


def test_bytes_do_not_hang_on_the_interpreters_hash_seed(make: Make, tmp_path: Path) -> None:
    # Inputs that are own and enter after the stress: a lot's mean of them is made per quantity.
    sheet = SHEET.format(files='"indents.csv"', own=", shared = false")
    folder = make(sheet, coupons=COUPONS, indents=table(LINES))
    code = "import sys; from coldwork.cli import main; main()"
    found = []
    for seed in ("1", "2"):
        into = tmp_path / seed
        subprocess.run(
            [sys.executable, "-c", code, "process", folder, "--into", into, "--no-plots"],
            env={
                **os.environ,
                "PYTHONHASHSEED": seed,
                "PYTHONPATH": str(Path(coldwork.__file__).parents[1]),
            },
            check=False,
            capture_output=True,
        )
        found.append(contents(into / "order"))
    one, two = found
    assert [name for name in one if one[name] != two[name]] == []


def test_an_input_marked_own_moves_from_shared_to_own(make: Make, plain: pd.DataFrame) -> None:
    sheet = SHEET.format(files='"indents.csv"', own=", shared = false")
    folder = make(sheet, coupons=COUPONS, indents=table(LINES))
    frames = coldwork.process(folder).frames
    own = frames["coupons"]
    name = "dislocation_density_per_m2"
    pd.testing.assert_series_equal(own[f"u_{name}"], plain[f"u_{name}"], rtol=1e-12)
    pd.testing.assert_series_equal(own[name], plain[name], check_exact=True)
    known = own[f"u_{name}"].notna()
    assert (own.loc[known, f"u_own_{name}"] > plain.loc[known, f"u_own_{name}"]).all()
    assert (own.loc[known, f"u_shared_{name}"] < plain.loc[known, f"u_shared_{name}"]).all()
    budget = frames["budget"].query("input == 'hardening.coefficient'")
    assert set(budget["own_or_shared"]) == {"own"}
    # the mean of a lot then averages it out
    lots = frames["lots"].query("condition == 'rolled'")
    assert (lots["coupons_averaged"] == 2).all()
