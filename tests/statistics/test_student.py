"""Student: a published table, scipy's distribution, exact cases; degrees of freedom."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import stats
from scipy.special import stdtrit

from coldwork.errors import InvalidArgument
from coldwork.statistics.student import (
    student_probability,
    student_quantile,
    welch_satterthwaite,
)

TABLE = tomllib.loads((Path(__file__).parents[1] / "reference" / "student.toml").read_text("utf-8"))
MANY_NU = np.concatenate(
    [np.arange(1.0, 61.0), 1.0 / np.linspace(1e-6, 1.0, 997), [1e3, 1e4, 1e6, 1e9]]
)
PROBABILITIES = [1e-6, 0.025, 0.3, 0.51, 0.6, 0.8, 0.9, 0.95, 0.975, 0.995, 0.9995, 1 - 1e-6]


@pytest.mark.parametrize(("column", "fraction"), list(enumerate(TABLE["fractions"])))
def test_the_published_table(column: int, fraction: float) -> None:
    # NIST Technical Note 1297, table B.1 = JCGM 100:2008, table G.2; two decimals, three from
    # 100 degrees of freedom on.
    nu = np.array([row[0] for row in TABLE["rows"]])
    printed = np.array([row[1 + column] for row in TABLE["rows"]])
    k = student_quantile((1.0 + fraction) / 2.0, nu)
    assert_allclose(k, printed, atol=0.0051)
    assert_allclose(k[nu >= 100.0], printed[nu >= 100.0], atol=0.00051)


@pytest.mark.parametrize("probability", PROBABILITIES)
def test_ten_digits_of_the_inverse_of_scipy(probability: float) -> None:
    k = student_quantile(probability, MANY_NU)
    assert_allclose(k, stdtrit(MANY_NU, probability), rtol=1e-10)
    assert_allclose(k, stats.t.ppf(probability, MANY_NU), rtol=1e-9)


@pytest.mark.parametrize("probability", PROBABILITIES)
def test_exact_cases(probability: float) -> None:
    # One degree of freedom is Cauchy's, tan(pi (p - 1/2)); two have a closed form as well;
    # infinitely many are normal.
    p = probability
    cauchy = np.tan(np.pi * (p - 0.5))
    two = (2.0 * p - 1.0) * np.sqrt(2.0 / (4.0 * p * (1.0 - p)))
    k = student_quantile(p, [1.0, 2.0, np.inf])
    assert_allclose(k, [cauchy, two, stats.norm.ppf(p)], rtol=1e-9)


def test_the_middle_is_zero() -> None:
    assert student_quantile(0.5, [1.0, 7.3, np.inf]).tolist() == [0.0, 0.0, 0.0]
    assert np.isnan(student_quantile(0.5, np.nan))


@pytest.mark.parametrize("shape", [(), (3,), (2, 3), (0,), (70_000,)])
def test_keeps_shape_and_missing_values(shape: tuple[int, ...]) -> None:
    assert student_quantile(0.975, np.full(shape, 4.0)).shape == shape
    assert np.isnan(student_quantile(0.975, np.full(shape, np.nan))).all()
    assert student_probability(1.0, np.full(shape, 4.0)).shape == shape


@pytest.mark.parametrize("probability", [0.0, 1.0, -0.1, np.nan])
def test_refuses_an_impossible_probability(probability: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^probability must be between 0 and 1"):
        student_quantile(probability, 5.0)


@pytest.mark.parametrize("nu", [0.0, 0.5, -1.0, -np.inf])
def test_refuses_less_than_one_degree_of_freedom(nu: float) -> None:
    message = r"^degrees_of_freedom must be 1 or more \(1 bad of 2"
    with pytest.raises(InvalidArgument, match=message):
        student_quantile(0.975, [5.0, nu])
    with pytest.raises(InvalidArgument, match=message):
        student_probability(1.0, [5.0, nu])
    with pytest.raises(InvalidArgument, match=message):
        welch_satterthwaite([1.0], [[5.0, nu]])


def test_one_that_rounding_left_short_of_one_is_one() -> None:
    assert_allclose(student_quantile(0.975, 1.0 - 1e-12), 12.7062, atol=1e-4)


@pytest.mark.parametrize("nu", [1.0, 2.5, 16.64, 300.0, np.inf])
def test_probability_agrees_with_scipy_and_undoes_the_quantile(nu: float) -> None:
    k = np.array([-40.0, -2.0, 0.0, 0.7, 3.0, np.inf, -np.inf])
    assert_allclose(student_probability(k, nu), stats.t.cdf(k, nu), rtol=1e-10, atol=1e-300)
    for probability in PROBABILITIES:
        back = student_probability(student_quantile(probability, nu), nu)
        assert_allclose(back, probability, rtol=1e-8)


def test_probability_passes_what_is_missing() -> None:
    p = student_probability([np.nan, 1.0, 1.0], [5.0, np.nan, np.inf])
    assert np.isnan(p).tolist() == [True, True, False]


def test_effective_degrees_of_freedom_of_the_end_gauge() -> None:
    # JCGM 100:2008, H.1.6: contributions 25, 9.7, 2.9 and 16.6 nm with 18, 25.6, 50 and 2
    # degrees of freedom: 16.7; t99 of 16 is 2.92. Unrounded contributions, as H.1 gives them.
    nu = welch_satterthwaite([25.0, 9.7, -2.9, 16.7], [18.0, 25.6, 50.0, 2.0])
    assert_allclose(nu, 16.7, atol=0.1)
    assert_allclose(student_quantile(0.995, np.floor(nu)), 2.92, atol=0.005)


def test_effective_degrees_of_freedom_of_two_means() -> None:
    # Welch's own case: scipy's t test with unequal variances gives its degrees of freedom.
    rng = np.random.default_rng(5)
    a, b = rng.normal(0.0, 1.0, 7), rng.normal(0.0, 4.0, 11)
    expected = stats.ttest_ind(a, b, equal_var=False).df
    u = [a.std(ddof=1) / np.sqrt(7.0), b.std(ddof=1) / np.sqrt(11.0)]
    assert_allclose(welch_satterthwaite(u, [6.0, 10.0]), expected, rtol=1e-12)


def test_one_input_keeps_its_own_and_two_alike_have_both() -> None:
    assert_allclose(welch_satterthwaite([3.0], [7.0]), 7.0, rtol=1e-15)
    assert_allclose(welch_satterthwaite([3.0, -3.0], [7.0, 7.0]), 14.0, rtol=1e-15)


def test_scaling_all_contributions_changes_nothing() -> None:
    u, nu = [25.0, 9.7, 2.9], [18.0, 25.6, 2.0]
    for factor in (1e-140, 1e14, 1e140):
        scaled = welch_satterthwaite([factor * x for x in u], nu)
        assert_allclose(scaled, welch_satterthwaite(u, nu), rtol=1e-12)


def test_exactly_known_inputs_drop_out() -> None:
    # (1 + 1)^2 / (1 / 4) for the first: the second adds to u_c only.
    assert_allclose(welch_satterthwaite([1.0, 1.0], [4.0, np.inf]), 16.0, rtol=1e-15)
    assert np.isposinf(welch_satterthwaite([1.0, 1.0], [np.inf, np.inf]))
    assert np.isposinf(welch_satterthwaite([0.0, 0.0], [4.0, 9.0]))
    assert np.isposinf(welch_satterthwaite([], []))


def test_columns_of_coupons() -> None:
    own = np.array([1.0, 0.0, np.nan, 2.0])
    nu = welch_satterthwaite([own, 1.0], [np.array([4.0, 4.0, 4.0, 6.0]), np.inf])
    assert_allclose(nu, [16.0, np.inf, np.nan, 25.0 / 16.0 * 6.0], rtol=1e-14)


def test_refuses_what_does_not_pair() -> None:
    with pytest.raises(InvalidArgument, match=r"go in pairs \(2 and 1\)"):
        welch_satterthwaite([1.0, 2.0], [3.0])
    with pytest.raises(InvalidArgument, match=r"^contributions must be finite"):
        welch_satterthwaite([np.inf], [3.0])
