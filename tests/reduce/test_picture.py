"""Thinning for pictures: what a pixel column shows stays, and no extreme is lost."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from coldwork.reduce.curve import CurveResult, Valued
from coldwork.reduce.picture import picture_of, thinned

FloatArray = NDArray[np.float64]
POINTS = 200_000


def noisy_curve(seed: int = 7) -> tuple[FloatArray, FloatArray]:
    """A rising curve with noise, a spike up and a spike down."""
    random = np.random.default_rng(seed)
    x = np.linspace(0.0, 0.3, POINTS) + 2e-6 * random.standard_normal(POINTS)
    y = 300e6 * (1.0 - np.exp(-12.0 * x)) + 0.3e6 * random.standard_normal(POINTS)
    y[123_456] += 40e6
    y[77_777] -= 40e6
    return x, y


def painted(x: FloatArray, y: FloatArray, columns: int) -> tuple[FloatArray, FloatArray]:
    """Lowest and highest point of each pixel column of equal width: what a screen shows."""
    place = np.minimum((x - x[0]) / (np.max(x) - x[0]) * columns, columns - 1.0).astype(int)
    place = np.clip(place, 0, columns - 1)
    low, high = np.full(columns, np.inf), np.full(columns, -np.inf)
    np.minimum.at(low, place, y)
    np.maximum.at(high, place, y)
    return low, high


def test_two_hundred_thousand_points_become_four_a_column_at_most() -> None:
    x, y = noisy_curve()
    chosen = thinned(x, y, 480)
    assert chosen.size <= 6 * 480
    assert (np.diff(chosen) > 0).all()
    assert chosen[0] == 0
    assert chosen[-1] == POINTS - 1


def test_no_extreme_is_lost() -> None:
    x, y = noisy_curve()
    chosen = thinned(x, y)
    assert {123_456, 77_777, int(np.argmax(y)), int(np.argmin(y))} <= set(chosen.tolist())


def test_a_screen_shows_the_same() -> None:
    x = np.linspace(0.0, 1.0, 50_000)
    y = np.sin(40.0 * x) + 0.1 * np.random.default_rng(1).standard_normal(x.size)
    chosen = thinned(x, y, 300)
    for whole, few in zip(painted(x, y, 300), painted(x[chosen], y[chosen], 300), strict=True):
        np.testing.assert_array_equal(whole, few)


def test_a_loop_back_keeps_its_turning_points() -> None:
    up = np.linspace(0.0, 1.0, 5000)
    back = np.linspace(1.0, 0.7, 3000)
    x = np.concatenate([up, back, back[::-1], np.linspace(1.0, 2.0, 5000)])
    y = np.concatenate([up, back - 0.3, back[::-1] - 0.3, np.ones(5000)])
    chosen = thinned(x, y, 100)
    assert x[chosen][(chosen > 5000) & (chosen < 11_000)].min() == pytest.approx(0.7)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.tuples(st.floats(-1e9, 1e9), st.floats(-1e9, 1e9)), min_size=1, max_size=300),
    st.integers(1, 12),
)
def test_any_points_keep_their_ends_and_extremes(
    points: list[tuple[float, float]], columns: int
) -> None:
    x, y = np.array(points).T
    chosen = thinned(x, y, columns)
    assert (np.diff(chosen) > 0).all()
    assert {0, len(points) - 1} <= set(chosen.tolist())
    for values in (x, y):
        assert values[chosen].min() == values.min()
        assert values[chosen].max() == values.max()


def test_a_few_points_stay_as_they_are() -> None:
    x = np.arange(10.0)
    assert thinned(x, x**2).tolist() == list(range(10))


def result_of(x: FloatArray, y: FloatArray, **known: object) -> CurveResult:
    none = np.empty(0)
    return CurveResult((), 0.0, 0.0, y, x, none, none, **known)  # type: ignore[arg-type]


def test_the_part_about_yield_has_pixels_of_its_own() -> None:
    x, y = noisy_curve()
    found = picture_of(result_of(x, y, slope=Valued(120e9, 0.0), proof={0.002: Valued(60e6, 0.0)}))
    assert found.strain.max() == x.max()
    assert found.yield_strain.max() <= 0.0251
    assert (found.yield_strain < 0.02).sum() > 5 * (found.strain < 0.02).sum()


def test_points_without_a_number_are_not_drawn() -> None:
    x, y = np.arange(50.0), np.arange(50.0)
    y[20] = np.nan
    found = picture_of(result_of(x, y))
    assert np.isfinite(found.stress).all()
    assert found.stress.size == 49
    assert found.yield_stress.size == 49  # without a yield the whole curve is about it
