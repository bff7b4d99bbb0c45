"""The furnace: what drives boundaries against what holds them, and the course of an anneal."""

from collections.abc import Sequence
from typing import Final

import numpy as np
import pandas as pd
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Patch
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.names import counted
from coldwork.plots.quantity import Scale, scale_of, written
from coldwork.plots.rows import MOST_COUPONS, Panel, Rows, Strip, row_pages
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.spans import MEAN, Spans, draw_spans, span_key, spans_with_part
from coldwork.plots.style import FAINT, GREY, INK, PAPER, Mark, house

__all__ = ["draw_pressures", "draw_progress"]

_DRIVES: Final = "driving_pressure_mpa"
_HOLDS: Final = {"zener_pressure_mpa": "particles", "curvature_pressure_mpa": "curvature"}
_LEFT: Final = Mark("D", 3.6, PAPER, INK, 0.9)
_VERDICTS: Final = {"can-start": "can start", "held": "held", "undecided": "undecided"}
_NOTE: Final = (
    "Estimates: none of them replaces a furnace trial. A boundary can start where the whole "
    "interval of what drives, less what holds, is above zero."
)
_HIGH: Final = (1.5, 2.6)  # of the two panels of the course [inch]
_HOUR: Final = 3600.0  # [s]


def draw_pressures(frames: Frames, context: Context) -> list[Figure]:
    """Draw the driving pressure of each coupon against the drags.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons` and `anneal`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where nothing drives.
    """
    if not 0 < len(frame_of(frames, "coupons")) <= MOST_COUPONS:
        return []
    with house():
        rows = Rows.of(frames)
        table = frame_of(frames, "anneal")
        spans = _spans(table, rows.ids, "cold-worked", _DRIVES)
        if not (np.isfinite(spans.value) | spans.one_sided).any():
            return []
        after = _spans(table, rows.ids, "recovered", _DRIVES).value
        held = [_spans(table, rows.ids[:1], "cold-worked", name) for name in _HOLDS]
        band = _band(held)
        scale = scale_of(_DRIVES, [spans.value, spans.lower, spans.upper, after, band])
        title = "Pressure on a boundary [MPa]"
        figures = []
        sheet = Sheet(
            "What drives boundaries, and what holds them",
            context,
            [counted(len(rows.ids), "coupon")],
            _key(spans, after, held, context, crowd=not rows.named),
            [_NOTE],
        )
        last = "recovered" if np.isfinite(after).any() else "cold-worked"
        heading = "boundary, after recovery" if last == "recovered" else "boundary"
        strips = [Strip(heading, _verdicts(table, rows.ids, last))]
        everyone = np.arange(len(rows.ids))
        for page in row_pages(sheet, rows, everyone, [Panel(title)], strips):
            axes = page.panels[0]
            scale.on(axes)
            _draw_band(axes, band * scale.factor)
            here = spans.at(page.places).times(scale.factor)
            lines = np.arange(len(page.places), dtype=np.float64)
            draw_spans(axes, here, lines, crowd=page.crowd)
            for mark, value in ((MEAN, here.value), (_LEFT, after[page.places] * scale.factor)):
                known = np.isfinite(value)
                page.put(mark, value[known], lines[known])
            figures.append(page.figure)
        return figures


