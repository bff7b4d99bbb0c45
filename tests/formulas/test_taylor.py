"""Density and stress: measured lines, round trips, refusals."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.taylor import (
    mean_spacing,
    taylor_density,
    taylor_density_from_slope,
    taylor_stress,
    taylor_stress_from_slope,
)

FERRITE = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "ferrite_line.toml").read_text("utf-8")
)
BASELINE = FERRITE["baseline_mpa"] * 1e6
SLOPE = FERRITE["slope_n_per_m"]


def test_the_measured_line_of_cold_rolled_ferrite_there_and_back() -> None:
    # Tetsu-to-Hagane 104 (2018) 683-688: yield stress = 50 MPa + 18 N/m sqrt(density).
    density = np.array([7e13, 1e14, 1e15, 2e15, 5e15])
    yield_stress = BASELINE + 18.0 * density**0.5
    assert_allclose(taylor_density_from_slope(yield_stress - BASELINE, SLOPE), density, rtol=1e-12)
    assert_allclose(BASELINE + taylor_stress_from_slope(density, SLOPE), yield_stress, rtol=1e-12)


def test_230_mpa_of_that_line_are_1e14() -> None:
    # 180 MPa over 18 N/m, squared.
    assert_allclose(taylor_density_from_slope(230e6 - BASELINE, SLOPE), 1e14, rtol=1e-12)


@pytest.mark.parametrize(("density", "stress_mpa"), [(row[0], row[1]) for row in FERRITE["rows"]])
def test_stresses_of_that_line(density: float, stress_mpa: float) -> None:
    stress = BASELINE + taylor_stress_from_slope(density, SLOPE)
    assert_allclose(stress / 1e6, stress_mpa, atol=0.05)


def test_that_line_at_the_densities_of_another_laboratory() -> None:
    # ISIJ Int. 54 (2014) 206-211: cold-rolled carbon steel, 7e13 to 2e15 per m2 over 40 %
    # reduction; the line of the ferrite puts 201 and 855 MPa there.
    stress = BASELINE + taylor_stress_from_slope([7e13, 2e15], SLOPE)
    assert_allclose(stress / 1e6, [201.0, 855.0], atol=0.5)


def test_that_slope_as_a_coefficient() -> None:
    # M alpha = 18 / (80 GPa 0.248 nm) = 0.907, alpha 0.302 for M = 3 (worked out by hand).
    whole = taylor_stress(1e14, 3.0, 0.3024, 80e9, 0.248e-9)
    assert_allclose(whole, taylor_stress_from_slope(1e14, SLOPE), rtol=3e-4)


@pytest.mark.parametrize(
    ("density", "alpha", "stress_mpa"),
    # Printed 316L, 1e15 per m2 as built (Metall. Mater. Trans. A 49 (2018) 3011), half of that
    # after heat treatment (Materials 17 (2024) 454); M 3.06, G 77 GPa, b 0.258 nm by hand.
    [(1e15, 0.2, 384.0), (1e15, 0.3, 577.0), (5e14, 0.2, 272.0), (5e14, 0.3, 408.0)],
)
def test_stress_carried_by_dislocations_of_printed_steel(
    density: float, alpha: float, stress_mpa: float
) -> None:
    stress = taylor_stress(density, 3.06, alpha, 77e9, 0.258e-9)
    assert_allclose(stress / 1e6, stress_mpa, atol=0.8)


def test_there_and_back() -> None:
    density = np.logspace(10, 17, 15)
    constants = (3.06, 0.3, 44e9, 0.2556e-9)
    assert_allclose(
        taylor_density(taylor_stress(density, *constants), *constants), density, rtol=1e-12
    )


def test_spacing_of_a_square_net() -> None:
    # 1e14 lines per m2 are 1e7 to a metre.
    assert_allclose(mean_spacing([1e14, 1e10]), [1e-7, 1e-5], rtol=1e-15)


@pytest.mark.parametrize("stress", [0.0, -1e6])
def test_a_stress_at_or_below_zero_has_no_density(stress: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^stress must be positive"):
        taylor_density_from_slope([1e8, stress], SLOPE)
