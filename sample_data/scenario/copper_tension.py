"""The batch *copper-tension*: strips of the same copper, rolled by five reductions and pulled.

Two coupons of each. The machine leaves one text file a coupon: a few lines about the
coupon, then time, load in kN and the travel of its crosshead in mm, with decimal commas.
The copper hardens by the law of Voce from where rolling left it, so that every result is
known. The seating of the grips bends the start of each curve, load and travel are noisy,
and one coupon slipped in its grips.
"""

from collections.abc import Callable
from datetime import datetime, timedelta
from math import exp, expm1, log1p
from typing import Final

import numpy as np
from numpy.typing import NDArray

from scenario.metal import Metal, hardened, hardening_work, rolling_strain
from scenario.tables import Table, normals

__all__ = ["COPPER", "files"]

Floats = NDArray[np.float64]

FOLDER: Final = "copper-tension"
SEED: Final = 2026_10_12

COPPER: Final = Metal(44e9, 0.2556e-9, 0.343, 8960.0, 63.546e-3, 3.06 * 0.30, 50e6)
INITIAL_HARDENING: Final = 1700e6  # theta_0 of the dislocation stress [Pa]
SATURATION: Final = 320e6  # sigma_s [Pa]
REDUCTIONS: Final = (0.0, 0.05, 0.10, 0.15, 0.20)
WIDTH: Final = 12.50  # [mm]
THICKNESS: Final = 1.60
LENGTH: Final = 75.0  # between the grips [mm]
STIFFNESS: Final = 30e9  # slope of coupon and machine together [Pa]
TOE: Final = 3e-4  # strain that seating adds [1]
SEATED: Final = 0.9e6  # stress at which 63 % of it has come [Pa]
LOAD_NOISE: Final = 0.4  # of one point [N]
TRAVEL_NOISE: Final = 0.25e-3  # [mm]
PIECES: Final = "ab"
SLIPPED: Final = "CT10b"

_SHEET: Final = """\
# Copper strip of the invented mill, rolled by 0 to 20 % and pulled: two coupons of each. The
# machine's own files come in through a layout. The flow stress is read from each curve, and
# evolution.csv follows density and stored energy along it; the theta_0 and sigma_s that
# tensile.csv tells are those that the sheet of copper-strip unwinds with.
# The truth behind the batch is in truth.csv; generate.py made it.

[batch]
id = "CT-2026-12"
laboratory = "laboratory beside the strip mill"
timezone = "UTC"

[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5, source = "house value for this strip" }
burgers_vector_nm = 0.2556
poisson_ratio = { value = 0.343, u = 0.01 }
mass_density_kg_per_m3 = { value = 8960.0, u = 20.0 }

[files]
coupons = "coupons.csv"
curves = { path = "curves/*.txt", layout = "puller-1.toml" }

[strength]
route = "flow"
baseline_mpa = { value = 50.0, u = 5.0, source = "strip after a long anneal, with its grain size" }

[flow]
plastic_strain = 0.002

[tensile]
mode = "tension"
strain_from = "crosshead"            # its slope is the machine's, and no modulus
reported_strains = [0.002, 0.01, 0.03, 0.05, 0.10, 0.15, 0.20, 0.25, 0.30]
force_u_rel = 0.0029                 # class 0.5 of the machine
extension_u_rel = 0.0058             # class 1 of its travel

[hardening]
law = "constant"
taylor_factor = { value = 3.06, u = 0.15 }
coefficient = { value = 0.30, factor = 1.2 }

[character]                          # not measured: as many screws as edges
screw = 0.5
edge = 0.5
"""

_LAYOUT: Final = """\
# How puller 1 writes a test, one coupon to a file.

[layout]
id = "puller-1"
fills = "curves"

[text]
encoding = "cp1252"
delimiter = ";"
decimal = ","
comment = "#"
table_starts_after = "TEST"
units_line = true
ends_before = [{ line = "END OF TEST", is = "other" }]

[above]
coupon_id = "piece:"

[columns]
time_s = { from = "clock", unit = "s" }
force_n = { from = "load", unit = "kN" }
crosshead_mm = { from = "travel", unit = "mm" }
"""


