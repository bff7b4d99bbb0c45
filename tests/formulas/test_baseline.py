"""Hall-Petch: a textbook's mild steel, and the limit of coarse grains."""

from numpy.testing import assert_allclose

from coldwork.formulas.baseline import hall_petch_stress


def test_mild_steel_of_a_textbook() -> None:
    # Textbook example: friction 70 MPa, k 0.74 MPa m^0.5, grain 25 um: 218 MPa (as reprinted
    # in a public course; the friction and k of mild steel are those of Armstrong's table).
    assert_allclose(70.0 + hall_petch_stress(25e-6, 0.74e6) / 1e6, 218.0, rtol=1e-12)


def test_grains_four_times_as_fine_add_twice_as_much() -> None:
    assert_allclose(hall_petch_stress(5e-6, 0.11e6), 2.0 * hall_petch_stress(20e-6, 0.11e6))


def test_coarse_grains_add_nothing() -> None:
    assert hall_petch_stress(1e6, 0.74e6) < 1e3
