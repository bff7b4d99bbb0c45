"""Means of lots against the sums of the design page: own errors average out, shared ones do not."""

from collections.abc import Mapping
from math import inf, log, sqrt
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.chain import Start
from coldwork.inputs.method import Laws
from coldwork.interval.combine import Spread
from coldwork.interval.lots import STRESS, LotMean, LotSums
from coldwork.interval.reach import Reach
from coldwork.measured import Measured, Value

NAN: Final = float("nan")
DENSITY: Final = "dislocation_density_per_m2"
LAWS: Final = Laws(
    route="flow",
    area={"HV": "contact", "HBW": "projected", "HK": "projected"},
    unwinding=False,
    baseline="given",
    taylor="constant",
    elasticity="isotropic",
    outer_radius="spacing",
    angles_deg=(0.0, 90.0),
    fractions=(0.5, 0.5),
    uniform_mix=False,
)
SLOPE: Final = 3.06 * 0.30 * 44e9 * 0.2556e-9  # M alpha G b [N/m]
INPUTS: Final[Mapping[str, Value]] = {
    "hardening.taylor_factor": np.float64(3.06),
    "hardening.coefficient": Measured.of_input("hardening.coefficient", 0.30),
    "material.shear_modulus_gpa": np.float64(44e9),
    "material.poisson_ratio": np.float64(0.343),
    "material.burgers_vector_nm": np.float64(0.2556e-9),
    "material.mass_density_kg_per_m3": np.float64(8960.0),
    "line_energy.outer_radius_factor": np.float64(1.0),
    "line_energy.core_radius_b": np.float64(1.0),
    "line_energy.core_energy": np.float64(0.0),
}
U_REPEAT: Final = np.array([3e6, 4e6, 5e6, 4e6, 2e6])
U_ALPHA, U_BASE = 0.30 * log(1.2), 9e6


def spreads(freedom: float = 24.0) -> dict[str, Spread]:
    return {
        "repeatability": Spread(U_REPEAT, shared=False, degrees_of_freedom=np.full(5, freedom)),
        "baseline": Spread(U_BASE, shared=True, degrees_of_freedom=inf),
        "hardening.coefficient": Spread(U_ALPHA, shared=True, degrees_of_freedom=inf),
    }


def means(
    stress_mpa: list[float], *, pooled: bool = True, cut: int = 5, freedom: float = 24.0
) -> dict[str, LotMean]:
    """Two lots, coupons 0 to 2 and 3 to 4, taken in by slices of `cut`."""
    s = np.array(stress_mpa) * 1e6
    lots = LotSums(np.array([0, 0, 0, 1, 1]), 2, pooled=pooled)
    for begin in range(0, 5, cut):
        rows = slice(begin, min(begin + cut, 5))
        here = {
            name: Spread(
                x.u[rows] if isinstance(x.u, np.ndarray) else x.u,
                x.shared,
                x.degrees_of_freedom[rows]
                if isinstance(x.degrees_of_freedom, np.ndarray)
                else x.degrees_of_freedom,
            )
            for name, x in spreads(freedom).items()
        }
        stress = Measured(s[rows], {"repeatability": np.asarray(1.0), "baseline": np.asarray(-1.0)})
        blank = np.full(stress.value.shape, NAN)
        start = Start(blank, np.full(blank.shape, -1, np.int8), blank, blank, blank, blank, 0.0)
        reach = Reach(LAWS, INPUTS, here, start, stress)
        results = {STRESS: stress, DENSITY: reach.results[DENSITY]}
        lots.add(rows, results, here, blank)
    found = lots.means((STRESS, DENSITY), LAWS, INPUTS, spreads(freedom), 0.975)
    assert lots.coupons_averaged(STRESS).tolist() == [
        int(np.isfinite(s[:3]).sum()),
        int(np.isfinite(s[3:]).sum()),
    ]
    return found


ABOVE: Final = [180.0, 200.0, 220.0, 210.0, 190.0]


def test_a_mean_of_stresses() -> None:
    # u^2 = sum u_own^2 / n^2 + sum (mean c)^2 u^2 (design page, section 5)
    mean = means(ABOVE)[STRESS]
    assert_allclose(mean.value, [200e6, 200e6])
    own = [sqrt(9 + 16 + 25) / 3 * 1e6, sqrt(16 + 4) / 2 * 1e6]
    assert_allclose(mean.combined.u_own, own, rtol=1e-12)
    assert_allclose(mean.combined.u_shared, [9e6, 9e6], rtol=1e-12)
    assert_allclose(mean.combined.u, np.hypot(own, 9e6), rtol=1e-12)


