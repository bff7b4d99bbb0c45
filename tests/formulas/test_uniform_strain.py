"""The end of uniform strain: textbook cases, and the greatest force found by search."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.optimize import minimize_scalar

from coldwork.errors import InvalidArgument
from coldwork.formulas.hardening_laws import hollomon_stress, voce_stress
from coldwork.formulas.uniform_strain import (
    considere_excess,
    hollomon_uniform_strain,
    voce_uniform_strain,
)


def force_at(stress: float, plastic: float, compliance: float) -> float:
    """Force over the first section: sigma exp(-eps), eps with its elastic part."""
    return float(stress * np.exp(-(plastic + stress * compliance)))


def test_hollomon_without_elastic_strain_necks_at_its_exponent() -> None:
    # Dieter, Mechanical Metallurgy, ch. 8: eps_u = n (from memory).
    assert_allclose(hollomon_uniform_strain(530e6, [0.1, 0.44]), [0.1, 0.44], rtol=1e-15)


def test_voce_without_elastic_strain_necks_where_the_rate_is_the_stress() -> None:
    # theta_0 (1 - s / s_s) = s by hand: s = theta_0 s_s / (theta_0 + s_s).
    start, limit, theta = 50e6, 320e6, 1.7e9
    stress = theta * limit / (theta + limit)
    strain = voce_uniform_strain(start, limit, theta)
    assert_allclose(voce_stress(strain, start, limit, theta), stress, rtol=1e-14)


@pytest.mark.parametrize("compliance", [0.0, 1.0 / 115e9, 1.0 / 20e9])
def test_no_other_strain_bears_more_force(compliance: float) -> None:
    for start, limit, theta in ((50e6, 320e6, 1.7e9), (300e6, 380e6, 2.28e10)):
        strain = float(voce_uniform_strain(start, limit, theta, compliance))
        constants = (start, limit, theta)
        best = minimize_scalar(
            lambda x, constants=constants: (
                -force_at(float(voce_stress(x, *constants)), x, compliance)
            ),
            bounds=(0.0, 1.0),
            method="bounded",
            options={"xatol": 1e-12},
        )
        assert_allclose(strain, best.x, rtol=1e-6)
    strain = float(hollomon_uniform_strain(530e6, 0.3, compliance))
    best = minimize_scalar(
        lambda x: -force_at(float(hollomon_stress(x, 530e6, 0.3)), x, compliance),
        bounds=(0.01, 1.0),
        method="bounded",
        options={"xatol": 1e-12},
    )
    assert_allclose(strain, best.x, rtol=1e-6)


def test_the_excess_changes_sign_there() -> None:
    # Hollomon: theta = n sigma / eps, so that it is zero at eps = n.
    n, k = 0.25, 400e6
    for strain, sign in ((0.9 * n, 1.0), (1.1 * n, -1.0)):
        stress = k * strain**n
        assert np.sign(considere_excess(n * stress / strain, stress)) == sign
    assert_allclose(considere_excess(k * n**n, k * n**n), 0.0, atol=1e-6)


def test_a_metal_at_saturation_necks_at_once() -> None:
    assert voce_uniform_strain(330e6, 320e6, 1.7e9) == 0.0
    assert voce_uniform_strain(300e6, 320e6, 1.7e9) == 0.0


def test_scales_as_a_strain() -> None:
    # All stresses by one factor, the compliance by its inverse: no strain moves.
    plain = voce_uniform_strain(50e6, 320e6, 1.7e9, 1e-11)
    assert_allclose(voce_uniform_strain(150e6, 960e6, 5.1e9, 1e-11 / 3.0), plain, rtol=1e-14)
    plain = hollomon_uniform_strain(530e6, 0.3, 1e-11)
    assert_allclose(hollomon_uniform_strain(1.06e9, 0.3, 5e-12), plain, rtol=1e-14)


def test_refuses_by_name() -> None:
    with pytest.raises(InvalidArgument, match="saturation_stress must be positive"):
        voce_uniform_strain(50e6, 0.0, 1.7e9)
    with pytest.raises(InvalidArgument, match="compliance must be zero or positive"):
        voce_uniform_strain(50e6, 320e6, 1.7e9, -1e-11)
    with pytest.raises(InvalidArgument, match="exponent must be positive"):
        hollomon_uniform_strain(530e6, -0.1)
    with pytest.raises(InvalidArgument, match="rate must be finite"):
        considere_excess(np.inf, 1e8)
