"""A day of curves, and one very long one: ``python tests/benchmarks/bench_curves.py [folder]``.

Sixty coupons of 10,000 points each with all plots, then one coupon of 200,000 points whose
numbers are reduced from every point and whose picture is thinned. The metal is invented.
"""

import resource
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import pyarrow as pa
import pyarrow.csv as pacsv
from numpy.typing import NDArray

from coldwork.inputs.sheet import read_method
from coldwork.jobs.gather import gather
from coldwork.jobs.run import run
from coldwork.results.read import read_results

FloatArray = NDArray[np.float64]

COUPONS, POINTS, LONG = 60, 10_000, 200_000
MODULUS, BASELINE, THETA, LIMIT = 118e3, 50.0, 1700.0, 320.0  # MPa
AREA, LENGTH = 20.0, 50.0  # mm2, mm
PRIOR = (0.0, 0.059, 0.122, 0.188)
SHEET = """
[batch]
id = "{name}"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
curves = "curves.csv"
[strength]
route = "flow"
baseline_mpa = {{ value = 50.0, u = 5.0 }}
[tensile]
mode = "tension"
strain_from = "extension"
[character]
screw = 0.5
edge = 0.5
"""


def curve(start: float, points: int, seed: int) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Time, force [N] and extension [mm] of copper that hardens by the law of Voce."""
    first = (BASELINE + start) / MODULUS
    elastic = np.linspace(0.0, first, points // 10, endpoint=False)
    dense = np.linspace(0.0, 0.01, points // 5, endpoint=False)
    plastic = np.concatenate([dense, np.linspace(0.01, 0.36 - 0.001 * start, 7 * points // 10)])
    true = BASELINE + LIMIT - (LIMIT - start) * np.exp(-THETA * plastic / LIMIT)
    total = plastic + true / MODULUS
    s = np.concatenate([MODULUS * elastic, true * np.exp(-total)])
    e = np.concatenate([elastic, np.expm1(total)])
    random = np.random.default_rng(seed)
    force = s * AREA + 0.5 * random.standard_normal(s.size)
    return (
        0.02 * np.arange(s.size, dtype=np.float64),
        force,
        e * LENGTH + 1e-4 * random.standard_normal(s.size),
    )


def batch(folder: Path, name: str, coupons: int, points: int) -> Path:
    """Write a batch folder."""
    folder.mkdir(parents=True)
    (folder / "batch.toml").write_text(SHEET.format(name=name), encoding="utf-8")
    head = "coupon_id,condition,prior_true_strain,prior_plastic_work_j_per_m3,gauge_length_mm,"
    rows, tables = [f"{head}width_mm,thickness_mm"], []
    for i in range(coupons):
        prior = PRIOR[i % len(PRIOR)]
        start = LIMIT - 311.0 * np.exp(-THETA * prior / LIMIT)
        name = f"C{i:03d}"
        rows.append(f"{name},rolled {prior},{prior},{2e8 * prior:.0f},{LENGTH},12.5,1.6")
        clock, force, length = curve(float(start), points, i)
        numbers = {
            "time_s": np.round(clock, 3),
            "force_n": np.round(force, 3),
            "extension_mm": np.round(length, 6),
        }
        columns = {"coupon_id": pa.array([name] * len(clock))}
        tables.append(pa.table(columns | {key: pa.array(x) for key, x in numbers.items()}))
    (folder / "coupons.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    pacsv.write_csv(pa.concat_tables(tables), folder / "curves.csv")
    return folder


def peak() -> float:
    """Greatest memory so far [MB]."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0


def now() -> tuple[float, float]:
    """Wall clock and processor time of this process [s]; on a shared machine the latter holds."""
    return time.perf_counter(), time.process_time()


def timed(words: str, begin: tuple[float, float]) -> None:
    wall, cpu = (b - a for a, b in zip(begin, now(), strict=True))
    print(f"{words:<52} {wall:6.1f} s, processor {cpu:6.1f} s   peak {peak():6.0f} MB")


def main(folder: Path) -> None:
    """Run both, and print what they took."""
    day = batch(folder / "day", "DAY", COUPONS, POINTS)
    size = (day / "curves.csv").stat().st_size / 1e6
    print(f"{COUPONS} coupons of {POINTS} points, {size:.0f} MB")
    begin = now()
    gather(read_method(day))
    timed("read and reduced", begin)
    begin = now()
    run(day, folder / "plain", plots=False)
    timed("processed, tables and records", begin)
    begin = now()
    outcome = run(day, folder / "results")
    timed(f"processed with plots ({outcome.plots})", begin)
    long = batch(folder / "long", "LONG", 1, LONG)
    begin = now()
    outcome = run(long, folder / "results")
    timed(f"one curve of {LONG} points, with plots", begin)
    row = read_results(outcome.path).frames["tensile"].iloc[0]
    theta, limit = row["initial_hardening_mpa"], row["saturation_stress_mpa"]
    print(f"points used {row['points_used']}, theta_0 {theta:.1f}, sigma_s {limit:.2f} MPa")


if __name__ == "__main__":
    if len(sys.argv) > 1:
        main(Path(sys.argv[1]))
    else:
        with tempfile.TemporaryDirectory(prefix="coldwork-bench-") as scratch:
            main(Path(scratch))
