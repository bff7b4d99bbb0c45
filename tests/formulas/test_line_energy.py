"""Line energy: four characters, exact ratios, the field's own integral, refusals."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import constants
from scipy.integrate import quad

from coldwork.errors import InvalidArgument
from coldwork.formulas.line_energy import (
    UNIFORM_MEAN_COS2,
    core_radius,
    energy_factor,
    line_energy,
    line_energy_rule_of_thumb,
    line_energy_sensitivities,
    mean_cos2,
    outer_radius,
)

TABLE = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "line_energy_characters.toml").read_text("utf-8")
)
G, B = TABLE["shear_modulus_gpa"] * 1e9, TABLE["burgers_vector_nm"] * 1e-9
NU, R = TABLE["poisson_ratio"], TABLE["outer_radius_um"] * 1e-6


def energy(cos2: float) -> float:
    return float(line_energy(energy_factor(G, NU, cos2), B, R, B, G, 0.0))


@pytest.mark.parametrize(("angle", "joule", "in_gb2", "ev_per_b"), TABLE["rows"])
def test_four_characters_to_every_digit(
    angle: float, joule: float, in_gb2: float, ev_per_b: float
) -> None:
    e = energy(mean_cos2([np.radians(angle)], [1.0]))
    assert_allclose(e, joule, atol=0.5e-15)
    assert_allclose(e / (G * B**2), in_gb2, atol=0.5e-6)
    assert_allclose(e * B / constants.electron_volt, ev_per_b, atol=0.5e-4)


def test_edge_over_screw() -> None:
    # Hirth and Lothe 1982: exactly 1 / (1 - nu) = 1.522070 for copper.
    assert_allclose(energy(0.0) / energy(1.0), 1.0 / (1.0 - NU), rtol=1e-14)
    assert_allclose(energy(0.0) / energy(1.0), 1.522070, atol=0.5e-6)


def test_isotropic_factors() -> None:
    # Screw G, edge G/(1-nu), 60 degrees G (1 - nu/4)/(1 - nu): 50, 71.428571 and 66.071429 for
    # G 50 and nu 0.3, by the integral for general anisotropy, worked out apart from this package.
    factors = energy_factor(50.0, 0.3, np.cos(np.radians([0.0, 90.0, 60.0])) ** 2)
    assert_allclose(factors, [50.0, 71.428571, 66.071429], atol=0.5e-6)


def test_uniform_mix_is_half_and_half() -> None:
    # The mean of cos^2 over all angles is 1/2, exactly.
    half = mean_cos2(np.radians([0.0, 90.0]), [0.5, 0.5])
    assert half == UNIFORM_MEAN_COS2
    assert energy(half) == energy(UNIFORM_MEAN_COS2)
    assert_allclose(energy(mean_cos2([np.pi / 4.0], [1.0])), energy(half), rtol=1e-15)
    round_loop, _ = quad(lambda beta: energy(np.cos(beta) ** 2) / np.pi, 0.0, np.pi)
    assert_allclose(round_loop, energy(half), rtol=1e-9)


def test_screw_is_the_energy_of_its_own_field() -> None:
    # Shear stress G b / (2 pi r) of a screw (Volterra): density stress^2 / 2G, over the shells.
    field, _ = quad(
        lambda r: (G * B / (2 * np.pi * r)) ** 2 / (2 * G) * 2 * np.pi * r, B, R, epsabs=0.0
    )
    assert_allclose(energy(1.0), field, rtol=1e-8)


def test_rule_of_thumb_of_copper() -> None:
    # A textbook's companion, example 6.7: G 44 GPa, a 0.361 nm, b = a / sqrt 2: 1.4335e-9 J/m.
    e = line_energy_rule_of_thumb(44e9, 0.361e-9 / np.sqrt(2.0))
    assert_allclose(e, 1.4335e-9, atol=0.5e-13)


def test_rule_of_thumb_in_the_density_change_of_a_copper_bar() -> None:
    # Ashby and Jones, Engineering Materials, a problem: density 8.9323 to 8.9321 Mg/m3, b^2/4 of
    # dilatation per length, G = 3 E / 8 with E 124 GPa, b 0.256 nm: 1.4e15 per m2, 2.1 MJ/m3.
    density = (8.9323 - 8.9321) / 8.9323 / (0.256e-9**2 / 4.0)
    assert_allclose(density, 1.4e15, atol=0.05e15)
    stored = density * line_energy_rule_of_thumb(3.0 * 124e9 / 8.0, 0.256e-9)
    assert_allclose(stored / 1e6, 2.1, atol=0.05)


def test_core_term_adds_its_share_of_g_b2() -> None:
    k = energy_factor(G, NU, 0.5)
    with_core = line_energy(k, B, R, B, G, 0.1)
    assert_allclose(with_core - line_energy(k, B, R, B, G, 0.0), 0.1 * G * B**2, rtol=1e-12)


def test_radii_are_multiples() -> None:
    assert_allclose(core_radius(0.25, 0.256e-9), 0.064e-9, rtol=1e-15)
    assert_allclose(outer_radius(1e-7, 0.5), 5e-8, rtol=1e-15)


@pytest.mark.parametrize("outer", [B, 0.5 * B])
def test_no_room_between_the_radii_has_no_energy(outer: float) -> None:
    assert np.isnan(line_energy(G, B, outer, B, G, 0.5))
    assert np.isnan(line_energy_sensitivities(G, B, outer, B, G, 0.5)["burgers_vector"])


def test_a_core_term_that_leaves_nothing_has_no_energy() -> None:
    assert np.isnan(line_energy(G, B, 2.0 * B, B, G, -0.1))


@pytest.mark.parametrize("bad", [1.01, 2.0])
def test_refuses_a_mean_cosine_above_1(bad: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^mean_cos2 must be from 0 to 1 \(1 bad of 2"):
        energy_factor(G, NU, [0.5, bad])


@pytest.mark.parametrize("bad", [-1.0, 0.5, 0.7])
def test_refuses_an_impossible_poisson_ratio(bad: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^poisson_ratio must be between -1 and 0\.5"):
        energy_factor(G, bad, 0.5)


@pytest.mark.parametrize(
    ("angles", "fractions", "message"),
    [
        ([0.0, 1.0], [0.5, 0.4], "fractions must sum to 1"),
        ([0.0, 1.0], [1.0], "must go in pairs"),
        ([0.0, 1.0], [1.5, -0.5], "^fractions must be zero or positive"),
        ([0.0, np.inf], [0.5, 0.5], "^angles must be finite"),
        ([], [], "fractions must sum to 1"),
    ],
)
def test_refuses_a_mix_that_is_none(
    angles: list[float], fractions: list[float], message: str
) -> None:
    with pytest.raises(InvalidArgument, match=message):
        mean_cos2(angles, fractions)
