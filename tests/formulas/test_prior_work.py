"""Prior work: strains from dimensions, work from a curve: by hand, by a general solver, limits."""

from collections.abc import Callable

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import ArrayLike, NDArray
from scipy.integrate import solve_ivp

from coldwork.formulas.prior_work import (
    drawing_strain,
    prior_work,
    prior_work_sensitivities,
    rolling_strain,
    upsetting_strain,
)

Strain = Callable[[ArrayLike, ArrayLike], NDArray[np.float64]]


def test_halving_by_each_process() -> None:
    # Half the thickness 2 ln 2 / sqrt 3 = 0.800, half the diameter 2 ln 2 = 1.386, half the
    # height ln 2 = 0.693 (Dieter, Mechanical Metallurgy, forms; numbers by hand).
    assert_allclose(rolling_strain(2e-3, 1e-3), 0.8003774, rtol=1e-6)
    assert_allclose(drawing_strain(2e-3, 1e-3), 1.3862944, rtol=1e-6)
    assert_allclose(upsetting_strain(2e-3, 1e-3), 0.6931472, rtol=1e-6)


def test_a_reduction_of_80_per_cent_by_rolling() -> None:
    # ln 5 = 1.609438, times 2/sqrt 3: 1.858419 (by hand).
    assert_allclose(rolling_strain(5e-3, 1e-3), 1.858419, rtol=1e-6)


@pytest.mark.parametrize("strain", [rolling_strain, drawing_strain, upsetting_strain])
def test_passes_add_up_and_none_is_none(strain: Strain) -> None:
    whole = strain(8e-3, 3e-3)
    assert_allclose(strain(8e-3, 5e-3) + strain(5e-3, 3e-3), whole, rtol=1e-14)
    assert strain(8e-3, 8e-3) == 0.0
    assert np.isnan(strain([8e-3, 8e-3], [8.1e-3, 16e-3])).all()


@pytest.mark.parametrize("initial", [0.0, 40e6, 320e6, 450e6])
def test_work_is_the_area_below_the_curve(initial: float) -> None:
    # d sigma / d eps = theta_0 (1 - sigma / sigma_s), dW / d eps = sigma_0 + sigma, by scipy's
    # DOP853; a start above saturation softens.
    theta, limit, base, strain = 1.7e9, 320e6, 25e6, 0.65
    solved = solve_ivp(
        lambda _, y: [theta * (1.0 - y[0] / limit), base + y[0]],
        (0.0, strain),
        [initial, 0.0],
        method="DOP853",
        rtol=1e-12,
        atol=1e-3,
    )
    assert_allclose(prior_work(strain, base, initial, theta, limit), solved.y[1, -1], rtol=1e-10)


def test_work_of_copper_at_a_mean_stress() -> None:
    # A curve that stands at saturation from the start: 250 MPa over 0.65 are 162.5 MJ/m3, of
    # which 6.37 MJ/m3 stored (0.711 J/g at 8960 kg/m3) are 3.9 %.
    work = prior_work(0.65, 50e6, 200e6, 1.7e9, 200e6)
    assert_allclose(work, 162.5e6, rtol=1e-14)
    assert_allclose(0.711e3 * 8960 / work, 0.039, atol=0.0005)


def test_without_saturation_the_curve_is_a_line() -> None:
    # Limit sigma_s -> infinity: (sigma_0 + sigma_i) eps + theta_0 eps^2 / 2.
    work = prior_work(0.2, 30e6, 10e6, 1.7e9, 1e13)
    assert_allclose(work, 40e6 * 0.2 + 1.7e9 * 0.02, rtol=1e-4)


def test_no_strain_is_no_work() -> None:
    assert prior_work(0.0, 30e6, 10e6, 1.7e9, 320e6) == 0.0
    slopes = prior_work_sensitivities(0.0, 30e6, 10e6, 1.7e9, 320e6)
    assert_allclose(slopes["strain"], 40e6, rtol=1e-14)


def test_work_in_two_parts_is_work_at_once() -> None:
    theta, limit = 1.7e9, 320e6
    between = limit - (limit - 10e6) * np.exp(-theta * 0.1 / limit)
    parts = prior_work(0.1, 25e6, 10e6, theta, limit) + prior_work(0.3, 25e6, between, theta, limit)
    assert_allclose(parts, prior_work(0.4, 25e6, 10e6, theta, limit), rtol=1e-13)
