"""One-way analysis of variance against eleven certified sets and a general package."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray
from scipy.stats import f_oneway

from coldwork.errors import InvalidArgument
from coldwork.statistics.one_way import one_way

SETS = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "nist_anova.toml").read_text("utf-8")
)
NAMES = [name for name, content in SETS.items() if isinstance(content, dict)]
# Relative, as far as the printed values can be held in double precision: the constant leading
# digits take their places from the differences (none, 7 and 13 of them).
DIGITS = dict.fromkeys(NAMES, 1e-12) | {"AtmWtAg": 1e-9}
DIGITS |= dict.fromkeys(("SmLs04", "SmLs05", "SmLs06"), 2e-10)
DIGITS |= dict.fromkeys(("SmLs07", "SmLs08", "SmLs09"), 2e-4)


def of(name: str) -> tuple[NDArray[np.float64], NDArray[np.int64]]:
    values, group = [], []
    for k, cells in enumerate(SETS[name]["groups"]):
        for text, times in cells:
            values += [float(text)] * times
            group += [k] * times
    return np.array(values), np.array(group)


def test_there_are_eleven() -> None:
    assert len(NAMES) == 11


@pytest.mark.parametrize("name", NAMES)
def test_certified_sets(name: str) -> None:
    # NIST StRD, analysis of variance.
    found, certified, rtol = one_way(*of(name)), SETS[name], DIGITS[name]
    assert (found.between_df, found.within_df) == (certified["between_df"], certified["within_df"])
    assert_allclose(found.between_ss, certified["between_ss"], rtol=rtol)
    assert_allclose(found.within_ss, certified["within_ss"], rtol=rtol)
    assert_allclose(found.f, certified["f"], rtol=rtol)
    assert_allclose(found.r_squared, certified["r_squared"], rtol=rtol)
    assert_allclose(found.residual_sd, certified["residual_sd"], rtol=rtol)


def test_unequal_groups_against_a_general_package() -> None:
    y = np.array([4.0, 5.5, 5.0, 7.0, 7.5, 6.0, 6.5, 9.0, 8.0])
    group = np.array([0, 0, 0, 1, 1, 1, 1, 2, 2])
    found = one_way(y, group)
    theirs = f_oneway(*(y[group == k] for k in range(3)))
    assert_allclose(found.f, theirs.statistic, rtol=1e-13)
    assert_allclose(found.probability, theirs.pvalue, rtol=1e-12)
    # n0 = (9 - (9 + 16 + 4) / 9) / 2 by hand.
    assert_allclose(found.size, (9.0 - 29.0 / 9.0) / 2.0, rtol=1e-14)


def test_variances_are_unbiased() -> None:
    # Expected mean squares: MS_b = s_w^2 + n s_b^2; 3000 sets of 5 groups of 4, s_b 2 and s_w 1.
    rng = np.random.default_rng(5)
    group = np.repeat(np.arange(5), 4)
    y = 2.0 * rng.normal(size=(3000, 5))[:, group] + rng.normal(size=(3000, 20))
    all_of_them = [one_way(row, group) for row in y[:400]]
    between = np.mean([(x.between_ms - x.within_ms) / x.size for x in all_of_them])
    assert_allclose(between, 4.0, rtol=0.2)  # three standard errors of 400 sets
    assert_allclose(np.mean([x.within_ms for x in all_of_them]), 1.0, rtol=0.06)


def test_nothing_between_is_zero_not_negative() -> None:
    found = one_way([1.0, 3.0, 1.1, 2.9], [0, 0, 1, 1])
    assert found.between_variance == 0.0
    assert found.between_share == 0.0


@pytest.mark.parametrize(
    ("values", "group", "said"),
    [
        ([1.0, 2.0, 3.0], [0, 0, 0], "two groups or more"),
        ([1.0, 2.0], [0, 1], "one of them with two values"),
        ([1.0, np.nan, 2.0], [0, 0, 1], "one present number"),
        ([1.0, 2.0, 3.0], [0, 1], "one present number"),
    ],
)
def test_refusals(values: list[float], group: list[int], said: str) -> None:
    with pytest.raises(InvalidArgument, match=said):
        one_way(values, group)
