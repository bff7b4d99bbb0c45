"""Unwinding: the hardening law integrated backwards by a general solver, limits, signs."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import solve_ivp

from coldwork.errors import InvalidArgument
from coldwork.formulas.unwinding import (
    hardening_constants,
    unwound_stress,
    unwound_stress_sensitivities,
)

THETA, LIMIT = 1700e6, 320e6  # Pa
SLOPE = 3.06 * 0.30 * 44e9 * 0.2556e-9  # M alpha G b [N/m]


@pytest.mark.parametrize("stress", [310e6, 250e6, 180e6, 120e6])
@pytest.mark.parametrize("strain", [0.01, 0.08])
def test_agrees_with_the_density_law_run_backwards(stress: float, strain: float) -> None:
    # Kocks and Mecking, Prog. Mater. Sci. 48 (2003) 171: d rho / d eps = k1 sqrt(rho) - k2 rho,
    # with k1 = 2 theta_0 / (M alpha G b) and k2 = 2 theta_0 / sigma_s, by scipy's DOP853 from
    # the strain of the test back to none.
    k1, k2 = 2.0 * THETA / SLOPE, 2.0 * THETA / LIMIT
    unit = 1e14
    solved = solve_ivp(
        lambda _, rho: (k1 * np.sqrt(rho * unit) - k2 * rho * unit) / unit,
        (strain, 0.0),
        [(stress / SLOPE) ** 2 / unit],
        method="DOP853",
        rtol=1e-12,
        atol=1e-14,
    )
    before = SLOPE * np.sqrt(solved.y[0, -1] * unit)
    assert_allclose(unwound_stress(stress, THETA, LIMIT, strain), before, rtol=1e-9)


def test_agrees_with_the_closed_form_in_density() -> None:
    # sqrt(rho)(eps) = (k1/k2) (1 - exp(-k2 eps / 2)) + sqrt(rho_0) exp(-k2 eps / 2); k1 1e8 per
    # m and k2 5 saturate at (k1/k2)^2 = 4e14 per m2 (worked out by hand from the law).
    k1, k2, eps, slope = 1e8, 5.0, 0.08, 10.0
    theta, limit = slope * k1 / 2.0, slope * k1 / k2
    assert_allclose(hardening_constants(theta, limit, slope), (k1, k2), rtol=1e-14)
    assert_allclose((limit / slope) ** 2, 4e14, rtol=1e-14)
    before = np.sqrt([1e13, 1e14, 3.9e14])
    after = (k1 / k2) * (1.0 - np.exp(-k2 * eps / 2.0)) + before * np.exp(-k2 * eps / 2.0)
    assert_allclose(unwound_stress(slope * after, theta, limit, eps), slope * before, rtol=1e-12)


def test_without_saturation_the_slope_is_constant() -> None:
    # Limit sigma_s -> infinity: sigma - theta_0 eps.
    assert_allclose(unwound_stress(200e6, THETA, 1e20, 0.05), 200e6 - THETA * 0.05, rtol=1e-9)


def test_no_strain_takes_nothing_out() -> None:
    stress = np.array([-50e6, 0.0, 100e6, 400e6])
    assert np.array_equal(unwound_stress(stress, THETA, LIMIT, 0.0), stress)


def test_two_strains_in_turn_are_their_sum() -> None:
    once = unwound_stress(300e6, THETA, LIMIT, 0.05)
    assert_allclose(
        unwound_stress(once, THETA, LIMIT, 0.03), unwound_stress(300e6, THETA, LIMIT, 0.08)
    )


def test_a_stress_of_nothing_becomes_negative() -> None:
    # The indent alone would have brought more than was found: no density, and no clipping.
    at_rest = LIMIT * -np.expm1(-THETA * 0.08 / LIMIT)  # what the test puts into nothing
    assert_allclose(unwound_stress(at_rest, THETA, LIMIT, 0.08), 0.0, atol=1e-6)
    assert unwound_stress(0.9 * at_rest, THETA, LIMIT, 0.08) < 0.0
    assert unwound_stress(-10e6, THETA, LIMIT, 0.08) < -10e6


def test_nothing_is_unwound_from_saturation_on() -> None:
    stress = np.array([LIMIT, 1.1 * LIMIT, 5.0 * LIMIT])
    assert np.array_equal(unwound_stress(stress, THETA, LIMIT, 0.08), stress)
    growth = np.exp(THETA * 0.08 / LIMIT)
    slopes = unwound_stress_sensitivities(stress, THETA, LIMIT, 0.08)
    assert_allclose(np.broadcast_to(slopes["stress"], 3), growth, rtol=1e-14)
    assert_allclose(slopes["strain"], THETA * growth * (stress / LIMIT - 1.0), rtol=1e-12)


@pytest.mark.parametrize("name", ["initial_hardening", "saturation_stress", "slope"])
@pytest.mark.parametrize("bad", [0.0, -1.0, np.inf])
def test_constants_refuse_an_impossible_value_by_name(name: str, bad: float) -> None:
    good = {"initial_hardening": THETA, "saturation_stress": LIMIT, "slope": SLOPE}
    with pytest.raises(InvalidArgument, match=rf"^{name} must be positive"):
        hardening_constants(**(good | {name: bad}))
