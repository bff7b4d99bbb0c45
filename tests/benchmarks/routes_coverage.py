"""How often two honest routes are said to disagree, and how often their joined interval holds.

    python tests/benchmarks/routes_coverage.py [COUPONS] [SEED]

Every coupon is a batch of its own: constraint factor, baseline and the indent's strain are
drawn anew about what the sheet states, the metal hardens after Voce, and hardness and flow
stress are read with scatter. What the program makes of the two is counted: 4 to 6 % of E_n
above 1 is aimed at, at a coverage of 95 %.
"""

import sys
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pandas as pd

from coldwork.jobs.run import run

THETA, LIMIT = 1700.0, 320.0  # of the dislocation stress [MPa]
BASELINE, CONSTRAINT, STRAIN = 50.0, 3.0, 0.08
INDENTS, POINTS = 5, 3
KGF = 9.80665

SHEET = """
[batch]
id = "ROUTES"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "both"
baseline_mpa = {{ value = {baseline}, u = {u_baseline} }}
[indentation]
constraint_factor = {{ value = {constraint}, u = {u_constraint} }}
representative_strain = {{ value = {strain}, u = {u_strain} }}
{hardening}
[flow]
plastic_strain = {plastic}
[hardening]
coefficient = 0.3
taylor_factor = 3.06
[character]
screw = 0.5
edge = 0.5
[uncertainty]
repeatability = "own"
[output]
detail = "summary"
"""
VOCE = f"initial_hardening_mpa = {THETA}\nsaturation_stress_mpa = {LIMIT}"


@dataclass(frozen=True)
class Case:
    """What is uncertain, by how much; and how the two come to one strain."""

    name: str
    u_constraint: float
    u_baseline: float
    scatter: float  # of an indent, relative
    noise: float  # of a point, relative
    unwound: bool = True


CASES = (
    Case("constants as in the README", 0.15, 15.0, 0.010, 0.004),
    Case("scatter alone", 0.0, 0.0, 0.010, 0.010),
    Case("scatter as large as constants", 0.03, 5.0, 0.020, 0.015),
    Case("baseline alone, much scatter", 0.0, 30.0, 0.020, 0.010),
    Case("at one strain, not unwound", 0.15, 15.0, 0.010, 0.004, unwound=False),
)


def hardened(stress: float, strain: np.ndarray | float) -> np.ndarray:
    """Dislocation stress after a strain of the test (Voce 1948)."""
    return np.asarray(LIMIT - (LIMIT - stress) * np.exp(-THETA * np.asarray(strain) / LIMIT))


def simulate(case: Case, coupons: int, seed: int, folder: Path) -> tuple[float, float, float]:
    """Give the share of E_n above 1, of truths held, and the median weight of the indents."""
    random = np.random.default_rng(seed)
    u_strain = 0.005 if case.unwound else 0.0
    plastic = 0.002 if case.unwound else STRAIN
    truth = 200.0
    strain = STRAIN + u_strain * random.standard_normal(coupons)
    baseline = BASELINE + case.u_baseline * random.standard_normal(coupons)
    constraint = CONSTRAINT + case.u_constraint * random.standard_normal(coupons)
    hardness = constraint * (hardened(truth, strain) + baseline) / KGF
    stress = hardened(truth, plastic) + baseline
    read = hardness[:, None] * (1.0 + case.scatter * random.standard_normal((coupons, INDENTS)))
    seen = stress[:, None] * (1.0 + case.noise * random.standard_normal((coupons, POINTS)))
    names = np.array([f"c{i}" for i in range(coupons)])
    pd.DataFrame({"coupon_id": names}).to_csv(folder / "coupons.csv", index=False)

    def long(values: np.ndarray, number: str, column: str, **more: float) -> pd.DataFrame:
        each = values.shape[1]
        return pd.DataFrame(
            {
                "coupon_id": np.repeat(names, each),
                number: np.tile(np.arange(1, each + 1), coupons),
                column: values.ravel(),
            }
            | more
        )

    indents = long(read, "indent_no", "hardness", force_n=98.07)
    indents.to_csv(folder / "indents.csv", index=False)
    points = long(seen, "reading_no", "flow_stress_mpa", plastic_strain=plastic)
    points.to_csv(folder / "flow_stress.csv", index=False)
    text = SHEET.format(
        baseline=BASELINE,
        u_baseline=case.u_baseline,
        constraint=CONSTRAINT,
        u_constraint=case.u_constraint,
        strain=STRAIN,
        u_strain=u_strain,
        plastic=plastic,
        hardening=VOCE if case.unwound else "",
    )
    (folder / "batch.toml").write_text(text, encoding="utf-8")
    path = run(folder, folder.parent / "results", plots=False).path
    routes = pd.read_csv(path / "routes.csv")
    found = pd.read_csv(path / "coupons.csv")
    state = truth if case.unwound else float(hardened(truth, STRAIN))
    lower = found["lower_dislocation_stress_mpa"].to_numpy()
    upper = found["upper_dislocation_stress_mpa"].to_numpy()
    joined = np.isfinite(lower)
    held = (lower <= state) & (state <= upper)
    return (
        float((routes["normalised_error"] > 1.0).mean()),
        float(held[joined].mean()),
        float(routes["weight_indent"].median()),
    )


def main() -> None:
    coupons = int(sys.argv[1]) if len(sys.argv) > 1 else 5000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else 20261
    print(f"{coupons} coupons, seed {seed}, numpy {np.__version__}")
    for case in CASES:
        with TemporaryDirectory() as scratch:
            (Path(scratch) / "batch").mkdir()
            apart, held, weight = simulate(case, coupons, seed, Path(scratch) / "batch")
        print(
            f"{case.name:32} E_n above 1: {apart:6.2%}   joined interval holds: {held:6.2%}"
            f"   median weight of indents {weight:.2f}"
        )


if __name__ == "__main__":
    main()
