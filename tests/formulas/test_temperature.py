"""Temperature: a published table of moduli, one scale for another, the thermal part."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import constants

from coldwork.formulas.constants import BOLTZMANN_CONSTANT, GAS_CONSTANT
from coldwork.formulas.taylor import taylor_density, taylor_stress
from coldwork.formulas.temperature import (
    athermal_temperature,
    shear_modulus_at,
    shear_modulus_at_sensitivities,
    thermal_stress,
    thermal_stress_sensitivities,
)

TABLE = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "modulus_over_temperature.toml").read_text("utf-8")
)


@pytest.mark.parametrize("row", TABLE["rows"], ids=lambda row: str(row[0]))
def test_the_published_law_in_printed_digits(row: list[float]) -> None:
    _, melting, at_300, slope, *printed = row
    found = shear_modulus_at(at_300 * 1e9, TABLE["temperatures_k"], 300.0, slope, melting)
    assert_allclose(found / 1e9, printed, atol=0.51e-2)


def test_two_steps_are_one() -> None:
    # Any reference will do: from 295 K to 400 K and on to 77 K, or at once.
    law = (-0.54, 1356.0)
    by_way = shear_modulus_at(shear_modulus_at(48.3e9, 400.0, 295.0, *law), 77.0, 400.0, *law)
    assert_allclose(shear_modulus_at(48.3e9, 77.0, 295.0, *law), by_way, rtol=1e-14)
    assert_allclose(shear_modulus_at(by_way, 295.0, 77.0, *law), 48.3e9, rtol=1e-14)


def test_another_modulus_falls_in_proportion() -> None:
    # Iron: the book's slope goes with its own 64 GPa, and takes the polycrystal's 82 along by
    # 72.59/64 = 1.1342 at 77 K (the table's own row).
    found = shear_modulus_at(82e9, 77.0, 300.0, -1.09, 1810.0)
    assert_allclose(found / 82e9, 72.59 / 64.0, atol=1e-4)


def test_at_the_reference_nothing_changes() -> None:
    kelvin = np.array([4.2, 77.0, 293.15, 900.0])
    assert_allclose(shear_modulus_at(45e9, kelvin, kelvin, -0.54, 1356.0), 45e9, rtol=1e-15)
    assert_allclose(shear_modulus_at(45e9, kelvin, 300.0, 0.0, 1356.0), 45e9, rtol=1e-15)


def test_nothing_above_the_melting_point_nor_where_the_line_has_come_down() -> None:
    found = shear_modulus_at(7.3e9, [600.0, 601.0, 602.0], 300.0, -0.76, 601.0)
    assert np.isnan(found).tolist() == [False, False, True]
    assert np.isnan(shear_modulus_at(7.3e9, 300.0, 700.0, -0.76, 601.0))
    steep = shear_modulus_at(10e9, [500.0, 999.0, 1001.0], 300.0, -1.0, 700.0)
    assert np.isnan(steep).tolist() == [False, True, True]
    assert np.isnan(shear_modulus_at(10e9, 690.0, 300.0, -2.0, 700.0))
    slopes = shear_modulus_at_sensitivities(7.3e9, [500.0, 650.0], 300.0, -0.76, 601.0)
    assert np.isnan(slopes["modulus"]).tolist() == [False, True]


def test_density_carries_over_and_stress_does_not() -> None:
    # 200 MPa of copper at 293 K are one density; at 77 K it carries 200 G(77)/G(293).
    law = (3.06, 0.3)
    warm, cold = (float(shear_modulus_at(42.1e9, t, 300.0, -0.54, 1356.0)) for t in (293.0, 77.0))
    density = taylor_density(200e6, *law, warm, 0.256e-9)
    assert_allclose(taylor_stress(density, *law, cold, 0.256e-9), 200e6 * cold / warm, rtol=1e-13)


def test_thermal_part_of_a_quarter_left_by_hand() -> None:
    # (1 - x^(2/3))^2 with x = 1/8: (1 - 1/4)^2 = 9/16.
    assert_allclose(thermal_stress(400e6, 300.0 / 8.0, 300.0), 225e6, rtol=1e-14)


def test_thermal_part_ends_at_the_athermal_temperature() -> None:
    kelvin = np.array([1e-9, 100.0, 339.9, 340.0, 341.0, 2000.0])
    left = thermal_stress(400e6, kelvin, 340.0)
    assert_allclose(left[0], 400e6, rtol=1e-6)
    assert np.all(np.diff(left[:4]) < 0.0)
    assert left[3:].tolist() == [0.0, 0.0, 0.0]
    for slope in thermal_stress_sensitivities(400e6, kelvin, 340.0).values():
        assert slope[3:].tolist() == [0.0, 0.0, 0.0]


def test_athermal_temperature_by_hand() -> None:
    # 0.8 eV at rates a factor e^20 apart: 0.8 e / (20 k) = 464.18 K with e, k of SI 2019.
    found = athermal_temperature(0.8 * constants.e, 1e-3 * np.exp(20.0), 1e-3)
    assert_allclose(found, 464.18, atol=0.005)


def test_a_slower_test_is_athermal_earlier() -> None:
    found = athermal_temperature(1.3e-19, 1e7, [1e-5, 1e-3, 1.0, 1e7, 1e8])
    assert np.all(np.diff(found[:3]) > 0.0)
    assert np.isnan(found).tolist() == [False, False, False, True, True]


def test_the_constants_are_those_of_codata() -> None:
    assert constants.k == BOLTZMANN_CONSTANT
    assert_allclose(GAS_CONSTANT, constants.R, rtol=1e-15)
