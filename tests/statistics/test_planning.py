"""Planning: variances of means against simulation-free identities, risks, counts."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import norm, t

from coldwork.errors import InvalidArgument
from coldwork.statistics.planning import (
    Variances,
    best_in_each,
    fewest,
    half_width,
    specific_risk,
)

PARTS = Variances(between=4.0, within=9.0, least=0.0, shared=1.0)


def test_the_variance_is_that_of_a_linear_model() -> None:
    # The mean as a weighted sum of independent errors, by a covariance matrix of its own.
    n, m = 3, 4
    groups = np.repeat(np.arange(n), m)
    covariance = 4.0 * (groups[:, None] == groups) + 9.0 * np.eye(n * m) + 1.0
    w = np.full(n * m, 1.0 / (n * m))
    assert_allclose(PARTS.u(n, m) ** 2, w @ covariance @ w, rtol=1e-14)


def test_what_cannot_be_averaged_away() -> None:
    assert_allclose(PARTS.u(1e12, 1e12), 1.0, rtol=1e-9)  # the shared part stays
    coarse = Variances(between=0.0, within=9.0, least=2.25, shared=0.0)
    assert_allclose(coarse.u(1, [2, 4, 400]) ** 2, [4.5, 2.25, 2.25])


def test_the_cheapest_number_of_values_is_the_one_that_a_search_finds() -> None:
    parts = Variances(between=1.0, within=16.0, least=0.0, shared=0.0)
    assert best_in_each(parts, 9.0, 1.0) == 12.0  # 4 sqrt(9), Cochran 1977, 10.6 (from memory)
    m = np.arange(1, 60)
    cost = (9.0 + m) * parts.own(1.0, m)  # cost at equal variance of the mean
    assert m[np.argmin(cost)] == 12
    assert best_in_each(Variances(0.0, 1.0, 0.0, 0.0), 1.0, 1.0) == np.inf


def test_half_width_is_students() -> None:
    parts = Variances(between=2.0, within=0.0, least=0.0, shared=0.0)
    assert_allclose(half_width(parts, 5, 1, 0.95), t.ppf(0.975, 4) * np.sqrt(2.0 / 5), rtol=1e-9)
    assert half_width(parts, 1, 1, 0.95) == np.inf  # one coupon tells no scatter
    alone = Variances(between=0.0, within=0.0, least=0.0, shared=4.0)
    assert_allclose(half_width(alone, 1, 1, 0.95), 2.0 * norm.ppf(0.975), rtol=1e-9)


def test_risk_of_printed_examples() -> None:
    # JCGM 106:2012 (from memory): 13.6 mm2/s, u 1.8, limits 12.5 and 16.3: p_c = 0.66; and
    # 5.47 V, u 0.05, limit 5.40 V: p_c = 0.919.
    oil = Variances(0.0, 0.0, 0.0, 1.8**2)
    assert_allclose(1.0 - specific_risk(oil, 1, 1, 13.6 - 12.5, 16.3 - 13.6), 0.66, atol=0.005)
    diode = Variances(0.0, 0.0, 0.0, 0.05**2)
    assert_allclose(1.0 - specific_risk(diode, 1, 1, np.inf, 0.07), 0.919, atol=0.0005)


def test_fewest() -> None:
    met = np.array([[False, False, True], [True, False, True]])
    assert fewest(met).tolist() == [2, 0, 1]


@pytest.mark.parametrize(("n", "m", "name"), [(0, 1, "groups"), (1, -1, "values")])
def test_refuses_by_name(n: int, m: int, name: str) -> None:
    with pytest.raises(InvalidArgument, match=f"{name} must be positive"):
        PARTS.own(n, m)
