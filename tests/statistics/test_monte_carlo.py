"""Ends, tolerance and stopping of Monte Carlo, against the examples of JCGM 101."""

from math import inf, nan, sqrt
from typing import Final

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from coldwork.errors import InvalidArgument
from coldwork.statistics.monte_carlo import (
    Stretch,
    is_settled,
    order_statistic,
    ranks,
    stretch_of,
    tolerance,
)
from coldwork.statistics.student import student_of_normal

Floats = NDArray[np.float64]


@pytest.mark.parametrize(
    ("draws", "coverage", "expected"),
    [
        (1_000_000, 0.95, (25_000, 975_000)),  # JCGM 101, 7.7.2, by its own formula
        (10_000, 0.95, (250, 9750)),
        (1001, 0.95, (25, 976)),  # q = 951, (1001 - 951) / 2 = 25
        (1000, 0.5, (250, 750)),
    ],
)
def test_ranks_of_the_ends(draws: int, coverage: float, expected: tuple[int, int]) -> None:
    assert ranks(draws, coverage) == expected


@pytest.mark.parametrize(("draws", "coverage"), [(10, 0.999), (1000, 1.0), (1, 0.5)])
def test_too_few_draws_are_refused_by_number(draws: int, coverage: float) -> None:
    with pytest.raises(InvalidArgument, match=f"{draws} draws are too few"):
        ranks(draws, coverage)


def test_an_order_statistic_is_that_of_the_sorted_draws() -> None:
    x = np.random.default_rng(2).standard_normal(1000)
    expected = float(np.sort(x)[24])
    assert order_statistic(x.copy(), 25) == expected


@pytest.mark.parametrize(
    ("u", "digits", "expected"),
    [
        (0.35e-3, 2, 0.005e-3),  # JCGM 101, 7.9.2, example 1: 0.35 mg -> 35 x 10^-2, 0.005 mg
        (2.0, 1, 0.5),  # example 2 (from memory): u = 2 K, one digit, 0.5 K
        (32.0, 2, 0.5),
        (0.0997, 2, 0.005),  # written 0.10: 10 x 10^-2
        (1e-30, 1, 0.5e-30),
    ],
)
def test_tolerance(u: float, digits: int, expected: float) -> None:
    assert tolerance(u, digits) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("u", [0.0, -1.0, nan, inf])
def test_without_a_standard_uncertainty_there_is_no_tolerance(u: float) -> None:
    assert np.isnan(tolerance(u, 1))


def half_width(x: Floats, coverage: float = 0.95) -> float:
    low, high = ranks(len(x), coverage)
    ordered = np.sort(x)
    return float(ordered[high - 1] - ordered[low - 1]) / 2.0


DRAWS: Final = 400_000


