"""Axes and intervals: what has to stand on them does, in the unit that they name."""

import numpy as np
import pandas as pd
import pytest
from matplotlib.collections import Collection
from matplotlib.figure import Figure
from numpy.testing import assert_allclose, assert_array_equal

from coldwork.plots.columns import aligned, booleans, numbers, runs, texts
from coldwork.plots.quantity import heading, robust_limits, scale_of, written
from coldwork.plots.spans import Spans, draw_spans, spans_of, spans_with_part, why_missing


def test_a_power_of_ten_moves_into_the_unit() -> None:
    scale = scale_of("dislocation_density_per_m2", [np.array([2e14, 8.8e14])])
    assert scale.label == "Dislocation density [10¹⁴ m⁻²]"
    assert scale.factor == pytest.approx(1e-14)
    assert scale.low == 0.0
    assert scale.high > 8.8


def test_an_ordinary_number_keeps_its_unit() -> None:
    scale = scale_of("hardness", [np.array([50.0, 110.0])], detail="HV10", zero=False)
    assert scale.label == "Hardness HV10 [kgf/mm²]"
    assert 40.0 < scale.low < 50.0
    assert 110.0 < scale.high < 120.0


def test_values_of_many_decades_stand_on_a_logarithmic_axis() -> None:
    scale = scale_of("dislocation_density_per_m2", [np.array([1e12, 1e12, 3e12, 1e15])])
    assert scale.logarithmic
    assert 0.0 < scale.low < 1e12
    figure = Figure()
    axes = figure.add_axes((0.1, 0.1, 0.8, 0.8))
    scale.on(axes)
    figure.draw_without_rendering()
    labels = [text.get_text() for text in axes.get_xticklabels()]
    assert "10¹³" in labels


def test_nothing_to_show_still_gives_an_axis() -> None:
    scale = scale_of("stored_energy_j_per_g", [np.array([np.nan])])
    assert scale.low < scale.high
    assert robust_limits(np.array([np.nan]), np.array([])) == (0.0, 1.0)


def test_an_unknown_column_names_itself() -> None:
    assert heading("some_$column") == ("some_$column", "")
    assert heading("stored_energy_j_per_g")[0] == "Stored energy in dislocations"


@pytest.mark.parametrize(
    ("x", "text"),
    [
        (0.1, "0.1"),
        (1e14, "10¹⁴"),
        (2.5e14, "2.5 × 10¹⁴"),
        (0.0, "0"),
        (2e-9, "2 × 10⁻⁹"),
        (-5.0, "-5"),
    ],
)
def test_numbers_are_written_as_people_do(x: float, text: str) -> None:
    assert written(x) == text


def test_one_wild_value_does_not_spoil_an_axis() -> None:
    values = np.append(np.linspace(-1.0, 1.0, 100), 900.0)
    low, high = robust_limits(values, np.array([-1.5, 1.5]))
    assert -2.0 < low < -1.5
    assert 1.5 < high < 4.0


def lines_of(collection: Collection) -> list[list[float]]:
    """Give the two ends of each line along the values."""
    return [
        np.asarray(path.vertices, dtype=float)[:, 0].tolist() for path in collection.get_paths()
    ]


def test_the_own_part_stays_inside_the_interval() -> None:
    figure = Figure()
    axes = figure.add_axes((0.1, 0.1, 0.8, 0.8))
    axes.set_xlim(0.0, 10.0)
    spans = spans_with_part(*(np.array([x]) for x in (4.0, 1.0, 9.0, 0.5, 1.0)))
    draw_spans(axes, spans, np.zeros(1))
    total, own, _ = axes.collections
    assert lines_of(total) == [[1.0, 9.0]]
    assert_allclose(lines_of(own), [[2.0, 6.0]])  # half of the way in logarithms


def test_an_open_end_reaches_the_edge_and_an_upper_end_stands_alone() -> None:
    figure = Figure()
    axes = figure.add_axes((0.1, 0.1, 0.8, 0.8))
    axes.set_xlim(0.0, 10.0)
    nan = np.nan
    spans = Spans(
        np.array([4.0, nan, nan, 5.0]),
        np.array([2.0, 0.0, 0.0, nan]),
        np.array([nan, 3.0, nan, nan]),
        np.array([3.0, nan, nan, nan]),
        np.array([nan, nan, nan, nan]),
    )
    draw_spans(axes, spans, np.arange(4.0))
    total, _, one_sided = axes.collections
    assert lines_of(total) == [[2.0, 10.0]]
    assert lines_of(one_sided) == [[0.0, 3.0]]
    assert sorted(str(line.get_marker()) for line in axes.lines) == ["<", ">", "|"]


def test_ends_come_from_quantities_where_coupons_lack_them() -> None:
    frames = {
        "coupons": pd.DataFrame({"coupon_id": ["b", "a"], "temperature_rise_k": [0.1, 0.3]}),
        "quantities": pd.DataFrame(
            {
                "coupon_id": ["a", "b", "a"],
                "quantity": ["temperature_rise_k", "temperature_rise_k", "hardness"],
                "lower": [0.2, 0.05, 50.0],
                "upper": [0.6, np.nan, 52.0],
                "u_own": [0.05, 0.01, 0.1],
                "u": [0.1, 0.04, 0.2],
            }
        ),
    }
    spans = spans_of(frames, ["b", "a"], "temperature_rise_k")
    assert_allclose(spans.lower, [0.05, 0.2])
    assert_array_equal(spans.upper, [np.nan, 0.6])
    assert_allclose(spans.own_lower, [0.1 * 0.5**0.25, (0.3 * 0.2) ** 0.5])
    assert_allclose(spans.own_upper, [np.nan, (0.3 * 0.6) ** 0.5])


def test_the_gravest_rule_that_empties_a_value_is_named() -> None:
    frames = {
        "coupons": pd.DataFrame(
            {
                "coupon_id": ["a", "b", "c", "d"],
                "flags": ["few-readings;below-baseline", "", "", ""],
            }
        ),
        "flags": pd.DataFrame(
            {
                "coupon_id": ["b", "b", "c"],
                "rule": ["no-line-energy", "no-readings", "dwell"],
                "empties": ["hardness;stored_energy_j_per_g", "stored_energy_j_per_g", None],
            }
        ),
    }
    nan, one = np.full(4, np.nan), np.array([np.nan, np.nan, np.nan, 1.0])
    words = why_missing(
        frames, list("abcd"), "stored_energy_j_per_g", Spans(one, nan, nan, nan, nan)
    )
    assert words == ["below-baseline", "no-readings", "no value", "no interval"]


def test_columns_of_any_kind_become_arrays() -> None:
    frame = pd.DataFrame(
        {
            "x": ["1.5", "", "x"],
            "y": [np.inf, 2.0, np.nan],
            "t": ["a", None, pd.NA],
            "b": [True, False, None],
        }
    )
    assert_array_equal(numbers(frame, "x"), [1.5, np.nan, np.nan])
    assert_array_equal(numbers(frame, "y"), [np.nan, 2.0, np.nan])
    assert_array_equal(numbers(frame, "none"), [np.nan] * 3)
    assert texts(frame, "t") == ["a", "", ""]
    assert texts(frame, "none") == ["", "", ""]
    assert_array_equal(booleans(frame, "b"), [True, False, False])


def test_rows_find_their_coupons() -> None:
    assert_array_equal(aligned(["b", "a"], ["a", "x", "b"]), [1, -1, 0])
    assert runs(["a", "a", "b", "a"]) == [(0, 2), (2, 3), (3, 4)]
    assert runs([]) == []
