"""Pressure over the projected area: geometry, limits, the two conventions."""

import numpy as np
from numpy.testing import assert_allclose

from coldwork.formulas.hardness import brinell_hardness
from coldwork.formulas.pressure import (
    brinell_projected_pressure,
    brinell_strain,
    projected_pressure,
)
from coldwork.formulas.tabor import tabor_flow_stress

KGF_PER_MM2 = 9.80665e6  # Pa


def test_vickers_number_is_below_the_pressure_on_the_projected_area() -> None:
    # sin 68 deg = 0.927183855 of it: geometry of the pyramid of ISO 6507-1.
    assert_allclose(1.0 / projected_pressure(1.0), 0.927183855, rtol=1e-9)


def test_the_two_areas_are_7_9_percent_apart_in_flow_stress() -> None:
    # HV 200 is 1961.3 MPa; over 3 that is 653.8 MPa, and 705.1 MPa if the factor 3 is meant
    # for the projected area (worked out by hand).
    h = 200.0 * KGF_PER_MM2
    assert_allclose(tabor_flow_stress(h, 0.0, 3.0) / 1e6, 653.8, atol=0.05)
    assert_allclose(tabor_flow_stress(projected_pressure(h), 0.0, 3.0) / 1e6, 705.1, atol=0.05)


def test_brinell_pressure_is_force_over_the_circle() -> None:
    # Meyer's definition 4 F / (pi d^2), Tabor 1951, from the diameter itself.
    d = np.array([2.4, 3.0, 4.0, 6.0, 9.9]) * 1e-3
    h = brinell_hardness(29420.0, d, d, 10e-3)
    p = brinell_projected_pressure(h, 29420.0, 10e-3)
    assert_allclose(p, 4.0 * 29420.0 / (np.pi * d**2), rtol=1e-12)


def test_brinell_strain_is_a_fifth_of_the_diameters() -> None:
    # Tabor 1951: 0.2 d / D (from memory).
    d = np.array([2.4, 4.0, 6.0]) * 1e-3
    h = brinell_hardness(29420.0, d, d, 10e-3)
    assert_allclose(brinell_strain(h, 29420.0, 10e-3, 0.2), 0.2 * d / 10e-3, rtol=1e-12)


def test_a_shallow_indent_has_one_area_only() -> None:
    h = 2e9
    assert_allclose(brinell_projected_pressure(h, 1e-9, 10e-3), h, rtol=1e-12)


def test_a_metal_too_soft_for_its_ball_has_neither() -> None:
    assert np.isnan(brinell_projected_pressure(KGF_PER_MM2, 29420.0, 10e-3))
    assert np.isnan(brinell_strain(KGF_PER_MM2, 29420.0, 10e-3, 0.2))