def files() -> dict[str, str]:
    """Make the batch: path and content of every file."""
    made = {
        f"{FOLDER}/batch.toml": _SHEET,
        f"{FOLDER}/puller-1.toml": _LAYOUT,
        f"{FOLDER}/coupons.csv": _coupons(),
        f"{FOLDER}/truth.csv": _truth(),
    }
    bits = np.random.PCG64(SEED)
    begin = datetime(2026, 10, 12, 8, 5)  # noqa: DTZ001 - a clock on the wall
    for reduction in REDUCTIONS:
        for piece in PIECES:
            name = _name(reduction, piece)
            made[f"{FOLDER}/curves/{name}.txt"] = _curve(name, _Strip(reduction), bits, begin)
            begin += timedelta(minutes=17)
    return made


class _Strip:
    """The copper after a reduction: its curve in closed form. [Pa], [1]."""

    def __init__(self, reduction: float) -> None:
        self.prior = rolling_strain(reduction)
        rest = COPPER.stress(1e12)
        self.start = hardened(rest, self.prior, INITIAL_HARDENING, SATURATION)
        self.prior_work = COPPER.baseline * self.prior + hardening_work(
            rest, self.prior, INITIAL_HARDENING, SATURATION
        )

    def stress(self, plastic: float) -> float:
        """Give the true stress after a true plastic strain of the test."""
        carried = hardened(self.start, plastic, INITIAL_HARDENING, SATURATION)
        return COPPER.baseline + carried

    def rate(self, plastic: float) -> float:
        """Give the hardening rate there."""
        carried = self.stress(plastic) - COPPER.baseline
        return INITIAL_HARDENING * (1.0 - carried / SATURATION)

    def work(self, plastic: float) -> float:
        """Give the plastic work [J/m^3] of the test up to there."""
        carried = hardening_work(self.start, plastic, INITIAL_HARDENING, SATURATION)
        return COPPER.baseline * plastic + carried

    def drawn(self, plastic: float) -> tuple[float, float]:
        """Give engineering stress and strain, the machine's own stretch in the strain."""
        sigma = self.stress(plastic)
        true = plastic + sigma / STIFFNESS
        return sigma * exp(-true), expm1(true)

    @property
    def elastic(self) -> float:
        """Engineering strain at which it begins to yield."""
        return _root(lambda e: STIFFNESS * e * (1.0 + e) - self.stress(_at(e)), 0.0, 0.05)

    @property
    def uniform(self) -> float:
        """True plastic strain at the greatest force (Considere 1885)."""
        return _root(
            lambda p: self.stress(p) - self.rate(p) * (1.0 - self.stress(p) / STIFFNESS), 0.0, 1.0
        )

    def proof(self, offset: float) -> float:
        """Engineering stress at which the parallel line meets the curve."""

        def gap(plastic: float) -> float:
            s, e = self.drawn(plastic)
            return STIFFNESS * (e - offset) - s

        return self.drawn(_root(gap, _at(self.elastic), 4.0 * offset))[0]


def _at(e: float) -> float:
    """Plastic strain on the elastic line, which is straight in engineering terms."""
    return log1p(e) - e * (1.0 + e)


def _root(function: Callable[[float], float], low: float, high: float) -> float:
    """Halve until nothing is left to halve; the function rises."""
    for _ in range(200):
        middle = (low + high) / 2.0
        low, high = (low, middle) if function(middle) > 0.0 else (middle, high)
    return (low + high) / 2.0


def _name(reduction: float, piece: str) -> str:
    return f"CT{100.0 * reduction:02.0f}{piece}"


def _condition(reduction: float) -> str:
    return f"rolled {100.0 * reduction:.0f} %" if reduction else "annealed"


def _coupons() -> str:
    table = Table(
        (
            *("coupon_id", "lot_id", "condition", "prior_true_strain"),
            *("prior_plastic_work_j_per_m3", "grain_size_um", "sampled_at"),
            *("gauge_length_mm", "width_mm", "thickness_mm"),
        )
    )
    for reduction in REDUCTIONS:
        strip = _Strip(reduction)
        for piece in PIECES:
            table.add(
                {
                    "coupon_id": _name(reduction, piece),
                    "lot_id": "coil 419",
                    "condition": _condition(reduction),
                    "prior_true_strain": f"{strip.prior:.4f}",
                    "prior_plastic_work_j_per_m3": f"{float(f'{strip.prior_work:.4g}'):.0f}",
                    "grain_size_um": "25",
                    "sampled_at": "2026-10-09",
                    "gauge_length_mm": f"{LENGTH:.1f}",
                    "width_mm": f"{WIDTH:.2f}",
                    "thickness_mm": f"{THICKNESS:.2f}",
                }
            )
    return table.text()


