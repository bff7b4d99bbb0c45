"""Noise read off a series: normal noise of known size, steps, corners, likeness."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.special import ndtri
from scipy.stats import norm

from coldwork.errors import InvalidArgument
from coldwork.statistics import noise
from coldwork.statistics.noise import long_run_ratio, noise_of, point_noise, roughness

T = np.linspace(0.0, 1.0, 20_000)
COURSE = 200.0 * (1.0 - np.exp(-5.0 * T)) + 1e3 * np.minimum(T, 0.02)  # with a corner


def test_the_share_that_is_kept_is_that_of_a_normal() -> None:
    # Variance of a normal truncated at z: 1 - 2 z phi(z) / P (textbook).
    z = float(ndtri(0.975))
    assert_allclose(noise._SHARE, 1.0 - 2.0 * z * norm.pdf(z) / 0.95, rtol=1e-6)


@pytest.mark.parametrize("size", [0.01, 0.3, 5.0])
def test_finds_the_noise_on_a_course_with_a_corner(size: float) -> None:
    rng = np.random.default_rng(11)
    found = point_noise(COURSE + size * rng.standard_normal(T.size))
    assert_allclose(found, size, rtol=0.03)  # its own scatter here: 1 %


def test_a_few_jumps_do_not_count() -> None:
    rng = np.random.default_rng(12)
    series = COURSE + 0.3 * rng.standard_normal(T.size)
    series[rng.integers(0, T.size, 100)] += 50.0
    assert_allclose(point_noise(series), 0.3, rtol=0.05)


def test_a_smooth_course_has_none() -> None:
    assert point_noise(COURSE) < 1e-7


def test_a_reading_in_steps_has_at_least_the_step_over_root_12() -> None:
    # JCGM 100:2008, F.2.2.1: resolution d gives d / sqrt(12).
    assert_allclose(point_noise(np.round(COURSE, 1)), 0.1 / np.sqrt(12.0), rtol=0.2)


@pytest.mark.parametrize("memory", [3, 5, 11])
def test_a_filter_is_seen_with_its_memory(memory: int) -> None:
    # Moving means of independent points, scaled to a standard deviation of 0.3: the
    # variance of a long mean is that of as many times fewer points.
    rng = np.random.default_rng(20)
    raw = rng.standard_normal(T.size + memory - 1)
    found = noise_of(COURSE + 0.3 * np.convolve(raw, np.ones(memory) / np.sqrt(memory), "valid"))
    assert_allclose(found.sd, 0.3, rtol=0.06)
    assert memory / 2 < found.alike <= 2 * memory
    assert_allclose(found.long_run, memory, rtol=0.2)


def test_independent_noise_is_alike_over_no_neighbours() -> None:
    rng = np.random.default_rng(21)
    found = noise_of(COURSE + 0.3 * rng.standard_normal(T.size))
    assert (found.alike, found.long_run, found.lasting) == (1, 1.0, 0.0)


@pytest.mark.parametrize("ratio", [0.1, 0.2, 0.3])
def test_what_steps_leave_in_a_mean(ratio: float) -> None:
    # Directly: the mean of rounded normal values, over places within a step.
    rng = np.random.default_rng(22)
    places = np.linspace(0.0, 1.0, 40, endpoint=False)
    off = [np.mean(np.round(p + ratio * rng.standard_normal(100_000))) - p for p in places]
    slow = np.linspace(0.0, 40.0, T.size)
    found = noise_of(np.round(slow + ratio * rng.standard_normal(T.size)))
    assert 0.8 * np.std(off) < found.lasting < 1.8 * np.std(off)  # rather too much


def test_scales_with_its_unit_and_ignores_missing_points() -> None:
    rng = np.random.default_rng(13)
    series = COURSE + 0.3 * rng.standard_normal(T.size)
    assert_allclose(point_noise(1e6 * series), 1e6 * point_noise(series), rtol=1e-6)
    holed = series.copy()
    holed[::1000] = np.nan
    assert_allclose(point_noise(holed), point_noise(series), rtol=0.02)


def test_roughness_is_the_noise_of_independent_points() -> None:
    rng = np.random.default_rng(23)
    assert_allclose(roughness(0.3 * rng.standard_normal(20_000)), 0.3, rtol=0.03)
    assert roughness(np.arange(3.0)) == 0.0


def test_few_points_tell_nothing() -> None:
    assert point_noise(np.arange(7.0)) == 0.0


def test_independent_residuals_have_a_ratio_of_one() -> None:
    rng = np.random.default_rng(14)
    ratios = [long_run_ratio(rng.standard_normal(2000)) for _ in range(200)]
    assert np.mean(np.array(ratios) == 1.0) > 0.9  # 5 % are meant to stand out


def test_filtered_residuals_have_the_ratio_of_their_filter() -> None:
    # First-order autoregression: long-run over point variance is (1 + a) / (1 - a).
    rng = np.random.default_rng(15)
    a = 0.6
    found = []
    for _ in range(200):
        r = rng.standard_normal(4000)
        for k in range(1, r.size):
            r[k] += a * r[k - 1]
        found.append(long_run_ratio(r))
    assert_allclose(np.mean(found), (1.0 + a) / (1.0 - a), rtol=0.1)


def test_short_or_exact_series_have_one() -> None:
    assert long_run_ratio(np.arange(99.0)) == 1.0
    assert long_run_ratio(np.zeros(1000)) == 1.0


def test_refuses_infinite_points() -> None:
    with pytest.raises(InvalidArgument, match="series must be finite"):
        point_noise([1.0, np.inf] * 10)
    with pytest.raises(InvalidArgument, match="residuals must be finite"):
        long_run_ratio([1.0, np.inf] * 100)
