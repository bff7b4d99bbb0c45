"""Where the uncertainty comes from: the share of each input in u squared."""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle
from matplotlib.ticker import MaxNLocator
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.names import counted, fitted, listed, told_apart, width
from coldwork.plots.quantity import heading
from coldwork.plots.rows import Rows
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.spans import Spans, spans_of
from coldwork.plots.style import FAINT, INK, PAPER, Mark, Sizes, house

__all__ = ["draw"]

_PREFERRED = (
    "stored_energy_j_per_g",
    "stored_energy_j_per_m3",
    "dislocation_density_per_m2",
    "dislocation_stress_mpa",
    "flow_stress_mpa",
    "hardness",
)
_MOST_INPUTS = 14
_MOST_GROUPS = 12  # conditions beyond which coupons are grouped by their value
_CLASSES = 5
_PANELS_A_PAGE = 7
_NAME_ROOM = 2.5  # [inch]
_ROW, _TITLE, _BELOW = 0.25, 0.56, 0.52  # of an input; above and below the panels [inch]
_OTHERS = "all others together"
_ARROWS = {1: "↑", -1: "↓", 0: "↕"}


@dataclass(frozen=True)
class _Budget:
    """Shares in u squared as a table of coupons by inputs.

    `share`: shape (coupons, inputs), NaN where a coupon has no budget [%]; `kind`:
    `own`, `shared` or empty, for each input; `sign`: 1, -1, or 0 for both, shape (inputs,).
    """

    inputs: list[str]
    share: FloatArray
    kind: list[str]
    sign: NDArray[np.intp]


