"""Engineering and true stress and strain: identities of a bar, round trip, both senses."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.tensile import (
    engineering_from_true,
    engineering_strain,
    engineering_stress,
    true_plastic_strain,
    true_strain,
    true_stress,
)


def test_a_bar_of_constant_volume_has_the_true_stress_of_its_own_section() -> None:
    # By the definition: force over the section that volume constancy leaves, S = S0 L0 / L.
    force, area, length, extension = 5.2e3, 20e-6, 50e-3, 11e-3
    section = area * length / (length + extension)
    stress = true_stress(engineering_stress(force, area), engineering_strain(extension, length))
    assert_allclose(stress, force / section, rtol=1e-15)


def test_true_strains_of_steps_add() -> None:
    # ln(L2 / L0) = ln(L1 / L0) + ln(L2 / L1), the reason for true strain.
    first, second = true_strain([0.12, 0.2])
    assert_allclose(true_strain(1.12 * 1.2 - 1.0), first + second, rtol=1e-14)


def test_compression_is_the_same_relation_with_the_other_sign() -> None:
    # Pressed to half its height the section doubles, and the true stress is half.
    assert_allclose(true_stress(-400e6, -0.5), -200e6, rtol=1e-15)
    assert_allclose(true_strain(-0.5), -np.log(2.0), rtol=1e-15)
    assert_allclose(true_plastic_strain(-0.1, -400e6, 100e9), -0.1 + 0.004, rtol=1e-14)


@pytest.mark.parametrize("sense", [1.0, -1.0])
def test_there_and_back_again(sense: float) -> None:
    e = sense * np.array([1e-6, 1e-3, 0.1, 0.6])
    r = sense * np.array([1e6, 90e6, 200e6, 170e6])
    stress, strain = engineering_from_true(true_stress(r, e), true_strain(e))
    assert_allclose(stress, r, rtol=1e-14)
    assert_allclose(strain, e, rtol=1e-14)


def test_small_strains_keep_their_digits() -> None:
    # ln(1 + e) by its series; log(1 + e) as written would keep ten digits.
    e = 1e-7
    assert_allclose(true_strain(e), e - e**2 / 2.0 + e**3 / 3.0, rtol=1e-15)


def test_refuses_a_strain_that_leaves_no_length() -> None:
    with pytest.raises(InvalidArgument, match="engineering_strain must be between -1 and inf"):
        true_strain([0.1, -1.0])
    with pytest.raises(InvalidArgument, match="true_strain must be finite"):
        engineering_from_true(1e8, np.inf)
