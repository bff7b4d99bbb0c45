"""A million coupons of five indents, beside a bare read-average-write and plain pandas.

Each contestant is a process of its own, run in turn, so that ratios hold on a shared machine.
The bare one reads the same files, takes the mean per coupon and writes as many columns; it checks
nothing and knows no physics. Printed: seconds, peak memory, ratios.

    python tests/benchmarks/million.py [coupons] [csv|parquet|csv,parquet]
"""

import resource
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.csv as pacsv
from numpy.typing import NDArray

INDENTS: Final = 5
COLUMNS: Final = 67  # of coupons.csv
PLAIN_CSV: Final = pacsv.WriteOptions(quoting_style="none")

SHEET: Final = """
[batch]
id = "MILLION"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = {{ value = 50.0, u = 5.0 }}
[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
[character]
screw = 0.5
edge = 0.5
[output]
tables = {tables}
detail = "summary"
"""

BARE: Final = """
import sys
import polars as pl
folder, forms, columns = sys.argv[1], sys.argv[2].split(","), int(sys.argv[3])
coupons = pl.read_csv(f"{folder}/coupons.csv", schema_overrides={"coupon_id": pl.String})
indents = pl.read_csv(f"{folder}/indents.csv", schema_overrides={"coupon_id": pl.String})
mean = indents.group_by("coupon_id", maintain_order=True).agg(
    (0.5 * (pl.col("d1_um") + pl.col("d2_um"))).mean().alias("d")
)
out = coupons.join(mean, on="coupon_id", how="left")
texts = 10
out = out.with_columns([(pl.col("d") * (1 + i / 7)).alias(f"c{i}") for i in range(columns - texts)])
out = out.with_columns([pl.lit("text").alias(f"t{i}") for i in range(columns - len(out.columns))])
if "csv" in forms:
    out.write_csv(f"{folder}/bare.csv")
if "parquet" in forms:
    out.write_parquet(f"{folder}/bare.parquet")
assert len(out.columns) == columns
"""

PLAIN: Final = """
import sys
import numpy as np
import pandas as pd
folder, columns = sys.argv[1], int(sys.argv[3])
coupons = pd.read_csv(f"{folder}/coupons.csv", dtype={"coupon_id": str})
indents = pd.read_csv(f"{folder}/indents.csv", dtype={"coupon_id": str})
assert (indents["force_n"] > 0).all() and (indents[["d1_um", "d2_um"]] > 0).all(axis=None)
d = (indents["d1_um"] + indents["d2_um"]) / 2000
indents["hv"] = 0.189093 * indents["force_n"] / d**2
group = indents.groupby("coupon_id", sort=False)["hv"]
out = coupons.merge(group.agg(["mean", "std", "count"]).reset_index(), on="coupon_id", how="left")
s = out["mean"] * 9.80665 / 3 - 50
x = 1700 * 0.08 / 320
s = s * np.exp(x) - 320 * np.expm1(x)
g, b, nu = 48.3e9, 0.2556e-9, 0.343
rho = (s.clip(lower=0) * 1e6 / (3.06 * 0.3 * g * b)) ** 2
line = g * (1 - nu / 2) / (1 - nu) * b**2 / (4 * np.pi) * np.log(1 / np.sqrt(rho) / b)
made = {"s": s, "rho": rho, "line": line, "u": rho * line}
for i in range(columns - out.shape[1] - len(made)):
    made[f"c{i}"] = rho * line * (1 + i / 7)
out = pd.concat([out, pd.DataFrame(made)], axis=1)
out.to_csv(f"{folder}/plain.csv", index=False)
assert out.shape[1] == columns
"""


@dataclass(frozen=True)
class Spent:
    """What one process took."""

    wall: float
    cpu: float
    megabytes: float


