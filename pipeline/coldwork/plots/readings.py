"""Readings of each coupon, with their mean and its interval."""

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, fields

import numpy as np
from matplotlib.artist import Artist
from matplotlib.figure import Figure
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.names import counted, listed, signed_percent
from coldwork.plots.quantity import Scale, heading, robust_limits, scale_of
from coldwork.plots.rows import MOST_COUPONS, Page, Panel, Rows, Strip, row_pages
from coldwork.plots.sheet import Sheet
from coldwork.plots.spans import MEAN, Spans, draw_spans, span_key, spans_of, why_missing
from coldwork.plots.style import GREY, INK, PAPER, SMALL, Mark, house

__all__ = ["draw"]

_READING = Mark("o", 3.3, PAPER, INK, 0.6)
_FLAGGED = Mark("^", 4.4, PAPER, INK, 0.8)
_ELSEWHERE = Mark("o", 1.6, GREY, GREY, 0.0)
_SET_ASIDE = Mark("x", 4.2, INK, INK, 1.0)
_BEYOND = (Mark("<", 4.6, INK), Mark(">", 4.6, INK))
_UP, _DOWN = -0.17, 0.2  # of readings and of the mean, off the row's line [rows]
_MANY = 2000  # readings above which they are drawn as pixels


@dataclass(frozen=True)
class _Points:
    """Readings as they stand on the plot.

    Attributes
    ----------
    coupon : ndarray of intp, shape (m,)
        Place of its coupon.
    value : ndarray, shape (m,)
        The reading. [kgf/mm² or MPa]
    kind : ndarray of intp, shape (m,)
        Index into `_KINDS`.
    number : ndarray, shape (m,)
        Number of the reading in its coupon. [1]
    """

    coupon: NDArray[np.intp]
    value: FloatArray
    kind: NDArray[np.intp]
    number: FloatArray

    def at(self, chosen: NDArray[np.bool_]) -> "_Points":
        """Give some of them."""
        return _Points(*(getattr(self, f.name)[chosen] for f in fields(self)))


