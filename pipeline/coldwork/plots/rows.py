"""Plots with one row for each coupon: names, guides, words beside the rows, pages."""

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from math import ceil
from typing import cast

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator
from matplotlib.transforms import ScaledTranslation
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, frame_of, runs, texts
from coldwork.plots.names import label_lines, told_apart, width
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.style import FAINT, GREY, INK, SMALL, Mark, Sizes

__all__ = ["MOST_COUPONS", "MOST_NAMED", "Page", "Panel", "Rows", "Strip", "row_pages"]

MOST_NAMED = 400  # coupons above which rows carry their place instead of a name
MOST_COUPONS = 20_000  # coupons above which a row each shows nothing any more
_ROWS_A_PAGE = 52
_TALL = 20  # rows above which the axis is numbered above and below
_HEIGHTS = (
    (6, 0.34),
    (12, 0.28),
    (20, 0.23),
    (_ROWS_A_PAGE, 0.18),
)  # of a row, up to so many [inch]
_NAME_ROOM, _GROUP_ROOM, _STRIP_ROOM = 2.0, 1.3, 2.5  # at most [inch]
_GAP = 0.14  # between neighbours in a row [inch]


@dataclass(frozen=True)
class Strip:
    """A column of words to the right of the panels, one for each coupon."""

    heading: str
    words: Sequence[str]
    kinds: Sequence[str] = ()

    def counts(self, chosen: NDArray[np.intp]) -> str:
        """Count its words, or the kinds that stand for them, where rows have no room for words."""
        told = self.kinds or self.words
        most = Counter(told[i] for i in chosen.tolist() if told[i]).most_common()
        first = [f"{n} {word}" for word, n in most[:6]]
        rest = sum(n for _, n in most[6:])
        return ", ".join([*first, *([f"{rest} others"] if rest else [])])


@dataclass(frozen=True)
class Panel:
    """One panel of a page of rows: what its axis says, and its share of the width."""

    label: str
    share: float = 1.0


@dataclass(frozen=True)
class Page:
    """A page of rows, ready to be drawn on.

    Attributes
    ----------
    figure : Figure
        The figure.
    panels : list of Axes
        Its panels; the row of a coupon is its place in `places`, from 0 downwards.
    places : ndarray of intp, shape (k,)
        The coupons that stand on this page, by their place in the batch.
    crowd : bool
        Whether there are so many that marks are small and pixels.
    """

    figure: Figure
    panels: list[Axes]
    places: NDArray[np.intp]
    crowd: bool

    def put(self, mark: Mark, x: FloatArray, y: FloatArray, panel: int = 0) -> None:
        """Draw a mark at places on a panel, small in a crowd."""
        scale = SMALL if self.crowd else 1.0
        mark.put(self.panels[panel], x, y, raster=self.crowd, scale=scale)


@dataclass(frozen=True)
class Rows:
    """The coupons of a batch as rows of a plot, in the order of the sheet's table.

    Attributes
    ----------
    ids : tuple of str, length n
        Their names as they are.
    labels : tuple of str, length n
        Their names as they are shown, all different.
    groups : tuple of str, length n
        Lot and condition, as far as they differ within the batch; may be empty.
    conditions : tuple of str, length n
        Condition alone; may be empty.
    """

    ids: tuple[str, ...]
    labels: tuple[str, ...]
    groups: tuple[str, ...]
    conditions: tuple[str, ...]

    @classmethod
    def of(cls, frames: Frames) -> "Rows":
        """Take the rows from the batch's `coupons`."""
        coupons = frame_of(frames, "coupons")
        ids = texts(coupons, "coupon_id")
        few = len(ids) <= MOST_NAMED
        labels = told_apart(ids, Sizes.small, _NAME_ROOM) if few else ids
        parts = [texts(coupons, name) for name in ("lot_id", "condition")]
        telling = [part for part in parts if len(set(part)) > 1]
        groups = [" · ".join(filter(None, words)) for words in zip(*telling, strict=True)]
        return cls(tuple(ids), tuple(labels), tuple(groups or [""] * len(ids)), tuple(parts[1]))

    @property
    def named(self) -> bool:
        """Whether there are few enough rows for names."""
        return len(self.ids) <= MOST_NAMED


def row_pages(
    sheet: Sheet,
    rows: Rows,
    chosen: NDArray[np.intp],
    panels: Sequence[Panel],
    strips: Sequence[Strip] = (),
) -> Iterator[Page]:
    """Start the pages of a plot that has one row for each coupon.

    While coupons are named, each page has as many rows as stay readable; beyond
    `MOST_NAMED` all stand on one page by their place, and what the strips would say
    is counted below. A strip that says nothing is left out.

    Parameters
    ----------
    sheet : Sheet
        The words; the number of the page is added.
    rows : Rows
        The coupons of the batch.
    chosen : ndarray of intp, shape (k,)
        Those that this plot shows, by their place in `rows`.
    panels : sequence of Panel
        From left to right.
    strips : sequence of Strip
        Words beside each row, for all coupons of the batch.

    Yields
    ------
    Page
        With names, guides and words drawn, without data.
    """
    said = [strip for strip in strips if any(strip.words[i] for i in chosen)]
    if not rows.named:
        counts = [f"{strip.heading}: {strip.counts(chosen)}." for strip in said]
        yield _crowd(replace(sheet, notes=[*sheet.notes, *counts]), chosen, panels)
        return
    pages = ceil(len(chosen) / _ROWS_A_PAGE)
    for i, places in enumerate(np.array_split(chosen, pages) if pages else [], 1):
        number = [f"page {i} of {pages}"] if pages > 1 else []
        yield _page(replace(sheet, facts=[*sheet.facts, *number]), rows, places, panels, said)


