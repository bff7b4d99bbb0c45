"""The batch *copper-strip*: coupons of two coils, cut after each pass and indented.

Seven reductions, five coupons of each, seven indents on each coupon. They were
tested in five rounds through the whole schedule rather than pass by pass, so that a
drift of the tester could not pass for an effect of rolling.
"""

from datetime import datetime, timedelta
from typing import Final

import numpy as np

from scenario.metal import (
    KGF_PER_MM2,
    Metal,
    hardened,
    hardening_work,
    rolling_strain,
    vickers_diagonal,
)
from scenario.tables import YARD_TIME, Table, clock, normals

__all__ = ["COPPER", "files"]

FOLDER: Final = "copper-strip"
SEED: Final = 2026_07_31

COPPER: Final = Metal(44e9, 0.2556e-9, 0.343, 8960.0, 63.546e-3, 3.06 * 0.30, 50e6)
INITIAL_HARDENING: Final = 1700e6  # Pa
SATURATION: Final = 320e6  # Pa
ANNEALED: Final = 1e12  # dislocations per m^2 before rolling
INDENT_STRAIN: Final = 0.08
CONSTRAINT: Final = 3.0  # contact pressure over flow stress

REDUCTIONS: Final = (0.00, 0.05, 0.10, 0.15, 0.20, 0.30, 0.40)
ROUNDS: Final = 5
INDENTS: Final = 7
GAUGE: Final = 2.5  # thickness before rolling [mm]
FORCE: Final = 98.07  # HV10 [N]
TESTER_BIAS: Final = 0.004
SCATTER: Final = 0.01  # relative standard deviation of one indent
_COLUMNS: Final = (
    *("coupon_id", "indent_no", "scale", "force_n", "d1_um", "d2_um", "x_mm", "y_mm"),
    *("edge_mm", "dwell_s", "temperature_c", "measured_at", "operator", "tester"),
)

_SHEET: Final = """\
# Copper strip for heat exchangers, an invented product of an invented mill.
# Coils 417 and 418, cut after each pass of the schedule: annealed, then rolled by 5 to
# 40 %. The furnace asks which coupons have stored enough to recrystallise evenly.
# The truth behind the batch is in truth.csv; generate.py made it.

[batch]
id = "CS-2026-31"
laboratory = "laboratory beside the strip mill"
timezone = "UTC"                     # every time in the tables says its own zone

[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5, source = "house value for this strip" }
burgers_vector_nm = 0.2556
poisson_ratio = { value = 0.343, u = 0.01 }
mass_density_kg_per_m3 = { value = 8960.0, u = 20.0 }

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0, source = "tensile tests of annealed strip" }

[indentation]
area = "contact"
constraint_factor = { value = 3.0, u = 0.15 }
representative_strain = { value = 0.08, u = 0.005 }
initial_hardening_mpa = 1700.0       # of the dislocation stress, from a flow curve of this strip;
saturation_stress_mpa = 320.0        # with these two the indent's own strain is unwound
resolution_um = 0.1

[hardening]
law = "constant"
taylor_factor = { value = 3.06, u = 0.15 }
coefficient = { value = 0.30, factor = 1.2 }

[line_energy]
outer_radius = "spacing"
outer_radius_factor = { value = 1.0, factor = 1.5 }
core_radius_b = { value = 1.0, factor = 1.6 }

[character]                          # not measured: as many screws as edges
screw = 0.5
edge = 0.5

[uncertainty]
coverage = 0.95
repeatability = "pooled"

[[testers]]
id = "T1"
bias_rel = 0.004                     # on a reference block near 100 HV10
u_rel = 0.008
valid_until = 2027-03-31

[[limits]]                           # set last year with this method and these constants, so
id = "even-anneal"                   # what all coupons share cancels: basis "own"
quantity = "stored_energy_j_per_g"
lower = 0.068
rule = "guarded"
basis = "own"
"""


def files() -> dict[str, str]:
    """Make the batch: path and content of every file."""
    return {
        f"{FOLDER}/batch.toml": _SHEET,
        f"{FOLDER}/coupons.csv": _coupons(),
        f"{FOLDER}/indents.csv": _indents(),
        f"{FOLDER}/truth.csv": _truth(),
    }


def _name(reduction: float, turn: int) -> str:
    return f"CS{100 * reduction:02.0f}-{turn}"


def _condition(reduction: float) -> str:
    return f"rolled {100 * reduction:.0f} %" if reduction else "annealed"


def _stress(strain: float) -> float:
    """Give the dislocation stress [Pa] after rolling to a strain."""
    start = COPPER.stress(ANNEALED)
    return hardened(start, strain, INITIAL_HARDENING, SATURATION)


