"""Annealing: published pressures and sizes, the balance of a bulge, where nothing grows."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.annealing import (
    critical_bulge_radius,
    critical_bulge_radius_sensitivities,
    curvature_pressure,
    net_pressure,
    zener_pressure,
)
from coldwork.formulas.line_energy import line_energy_rule_of_thumb
from coldwork.formulas.stored_energy import stored_energy


@pytest.mark.parametrize(
    ("fraction", "radius_nm", "gamma", "mpa"),
    # 3 f gamma / (2 r) (after Zener; course notes on recrystallisation derive it), by hand.
    [(0.01, 50.0, 0.3, 0.0900), (0.005, 100.0, 0.625, 0.0469)],
)
def test_drag_of_particles(fraction: float, radius_nm: float, gamma: float, mpa: float) -> None:
    assert_allclose(zener_pressure(fraction, radius_nm * 1e-9, gamma) / 1e6, mpa, atol=0.5e-4)


def test_pressure_of_grain_growth() -> None:
    # About 0.1 MPa for 0.3 J/m2 and grains of 10 um (course notes); 3 gamma / D = 0.0900 MPa,
    # a radius of curvature of 2 D / 3.
    assert_allclose(curvature_pressure(0.3, 2.0 / 3.0 * 10e-6) / 1e6, 0.0900, atol=0.5e-4)
    assert round(float(curvature_pressure(0.3, 2.0 / 3.0 * 10e-6)) / 1e6, 1) == 0.1


@pytest.mark.parametrize(("mpa", "um"), [(1.38, 0.906), (10.0, 0.125)])
def test_critical_bulge_of_copper(mpa: float, um: float) -> None:
    # Bailey and Hirsch 1962, r* = 2 gamma / P, gamma 0.625 J/m2.
    radius = critical_bulge_radius(0.625, mpa * 1e6) * 1e6
    assert_allclose(radius, um, atol=0.5e-3)


def test_driving_pressure_is_the_stored_energy() -> None:
    # Copper, 1e15 lines per m2 at half G b^2: 1.38 MPa; at 1e16 13.8 MPa.
    line = line_energy_rule_of_thumb(42.1e9, 0.256e-9)
    assert_allclose(stored_energy([1e15, 1e16], line) / 1e6, [1.38, 13.8], rtol=1e-3)


def test_a_bulge_of_the_critical_size_is_in_balance() -> None:
    pressure = net_pressure(1.38e6, zener_pressure(0.01, 50e-9, 0.3), 0.0)
    radius = critical_bulge_radius(0.625, pressure)
    assert_allclose(net_pressure(pressure, 0.0, curvature_pressure(0.625, radius)), 0.0, atol=1e-6)
    larger = curvature_pressure(0.625, 1.01 * radius)
    assert net_pressure(pressure, 0.0, larger) > 0.0


def test_particles_make_the_critical_size_larger() -> None:
    held = critical_bulge_radius(0.625, net_pressure(1.38e6, 0.09e6, 0.0))
    assert_allclose(held / critical_bulge_radius(0.625, 1.38e6), 1.38 / 1.29, rtol=1e-12)


def test_held_boundaries_have_no_critical_size() -> None:
    # Pinned once the drag is as large as the driving pressure.
    net = net_pressure(1e6, [0.0, 1e6, 2e6], 0.0)
    assert net.tolist() == [1e6, 0.0, -1e6]
    assert np.isnan(critical_bulge_radius(0.625, net)).tolist() == [False, True, True]
    for slope in critical_bulge_radius_sensitivities(0.625, net).values():
        assert np.isnan(slope).tolist() == [False, True, True]


def test_no_particles_hold_nothing() -> None:
    assert zener_pressure(0.0, 50e-9, 0.3) == 0.0


@pytest.mark.parametrize("bad", [-0.01, 1.01, 5.0])
def test_refuses_a_fraction_out_of_range_by_name(bad: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^volume_fraction must be from 0 to 1 \(1 bad of 2"):
        zener_pressure([0.01, bad], 50e-9, 0.3)
