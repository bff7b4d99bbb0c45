"""Slip systems: geometry from crystallography, families, refusals by name."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.slip_systems import slip_system


@pytest.mark.parametrize("text", ["{111}<110>", "{110}<111>", "{112}<111>", "{123}<111>"])
def test_a_cubic_family_gives_a_member_that_fits(text: str) -> None:
    slip = slip_system(text, hexagonal=False)
    assert abs(np.dot(slip.normal, slip.burgers)) < 1e-15
    assert_allclose(np.linalg.norm(slip.normal), 1.0)
    assert_allclose(np.linalg.norm(slip.burgers), 1.0)


def test_round_brackets_mean_this_very_plane_and_direction() -> None:
    slip = slip_system("(1-11)[110]", hexagonal=False)
    assert_allclose(slip.normal, np.array([1, -1, 1]) / np.sqrt(3))
    assert_allclose(slip.burgers, np.array([1, 1, 0]) / np.sqrt(2))


def test_spaces_between_indices_are_welcome() -> None:
    assert slip_system("( 1 -1 1 ) [ 1 1 0 ]", hexagonal=False).normal == pytest.approx(
        slip_system("(1-11)[110]", hexagonal=False).normal
    )


def test_the_pyramidal_plane_is_inclined_as_geometry_says() -> None:
    # (10-11) meets the basal plane at atan(2 (c/a) / sqrt 3); Ti: 61.4 degrees.
    slip = slip_system("{10-11}<11-20>", hexagonal=True, c_over_a=1.588)
    inclined = np.degrees(np.arccos(abs(slip.normal[2])))
    assert_allclose(inclined, np.degrees(np.arctan(2 * 1.588 / np.sqrt(3))), rtol=1e-12)


def test_the_c_plus_a_vector_has_its_length_in_proportion() -> None:
    # 1/3 <11-23> rises by c over a basal step of a: atan(c/a) above the basal plane.
    slip = slip_system("{11-22}<11-23>", hexagonal=True, c_over_a=1.588)
    assert_allclose(abs(slip.burgers[2]), np.sin(np.arctan(1.588)), rtol=1e-12)


@pytest.mark.parametrize(
    ("text", "hexagonal", "why"),
    [
        ("111/110", False, "write it like"),
        ("{111}", False, "write it like"),
        ("", False, "write it like"),
        ("{1111}<110>", False, "Miller indices, three each"),
        ("{0001}<110>", True, "Miller-Bravais indices, four each"),
        ("{11a}<110>", False, "Miller indices, three each"),
        ("{000}<110>", False, "Miller indices, three each"),
        ("{1000}<11-20>", True, "sum to 0"),
        ("(111)[111]", False, "does not lie in the plane"),
        ("{11-22}<11-23>", True, "needs the axial ratio"),
    ],
)
def test_what_is_no_slip_system_is_refused(text: str, hexagonal: bool, why: str) -> None:
    with pytest.raises(InvalidArgument, match=why):
        slip_system(text, hexagonal=hexagonal)
