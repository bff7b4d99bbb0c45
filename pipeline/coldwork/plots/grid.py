"""Pages of cells, one for each coupon: its name, what is to be said of it, its panels.

All cells of a subject have the same axes, so that coupons can be compared; a cell is
large where there are few of them, and pages stay readable where there are many.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import ceil

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from coldwork.plots.names import fitted, shown, told_apart, width
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.style import GREY, RED, Sizes

__all__ = ["Caption", "Cell", "Remark", "grid_pages"]

_TITLE, _CAPTION, _BELOW = 0.21, 0.17, 0.24  # above and below the panels of a cell [inch]
_LABEL = 0.3  # for the name of the axis below the lowest row [inch]
_TICKS, _GAP = 0.44, 0.24  # left of a panel with numbers of its own, and of another one [inch]
_BOLD = 1.2  # width of a bold word over that of a plain one, at most [1]
_RIGHT = 0.12  # right of the last panel, for half a number [inch]
_HIGHEST = 10.2  # of all rows of a page together [inch]
_FEW, _SOME = 4, 12  # cells up to which two, and three, stand side by side


@dataclass(frozen=True)
class Caption:
    """What a panel of each cell shows: its upright quantity, with its unit.

    `numbered` says that it has numbers of its own, and not those of the panel to its left.
    """

    text: str
    numbered: bool = True


@dataclass(frozen=True)
class Remark:
    """A word beside the name of a cell; a grave one stands out."""

    text: str = ""
    grave: bool = False


@dataclass(frozen=True)
class Cell:
    """A cell, ready to be drawn on.

    Attributes
    ----------
    panels : list of Axes
        Its panels from left to right.
    place : int
        Which coupon, by its place among the `names` of `grid_pages`.
    lowest : bool
        Whether the name of the horizontal axis belongs below it.
    """

    panels: list[Axes]
    place: int
    lowest: bool


@dataclass(frozen=True)
class _Shape:
    """How cells lie on a page: side by side, size of a panel and of a cell. [inch]."""

    across: int
    wide: float
    high: float
    cell_wide: float
    cell_high: float
    lefts: tuple[float, ...]


def grid_pages(
    sheet: Sheet,
    names: Sequence[str],
    remarks: Sequence[Remark],
    captions: Sequence[Caption],
    below: str,
) -> Iterator[tuple[Figure, list[Cell]]]:
    """Start the pages of a plot that has one cell for each coupon.

    Parameters
    ----------
    sheet : Sheet
        The words around them; the number of the page is added.
    names : sequence of str, length n
        The coupons.
    remarks : sequence of Remark, length n
        What is said of each.
    captions : sequence of Caption
        The panels of each cell.
    below : str
        What the horizontal axes show, with the unit.

    Yields
    ------
    tuple of Figure and list of Cell
        A page with its cells in order.
    """
    shape = _shape(len(names), captions)
    labels = told_apart(list(names), Sizes.words, (shape.cell_wide - _TICKS - 0.1) / _BOLD)
    rows = max(1, int(_HIGHEST / shape.cell_high))
    pages = ceil(len(names) / (rows * shape.across))
    for i, part in enumerate(np.array_split(np.arange(len(names)), pages), 1):
        facts = [*sheet.facts, *([f"page {i} of {pages}"] if pages > 1 else [])]
        page = Sheet(sheet.title, sheet.context, facts, sheet.key, sheet.notes)
        yield _page(page, shape, part, labels, remarks, captions, below)


def _shape(n: int, captions: Sequence[Caption]) -> _Shape:
    across = 2 if n <= _FEW else 3
    if len(captions) == 1:
        across = 2 if n <= _FEW else 3 if n <= _SOME else 4
    across = min(across, max(n, 1))
    cell = min((WIDTH - 2.0 * EDGE) / across, 5.4)
    gaps = [_TICKS if caption.numbered else _GAP for caption in captions]
    wide = (cell - sum(gaps) - _RIGHT) / len(captions)
    high = min(max(1.0, 0.72 * wide), 2.6)
    lefts, at = [], 0.0
    for gap in gaps:
        lefts.append(at + gap)
        at += gap + wide
    return _Shape(across, wide, high, cell, high + _TITLE + _CAPTION + _BELOW, tuple(lefts))


def _page(
    sheet: Sheet,
    shape: _Shape,
    part: NDArray[np.intp],
    labels: Sequence[str],
    remarks: Sequence[Remark],
    captions: Sequence[Caption],
    below: str,
) -> tuple[Figure, list[Cell]]:
    rows = ceil(len(part) / shape.across)
    inner = rows * shape.cell_high + _LABEL
    figure, base = open_sheet(sheet, inner)
    whole = float(figure.get_figheight())
    cells = []
    for k, place in enumerate(part.tolist()):
        row, column = divmod(k, shape.across)
        left = EDGE + column * shape.cell_wide
        top = base + inner - row * shape.cell_high
        floor = top - _TITLE - _CAPTION - shape.high
        panels = [add_panel(figure, left + at, floor, shape.wide, shape.high) for at in shape.lefts]
        lowest = k + shape.across >= len(part)
        _name(figure, labels[place], remarks[place], (left, top), shape)
        nexts = (*shape.lefts[1:], shape.cell_wide)
        for axes, caption, at, end in zip(panels, captions, shape.lefts, nexts, strict=True):
            text = fitted(caption.text, Sizes.small, end - at - 0.05)
            spot = ((left + at) / WIDTH, (floor + shape.high + 0.05) / whole)
            figure.text(*spot, text, fontsize=Sizes.small, color=GREY, va="baseline")
            if not caption.numbered:
                axes.tick_params(axis="y", left=False, labelleft=False)
            for axis in (axes.xaxis, axes.yaxis):  # no name, so no room to be searched for it
                axis.set_label_coords(0.0, 0.0)
        if lowest:
            middle = left + (shape.lefts[0] + shape.lefts[-1] + shape.wide) / 2.0
            text = fitted(below, Sizes.small, shape.cell_wide - 0.1)
            spot = (middle / WIDTH, (floor - _BELOW - 0.12) / whole)
            figure.text(*spot, text, fontsize=Sizes.small, ha="center", va="baseline")
        cells.append(Cell(panels, place, lowest))
    return figure, cells


def _name(
    figure: Figure, label: str, remark: Remark, corner: tuple[float, float], shape: _Shape
) -> None:
    """Write a cell's name, and beside it what is said of it as far as there is room."""
    left, top = corner
    whole = float(figure.get_figheight())
    at = left + shape.lefts[0]
    up = (top - _TITLE + 0.06) / whole
    figure.text(at / WIDTH, up, label, fontsize=Sizes.words, fontweight="bold", va="baseline")
    after = at + _BOLD * width(label, Sizes.words) + 0.1
    room = left + shape.cell_wide - after - _RIGHT
    if remark.text and room > 0.3:
        text = fitted(shown(remark.text), Sizes.small, room)
        colour = RED if remark.grave else GREY
        figure.text(after / WIDTH, up, text, fontsize=Sizes.small, color=colour, va="baseline")
