"""Curves of invented metals whose every result is known in closed form.

Up to the elastic limit the engineering stress is E e; past it the true stress follows a
law of the true plastic strain ln(1 + e) - sigma / E. Nothing here comes from the code
under test.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final, Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

from coldwork.reduce.curve import Curve, Geometry

FloatArray = NDArray[np.float64]
GEOMETRY: Final = Geometry(gauge_length=0.050, area=20.0e-6)


class Law(Protocol):
    """True stress along the true plastic strain, its slope and its integral."""

    def stress(self, strain: FloatArray | float) -> FloatArray: ...
    def rate(self, strain: float) -> float: ...
    def work(self, strain: float) -> float: ...


@dataclass(frozen=True)
class Voce:
    """sigma_s - (sigma_s - sigma_y) exp(-kappa strain)."""

    start: float
    limit: float
    kappa: float

    def stress(self, strain: FloatArray | float) -> FloatArray:
        return np.asarray(self.limit - (self.limit - self.start) * np.exp(-self.kappa * strain))

    def rate(self, strain: float) -> float:
        return float(self.kappa * (self.limit - self.start) * np.exp(-self.kappa * strain))

    def work(self, strain: float) -> float:
        rise = (self.limit - self.start) / self.kappa * np.expm1(-self.kappa * strain)
        return float(self.limit * strain + rise)


@dataclass(frozen=True)
class Power:
    """K (strain_0 + strain)^n."""

    coefficient: float
    exponent: float
    shift: float

    def stress(self, strain: FloatArray | float) -> FloatArray:
        return np.asarray(self.coefficient * (self.shift + strain) ** self.exponent)

    def rate(self, strain: float) -> float:
        return float(self.exponent * self.stress(strain) / (self.shift + strain))

    def work(self, strain: float) -> float:
        power = self.exponent + 1.0
        both = (self.shift + strain) ** power - self.shift**power
        return float(self.coefficient * both / power)


@dataclass(frozen=True)
class Metal:
    """An elastic slope and a law."""

    slope: float
    law: Law

    @property
    def limit(self) -> float:
        """Engineering strain at the elastic limit."""

        def gap(e: float) -> float:
            return self.slope * e * (1.0 + e) - float(self.law.stress(self.plastic_at(e)))

        return float(brentq(gap, 1e-6, 0.05, xtol=1e-18, rtol=1e-15))

    def plastic_at(self, e: float) -> float:
        """Plastic strain of a point on the elastic line (a few millionths, below zero)."""
        return float(np.log1p(e) - e * (1.0 + e))

    def engineering(self, plastic: FloatArray | float) -> tuple[FloatArray, FloatArray]:
        """Engineering stress and strain of plastic states."""
        sigma = self.law.stress(plastic)
        total = plastic + sigma / self.slope
        return np.asarray(sigma * np.exp(-total)), np.asarray(np.expm1(total))

    def proof(self, offset: float) -> float:
        """Stress where the curve meets the parallel line."""

        def gap(plastic: float) -> float:
            s, e = self.engineering(plastic)
            return float(s - self.slope * (e - offset))

        root = brentq(gap, self.plastic_at(self.limit), 4.0 * offset, xtol=1e-18, rtol=1e-15)
        return float(self.engineering(float(root))[0])

    @property
    def uniform(self) -> float:
        """True plastic strain at the greatest force: d sigma / d eps = sigma (Considere)."""

        def excess(plastic: float) -> float:
            sigma = float(self.law.stress(plastic))
            return self.law.rate(plastic) * (1.0 - sigma / self.slope) - sigma

        return float(brentq(excess, 1e-9, 2.0, xtol=1e-17, rtol=1e-15))

    @property
    def strength(self) -> float:
        """R_m."""
        return float(self.engineering(self.uniform)[0])

    @property
    def elongation(self) -> float:
        """A_g."""
        s, e = self.engineering(self.uniform)
        return float(e - s / self.slope)

    def work(self, plastic: float) -> float:
        """Work from the unloaded state: that of the law and of the (tiny) start."""
        e = self.limit
        start = -self.slope * (e**3 + e**4 / 2.0)  # of sigma d(ln(1 + e) - e (1 + e))
        return start + self.law.work(plastic) - self.law.work(self.plastic_at(e))


COPPER: Final = Metal(115e9, Voce(50e6, 320e6, 5.3))
ROLLED_COPPER: Final = Metal(118e9, Voce(300e6, 380e6, 60.0))
STEEL: Final = Metal(205e9, Voce(350e6, 650e6, 11.0))
POWER: Final = Metal(70e9, Power(420e6, 0.22, 0.004))
METALS: Final = {
    "copper": COPPER,
    "rolled copper": ROLLED_COPPER,
    "steel": STEEL,
    "power law": POWER,
}


@dataclass(frozen=True)
class Plan:
    """How a test runs and how noisy it is."""

    elastic: int = 400  # points up to the elastic limit
    knee: int = 1600  # points from there to 1 % of plastic strain
    rest: int = 3000  # points from there to the end
    end: float = 1.25  # of the uniform strain
    noise_stress: float = 0.0  # [Pa]
    noise_strain: float = 0.0
    toe: float = 0.0  # strain that seating adds
    toe_stress: float = 0.0  # at which it has come to 63 %
    fracture: int = 0  # points after the break
    still: int = 0  # points before the start
    neck: float = np.inf  # strain in which a neck takes all of the force, from 1.1 of the uniform

    def finer(self, factor: int) -> "Plan":
        """The same test with more points."""
        more = {k: factor * getattr(self, k) for k in ("elastic", "knee", "rest")}
        return replace(self, **more)


NOISY: Final = Plan(
    noise_stress=0.2e6,
    noise_strain=3e-6,
    toe=1e-4,
    toe_stress=0.5e6,
    fracture=15,
    still=20,
    neck=0.15,
)


def points(metal: Metal, plan: Plan) -> tuple[FloatArray, FloatArray]:
    """Engineering stress and strain without noise, up to the break."""
    elastic = np.linspace(0.0, metal.limit, plan.elastic, endpoint=False)
    uniform = metal.uniform
    first, knee = metal.plastic_at(metal.limit), min(0.01, 0.4 * uniform)
    last = plan.end * uniform
    parts = [
        np.linspace(first, knee, plan.knee, endpoint=False),
        np.linspace(knee, last, plan.rest),
    ]
    plastic = np.concatenate(parts)
    s, e = metal.engineering(plastic)
    past = np.maximum(plastic - 1.1 * uniform, 0.0)
    s = s * (1.0 - (past / plan.neck) ** 4)
    return np.concatenate([metal.slope * elastic, s]), np.concatenate([elastic, e])


def recorded(
    metal: Metal,
    plan: Plan,
    rng: np.random.Generator | None = None,
    change: Callable[[FloatArray, FloatArray], tuple[FloatArray, FloatArray]] | None = None,
) -> Curve:
    """What the machine writes: time, force and extension of `GEOMETRY`."""
    s, e = points(metal, plan)
    if plan.toe:
        e = e + plan.toe * -np.expm1(-s / plan.toe_stress)
    if change is not None:
        s, e = change(s, e)
    if plan.fracture:
        back = np.full(plan.fracture, e[-1] - s[-1] / metal.slope)
        s, e = np.append(s, np.zeros(plan.fracture)), np.append(e, back)
    if plan.still:
        s, e = np.append(np.zeros(plan.still), s), np.append(np.zeros(plan.still), e)
    if rng is not None:
        s = s + plan.noise_stress * rng.standard_normal(s.size)
        e = e + plan.noise_strain * rng.standard_normal(e.size)
    return Curve(
        time=0.05 * np.arange(s.size, dtype=np.float64),
        force=s * GEOMETRY.area,
        length=e * GEOMETRY.gauge_length,
    )
