"""Density, stored energy and its fraction of the work along the strain of each curve."""

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Final

import numpy as np
import pandas as pd
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from coldwork.plots.columns import FloatArray, Frames, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.grid import Caption, Remark, grid_pages
from coldwork.plots.names import counted, listed
from coldwork.plots.quantity import Scale, heading, scale_of
from coldwork.plots.sheet import Sheet
from coldwork.plots.spans import MEAN, Spans, draw_spans, span_key, spans_with_part
from coldwork.plots.style import FAINT, GREY, Mark, house

__all__ = ["draw_density", "draw_energy"]

_DENSITY: Final = ("dislocation_density_per_m2",)
_ENERGY: Final = ("stored_energy_j_per_g", "stored_fraction_of_work")
_OTHERS = Mark("", 0.0, FAINT, FAINT)
_ROOM = 0.06  # beside the first and the last strain [length of the axis]


@dataclass(frozen=True)
class _Along:
    """The states of one coupon: their strains, and each quantity with its interval."""

    strain: FloatArray
    spans: dict[str, Spans]


def draw_density(frames: Frames, context: Context) -> list[Figure]:
    """Draw the dislocation density of each coupon along the strain.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `evolution`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no state has a density.
    """
    return _draw(frames, context, _DENSITY, "Dislocation density along the strain", [])


def draw_energy(frames: Frames, context: Context) -> list[Figure]:
    """Draw the stored energy of each coupon, and its fraction of the work, along the strain.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `evolution`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no state has a stored energy.
    """
    notes = [
        "The fraction is of the work before the test plus the test's own.",
        "Stored energy in dislocations only: calorimetry finds more, "
        "since point defects and stacking faults also release heat.",
    ]
    title = "Stored energy in dislocations along the strain, and its share of the work"
    return _draw(frames, context, _ENERGY, title, notes)


def _draw(
    frames: Frames,
    context: Context,
    columns: Sequence[str],
    title: str,
    more: Sequence[str],
) -> list[Figure]:
    table = frame_of(frames, "evolution")
    if not len(table) or not np.isfinite(numbers(table, columns[0])).any():
        return []
    with house():
        total = bool(np.isfinite(numbers(table, "prior_true_strain")).all())
        groups = table.groupby("coupon_id", sort=False)
        along = {str(name): _along(group, columns, total=total) for name, group in groups}
        shown = [name for name, one in along.items() if _has(one, columns[0])]
        scales = [_scale(along, column) for column in columns]
        across = _across([along[name] for name in shown])
        spans = [along[name].spans[columns[0]] for name in shown]
        sheet = Sheet(
            title,
            context,
            [counted(len(shown), "coupon")],
            _key(spans, context, several=len(shown) > 1),
            [*_notes(table, shown, total=total), *more],
        )
        captions = [Caption(_caption(column, s)) for column, s in zip(columns, scales, strict=True)]
        below = "prior strain plus that of the test [1]" if total else "test strain [1]"
        remarks = [Remark() for _ in shown]
        figures = []
        for figure, cells in grid_pages(sheet, shown, remarks, captions, below):
            for cell in cells:
                for axes, column, scale in zip(cell.panels, columns, scales, strict=True):
                    across.on(axes, ticks=4)
                    scale.on(axes, upright=True, ticks=4)
                    _draw_others(axes, along, column, scale)
                    _draw_one(axes, along[shown[cell.place]], column, scale)
            figures.append(figure)
        return figures


def _along(group: pd.DataFrame, columns: Sequence[str], *, total: bool) -> _Along:
    strain = numbers(group, "test_strain")
    if total:
        strain = strain + numbers(group, "prior_true_strain")
    spans = {}
    for column in columns:
        prefixes = ("", "lower_", "upper_", "u_own_", "u_")
        spans[column] = spans_with_part(*(numbers(group, f"{each}{column}") for each in prefixes))
    return _Along(strain, spans)


def _has(one: _Along, column: str) -> bool:
    return bool(np.isfinite(one.spans[column].value).any())


def _scale(along: dict[str, _Along], column: str) -> Scale:
    """Fit the axis to the values and to most of their intervals."""
    each = [one.spans[column] for one in along.values()]
    value = np.concatenate([s.value for s in each])
    upper = np.concatenate([s.upper for s in each])
    known = value[np.isfinite(value)]
    if not known.size:
        return scale_of(column, [value])
    high = 2.5 * float(known.max())
    upper = np.where(upper <= high, upper, np.nan)
    return scale_of(column, [value, upper])


def _across(along: Sequence[_Along]) -> Scale:
    """Fit the axis of strain to all states that have a value."""
    strains = []
    for one in along:
        first = next(iter(one.spans.values()))
        strains.append(one.strain[np.isfinite(first.value)])
    every = np.concatenate(strains)
    low, high = float(every.min()), float(every.max())
    room = _ROOM * (high - low or high)
    return Scale("", 1.0, max(0.0, low - room) if low < 2.0 * room else low - room, high + room)


def _caption(column: str, scale: Scale) -> str:
    name, _ = heading(column)
    unit = scale.label[scale.label.rindex("[") :]
    short = {
        "Stored energy in dislocations": "stored energy",
        "Stored fraction of the plastic work": "share of work",
    }.get(name, f"{name[0].lower()}{name[1:]}")
    return f"{short} {unit}"


def _draw_others(axes: Axes, along: dict[str, _Along], column: str, scale: Scale) -> None:
    """Draw every coupon's course in the background, so that each is seen against the others."""
    gap = np.array([np.nan])
    strains, values = [], []
    for one in along.values():
        value = one.spans[column].value * scale.factor
        known = np.isfinite(value)
        strains += [one.strain[known], gap]
        values += [value[known], gap]
    x, y = np.concatenate(strains), np.concatenate(values)
    axes.plot(x, y, color=FAINT, linewidth=1.0, zorder=1.2)


def _draw_one(axes: Axes, one: _Along, column: str, scale: Scale) -> None:
    spans = one.spans[column].times(scale.factor)
    known = np.isfinite(spans.value)
    axes.plot(one.strain[known], spans.value[known], color=GREY, linewidth=0.9, zorder=2.0)
    drawn = np.flatnonzero(known | spans.one_sided)
    draw_spans(axes, spans.at(drawn), one.strain[drawn], upright=True)
    MEAN.put(axes, one.strain[known], spans.value[known], scale=0.8)


def _key(spans: Sequence[Spans], context: Context, *, several: bool) -> list[tuple[Artist, str]]:
    joined = Spans(*(np.concatenate([getattr(s, f.name) for s in spans]) for f in fields(Spans)))
    found: list[tuple[Artist, str]] = [(MEAN.sample(0.9, colour=GREY), "value")]
    found += span_key(joined, context, upright=True)
    if several:
        found.append((_OTHERS.sample(1.4), "the other coupons"))
    return found


def _notes(table: pd.DataFrame, shown: Sequence[str], *, total: bool) -> list[str]:
    notes = (
        [] if total else ["Not every coupon states its prior strain, so strains are the test's."]
    )
    reasons: dict[str, list[str]] = {}
    for name, reason in zip(texts(table, "coupon_id"), texts(table, "reason"), strict=True):
        if name not in shown:
            told = reasons.setdefault(reason or "no value", [])
            if name not in told:
                told.append(name)
    notes += [f"Not shown, {reason}: {listed(names)}." for reason, names in reasons.items()]
    return notes
