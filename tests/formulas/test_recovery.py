"""Recovery: exact time of a fall by quadrature, both limits in closed form, schedules, slopes."""

import dataclasses

import mpmath  # type: ignore[import-untyped]
import numpy as np
import pytest
from mpmath import mpf
from numpy.testing import assert_allclose
from scipy.constants import k as boltzmann

from coldwork.errors import InvalidArgument
from coldwork.formulas.recovery import (
    RecoveryLaw,
    recovered_energy,
    recovered_stress,
    recovered_stress_sensitivities,
    recovery_rate,
)
from coldwork.formulas.schedule import Schedule, schedule

# Constants of no metal in particular: 1.5 eV, a volume of 30 b^3.
LAW = RecoveryLaw(2.4e-19, 7.0e-28, 3.06, 0.3, 70e9, 1e13)
HOUR = 3600.0
ANNEAL = schedule([0.0, 1800.0, 5400.0, 9000.0], [295.0, 500.0, 500.0, 320.0])


def held(kelvin: float, seconds: float = HOUR) -> Schedule:
    return schedule([0.0, seconds], [kelvin, kelvin])


def factor(kelvin: float, law: RecoveryLaw = LAW) -> float:
    """64 nu / (9 M^3 alpha^2 E) exp(-U/kT), written out."""
    before = 64.0 * law.attempt_frequency
    before /= 9.0 * law.taylor_factor**3 * law.coefficient**2 * law.youngs_modulus
    return float(before * np.exp(-law.activation_energy / (boltzmann * kelvin)))


def test_rate_is_the_published_one_at_a_point() -> None:
    # Verdier, Brechet and Guyot 1999 (form from memory), at 50 digits: 100 MPa at 450 K.
    with mpmath.workdps(50):
        s, heat = mpf(100e6), mpf("1.380649e-23") * 450
        rate = -64 * s**2 * mpf(1e13) / (9 * mpf(3.06) ** 3 * mpf(0.3) ** 2 * mpf(70e9))
        rate *= mpmath.exp(-mpf(2.4e-19) / heat) * mpmath.sinh(s * mpf(7.0e-28) / heat)
    assert_allclose(recovery_rate(100e6, 450.0, LAW), float(rate), rtol=1e-12)


@pytest.mark.parametrize("kelvin", [320.0, 400.0, 450.0, 500.0, 600.0])
@pytest.mark.parametrize("stress", [50e6, 100e6, 200e6])
def test_time_of_the_fall_by_quadrature(kelvin: float, stress: float) -> None:
    # At one temperature time is the integral of d sigma over the rate: mpmath at 30 digits.
    left = float(recovered_stress(stress, held(kelvin), LAW))
    volume = mpf(LAW.activation_volume) / (mpf("1.380649e-23") * kelvin)
    with mpmath.workdps(30):
        area = mpmath.quad(
            lambda y: 1 / (mpmath.exp(y) * mpmath.sinh(mpmath.exp(y) * volume)),
            mpmath.linspace(mpmath.log(left), mpmath.log(stress), 9),
        )
    fallen = np.log(stress / left)
    assert_allclose(float(area) / factor(kelvin), HOUR, rtol=1e-8 + 1e-9 / fallen)


def test_a_high_stress_falls_with_the_logarithm_of_time() -> None:
    # sV >> kT and little lost: sigma_0 - (kT/V) ln(1 + t/tau), the square of the stress in the
    # rate taken as it is at the end, where most of the time goes by (Verdier and Brechet 1995:
    # logarithmic).
    law = dataclasses.replace(LAW, activation_energy=3.2e-19, activation_volume=1.4e-27)
    heat = boltzmann * 300.0 / law.activation_volume
    times = np.array([1e2, 1e4, 1e6])
    left = np.array([float(recovered_stress(200e6, held(300.0, t), law)) for t in times])
    tau = heat / (0.5 * factor(300.0, law) * left**2 * np.exp(200e6 / heat))
    assert_allclose(left, 200e6 - heat * np.log1p(times / tau), rtol=2e-3)
    assert_allclose(-np.diff(left), heat * np.log(100.0), rtol=0.05)


def test_a_low_stress_falls_as_its_inverse_square_grows() -> None:
    # sV << kT: d sigma/dt = -a c sigma^3, so 1/sigma^2 = 1/sigma_0^2 + 2 a c t.
    law = dataclasses.replace(LAW, activation_volume=1e-31)
    kelvin = 600.0
    slope = factor(kelvin, law) * law.activation_volume / (boltzmann * kelvin)
    start = np.array([1e5, 1e6, 1e7])
    left = recovered_stress(start, held(kelvin, 1e9), law)
    assert left[2] < 0.99 * start[2]
    assert_allclose(left, (start**-2 + 2.0 * slope * 1e9) ** -0.5, rtol=1e-5)


def test_nothing_happens_in_the_cold_or_in_no_time() -> None:
    stress = np.array([50e6, 200e6])
    assert_allclose(recovered_stress(stress, held(80.0), LAW), stress, rtol=1e-12)
    assert_allclose(recovered_stress(stress, schedule([5.0, 5.0], [300.0, 900.0]), LAW), stress)


def test_two_schedules_in_turn_are_one() -> None:
    first = schedule([0.0, 1800.0, 4000.0], [295.0, 500.0, 500.0])
    second = schedule([4000.0, 5400.0, 9000.0], [500.0, 500.0, 320.0])
    stress = np.array([30e6, 100e6, 250e6])
    by_way = recovered_stress(recovered_stress(stress, first, LAW), second, LAW)
    assert_allclose(recovered_stress(stress, ANNEAL, LAW), by_way, rtol=1e-7)