@dataclass(frozen=True)
class _Group:
    """Coupons that are shown together: their places and a name for them."""

    name: str
    members: NDArray[np.intp]


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the mean budget of each condition, one panel a condition.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons` and `budget`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages of up to seven conditions; none where no coupon has a budget.
    """
    budget = frame_of(frames, "budget")
    column = _chosen(budget)
    if column is None:
        return []
    with house():
        rows = Rows.of(frames)
        table = _table(budget[budget["quantity"] == column], rows)
        spans = spans_of(frames, rows.ids, column)
        has = np.asarray(np.isfinite(table.share).any(axis=1))
        groups, how = _groups(rows, spans, np.flatnonzero(has), column)
        pages = int(np.ceil(len(groups) / _PANELS_A_PAGE))
        name, _ = heading(column)
        figures = []
        for i, part in enumerate(np.array_split(np.arange(len(groups)), pages), 1):
            sheet = Sheet(
                f"Where the uncertainty comes from: {name[0].lower()}{name[1:]}",
                context,
                [how, *([f"page {i} of {pages}"] if pages > 1 else [])],
                _key(table),
                _notes(rows, has),
            )
            figures.append(_figure(sheet, table, [groups[k] for k in part], frames, column))
        return figures


def _chosen(budget: pd.DataFrame) -> str | None:
    if "quantity" not in budget:
        return None
    there = set(budget["quantity"][np.isfinite(numbers(budget, "share_of_u2"))])
    return next((column for column in _PREFERRED if column in there), None)


def _table(budget: pd.DataFrame, rows: Rows) -> _Budget:
    coupon = aligned(rows.ids, texts(budget, "coupon_id"))
    named = texts(budget, "input")
    inputs = list(dict.fromkeys(named))
    column = aligned(inputs, named)
    here = coupon >= 0
    share = np.full((len(rows.ids), len(inputs)), np.nan)
    share[coupon[here], column[here]] = 100.0 * numbers(budget, "share_of_u2")[here]
    has = np.isfinite(share).any(axis=1)
    share[has] = np.nan_to_num(share[has])
    kinds = dict(zip(named, texts(budget, "own_or_shared"), strict=True))
    contribution = np.nan_to_num(numbers(budget, "contribution"))
    up = np.bincount(column, contribution > 0.0, len(inputs)) > 0.0
    down = np.bincount(column, contribution < 0.0, len(inputs)) > 0.0
    sign = up.astype(np.intp) - down.astype(np.intp)
    return _reduced(_Budget(inputs, share, [kinds[name] for name in inputs], sign))


def _reduced(table: _Budget) -> _Budget:
    """Put the inputs in the order of their mean share, and join the small ones."""
    most = np.nanmax(table.share, axis=0)
    order = [int(i) for i in np.argsort(-np.nanmean(table.share, axis=0), kind="stable")]
    told = [i for i in order[:_MOST_INPUTS] if most[i] >= 0.1]
    rest = [i for i in order if i not in told]
    inputs, kind = [table.inputs[i] for i in told], [table.kind[i] for i in told]
    share, sign = table.share[:, told], table.sign[told]
    others = table.share[:, rest].sum(axis=1)
    if rest and np.nanmax(others) >= 0.1:
        share = np.column_stack([share, others])
        inputs, kind, sign = [*inputs, _OTHERS], [*kind, ""], np.append(sign, 0)
    return _Budget(inputs, share, kind, sign)


def _groups(
    rows: Rows, spans: Spans, members: NDArray[np.intp], column: str
) -> tuple[list[_Group], str]:
    group_of = rows.groups
    if len({group_of[i] for i in members.tolist()}) > _PANELS_A_PAGE:
        group_of = rows.conditions  # whatever the lot
    names = list(dict.fromkeys(group_of[i] for i in members.tolist()))
    if len(names) == 1:
        return [_Group(names[0] or "all coupons", members)], "mean of all coupons"
    if len(names) <= _MOST_GROUPS:
        groups = [
            _Group(name or "without one", members[[group_of[i] == name for i in members.tolist()]])
            for name in names
        ]
        return groups, "mean of each condition"
    _, unit = heading(column)
    ordered = members[np.argsort(spans.value[members], kind="stable")]
    groups = [
        _Group(f"{spans.value[part[0]]:.2g} to {spans.value[part[-1]]:.2g} {unit}", part)
        for part in np.array_split(ordered, min(_CLASSES, len(ordered)))
    ]
    return groups, f"{len(names)} conditions: mean of {len(groups)} classes by value instead"


def _figure(
    sheet: Sheet, table: _Budget, groups: Sequence[_Group], frames: Frames, column: str
) -> Figure:
    labels = told_apart(table.inputs, Sizes.small, _NAME_ROOM)
    left = max(width(label, Sizes.small) for label in labels) + 0.4
    gap = 0.16
    wide = (WIDTH - 2.0 * EDGE - left - gap * (len(groups) - 1) - 0.05) / len(groups)
    high = _ROW * len(table.inputs)
    figure, base = open_sheet(sheet, _TITLE + high + _BELOW)
    values = numbers(frame_of(frames, "coupons"), column)
    u = numbers(frame_of(frames, "coupons"), f"u_{column}")
    end = 1.32 * float(np.nanmax(table.share))
    for i, group in enumerate(groups):
        at = EDGE + left + i * (wide + gap)
        axes = add_panel(figure, at, base + _BELOW, wide, high)
        _draw_bars(axes, table, group, (end, 0.05 * end / wide))
        size = len(group.members)
        with np.errstate(divide="ignore", invalid="ignore"):
            relative = float(np.median(100.0 * u[group.members] / values[group.members]))
        title = [counted(size, "coupon")]
        title.append(f"u {float(f'{relative:.2g}'):g} %" if np.isfinite(relative) else "u unknown")
        name = fitted(told_apart([group.name], Sizes.small, wide)[0], Sizes.small, wide)
        axes.set_title("\n".join([name, *title]), fontsize=Sizes.small, loc="left", pad=4.0)
        if not i:
            _name_rows(axes, labels, table.sign, wide)
            middle = (EDGE + left + (WIDTH - EDGE)) / 2.0
            down = (base + 0.14) / float(figure.get_figheight())
            words = "Share of the input in u² [%]"
            figure.text(middle / WIDTH, down, words, ha="center", fontsize=Sizes.axis)
    return figure


def _draw_bars(axes: Axes, table: _Budget, group: _Group, scale: tuple[float, float]) -> None:
    end, room = scale  # of the axis, and before a number [%]
    share = table.share[group.members]
    mean, least, most = share.mean(axis=0), share.min(axis=0), share.max(axis=0)
    rows = np.arange(len(table.inputs))
    axes.set_xlim(0.0, end)
    axes.set_ylim(len(rows) - 0.5, -0.5)
    axes.xaxis.set_major_locator(MaxNLocator(3 if len(group.members) else 2, steps=[1, 2, 5, 10]))
    axes.set_yticks([])
    for row, kind in enumerate(table.kind):
        bar = _bar(kind)
        bar.set_bounds(0.0, row - 0.3, float(mean[row]), 0.6)
        axes.add_patch(bar)
        label = f"{mean[row]:.0f}" if mean[row] >= 0.95 else f"{mean[row]:.1f}"
        at = float(max(mean[row], most[row])) + room
        if mean[row] >= 0.05:
            axes.text(at, row, label, va="center_baseline", fontsize=Sizes.small - 0.5)
    spread = most - least >= 0.5
    lines = [[(a, y), (b, y)] for a, b, y in zip(least, most, rows, strict=True) if b - a >= 0.5]
    axes.add_collection(LineCollection(lines, colors=INK, linewidths=0.9), autolim=False)
    for ends in (least, most):
        Mark("|", 4.0, INK, INK, 0.9).put(axes, ends[spread], rows[spread].astype(np.float64))


def _bar(kind: str) -> Rectangle:
    face = {"own": PAPER, "shared": "#8c8c8c"}.get(kind, FAINT)
    hatch = "//////" if kind == "own" else None
    return Rectangle(
        (0.0, 0.0), 1.0, 1.0, facecolor=face, edgecolor=INK, hatch=hatch, linewidth=0.6
    )


def _name_rows(axes: Axes, labels: Sequence[str], sign: NDArray[np.intp], wide: float) -> None:
    across = axes.get_yaxis_transform()
    for row, (label, way) in enumerate(zip(labels, sign, strict=True)):
        arrow = "" if label == _OTHERS else _ARROWS[int(way)]
        axes.text(
            -0.09 / wide,
            row,
            arrow,
            ha="center",
            fontsize=Sizes.words,
            transform=across,
            va="center_baseline",
        )
        axes.text(
            -0.22 / wide,
            row,
            label,
            ha="right",
            fontsize=Sizes.small,
            transform=across,
            va="center_baseline",
        )


def _key(table: _Budget) -> list[tuple[Artist, str]]:
    words = {
        "shared": "shared: the same error in every coupon",
        "own": "own: each coupon's own error",
        "": _OTHERS,
    }
    found: list[tuple[Artist, str]] = [
        (_bar(kind), told) for kind, told in words.items() if kind in table.kind
    ]
    line = Mark("|", 4.0, INK, INK, 0.9)
    return [*found, (line.sample(0.9), "smallest to largest share among the coupons")]


def _notes(rows: Rows, has: NDArray[np.bool_]) -> list[str]:
    notes = [
        "↑ or ↓: a larger input raises or lowers the result (↕: it depends on the coupon). "
        "u: standard uncertainty of the result, median of the coupons, in percent of its value."
    ]
    without = Counter(rows.groups[i] for i in np.flatnonzero(~has).tolist())
    if without:
        told = [f"{n} of {name}" if name else counted(n, "coupon") for name, n in without.items()]
        notes.append(f"No value and so no budget: {listed(told)}.")
    return notes