def draw_progress(frames: Frames, context: Context) -> list[Figure]:
    """Draw temperature and recrystallised fraction along the schedule.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `progress`: `time_s`, `temperature_c`, `fraction`, `lower`, `upper`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        One, or none without a fraction.
    """
    table = frame_of(frames, "progress")
    if not len(table):
        return []
    with house():
        hours = numbers(table, "time_s") / _HOUR
        band = Patch(facecolor=FAINT, edgecolor="none")
        key: list[tuple[Artist, str]] = [
            (Mark("", 0.0).sample(1.3, colour=INK), "recrystallised fraction"),
            (band, f"{context.percent} interval, from the constants of kinetics"),
        ]
        notes = [
            "Where boundaries are not held. The constants hold for the cold work that they were "
            "measured at.",
            _NOTE.partition(".")[0] + ".",
        ]
        sheet = Sheet("Recrystallised fraction along the schedule", context, [], key, notes)
        inner = sum(_HIGH) + 0.35 + 0.5
        figure, base = open_sheet(sheet, inner)
        left, wide = EDGE + 0.55, WIDTH - 2.0 * EDGE - 0.7
        above = add_panel(figure, left, base + 0.5 + _HIGH[1] + 0.2, wide, _HIGH[0])
        below = add_panel(figure, left, base + 0.5, wide, _HIGH[1])
        above.plot(hours, numbers(table, "temperature_c"), color=GREY, linewidth=1.3)
        above.set_ylabel("Temperature [°C]")
        above.tick_params(labelbottom=False)
        lower, upper = numbers(table, "lower"), numbers(table, "upper")
        below.fill_between(hours, lower, upper, facecolor=FAINT, linewidth=0.0, zorder=1.5)
        below.plot(hours, numbers(table, "fraction"), color=INK, linewidth=1.3, zorder=3)
        across = Scale("", 1.0, float(hours[0]), float(hours[-1]))
        Scale("", 1.0, -0.02, 1.02).on(below, upright=True, ticks=6)
        for axes in (above, below):
            across.on(axes)
        below.set_ylabel("Recrystallised fraction [1]")
        below.set_xlabel("Time [h]")
        return [figure]


def _spans(table: pd.DataFrame, ids: Sequence[str], state: str, quantity: str) -> Spans:
    """Give a quantity of every coupon in a state, NaN where it is not there."""
    mine = table[(table["state"] == state) & (table["quantity"] == quantity)]
    places = aligned(texts(mine, "coupon_id"), ids)
    columns = [numbers(mine, name) for name in ("value", "lower", "upper", "u_own", "u")]
    return spans_with_part(*(_taken(column, places) for column in columns))


def _taken(column: FloatArray, places: NDArray[np.intp]) -> FloatArray:
    longer = np.append(column, np.nan)  # a place of -1 takes the last
    return np.asarray(longer[places])


def _band(held: Sequence[Spans]) -> FloatArray:
    """Give lower end, value and upper end of all that holds; empty where nothing does."""
    known = [s for s in held if np.isfinite(s.value).all()]
    if not known:
        return np.empty(0)
    value = float(sum(s.value[0] for s in known))
    down = float(np.sqrt(sum(np.nan_to_num(s.value[0] - s.lower[0]) ** 2 for s in known)))
    up = float(np.sqrt(sum(np.nan_to_num(s.upper[0] - s.value[0]) ** 2 for s in known)))
    return np.array([value - down, value, value + up])


def _draw_band(axes: Axes, band: FloatArray) -> None:
    if band.size:
        axes.axvspan(band[0], band[2], facecolor="none", edgecolor=GREY, hatch="////", linewidth=0)
        axes.axvline(band[1], color=INK, linewidth=1.3, zorder=2.2)


def _verdicts(table: pd.DataFrame, ids: Sequence[str], state: str) -> list[str]:
    mine = table[(table["state"] == state) & (table["quantity"] == "net_pressure_mpa")]
    found = dict(zip(texts(mine, "coupon_id"), texts(mine, "verdict"), strict=True))
    return [_VERDICTS.get(found.get(name, ""), "") for name in ids]


def _key(
    spans: Spans, after: FloatArray, held: Sequence[Spans], context: Context, *, crowd: bool
) -> list[tuple[Artist, str]]:
    found: list[tuple[Artist, str]] = [(MEAN.sample(), "driving pressure: the stored energy")]
    if np.isfinite(after).any():
        found.append((_LEFT.sample(), "what recovery leaves of it"))
    found += span_key(spans, context, crowd=crowd)
    told = [
        f"{word} {written(float(f'{s.value[0]:.3g}'))}"
        for s, word in zip(held, _HOLDS.values(), strict=True)
        if np.isfinite(s.value).all()
    ]
    if told:
        line = Mark("", 0.0).sample(1.3, colour=INK)
        found.append((line, f"holds: {' and '.join(told)} MPa"))
        patch = Patch(facecolor="none", edgecolor=GREY, hatch="////", linewidth=0.0)
        found.append((patch, f"{context.percent} interval of that"))
    return found
