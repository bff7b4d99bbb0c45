"""Walls and interiors: the sum of the regions, limits, energy with each region's own radius."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.composite import (
    effective_outer_radius,
    interior_density,
    interior_stress,
    mean_over_regions,
    stress_ratio,
    wall_density,
    wall_stress,
)
from coldwork.formulas.line_energy import line_energy
from coldwork.formulas.taylor import (
    mean_spacing,
    taylor_density_from_slope,
    taylor_stress_from_slope,
)
from coldwork.formulas.taylor_logarithmic import (
    taylor_density_logarithmic,
    taylor_stress_logarithmic,
)

SLOPE = 18.0  # N/m, cold-rolled ferrite
G, K, B = 42.1e9, 53e9, 0.256e-9


@pytest.mark.parametrize("fraction", [0.0, 0.05, 0.2, 0.5, 1.0])
@pytest.mark.parametrize("ratio", [0.5, 1.0, 3.0, 10.0])
def test_the_regions_carry_the_stress_of_the_whole(fraction: float, ratio: float) -> None:
    # Mughrabi 1983: stresses add by volume.
    wall, inside = wall_stress(200e6, fraction, ratio), interior_stress(200e6, fraction, ratio)
    assert_allclose(fraction * wall + (1.0 - fraction) * inside, 200e6, rtol=1e-14)
    assert_allclose(wall / inside, ratio, rtol=1e-14)


def test_a_case_by_hand() -> None:
    # f 0.2, walls nine times as dense: roots 3 and 1, so (0.2 * 3 + 0.8)^2 = 1.96 = rho_h/rho_c;
    # with rho_h 1.96e14 interiors hold 1e14, walls 9e14, the mean is 2.6e14.
    wall, inside = wall_density(1.96e14, 0.2, 9.0), interior_density(1.96e14, 0.2, 9.0)
    assert_allclose([inside, wall], [1e14, 9e14], rtol=1e-14)
    assert_allclose(mean_over_regions(wall, inside, 0.2), 2.6e14, rtol=1e-14)


def test_densities_are_those_of_the_stresses() -> None:
    # The two ways, by stress and by density, meet for a constant coefficient.
    for f, k in [(0.1, 25.0), (0.3, 4.0), (0.45, 1.5)]:
        whole = taylor_density_from_slope(250e6, SLOPE)
        for by_stress, by_density in (
            (wall_stress, wall_density),
            (interior_stress, interior_density),
        ):
            stress = by_stress(250e6, f, stress_ratio(k))
            assert_allclose(
                taylor_density_from_slope(stress, SLOPE), by_density(whole, f, k), rtol=1e-13
            )


@pytest.mark.parametrize(("fraction", "wall", "inside"), [(0.0, 9e14, 1e14), (1.0, 1e14, 1e14 / 9)])
def test_one_region_alone_is_the_whole(fraction: float, wall: float, inside: float) -> None:
    # No walls: interiors carry all of it. Walls alone: they do.
    assert_allclose(wall_density(1e14, fraction, 9.0), wall, rtol=1e-14)
    assert_allclose(interior_density(1e14, fraction, 9.0), inside, rtol=1e-14)
    mean = mean_over_regions(wall, inside, fraction)
    assert_allclose(mean, 1e14, rtol=1e-14)


def test_regions_alike_are_no_regions() -> None:
    f = np.linspace(0.0, 1.0, 7)
    assert_allclose(wall_density(1e15, f, 1.0), 1e15, rtol=1e-14)
    assert_allclose(interior_density(1e15, f, 1.0), 1e15, rtol=1e-14)


def test_uneven_lines_are_more_lines() -> None:
    # At one stress the mean density is least when even, by the inequality of Cauchy and Schwarz.
    f = np.linspace(0.01, 0.99, 31)[:, None]
    k = np.geomspace(1.001, 1e3, 40)
    mean = mean_over_regions(wall_density(1e15, f, k), interior_density(1e15, f, k), f)
    assert np.all(mean > 1e15)
    assert np.all(np.diff(mean, axis=1) > 0.0)


def energy(density: float) -> float:
    outer = mean_spacing(density)
    return float(density * line_energy(K, B, outer, B, G, 0.0))


def test_energy_with_each_regions_own_radius() -> None:
    # u = f rho_w E(rho_w) + (1 - f) rho_c E(rho_c), E = K b^2/4pi ln(1/(b sqrt(rho))) by hand:
    # walls at 9e14 have L = 4.869136, interiors at 1e14 have L = 5.967748.
    u = mean_over_regions(energy(9e14), energy(1e14), 0.2)
    by_hand = K * B**2 / (4.0 * np.pi) * (0.2 * 9e14 * 4.869136 + 0.8 * 1e14 * 5.967748)
    assert_allclose(u, by_hand, rtol=1e-6)
    assert_allclose(mean_over_regions(energy(9e14), energy(1e14), 0.0), energy(1e14), rtol=1e-15)
    assert_allclose(mean_over_regions(energy(9e14), energy(1e14), 1.0), energy(9e14), rtol=1e-15)


def test_the_logarithmic_law_goes_by_stress() -> None:
    # Each region with a coefficient of its own; the sum of their stresses is the whole's.
    copper = (3.06, 0.35, G, B, 1e12)
    wall = taylor_density_logarithmic(wall_stress(200e6, 0.2, 3.0), *copper)
    inside = taylor_density_logarithmic(interior_stress(200e6, 0.2, 3.0), *copper)
    assert wall / inside > 9.0
    carried = taylor_stress_logarithmic([wall, inside], *copper)
    assert_allclose(0.2 * carried[0] + 0.8 * carried[1], 200e6, rtol=1e-13)


def test_radius_of_an_arrangement() -> None:
    # Wilkens 1970: M = R_e sqrt(rho). M 1 is the mean spacing; 1e14 lines per m2 and M 0.5 are
    # 50 nm.
    assert_allclose(effective_outer_radius(0.5, 1e14), 50e-9, rtol=1e-14)
    assert_allclose(effective_outer_radius(1.0, [1e12, 1e15]), mean_spacing([1e12, 1e15]))


def test_stress_of_the_whole_from_the_densities() -> None:
    wall, inside = wall_density(5e14, 0.3, 6.0), interior_density(5e14, 0.3, 6.0)
    carried = 0.3 * taylor_stress_from_slope(wall, SLOPE)
    carried = carried + 0.7 * taylor_stress_from_slope(inside, SLOPE)
    assert_allclose(carried, taylor_stress_from_slope(5e14, SLOPE), rtol=1e-14)


@pytest.mark.parametrize("bad", [-0.01, 1.01, 20.0])
def test_refuses_a_fraction_out_of_range_by_name(bad: float) -> None:
    for function in (wall_stress, interior_stress, wall_density, interior_density):
        with pytest.raises(InvalidArgument, match=r"^wall_fraction must be from 0 to 1 \(1 bad of"):
            function(1e8, [0.2, bad], 3.0)
