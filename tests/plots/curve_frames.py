"""Frames of invented curves, as the plots get them: strips of a metal that hardens by Voce.

Nothing is tested against these numbers; they only have to look like a batch.
"""

from dataclasses import replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray
from tests.plots.frames import CONTEXT, ODD_NAMES, Batch

from coldwork.reduce.picture import thinned

FloatArray = NDArray[np.float64]

SLOPE = 120e3  # MPa
STRAINS = (0.002, 0.01, 0.02, 0.05, 0.1, 0.15, 0.2, 0.25)
PRIOR = (0.0, 0.06, 0.12, 0.19, 0.26)
TAYLOR = 10.32e-6  # M alpha G b of copper [MPa m]
GRAVE = "grip-slip;time-standing"


def curves(n: int, *, odd: bool = False, strains: bool = True, points: int = 10_000) -> Batch:
    """Make a batch of `n` pulled coupons; the third slipped, the fourth was never pulled."""
    random = np.random.default_rng(n)
    ids = [f"CT{int(100 * PRIOR[i % 5]):02d}-{i // 5 + 1}" for i in range(n)]
    if odd:
        ids[: min(n, len(ODD_NAMES))] = ODD_NAMES[:n]
    tensile, evolution, lines, rates = [], [], [], []
    for i, name in enumerate(ids):
        prior = PRIOR[i % 5]
        start = 50.0 + 320.0 - 311.0 * np.exp(-5.31 * prior)
        wild = 1.0 + 0.02 * random.standard_normal()
        row = {"coupon_id": name, "points_used": 0 if n > 3 and i == 3 else points, "flags": ""}
        if not row["points_used"]:
            tensile.append(row)
            evolution += _states(name, prior, None, wild, strains=strains)
            continue
        strain, stress = _curve(start, wild, points, random)
        for part, upto in (("whole", strain.size), ("yield", int((strain < 0.025).sum()))):
            few = thinned(strain[:upto], stress[:upto])
            lines.append(
                pd.DataFrame(
                    {
                        "coupon_id": name,
                        "part": part,
                        "strain": strain[few],
                        "stress_mpa": stress[few],
                    }
                )
            )
        if n > 2 and i == 2:
            tensile.append(row | {"flags": GRAVE})
            evolution += _states(name, prior, None, wild, strains=strains)
            continue
        top = int(np.argmax(stress))
        theta, limit = 1965.0 * wild, 370.0 * wild
        tensile.append(
            row
            | {
                "proof_stress_0_2_mpa": start + 4.0,
                "tensile_strength_mpa": stress[top],
                "elongation_at_maximum_force": strain[top],
                "hardening_at_zero_stress_mpa": theta,
                "stress_at_zero_hardening_mpa": limit,
            }
        )
        true = np.linspace(start, 0.8 * limit, 80)
        rate = theta * (1.0 - true / limit) + 25.0 * random.standard_normal(true.size)
        rates.append(
            pd.DataFrame({"coupon_id": name, "stress_mpa": true, "rate_mpa": rate, "u_mpa": 25.0})
        )
        evolution += _states(name, prior, start, wild, strains=strains)
    drawn = [name for name, row in zip(ids, tensile, strict=True) if row["points_used"]]
    frames = {
        "tensile": pd.DataFrame(tensile),
        "evolution": pd.DataFrame(evolution),
        "curve_lines": pd.concat(lines, ignore_index=True),
        "curve_slopes": pd.DataFrame({"coupon_id": drawn, "slope_mpa": SLOPE}),
        "curve_rates": pd.concat(rates, ignore_index=True),
    }
    return Batch(frames, replace(CONTEXT, route="flow", limits=()))


def _curve(
    start: float, wild: float, points: int, random: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    plastic = np.linspace(0.0, 0.4 - 0.001 * start, points)
    true = wild * (370.0 - (370.0 - start) * np.exp(-5.31 * plastic))
    stress = true * np.exp(-plastic) + 0.5 * random.standard_normal(points)
    rise = np.linspace(0.0, stress[0], points // 20)
    strain = np.concatenate([rise / SLOPE, plastic + stress / SLOPE])
    return strain, np.concatenate([rise, stress])


def _states(
    name: str, prior: float, start: float | None, wild: float, *, strains: bool
) -> list[dict[str, object]]:
    states = []
    for strain in STRAINS:
        row: dict[str, object] = {"coupon_id": name, "test_strain": strain}
        row["prior_true_strain"] = prior if strains else np.nan
        if start is None:
            row["reason"] = "curve not trusted"
        elif strain > 0.3 - prior:
            row["reason"] = "beyond uniform strain"
        else:
            stress = wild * (320.0 - (370.0 - start) * np.exp(-5.31 * strain))
            density = (stress / TAYLOR) ** 2
            row |= {
                "dislocation_density_per_m2": density,
                "stored_energy_j_per_g": 1.6e-16 * density,
            }
            row["stored_fraction_of_work"] = 0.02 + 0.01 * np.exp(-10.0 * (strain + prior))
            for column in list(row):
                if column.startswith(("disl", "stored")):
                    value = float(str(row[column]))
                    row |= {f"u_{column}": 0.4 * value, f"u_own_{column}": 0.06 * value}
                    row |= {f"lower_{column}": 0.45 * value, f"upper_{column}": 2.2 * value}
        states.append(row)
    return states
