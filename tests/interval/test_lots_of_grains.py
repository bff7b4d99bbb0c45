"""Lots whose coupons bring a grain size that sets how far a dislocation's field reaches."""

from math import inf
from typing import Final

import numpy as np
from numpy.testing import assert_allclose

from coldwork.chain import Start
from coldwork.inputs.method import Laws
from coldwork.interval.combine import Spread
from coldwork.interval.lots import STRESS, LotMean, LotSums
from coldwork.interval.reach import LATE, Reach
from coldwork.measured import Measured, Value

GRAIN: Final = "grain_size_um"
LAWS: Final = Laws(
    route="flow",
    area={"HV": "contact", "HBW": "projected", "HK": "projected"},
    unwinding=False,
    baseline="given",
    taylor="constant",
    elasticity="isotropic",
    outer_radius="grain",
    angles_deg=(0.0, 90.0),
    fractions=(0.5, 0.5),
    uniform_mix=False,
)
INPUTS: Final[dict[str, Value]] = {
    "hardening.taylor_factor": 3.06,
    "hardening.coefficient": Measured.of_input("hardening.coefficient", 0.30),
    "material.shear_modulus_gpa": 44e9,
    "material.poisson_ratio": 0.343,
    "material.burgers_vector_nm": 0.2556e-9,
    "material.mass_density_kg_per_m3": 8960.0,
    "line_energy.outer_radius_factor": 1.0,
    "line_energy.core_radius_b": 1.0,
    "line_energy.core_energy": 0.0,
}
SHARED: Final = {"hardening.coefficient": Spread(0.02, shared=True, degrees_of_freedom=inf)}
OWN: Final = {
    "repeatability": Spread(np.array([3e6, 5e6]), shared=False, degrees_of_freedom=24.0),
    GRAIN: Spread(np.array([2e-6, 9e-6]), shared=False, degrees_of_freedom=inf),
}
NAMES: Final = (STRESS, *(name for name in LATE if name != "stored_energy_j_per_mol"))


def reach() -> Reach:
    """Two coupons, which are also two lots."""
    blank = np.full(2, np.nan)
    grain = Measured.of_input(GRAIN, np.array([20e-6, 30e-6]))
    start = Start(blank, np.full(2, -1, np.int8), blank, blank, grain, blank, 0.0)
    stress = Measured(np.array([180e6, 240e6]), {"repeatability": np.asarray(1.0)})
    return Reach(LAWS, INPUTS, {**SHARED, **OWN}, start, stress)


def means(names: tuple[str, ...]) -> dict[str, LotMean]:
    coupons = reach()
    lots = LotSums(np.array([0, 1]), 2, pooled=True)
    results = {name: coupons.results[name] for name in names if name != STRESS}
    results[STRESS] = coupons.stress
    grain = Measured.of_input(GRAIN, np.array([20e-6, 30e-6]))
    lots.add(slice(0, 2), results, {**SHARED, **OWN}, grain)
    return lots.means(names, LAWS, INPUTS, SHARED, 0.975)


def test_lots_of_one_have_their_coupons_intervals() -> None:
    coupons, found = reach(), means(NAMES)
    for name in NAMES[1:]:
        assert_allclose(found[name].combined.u, coupons.combined[name].u, rtol=1e-10)
        ends = coupons.interval(name, 0.975)
        assert_allclose(found[name].ends.lower, ends.lower, rtol=1e-10)
        assert_allclose(found[name].ends.upper, ends.upper, rtol=1e-10)


def test_the_order_of_the_quantities_does_not_matter() -> None:
    found, other = means(NAMES), means(NAMES[::-1])
    for name in NAMES:
        assert_allclose(found[name].ends.lower, other[name].ends.lower, rtol=1e-14)
        assert_allclose(found[name].ends.upper, other[name].ends.upper, rtol=1e-14)
