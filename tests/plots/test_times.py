"""The axis of time: zones, sittings, and labels that do not touch."""

from datetime import UTC, datetime

import numpy as np
import pytest
from matplotlib.figure import Figure
from numpy.testing import assert_allclose, assert_array_equal

from coldwork.plots.columns import FloatArray
from coldwork.plots.names import width
from coldwork.plots.times import Clock, seconds_of

T0 = datetime(2026, 5, 4, 6, 0, tzinfo=UTC).timestamp()
DAY = 86400.0


def test_times_with_and_without_a_zone_are_one_moment() -> None:
    texts = [
        "2026-05-04T06:00:00Z",
        "2026-05-04T08:00:00+02:00",
        "2026-05-04T08:00:00",
        "2026-05-04 08:00",
    ]
    assert_allclose(seconds_of(texts, "Europe/Berlin"), T0)


def test_no_time_is_no_number() -> None:
    # 02:30 does not exist in Berlin on the last Sunday of March 2026, and exists twice in October
    # (European Union directive 2000/84/EC).
    texts = ["", "yesterday", "2026-03-29T02:30:00", "2026-10-25T02:30:00", "2026-05-04T08:00:00"]
    assert_array_equal(
        np.isnan(seconds_of(texts, "Europe/Berlin")), [True, True, True, True, False]
    )
    assert seconds_of([], "UTC").shape == (0,)


def test_time_without_readings_is_left_out_between_days() -> None:
    shift = np.arange(0.0, 4 * 3600.0, 60.0)
    seconds = np.concatenate([T0 + shift, T0 + DAY + shift])
    clock = Clock.of(seconds, "UTC")
    assert len(clock.starts) == 2
    assert_array_equal(clock.sitting(seconds), np.repeat([0, 1], len(shift)))
    assert clock.length < 9 * 3600.0
    assert np.all(np.diff(clock.place(seconds)) > 0.0)
    assert_allclose(np.diff(clock.place(seconds))[: len(shift) - 1], 60.0)


def test_a_steady_course_is_one_sitting() -> None:
    clock = Clock.of(T0 + np.arange(100.0) * 90.0, "UTC")
    assert len(clock.starts) == 1
    assert_allclose(clock.place(np.array([T0 + 900.0])), 900.0)


@pytest.mark.parametrize("n", [1, 2])
def test_one_moment_is_enough(n: int) -> None:
    clock = Clock.of(np.full(n, T0), "UTC")
    assert clock.length > 0.0
    assert clock.place(np.array([T0])) == 0.0


@pytest.mark.parametrize(
    "seconds",
    [
        T0 + np.arange(20) * 3.0,
        T0 + np.arange(300) * 70.0,
        T0 + np.arange(400) * DAY,
        np.concatenate([T0 + k * DAY + np.arange(100) * 60.0 for k in range(9)]),
    ],
)
def test_labels_of_the_axis_keep_apart_and_name_the_day_once(seconds: FloatArray) -> None:
    wide = 8.0
    figure = Figure(figsize=(10, 3))
    panel = figure.add_axes((0.1, 0.2, 0.8, 0.7))
    clock = Clock.of(seconds, "Europe/Berlin")
    clock.on([panel], wide)
    low, high = panel.get_xlim()
    at = (np.asarray(panel.get_xticks()) - low) / (high - low) * wide
    labels = [tick.get_text() for tick in panel.get_xticklabels()]
    half = np.array([max(width(line, 7.5) for line in text.split("\n")) / 2 for text in labels])
    assert len(labels) >= 3
    assert np.all(np.diff(at) > half[1:] + half[:-1] - 0.3)
    assert "2026-" in labels[0]
    dates = [text for label in labels for text in label.split("\n") if text.startswith("20")]
    assert len(set(dates)) == len(dates)