class TestPrintedExamples:
    """JCGM 101:2008, 9.2 and 9.3 (values from memory, computed again; see the tolerances)."""

    def test_four_normal_quantities(self) -> None:  # 9.2.2: u 2.0, interval +-3.92
        y = np.random.default_rng(1).standard_normal((4, DRAWS)).sum(axis=0)
        assert float(y.std()) == pytest.approx(2.0, abs=0.01)
        assert half_width(y) == pytest.approx(3.92, abs=0.02)

    def test_four_rectangular_quantities(self) -> None:  # 9.2.3: +-3.88, not +-3.92
        rng = np.random.default_rng(2)
        y = rng.uniform(-sqrt(3.0), sqrt(3.0), (4, DRAWS)).sum(axis=0)
        assert 2.0 * sqrt(3.0) * (2.0 - (3.0 / 5.0) ** 0.25) == pytest.approx(3.879, abs=5e-4)
        assert half_width(y) == pytest.approx(3.88, abs=0.015)

    def test_one_of_them_dominates(self) -> None:  # 9.2.4: u 10.1, +-17.0, not +-19.9
        x = np.random.default_rng(3).uniform(-sqrt(3.0), sqrt(3.0), (4, DRAWS))
        y = x[0] + x[1] + x[2] + 10.0 * x[3]
        assert float(y.std()) == pytest.approx(10.1, abs=0.07)
        assert half_width(y) == pytest.approx(17.0, abs=0.06)

    def test_mass_calibration(self) -> None:
        # 9.3: u 0.0754 mg, shortest 95 % interval [1.0834, 1.3825] mg, mean 1.2341 mg
        rng = np.random.default_rng(4)
        reference = 100_000.0 + 0.050 * rng.standard_normal(DRAWS)
        small = 1.234 + 0.020 * rng.standard_normal(DRAWS)
        air = rng.uniform(1.10, 1.30, DRAWS)
        weight, standard = rng.uniform(7000, 9000, DRAWS), rng.uniform(7950, 8050, DRAWS)
        y = (reference + small) * (1 + (air - 1.2) * (1 / weight - 1 / standard)) - 100_000.0
        assert float(y.std()) == pytest.approx(0.0754, abs=3e-4)
        ordered = np.sort(y)
        q = ranks(DRAWS, 0.95)[1] - ranks(DRAWS, 0.95)[0]
        widths = ordered[q:] - ordered[:-q]
        shortest = int(np.argmin(widths))
        assert float(ordered[shortest]) == pytest.approx(1.0834, abs=4e-3)
        assert float(ordered[shortest + q]) == pytest.approx(1.3825, abs=4e-3)
        assert float(widths[shortest]) == pytest.approx(1.3825 - 1.0834, abs=2e-3)


def test_runs_that_agree_are_settled_and_others_are_not() -> None:
    same = [Stretch(1.0, 0.2, 0.6, 1.4)] * 3
    assert is_settled(same, 10_000, 2, has_sd=True)
    # 2 s of the mean is 2 x 0.05 / sqrt(2) = 0.07: above 0.05 that 0.2 to one digit allows
    apart = [Stretch(1.0, 0.2, 0.6, 1.4), Stretch(1.1, 0.2, 0.6, 1.4)]
    assert not is_settled(apart, 10_000, 1, has_sd=True)
    assert is_settled(apart, 10_000, 1, has_sd=False)  # without a variance the ends count alone
    assert not is_settled(same[:1], 10_000, 1, has_sd=True)


def test_an_end_that_is_never_there_is_settled() -> None:
    runs = [Stretch(nan, nan, 3.0, inf)] * 2
    assert is_settled(runs, 10_000, 1, has_sd=True)


def test_stopping_leaves_the_digits_that_count() -> None:
    # Of 100 quantities that stop, 2 s within half a digit means 95 of them or more.
    rng = np.random.default_rng(5)
    off = 0
    for _ in range(100):
        runs: list[Stretch] = []
        while not is_settled(runs, 10_000, 1, has_sd=True):
            runs.append(stretch_of(rng.standard_normal(10_000), 0.95))
        upper = float(np.mean([run.upper for run in runs]))
        off += abs(upper - 1.95996) > tolerance(0.999, 1)
    assert off <= 5


@pytest.mark.parametrize("nu", [1.0, 2.0, 3.0, 4.5, 12.0, 30.0, 1e4])
def test_student_draws_are_those_of_the_distribution(nu: float) -> None:
    z = np.linspace(-6.0, 6.0, 201)
    t = student_of_normal(z, nu)
    expected = stats.t.ppf(stats.norm.cdf(-np.abs(z)), nu)
    np.testing.assert_allclose(-np.abs(t), expected, rtol=2e-6, atol=1e-12)
    assert np.array_equal(np.sign(t), np.sign(z))


def test_student_draws_without_limit_are_normal() -> None:
    z = np.linspace(-3.0, 3.0, 7)
    assert np.array_equal(student_of_normal(z, inf), z)


@pytest.mark.parametrize("nu", [0.5, nan])
def test_student_draws_refuse_too_few_degrees_of_freedom(nu: float) -> None:
    with pytest.raises(InvalidArgument, match="degrees_of_freedom"):
        student_of_normal(np.zeros(3), nu)
