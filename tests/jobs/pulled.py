"""Pulled copper in closed form, for batches of curves: Voce 1948, nothing of our own code."""

from collections.abc import Sequence
from math import exp, expm1, log1p
from typing import Final

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

FloatArray = NDArray[np.float64]

MODULUS: Final = 118e3  # MPa
LENGTH: Final = 50.0  # mm
DIAMETER: Final = 5.0  # mm
AREA: Final = np.pi / 4.0 * DIAMETER**2  # mm2
BASELINE: Final = 50.0  # MPa
THETA: Final = 1700.0  # of the dislocation stress, MPa
LIMIT: Final = 320.0

SHEET: Final = """
[batch]
id = "PULL-1"
[material]
name = "copper"
shear_modulus_gpa = 44.0
poisson_ratio = 0.343
burgers_vector_nm = 0.2556
mass_density_kg_per_m3 = 8960.0
[files]
coupons = "coupons.csv"
curves = "curves.csv"
[strength]
route = "flow"
baseline_mpa = { value = 50.0, u = 5.0 }
[tensile]
mode = "tension"
strain_from = "extension"
reported_strains = [0.002, 0.05, 0.1, 0.3]
force_u_rel = 0.005
extension_u_rel = 0.006
area_u_rel = 0.004
[hardening]
taylor_factor = 3.06
coefficient = 0.30
[line_energy]
outer_radius_factor = 1.0
core_radius_b = 1.0
[character]
screw = 0.5
edge = 0.5
"""


class Strip:
    """Copper with a dislocation stress to start with. MPa throughout."""

    def __init__(self, start: float = 100.0) -> None:
        self.start = start

    def stress(self, plastic: float) -> float:
        """True stress after a true plastic strain of the test."""
        return BASELINE + LIMIT - (LIMIT - self.start) * exp(-THETA * plastic / LIMIT)

    def work(self, plastic: float) -> float:
        """Plastic work of the test up to there [J/m3]."""
        scale = LIMIT / THETA
        lost = (LIMIT - self.start) * scale * expm1(-plastic / scale)
        return 1e6 * ((BASELINE + LIMIT) * plastic + lost)

    def drawn(self, plastic: float) -> tuple[float, float]:
        """Engineering stress and strain."""
        sigma = self.stress(plastic)
        true = plastic + sigma / MODULUS
        return sigma * exp(-true), expm1(true)

    @property
    def elastic(self) -> float:
        """Engineering strain at which it begins to yield."""

        def gap(e: float) -> float:
            return MODULUS * e * (1.0 + e) - self.stress(log1p(e) - e * (1.0 + e))

        return float(brentq(gap, 0.0, 0.05, xtol=1e-16))

    @property
    def uniform(self) -> float:
        """True plastic strain at the greatest force (Considere 1885)."""

        def gap(p: float) -> float:
            sigma = self.stress(p)
            rate = THETA * (1.0 - (sigma - BASELINE) / LIMIT)
            return rate * (1.0 - sigma / MODULUS) - sigma

        return float(brentq(gap, 0.0, 1.0))

    def curve(
        self, *, noise: float = 0.0, seed: int = 1, points: int = 600
    ) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Time, force [N] and extension [mm] of a test up to 1.25 of the uniform strain."""
        elastic = np.linspace(0.0, self.elastic, points // 3, endpoint=False)
        first = log1p(self.elastic) - self.elastic * (1.0 + self.elastic)
        plastic = np.concatenate(
            [
                np.linspace(first, 0.005, points // 3, endpoint=False),
                np.linspace(0.005, 1.25 * self.uniform, points // 3),
            ]
        )
        drawn = np.array([self.drawn(p) for p in plastic.tolist()])
        s = np.concatenate([MODULUS * elastic, drawn[:, 0]])
        e = np.concatenate([elastic, drawn[:, 1]])
        random = np.random.default_rng(seed)
        force = s * AREA + noise * random.standard_normal(s.size)
        length = e * LENGTH + 1e-4 * noise * random.standard_normal(s.size)
        return 0.1 * np.arange(s.size, dtype=np.float64), force, length


def rows(name: str, strip: Strip, **how: object) -> list[dict[str, object]]:
    """Rows of ``curves.csv`` of one coupon."""
    time, force, length = strip.curve(**how)  # type: ignore[arg-type]
    return [
        {"coupon_id": name, "time_s": f"{t:.1f}", "force_n": repr(f), "extension_mm": repr(x)}
        for t, f, x in zip(time.tolist(), force.tolist(), length.tolist(), strict=True)
    ]


def coupon(name: str, **more: object) -> dict[str, object]:
    """One row of ``coupons.csv``."""
    return {
        "coupon_id": name,
        "prior_true_strain": 0.1,
        "prior_plastic_work_j_per_m3": 2e7,
        "gauge_length_mm": LENGTH,
        "initial_diameter_mm": DIAMETER,
    } | more


def several(*starts: float, **how: object) -> tuple[Sequence[dict[str, object]], ...]:
    """Coupons c0, c1, ... and their curves."""
    names = [f"c{i}" for i in range(len(starts))]
    curves = [
        row
        for i, (name, start) in enumerate(zip(names, starts, strict=True))
        for row in rows(name, Strip(start), **({"seed": i + 1} | how))
    ]
    return [coupon(name) for name in names], curves
