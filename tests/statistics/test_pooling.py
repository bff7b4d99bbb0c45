"""Pooling: published critical values, a plain loop by scipy.stats, extremes."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray
from scipy import stats

from coldwork.errors import InvalidArgument
from coldwork.statistics.pooling import (
    cochran_critical,
    leave_noisy_out,
    pooled,
    scatter_limit,
)

COCHRAN = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "cochran.toml").read_text("utf-8")
)


@pytest.mark.parametrize(
    ("groups", "readings", "critical"), [(10, 3, 0.536), (10, 5, 0.393), (6, 4, 0.626)]
)
def test_cochran_at_1_percent(groups: int, readings: int, critical: float) -> None:
    # ISO 5725-2, table of Cochran's critical values at 1 %.
    assert_allclose(cochran_critical(groups, readings, 0.01), critical, atol=0.0005)


@pytest.mark.parametrize("row", COCHRAN["rows"], ids=lambda row: f"{row[0]}-groups")
def test_cochran_table(row: list[float]) -> None:
    # To three digits, as ISO 5725-2 prints them; the fourth of the old table was worked out
    # by other approximations than by F, chiefly at 16 and 36 degrees of freedom.
    computed = [
        cochran_critical(int(row[0]), nu + 1, COCHRAN["significance"])
        for nu in COCHRAN["degrees_of_freedom"]
    ]
    assert_allclose(computed, row[1:], atol=0.0006)


@pytest.mark.parametrize("count", [1, 35, 100_000])
@pytest.mark.parametrize(("nu", "others"), [(1.0, 1.0), (4.0, 136.0), (6.0, 6e6)])
def test_scatter_limit_agrees_with_scipy(count: int, nu: float, others: float) -> None:
    expected = stats.f.isf(0.01 / count, nu, others)
    assert_allclose(scatter_limit(count, nu, others), expected, rtol=1e-8)


@pytest.mark.parametrize("count", [1, 35, 100_000])
def test_scatter_limit_of_one_degree_of_freedom_each(count: int) -> None:
    # F of 1 and 1 is the square of Cauchy's quantile: 1 / tan^2 (pi tail / 2), exactly.
    exact = 1.0 / np.tan(np.pi * 0.01 / count / 2.0) ** 2
    assert_allclose(scatter_limit(count, 1.0, 1.0), exact, rtol=1e-12)


def test_scatter_limit_of_equal_numbers_is_cochrans_test() -> None:
    # Largest over the sum of all, C, and over the mean of the others, F: C = F / (F + k - 1).
    f = scatter_limit(10, 4.0, 36.0)
    assert_allclose(f / (f + 9.0), cochran_critical(10, 5), rtol=1e-15)


def test_pooled_is_the_weighted_mean() -> None:
    # (4 x 1 + 2 x 4) / 6, by hand; and the variance of all about their own means.
    assert pooled([1.0, 4.0], [4.0, 2.0]) == (2.0, 6.0)
    rng = np.random.default_rng(3)
    groups = [rng.normal(m, 2.0, n) for m, n in ((5.0, 4), (80.0, 9), (-3.0, 2))]
    variance, nu = pooled([g.var(ddof=1) for g in groups], [len(g) - 1.0 for g in groups])
    residuals = np.concatenate([g - g.mean() for g in groups])
    assert_allclose((variance, nu), (np.sum(residuals**2) / 12.0, 12.0), rtol=1e-13)


def test_pooled_leaves_out_what_has_no_variance() -> None:
    assert pooled([1.0, np.nan, 9.0], [4.0, 4.0, 0.0]) == (1.0, 4.0)
    variance, nu = pooled([np.nan], [0.0])
    assert np.isnan(variance)
    assert nu == 0.0


def by_plain_loop(
    s2: NDArray[np.float64], nu: NDArray[np.float64]
) -> tuple[set[int], dict[int, float], dict[int, float]]:
    """The rule of ISO 5725-2 with F, one coupon at a time, by scipy.stats."""
    inside = [i for i in range(len(s2)) if nu[i] > 0 and not np.isnan(s2[i])]
    count = len(inside)
    out: set[int] = set()
    ratio, limit = {}, {}
    while len(inside) > 1:
        for i in inside:
            others = [j for j in inside if j != i]
            rest = sum(nu[j] for j in others)
            ratio[i] = s2[i] / (sum(nu[j] * s2[j] for j in others) / rest)
            limit[i] = stats.f.isf(0.01 / count, nu[i], rest)
        worst = max(inside, key=lambda i: ratio[i] / limit[i])
        if ratio[worst] <= limit[worst]:
            break
        inside.remove(worst)
        out.add(worst)
    return out, ratio, limit


@pytest.mark.parametrize("seed", range(12))
def test_agrees_with_a_plain_loop(seed: int) -> None:
    rng = np.random.default_rng(seed)
    n = int(rng.integers(2, 40))
    nu = rng.integers(0, 9, n).astype(float)
    noisy = np.where(rng.random(n) < 0.2, rng.choice([8.0, 40.0, 400.0], n), 1.0)
    s2 = noisy * 1e-4 * rng.chisquare(np.maximum(nu, 1.0)) / np.maximum(nu, 1.0)
    s2[rng.random(n) < 0.1] = np.nan
    found = leave_noisy_out(s2, nu)
    out, ratio, limit = by_plain_loop(s2, nu)
    assert set(np.flatnonzero(found.left_out).tolist()) == out
    judged = sorted(ratio)
    assert_allclose(found.ratio[judged], [ratio[i] for i in judged], rtol=1e-9)
    assert_allclose(found.limit[judged], [limit[i] for i in judged], rtol=1e-9)
    assert np.isnan(np.delete(found.ratio, judged)).all()
    stay = [i for i in range(n) if i not in out]
    assert_allclose((found.variance, found.degrees_of_freedom), pooled(s2[stay], nu[stay]))


def test_several_noisy_ones_do_not_hide_each_other() -> None:
    s2 = np.ones(30)
    s2[[3, 11, 20]] = [900.0, 700.0, 500.0]
    found = leave_noisy_out(s2, np.full(30, 4.0))
    assert np.flatnonzero(found.left_out).tolist() == [3, 11, 20]
    assert (found.variance, found.degrees_of_freedom) == (1.0, 108.0)


def test_honest_coupons_stay_in_99_of_100_batches() -> None:
    # The chance that any of them leaves is 1 % by construction (Cochran's bound).
    rng = np.random.default_rng(7)
    s2 = rng.chisquare(4.0, (1500, 20)) / 4.0
    touched = sum(leave_noisy_out(row, np.full(20, 4.0)).left_out.any() for row in s2)
    assert 4 <= touched <= 27  # 15 expected, three standard deviations


def test_a_giant_costs_the_others_no_digits() -> None:
    # 1e20 times the others' variance: what the pool keeps must not come from a difference.
    found = leave_noisy_out([1.0, 2.0, 1e20, 3.0], [4.0, 4.0, 4.0, 4.0])
    assert found.left_out.tolist() == [False, False, True, False]
    assert_allclose(found.ratio, [1.0 / 2.5, 2.0 / 2.0, 1e20 / 2.0, 3.0 / 1.5], rtol=1e-15)
    assert found.variance == 2.0


def test_scale_does_not_matter() -> None:
    s2, nu = np.array([1.0, 2.0, 90.0, 3.0]), np.array([4.0, 6.0, 4.0, 3.0])
    one, other = leave_noisy_out(s2, nu), leave_noisy_out(1e-9 * s2, nu)
    assert np.array_equal(one.left_out, other.left_out)
    assert_allclose(one.ratio, other.ratio, rtol=1e-13)


def test_order_does_not_matter() -> None:
    rng = np.random.default_rng(2)
    nu = rng.integers(1, 7, 50).astype(float)
    s2 = rng.chisquare(nu) * np.where(rng.random(50) < 0.1, 300.0, 1.0)
    mixed = rng.permutation(50)
    one, other = leave_noisy_out(s2, nu), leave_noisy_out(s2[mixed], nu[mixed])
    assert np.array_equal(one.left_out[mixed], other.left_out)
    assert_allclose(one.ratio[mixed], other.ratio, rtol=1e-12)


def test_one_coupon_is_its_own_pool() -> None:
    found = leave_noisy_out([2.0, np.nan], [4.0, 0.0])
    assert (found.variance, found.degrees_of_freedom) == (2.0, 4.0)
    assert not found.left_out.any()
    assert np.isnan(found.ratio).all()
    assert np.isnan(found.limit).all()


def test_nothing_to_pool() -> None:
    for s2, nu in (([], []), ([np.nan, 1.0], [3.0, 0.0])):
        found = leave_noisy_out(s2, nu)
        assert np.isnan(found.variance)
        assert found.degrees_of_freedom == 0.0
        assert not found.left_out.any()


def test_others_that_do_not_scatter_at_all() -> None:
    found = leave_noisy_out([0.0, 0.0, 1e-6], [4.0, 4.0, 4.0])
    assert found.left_out.tolist() == [False, False, True]
    assert np.isposinf(found.ratio[2])
    assert found.variance == 0.0
    still = leave_noisy_out([0.0, 0.0], [4.0, 4.0])
    assert not still.left_out.any()
    assert np.isnan(still.ratio).all()


def test_refuses_by_name() -> None:
    with pytest.raises(InvalidArgument, match=r"^variances must be zero or positive"):
        pooled([-1.0, 1.0], [4.0, 4.0])
    with pytest.raises(InvalidArgument, match=r"^degrees_of_freedom must be zero or positive"):
        leave_noisy_out([1.0, 1.0], [4.0, np.inf])
    with pytest.raises(InvalidArgument, match="must go in pairs"):
        pooled([1.0, 1.0], [4.0])
    with pytest.raises(InvalidArgument, match=r"^count must be positive"):
        scatter_limit(0, 4.0, 4.0)
    with pytest.raises(InvalidArgument, match=r"^significance must be between"):
        scatter_limit(5, 4.0, 4.0, 0.0)
    with pytest.raises(InvalidArgument, match="must be 2 or more"):
        cochran_critical(1, 5)
