"""Combined uncertainty against a worked example that is printed elsewhere."""

from math import inf, sqrt
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.interval.combine import (
    Spread,
    combine,
    strength_ends,
    strength_probability_above,
)
from coldwork.measured import Measured
from coldwork.statistics.student import student_quantile

# JCGM 100:2008, H.1: calibration of an end gauge. l = l_S + d - l_S (d_alpha theta + alpha_S
# d_theta), all lengths in nm. Figures as quoted by four independent public repositories.
L_S: Final = 50_000_623.0
GAUGE: Final = {
    "l_S": Spread(25.0, shared=True, degrees_of_freedom=18.0),
    "d": Spread(sqrt(5.8**2 + 3.9**2 + 6.7**2), shared=False, degrees_of_freedom=25.4),
    "alpha_S": Spread(1.2e-6, shared=True, degrees_of_freedom=inf),
    "theta": Spread(0.41, shared=True, degrees_of_freedom=inf),
    "d_alpha": Spread(0.58e-6, shared=True, degrees_of_freedom=50.0),
    "d_theta": Spread(0.029, shared=False, degrees_of_freedom=2.0),
}


def gauge() -> Measured:
    def x(name: str, value: float) -> Measured:
        return Measured.of_input(name, np.array([value]))

    l_s = x("l_S", L_S)
    warm = x("d_alpha", 0.0) * x("theta", -0.1)
    apart = x("alpha_S", 11.5e-6) * x("d_theta", 0.0)
    return l_s + x("d", 215.0) - l_s * (warm + apart)


def test_end_gauge_value_and_contributions() -> None:
    length = gauge()
    assert_allclose(length.value, 50_000_838.0, atol=0.5)  # printed 50.000 838 mm
    printed = {"l_S": 25.0, "d": 9.7, "d_alpha": 2.9, "d_theta": 16.6}  # 16.675 unrounded
    for name, contribution in printed.items():
        size = np.abs(length.sensitivities[name]) * GAUGE[name].u
        assert_allclose(size, contribution, atol=0.08)


def test_end_gauge_combined_uncertainty() -> None:
    combined = combine(gauge(), GAUGE)
    assert_allclose(combined.u, 32.0, atol=0.5)  # printed 32 nm
    assert_allclose(combined.u**2, 1002.0, rtol=5e-3)  # printed 1002 nm2, from rounded parts
    assert_allclose(combined.degrees_of_freedom, 16.7, atol=0.1)  # printed 16.7
    assert_allclose(combined.u_own**2 + combined.u_shared**2, combined.u**2, rtol=1e-14)


def test_end_gauge_expanded_uncertainty() -> None:
    # The guide cuts the degrees of freedom to 16, t99(16) = 2.92 and U99 = 93 nm; coldwork does
    # not cut, so the test does.
    u = combine(gauge(), GAUGE).u
    k = student_quantile(0.995, np.array([16.0]))
    assert_allclose(k, 2.92, atol=0.005)
    assert_allclose(k * u, 93.0, atol=0.6)


def test_own_only_takes_shared_inputs_as_exact() -> None:
    combined = combine(gauge(), GAUGE, own_only=True)
    assert_allclose(combined.u_shared, 0.0)
    assert_allclose(combined.u, sqrt(9.682**2 + 16.675**2), rtol=1e-4)


def test_an_unknown_scatter_leaves_the_total_empty_not_zero() -> None:
    spreads = {
        "a": Spread(
            np.array([np.nan, 1.0]), shared=False, degrees_of_freedom=np.array([np.nan, 3.0])
        ),
        "b": Spread(2.0, shared=True, degrees_of_freedom=inf),
    }
    y = Measured(np.array([5.0, 5.0]), {"a": np.array([1.0, 1.0]), "b": np.array(1.0)})
    combined = combine(y, spreads)
    assert np.isnan(combined.u_own[0])
    assert np.isnan(combined.u[0])
    assert_allclose(combined.u_shared, 2.0)
    assert_allclose(combined.u[1], sqrt(5.0))


@pytest.mark.parametrize(
    ("value", "u", "limit", "published"),
    [
        # JCGM 106:2012, examples: a Zener diode's breakdown voltage and the viscosity of an
        # SAE 40 oil (from memory; the normal probabilities are arithmetic).
        (5.47, 0.05, 5.40, 0.919),
        (13.6, 1.8, 12.5, 0.7294),  # of the lower limit alone: Phi(1.1 / 1.8)
    ],
)
def test_conformance_probability(value: float, u: float, limit: float, published: float) -> None:
    one = np.array([u])
    combined = combine(
        Measured(np.array([value]), {"x": np.array(1.0)}),
        {"x": Spread(one, shared=True, degrees_of_freedom=inf)},
    )
    p = strength_probability_above(np.array([value]), combined, limit)
    assert_allclose(p, published, atol=5e-4)


def test_two_sided_conformance_probability() -> None:
    # SAE 40 oil between 12.5 and 16.3 mm2/s: 0.66 (JCGM 106:2012, from memory).
    combined = combine(
        Measured(np.array([13.6]), {"x": np.array(1.0)}),
        {"x": Spread(1.8, shared=True, degrees_of_freedom=inf)},
    )
    above = [strength_probability_above(np.array([13.6]), combined, x) for x in (12.5, 16.3)]
    assert_allclose(above[0] - above[1], 0.66263, atol=1e-5)


def test_ends_scale_with_the_quantity() -> None:
    y = Measured(np.array([10.0, 20.0]), {"x": np.array(1.0)})
    ends = strength_ends(
        y.value, combine(y, {"x": Spread(1.0, shared=True, degrees_of_freedom=inf)}), 0.975
    )
    tenfold = Measured(10 * y.value, {"x": np.array(10.0)})
    wide = strength_ends(
        tenfold.value,
        combine(tenfold, {"x": Spread(1.0, shared=True, degrees_of_freedom=inf)}),
        0.975,
    )
    assert_allclose(wide.lower, 10 * ends.lower, rtol=1e-14)
    assert_allclose(wide.upper, 10 * ends.upper, rtol=1e-14)
