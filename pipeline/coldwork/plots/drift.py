"""Readings in the order of the test, by tester and operator, to show drift."""

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import pandas as pd
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.names import counted, label_lines, listed, signed_percent, told_apart, width
from coldwork.plots.quantity import Scale, robust_limits
from coldwork.plots.rows import Rows
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.style import BLUE, GREY, INK, PAPER, RED, Mark, Sizes, house
from coldwork.plots.times import Clock, seconds_of

__all__ = ["draw"]

_OPERATORS = (
    Mark("o", 3.6, PAPER, INK, 0.7),
    Mark("s", 3.4, BLUE, INK, 0.4),
    Mark("^", 4.4, PAPER, INK, 0.7),
    Mark("D", 3.4, RED, INK, 0.4),
    Mark("v", 4.4, INK, INK, 0.4),
    Mark("+", 4.8, INK, INK, 0.9),
)
_REST = Mark("x", 4.2, GREY, GREY, 0.8)
_BELOW, _ABOVE = Mark("v", 5.4, PAPER, INK, 1.4), Mark("^", 5.4, PAPER, INK, 1.4)
_COURSE = Mark("", 0.0, INK, INK)
_COURSE_WIDTH = 2.4  # of the mean of successive readings [pt]
_MOST_TESTERS = 6
_MANY = 2000  # readings above which they are drawn as pixels
_LEAST_BLOCK, _BLOCKS = 8, 15  # readings in a mean at least, means in a panel about
_PAUSE = 0.06  # without readings that a mean does not cross [length of the axis]
_HEIGHTS = {1: 3.6, 2: 2.4}  # of a panel; 1.7 where there are more [inch]


