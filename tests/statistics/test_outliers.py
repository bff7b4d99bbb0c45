"""Grubbs: two published tables, the bound that no value can pass, refusals."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.statistics.outliers import grubbs_critical

REFERENCE = Path(__file__).parents[1] / "reference"


@pytest.mark.parametrize(
    ("file", "sides", "atol"),
    [("grubbs_two_sided.toml", 1.0, 0.0012), ("grubbs_one_sided.toml", 2.0, 0.0061)],
)
def test_published_tables(file: str, sides: float, atol: float) -> None:
    # A one-sided significance is half of the two-sided one at the same critical value.
    table = tomllib.loads((REFERENCE / file).read_text("utf-8"))
    rows = np.array(table["rows"])
    for column, significance in enumerate(table["columns"][1:], 1):
        critical = grubbs_critical(rows[:, 0], sides * float(significance))
        assert_allclose(critical, rows[:, column], atol=atol)


@pytest.mark.parametrize(
    ("n", "two_sided_1_percent"), [(16, 2.852), (17, 2.894), (18, 2.932), (19, 2.968), (20, 3.001)]
)
def test_the_default_is_two_sided_1_percent(n: int, two_sided_1_percent: float) -> None:
    # Grubbs, Technometrics 11 (1969) 1-21, column 0.5 % one-sided (from memory; ASTM E178 too).
    assert_allclose(grubbs_critical(n), two_sided_1_percent, atol=0.0006)


@pytest.mark.parametrize("n", [3, 4, 7, 50])
def test_stays_below_what_n_values_can_reach(n: int) -> None:
    # One value against n - 1 equal ones lies (n - 1) / sqrt(n) standard deviations out.
    values = np.zeros(n)
    values[0] = 1.0
    reach = (values[0] - values.mean()) / values.std(ddof=1)
    assert grubbs_critical(n) < reach
    assert_allclose(grubbs_critical(n, 1e-12), reach, rtol=1e-3 if n < 5 else 0.7)


def test_too_few_or_missing_say_nothing() -> None:
    critical = grubbs_critical([[0.0, 1.0, 2.0], [np.nan, 3.0, 1e6]])
    assert np.isnan(critical).tolist() == [[True, True, True], [True, False, False]]


@pytest.mark.parametrize("shape", [(), (5,), (2, 3), (0,)])
def test_keeps_the_shape(shape: tuple[int, ...]) -> None:
    assert grubbs_critical(np.full(shape, 7)).shape == shape


def test_refuses_by_name() -> None:
    with pytest.raises(InvalidArgument, match=r"^n must be zero or positive"):
        grubbs_critical([5, -1])
    with pytest.raises(InvalidArgument, match=r"^significance must be between 0 and 1"):
        grubbs_critical(5, 1.0)
