"""Scatter of the readings in each coupon, beside the pooled value and the limit."""

from dataclasses import dataclass

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from coldwork.plots.columns import (
    FloatArray,
    Frames,
    aligned,
    booleans,
    frame_of,
    numbers,
    runs,
    texts,
)
from coldwork.plots.context import Context
from coldwork.plots.names import counted
from coldwork.plots.quantity import Scale, robust_limits
from coldwork.plots.rows import MOST_COUPONS, Page, Panel, Rows, Strip, row_pages
from coldwork.plots.sheet import Sheet
from coldwork.plots.style import BLUE, INK, RED, Dashes, Mark, house

__all__ = ["draw"]

_IN_POOL = Mark("o", 4.4, BLUE, INK, 0.6)
_LEFT = Mark("s", 5.4, RED, INK, 0.9)
_BEYOND = Mark(">", 5.0, INK)
_POOLED: tuple[Dashes, float] = ("-", 1.5)  # dashes, thickness [pt]
_LIMIT: tuple[Dashes, float] = ((0, (4, 1.6)), 1.1)


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the relative standard deviation of each coupon's readings.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons` and `scatter`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no coupon has two readings.
    """
    if not 0 < len(frame_of(frames, "coupons")) <= MOST_COUPONS:
        return []
    with house():
        rows = Rows.of(frames)
        data = _Data.of(frames, rows)
        if not np.isfinite(data.s).any():
            return []
        _, high = robust_limits(data.s, np.concatenate([data.pooled, data.limit]))
        scale = Scale("Standard deviation of the readings [% of their mean]", 1.0, 0.0, high)
        sheet = Sheet(
            "Scatter of the readings in each coupon",
            context,
            [counted(len(rows.ids), "coupon")],
            data.key(high),
            [
                "The pooled value is that of coupons of one scale, nominal force and condition; "
                "a coupon above the limit leaves the pool and keeps its own value."
            ],
        )
        strip = [Strip("readings", data.words())]
        figures = []
        for page in row_pages(sheet, rows, np.arange(len(rows.ids)), [Panel(scale.label)], strip):
            scale.on(page.panels[0])
            data.fill(page, scale)
            figures.append(page.figure)
        return figures


@dataclass(frozen=True)
class _Data:
    """The `scatter` frame in the coupons' order; shape (n,) each.

    `count` readings [1]; `s`, `pooled` and `limit` relative. [%]
    """

    count: FloatArray
    s: FloatArray
    pooled: FloatArray
    limit: FloatArray
    left: NDArray[np.bool_]

    @classmethod
    def of(cls, frames: Frames, rows: Rows) -> "_Data":
        frame = frame_of(frames, "scatter")
        places = aligned(rows.ids, texts(frame, "coupon_id"))
        here = places >= 0

        def column(name: str, factor: float = 100.0) -> FloatArray:
            values = np.full(len(rows.ids), np.nan)
            values[places[here]] = numbers(frame, name)[here] * factor
            return values

        left = np.zeros(len(rows.ids), dtype=np.bool_)
        left[places[here]] = booleans(frame, "left_pool")[here]
        names = ("relative_s", "pooled_relative_s", "limit_relative_s")
        s, pooled, limit = (column(name) for name in names)
        return cls(column("n", 1.0), s, pooled, limit, left)

    def words(self) -> list[str]:
        """Say how many readings each coupon has, and what follows from their scatter."""
        words = []
        for n, s, left in zip(self.count, self.s, self.left, strict=True):
            count = "none" if np.isnan(n) or n == 0 else f"{n:.0f}"
            told = f", {s:.2g} %, left the pool" if left else ""
            lacking = "" if np.isfinite(s) or count == "none" else ", no scatter"
            words.append(f"{count}{told}{lacking}")
        return words

    def key(self, high: float) -> list[tuple[Artist, str]]:
        """Give the samples of what occurs."""
        found: list[tuple[Artist, str]] = []
        if (np.isfinite(self.s) & ~self.left).any():
            found.append((_IN_POOL.sample(), "coupon"))
        if self.left.any():
            found.append((_LEFT.sample(), "coupon that left the pool"))
        if (self.s > high).any():
            found.append((_BEYOND.sample(), "beyond the axis"))
        line = Mark("", 0.0, INK, INK)
        if np.isfinite(self.pooled).any():
            found.append((line.sample(_POOLED[1], _POOLED[0]), "pooled over its group"))
        if np.isfinite(self.limit).any():
            found.append((line.sample(_LIMIT[1], _LIMIT[0]), "limit for staying in the pool"))
        return found

    def fill(self, page: Page, scale: Scale) -> None:
        """Draw the coupons of a page."""
        axes, places = page.panels[0], page.places
        _draw_steps(axes, self.pooled[places], *_POOLED)
        _draw_steps(axes, self.limit[places], *_LIMIT)
        s, left = self.s[places], self.left[places]
        lines = np.arange(len(places), dtype=np.float64)
        inside = np.isfinite(s) & (s <= scale.high)
        for mark, mine in ((_IN_POOL, inside & ~left), (_LEFT, inside & left)):
            page.put(mark, s[mine], lines[mine])
        beyond = s > scale.high
        page.put(_BEYOND, np.full(int(beyond.sum()), scale.inside(1)), lines[beyond])


def _draw_steps(axes: Axes, values: FloatArray, dashes: Dashes, width: float) -> None:
    """Draw one upright line for each stretch of rows with the same value."""
    for start, stop in runs([None if np.isnan(x) else round(float(x), 9) for x in values]):
        if np.isfinite(values[start]):
            ends = [start - 0.5, stop - 0.5]
            at = [float(values[start])] * 2
            axes.plot(
                at,
                ends,
                color=INK,
                linewidth=width,
                linestyle=dashes,
                zorder=1.5,
                solid_capstyle="butt",
            )