def _hardness(reduction: float) -> float:
    """HV number: pressure over contact area, after the strain of rolling and of the indent."""
    stress = COPPER.baseline + _stress(rolling_strain(reduction) + INDENT_STRAIN)
    return CONSTRAINT * stress / KGF_PER_MM2


def _coupons() -> str:
    table = Table(
        (
            *("coupon_id", "lot_id", "condition", "prior_true_strain"),
            *("prior_plastic_work_j_per_m3", "thickness_mm", "grain_size_um"),
            *("u_grain_size_um", "sampled_at"),
        )
    )
    for reduction in REDUCTIONS:
        strain = rolling_strain(reduction)
        start = COPPER.stress(ANNEALED)
        work = hardening_work(start, strain, INITIAL_HARDENING, SATURATION)
        work += COPPER.baseline * strain
        for turn in range(1, ROUNDS + 1):
            table.add(
                {
                    "coupon_id": _name(reduction, turn),
                    "lot_id": "coil 417" if turn <= 3 else "coil 418",
                    "condition": _condition(reduction),
                    "prior_true_strain": f"{strain:.5f}",
                    "prior_plastic_work_j_per_m3": f"{float(f'{work:.4g}'):.0f}",
                    "thickness_mm": f"{GAUGE * (1.0 - reduction):.3f}",
                    "grain_size_um": "20",
                    "u_grain_size_um": "2",
                    "sampled_at": "2026-07-24",
                }
            )
    return table.text()


def _indents() -> str:
    table = Table(_COLUMNS)
    bits = np.random.PCG64(SEED)
    for turn in range(1, ROUNDS + 1):
        late = turn > 3
        day, operator = (29, "operator-2") if late else (28, "operator-1")
        first = datetime(2026, 7, day, 7, 50, tzinfo=YARD_TIME)
        for place, reduction in enumerate(REDUCTIONS):
            before = place + len(REDUCTIONS) * (turn - (4 if late else 1))
            begin = first + timedelta(minutes=16 * before)
            _indent(table, bits, _name(reduction, turn), _hardness(reduction), begin, operator)
    return table.text()


def _indent(
    table: Table, bits: np.random.PCG64, name: str, number: float, begin: datetime, operator: str
) -> None:
    """Add one coupon's indents, in two staggered rows on a piece of 30 mm by 20 mm."""
    draws = normals(bits, 5 * INDENTS).reshape(INDENTS, 5)
    for i, (spread, askew, right, up, warmth) in enumerate(draws):
        read = number * (1.0 + TESTER_BIAS) * (1.0 + SCATTER * spread)
        diagonal = vickers_diagonal(FORCE, read)
        x = 7.5 + 2.5 * i + 0.05 * right
        y = (9.0 if i % 2 else 11.0) + 0.05 * up
        table.add(
            {
                "coupon_id": name,
                "indent_no": str(i + 1),
                "scale": "HV",
                "force_n": f"{FORCE:.2f}",
                "d1_um": f"{diagonal * (1.0 + 0.003 * askew):.1f}",
                "d2_um": f"{diagonal * (1.0 - 0.003 * askew):.1f}",
                "x_mm": f"{x:.2f}",
                "y_mm": f"{y:.2f}",
                "edge_mm": f"{min(x, 30.0 - x, y, 20.0 - y):.2f}",
                "dwell_s": "12",
                "temperature_c": f"{23.0 + 0.3 * warmth:.1f}",
                "measured_at": clock(begin + timedelta(seconds=90 * i)),
                "operator": operator,
                "tester": "T1",
            }
        )


def _truth() -> str:
    table = Table(
        (
            *("condition", "prior_true_strain", "hardness", "flow_stress_mpa"),
            *("dislocation_stress_mpa", "dislocation_density_per_m2", "stored_energy_j_per_g"),
        )
    )
    for reduction in REDUCTIONS:
        strain = rolling_strain(reduction)
        stress = _stress(strain)
        density = COPPER.density(stress)
        energy = COPPER.stored_energy(density) / COPPER.mass_density / 1e3
        table.add(
            {
                "condition": _condition(reduction),
                "prior_true_strain": f"{strain:.5f}",
                "hardness": f"{_hardness(reduction):.2f}",
                "flow_stress_mpa": f"{(stress + COPPER.baseline) / 1e6:.2f}",
                "dislocation_stress_mpa": f"{stress / 1e6:.2f}",
                "dislocation_density_per_m2": f"{density:.4e}",
                "stored_energy_j_per_g": f"{energy:.5f}",
            }
        )
    return table.text()
