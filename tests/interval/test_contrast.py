"""Differences with shared errors: what they resolve, against sampling and by hand."""

from math import exp, inf, log, sqrt

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import norm, ttest_ind
from scipy.stats import t as student

from coldwork.errors import InvalidArgument
from coldwork.interval.contrast import Part, Side, contrast


def side(name: str, value: float, own: float, shared: float) -> Side:
    return Side(name, value, (Part(own * value),), {"alpha": Part(shared * value)})


def test_five_percent_are_told_apart_under_twenty_percent_of_shared_error() -> None:
    # Own u 1 %, shared 20 %, a difference of 5 %.
    a, b = side("A", 1.05e14, 0.01, 0.20), side("B", 1.00e14, 0.01, 0.20)
    found = contrast(a, b)
    # u^2 = 0.0105^2 + 0.01^2 + (0.21 - 0.20)^2 in 1e14: 0.0176.
    assert_allclose(found.u_difference / 1e14, sqrt(0.0105**2 + 0.01**2 + 0.01**2), rtol=1e-12)
    assert found.difference_interval(0.95)[0] > 0.0
    assert_allclose(found.probability_a_above, norm.cdf(0.05 / 0.017613), rtol=1e-4)  # 0.998
    assert found.ratio_interval(0.95)[0] > 1.0
    # The root sum of squares of both u would hide it: 0.29e14 for a difference of 0.05e14.
    naive = sqrt(0.0105**2 + 0.01**2 + 0.21**2 + 0.20**2) * 1e14
    assert_allclose(found.u_if_independent, naive, rtol=1e-12)
    assert found.difference < 0.2 * found.u_if_independent
    # And u_own alone would claim more than there is.
    assert found.u_own < found.u_difference


def test_against_sampling() -> None:
    rng = np.random.default_rng(11)
    n = 400_000
    shared, other = rng.normal(size=(2, n))
    a = 5.0 + 0.1 * rng.normal(size=n) + 0.6 * shared - 0.2 * other
    b = 4.5 + 0.2 * rng.normal(size=n) + 0.5 * shared + 0.1 * other
    found = contrast(
        Side("A", 5.0, (Part(0.1),), {"s": Part(0.6), "o": Part(-0.2)}),
        Side("B", 4.5, (Part(0.2),), {"s": Part(0.5), "o": Part(0.1)}),
    )
    assert_allclose(found.u_difference, (a - b).std(), rtol=5e-3)
    assert_allclose(found.probability_a_above, (a > b).mean(), atol=3e-3)


def test_own_errors_of_few_degrees_of_freedom_are_those_of_welch() -> None:
    x, y = np.array([5.1, 5.4, 4.9, 5.3]), np.array([4.6, 4.9, 4.2])
    parts = [
        Side(n, v.mean(), (Part(v.std(ddof=1) / sqrt(v.size), v.size - 1.0),), {})
        for n, v in (("x", x), ("y", y))
    ]
    found, known = contrast(*parts), ttest_ind(x, y, equal_var=False)
    assert_allclose(found.probability_if_equal, known.pvalue, rtol=1e-6)
    low, high = known.confidence_interval(0.95)
    assert_allclose(found.difference_interval(0.95), (low, high), rtol=1e-7)


def test_equivalence_by_two_one_sided_tests() -> None:
    a, b = side("A", 1.02, 0.01, 0.2), side("B", 1.00, 0.01, 0.2)
    found = contrast(a, b)
    u = sqrt(2.0) * 0.01
    assert_allclose(found.u_log_ratio, u, rtol=1e-12)
    far = norm.sf((log(1.10) - log(1.02)) / u)
    assert_allclose(found.probability_if_apart(0.10), far, rtol=1e-6)
    assert found.probability_if_apart(0.01) > 0.5


def test_ratio_interval_is_that_of_its_logarithm() -> None:
    parts = (Part(0.05, 6.0),)
    found = contrast(Side("A", 2.0, parts, {}), Side("B", 1.0, (), {}))
    reach = student.ppf(0.975, 6.0) * 0.025
    assert_allclose(found.ratio_interval(0.95), (2.0 * exp(-reach), 2.0 * exp(reach)), rtol=1e-9)


def test_at_or_below_zero_there_is_a_difference_and_no_ratio() -> None:
    found = contrast(Side("A", -1.0, (Part(1.0),), {}), Side("B", 2.0, (Part(1.0),), {}))
    assert_allclose(found.probability_a_above, norm.cdf(-3.0 / sqrt(2.0)), rtol=1e-9)
    assert np.isnan(found.log_ratio)


def test_nothing_uncertain() -> None:
    found = contrast(Side("A", 2.0, (), {}), Side("B", 1.0, (), {}))
    assert found.probability_a_above == 1.0
    assert found.degrees_of_freedom == inf


@pytest.mark.parametrize(
    ("bad", "said"),
    [
        (Side("A", np.nan, (), {}), "A must have a value"),
        (Side("A", 1.0, (Part(np.nan),), {}), "nothing tells its scatter"),
    ],
)
def test_refusals(bad: Side, said: str) -> None:
    with pytest.raises(InvalidArgument, match=said):
        contrast(bad, Side("B", 1.0, (), {}))
