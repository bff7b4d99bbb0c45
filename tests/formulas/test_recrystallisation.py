"""Recrystallisation: identities, schedules against a general quadrature, there and back."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import constants
from scipy.integrate import quad
from scipy.special import exp1

from coldwork.errors import InvalidArgument
from coldwork.formulas.recrystallisation import (
    recrystallisation_rate,
    recrystallised_fraction,
    recrystallised_fraction_sensitivities,
    schedule_progress,
    schedule_progress_sensitivities,
    temperature_for_fraction,
    time_for_fraction,
)
from coldwork.formulas.schedule import schedule

B0, Q, N = 1e10, 120e3, 1.2  # 1/s, J/mol: a rate of some 1e-2 per second at 250 C
EXPONENTS = [1.1, 1.2, 1.8]  # OFE copper rolled 58, 73, 90 %: Textures Microstruct. (1991) 972428


@pytest.mark.parametrize("exponent", EXPONENTS)
def test_half_is_half(exponent: float) -> None:
    # X(t50) = 1/2 where k t50^n = ln 2.
    half = np.log(2.0) ** (1.0 / exponent)
    assert_allclose(recrystallised_fraction(half, exponent), 0.5, rtol=1e-14)
    assert_allclose(time_for_fraction(0.5, 1e-3, exponent), half / 1e-3, rtol=1e-14)


def test_at_twice_the_time_for_half() -> None:
    # n 1.2: 1 - 2^-(2^1.2) = 0.79657 (by hand).
    half = time_for_fraction(0.5, 1e-3, 1.2)
    assert_allclose(recrystallised_fraction(2.0 * half * 1e-3, 1.2), 0.79657, atol=0.5e-5)


def test_start_and_end() -> None:
    assert recrystallised_fraction(0.0, 0.8) == 0.0
    assert recrystallised_fraction(1e4, 1.2) == 1.0
    assert_allclose(recrystallised_fraction(1e-12, 1.0), 1e-12, rtol=1e-12)
    slopes = recrystallised_fraction_sensitivities(0.0, [0.8, 1.0, 2.0])
    assert slopes["progress"].tolist() == [np.inf, 1.0, 0.0]
    assert slopes["exponent"].tolist() == [0.0, 0.0, 0.0]


@pytest.mark.parametrize("fraction", [1e-6, 0.05, 0.5, 0.95, 0.999])
def test_time_and_temperature_there_and_back(fraction: float) -> None:
    kelvin = temperature_for_fraction(fraction, 3600.0, B0, Q, N)
    rate = recrystallisation_rate(B0, Q, kelvin)
    assert_allclose(time_for_fraction(fraction, rate, N), 3600.0, rtol=1e-11)
    assert_allclose(recrystallised_fraction(rate * 3600.0, N), fraction, rtol=1e-11)


def test_rate_by_hand() -> None:
    # exp(-Q/RT) halves where 1/T rises by R ln 2 / Q.
    cold = 1.0 / (1.0 / 523.15 + constants.R * np.log(2.0) / Q)
    ratio = recrystallisation_rate(B0, Q, cold) / recrystallisation_rate(B0, Q, 523.15)
    assert_allclose(ratio, 0.5, rtol=1e-12)
    assert_allclose(recrystallisation_rate(B0, 0.0, 300.0), B0, rtol=1e-15)


def test_too_short_a_time_has_no_temperature() -> None:
    # Even at B_0 itself, 1e-12 s come to B_0 t = 0.01.
    found = temperature_for_fraction(0.5, [3600.0, 1e-12], B0, Q, N)
    assert np.isnan(found).tolist() == [False, True]


def test_a_schedule_of_one_temperature_is_rate_times_time() -> None:
    held = schedule([0.0, 1200.0, 3600.0], [523.15, 523.15, 523.15])
    expected = recrystallisation_rate(B0, Q, 523.15) * 3600.0
    assert_allclose(schedule_progress(held, B0, Q), expected, rtol=1e-13)


def test_a_ramp_has_a_closed_form() -> None:
    # Integral of exp(-Q/RT) dT = T exp(-z) - (Q/R) E1(z), z = Q/RT, by parts.
    low, high, duration = 300.0, 800.0, 5000.0

    def area(kelvin: float) -> float:
        z = Q / (constants.R * kelvin)
        return float(kelvin * np.exp(-z) - Q / constants.R * exp1(z))

    expected = B0 * (area(high) - area(low)) * duration / (high - low)
    found = schedule_progress(schedule([0.0, duration], [low, high]), B0, Q)
    assert_allclose(found, expected, rtol=1e-12)
    down = schedule_progress(schedule([0.0, duration], [high, low]), B0, Q)
    assert_allclose(down, found, rtol=1e-13)


def test_a_whole_anneal_against_a_general_quadrature() -> None:
    times = np.array([0.0, 1800.0, 5400.0, 5400.0, 9000.0, 20000.0])
    kelvin = np.array([293.0, 560.0, 565.0, 530.0, 480.0, 300.0])
    parts = [
        quad(lambda t: B0 * np.exp(-Q / constants.R / np.interp(t, times, kelvin)), a, b)[0]
        for a, b in [(0.0, 1800.0), (1800.0, 5399.999999), (5400.0, 9000.0), (9000.0, 20000.0)]
    ]
    found = schedule_progress(schedule(times, kelvin), B0, Q)
    assert_allclose(found, sum(parts), rtol=1e-8)


def test_parts_of_a_schedule_add_up() -> None:
    one, two = schedule([0.0, 900.0], [300.0, 540.0]), schedule([900.0, 3600.0], [540.0, 500.0])
    whole = schedule([0.0, 900.0, 3600.0], [300.0, 540.0, 500.0])
    assert_allclose(
        schedule_progress(whole, B0, Q),
        schedule_progress(one, B0, Q) + schedule_progress(two, B0, Q),
        rtol=1e-14,
    )


def test_constants_of_any_shape() -> None:
    furnace = schedule([0.0, 900.0, 3600.0], [300.0, 540.0, 500.0])
    energies = np.array([[100e3, np.nan, 120e3]])
    found = schedule_progress(furnace, np.array([[B0], [2.0 * B0]]), energies)
    assert found.shape == (2, 3)
    assert np.isnan(found).tolist() == 2 * [[False, True, False]]
    assert_allclose(found[1], 2.0 * found[0], rtol=1e-14)
    assert_allclose(found[0, 2], schedule_progress(furnace, B0, Q), rtol=1e-12)
    assert np.isnan(schedule_progress(furnace, B0, np.nan))


def test_sensitivities_of_a_schedule_against_differences() -> None:
    furnace = schedule([0.0, 900.0, 3600.0], [300.0, 540.0, 500.0])
    slopes = schedule_progress_sensitivities(furnace, B0, Q)
    step = 1e-4
    up, down = (schedule_progress(furnace, B0, Q * (1.0 + s)) for s in (step, -step))
    assert_allclose(slopes["activation_energy"], (up - down) / (2.0 * step * Q), rtol=1e-5)
    assert_allclose(slopes["prefactor"], schedule_progress(furnace, 1.0, Q), rtol=1e-14)


@pytest.mark.parametrize(
    ("times", "kelvin", "what"),
    [
        ([0.0], [300.0], r"^times and temperatures must be 2 points or more in pairs"),
        ([0.0, 1.0], [300.0], r"^times and temperatures must be 2 points or more in pairs"),
        ([0.0, 2.0, 1.0], [300.0, 300.0, 300.0], r"^times must be in order.*\(1 bad of 2"),
        ([0.0, 1.0], [300.0, 0.0], r"^temperatures must be positive"),
        ([0.0, 1.0], [300.0, np.nan], r"^temperatures must be present \(1 bad of 2"),
        ([np.nan, 1.0], [300.0, 300.0], r"^times must be present"),
        ([0.0, np.inf], [300.0, 300.0], r"^times must be finite"),
    ],
)
def test_refuses_a_schedule_that_is_none(
    times: list[float], kelvin: list[float], what: str
) -> None:
    with pytest.raises(InvalidArgument, match=what):
        schedule(times, kelvin)


@pytest.mark.parametrize("bad", [0.0, 1.0, -0.1, 1.2])
def test_refuses_an_impossible_fraction_by_name(bad: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^fraction must be between 0 and 1 \(1 bad of 2"):
        time_for_fraction([0.5, bad], 1e-3, N)


@pytest.mark.parametrize(("name", "bad"), [("prefactor", 0.0), ("activation_energy", -1.0)])
def test_refuses_impossible_constants_by_name(name: str, bad: float) -> None:
    furnace = schedule([0.0, 900.0], [300.0, 540.0])
    good = {"prefactor": B0, "activation_energy": Q}
    for function in (schedule_progress, schedule_progress_sensitivities):
        with pytest.raises(InvalidArgument, match=rf"^{name} must be"):
            function(furnace, **(good | {name: bad}))
