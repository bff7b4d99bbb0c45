"""Plots of the furnace: pages, words, what holds, and what is not there."""

import numpy as np
import pandas as pd
import pytest
from matplotlib.collections import PolyCollection

from coldwork.plots.context import Context
from coldwork.plots.furnace import draw_pressures, draw_progress

CONTEXT = Context("CS-1", "copper", "indent")


def frames(n: int, *, held: bool = True, name: str = "C") -> dict[str, pd.DataFrame]:
    ids = [f"{name}{i:03d}" for i in range(n)]
    rows = []
    for i, each in enumerate(ids):
        drive = 0.1 + 0.01 * i
        rows.append(("driving_pressure_mpa", each, drive, 0.6 * drive, 1.7 * drive, ""))
        if held:
            rows.append(("zener_pressure_mpa", each, 0.05, 0.03, 0.08, ""))
        rows.append(("net_pressure_mpa", each, drive - 0.05, np.nan, np.nan, "held"))
    columns = ["quantity", "coupon_id", "value", "lower", "upper", "verdict"]
    table = pd.DataFrame(rows, columns=columns).assign(state="cold-worked", u=0.02, u_own=0.01)
    return {"coupons": pd.DataFrame({"coupon_id": ids}), "anneal": table}


@pytest.mark.parametrize(("n", "pages"), [(1, 1), (5, 1), (35, 1), (200, 4)])
def test_every_coupon_stands_on_a_page(n: int, pages: int) -> None:
    figures = draw_pressures(frames(n), CONTEXT)
    assert len(figures) == pages
    words = [text.get_text() for figure in figures for text in figure.axes[0].texts]
    assert {f"C{i:03d}" for i in range(n)} <= set(words)
    assert words.count("held") == n


def test_what_holds_is_drawn_with_its_interval() -> None:
    (figure,) = draw_pressures(frames(5), CONTEXT)
    assert any("holds: particles 0.05 MPa" in t.get_text() for t in figure.legends[0].get_texts())
    axes = figure.axes[0]
    (band,) = [patch for patch in axes.patches if patch.get_hatch()]
    low, high = band.get_extents().transformed(axes.transData.inverted()).intervalx
    assert (round(low, 9), round(high, 9)) == (0.03, 0.08)
    (bare,) = draw_pressures(frames(5, held=False), CONTEXT)
    assert not [patch for patch in bare.axes[0].patches if patch.get_hatch()]


def test_long_names_and_none_at_all() -> None:
    (figure,) = draw_pressures(frames(3, name="a coupon of a very long name " * 4), CONTEXT)
    assert figure.axes
    assert draw_pressures({}, CONTEXT) == []
    assert draw_progress({}, CONTEXT) == []


def test_the_course_has_its_band() -> None:
    table = pd.DataFrame(
        {
            "time_s": [0.0, 3600.0, 7200.0],
            "temperature_c": [20.0, 300.0, 300.0],
            "fraction": [0.0, 0.3, 0.8],
            "lower": [0.0, 0.1, 0.5],
            "upper": [0.0, 0.5, 0.95],
        }
    )
    (figure,) = draw_progress({"progress": table}, CONTEXT)
    above, below = figure.axes
    assert np.asarray(above.get_lines()[0].get_ydata()).tolist() == [20.0, 300.0, 300.0]
    assert np.asarray(below.get_lines()[0].get_xdata()).tolist() == [0.0, 1.0, 2.0]
    (band,) = [c for c in below.collections if isinstance(c, PolyCollection)]
    assert band.get_paths()[0].get_extents().ymax == 0.95
