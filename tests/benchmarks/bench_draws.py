"""Draws per CPU second with standard deviation and 95 % interval, beside plain whole-array numpy.

Both take the same coupons (mean hardness, its u and degrees of freedom), the same
distributions and the same eight quantities, each in a process of its own, turn about in one run;
what is timed is from the coupons' table to their ends, without imports. That both find the same
ends, within what random draws allow, is checked. Wanted: 3 times as many draws, aimed at 4.

    python tests/benchmarks/bench_draws.py [coupons] [draws]
"""

import runpy
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import Any, Final

import numpy as np

from coldwork.chain import Start
from coldwork.inputs.method import Draws, Laws
from coldwork.inputs.quantity import Input
from coldwork.interval.combine import Spread
from coldwork.measured import Measured, Value
from coldwork.sampling.drawn import Coupons, Pool
from coldwork.sampling.sampler import Question, sample

QUANTITIES: Final = (
    "hardness",
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "line_energy_j_per_m",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_mol",
    "stored_energy_j_per_g",
)
NAMES: Final = {
    "baseline": "strength.baseline_mpa",
    "constraint": "indentation.constraint_factor",
    "strain": "indentation.representative_strain",
    "hardening": "indentation.initial_hardening_mpa",
    "saturation": "indentation.saturation_stress_mpa",
    "taylor": "hardening.taylor_factor",
    "shear": "material.shear_modulus_gpa",
    "poisson": "material.poisson_ratio",
    "burgers": "material.burgers_vector_nm",
    "mass": "material.mass_density_kg_per_m3",
    "molar": "material.molar_mass_g_per_mol",
    "alpha": "hardening.coefficient",
    "outer": "line_energy.outer_radius_factor",
    "core": "line_energy.core_radius_b",
}
LAWS: Final = Laws(
    route="indent",
    area={"HV": "contact", "HBW": "projected", "HK": "projected"},
    unwinding=True,
    baseline="given",
    taylor="constant",
    elasticity="isotropic",
    outer_radius="spacing",
    angles_deg=(0.0, 90.0),
    fractions=(0.5, 0.5),
    uniform_mix=False,
)
PLAIN: Final = Path(__file__).with_name("plain_draws.py")
FREEDOM: Final = 30.0
SEED: Final = 7


def main() -> None:
    """Run both, compare what they found, print the figures."""
    if sys.argv[1:2] == ["--ours"]:
        ours(Path(sys.argv[2]), Path(sys.argv[3]), int(sys.argv[4]))
        return
    coupons = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    draws = int(sys.argv[2]) if len(sys.argv) > 2 else 10_000
    with tempfile.TemporaryDirectory() as scratch:
        folder = Path(scratch)
        mean = np.linspace(600e6, 1050e6, coupons)
        np.savez(folder / "in.npz", mean=mean, u=0.005 * mean, freedom=FREEDOM)
        plain = [sys.executable, str(PLAIN), str(folder / "in.npz")]
        mine = [sys.executable, __file__, "--ours", str(folder / "in.npz")]
        spent = {"plain numpy": np.inf, "coldwork": np.inf}
        for _ in range(3):  # turn about, the best of each: others use this machine as well
            for name, command in (("plain numpy", plain), ("coldwork", mine)):
                out = str(folder / f"{name}.npz")
                ended = subprocess.run(
                    [*command, out, str(draws)], capture_output=True, text=True, check=True
                )
                spent[name] = min(spent[name], float(ended.stdout))
        apart = disagreement(folder / "plain numpy.npz", folder / "coldwork.npz", draws)
    print(f"{coupons} coupons of {draws} draws, {len(QUANTITIES)} quantities")
    for name, seconds in spent.items():
        print(f"{name:12s} {seconds:7.2f} s CPU  {coupons * draws / seconds / 1e6:6.2f} M draws/s")
    print(
        f"coldwork over plain: {spent['plain numpy'] / spent['coldwork']:.2f} (wanted 3, aimed 4)"
    )
    print(f"ends apart by up to {apart:.2f} of what shared draws allow")
    sys.exit(apart > 1.0)


def ours(given: Path, out: Path, draws: int) -> None:
    """Draw the coupons of a file through the package."""
    table, model = np.load(given), runpy.run_path(str(PLAIN))
    mean, n = table["mean"], len(table["mean"])
    begun = time.process_time()
    inputs = {NAMES[k]: Input(NAMES[k], v, s, "1") for k, (v, s) in model["INPUTS"].items()}
    for k, (v, f) in model["FACTORS"].items():
        u = v * np.log(f)
        inputs[NAMES[k]] = Input(NAMES[k], v, u, "1", shape="lognormal", factor=f)
    values: dict[str, Value] = {k: Measured.of_input(k, x.value) for k, x in inputs.items()}
    for name in ("indentation.intercept_mpa", "line_energy.core_energy"):
        values[name] = np.float64(0.0)
    spreads = {k: Spread(x.u, shared=True, degrees_of_freedom=np.inf) for k, x in inputs.items()}
    own = Spread(table["u"], shared=False, degrees_of_freedom=float(table["freedom"]))
    blank = np.full(n, np.nan)
    start = Start(
        Measured(mean, {"repeatability": np.asarray(1.0)}),
        np.zeros(n, dtype=np.int8),
        blank,
        blank,
        blank,
        blank,
        0.0,
    )
    coupons = Coupons(
        [f"C{i}" for i in range(n)], np.arange(n), start, {**spreads, "repeatability": own}
    )
    everywhere = dict.fromkeys(QUANTITIES, np.ones(n, dtype=bool))
    question = Question(QUANTITIES, 0.95, (), everywhere)
    how = Draws(SEED, draws, adaptive=False, digits=1)
    found = sample(LAWS, how, Pool(SEED, inputs, values, spreads), coupons, question)
    spent = time.process_time() - begun
    table = {q: (found.sd[q], found.ends[q].lower, found.ends[q].upper) for q in QUANTITIES}
    written: dict[str, Any] = {q: np.stack(columns) for q, columns in table.items()}
    np.savez(out, **written)
    print(spent)


def disagreement(one: Path, other: Path, draws: int) -> float:
    """How far the ends lie apart, in units of what two sets of shared draws may differ by.

    Ends of the density's tail are known to about 6 u / sqrt(draws); five of that for the worst of
    many coupons that share their draws.
    """
    a, b = np.load(one), np.load(other)
    worst = 0.0
    for name in QUANTITIES:
        allowed = 5.0 * 6.0 * a[name][0] / np.sqrt(draws)
        for end in (1, 2):
            off = np.abs(a[name][end] - b[name][end]) / allowed
            worst = max(worst, float(np.nanmax(off)) if np.isfinite(off).any() else 0.0)
    return worst


if __name__ == "__main__":
    main()