_KINDS = (
    (_READING, "reading"),
    (_FLAGGED, "reading with a flag"),
    (_ELSEWHERE, "point of the curve at another strain"),
    (_SET_ASIDE, "set aside, at its own value"),
)


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the readings of each coupon, one set of pages for each hardness scale.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons`, `readings` and `set_aside`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no reading was used.
    """
    column = "hardness" if context.route != "flow" else "flow_stress_mpa"
    coupons = frame_of(frames, "coupons")
    if not 0 < len(coupons) <= MOST_COUPONS:
        return []
    with house():
        rows = Rows.of(frames)
        points = _points(frames, rows, column)
        if not (points.kind != len(_KINDS) - 1).any():
            return []
        spans = spans_of(frames, rows.ids, column)
        remarks = _remarks(frames, rows, why_missing(frames, rows.ids, column, spans))
        scales = _scales(coupons_scales=texts(coupons, "hardness_scale"), route=context.route)
        figures: list[Figure] = []
        for scale in dict.fromkeys(scales):
            chosen = np.flatnonzero(np.array(scales) == scale)
            subject = _Subject(frames, context, rows, column, scale)
            figures += subject.pages(points, spans, remarks, chosen)
        return figures


@dataclass(frozen=True)
class _Subject:
    frames: Frames
    context: Context
    rows: Rows
    column: str
    scale: str

    def pages(
        self, points: _Points, spans: Spans, remarks: Strip, chosen: NDArray[np.intp]
    ) -> Iterator[Figure]:
        points = points.at(np.isin(points.coupon, chosen))
        own = spans.at(chosen)
        ends = np.concatenate([own.value, own.lower, own.upper])
        drawn = points.value[points.kind != len(_KINDS) - 1]
        scale = scale_of(
            self.column, [np.array(robust_limits(drawn, ends))], detail=self.scale, zero=False
        )
        relative = _relative(spans)
        away = 100.0 * (points.value / spans.value[points.coupon] - 1.0)
        away[points.kind == 2] = np.nan
        span_ends = np.concatenate([relative.at(chosen).lower, relative.at(chosen).upper])
        low, high = robust_limits(away[points.kind < 2], span_ends)
        percent = Scale("Deviation from the coupon's mean [%]", 1.0, low, high)
        beyond = _outside(points.value, scale) | _outside(away, percent)
        beyond &= points.kind < 3
        key = self._key(points, own, bool(beyond.any()))
        notes = self._notes(points.at(beyond), away[beyond])
        sheet = Sheet(self._title(), self.context, self._facts(points, chosen), key, notes)
        panels = [Panel(scale.label), Panel(percent.label, 1.25)]
        for page in row_pages(sheet, self.rows, chosen, panels, [remarks]):
            _fill(page, 0, scale, points, points.value, spans)
            _fill(page, 1, percent, points, away, relative)
            yield page.figure

    def _title(self) -> str:
        name, _ = heading(self.column)
        return f"Readings of each coupon: {name.lower()} {self.scale}".rstrip()

    def _facts(self, points: _Points, chosen: NDArray[np.intp]) -> list[str]:
        used = int((points.kind < 2).sum())
        return [counted(len(chosen), "coupon"), f"{counted(used, 'reading')} used"]

    def _key(self, points: _Points, spans: Spans, beyond: bool) -> list[tuple[Artist, str]]:
        found: list[tuple[Artist, str]] = [
            (mark.sample(), label)
            for kind, (mark, label) in enumerate(_KINDS)
            if (points.kind == kind).any()
        ]
        if beyond:
            found.append((_BEYOND[1].sample(), "reading beyond the axis"))
        found.append((MEAN.sample(), "mean"))
        return found + span_key(spans, self.context, crowd=not self.rows.named)

    def _notes(self, beyond: _Points, away: FloatArray) -> list[str]:
        notes = [
            "Each row shows its readings above the line and their mean with its interval below it; "
            "on the right the same as deviations from that mean."
        ]
        if len(away):
            told = [
                f"{self.rows.labels[i]} no. {n:.0f} at {signed_percent(x)}"
                for i, n, x in zip(beyond.coupon, beyond.number, away, strict=True)
            ]
            notes.append(f"Beyond the axis: {listed(told, 6)}.")
        set_aside = frame_of(self.frames, "set_aside")
        homeless = int((aligned(self.rows.ids, texts(set_aside, "coupon_id")) < 0).sum())
        if homeless:
            rows = "row set aside belongs" if homeless == 1 else "rows set aside belong"
            notes.append(f"{homeless} {rows} to no coupon of this batch.")
        return notes


def _fill(
    page: Page, panel: int, scale: Scale, points: _Points, values: FloatArray, spans: Spans
) -> None:
    axes = page.panels[panel]
    scale.on(axes, ticks=7)
    row_of = np.full(int(points.coupon.max(initial=page.places.max())) + 1, -1)
    row_of[page.places] = np.arange(len(page.places))
    rows = row_of[points.coupon]
    x = values * scale.factor
    here = (rows >= 0) & np.isfinite(x)
    raster = page.crowd or int(here.sum()) > _MANY
    small = SMALL if page.crowd else 0.75 if raster else 1.0
    if panel:
        axes.axvline(0.0, color=GREY, linewidth=0.6)
    for kind, (mark, _) in enumerate(_KINDS):
        mine = here & (points.kind == kind)
        inside = mine & ~_outside(values, scale)
        mark.put(axes, x[inside], rows[inside] + _UP, raster=raster, scale=small)
        if kind < 3:
            for end in (0, 1):
                out = mine & ((x < scale.low) if end == 0 else (x > scale.high))
                _BEYOND[end].put(axes, np.full(int(out.sum()), scale.inside(end)), rows[out] + _UP)
    shown = spans.at(page.places).times(scale.factor)
    lines = np.arange(len(page.places), dtype=np.float64) + _DOWN
    draw_spans(axes, shown, lines, crowd=page.crowd, own_width=4.6)
    known = np.isfinite(shown.value)
    page.put(MEAN, shown.value[known], lines[known], panel)


def _points(frames: Frames, rows: Rows, column: str) -> _Points:
    readings, set_aside = frame_of(frames, "readings"), frame_of(frames, "set_aside")
    weight = numbers(readings, "weight")
    flagged = np.array([bool(flag) for flag in texts(readings, "flags")], dtype=np.bool_)
    kind = np.where(weight == 0.0, 2, np.where(flagged, 1, 0))
    own = set_aside[set_aside["column"] == column] if "column" in set_aside else set_aside[:0]
    coupon = aligned(rows.ids, [*texts(readings, "coupon_id"), *texts(own, "coupon_id")])
    value = np.concatenate([numbers(readings, column), numbers(own, "raw")])
    kinds = np.concatenate([kind, np.full(len(own), len(_KINDS) - 1)])
    keep = (coupon >= 0) & np.isfinite(value)
    number = np.concatenate([numbers(frame, "reading_no") for frame in (readings, own)])
    return _Points(coupon, value, kinds, number).at(keep)


def _relative(spans: Spans) -> Spans:
    away = spans.times(100.0 / np.where(spans.value == 0.0, np.nan, spans.value))
    return away.less(100.0)


def _outside(values: FloatArray, scale: Scale) -> NDArray[np.bool_]:
    x = values * scale.factor
    return (x < scale.low) | (x > scale.high)


def _scales(coupons_scales: list[str], route: str) -> list[str]:
    if route == "flow":
        return [""] * len(coupons_scales)
    counts = Counter(filter(None, coupons_scales))
    usual = counts.most_common(1)[0][0] if counts else ""
    return [scale or usual for scale in coupons_scales]


def _remarks(frames: Frames, rows: Rows, missing: list[str]) -> Strip:
    set_aside = frame_of(frames, "set_aside")
    rules: dict[int, Counter[str]] = {}
    places = aligned(rows.ids, texts(set_aside, "coupon_id"))
    for place, rule in zip(places, texts(set_aside, "rule"), strict=True):
        rules.setdefault(int(place), Counter())[rule] += 1
    words, kinds = [], []
    for i, gap in enumerate(missing):
        counts = rules.get(i, Counter())
        numbered = len(counts) > 1 and counts.total() > len(counts)
        rules_told = [f"{rule} {n}" if numbered else rule for rule, n in counts.most_common()]
        told = ", ".join(rules_told[:2]) + (", …" if len(rules_told) > 2 else "")
        aside = f"× {counts.total()} {told}" if counts else ""
        words.append("; ".join(filter(None, [gap, aside])))
        kinds.append(gap or ("with readings set aside" if counts else ""))
    return Strip("× set aside, remarks", words, kinds)
