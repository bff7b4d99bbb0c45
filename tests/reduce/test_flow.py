"""Points of a flow curve to the stress at the stated strain: repeats, neighbours, nothing."""

from collections.abc import Callable
from dataclasses import replace
from math import sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.inputs.method import Method
from coldwork.inputs.sheet import read_method
from coldwork.reduce.flow import reduce_flow
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import ReadingResults, Reduced
from coldwork.rules.coupon import NO_FLOW_STRESS_AT_STRAIN
from coldwork.rules.findings import Findings

Stretch = Callable[..., Readings]
WIRE: Final = Path(__file__).parents[2] / "sample_data" / "steel-wire"


@pytest.fixture(scope="module")
def method() -> Method:
    """The wire's method at a strain of 0.002, without testers."""
    found = replace(read_method(WIRE), testers=())
    assert found.plastic_strain == 0.002
    return found


def reduced_to(
    method: Method, readings: Readings, coupons: int = 1
) -> tuple[Reduced, ReadingResults, Findings]:
    table, findings = Reduced.empty(coupons, ()), Findings(coupons)
    results = reduce_flow(readings, method, table, Marks(readings, findings, ("f.csv",)))
    return table, results, findings


def curve(stretch: Stretch, points: list[tuple[float, float]]) -> Readings:
    strain, mpa = zip(*points, strict=True)
    return stretch([0] * len(points), {"plastic_strain": strain, "flow_stress_mpa": mpa})


def test_points_within_half_a_thousandth_are_repeats(method: Method, stretch: Stretch) -> None:
    # DESIGN section 5; 0.0015 and 0.0025 are exactly at its edge, in decimals
    points = [(0.0015, 300.0), (0.002, 303.0), (0.0025, 306.0), (0.00251, 400.0), (0.00149, 200.0)]
    table, results, _ = reduced_to(method, curve(stretch, points))
    assert_allclose(table.mean, 303e6)
    assert_allclose(table.sd, 3e6)
    assert table.repeats.tolist() == [3]
    assert table.effective.tolist() == [3.0]
    assert table.used.tolist() == [5]  # all points were usable, three of them were needed
    assert_allclose(results.weight, [1 / 3, 1 / 3, 1 / 3, 0.0, 0.0])


def test_between_neighbours_it_is_interpolated(method: Method, stretch: Stretch) -> None:
    # By hand: from 0.001 to 0.005, 0.002 is a quarter of the way: 0.75 x 300 + 0.25 x 340 = 310.
    points = [(0.0, 250.0), (0.001, 300.0), (0.005, 340.0), (0.02, 400.0)]
    table, results, findings = reduced_to(method, curve(stretch, points))
    assert_allclose(table.mean, 310e6, rtol=1e-14)
    assert_allclose(results.weight, [0.0, 0.75, 0.25, 0.0])
    assert np.isnan(table.sd[0])
    assert table.repeats.tolist() == [0]
    # the variance of a point, relative, goes with (w1 s1)^2 + (w2 s2)^2
    assert_allclose(table.effective, 310.0**2 / ((0.75 * 300) ** 2 + (0.25 * 340) ** 2), rtol=1e-12)
    assert not findings.has(NO_FLOW_STRESS_AT_STRAIN).any()


def test_the_order_of_the_points_does_not_matter(method: Method, stretch: Stretch) -> None:
    points = [(0.02, 400.0), (0.001, 300.0), (0.0, 250.0), (0.005, 340.0)]
    assert_allclose(reduced_to(method, curve(stretch, points))[0].mean, 310e6, rtol=1e-14)


def test_two_points_at_one_strain_share_a_neighbours_weight(
    method: Method, stretch: Stretch
) -> None:
    points = [(0.001, 299.0), (0.001, 301.0), (0.005, 340.0)]
    table, results, _ = reduced_to(method, curve(stretch, points))
    assert_allclose(table.mean, 310e6, rtol=1e-14)
    assert_allclose(results.weight, [0.375, 0.375, 0.25])


@pytest.mark.parametrize(
    "points",
    [
        [(0.003, 300.0), (0.005, 340.0)],  # all above
        [(0.0001, 250.0), (0.0014, 300.0)],  # all below
        [(0.01, 300.0)],
    ],
)
def test_it_never_extrapolates(
    method: Method, stretch: Stretch, points: list[tuple[float, float]]
) -> None:
    table, results, findings = reduced_to(method, curve(stretch, points))
    assert np.isnan(table.mean[0])
    assert findings.has(NO_FLOW_STRESS_AT_STRAIN).tolist() == [True]
    assert results.weight.tolist() == [0.0] * len(points)
    assert table.used.tolist() == [len(points)]


def test_a_repeat_beats_the_neighbours(method: Method, stretch: Stretch) -> None:
    points = [(0.001, 300.0), (0.0021, 320.0), (0.005, 340.0)]
    table, _, _ = reduced_to(method, curve(stretch, points))
    assert_allclose(table.mean, 320e6)
    assert table.repeats.tolist() == [1]
    assert np.isnan(table.sd[0])


def test_coupons_do_not_lend_each_other_points(method: Method, stretch: Stretch) -> None:
    readings = stretch(
        [0, 1, 1, 2],
        {
            "plastic_strain": [0.001, 0.004, 0.002, 0.005],
            "flow_stress_mpa": [300.0, 330.0, 310.0, 350.0],
        },
    )
    table, _, findings = reduced_to(method, readings, coupons=4)
    assert_allclose(table.mean, [np.nan, 310e6, np.nan, np.nan])
    assert findings.has(NO_FLOW_STRESS_AT_STRAIN).tolist() == [True, False, True, False]
    assert table.used.tolist() == [1, 2, 1, 0]


def test_scatter_of_repeats_is_that_of_jcgm_100(method: Method, stretch: Stretch) -> None:
    values = [300.0, 304.0, 301.0, 303.0]
    table, _, _ = reduced_to(method, curve(stretch, [(0.002, x) for x in values]))
    middle = sum(values) / 4
    s = sqrt(sum((x - middle) ** 2 for x in values) / 3)  # JCGM 100, 4.2.2
    assert_allclose(table.sd, s * 1e6, rtol=1e-12)