def _points(strip: _Strip) -> tuple[Floats, Floats]:
    """Give engineering stress and strain of the points that the machine logs, up to the break."""
    elastic = np.linspace(0.0, strip.elastic, 110, endpoint=False)
    first, end = _at(strip.elastic), strip.uniform
    knee = first + np.geomspace(1e-6, 0.006, 70)
    rest = np.linspace(0.0062, 1.22 * end, int(60 + 700 * end))
    plastic = np.concatenate([knee, rest])
    drawn = np.array([strip.drawn(float(p)) for p in plastic])
    necked = np.maximum(plastic / end - 1.0, 0.0)
    s = np.concatenate([STIFFNESS * elastic, drawn[:, 0] * (1.0 - 3.0 * necked**2)])
    return s, np.concatenate([elastic, drawn[:, 1]])


def _slip(s: Floats, e: Floats) -> tuple[Floats, Floats]:
    """Let the grips slip once, early in the plastic part: the load falls, the travel goes on."""
    at = 210
    load = s.copy()
    length = 5
    load[at : at + length] *= np.array([0.97, 0.90, 0.84, 0.90, 0.96])
    travel = e.copy()
    travel[at:] += 0.0045 * np.minimum(np.arange(1.0, s.size - at + 1.0) / length, 1.0)
    return load, travel


def _curve(name: str, strip: _Strip, bits: np.random.PCG64, begin: datetime) -> str:
    s, e = _points(strip)
    e = e + TOE * -np.expm1(-s / SEATED)
    if name == SLIPPED:
        s, e = _slip(s, e)
    noise = normals(bits, 2 * s.size).reshape(2, s.size)
    load = s * WIDTH * THICKNESS * 1e-6 + LOAD_NOISE * noise[0]  # [N]
    travel = e * LENGTH + TRAVEL_NOISE * noise[1]
    clock = np.where(e < 0.01, e / 0.00025, 40.0 + (e - 0.01) / 0.002)  # ISO 6892-1 method A
    head = (
        "# puller 1",
        f"piece:;{name}",
        "by:;operator-3",
        f"begun:;{begin:%d.%m.%Y %H:%M}",
        "TEST",
        "clock;load;travel",
        "s;kN;mm",
    )
    rows = (
        f"{t:.2f};{f / 1e3:.5f};{x:.4f}".replace(".", ",")
        for t, f, x in zip(clock, load, travel, strict=True)
    )
    return "".join(f"{line}\n" for line in (*head, *rows, "END OF TEST;;"))


def _truth() -> str:
    table = Table(
        (
            *("condition", "prior_true_strain", "proof_stress_0_2_mpa", "tensile_strength_mpa"),
            *("uniform_elongation", "uniform_plastic_strain", "work_to_uniform_strain_j_per_m3"),
            *("initial_hardening_mpa", "saturation_stress_mpa", "flow_stress_mpa"),
            *("dislocation_density_per_m2", "stored_energy_j_per_g"),
        )
    )
    for reduction in REDUCTIONS:
        strip = _Strip(reduction)
        end = strip.uniform
        top, at_top = strip.drawn(end)
        flow = strip.stress(0.002)
        density = COPPER.density(flow - COPPER.baseline)
        energy = COPPER.stored_energy(density) / COPPER.mass_density / 1e3
        table.add(
            {
                "condition": _condition(reduction),
                "prior_true_strain": f"{strip.prior:.4f}",
                "proof_stress_0_2_mpa": f"{strip.proof(0.002) / 1e6:.3f}",
                "tensile_strength_mpa": f"{top / 1e6:.3f}",
                "uniform_elongation": f"{at_top - top / STIFFNESS:.6f}",
                "uniform_plastic_strain": f"{end:.6f}",
                "work_to_uniform_strain_j_per_m3": f"{strip.work(end):.5e}",
                "initial_hardening_mpa": f"{INITIAL_HARDENING / 1e6:g}",
                "saturation_stress_mpa": f"{SATURATION / 1e6:g}",
                "flow_stress_mpa": f"{flow / 1e6:.3f}",
                "dislocation_density_per_m2": f"{density:.4e}",
                "stored_energy_j_per_g": f"{energy:.6f}",
            }
        )
    return table.text()
