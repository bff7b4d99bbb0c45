"""Crystals: averages and moduli against printed values, limits, dimensions, refusals."""

import tomllib
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.crystals import (
    cubic_stiffness,
    hexagonal_stiffness,
    hill_shear_modulus,
    reuss_shear_modulus,
    stiffness_tensor,
    voigt_shear_modulus,
    youngs_modulus_along,
)

REFERENCE: Final = Path(__file__).parents[1] / "reference"
PRINTED: Final = tomllib.loads((REFERENCE / "crystal_energy_factors.toml").read_text())
CUBIC: Final[dict[str, list[float]]] = PRINTED["cubic"]
HEXAGONAL: Final[dict[str, list[float]]] = PRINTED["hexagonal"]
DIGIT = 0.0051  # GPa; printed to two decimals
HEXAGONAL_DIGIT = 0.012  # the constants of Ti were rounded to two decimals as well


@pytest.mark.parametrize("metal", CUBIC)
def test_cubic_averages(metal: str) -> None:
    c11, c12, c44, voigt, reuss, hill, *_ = CUBIC[metal]
    c = cubic_stiffness(c11, c12, c44)
    assert_allclose(voigt_shear_modulus(c), voigt, atol=DIGIT)
    assert_allclose(reuss_shear_modulus(c), reuss, atol=DIGIT)
    assert_allclose(hill_shear_modulus(c), hill, atol=DIGIT)


@pytest.mark.parametrize("metal", HEXAGONAL)
def test_hexagonal_averages(metal: str) -> None:
    *constants, voigt, reuss, hill, _, _, _ = HEXAGONAL[metal]
    c = hexagonal_stiffness(*constants)
    assert_allclose(voigt_shear_modulus(c), voigt, atol=HEXAGONAL_DIGIT)
    assert_allclose(reuss_shear_modulus(c), reuss, atol=HEXAGONAL_DIGIT)
    assert_allclose(hill_shear_modulus(c), hill, atol=HEXAGONAL_DIGIT)


@pytest.mark.parametrize(
    ("direction", "printed"),
    [((1, 0, 0), 66.6888), ((1, 1, 0), 130.3376), ((1, 1, 1), 191.1497)],
)
def test_youngs_modulus_of_copper(direction: tuple[int, int, int], printed: float) -> None:
    # Quoted in a public course script for (168.4, 121.4, 75.4) GPa, in these digits.
    c = cubic_stiffness(168.4, 121.4, 75.4)
    assert_allclose(youngs_modulus_along(c, direction), printed, atol=5.1e-5)


def test_tungsten_is_nearly_isotropic_and_an_isotropic_crystal_is_so_exactly() -> None:
    g, nu = 50e9, 0.3
    c = cubic_stiffness(2 * g * (1 - nu) / (1 - 2 * nu), 2 * g * nu / (1 - 2 * nu), g)
    for mean in (voigt_shear_modulus, reuss_shear_modulus, hill_shear_modulus):
        assert_allclose(mean(c), g, rtol=1e-14)
    for direction in ((1, 0, 0), (1, 1, 1), (1, 2, 3)):
        assert_allclose(youngs_modulus_along(c, direction), 2 * g * (1 + nu), rtol=1e-14)


def test_reuss_is_never_above_voigt() -> None:
    for c11, c12, c44, *_ in CUBIC.values():
        c = cubic_stiffness(c11, c12, c44)
        assert reuss_shear_modulus(c) <= voigt_shear_modulus(c) * (1 + 1e-14)


def test_moduli_scale_with_the_constants() -> None:
    c, tenfold = cubic_stiffness(168.4, 121.4, 75.4), cubic_stiffness(1684.0, 1214.0, 754.0)
    assert_allclose(hill_shear_modulus(tenfold), 10 * hill_shear_modulus(c), rtol=1e-14)
    along = (1, 2, 3)
    assert_allclose(
        youngs_modulus_along(tenfold, along), 10 * youngs_modulus_along(c, along), rtol=1e-14
    )


def test_the_tensor_has_the_symmetry_of_elasticity() -> None:
    tensor = stiffness_tensor(hexagonal_stiffness(162.39, 91.99, 68.99, 180.69, 46.70))
    assert tensor.shape == (3, 3, 3, 3)
    for axes in ((1, 0, 2, 3), (0, 1, 3, 2), (2, 3, 0, 1)):
        assert_allclose(tensor, tensor.transpose(axes))


def test_arrays_of_constants_give_an_array_of_crystals() -> None:
    c = cubic_stiffness(np.array([168.4, 108.2]), np.array([121.4, 61.3]), np.array([75.4, 28.5]))
    assert c.shape == (2, 6, 6)
    assert_allclose(hill_shear_modulus(c), [47.34, 26.36], atol=DIGIT)


@pytest.mark.parametrize(
    "constants", [(100.0, 120.0, 50.0), (100.0, -60.0, 50.0), (100.0, -120.0, 50.0)]
)
def test_an_unstable_cubic_crystal_is_refused(constants: tuple[float, float, float]) -> None:
    with pytest.raises(InvalidArgument, match=r"not stable: c11 > .c12. .*1 bad"):
        cubic_stiffness(*constants)


def test_a_soft_shear_is_refused_by_name() -> None:
    with pytest.raises(InvalidArgument, match="c44 must be positive"):
        cubic_stiffness(168.4, 121.4, -75.4)


def test_an_unstable_hexagonal_crystal_is_refused() -> None:
    with pytest.raises(InvalidArgument, match=r"not stable: .*c33 \(c11 \+ c12\)"):
        hexagonal_stiffness(162.39, 91.99, 200.0, 180.69, 46.70)


def test_a_direction_without_length_is_refused() -> None:
    with pytest.raises(InvalidArgument, match="direction must have a length"):
        youngs_modulus_along(cubic_stiffness(168.4, 121.4, 75.4), (0, 0, 0))
