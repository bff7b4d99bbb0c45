"""Stored energy, or what else has limits, against those limits with the decisions."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.names import counted, fitted, shown
from coldwork.plots.quantity import Scale, heading, scale_of, written
from coldwork.plots.rows import MOST_COUPONS, Page, Panel, Rows, Strip, row_pages
from coldwork.plots.sheet import Sheet
from coldwork.plots.spans import MEAN, Spans, draw_spans, span_key, spans_of, why_missing
from coldwork.plots.style import BLUE, GREY, INK, PAPER, RED, Dashes, Mark, Sizes, house

__all__ = ["draw"]

_USUAL = "stored_energy_j_per_g"
_DECISIONS = {  # the gravest first: mark, sign beside the word
    "non-conforming": (Mark("s", 5.0, RED, INK, 0.8), "■"),
    "undecided": (Mark("D", 5.0, PAPER, INK, 0.9), "◇"),
    "conforming": (Mark("o", 5.2, BLUE, INK, 0.8), "●"),
}
_BOUND = Mark("|", 10.5, INK, INK, 1.4)
_DASHES: tuple[Dashes, ...] = ("-", (0, (6, 2)), (0, (6, 2, 1.5, 2)), (0, (1.5, 1.5)))


@dataclass(frozen=True)
class _Verdicts:
    """The gravest decision on each coupon about one quantity; shape (n,) each."""

    decision: list[str]
    bound: FloatArray
    words: list[str]
    chances: list[str]

    def kinds(self, missing: Sequence[str]) -> list[str]:
        """Give what is counted where there is no room for words."""
        pairs = zip(self.decision, missing, strict=True)
        return ["; ".join(filter(None, pair)) for pair in pairs]


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw each quantity that has a limit, or the stored energy where none has.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `coupons` and `decisions`.
    context : Context
        The batch with its limits.

    Returns
    -------
    list of Figure
        Pages in order, for each quantity in the order of the limits.
    """
    if not 0 < len(frame_of(frames, "coupons")) <= MOST_COUPONS:
        return []
    with house():
        rows = Rows.of(frames)
        limited = list(dict.fromkeys(str(limit["quantity"]) for limit in context.limits))
        figures: list[Figure] = []
        for column in limited or [_USUAL]:
            figures += _pages(frames, context, rows, column)
        return figures


def _pages(frames: Frames, context: Context, rows: Rows, column: str) -> list[Figure]:
    spans = spans_of(frames, rows.ids, column)
    if not (np.isfinite(spans.value) | spans.one_sided).any():
        return []
    limits = [limit for limit in context.limits if limit["quantity"] == column]
    verdicts = _verdicts(frames, rows, column, [str(limit["id"]) for limit in limits])
    ends = np.array([end for limit in limits for end in _ends(limit)], dtype=np.float64)
    scale = scale_of(column, [spans.value, spans.lower, spans.upper, verdicts.bound, ends])
    name, unit = heading(column)
    key = _key(spans, context, verdicts, crowd=not rows.named)
    names = [f"limit {i + 1}:" if len(limits) > 1 else "limit" for i in range(len(limits))]
    key += [
        (_line(i), _told(limit, name, unit))
        for i, (limit, name) in enumerate(zip(limits, names, strict=True))
    ]
    sheet = Sheet(
        f"{name} of each coupon" + (", against its limits" if limits else ""),
        context,
        [counted(len(rows.ids), "coupon"), *([] if limits else ["no limit in the batch sheet"])],
        key,
        _notes(column, context, verdicts),
    )
    strips = _strips(
        verdicts, why_missing(frames, rows.ids, column, spans), numbered=len(limits) > 1
    )
    everyone = np.arange(len(rows.ids))
    figures = []
    for page in row_pages(sheet, rows, everyone, [Panel(scale.label)], strips):
        axes = page.panels[0]
        scale.on(axes)
        for i, limit in enumerate(limits):
            _draw_limit(axes, limit, scale, i)
        _fill(page, spans.at(page.places).times(scale.factor), verdicts, scale)
        figures.append(page.figure)
    return figures


def _fill(page: Page, spans: Spans, verdicts: _Verdicts, scale: Scale) -> None:
    axes = page.panels[0]
    lines = np.arange(len(page.places), dtype=np.float64)
    draw_spans(axes, spans, lines, crowd=page.crowd, own_width=9.0)
    bound = verdicts.bound[page.places] * scale.factor
    known = np.isfinite(bound) & (not page.crowd)
    page.put(_BOUND, bound[known], lines[known])
    decisions = np.array([verdicts.decision[i] for i in page.places])
    for word, (mark, _) in _DECISIONS.items():
        mine = (decisions == word) & np.isfinite(spans.value)
        page.put(mark, spans.value[mine], lines[mine])
    rest = ~np.isin(decisions, list(_DECISIONS)) & np.isfinite(spans.value)
    page.put(MEAN, spans.value[rest], lines[rest])


