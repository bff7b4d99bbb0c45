"""Dislocation density, by coupon or against the strain given beforehand."""

from collections.abc import Sequence

import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.names import counted, listed
from coldwork.plots.quantity import Scale, scale_of
from coldwork.plots.rows import MOST_COUPONS, MOST_NAMED, Panel, Rows, Strip, row_pages
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.spans import MEAN, Spans, draw_spans, span_key, spans_of, why_missing
from coldwork.plots.style import house

__all__ = ["draw"]

_COLUMN = "dislocation_density_per_m2"
_CROWDED = 4.0  # intervals nearer than this are told apart by shade [pt]
_NEAR = 0.01  # strains nearer than this stand side by side [length of the axis]


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the density, against prior strain where most coupons state one.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons`, and `coupons_in` for the strains.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no density has a value or an upper end.
    """
    if not 0 < len(frame_of(frames, "coupons")) <= MOST_COUPONS:
        return []
    with house():
        rows = Rows.of(frames)
        spans = spans_of(frames, rows.ids, _COLUMN)
        if not (np.isfinite(spans.value) | spans.one_sided).any():
            return []
        scale = scale_of(_COLUMN, [spans.value, spans.lower, spans.upper])
        strains = _strains(frames, rows)
        given = np.isfinite(strains)
        words = why_missing(frames, rows.ids, _COLUMN, spans)
        if given.mean() > 0.5 and len(np.unique(strains[given])) > 1:
            return [_against_strain(context, rows, strains, spans, (scale, words))]
        sheet = Sheet(
            "Dislocation density of each coupon",
            context,
            [counted(len(rows.ids), "coupon")],
            [(MEAN.sample(), "value"), *span_key(spans, context, crowd=not rows.named)],
            [context.note] if context.note else [],
        )
        figures = []
        everyone = np.arange(len(rows.ids))
        strip = [Strip("remarks", words)]
        for page in row_pages(sheet, rows, everyone, [Panel(scale.label)], strip):
            axes = page.panels[0]
            scale.on(axes)
            here = spans.at(page.places).times(scale.factor)
            lines = np.arange(len(page.places), dtype=np.float64)
            draw_spans(axes, here, lines, crowd=page.crowd)
            known = np.isfinite(here.value)
            page.put(MEAN, here.value[known], lines[known])
            figures.append(page.figure)
        return figures


def _strains(frames: Frames, rows: Rows) -> FloatArray:
    given = frame_of(frames, "coupons_in")
    strains = np.full(len(rows.ids), np.nan)
    places = aligned(rows.ids, texts(given, "coupon_id"))
    strains[places[places >= 0]] = numbers(given, "prior_true_strain")[places >= 0]
    return strains


def _against_strain(
    context: Context,
    rows: Rows,
    strains: FloatArray,
    spans: Spans,
    told: tuple[Scale, Sequence[str]],
) -> Figure:
    scale, words = told
    given = np.isfinite(strains)
    drawn = given & (np.isfinite(spans.value) | spans.one_sided)
    low, high = float(strains[given].min()), float(strains[given].max())
    places, step = _side_by_side(strains, spans, drawn)
    apart = step / (1.1 * (high - low)) * (WIDTH - 1.0) * 72.0  # [pt]
    many = apart < _CROWDED or len(strains) > MOST_NAMED
    side = "Coupons of one strain stand side by side about it, by value."
    notes = [side] if np.isfinite(step) else []
    notes += [context.note] if context.note else []
    notes += _named(rows, words, given)
    notes += _named(rows, ["no prior strain given, not shown"] * len(words), ~given)
    sheet = Sheet(
        "Dislocation density against prior strain",
        context,
        [counted(len(rows.ids), "coupon")],
        [(MEAN.sample(), "value"), *span_key(spans, context, upright=True, crowd=many)],
        notes,
    )
    figure, base = open_sheet(sheet, 5.3)
    axes = add_panel(figure, EDGE + 0.6, base + 0.5, WIDTH - 2 * EDGE - 0.7, 4.75)
    room = 0.05 * (high - low)
    axes.set_xlim(low - room, high + room)
    axes.set_xlabel("Prior true strain (von Mises equivalent) [1]")
    scale.on(axes, upright=True)
    axes.set_ylabel(scale.label)
    here = spans.at(np.flatnonzero(drawn)).times(scale.factor)
    draw_spans(axes, here, places, upright=True, crowd=many)
    known = np.isfinite(here.value)
    scale_of_marks = 0.6 if many else 1.0
    MEAN.put(axes, places[known], here.value[known], raster=many, scale=scale_of_marks)
    return figure


def _side_by_side(
    strains: FloatArray, spans: Spans, drawn: NDArray[np.bool_]
) -> tuple[FloatArray, float]:
    """Spread coupons of one strain about it.

    Gives the place of each drawn coupon, and the smallest step between two that
    were spread, infinite where none were. [1]
    """
    x = strains[drawn]
    rank = np.where(np.isnan(spans.value), -np.inf, spans.value)[drawn]
    span = float(np.nanmax(strains) - np.nanmin(strains))
    clusters: list[list[int]] = []
    for i in np.lexsort((rank, x)):
        if clusters and x[i] - x[clusters[-1][0]] <= _NEAR * span:
            clusters[-1].append(int(i))
        else:
            clusters.append([int(i)])
    centres = np.array([x[members].mean() for members in clusters])
    gaps = np.diff(centres, prepend=-np.inf, append=np.inf)
    places, smallest = x.copy(), np.inf
    for k, members in enumerate(clusters):
        if len(members) > 1:
            gap = min(gaps[k], gaps[k + 1], 0.1 * span)
            step = min(0.75 * gap / len(members), 0.012 * span)
            by_value = sorted(members, key=lambda i: float(rank[i]))
            offsets = np.arange(len(members)) - (len(members) - 1) / 2.0
            places[by_value] = centres[k] + step * offsets
            smallest = min(smallest, step)
    return places, float(smallest)


def _named(rows: Rows, words: Sequence[str], among: NDArray[np.bool_]) -> list[str]:
    """Name the coupons that a picture without names cannot name, by what is said of them."""
    found: dict[str, list[str]] = {}
    for i in np.flatnonzero(among).tolist():
        if words[i]:
            found.setdefault(words[i], []).append(rows.labels[i])
    return [f"{word[0].upper()}{word[1:]}: {listed(names)}." for word, names in found.items()]
