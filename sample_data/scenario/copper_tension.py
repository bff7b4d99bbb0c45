"""The batch *copper-tension*: strips of the same copper, rolled by five reductions and pulled.

Two coupons of each. The machine leaves one text file a coupon: a few lines about the
coupon, then time, load in kN, travel of the crosshead and stretch of the gauge length in
mm, with decimal commas. The copper hardens by the law of Voce from where rolling left it,
so that every result is known. Seating bends the start of each curve, load and stretch are
noisy, and one coupon slipped in its grips.
"""

from collections.abc import Callable
from datetime import datetime, timedelta
from math import exp, expm1, log1p
from typing import Final

import numpy as np
from numpy.typing import NDArray

from scenario.metal import Metal, hardened, hardening_work, rolling_strain
from scenario.tables import Table, normals

__all__ = ["COPPER", "MODULUS", "SEATED", "TOE", "Strip", "files", "points"]

Floats = NDArray[np.float64]

FOLDER: Final = "copper-tension"
SEED: Final = 2026_10_12

COPPER: Final = Metal(44e9, 0.2556e-9, 0.343, 8960.0, 63.546e-3, 3.06 * 0.30, 50e6)
INITIAL_HARDENING: Final = 1700e6  # theta_0 of the dislocation stress [Pa]
SATURATION: Final = 320e6  # sigma_s [Pa]
REDUCTIONS: Final = (0.0, 0.05, 0.10, 0.15, 0.20)
WIDTH: Final = 12.50  # [mm]
THICKNESS: Final = 1.60
LENGTH: Final = 50.0  # of the extensometer [mm]
GRIPS: Final = 90.0  # between them [mm]
MACHINE: Final = 25e3  # its stiffness [N/mm]
MODULUS: Final = 2.0 * 44e9 * (1.0 + 0.343)  # of the polycrystal [Pa]
TOE: Final = 1e-4  # strain that seating adds [1]
SEATED: Final = 0.9e6  # stress at which 63 % of it has come [Pa]
LOAD_NOISE: Final = 0.4  # of one point [N]
STRETCH_NOISE: Final = 0.1e-3  # [mm]
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
strain_from = "extension"
reported_strains = [0.002, 0.01, 0.03, 0.05, 0.10, 0.15, 0.20, 0.25, 0.30]
force_u_rel = 0.0029                 # class 0.5 of the machine
extension_u_rel = 0.0058             # class 1 of the extensometer

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

[columns]                            # the travel of the crosshead is passed over
time_s = { from = "clock", unit = "s" }
force_n = { from = "load", unit = "kN" }
extension_mm = { from = "stretch", unit = "mm" }
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
            made[f"{FOLDER}/curves/{name}.txt"] = _curve(name, Strip(reduction), bits, begin)
            begin += timedelta(minutes=17)
    return made


class Strip:
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
        """Give engineering stress and strain."""
        sigma = self.stress(plastic)
        true = plastic + sigma / MODULUS
        return sigma * exp(-true), expm1(true)

    @property
    def elastic(self) -> float:
        """Engineering strain at which it begins to yield."""
        return root(lambda e: MODULUS * e * (1.0 + e) - self.stress(plastic_at(e)), 0.0, 0.05)

    @property
    def uniform(self) -> float:
        """True plastic strain at the greatest force (Considere 1885)."""
        return root(
            lambda p: self.stress(p) - self.rate(p) * (1.0 - self.stress(p) / MODULUS), 0.0, 1.0
        )

    def proof(self, offset: float) -> float:
        """Engineering stress at which the parallel line meets the curve."""

        def gap(plastic: float) -> float:
            s, e = self.drawn(plastic)
            return MODULUS * (e - offset) - s

        return self.drawn(root(gap, plastic_at(self.elastic), 4.0 * offset))[0]


def plastic_at(e: float) -> float:
    """Plastic strain on the elastic line, which is straight in engineering terms."""
    return log1p(e) - e * (1.0 + e)


def root(function: Callable[[float], float], low: float, high: float) -> float:
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
        strip = Strip(reduction)
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


