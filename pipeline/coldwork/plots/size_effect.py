"""H^2 of small indents against 1/h, condition by condition, with the lines that stand for them."""

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure

from coldwork.plots.columns import FloatArray, Frames, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.grid import Caption, Remark, grid_pages
from coldwork.plots.names import counted
from coldwork.plots.quantity import Scale
from coldwork.plots.sheet import Sheet
from coldwork.plots.style import BLUE, GREY, INK, PAPER, Dashes, Mark, house

__all__ = ["draw"]

_READING = Mark("o", 2.4, PAPER, INK, 0.6)
_COUPON = Mark("", 0.0, GREY, GREY)
_MEAN = Mark("", 0.0, BLUE, BLUE)
_DASHED: Dashes = (0, (5.0, 2.0))
_MANY = 300  # readings of a panel from which they are drawn smaller
_NOTES = (
    "A coupon's line meets 1/h = 0, the large indent, at the square of its H_0. Coupons of a "
    "condition share the slope where it is fitted. Depths go with the mean diagonal over 7.0006; "
    "hardness is over the projected area.",
)


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the square of the hardness against the inverse of the depth.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `size_points` with `condition`, `inverse_depth_per_um` and `square_gpa2`, one row a
        reading; `size_lines` with `condition`, `intercept_gpa2` and `slope_gpa2_um`, one row
        a coupon; `size_conditions` with `condition` and `remark`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no size effect is taken out.
    """
    points, lines = frame_of(frames, "size_points"), frame_of(frames, "size_lines")
    told = frame_of(frames, "size_conditions")
    if not len(points):
        return []
    with house():
        x, y = numbers(points, "inverse_depth_per_um"), numbers(points, "square_gpa2")
        right, top = 1.06 * float(np.nanmax(x)), 1.1 * float(np.nanmax(y))
        of_point, of_line = (
            np.array(texts(points, "condition")),
            np.array(texts(lines, "condition")),
        )
        names = texts(told, "condition")
        facts = [counted(len(names), "condition"), counted(len(lines), "coupon")]
        sheet = Sheet("Small indents: H² against 1/h", context, facts, _key(), _NOTES)
        remarks = [Remark(text) for text in texts(told, "remark")]
        shown = [name or "no condition" for name in names]
        figures = []
        captions = [Caption("H² [GPa²]")]
        for figure, cells in grid_pages(sheet, shown, remarks, captions, "1/h [1/µm]"):
            for cell in cells:
                axes, name = cell.panels[0], names[cell.place]
                Scale("", 1.0, 0.0, right).on(axes, ticks=4)
                Scale("", 1.0, 0.0, top).on(axes, upright=True, ticks=4)
                mine = lines[of_line == name]
                _draw_lines(
                    axes, numbers(mine, "intercept_gpa2"), numbers(mine, "slope_gpa2_um"), right
                )
                here = of_point == name
                many = int(here.sum()) > _MANY
                _READING.put(axes, x[here], y[here], raster=True, scale=0.7 if many else 1.0)
            figures.append(figure)
        return figures


def _draw_lines(axes: Axes, intercept: FloatArray, slope: FloatArray, right: float) -> None:
    known = np.isfinite(intercept) & np.isfinite(slope)
    if not known.any():
        return
    a, s = intercept[known], slope[known]
    none = np.zeros(len(a))
    ends = np.stack([none, a, none + right, a + s * right], axis=-1).reshape(-1, 2, 2)
    axes.add_collection(
        LineCollection(list(ends), linewidths=0.5, colors=GREY, zorder=1.9), autolim=False
    )
    real = a > 0.0  # others meet no hardness of a large indent, and are flagged
    if not real.any():
        return
    start, rise = float(a[real].mean()), float(s[real].mean())
    axes.plot(
        [0.0, right],
        [start, start + rise * right],
        color=BLUE,
        linewidth=1.2,
        linestyle=_DASHED,
        zorder=2.6,
    )


def _key() -> list[tuple[Artist, str]]:
    return [
        (_READING.sample(), "indent, corrected for its tester"),
        (_COUPON.sample(0.7), "line of a coupon"),
        (_MEAN.sample(1.2, _DASHED), "their mean; H_0 [GPa] and h* [µm] beside the name"),
    ]
