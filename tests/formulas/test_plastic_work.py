"""Work along a polyline: exact for what it is, second order for the curve behind it."""

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from coldwork.errors import InvalidArgument
from coldwork.formulas.hardening_laws import voce_stress, voce_work
from coldwork.formulas.plastic_work import elastic_line_work, polyline_work


@pytest.mark.parametrize("count", [2, 17, 200_000])
def test_is_the_polylines_own_integral(count: int) -> None:
    # Against the same sum with exact addition (math.fsum), at uneven, partly falling strain.
    rng = np.random.default_rng(5)
    strain = np.cumsum(rng.uniform(-0.2, 1.0, count)) / count
    stress = rng.uniform(1e8, 4e8, count)
    exact = math.fsum(
        0.5 * (float(a) + float(b)) * (float(y) - float(x))
        for a, b, x, y in zip(stress, stress[1:], strain, strain[1:], strict=False)
    )
    assert_allclose(polyline_work(stress, strain), exact, rtol=1e-12)


def test_a_straight_line_is_a_trapezium() -> None:
    strain = np.array([0.0, 0.01, 0.07, 0.2])
    assert_allclose(polyline_work(100e6 + 1e9 * strain, strain), 0.5 * 400e6 * 0.2, rtol=1e-14)


def test_misses_the_curve_by_the_square_of_the_spacing() -> None:
    # The trapezoidal rule's error, -h^2 (f'(b) - f'(a)) / 12 (Euler and Maclaurin).
    constants = (50e6, 320e6, 1.7e9)
    for count in (100, 1000):
        strain = np.linspace(0.0, 0.3, count + 1)
        found = polyline_work(voce_stress(strain, *constants), strain)
        decay = 1.7e9 / 320e6
        slopes = decay * 270e6 * (np.exp(-decay * 0.3) - 1.0)
        missed = (0.3 / count) ** 2 * slopes / 12.0
        assert_allclose(found - voce_work(0.3, *constants), missed, rtol=1e-3)


def test_unloading_and_loading_again_adds_nothing() -> None:
    stress = np.array([100e6, 200e6, 50e6, 200e6, 210e6])
    strain = np.array([0.0, 0.02, 0.02, 0.02, 0.03])
    assert_allclose(
        polyline_work(stress, strain), polyline_work(stress[[0, 1, 4]], strain[[0, 1, 4]])
    )


@pytest.mark.parametrize("strain", [0.002, 0.05, -0.05])
def test_the_elastic_lines_part_is_its_integral(strain: float) -> None:
    # By quadrature of sigma d eps_p with eps_p = ln(1 + e) - e (1 + e).
    slope = 115e9
    area, _ = quad(lambda e: slope * e * (1.0 + e) * (1.0 / (1.0 + e) - 1.0 - 2.0 * e), 0.0, strain)
    assert_allclose(elastic_line_work(slope, strain), area, rtol=1e-9)


def test_one_point_does_no_work_and_a_missing_one_spoils_it() -> None:
    assert polyline_work([1e8], [0.1]) == 0.0
    assert np.isnan(polyline_work([1e8, np.nan], [0.0, 0.1]))


def test_refuses_what_does_not_go_in_pairs() -> None:
    with pytest.raises(InvalidArgument, match="must go in pairs"):
        polyline_work([1e8, 2e8], [0.0])
    with pytest.raises(InvalidArgument, match="true_stress must be finite"):
        polyline_work([1e8, np.inf], [0.0, 0.1])
    with pytest.raises(InvalidArgument, match="slope must be finite"):
        elastic_line_work(float("inf"), 0.1)
