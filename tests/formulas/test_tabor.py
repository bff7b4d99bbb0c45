"""Flow stress from pressure: Tabor's factor, the intercept, signs."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.formulas.tabor import tabor_flow_stress


@pytest.mark.parametrize(
    ("pressure", "stress"), [(39.5, 12.3), (88.0, 27.0), (227.0, 70.0), (6.7, 2.1)]
)
def test_heavily_worked_metals_have_a_factor_near_3(pressure: float, stress: float) -> None:
    # Tabor 1951, pressure against yield stress (kgf/mm2) of aluminium, copper, mild steel and
    # tellurium-lead (from memory); as pressures over the projected area times sin 68 deg they
    # are numbers over the contact area with a factor of 2.96 to 3.02.
    contact = 0.9272 * pressure
    assert_allclose(tabor_flow_stress(contact, 0.0, 3.0), stress, rtol=0.02)


def test_the_steel_line_is_its_inverse_factor_and_intercept() -> None:
    # Pavlina and Van Tyne, J. Mater. Eng. Perform. 17 (2008) 888-893: yield = -90.7 + 2.876 HV
    # MPa (from memory). As (p - p0) / C with p in MPa: C = 9.80665 / 2.876, p0 = 90.7 C.
    hv = np.array([150.0, 300.0, 500.0])
    c = 9.80665 / 2.876
    stress = tabor_flow_stress(hv * 9.80665e6, 90.7e6 * c, c)
    assert_allclose(stress / 1e6, -90.7 + 2.876 * hv, rtol=1e-12)


def test_a_pressure_below_the_intercept_gives_a_negative_stress() -> None:
    assert tabor_flow_stress(1e8, 2e8, 3.0) < 0.0
    assert tabor_flow_stress(2e8, 2e8, 3.0) == 0.0
