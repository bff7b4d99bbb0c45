"""Distances of indents: the standard's ratios, and every pair compared by hand."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray
from scipy.spatial.distance import cdist

from coldwork.rules.forces import HBW, HK, HV
from coldwork.rules.spacing import (
    centres_too_near,
    edge_too_near,
    least_thickness_ratio,
    too_thin,
)

FloatArray = NDArray[np.float64]


def test_distance_to_the_edge() -> None:
    # ISO 6507-1:2018: at least 2.5 d for steel, 3 d for light metals; d = 0.1 mm.
    edge = np.array([0.24, 0.25, 0.29, 0.30, np.nan]) * 1e-3
    d = np.full(5, 1e-4)
    fired, value = edge_too_near(edge, d, 2.5)
    assert fired.tolist() == [True, False, False, False, False]
    assert_allclose(value, [2.4, 2.5, 2.9, 3.0, np.nan])
    assert edge_too_near(edge, d, 3.0)[0].tolist() == [True, True, True, False, False]


def test_distance_between_centres_counts_in_the_larger_diagonal() -> None:
    # ISO 6507-1:2018: at least 3 d, the larger of the two diagonals.
    x = np.array([0.0, 0.31, 1.0, 1.31]) * 1e-3
    d = np.array([0.10, 0.10, 0.10, 0.12]) * 1e-3
    fired, value = centres_too_near(x, np.zeros(4), d, np.zeros(4, dtype=np.int64), 3.0)
    assert fired.tolist() == [False, False, True, True]
    assert_allclose(value[2:], 0.31 / 0.12)


def test_exactly_three_diagonals_are_enough() -> None:
    x = np.arange(5.0) * 0.3e-3
    fired, _ = centres_too_near(x, np.zeros(5), np.full(5, 1e-4), np.zeros(5, dtype=np.int64), 3.0)
    assert not fired.any()


def test_indents_on_another_coupon_do_not_count() -> None:
    x, d = np.zeros(4), np.full(4, 1e-4)
    y = np.array([0.0, 0.0, 1e-3, 1e-4])
    coupon = np.array([0, 1, 0, 1])
    fired, value = centres_too_near(x, y, d, coupon, 3.0)
    assert fired.tolist() == [False, True, False, True]
    assert_allclose(value[[1, 3]], 1.0)


def test_an_indent_without_a_place_neither_fires_nor_counts() -> None:
    x = np.array([0.0, np.nan, 0.0])
    y = np.array([0.0, 0.0, np.nan])
    fired, value = centres_too_near(x, y, np.full(3, 1e-4), np.zeros(3, dtype=np.int64), 3.0)
    assert not fired.any()
    assert np.isnan(value).all()
    none = np.empty(0)
    assert centres_too_near(none, none, none, np.empty(0, dtype=np.int64), 3.0)[0].shape == (0,)


def every_pair(x: FloatArray, y: FloatArray, d: FloatArray, coupon: FloatArray) -> FloatArray:
    points = np.stack([x, y], axis=1)
    spacing = cdist(points, points) / np.maximum(d[:, None], d[None, :])
    spacing[coupon[:, None] != coupon[None, :]] = np.inf
    np.fill_diagonal(spacing, np.inf)
    return np.asarray(spacing.min(axis=1))


@pytest.mark.parametrize("stretch", [(1.0, 1.0), (0.0, 1.0), (1.0, 0.05)])
def test_agrees_with_comparing_every_pair(stretch: tuple[float, float]) -> None:
    # Against scipy.spatial.distance.cdist, pair by pair.
    rng = np.random.default_rng(20260731)
    n, ratio = 400, 3.0
    x, y = rng.uniform(0.0, 1e-2, (2, n)) * np.array(stretch)[:, None]
    x[::40], y[::40] = x[1::40], y[1::40]  # some stand at the very same place
    d = rng.uniform(0.5e-4, 2e-4, n)
    coupon = rng.integers(0, 7, n)
    fired, value = centres_too_near(x, y, d, coupon, ratio)
    expected = every_pair(x, y, d, coupon.astype(np.float64))
    assert fired.tolist() == (expected < ratio).tolist()
    assert_allclose(value[fired], expected[fired], rtol=1e-12)
    assert np.isnan(value[~fired]).all()


def test_a_map_of_many_indents_and_a_file_without_places_are_no_trouble() -> None:
    side = 200
    x, y = (v.ravel() * 1e-4 for v in np.meshgrid(*[np.arange(float(side))] * 2))
    coupon, d = np.zeros(side**2, dtype=np.int64), np.full(side**2, 1e-4 / 3.1)
    assert not centres_too_near(x, y, d, coupon, 3.0)[0].any()
    fired, value = centres_too_near(x * 0.0, y * 0.0, d, coupon, 3.0)
    assert fired.all()
    assert_allclose(value, 0.0)


def test_least_thickness_of_a_vickers_and_a_knoop_coupon() -> None:
    # ISO 6507-1 (text of 1997): 1.5 d. Knoop: the depth is d / 30.5 (172.5 and 130 degrees,
    # ISO 4545-1), so a third of the long diagonal is ten depths: common practice.
    scale = np.array([HV, HK, -1], dtype=np.int8)
    least = least_thickness_ratio(scale, np.full(3, 1e-4), np.full(3, np.nan))
    assert_allclose(least, [1.5, 1.0 / 3.0, np.nan])
    fired, value = too_thin(np.array([1.49e-4, 1.49e-4, 1e-9]), np.full(3, 1e-4), least)
    assert fired.tolist() == [True, False, False]
    assert_allclose(value[:2], 1.49)
    assert not too_thin(np.array([1.5e-4]), np.array([1e-4]), np.array([1.5]))[0][0]
    assert not too_thin(np.array([np.nan]), np.array([1e-4]), np.array([1.5]))[0][0]


@pytest.mark.parametrize(("d_mm", "least_mm"), [(3.0, 1.84), (4.0, 3.34), (5.0, 5.36)])
def test_least_thickness_of_a_brinell_coupon(d_mm: float, least_mm: float) -> None:
    # ISO 6506-1, table of minimum thicknesses for the 10 mm ball (from memory).
    d, ball = np.array([d_mm * 1e-3]), np.array([10e-3])
    ratio = least_thickness_ratio(np.array([HBW], dtype=np.int8), d, ball)
    assert_allclose(ratio * d_mm, least_mm, atol=6e-3)
