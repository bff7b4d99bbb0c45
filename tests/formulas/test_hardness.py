"""Hardness: the standards' constants and tables, similarity, round trips."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.formulas.hardness import (
    brinell_diameter,
    brinell_hardness,
    brinell_hardness_sensitivities,
    depth_ratio,
    knoop_diagonal,
    knoop_hardness,
    vickers_diagonal,
    vickers_hardness,
)

KGF_PER_MM2 = 9.80665e6  # Pa
MM = 1e-3
REFERENCE = Path(__file__).parents[1] / "reference"


def rows(name: str) -> list[list[float]]:
    table = tomllib.loads((REFERENCE / name).read_text("utf-8"))
    assert table["source"]
    return [list(row) for row in table["rows"]]


@pytest.mark.parametrize(("force", "diagonal", "hv"), rows("vickers_nominal_forces.toml"))
def test_vickers_numbers_of_the_nominal_forces(force: float, diagonal: float, hv: float) -> None:
    # ISO 6507-1:2018; its printed 0.1891 is 0.0038 % high, and the numbers have 2 decimals.
    h = vickers_hardness(force, diagonal * MM, diagonal * MM)
    assert_allclose(h / KGF_PER_MM2, hv, rtol=4e-5, atol=0.006)


def test_vickers_constants() -> None:
    # 2 sin 68 deg = 1.854367709 (printed 1.8544) in kgf, over 9.80665 = 0.189092882 (printed
    # 0.1891) in N: ISO 6507-1 and ASTM E384.
    assert_allclose(vickers_hardness(9.80665, MM, MM) / KGF_PER_MM2, 1.854367709, rtol=1e-9)
    assert_allclose(vickers_hardness(1.0, MM, MM) / KGF_PER_MM2, 0.189092882, rtol=3e-9)


def test_vickers_takes_the_mean_of_both_diagonals() -> None:
    # ISO 6507-1:2018: the arithmetical mean of the two diagonals is taken.
    assert_allclose(
        vickers_hardness(9.807, 0.09 * MM, 0.11 * MM), vickers_hardness(9.807, 0.1 * MM, 0.1 * MM)
    )


def test_knoop_constants() -> None:
    # Edges at 172 deg 30 min and 130 deg give 14.22896 (printed 14.229) in kgf and 1.450950
    # (printed 1.451) in N: ISO 4545-1. One over it is 0.070279, the indenter's constant.
    kgf = knoop_hardness(9.80665, MM) / KGF_PER_MM2
    assert_allclose(kgf, 14.22896, rtol=5e-7)
    assert_allclose(kgf, 14.229, rtol=1e-5)
    assert_allclose(1.0 / kgf, 0.070279, rtol=1e-5)
    assert_allclose(knoop_hardness(1.0, MM) / KGF_PER_MM2, 1.451, rtol=4e-5)


@pytest.mark.parametrize(
    ("force", "diagonal_um"), [(0.09807, 30.0), (0.9807, 85.0), (4.903, 210.5), (9.807, 300.0)]
)
def test_knoop_numbers_of_the_nominal_forces(force: float, diagonal_um: float) -> None:
    # ISO 4545-1: HK = 1.451 F / d^2 with F in N and d in mm, nominal forces of its scales.
    printed = 1.451 * force / (diagonal_um * MM) ** 2
    assert_allclose(knoop_hardness(force, diagonal_um * 1e-6) / KGF_PER_MM2, printed, rtol=4e-5)


@pytest.mark.parametrize(("diameter", "hbw"), rows("brinell_3000_kgf.toml"))
def test_brinell_table(diameter: float, hbw: float) -> None:
    h = brinell_hardness(29420.0, diameter * MM, diameter * MM, 10.0 * MM)
    assert abs(float(h) / KGF_PER_MM2 - hbw) < 1.0


@pytest.mark.parametrize(
    ("ball", "force", "diameter", "hbw"),
    # ISO 6506-1 by its printed form 0.102 x 2 F / (pi D (D - sqrt(D^2 - d^2))), worked out
    # apart from this package; 76.3 and 95.5 are the tables' entries (from memory).
    [(10.0, 9807.0, 4.0, 76.3), (10.0, 29420.0, 6.0, 95.5), (2.5, 1839.0, 1.0, 228.9)],
)
def test_brinell_pairs(ball: float, force: float, diameter: float, hbw: float) -> None:
    h = brinell_hardness(force, diameter * MM, diameter * MM, ball * MM)
    assert_allclose(h / KGF_PER_MM2, hbw, rtol=7e-4)  # 0.102 alone is 0.028 % high


def test_brinell_similarity() -> None:
    # ISO 6506-1: equal 0.102 F / D^2 (here 30) and equal d / D give one hardness; the
    # nominal forces 29420, 7355 and 1839 N are rounded, hence 0.02 %.
    force, ball, d = np.array([[29420.0, 10.0, 4.0], [7355.0, 5.0, 2.0], [1839.0, 2.5, 1.0]]).T
    h = brinell_hardness(force, d * MM, d * MM, ball * MM)
    assert_allclose(h, h[0], rtol=2e-4)


def test_a_shallow_brinell_indent_is_force_over_a_flat_disc() -> None:
    # Limit: as d/D goes to 0 the area of contact is that of the disc, pi d^2 / 4.
    assert_allclose(
        brinell_hardness(1.0, 1e-9, 1e-9, 1e-2), 1.0 / (np.pi * 1e-18 / 4.0), rtol=1e-12
    )


@pytest.mark.parametrize("diameter", [10.0, 10.5, 1e3])
def test_an_indent_as_wide_as_its_ball_has_no_hardness(diameter: float) -> None:
    assert np.isnan(brinell_hardness(29420.0, diameter * MM, diameter * MM, 10 * MM))
    slopes = brinell_hardness_sensitivities(29420.0, diameter * MM, diameter * MM, 10 * MM)
    assert all(np.isnan(slope) for slope in slopes.values())


def test_a_metal_too_soft_for_its_ball_has_no_indent() -> None:
    # HBW 1 under 3000 kgf on 10 mm: the ball would be in to beyond its middle.
    assert np.isnan(depth_ratio(29420.0, KGF_PER_MM2, 10 * MM))
    assert np.isnan(brinell_diameter(29420.0, KGF_PER_MM2, 10 * MM))


def test_there_and_back() -> None:
    hardness = np.array([40.0, 183.1, 940.0]) * KGF_PER_MM2
    d = vickers_diagonal(9.807, hardness)
    assert_allclose(vickers_hardness(9.807, d, d), hardness, rtol=1e-14)
    assert_allclose(knoop_hardness(0.9807, knoop_diagonal(0.9807, hardness)), hardness, rtol=1e-14)
    d = brinell_diameter(7355.0, hardness, 5e-3)
    assert_allclose(brinell_hardness(7355.0, d, d, 5e-3), hardness, rtol=1e-13)