def test_a_mean_of_densities() -> None:
    s = np.array(ABOVE) * 1e6
    rho = (s / SLOPE) ** 2
    by_stress, by_alpha = 2 * rho / s, -2 * rho / 0.30
    mean = means(ABOVE)[DENSITY]

    def split(x: NDArray[np.float64]) -> list[NDArray[np.float64]]:
        return [x[:3], x[3:]]

    assert_allclose(mean.value, [part.mean() for part in split(rho)], rtol=1e-12)
    own = [sqrt(float((part**2).sum())) / len(part) for part in split(by_stress * U_REPEAT)]
    assert_allclose(mean.combined.u_own, own, rtol=1e-12)
    shared = [
        sqrt(float((b.mean() * U_BASE) ** 2 + (a.mean() * U_ALPHA) ** 2))
        for a, b in zip(split(by_alpha), split(by_stress), strict=True)
    ]
    assert_allclose(mean.combined.u_shared, shared, rtol=1e-12)


@pytest.mark.parametrize("cut", [1, 2, 4])
def test_slices_do_not_matter(cut: int) -> None:
    for name, mean in means(ABOVE).items():
        sliced = means(ABOVE, cut=cut)[name]
        for a, b in (
            (mean.value, sliced.value),
            (mean.combined.u, sliced.combined.u),
            (mean.ends.lower, sliced.ends.lower),
            (mean.ends.upper, sliced.ends.upper),
        ):
            assert_allclose(a, b, rtol=1e-14)


def test_one_coupon_below_its_baseline_takes_the_lots_density() -> None:
    # Over the others alone the mean would be too high; the stresses still average.
    found = means([180.0, -1.0, 220.0, 210.0, 190.0])
    density = found[DENSITY]
    assert np.isnan(density.value[0])
    assert np.isnan([density.combined.u_own[0], density.combined.u_shared[0]]).all()
    assert np.isnan([density.combined.u[0], density.ends.lower[0], density.ends.upper[0]]).all()
    assert_allclose(found[STRESS].value, [133e6, 200e6])
    assert np.isfinite(density.value[1])


def test_a_coupon_without_a_strength_is_not_averaged() -> None:
    mean = means([180.0, NAN, 220.0, 210.0, 190.0])[STRESS]
    assert_allclose(mean.value, [200e6, 200e6])
    assert_allclose(mean.combined.u_own[0], sqrt(9 + 25) / 2 * 1e6, rtol=1e-12)


def test_a_lot_of_one_is_its_coupon() -> None:
    mean = means([180.0, NAN, NAN, 210.0, 190.0])
    assert_allclose(mean[STRESS].value[0], 180e6)
    assert_allclose(mean[STRESS].combined.u_own[0], 3e6)
    s = Measured(
        np.array([180e6]), {"repeatability": np.asarray(1.0), "baseline": np.asarray(-1.0)}
    )
    blank = np.array([NAN])
    start = Start(blank, np.array([-1], np.int8), blank, blank, blank, blank, 0.0)
    alone = spreads() | {
        "repeatability": Spread(np.array([3e6]), shared=False, degrees_of_freedom=np.array([24.0]))
    }
    ends = Reach(LAWS, INPUTS, alone, start, s).interval(DENSITY, 0.975)
    assert_allclose(mean[DENSITY].ends.lower[0], ends.lower[0], rtol=1e-10)
    assert_allclose(mean[DENSITY].ends.upper[0], ends.upper[0], rtol=1e-10)


def test_a_pooled_scatter_counts_its_degrees_of_freedom_once() -> None:
    # All coupons lean on one estimate of the scatter: averaging them does not make it better known.
    own = np.array([sqrt(9 + 16 + 25) / 3, sqrt(16 + 4) / 2])
    total = np.hypot(own, 9.0)
    pooled = means(ABOVE, pooled=True)[STRESS].combined.degrees_of_freedom
    assert_allclose(pooled, total**4 / (own**4 / 24.0), rtol=1e-12)
    # Scatters known apart: Welch and Satterthwaite over the coupons (JCGM 100, G.4).
    apart = means(ABOVE, pooled=False)[STRESS].combined.degrees_of_freedom
    parts = np.array(
        [sum((u / 3) ** 4 / 24 for u in (3, 4, 5)), sum((u / 2) ** 4 / 24 for u in (4, 2))]
    )
    assert_allclose(apart, total**4 / parts, rtol=1e-12)
