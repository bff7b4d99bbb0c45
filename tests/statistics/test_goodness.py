"""Chi-squared and its probability against printed values; which point is to blame."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.statistics.goodness import bad_point, goodness


@pytest.mark.parametrize(
    ("chi_squared", "freedom", "probability"),
    # NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.4: upper critical values.
    [(15.507, 8, 0.05), (20.090, 8, 0.01), (3.841, 1, 0.05), (18.307, 10, 0.05), (2.733, 8, 0.95)],
)
def test_tabled_probabilities(chi_squared: float, freedom: int, probability: float) -> None:
    assert_allclose(goodness(chi_squared, freedom).probability, probability, rtol=1e-3)


def test_verdicts_and_what_grows() -> None:
    # Same table: for 8 degrees of freedom 17.535 at 2.5 % and 2.180 at 97.5 %.
    assert goodness(17.5, 8).verdict == "as stated"
    bad = goodness(17.6, 8)
    assert bad.verdict == "too bad"
    assert_allclose(bad.enlargement, np.sqrt(17.6 / 8.0))
    good = goodness(2.17, 8)
    assert good.verdict == "too good"
    assert good.enlargement == 1.0  # what is too good does not shrink


def test_one_bad_point_is_named() -> None:
    leverage = np.full(10, 0.2)
    residual = np.array([0.5, -0.9, 0.8, 0.2, -1.1, 0.7, 0.4, 4.5, -0.6, -0.3])
    assert bad_point(residual, leverage) == 7
    assert bad_point(np.where(residual > 4.0, 1.0, residual), leverage) is None


def test_where_all_are_bad_none_is_to_blame() -> None:
    residual = 4.0 * np.array([1.0, -1.0, 1.0, -1.0, 1.2, -1.0])
    assert bad_point(residual, np.full(6, 1.0 / 3.0)) is None


def test_three_points_lie_alike() -> None:
    assert bad_point([9.0, -18.0, 9.0], [5.0 / 6.0, 1.0 / 3.0, 5.0 / 6.0]) is None


@pytest.mark.parametrize(("chi_squared", "freedom"), [(1.0, 0), (-1.0, 3), (np.inf, 3)])
def test_refusals(chi_squared: float, freedom: int) -> None:
    with pytest.raises(InvalidArgument, match="chi-squared of 0 or more"):
        goodness(chi_squared, freedom)
