"""The batch *steel-wire*: low-carbon rod, drawn to six sizes and pulled.

Four pieces of each size. Three of them were logged at points that all lie near a
plastic strain of 0.002, which are repeats of one another; the extensometer of the
fourth was set to log less often, so that its stress has to be read between points.
"""

from datetime import datetime, timedelta
from itertools import pairwise
from math import log
from typing import Final

import numpy as np

from scenario.metal import Metal
from scenario.tables import YARD_TIME, Table, clock, normals

__all__ = ["STEEL", "files"]

FOLDER: Final = "steel-wire"
SEED: Final = 2026_08_14

STEEL: Final = Metal(82e9, 0.2482e-9, 0.293, 7874.0, 55.845e-3, 2.75 * 0.30, 150e6)
DRAWN: Final = (  # drawing strain ln(A0 / A) [1], flow stress at 0.002 [MPa]
    *((0.0, 230.0), (0.2, 430.0), (0.5, 540.0)),
    *((1.0, 660.0), (2.0, 850.0), (3.0, 1010.0)),
)
NEAR: Final = (0.0017, 0.0019, 0.0020, 0.0021, 0.0023)  # plastic strains that are repeats
FAR: Final = (0.0006, 0.0012, 0.0032, 0.0051)  # and some that are not
HARDENING: Final = 0.01  # flow stress goes with plastic strain to this power, near 0.002
SCATTER: Final = 0.005  # relative standard deviation of one point
TESTER_BIAS: Final = -0.002

_SHEET: Final = """\
# Low-carbon steel wire, an invented product of an invented wire shop: one rod, drawn
# through six sizes without an anneal and pulled. Strengths are proof stresses at a
# plastic strain of 0.002.
# The truth behind the batch is in truth.csv; generate.py made it.

[batch]
id = "SW-2026-07"
laboratory = "laboratory beside the strip mill"
timezone = "UTC"                     # every time in the table says its own zone

[material]
name = "alpha-iron"
shear_modulus_gpa = { value = 82.0, u = 2.0 }
burgers_vector_nm = 0.2482
poisson_ratio = { value = 0.293, u = 0.01 }
mass_density_kg_per_m3 = { value = 7874.0, u = 5.0 }

[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"

[strength]
route = "flow"
baseline_mpa = { value = 150.0, u = 10.0, source = "rod after a long anneal, with its grain size" }

[flow]
plastic_strain = 0.002

[hardening]
law = "constant"
taylor_factor = { value = 2.75, u = 0.12, source = "pencil glide" }
coefficient = { value = 0.30, factor = 1.2 }

[line_energy]
outer_radius = "spacing"

[character]                          # not measured: as many screws as edges
screw = 0.5
edge = 0.5

[uncertainty]
coverage = 0.95
repeatability = "pooled"

[[testers]]
id = "P1"                            # the tensile machine's load cell
bias_rel = -0.002
u_rel = 0.003
valid_until = 2027-01-31

[[limits]]                           # what a customer asks for, against all uncertainty
id = "drawn-enough"
quantity = "stored_energy_j_per_mol"
lower = 5.0
rule = "probability"
at_least = 0.90
basis = "total"
"""


def files() -> dict[str, str]:
    """Make the batch: path and content of every file."""
    return {
        f"{FOLDER}/batch.toml": _SHEET,
        f"{FOLDER}/coupons.csv": _coupons(),
        f"{FOLDER}/flow_stress.csv": _points(),
        f"{FOLDER}/truth.csv": _truth(),
    }


def _name(size: int, piece: int) -> str:
    return f"SW{size}{'abcd'[piece]}"


def _condition(strain: float) -> str:
    return f"drawn to {strain:g}" if strain else "rod"


def _work(size: int) -> float:
    """Give the work [J/m^3] of drawing: trapezia below the flow stresses so far."""
    steps = pairwise(DRAWN[: size + 1])
    return 1e6 * sum((e1 - e0) * (s0 + s1) / 2.0 for (e0, s0), (e1, s1) in steps)


def _coupons() -> str:
    table = Table(
        (
            *("coupon_id", "lot_id", "condition", "prior_true_strain"),
            *("prior_plastic_work_j_per_m3", "grain_size_um", "sampled_at"),
        )
    )
    for size, (strain, _) in enumerate(DRAWN):
        for piece in range(4):
            table.add(
                {
                    "coupon_id": _name(size, piece),
                    "lot_id": "rod 22",
                    "condition": _condition(strain),
                    "prior_true_strain": f"{strain:g}",
                    "prior_plastic_work_j_per_m3": f"{float(f'{_work(size):.4g}'):.0f}",
                    "grain_size_um": "18",
                    "sampled_at": "2026-08-10",
                }
            )
    return table.text()


def _points() -> str:
    table = Table(
        (
            *("coupon_id", "reading_no", "plastic_strain", "flow_stress_mpa"),
            *("strain_rate_per_s", "temperature_c", "measured_at", "operator", "tester"),
        )
    )
    bits = np.random.PCG64(SEED)
    begin = datetime(2026, 8, 12, 8, 20, tzinfo=YARD_TIME)
    for size, (_, stress) in enumerate(DRAWN):
        for piece in range(4):
            strains = FAR if piece == 3 else NEAR
            draws = normals(bits, 2 * len(strains)).reshape(len(strains), 2)
            for i, (strain, (spread, warmth)) in enumerate(zip(strains, draws, strict=True)):
                true = stress * (1.0 + HARDENING * log(strain / 0.002))
                read = true * (1.0 + TESTER_BIAS) * (1.0 + SCATTER * spread)
                table.add(
                    {
                        "coupon_id": _name(size, piece),
                        "reading_no": str(i + 1),
                        "plastic_strain": f"{strain:.4f}",
                        "flow_stress_mpa": f"{read:.1f}",
                        "strain_rate_per_s": "0.00025",
                        "temperature_c": f"{23.0 + 0.3 * warmth:.1f}",
                        "measured_at": clock(begin + timedelta(seconds=4 * i)),
                        "operator": "operator-3" if size < 3 else "operator-1",
                        "tester": "P1",
                    }
                )
            begin += timedelta(minutes=12)
    return table.text()


def _truth() -> str:
    table = Table(
        (
            *("condition", "prior_true_strain", "flow_stress_mpa", "dislocation_stress_mpa"),
            *("dislocation_density_per_m2", "stored_energy_j_per_mol"),
        )
    )
    for strain, stress in DRAWN:
        carried = stress * 1e6 - STEEL.baseline
        density = STEEL.density(carried)
        energy = STEEL.stored_energy(density) * STEEL.molar_mass / STEEL.mass_density
        table.add(
            {
                "condition": _condition(strain),
                "prior_true_strain": f"{strain:g}",
                "flow_stress_mpa": f"{stress:g}",
                "dislocation_stress_mpa": f"{carried / 1e6:g}",
                "dislocation_density_per_m2": f"{density:.4e}",
                "stored_energy_j_per_mol": f"{energy:.3f}",
            }
        )
    return table.text()
