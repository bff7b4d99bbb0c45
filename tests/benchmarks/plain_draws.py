"""Monte Carlo as one would write it in an afternoon: whole arrays, `np.quantile`, no blocks.

What `bench_draws.py` compares with. Same model, same distributions, same eight quantities with
standard deviation and 95 % interval: copper by Vickers indents, unwound, given baseline.

    python tests/benchmarks/plain_draws.py COUPONS.npz OUT.npz [DRAWS]
"""

import sys
import time
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

INPUTS = {  # normal: value, standard uncertainty; SI
    "baseline": (50e6, 5e6),
    "constraint": (3.0, 0.06),
    "strain": (0.08, 0.003),
    "hardening": (1700e6, 60e6),
    "saturation": (320e6, 10e6),
    "taylor": (3.06, 0.10),
    "shear": (44e9, 1.5e9),
    "poisson": (0.34, 0.01),
    "burgers": (0.2556e-9, 0.0002e-9),
    "mass": (8960.0, 20.0),
    "molar": (0.063546, 0.0001),
}
FACTORS = {"alpha": (0.30, 1.2), "outer": (1.0, 1.5), "core": (1.0, 1.6)}  # lognormal


def quantities(
    mean: Floats, u: Floats, freedom: float, draws: int, rng: np.random.Generator
) -> dict[str, Floats]:
    """Draw everything at once; each quantity of shape (coupons, draws)."""
    x = {name: v + s * rng.standard_normal(draws) for name, (v, s) in INPUTS.items()}
    x |= {
        name: v * np.exp(np.log(f) * rng.standard_normal(draws)) for name, (v, f) in FACTORS.items()
    }
    hardness = mean[:, None] + u[:, None] * rng.standard_t(freedom, (len(mean), draws))
    flow = hardness / x["constraint"]
    excess = flow - x["baseline"]
    turn = x["hardening"] * x["strain"] / x["saturation"]
    unwound = excess * np.exp(turn) - x["saturation"] * np.expm1(turn)
    stress = np.where(excess >= x["saturation"], excess, unwound)
    slope = x["taylor"] * x["alpha"] * x["shear"] * x["burgers"]
    density = (np.maximum(stress, 0.0) / slope) ** 2
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = x["outer"] / np.sqrt(density) / (x["core"] * x["burgers"])
        factor = x["shear"] * (1 - 0.5 * x["poisson"]) / (1 - x["poisson"])
        line = factor * x["burgers"] ** 2 / (4 * np.pi) * np.log(ratio)
        stored = np.where(density > 0.0, density * line, 0.0)
    return {
        "hardness": hardness,
        "flow_stress_mpa": stress + x["baseline"],
        "dislocation_stress_mpa": stress,
        "dislocation_density_per_m2": density,
        "line_energy_j_per_m": line,
        "stored_energy_j_per_m3": stored,
        "stored_energy_j_per_mol": stored * x["molar"] / x["mass"],
        "stored_energy_j_per_g": stored / x["mass"],  # in J/kg, as everything is SI,
    }


def main() -> None:
    """Take coupons from a file, write sd and ends to another, print the CPU seconds."""
    given = np.load(sys.argv[1])
    draws = int(sys.argv[3]) if len(sys.argv) > 3 else 10_000
    rng = np.random.default_rng(1)
    begun = time.process_time()
    found: dict[str, Any] = {}
    every = quantities(given["mean"], given["u"], float(given["freedom"]), draws, rng)
    with np.errstate(invalid="ignore"):
        for name, y in every.items():
            low, high = np.quantile(y, [0.025, 0.975], axis=1)
            found[name] = np.stack([y.std(axis=1, ddof=1), low, high])
    spent = time.process_time() - begun
    np.savez(sys.argv[2], **found)
    print(spent)


if __name__ == "__main__":
    main()