def _verdicts(frames: Frames, rows: Rows, column: str, limits: Sequence[str]) -> _Verdicts:
    n = len(rows.ids)
    decision, bound = [""] * n, np.full(n, np.nan)
    words, chances = [""] * n, [""] * n
    every = frame_of(frames, "decisions")
    mine = every[every["quantity"] == column] if "quantity" in every else every
    gravity = {word: i for i, word in enumerate(_DECISIONS)}
    gravity[""] = len(gravity)
    entries = zip(
        aligned(rows.ids, texts(mine, "coupon_id")),
        texts(mine, "decision"),
        numbers(mine, "bound"),
        numbers(mine, "probability"),
        texts(mine, "limit_id"),
        strict=True,
    )
    for place, word, end, probability, limit in entries:
        if place < 0 or word not in gravity or gravity[word] >= gravity[decision[place]]:
            continue
        decision[place], bound[place] = word, end
        chance = "" if np.isnan(probability) else f" {_chance(probability)}"
        several = len(limits) > 1 and limit in limits
        name = f" ({limits.index(limit) + 1})" if several else ""
        words[place] = f"{_DECISIONS[word][1]} {word}{name}"
        chances[place] = chance
    return _Verdicts(decision, bound, words, chances)


def _strips(verdicts: _Verdicts, missing: Sequence[str], *, numbered: bool) -> list[Strip]:
    if not any(verdicts.words):
        return [Strip("remarks", missing)]
    words = []
    for word, gap, probability in zip(verdicts.words, missing, verdicts.chances, strict=True):
        words.append("; ".join(filter(None, [word if gap else word + probability, gap])))
    number = " (limit)" if numbered else ""
    remarks = "; remarks" if any(missing) else ""
    return [Strip(f"decision{number}, probability{remarks}", words, verdicts.kinds(missing))]


def _chance(probability: float) -> str:
    if probability > 0.995:
        return "> 0.99"
    if probability < 0.005:
        return "< 0.01"
    return f"{probability:.2f}"


def _ends(limit: Mapping[str, object]) -> list[float]:
    ends = [limit.get("lower"), limit.get("upper")]
    return [float(end) for end in ends if isinstance(end, int | float)]


def _told(limit: Mapping[str, object], called: str, unit: str) -> str:
    lower, upper = limit.get("lower"), limit.get("upper")
    if isinstance(lower, int | float) and isinstance(upper, int | float):
        window = f"from {written(lower)} to {written(upper)}"
    else:
        ends = _ends(limit)
        side = "at least" if isinstance(lower, int | float) else "at most"
        window = f"{side} {written(ends[0])}" if ends else "no end"
    rule, basis = (str(limit.get(name) or "") for name in ("rule", "basis"))
    name = fitted(shown(str(limit["id"])), Sizes.words, 3.0)
    how = ", ".join(filter(None, [rule, f"basis {basis}" if basis else ""]))
    return f"{called} {name}, {window} {unit}" + (f" ({how})" if how else "")


def _line(i: int) -> Artist:
    return Mark("", 0.0, INK, INK).sample(1.3, _DASHES[i % len(_DASHES)])


def _draw_limit(axes: Axes, limit: Mapping[str, object], scale: Scale, i: int) -> None:
    """Draw the ends of a limit, hatched on the side that does not conform."""
    across = axes.get_xaxis_transform()
    for name, side in (("lower", -1.0), ("upper", 1.0)):
        end = limit.get(name)
        if not isinstance(end, int | float):
            continue
        x = end * scale.factor
        axes.axvline(x, color=INK, linewidth=1.3, linestyle=_DASHES[i % len(_DASHES)], zorder=2.2)
        outside = (
            x * (scale.high / scale.low) ** (0.012 * side)
            if scale.logarithmic
            else x + 0.012 * side * (scale.high - scale.low)
        )
        axes.fill_betweenx(
            [0.0, 1.0],
            x,
            outside,
            transform=across,
            facecolor="none",
            edgecolor=GREY,
            hatch="/////",
            linewidth=0.0,
            zorder=1.0,
        )


def _key(
    spans: Spans, context: Context, verdicts: _Verdicts, *, crowd: bool
) -> list[tuple[Artist, str]]:
    valued = np.isfinite(spans.value)
    seen = {word for word, known in zip(verdicts.decision, valued, strict=True) if known}
    found: list[tuple[Artist, str]] = [
        (mark.sample(), word) for word, (mark, _) in reversed(_DECISIONS.items()) if word in seen
    ]
    if seen - set(_DECISIONS):
        found.append((MEAN.sample(), "value, no decision" if context.limits else "value"))
    if np.isfinite(verdicts.bound).any() and not crowd:
        found.append((_BOUND.sample(), "one-sided bound that decided"))
    return found + span_key(spans, context, crowd=crowd)


def _notes(column: str, context: Context, verdicts: _Verdicts) -> list[str]:
    notes = []
    if any(verdicts.words):
        notes.append(
            "The number beside a decision is the probability that belongs to the limit; "
            "the hatched side of a limit does not conform."
        )
    if column.startswith("stored_energy"):
        notes.append(
            "Stored energy in dislocations only: calorimetry finds more, "
            "since point defects and stacking faults also release heat."
        )
    return [*notes, context.note] if context.note else notes
