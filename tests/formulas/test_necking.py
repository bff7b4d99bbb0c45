"""Bridgman's correction: his table, limits, scaling."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.necking import bridgman_factor


@pytest.mark.parametrize(
    ("ratio", "printed"),
    [(1 / 3, 0.927), (1 / 2, 0.897), (1.0, 0.823), (2.0, 0.722), (3.0, 0.656), (4.0, 0.606)],
)
def test_agrees_with_the_printed_table(ratio: float, printed: float) -> None:
    # Bridgman 1952, table of the correction against a/R (from memory; printed to 3 places,
    # the last of them off by one in places, hence atol).
    assert_allclose(bridgman_factor(ratio, 1.0), printed, atol=1.5e-3)


def test_a_straight_bar_needs_no_correction() -> None:
    # To first order in x = a / 2R the factor is 1 - x / 2.
    assert_allclose(bridgman_factor(1e-3, 1e3), 1.0 - 0.25e-6, rtol=1e-12)


def test_is_the_same_for_a_bar_of_another_size() -> None:
    assert_allclose(bridgman_factor(3e-3, 5e-3), bridgman_factor(3.0, 5.0), rtol=1e-15)


def test_refuses_by_name() -> None:
    with pytest.raises(InvalidArgument, match="neck_radius must be positive"):
        bridgman_factor(0.0, 1e-3)
    with pytest.raises(InvalidArgument, match="profile_radius must be positive"):
        bridgman_factor(1e-3, [np.nan, -1.0])