def points(strip: Strip, dense: float = 1.0) -> tuple[Floats, Floats]:
    """Give engineering stress [Pa] and strain of the points that the machine logs.

    Up to the break and a little past it; `dense` says how many there are.
    """
    first, end = plastic_at(strip.elastic), strip.uniform
    last = end + max(0.28 * end, 0.05)
    elastic = np.linspace(0.0, strip.elastic, int(110 * dense), endpoint=False)
    knee = np.linspace(first, 0.006, int(70 * dense))
    rest = np.linspace(0.0062, last, int((100 + 700 * last) * dense))
    plastic = np.concatenate([knee, rest])
    drawn = np.array([strip.drawn(float(p)) for p in plastic])
    necked = np.maximum(plastic - 1.1 * end, 0.0) / (3.0 * last - 3.0 * end)  # slowly at first
    s = np.concatenate([MODULUS * elastic, drawn[:, 0] * (1.0 - necked**4)])
    e = np.concatenate([elastic, drawn[:, 1]])
    broken = np.full(3, e[-1] - s[-1] / MODULUS)
    return np.append(s, np.zeros(3)), np.append(e, broken)


def _slip(s: Floats, e: Floats) -> tuple[Floats, Floats, Floats]:
    """Let the grips slip once: the load falls and comes back, the crosshead goes on.

    Gives stress, strain and what the slip adds to the travel [mm].
    """
    at = 280
    load = s[at] * np.concatenate([[0.95, 0.89, 0.84], np.linspace(0.85, 0.9995, 16)])
    load = np.append(load, np.full(4, s[at]))
    strain = e[at] + (load - s[at]) / MODULUS
    slipped = np.concatenate(
        [np.zeros(at + 1), 0.35 * np.linspace(0.3, 1.0, load.size), np.full(s.size - at - 1, 0.35)]
    )
    return np.insert(s, at + 1, load), np.insert(e, at + 1, strain), slipped


def _curve(name: str, strip: Strip, bits: np.random.PCG64, begin: datetime) -> str:
    s, e = points(strip)
    slipped = np.zeros(s.size)
    if name == SLIPPED:
        s, e, slipped = _slip(s, e)
    rate = np.where(e[1:] < 0.01, 0.00025, 0.002)  # ISO 6892-1, method A [1/s]
    clock = np.append(0.0, np.cumsum(np.abs(np.diff(e)) / rate + 1e-3))
    e = e + TOE * -np.expm1(-s / SEATED)
    noise = normals(bits, 2 * s.size).reshape(2, s.size)
    load = s * WIDTH * THICKNESS * 1e-6 + LOAD_NOISE * noise[0]  # [N]
    stretch = e * LENGTH + STRETCH_NOISE * noise[1]
    travel = e * GRIPS + load / MACHINE + slipped
    head = (
        "# puller 1",
        f"piece:;{name}",
        "by:;operator-3",
        f"begun:;{begin:%d.%m.%Y %H:%M}",
        "TEST",
        "clock;load;travel;stretch",
        "s;kN;mm;mm",
    )
    rows = (
        f"{t:.3f};{f / 1e3:.5f};{far:.3f};{x:.5f}".replace(".", ",")
        for t, f, far, x in zip(clock, load, travel, stretch, strict=True)
    )
    return "".join(f"{line}\n" for line in (*head, *rows, "END OF TEST;;;"))


def _truth() -> str:
    table = Table(
        (
            *("condition", "prior_true_strain", "slope_gpa", "proof_stress_0_2_mpa"),
            "tensile_strength_mpa",
            *("uniform_elongation", "uniform_plastic_strain", "work_to_uniform_strain_j_per_m3"),
            *("initial_hardening_mpa", "saturation_stress_mpa", "flow_stress_mpa"),
            *("dislocation_density_per_m2", "stored_energy_j_per_g"),
        )
    )
    for reduction in REDUCTIONS:
        strip = Strip(reduction)
        end = strip.uniform
        top, at_top = strip.drawn(end)
        flow = strip.stress(0.002)
        density = COPPER.density(flow - COPPER.baseline)
        energy = COPPER.stored_energy(density) / COPPER.mass_density / 1e3
        table.add(
            {
                "condition": _condition(reduction),
                "prior_true_strain": f"{strip.prior:.4f}",
                "slope_gpa": f"{MODULUS / 1e9:.3f}",
                "proof_stress_0_2_mpa": f"{strip.proof(0.002) / 1e6:.3f}",
                "tensile_strength_mpa": f"{top / 1e6:.3f}",
                "uniform_elongation": f"{at_top - top / MODULUS:.6f}",
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