def main() -> None:
    """Generate the batch, run the contestants in turn, print the figures."""
    coupons = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    forms = sys.argv[2] if len(sys.argv) > 2 else "csv,parquet"
    with tempfile.TemporaryDirectory() as scratch:
        folder = Path(scratch) / "batch"
        folder.mkdir()
        write_batch(folder, coupons, forms.split(","))
        size = sum(p.stat().st_size for p in folder.iterdir()) / 1e6
        print(f"{coupons} coupons, {coupons * INDENTS} indents, {size:.0f} MB in, out as {forms}")
        into = Path(scratch) / "results"
        ours = [sys.executable, "-m", "coldwork", "process", str(folder), "--into", str(into)]
        ours += [
            "--no-plots",
            "--accept",
            "set-aside",
            "--accept",
            "errors",
            "--accept",
            "incomplete",
        ]
        contestants = {
            "coldwork": ours,
            "bare (polars)": [sys.executable, "-c", BARE, str(folder), forms, str(COLUMNS)],
            "plain pandas": [sys.executable, "-c", PLAIN, str(folder), "csv", str(COLUMNS)],
        }
        spent = {name: timed(command) for name, command in contestants.items()}
        for name, x in spent.items():
            print(f"{name:16s} {x.wall:7.2f} s wall {x.cpu:7.2f} s CPU {x.megabytes:7.0f} MB")
        mine = spent["coldwork"].wall
        bare, pandas = spent["bare (polars)"].wall, spent["plain pandas"].wall
        print(f"coldwork over bare:   {mine / bare:.2f} (wanted under 4, aimed at 2)")
        print(f"pandas over coldwork: {pandas / mine:.2f} (pandas writes CSV alone)")
        out = sum(p.stat().st_size for p in (into / "MILLION").glob("coupons.*")) / 1e6
        print(f"{out:.0f} MB of coupons written")


def write_batch(folder: Path, coupons: int, forms: list[str]) -> None:
    """Write a batch of copper whose hardness runs from annealed to heavily rolled."""
    rng = np.random.default_rng(7)
    tables = "[" + ", ".join(f'"{form}"' for form in forms) + "]"
    (folder / "batch.toml").write_text(SHEET.format(tables=tables))
    place = np.arange(coupons)
    ids = pa.array([f"C{i:07d}" for i in range(coupons)], pa.string())
    lots = [f"L{i:03d}" for i in range(100)]
    listed = pa.table(
        {
            "coupon_id": ids,
            "lot_id": taken(lots, place * 100 // coupons),
            "condition": taken(["r10", "r20", "r30", "r40"], place % 4),
            "prior_true_strain": pa.array(np.round(0.1 + place % 4 / 10, 2)),
            "thickness_mm": pa.array(np.full(coupons, 2.0)),
        }
    )
    pacsv.write_csv(listed, folder / "coupons.csv", PLAIN_CSV)
    rows = coupons * INDENTS
    hv = np.repeat(70 + 40 * rng.random(coupons), INDENTS)
    hv = hv * (1 + 0.01 * rng.standard_normal(rows))
    d = np.sqrt(0.189093 * 98.07 / hv) * 1000
    indents = pa.table(
        {
            "coupon_id": ids.take(pa.array(np.repeat(place, INDENTS), pa.int64())),
            "indent_no": pa.array(np.tile(np.arange(1, INDENTS + 1), coupons)),
            "force_n": pa.array(np.full(rows, 98.07)),
            "d1_um": pa.array(np.round(d + 0.3, 1)),
            "d2_um": pa.array(np.round(d - 0.3, 1)),
            "edge_mm": pa.array(np.round(2 + 3 * rng.random(rows), 2)),
            "dwell_s": pa.array(np.full(rows, 12.0)),
            "operator": pa.repeat("operator-1", rows),
        }
    )
    pacsv.write_csv(indents, folder / "indents.csv", PLAIN_CSV)


def taken(words: list[str], place: NDArray[np.int64]) -> pa.StringArray:
    """Give the word at each place."""
    return pa.array(words, pa.string()).take(pa.array(place, pa.int64()))


def timed(command: list[str]) -> Spent:
    """Run a process to its end."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    started = time.perf_counter()
    code = (
        "import resource, subprocess, sys; r = subprocess.run(sys.argv[1:]).returncode; "
        "print(resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss); sys.exit(r)"
    )
    ended = subprocess.run(
        [sys.executable, "-c", code, *command], capture_output=True, text=True, check=False
    )
    wall = time.perf_counter() - started
    if ended.returncode:
        sys.exit(f"{command[:6]} ended with {ended.returncode}\n{ended.stderr}")
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    cpu = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    return Spent(wall, cpu, int(ended.stdout.split()[-1]) / 1024)


if __name__ == "__main__":
    main()
