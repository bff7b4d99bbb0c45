"""The trade of a plan: cost over indents, and the uncertainty that a sum can buy."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray
from coldwork.plots.names import shown
from coldwork.plots.quantity import Scale
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.style import BLUE, GREY, INK, PAPER, RED, Mark, Sizes, house

__all__ = ["Reach", "Trade", "draw"]

_MARKS: Final = (
    Mark("o", 4.5, PAPER, INK, 0.9),
    Mark("s", 4.5, BLUE, BLUE, 0.9),
    Mark("^", 5.0, PAPER, BLUE, 0.9),
    Mark("D", 4.0, INK, INK, 0.9),
)
_DASHES: Final = ("-", (0, (5, 2)), (0, (1, 1.5)), (0, (6, 2, 1, 2)))
_BEST: Final = Mark("*", 11.0, RED, INK, 0.7)
_FLOOR: Final = Mark("", 0.0, GREY, GREY)
_HIGH, _LEFT, _GAP = 3.0, EDGE + 0.65, 0.85  # [inch]
_FAR: Final = 6.0  # times the cheapest cost, up to which the sums go [1]


@dataclass(frozen=True)
class Reach:
    """What one force can do.

    Attributes
    ----------
    force_n : float
        The force. [N]
    indents, cost : ndarray, shape (k,)
        Indents in each coupon and the cost that meets the target with them. [1], [any]
    coupons : ndarray of int64, shape (k,)
        How many coupons that takes. [1]
    sums, relative_u : ndarray, shape (l,)
        A cost, and the least relative u of a mean that it buys. [any], [1]
    """

    force_n: float
    indents: FloatArray
    cost: FloatArray
    coupons: NDArray[np.int64]
    sums: FloatArray
    relative_u: FloatArray


@dataclass(frozen=True)
class Trade:
    """What is drawn.

    Attributes
    ----------
    group, target : str
        After which coupons, and what is wanted.
    reach : sequence of Reach
        Force by force, four at most.
    cheapest : tuple
        Force, indents, coupons and cost of the cheapest plan. [N], [1], [1], [any]
    relative_u : float
        Its. [1]
    floor : float
        Relative u of what all coupons share. [1]
    """

    group: str
    target: str
    reach: Sequence[Reach]
    cheapest: tuple[float, int, int, float]
    relative_u: float
    floor: float


def draw(trade: Trade) -> Figure:
    """Draw a plan.

    Parameters
    ----------
    trade : Trade
        What there is to draw.

    Returns
    -------
    Figure
        One page.
    """
    force, indents, coupons, cost = trade.cheapest
    notes = [
        f"Cheapest: {coupons} x {indents} indents at {force:g} N, cost {cost:g}. A number"
        " beside a mark is that of coupons, from there on.",
    ]
    with house():
        facts = [f"After {shown(trade.group)}", shown(trade.target)]
        sheet = Sheet("What the next batch costs", None, facts, _key(trade), notes)
        figure, base = open_sheet(sheet, _HIGH + 0.7)
        wide = (WIDTH - _LEFT - EDGE - _GAP) / 2.0
        left = add_panel(figure, _LEFT, base + 0.55, wide, _HIGH)
        right = add_panel(figure, _LEFT + wide + _GAP, base + 0.55, wide, _HIGH)
        _draw_costs(left, trade)
        _draw_sums(right, trade)
        return figure


def _key(trade: Trade) -> list[tuple[Artist, str]]:
    found: list[tuple[Artist, str]] = [
        (_MARKS[i].sample(1.0, _DASHES[i]), f"indents of {each.force_n:g} N")
        for i, each in enumerate(trade.reach)
    ]
    found.append((_BEST.sample(), "cheapest plan"))
    if trade.floor:
        found.append((_FLOOR.sample(1.4), "what all coupons share: no sum goes below"))
    return found


def _draw_costs(axes: Axes, trade: Trade) -> None:
    for i, each in enumerate(trade.reach):
        axes.plot(each.indents, each.cost, color=_MARKS[i].edge, linewidth=0.8, ls=_DASHES[i])
        _MARKS[i].put(axes, each.indents, each.cost)
        if i == 0:
            new = np.flatnonzero(np.diff(each.coupons, prepend=-1))
            for x, y, n in zip(each.indents[new], each.cost[new], each.coupons[new], strict=True):
                axes.annotate(
                    f"{n}",
                    (x, y),
                    (5, 4),
                    textcoords="offset points",
                    fontsize=Sizes.small,
                    color=GREY,
                )
    _, indents, _, cost = trade.cheapest
    _BEST.put(axes, np.array([float(indents)]), np.array([cost]))
    most = max(float(each.cost.max()) for each in trade.reach)
    last = max(float(each.indents.max()) for each in trade.reach)
    Scale("", 1.0, 0.0, last + 1.0).on(axes)
    Scale("", 1.0, 0.0, 1.08 * most).on(axes, upright=True, ticks=6)
    axes.set_xlabel("Indents in each coupon")
    axes.set_ylabel("Cost that meets the target")


def _draw_sums(axes: Axes, trade: Trade) -> None:
    cost = trade.cheapest[3]
    end = _FAR * cost
    highest = trade.relative_u
    for i, each in enumerate(trade.reach):
        sums = np.append(each.sums, max(end, float(each.sums[-1])))
        u = np.append(each.relative_u, each.relative_u[-1])
        axes.step(sums, 100.0 * u, where="post", color=_MARKS[i].edge, lw=1.0, ls=_DASHES[i])
        highest = max(highest, float(each.relative_u[0]))
    if trade.floor:
        axes.axhline(100.0 * trade.floor, color=GREY, linewidth=1.4, zorder=1.8)
    _BEST.put(axes, np.array([cost]), np.array([100.0 * trade.relative_u]))
    Scale("", 1.0, 0.0, end).on(axes, ticks=6)
    Scale("", 1.0, 0.0, 108.0 * highest).on(axes, upright=True, ticks=6)
    axes.set_xlabel("Cost")
    axes.set_ylabel("Least relative u of the mean [%]")