def _page(
    sheet: Sheet,
    rows: Rows,
    places: NDArray[np.intp],
    panels: Sequence[Panel],
    strips: Sequence[Strip],
) -> Page:
    names = max(width(label, Sizes.small) for label in rows.labels)
    columns = [_column(strip.heading, strip.words, _STRIP_ROOM) for strip in strips]
    if any(rows.groups):
        columns.append(_column("", rows.groups, _GROUP_ROOM))
    right = sum(wide + _GAP for _, _, wide in columns)
    figure, axes = _panels(sheet, len(places), panels, names + 0.1, right, headed=bool(strips))
    for panel in axes:
        across = panel.get_yaxis_transform()
        lines = np.arange(len(places))
        panel.hlines(lines, 0, 1, colors=FAINT, linewidths=0.4, transform=across, zorder=0.5)
    for row, place in enumerate(places):
        _word(axes[0], rows.labels[place], row, -0.08, side="left")
    at = _GAP
    for heading, words, wide in columns:
        _word(axes[-1], heading, -0.5, at, heading=True)
        if heading:
            for row, place in enumerate(places):
                _word(axes[-1], words[place], row, at)
        else:
            _bracket(axes, [words[place] for place in places], at)
        at += wide + _GAP
    return Page(figure, axes, places, crowd=False)


def _crowd(sheet: Sheet, places: NDArray[np.intp], panels: Sequence[Panel]) -> Page:
    figure, axes = _panels(sheet, len(places), panels, 0.7, 0.1, high=8.0)
    axes[0].set_ylabel("Place of the coupon in the batch's table")
    numbers = places + 1
    ticks = MaxNLocator(12, integer=True).tick_values(numbers[0], numbers[-1])
    ticks = ticks[(ticks >= numbers[0]) & (ticks <= numbers[-1])]
    axes[0].set_yticks(np.searchsorted(numbers, ticks), [f"{tick:.0f}" for tick in ticks])
    return Page(figure, axes, places, crowd=True)


def _panels(
    sheet: Sheet,
    n: int,
    panels: Sequence[Panel],
    left: float,
    right: float,
    *,
    headed: bool = False,
    high: float | None = None,
) -> tuple[Figure, list[Axes]]:
    gap = 0.3
    room = WIDTH - 2.0 * EDGE - left - right - gap * (len(panels) - 1) - 0.05
    unit = room / sum(panel.share for panel in panels)
    labels = [label_lines(panel.label, Sizes.axis, unit * panel.share + 0.1) for panel in panels]
    below = 0.32 + 0.15 * max(map(len, labels))
    each = next(h for most, h in _HEIGHTS if n <= most) if high is None else 0.0
    high = each * n if high is None else high
    figure, base = open_sheet(sheet, below + high + (0.28 if n > _TALL or headed else 0.12))
    axes = []
    at = EDGE + left
    for panel, lines in zip(panels, labels, strict=True):
        axes.append(add_panel(figure, at, base + below, unit * panel.share, high))
        axes[-1].set_xlabel("\n".join(lines))
        axes[-1].set_ylim(n - 0.5, -0.5)
        axes[-1].tick_params(axis="x", top=n > _TALL, labeltop=n > _TALL)
        axes[-1].set_yticks([])
        at += unit * panel.share + gap
    return figure, axes


def _column(heading: str, words: Sequence[str], most: float) -> tuple[str, list[str], float]:
    different = list(dict.fromkeys(words))
    labels = told_apart(different, Sizes.small, most)
    fitting = dict(zip(different, labels, strict=True))
    wide = max(width(label, Sizes.small) for label in [*labels, heading])
    return heading, [fitting[word] for word in words], wide + (0.0 if heading else 0.08)


def _word(
    axes: Axes, text: str, row: float, at: float, *, side: str = "right", heading: bool = False
) -> None:
    """Write beside a row, `at` inches right of the panel's right or left edge."""
    if not text:
        return
    offset = _beside(axes, at, 0.06 if heading else 0.0)
    axes.text(
        1.0 if side == "right" else 0.0,
        row,
        text,
        transform=axes.get_yaxis_transform() + offset,
        ha="left" if side == "right" else "right",
        va="bottom" if heading else "center_baseline",
        fontsize=Sizes.small,
        color=GREY if heading else INK,
        parse_math=False,
    )


def _beside(axes: Axes, right: float, up: float = 0.0) -> ScaledTranslation:
    return ScaledTranslation(right, up, cast("Figure", axes.get_figure(root=True)).dpi_scale_trans)


def _bracket(axes: Sequence[Axes], groups: Sequence[str], at: float) -> None:
    last = axes[-1]
    offset = _beside(last, at)
    for start, stop in runs(groups):
        if start:
            for panel in axes:
                panel.axhline(start - 0.5, color=GREY, linewidth=0.6, zorder=0.6)
        if groups[start]:
            last.plot(
                [1.0, 1.0],
                [start - 0.35, stop - 0.65],
                color=GREY,
                linewidth=0.8,
                transform=last.get_yaxis_transform() + offset,
                clip_on=False,
            )
            _word(last, groups[start], (start + stop - 1) / 2.0, at + 0.08)
