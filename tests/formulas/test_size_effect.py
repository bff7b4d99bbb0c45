"""Small indents: published copper, geometry, there and back, the line of H^2 over 1/h."""

import tomllib
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.formulas.hardness import vickers_diagonal
from coldwork.formulas.size_effect import (
    DIAGONAL_OVER_DEPTH,
    bulk_hardness_from_length,
    bulk_hardness_from_strength,
    bulk_hardness_from_strength_sensitivities,
    constants_of_line,
    indentation_depth,
    size_effect_hardness,
)
from coldwork.statistics.line_fit import fit_line

COPPER = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "size_effect_copper.toml").read_text("utf-8")
)["rows"]


@pytest.mark.parametrize(("state", "bulk", "length", "at_0p1", "at_1"), COPPER)
def test_hardness_of_copper_at_two_depths(
    state: str, bulk: float, length: float, at_0p1: float, at_1: float
) -> None:
    del state
    read = size_effect_hardness(bulk * 1e9, [0.1e-6, 1e-6], length * 1e-6)
    assert_allclose(read / 1e9, [at_0p1, at_1], atol=0.5e-4)
    back = bulk_hardness_from_length(read, [0.1e-6, 1e-6], length * 1e-6)
    assert_allclose(back, bulk * 1e9, rtol=1e-14)
    strength = (bulk * 1e9) ** 2 * length * 1e-6
    assert_allclose(
        bulk_hardness_from_strength(read, [0.1e-6, 1e-6], strength), bulk * 1e9, rtol=1e-13
    )


def test_depth_is_a_seventh_of_the_diagonal() -> None:
    # ISO 6507-1 prints h = d/7; the pyramid of 136 degrees has 7.0006.
    assert_allclose(DIAGONAL_OVER_DEPTH, 7.0006, atol=0.5e-4)
    assert_allclose(indentation_depth([7e-6, 0.35e-3]), [1e-6, 50e-6], rtol=1e-4)


def test_a_large_indent_reads_the_bulk() -> None:
    assert_allclose(size_effect_hardness(1e9, 1.0, 1e-6), 1e9, rtol=1e-6)
    assert bulk_hardness_from_length(1e9, 1e-6, 0.0) == 1e9
    assert bulk_hardness_from_strength(1e9, 1e-6, 0.0) == 1e9


def test_the_effect_cannot_be_all_of_the_hardness() -> None:
    # H^2 - S/h at, and below, zero.
    found = bulk_hardness_from_strength(1e9, 1e-6, [0.9e12, 1e12, 1.1e12])
    assert np.isnan(found).tolist() == [False, True, True]
    slopes = bulk_hardness_from_strength_sensitivities(1e9, 1e-6, [0.9e12, 1e12, 1.1e12])
    for slope in slopes.values():
        assert np.isnan(slope).tolist() == [False, True, True]


def test_the_line_of_several_forces_gives_both_constants_back() -> None:
    # Copper's own curve, read at five forces, H and h found together; then fitted.
    bulk, length = 0.834e9, 0.464e-6
    depth = np.array([0.4e-6, 0.8e-6, 1.5e-6, 4e-6, 12e-6])
    line = fit_line(1.0 / depth, size_effect_hardness(bulk, depth, length) ** 2)
    h0, h_star, _ = constants_of_line(line.intercept, line.slope, line.cofactor)
    assert_allclose([h0, h_star], [bulk, length], rtol=1e-9)
    assert_allclose(line.slope, bulk**2 * length, rtol=1e-9)


def test_uncertainty_of_both_constants_against_draws() -> None:
    # 200,000 draws of intercept and slope with their covariance, seed fixed.
    rng = np.random.default_rng(4)
    covariance = np.array([[4e-4, -6e-10], [-6e-10, 2.5e-15]]) * 1e36
    drawn = rng.multivariate_normal([0.7e18, 0.32e12], covariance, 200_000)
    sampled = np.cov(np.sqrt(drawn[:, 0]), drawn[:, 1] / drawn[:, 0])
    h0, h_star, found = constants_of_line(0.7e18, 0.32e12, covariance)
    assert_allclose([h0, h_star], [np.sqrt(0.7) * 1e9, 0.32 / 0.7 * 1e-6], rtol=1e-14)
    assert_allclose(np.sqrt(np.diagonal(found)), np.sqrt(np.diagonal(sampled)), rtol=0.02)
    correlation = found[0, 1] / np.sqrt(found[0, 0] * found[1, 1])
    drawn_correlation = sampled[0, 1] / np.sqrt(sampled[0, 0] * sampled[1, 1])
    assert_allclose(correlation, drawn_correlation, atol=0.01)


@pytest.mark.parametrize("intercept", [0.0, -1e17, np.nan])
def test_a_line_that_meets_no_bulk_hardness_has_none(intercept: float) -> None:
    h0, h_star, covariance = constants_of_line(intercept, 1e12, np.eye(2))
    assert np.isnan([h0, h_star]).all()
    assert np.isnan(covariance).all()


@pytest.mark.parametrize("name", ["intercept", "slope"])
def test_a_line_refuses_an_infinite_constant_by_name(name: str) -> None:
    good = {"intercept": 1e18, "slope": 1e12, "covariance": np.eye(2)}
    with pytest.raises(InvalidArgument, match=rf"^{name} must be finite"):
        constants_of_line(**(good | {name: np.inf}))  # type: ignore[arg-type]


def test_depth_of_a_micro_indent() -> None:
    # 10 gf on 200 HV: d = 9.63 um, h = 1.38 um
    # (1.854368 F / HV in kgf and mm: d^2 = 1.854368 * 0.01 / 200 mm2, by hand).
    depth = indentation_depth(vickers_diagonal(0.0980665, 200 * 9.80665e6))
    assert_allclose(depth, np.sqrt(1.854368 * 0.01 / 200) * 1e-3 / 7.0006, rtol=1e-4)
