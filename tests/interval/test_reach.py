"""The two-part interval against its formula, written out for one coupon at a time.

The formula is that of the design page, section 5: ends in the dislocation stress s,
widened on a logarithmic scale by what enters after s. Student's quantiles come from
scipy; slopes are closed forms of Taylor's relation and of E = K b^2 / 4 pi ln(R / r0).
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from math import exp, inf, log, pi, sqrt
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.special import ndtri, stdtr, stdtrit

from coldwork.chain import Start
from coldwork.inputs.method import Laws
from coldwork.interval.combine import Spread
from coldwork.interval.reach import BELOW_ZERO, LATE, Reach
from coldwork.measured import Measured, Value

NAN: Final = float("nan")
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
M, ALPHA, G, B, NU = 3.06, 0.30, 44e9, 0.2556e-9, 0.343
MASS: Final = 8960.0
ALPHA_U: Final = 0.30 * log(1.2)
GRAIN, U_GRAIN = 2e-6, 0.25e-6
COEFFICIENT: Final = 0.11e6  # Hall-Petch, so that the baseline holds k / sqrt(D) [Pa m^0.5]
DENSITY, ENERGY = "dislocation_density_per_m2", "stored_energy_j_per_m3"
SPACING, LINE = "mean_spacing_nm", "line_energy_j_per_m"

SPREADS: Final[Mapping[str, Spread]] = {
    "repeatability": Spread(np.array([4e6]), shared=False, degrees_of_freedom=np.array([8.0])),
    "baseline": Spread(9e6, shared=True, degrees_of_freedom=12.0),
    "hardening.coefficient": Spread(ALPHA_U, shared=True, degrees_of_freedom=inf),
    "hardening.taylor_factor": Spread(0.15, shared=True, degrees_of_freedom=inf),
    "line_energy.outer_radius_factor": Spread(log(1.5), shared=True, degrees_of_freedom=inf),
    "grain_size_um": Spread(np.array([U_GRAIN]), shared=False, degrees_of_freedom=np.array([inf])),
}
UNCERTAIN: Final = (
    "hardening.coefficient",
    "hardening.taylor_factor",
    "line_energy.outer_radius_factor",
)


def reach(
    mpa: float,
    *,
    laws: Laws = LAWS,
    own_only: bool = False,
    more: Mapping[str, float] | None = None,
    spreads: Mapping[str, Spread] = SPREADS,
) -> Reach:
    """One coupon of a dislocation stress; `more` are further slopes of that stress."""
    exact: dict[str, float] = {
        "hardening.taylor_factor": M,
        "hardening.coefficient": ALPHA,
        "material.shear_modulus_gpa": G,
        "material.poisson_ratio": NU,
        "material.burgers_vector_nm": B,
        "material.mass_density_kg_per_m3": MASS,
        "line_energy.outer_radius_factor": 1.0,
        "line_energy.core_radius_b": 1.0,
        "line_energy.core_energy": 0.0,
    }
    inputs: dict[str, Value] = {
        name: Measured.of_input(name, x) if name in UNCERTAIN else np.float64(x)
        for name, x in exact.items()
    }
    slopes = {"repeatability": 1.0, "baseline": -1.0, **(more or {})}
    stress = Measured(np.array([mpa * 1e6]), {name: np.array([c]) for name, c in slopes.items()})
    blank = np.array([NAN])
    grain: Value = Measured.of_input("grain_size_um", np.array([GRAIN]))
    start = Start(blank, np.array([-1], dtype=np.int8), blank, blank, grain, blank, 0.002)
    return Reach(laws, inputs, spreads, start, stress, own_only=own_only)


def by_hand(s: float, laws: Laws = LAWS) -> dict[str, float]:
    """Relations 5, 7 and 8 at a dislocation stress in Pa."""
    rho = (s / (M * ALPHA * G * B)) ** 2
    r = 1.0 / sqrt(rho) if laws.outer_radius == "spacing" else GRAIN
    k = G * (1.0 - NU / 2.0) / (1.0 - NU)
    e = k * B**2 / (4.0 * pi) * log(r / B)
    return {
        DENSITY: rho,
        SPACING: 1.0 / sqrt(rho),
        LINE: e,
        ENERGY: rho * e,
        "stored_energy_j_per_g": rho * e / MASS,
        "L": log(r / B),
    }


@dataclass(frozen=True)
class Parts:
    """What a quantity's interval is made of, besides s. Relative, at the quantity's value."""

    by_alpha: float  # d ln y / d ln alpha, the same for the Taylor factor
    by_factor: float  # d ln y / d ln f
    by_stress: float  # d ln y / d ln s
    by_grain: float = 0.0

    @property
    def m(self) -> float:
        return sqrt(
            (self.by_alpha * log(1.2)) ** 2
            + (self.by_alpha * 0.15 / M) ** 2
            + (self.by_factor * log(1.5)) ** 2
            + (self.by_grain * U_GRAIN / GRAIN) ** 2
        )


def parts_of(name: str, s: float, laws: Laws = LAWS) -> Parts:
    late = 1.0 / by_hand(s, laws)["L"]
    if laws.outer_radius == "grain":
        return {DENSITY: Parts(-2, 0, 2), ENERGY: Parts(-2, late, 2, late)}[name]
    return {
        DENSITY: Parts(-2, 0, 2),
        SPACING: Parts(1, 0, -1),
        LINE: Parts(late, late, -late),
        ENERGY: Parts(-2 + late, late, 2 - late),
        "stored_energy_j_per_g": Parts(-2 + late, late, 2 - late),
    }[name]


def freedom(s: float, parts: Parts, u_s: Mapping[str, float]) -> float:
    """JCGM 100 G.4 for the quantity, repeatability with 8 and baseline with 12."""
    relative = {name: parts.by_stress * u / s for name, u in u_s.items()}
    total = sum(x**2 for x in relative.values()) + parts.m**2
    return total**2 / (relative["repeatability"] ** 4 / 8.0 + relative["baseline"] ** 4 / 12.0)


def ends_by_hand(y: float, y_down: float, y_up: float, km: float, r: float) -> tuple[float, float]:
    low, high = min(y_down, y_up), max(y_down, y_up)
    a = log(y / low) if low > 0 else inf
    b = log(high / y)
    lower = 0.0 if low == 0.0 else y * exp(-sqrt(a * a + km * km + 2.0 * r * a * km))
    return lower, y * exp(sqrt(b * b + km * km + 2.0 * r * b * km))


@pytest.mark.parametrize("name", [DENSITY, SPACING, LINE, ENERGY, "stored_energy_j_per_g"])
@pytest.mark.parametrize("mpa", [200.0, 60.0])
def test_far_above_the_baseline(name: str, mpa: float) -> None:
    s, u_s = mpa * 1e6, sqrt(4e6**2 + 9e6**2)
    parts = parts_of(name, s)
    nu = freedom(s, parts, {"repeatability": 4e6, "baseline": 9e6})
    k = float(stdtrit(nu, 0.975))
    y = by_hand(s)[name]
    y_down, y_up = (by_hand(s + sign * k * u_s)[name] for sign in (-1.0, 1.0))
    lower, upper = ends_by_hand(y, y_down, y_up, k * parts.m, 0.0)
    found = reach(mpa)
    assert_allclose(found.degrees_of_freedom(name), nu, rtol=1e-9)
    ends = found.interval(name, 0.975)
    assert_allclose(ends.lower, lower, rtol=1e-9)
    assert_allclose(ends.upper, upper, rtol=1e-9)
    # DESIGN: line energy and spacing fall with s, density and stored energy rise
    assert (y_up > y_down) == (name not in {SPACING, LINE})


def test_a_grain_size_in_baseline_and_outer_radius_is_counted_once_with_its_sign() -> None:
    # s = flow - k / sqrt(D), so ds/dD = k / 2 D^-1.5 > 0, and R = D: both raise u = rho E.
    laws = replace(LAWS, outer_radius="grain")
    s, slope = 200e6, COEFFICIENT / (2.0 * GRAIN**1.5)
    u_s = {"repeatability": 4e6, "baseline": 9e6, "grain": slope * U_GRAIN}
    parts = parts_of(ENERGY, s, laws)
    total = sqrt(sum(u**2 for u in u_s.values()))
    r = (slope * U_GRAIN) * (parts.by_grain * U_GRAIN / GRAIN) / (total * parts.m)
    assert 0.0 < r < 0.2
    # Effective degrees of freedom of u: the grain counts with both of its ways together.
    relative = {name: parts.by_stress * u / s for name, u in u_s.items()}
    relative["grain"] += parts.by_grain * U_GRAIN / GRAIN
    without = replace(parts, by_grain=0.0)
    squares = sum(x**2 for x in relative.values()) + without.m**2
    nu = squares**2 / (relative["repeatability"] ** 4 / 8.0 + relative["baseline"] ** 4 / 12.0)
    k = float(stdtrit(nu, 0.975))
    y = by_hand(s, laws)[ENERGY]
    y_down, y_up = (by_hand(s + sign * k * total, laws)[ENERGY] for sign in (-1.0, 1.0))
    lower, upper = ends_by_hand(y, y_down, y_up, k * parts.m, r)
    found = reach(200.0, laws=laws, more={"grain_size_um": slope})
    ends = found.interval(ENERGY, 0.975)
    assert_allclose(found.degrees_of_freedom(ENERGY), nu, rtol=1e-9)
    assert_allclose(ends.lower, lower, rtol=1e-9)
    assert_allclose(ends.upper, upper, rtol=1e-9)
    assert_allclose(found.combined[ENERGY].u, y * sqrt(squares), rtol=1e-12)
    # A density has no R in it: no correlation there, and so the plain formula.
    plain = parts_of(DENSITY, s, laws)
    nu = freedom(s, plain, u_s)
    k = float(stdtrit(nu, 0.975))
    y, y_down, y_up = (by_hand(s + sign * k * total, laws)[DENSITY] for sign in (0.0, -1.0, 1.0))
    lower, upper = ends_by_hand(y, y_down, y_up, k * plain.m, 0.0)
    ends = found.interval(DENSITY, 0.975)
    assert_allclose(ends.lower, lower, rtol=1e-9)
    assert_allclose(ends.upper, upper, rtol=1e-9)


@pytest.mark.parametrize("slope", [7e7, -7e7])
@pytest.mark.parametrize("name", [DENSITY, SPACING])
def test_the_sign_of_r_turns_where_the_quantity_falls_with_s(name: str, slope: float) -> None:
    # As a calibration would have it: alpha stands in s (slope in Pa per unit) and after it.
    s = 200e6
    u_alpha = slope * ALPHA_U
    u_s = {"repeatability": 4e6, "baseline": 9e6, "alpha": u_alpha}
    parts = parts_of(name, s)
    total = sqrt(sum(u**2 for u in u_s.values()))
    r = u_alpha * parts.by_alpha * log(1.2) / (total * parts.m)
    r *= 1.0 if parts.by_stress > 0 else -1.0
    relative = {key: parts.by_stress * u / s for key, u in u_s.items()}
    relative["alpha"] += parts.by_alpha * log(1.2)
    squares = sum(x**2 for x in relative.values()) + (parts.by_alpha * 0.15 / M) ** 2
    nu = squares**2 / (relative["repeatability"] ** 4 / 8.0 + relative["baseline"] ** 4 / 12.0)
    k = float(stdtrit(nu, 0.975))
    y, y_down, y_up = (by_hand(s + sign * k * total)[name] for sign in (0.0, -1.0, 1.0))
    ends = reach(200.0, more={"hardening.coefficient": slope}).interval(name, 0.975)
    expected = ends_by_hand(y, y_down, y_up, k * parts.m, r)
    assert_allclose((ends.lower[0], ends.upper[0]), expected, rtol=1e-9)
    # A larger alpha lowers the density; if it raises s too, the two effects work against each
    # other and the interval is narrower than without the correlation, and the other way round.
    wide = ends_by_hand(y, y_down, y_up, k * parts.m, 0.0)
    narrower = ends.upper[0] / ends.lower[0] < wide[1] / wide[0]
    assert narrower == (slope > 0)


def test_where_the_lower_end_of_the_stress_is_below_the_baseline() -> None:
    found = reach(15.0)  # u(s) = 9.85 MPa, so that s - k u < 0 < s
    for name in (DENSITY, ENERGY):
        ends = found.interval(name, 0.975)
        assert ends.lower[0] == 0.0
        assert np.isfinite(ends.upper[0])
    # spacing goes to infinity there, and the line energy with its logarithm: an empty end
    assert np.isnan(found.interval(SPACING, 0.975).upper[0])
    assert np.isnan(found.interval(LINE, 0.975).upper[0])
    assert np.isfinite(found.interval(SPACING, 0.975).lower[0])
    assert np.isfinite(found.interval(LINE, 0.975).lower[0])


@pytest.mark.parametrize("name", [DENSITY, ENERGY, "stored_energy_j_per_g"])
@pytest.mark.parametrize("mpa", [0.0, -6.0])
def test_on_and_below_the_baseline(name: str, mpa: float) -> None:
    # Where s <= 0: lower 0, upper y_U exp(k m), k of s, m taken at s + k u(s).
    u_s = sqrt(4e6**2 + 9e6**2)
    nu = u_s**4 / (4e6**4 / 8.0 + 9e6**4 / 12.0)
    k = float(stdtrit(nu, 0.975))
    top = mpa * 1e6 + k * u_s
    found = reach(mpa)
    assert np.isnan(found.results[name].value[0])
    ends = found.interval(name, 0.975)
    assert ends.lower[0] == 0.0
    assert_allclose(ends.upper, by_hand(top)[name] * exp(k * parts_of(name, top).m), rtol=1e-9)


def test_no_line_energy_and_no_spacing_on_the_baseline() -> None:
    for name in (SPACING, LINE):
        ends = reach(-6.0).interval(name, 0.975)
        assert np.isnan([ends.lower[0], ends.upper[0]]).all()


def test_a_contradicted_baseline_has_no_upper_end() -> None:
    # s + k u(s) <= 0: nothing is allowed, and an end that does not exist is empty, not zero.
    ends = reach(-40.0).interval(DENSITY, 0.975)
    assert ends.lower[0] == 0.0
    assert np.isnan(ends.upper[0])


@pytest.mark.parametrize("mpa", [200.0, 15.0, 0.0, -6.0])
@pytest.mark.parametrize("name", LATE)
@pytest.mark.parametrize("probability", [0.9, 0.975, 0.999])
def test_the_end_at_k_has_the_probability_of_k(mpa: float, name: str, probability: float) -> None:
    # DESIGN: the probability of a limit is P(t <= k) for the k at which the end meets it.
    found = reach(mpa)
    ends = found.interval(name, probability)
    lower, upper = ends.lower[0], ends.upper[0]
    if np.isfinite(lower) and lower > 0.0:
        assert_allclose(found.probability_above(name, float(lower)), probability, rtol=1e-7)
    if np.isfinite(upper):
        above = found.probability_above(name, float(upper))
        assert_allclose(above, 1.0 - probability, rtol=1e-7)


@pytest.mark.parametrize("mpa", [15.0, -6.0, -40.0])
def test_probability_falls_as_the_limit_rises(mpa: float) -> None:
    found = reach(mpa)
    limits = np.geomspace(1e8, 1e18, 6)
    p = np.array([found.probability_above(DENSITY, float(limit))[0] for limit in limits])
    assert ((p >= 0.0) & (p <= 1.0)).all()
    assert (np.diff(p) <= 1e-12).all()
    # near zero it is the chance that the coupon is above its baseline at all: P(t <= s / u(s))
    u_s = sqrt(4e6**2 + 9e6**2)
    nu = u_s**4 / (4e6**4 / 8.0 + 9e6**4 / 12.0)
    if mpa < 100.0:
        assert_allclose(p[0], stdtr(nu, mpa * 1e6 / u_s), rtol=0.02)


def test_own_basis_takes_shared_inputs_as_exact() -> None:
    s = 200e6
    found = reach(200.0).with_shared_exact()
    k = float(stdtrit(8.0, 0.975))  # repeatability alone is left, m is 0
    for name in (DENSITY, LINE, ENERGY):
        ends = found.interval(name, 0.975)
        two = sorted(by_hand(s + sign * k * 4e6)[name] for sign in (-1.0, 1.0))
        assert_allclose((ends.lower[0], ends.upper[0]), two, rtol=1e-9)
        assert_allclose(found.combined[name].u_shared, 0.0)
    assert_allclose(found.u_stress.u, 4e6)


def test_own_basis_below_the_baseline() -> None:
    k = float(stdtrit(8.0, 0.95))
    ends = reach(-6.0).with_shared_exact().interval(DENSITY, 0.95)
    assert ends.lower[0] == 0.0
    assert_allclose(ends.upper, by_hand(-6e6 + k * 4e6)[DENSITY], rtol=1e-9)


def test_without_a_repeatability_there_is_no_interval() -> None:
    unknown = Spread(np.array([NAN]), shared=False, degrees_of_freedom=np.array([NAN]))
    for mpa in (200.0, -6.0):
        found = reach(mpa, spreads={**SPREADS, "repeatability": unknown})
        for name in LATE:
            ends = found.interval(name, 0.975)
            assert np.isnan([ends.lower[0], ends.upper[0]]).all(), (mpa, name)
            assert np.isnan(found.probability_above(name, 1e14))
        assert np.isnan(found.combined[DENSITY].u_own[0])


def test_all_is_normal_with_infinite_degrees_of_freedom() -> None:
    known = {
        name: replace(x, degrees_of_freedom=np.array([inf]) if not x.shared else inf)
        for name, x in SPREADS.items()
    }
    k = float(ndtri(0.975))
    u_s = sqrt(4e6**2 + 9e6**2)
    y, y_down, y_up = (by_hand(200e6 + sign * k * u_s)[DENSITY] for sign in (0.0, -1.0, 1.0))
    ends = reach(200.0, spreads=known).interval(DENSITY, 0.975)
    expected = ends_by_hand(y, y_down, y_up, k * parts_of(DENSITY, 200e6).m, 0.0)
    assert_allclose((ends.lower[0], ends.upper[0]), expected, rtol=1e-9)


def test_what_goes_to_zero_with_the_stress() -> None:
    assert set(LATE) - set(BELOW_ZERO) == {SPACING, LINE}
