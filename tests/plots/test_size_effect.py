"""The plot of small indents: pages, lines where they belong, nothing where there is nothing."""

import numpy as np
import pandas as pd
import pytest
from matplotlib.lines import Line2D
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.plots.context import Context
from coldwork.plots.size_effect import draw

CONTEXT = Context("CS-1", "copper", "indent")


def frames(conditions: int, coupons: int, name: str = "rolled") -> dict[str, pd.DataFrame]:
    names = [f"{name} {i}" for i in range(conditions)]
    lines = [(names[i % conditions], 0.5 + 0.01 * i, 0.4) for i in range(coupons)]
    points = [(held, x, a + s * x) for held, a, s in lines for x in (0.1, 0.5, 2.0)]
    return {
        "size_points": pd.DataFrame(
            points, columns=["condition", "inverse_depth_per_um", "square_gpa2"]
        ),
        "size_lines": pd.DataFrame(lines, columns=["condition", "intercept_gpa2", "slope_gpa2_um"]),
        "size_conditions": pd.DataFrame({"condition": names, "remark": ["0.8, 0.6"] * conditions}),
    }


def _ends(line: Line2D) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    return np.asarray(line.get_xdata(), float), np.asarray(line.get_ydata(), float)


@pytest.mark.parametrize(("conditions", "coupons", "pages"), [(1, 5, 1), (7, 35, 1), (40, 200, 2)])
def test_every_condition_has_a_panel(conditions: int, coupons: int, pages: int) -> None:
    figures = draw(frames(conditions, coupons), CONTEXT)
    assert len(figures) == pages
    words = {text.get_text() for figure in figures for text in figure.texts}
    assert {f"rolled {i}" for i in range(conditions)} <= words
    assert sum(len(figure.axes) for figure in figures) == conditions


def test_lines_begin_at_the_large_indent() -> None:
    (figure,) = draw(frames(1, 3), CONTEXT)
    axes = figure.axes[0]
    ((x, y),) = [ends for ends in map(_ends, axes.lines) if len(ends[0]) == 2]
    assert_allclose([y[0], (y[1] - y[0]) / (x[1] - x[0])], [0.51, 0.4])
    (coupons,) = axes.collections
    starts = [np.asarray(path.vertices)[0] for path in coupons.get_paths()]
    assert_allclose(starts, [[0.0, 0.50], [0.0, 0.51], [0.0, 0.52]])


def test_a_line_below_zero_stays_out_of_the_mean_and_none_gives_none() -> None:
    made = frames(1, 2)
    made["size_lines"]["intercept_gpa2"] = [-0.3, -0.1]
    (figure,) = draw(made, CONTEXT)
    assert not [line for line in figure.axes[0].lines if len(_ends(line)[0]) == 2]
    assert draw({}, CONTEXT) == []
    assert draw(frames(2, 4, "a condition with a very long name " * 5), CONTEXT)