def test_a_ramp_is_many_short_stays() -> None:
    # Stays at the temperatures in their middles come to the ramp with the square of their number.
    edges = np.linspace(0.0, 1800.0, 101)
    kelvin = 350.0 + 150.0 * (edges[:-1] + edges[1:]) / 2.0 / 1800.0
    stays = schedule(np.repeat(edges, 2)[1:-1], np.repeat(kelvin, 2))
    ramp = schedule([0.0, 1800.0], [350.0, 500.0])
    assert_allclose(
        recovered_stress(100e6, ramp, LAW), recovered_stress(100e6, stays, LAW), rtol=2e-3
    )


def test_a_higher_stress_stays_the_higher_and_all_fall() -> None:
    stress = np.geomspace(5e6, 300e6, 60)
    left = recovered_stress(stress, ANNEAL, LAW)
    assert np.all(np.diff(left) >= 0.0)
    assert np.all(left < stress)


def test_more_stresses_than_are_solved_for_are_read_off() -> None:
    stress = np.geomspace(1e6, 300e6, 1501)
    left = recovered_stress(stress, held(420.0), LAW)
    assert_allclose(left[::5], recovered_stress(stress[::5], held(420.0), LAW), rtol=2e-6)


@pytest.mark.parametrize("furnace", [held(420.0), ANNEAL], ids=["held", "anneal"])
def test_sensitivities_against_differences(furnace: Schedule) -> None:
    stress = np.array([60e6, 110e6, 180e6])
    slopes = recovered_stress_sensitivities(stress, furnace, LAW)
    constants = [f.name for f in dataclasses.fields(LAW)]
    assert list(slopes) == ["stress", "activation_energy", "activation_volume", *constants[2:]]
    step = 1e-4
    for name in constants:
        value = getattr(LAW, name)
        up, down = (
            recovered_stress(stress, furnace, dataclasses.replace(LAW, **{name: value * (1 + s)}))
            for s in (step, -step)
        )
        expected = (up - down) / (2.0 * step * value)
        assert_allclose(slopes[name] * value, expected * value, rtol=1e-5, err_msg=name)
    up, down = (recovered_stress(stress * (1 + s), furnace, LAW) for s in (0.01, -0.01))
    expected = (up - down) / (0.02 * stress)
    assert_allclose(slopes["stress"], expected, rtol=0.02, atol=1e-6)


def test_stress_alone_takes_the_lines_over() -> None:
    # sV = U at 342.9 MPa: no barrier is left, and the law says nothing.
    limit = LAW.activation_energy / LAW.activation_volume
    stress = np.array([0.9 * limit, limit, 1.1 * limit, np.nan])
    assert np.isnan(recovery_rate(stress, 400.0, LAW)).tolist() == [False, True, True, True]
    assert np.isnan(recovered_stress(stress, held(400.0), LAW)).tolist() == [
        False,
        True,
        True,
        True,
    ]
    for slope in recovered_stress_sensitivities(stress, held(400.0), LAW).values():
        assert np.isnan(slope).tolist() == [False, True, True, True]


@pytest.mark.parametrize("shape", [(), (3,), (2, 3), (0,)])
def test_keeps_the_shape(shape: tuple[int, ...]) -> None:
    stress = np.full(shape, 100e6)
    assert recovered_stress(stress, held(400.0), LAW).shape == shape
    for slope in recovered_stress_sensitivities(stress, held(400.0), LAW).values():
        assert slope.shape == shape


def test_a_change_of_units_changes_nothing_else() -> None:
    # Seconds 5 times, metres 3 times, kilograms 2 times as many; kelvin and k stay, so that an
    # energy stays too, and a volume goes against a stress: scaled law, scaled outcome.
    stress_scale, seconds = 2.0 / 3.0 / 25.0, 5.0
    law = dataclasses.replace(
        LAW,
        activation_volume=LAW.activation_volume / stress_scale,
        youngs_modulus=LAW.youngs_modulus * stress_scale,
        attempt_frequency=LAW.attempt_frequency / seconds,
    )
    slow = schedule(ANNEAL.times * seconds, ANNEAL.temperatures)
    left = recovered_stress(100e6 * stress_scale, slow, law)
    assert_allclose(left, recovered_stress(100e6, ANNEAL, LAW) * stress_scale, rtol=1e-7)


def test_energy_goes_with_the_square_of_the_stress() -> None:
    assert_allclose(recovered_energy(1.4e6, 200e6, [200e6, 100e6, 0.0]), [1.4e6, 0.35e6, 0.0])


@pytest.mark.parametrize("name", [f.name for f in dataclasses.fields(RecoveryLaw)])
@pytest.mark.parametrize("bad", [0.0, -1.0, np.inf])
def test_refuses_impossible_constants_by_name(name: str, bad: float) -> None:
    with pytest.raises(InvalidArgument, match=rf"^{name} must be positive"):
        dataclasses.replace(LAW, **{name: bad})


@pytest.mark.parametrize("bad", [0.0, -1e6, np.inf])
def test_refuses_an_impossible_stress_by_name(bad: float) -> None:
    for call in (recovered_stress, recovered_stress_sensitivities):
        with pytest.raises(InvalidArgument, match=r"^stress must be positive.*1 bad of 2"):
            call([1e8, bad], held(400.0), LAW)