@dataclass(frozen=True)
class _Course:
    """Readings in the order of the test; shape (m,) each.

    `x`: place on the axis of time or of order [s or 1]; `clock`: that axis of time;
    `sitting`: readings of one sitting have one number; `away`: deviation from the
    reference [%]; `coupon` by its
    place, `number` of the reading; `panel`, `mark`: places of tester and operator in their lists.
    """

    x: FloatArray
    clock: Clock | None
    sitting: NDArray[np.intp]
    away: FloatArray
    coupon: NDArray[np.intp]
    number: FloatArray
    panel: NDArray[np.intp]
    mark: NDArray[np.intp]
    testers: list[str]
    operators: list[str]


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the readings against time, or in their order where most have no time.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons` and `readings`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        One figure; none where no two readings can be compared.
    """
    coupons, readings = frame_of(frames, "coupons"), frame_of(frames, "readings")
    column = "hardness" if context.route != "flow" else "flow_stress_mpa"
    value, weight = numbers(readings, column), numbers(readings, "weight")
    place = aligned(texts(coupons, "coupon_id"), texts(readings, "coupon_id"))
    used = (place >= 0) & np.isfinite(value) & (weight != 0.0)
    if not used.any():
        return []
    away, label = _deviations(coupons, place[used], value[used])
    if not np.isfinite(away).any():
        return []
    with house():
        chosen = readings[used]
        course, notes = _course(chosen, place[used], away, context)
        scale = Scale(label, 1.0, *robust_limits(course.away, np.zeros(1)))
        beyond = (course.away < scale.low) | (course.away > scale.high)
        if beyond.any():
            notes.append(_beyond(frames, course, beyond))
        return [_figure(course, scale, notes, context)]


def _deviations(
    coupons: pd.DataFrame, place: NDArray[np.intp], value: FloatArray
) -> tuple[FloatArray, str]:
    """Give each reading's deviation from its reference [%], and what that is.

    The reference is the median of the condition where two or more of its coupons were
    read: the drift between coupons would vanish beside each coupon's own.
    """
    columns = ("hardness_scale", "lot_id", "condition")
    described = list(zip(*(texts(coupons, name) for name in columns), strict=True))
    read = np.unique(place)
    counts = Counter(described[i] for i in read)
    shared = [bool(described[i][2]) and counts[described[i]] > 1 for i in range(len(described))]
    names: dict[object, int] = {}
    group_of = np.array(
        [
            names.setdefault(key if both else i, len(names))
            for i, (key, both) in enumerate(zip(described, shared, strict=True))
        ]
    )
    group = group_of[place]
    count = np.bincount(group, minlength=len(names))
    middle = pd.Series(value).groupby(group).transform("median").to_numpy()
    away = 100.0 * (value / middle - 1.0)
    what = "condition" if any(shared[i] for i in read) else "coupon"
    return np.where(count[group] > 1, away, np.nan), f"Deviation from the median of its {what} [%]"


def _course(
    readings: pd.DataFrame, place: NDArray[np.intp], away: FloatArray, context: Context
) -> tuple[_Course, list[str]]:
    seconds = seconds_of(texts(readings, "measured_at"), context.timezone)
    timed, comparable = np.isfinite(seconds), np.isfinite(away)
    notes = [_left_out(~comparable, "the only reading of its kind")]
    clock: Clock | None = None
    order = np.lexsort((numbers(readings, "reading_no"), place))
    order = order[comparable[order]]
    if (timed & comparable).sum() > 0.5 * comparable.sum():
        notes.append(_left_out(~timed & comparable, "without a time"))
        order = order[timed[order]]
        order = order[np.argsort(seconds[order], kind="stable")]
        clock = Clock.of(seconds[order], context.timezone)
        x, sitting = clock.place(seconds[order]), clock.sitting(seconds[order])
    else:
        x, sitting = np.arange(1.0, len(order) + 1.0), np.zeros(len(order), dtype=np.intp)
    chosen = readings.iloc[order]
    panel, testers = _indexed(texts(chosen, "tester"), _MOST_TESTERS, "tester")
    mark, operators = _indexed(texts(chosen, "operator"), len(_OPERATORS) + 1, "operator")
    number = numbers(chosen, "reading_no")
    course = _Course(
        x, clock, sitting, away[order], place[order], number, panel, mark, testers, operators
    )
    return course, [note for note in notes if note]


def _left_out(which: NDArray[np.bool_], why: str) -> str:
    n = int(which.sum())
    return f"{counted(n, 'reading')} not shown: {why}." if n else ""


def _indexed(names: list[str], most: int, noun: str) -> tuple[NDArray[np.intp], list[str]]:
    """Give each name its place in the alphabet, and the names; the rarest are joined."""
    counts = Counter(names)
    many = len(counts) > most
    kept = sorted(name for name, _ in counts.most_common(most - 1 if many else most))
    labels = told_apart(kept, Sizes.words, 2.2)
    if noun == "tester":
        labels = [f"tester {label}" if label else "" for label in labels]
    if many:
        labels.append(f"{len(counts) - len(kept)} other {noun}s")
    places = {name: i for i, name in enumerate(kept)}
    return np.array([places.get(name, len(kept)) for name in names], dtype=np.intp), labels


def _beyond(frames: Frames, course: _Course, which: NDArray[np.bool_]) -> str:
    labels = Rows.of(frames).labels
    told = [
        f"{labels[i]} no. {n:.0f} at {signed_percent(x)}"
        for i, n, x in zip(
            course.coupon[which], course.number[which], course.away[which], strict=True
        )
    ]
    return f"Beyond the axis: {listed(told, 6)}."


def _figure(course: _Course, scale: Scale, notes: list[str], context: Context) -> Figure:
    n = len(course.testers)
    high = _HEIGHTS.get(n, 1.7)
    gap = 0.34 if any(course.testers) else 0.12
    below = 0.62 if course.clock else 0.5
    if course.clock is not None and len(course.clock.starts) > 1:
        notes = [*notes, "Dotted upright lines: time without readings is left out."]
    facts = [counted(len(course.away), "reading"), "by tester and operator"]
    key = _key(course, scale)
    sheet = Sheet("Readings in the order of the test", context, facts, key, notes)
    figure, base = open_sheet(sheet, (high + gap) * n + below)
    left, wide = EDGE + 0.62, WIDTH - 2.0 * EDGE - 0.7
    panels = []
    for i, tester in enumerate(course.testers):
        axes = add_panel(figure, left, base + below + (n - 1 - i) * (high + gap), wide, high)
        if len(course.testers) > 1 or tester:
            name = tester or "tester not given"
            axes.set_title(name, fontsize=Sizes.words, loc="left", pad=4.0)
        axes.set_ylabel(_stacked(scale.label, high))
        panels.append(axes)
    if course.clock is not None:
        course.clock.on(panels, wide)
        panels[-1].set_xlabel(f"Time of the reading [{context.timezone}]")
    else:
        for axes in panels:
            axes.set_xlim(0.0, len(course.x) + 1.0)
            axes.xaxis.set_major_locator(MaxNLocator(10, integer=True))
            axes.tick_params(axis="x", labelbottom=axes is panels[-1])
        panels[-1].set_xlabel(
            "Place in the order of coupons and reading numbers (no times were given) [1]"
        )
    for i, axes in enumerate(panels):
        scale.on(axes, upright=True, ticks=6)
        _fill(axes, course, i, scale)
    return figure


def _stacked(label: str, high: float) -> str:
    wide = width(label, Sizes.axis)
    room = high if wide <= high else min(high, 0.65 * wide)
    return "\n".join(label_lines(label, Sizes.axis, room))


def _fill(axes: Axes, course: _Course, panel: int, scale: Scale) -> None:
    axes.axhline(0.0, color=GREY, linewidth=0.7)
    here = course.panel == panel
    raster = len(course.x) > _MANY
    inside = (course.away >= scale.low) & (course.away <= scale.high)
    for i in range(len(course.operators)):
        mine = here & inside & (course.mark == i)
        _mark(course, i).put(
            axes, course.x[mine], course.away[mine], raster=raster, scale=0.75 if raster else 1.0
        )
    for mark, edge, out in (
        (_BELOW, scale.inside(0), course.away < scale.low),
        (_ABOVE, scale.inside(1), course.away > scale.high),
    ):
        beyond = here & out
        mark.put(axes, course.x[beyond], np.full(int(beyond.sum()), edge))
    for block in _blocks(course, here):
        level = [float(course.away[block].mean())] * 2
        ends = [float(course.x[block[0]]), float(course.x[block[-1]])]
        order = 3.5 if raster else 2.5
        axes.plot(ends, level, color=INK, linewidth=_COURSE_WIDTH, zorder=order)


def _blocks(course: _Course, here: NDArray[np.bool_]) -> Iterator[NDArray[np.intp]]:
    """Give stretches of successive readings of a panel, none across a pause."""
    size = max(_LEAST_BLOCK, int(np.ceil(here.sum() / _BLOCKS)))
    readings = np.flatnonzero(here)
    steps = np.diff(course.x[readings])
    pause = np.inf
    if course.clock is not None and len(steps):
        pause = max(10.0 * float(np.median(steps)), _PAUSE * course.clock.length)
    cuts = (steps > pause) | (np.diff(course.sitting[readings]) > 0)
    for members in np.split(readings, np.flatnonzero(cuts) + 1):
        if len(members) >= _LEAST_BLOCK // 2:
            yield from np.array_split(members, max(1, round(len(members) / size)))


def _mark(course: _Course, i: int) -> Mark:
    rest = i == len(course.operators) - 1 and len(course.operators) > len(_OPERATORS)
    return _REST if rest else _OPERATORS[i]


def _key(course: _Course, scale: Scale) -> list[tuple[Artist, str]]:
    alone = len(course.operators) == 1 and not course.operators[0]
    found: list[tuple[Artist, str]] = [
        (_mark(course, i).sample(), "reading" if alone else name or "operator not given")
        for i, name in enumerate(course.operators)
    ]
    for mark, out in ((_BELOW, course.away < scale.low), (_ABOVE, course.away > scale.high)):
        if out.any():
            found.append((mark.sample(), "reading beyond the axis"))
    if any(len(b) for i in range(len(course.testers)) for b in _blocks(course, course.panel == i)):
        found.append((_COURSE.sample(_COURSE_WIDTH), "mean of successive readings of one tester"))
    return found
