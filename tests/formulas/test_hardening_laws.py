"""Laws of hardening: the differential law behind each, limits, work against quadrature."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad, solve_ivp

from coldwork.formulas.hardening_laws import (
    hollomon_stress,
    hollomon_stress_sensitivities,
    hollomon_work,
    voce_stress,
    voce_stress_sensitivities,
    voce_work,
)
from coldwork.formulas.unwinding import unwound_stress

COPPER = (50e6, 320e6, 1.7e9)  # yield, saturation, initial hardening [Pa], of the design's order


def test_voce_solves_the_law_of_the_hardening_rate() -> None:
    # d sigma / d eps = theta_0 (1 - sigma / sigma_s), by a general solver of equations.
    start, limit, theta = COPPER
    strains = np.linspace(0.0, 0.5, 11)
    solved = solve_ivp(
        lambda _, s: theta * (1.0 - s / limit),
        (0.0, 0.5),
        [start],
        t_eval=strains,
        rtol=1e-11,
        atol=1e-3,
    )
    assert_allclose(voce_stress(strains, *COPPER), solved.y[0], rtol=1e-9)


def test_unwinding_takes_back_what_voce_adds() -> None:
    # Relation 6 is the same law run backwards.
    start, limit, theta = COPPER
    hardened = voce_stress(0.08, *COPPER)
    assert_allclose(unwound_stress(hardened, theta, limit, 0.08), start, rtol=1e-13)


def test_voce_begins_at_yield_and_ends_at_saturation() -> None:
    assert_allclose(voce_stress([0.0, 50.0], *COPPER), [50e6, 320e6], rtol=1e-15)


def test_the_rate_at_no_stress_is_the_initial_hardening() -> None:
    # The line theta = theta_0 (1 - sigma / sigma_s) of Kocks and Mecking.
    strain = np.linspace(0.0, 0.4, 5)
    rate = voce_stress_sensitivities(strain, *COPPER)["strain"]
    line = np.polyfit(voce_stress(strain, *COPPER), rate, 1)
    assert_allclose(line[1], 1.7e9, rtol=1e-12)
    assert_allclose(-line[1] / line[0], 320e6, rtol=1e-12)


def test_hollomon_is_a_line_on_double_logarithmic_paper() -> None:
    strain = np.array([1e-3, 1e-2, 1e-1, 1.0])
    stress = hollomon_stress(strain, 530e6, 0.44)
    assert_allclose(np.diff(np.log10(stress)), 0.44, rtol=1e-12)
    assert_allclose(stress[-1], 530e6, rtol=1e-15)
    rate = hollomon_stress_sensitivities(strain, 530e6, 0.44)["strain"]
    assert_allclose(rate * strain / stress, 0.44, rtol=1e-14)


@pytest.mark.parametrize("strain", [0.002, 0.1, 0.4])
def test_work_is_the_area_under_the_law(strain: float) -> None:
    area, _ = quad(lambda x: float(voce_stress(x, *COPPER)), 0.0, strain, epsrel=1e-12)
    assert_allclose(voce_work(strain, *COPPER), area, rtol=1e-11)
    # Substituted x = t^3, which takes the corner at 0 away.
    area, _ = quad(
        lambda t: float(hollomon_stress(t**3, 530e6, 0.44)) * 3.0 * t**2,
        1e-30,
        strain ** (1.0 / 3.0),
        epsrel=1e-12,
    )
    assert_allclose(hollomon_work(strain, 530e6, 0.44), area, rtol=1e-10)
