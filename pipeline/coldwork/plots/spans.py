"""A value with its interval, and the own part of that interval."""

from collections.abc import Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.style import GREY, INK, PAPER, SMALL, Dashes, Mark

__all__ = ["MEAN", "Spans", "draw_spans", "span_key", "spans_of", "spans_with_part", "why_missing"]

MEAN = Mark("o", 4.2, INK, PAPER, 0.5)


@dataclass(frozen=True)
class _Line:
    """One kind of line: thickness [pt], colour, dashes."""

    width: float
    colour: str
    dashes: Dashes = "-"

    def sample(self, mark: Mark | None = None) -> Artist:
        """Make its sample for a key, thick enough to be seen, under a mark."""
        width = max(self.width, 4.6) if self.colour in (_SHADE, _DARK) else self.width
        return (mark or Mark("", 0.0)).sample(width, self.dashes, self.colour)


@dataclass(frozen=True)
class _Look:
    """The lines of intervals: from end to end, the own part, and without a value."""

    total: _Line
    own: _Line
    one_sided: _Line


_SHADE, _DARK = "#cacaca", "#8a8a8a"
_LOOK = _Look(_Line(0.9, INK), _Line(4.6, "#9a9a9a"), _Line(0.9, GREY, (0, (2.0, 1.6))))
_CROWD = _Look(_Line(1.5, _SHADE), _Line(1.5, _DARK), _Line(0.3, GREY))
_CAPS = (Mark("|", 5.0, INK, INK, 0.9), Mark("_", 5.0, INK, INK, 0.9))
_GRAVEST = {  # rules that leave no value, the one to be named first
    rule: i
    for i, rule in enumerate(
        ("no-readings", "mixed-forces", "baseline-contradicted", "below-baseline")
    )
}


@dataclass(frozen=True)
class Spans:
    """Values with their intervals, one for each coupon.

    Attributes
    ----------
    value : ndarray, shape (n,)
        The value, NaN where there is none. [any unit]
    lower, upper : ndarray, shape (n,)
        Ends of the interval, NaN where open or unknown. [unit of `value`]
    own_lower, own_upper : ndarray, shape (n,)
        Ends of the coupon's own part of it, NaN where that is unknown. [unit of `value`]
    """

    value: FloatArray
    lower: FloatArray
    upper: FloatArray
    own_lower: FloatArray
    own_upper: FloatArray

    def times(self, factor: FloatArray | float) -> "Spans":
        """Give them in another unit."""
        return Spans(*(getattr(self, f.name) * factor for f in fields(self)))

    def less(self, amount: float) -> "Spans":
        """Give them from another zero."""
        return Spans(*(getattr(self, f.name) - amount for f in fields(self)))

    def at(self, places: NDArray[np.intp]) -> "Spans":
        """Give those of some coupons."""
        return Spans(*(getattr(self, f.name)[places] for f in fields(self)))

    @property
    def one_sided(self) -> NDArray[np.bool_]:
        """Where there is no value, only an upper end; shape (n,)."""
        return np.isnan(self.value) & np.isfinite(self.upper)


def spans_of(frames: Frames, ids: Sequence[str], column: str) -> Spans:
    """Give a quantity of every coupon with its interval.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        The published tables; `quantities` is asked where `coupons` has no ends.
    ids : sequence of str, length n
        The coupons, in their order.
    column : str
        The quantity's column.

    Returns
    -------
    Spans
        In the column's unit.
    """
    coupons = frame_of(frames, "coupons")
    value = numbers(coupons, column)
    ends = [numbers(coupons, f"{end}_{column}") for end in ("lower", "upper", "u_own", "u")]
    if f"lower_{column}" not in coupons:
        ends = _from_quantities(frames, ids, column)
    return spans_with_part(value, *ends)


def spans_with_part(
    value: FloatArray, lower: FloatArray, upper: FloatArray, u_own: FloatArray, u: FloatArray
) -> Spans:
    """Give intervals and in each of them the part that is the coupon's own; all of shape (n,)."""
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.clip(u_own / u, 0.0, 1.0)
    return Spans(value, lower, upper, _part(value, lower, share), _part(value, upper, share))


def _part(value: FloatArray, end: FloatArray, share: FloatArray) -> FloatArray:
    """Give the end of the own part: that share of the way, in logarithms where ends are skewed."""
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.exp(share * np.log(end / value))
        return np.where((end > 0.0) & (value > 0.0), value * ratio, value + share * (end - value))


def draw_spans(
    axes: Axes,
    spans: Spans,
    places: FloatArray,
    *,
    upright: bool = False,
    crowd: bool = False,
    own_width: float = 6.4,
) -> None:
    """Draw intervals: thin from end to end, thick for the own part of it.

    Parameters
    ----------
    axes : Axes
        Panel, its ends already set.
    spans : Spans
        What to draw. [unit of the axis]
    places : ndarray, shape (n,)
        Where on the other axis. [unit of that axis]
    upright : bool
        Whether the values run upwards instead of to the right.
    crowd : bool
        Whether there are so many that they are told apart by shade, and drawn as pixels.
    own_width : float
        How thick the own part is, so that a short one shows behind its mark. [pt]
    """
    low, high = axes.get_ylim() if upright else axes.get_xlim()
    known = np.isfinite(spans.value)
    bounded = known & (np.isfinite(spans.lower) | np.isfinite(spans.upper))
    left = np.clip(np.where(np.isfinite(spans.lower), spans.lower, low), low, high)
    right = np.clip(np.where(np.isfinite(spans.upper), spans.upper, high), low, high)
    look = _CROWD if crowd else replace(_LOOK, own=replace(_LOOK.own, width=own_width))

    def lines(keep: NDArray[np.bool_], a: FloatArray, b: FloatArray, line: _Line) -> None:
        ends = np.stack([a, places, b, places], axis=-1)[keep].reshape(-1, 2, 2)
        axes.add_collection(
            LineCollection(
                list(ends[..., ::-1] if upright else ends),
                linewidths=line.width,
                colors=line.colour,
                linestyles=[line.dashes],
                capstyle="butt",
                rasterized=crowd,
                zorder=2,
            ),
            autolim=False,
        )

    def marks(mark: Mark, keep: NDArray[np.bool_], x: FloatArray) -> None:
        pair = (places[keep], x[keep]) if upright else (x[keep], places[keep])
        mark.put(axes, *pair, raster=crowd, scale=SMALL if crowd else 1.0)

    lines(bounded, left, right, look.total)
    own = bounded & (np.isfinite(spans.own_lower) | np.isfinite(spans.own_upper))
    thick_left = np.clip(np.where(np.isfinite(spans.own_lower), spans.own_lower, low), low, high)
    thick_right = np.clip(np.where(np.isfinite(spans.own_upper), spans.own_upper, high), low, high)
    lines(own, thick_left, thick_right, look.own)
    lines(spans.one_sided, left, right, look.one_sided)
    marks(_open_end(upright, up=False), spans.one_sided, right)
    if not crowd:
        cap = _CAPS[upright]
        marks(cap, bounded & (left > low), left)
        marks(cap, bounded & (right < high), right)
        marks(_open_end(upright, up=False), bounded & np.isnan(spans.lower), left)
        marks(_open_end(upright, up=True), bounded & np.isnan(spans.upper), right)


def span_key(
    spans: Spans, context: Context, *, upright: bool = False, crowd: bool = False
) -> list[tuple[Artist, str]]:
    """Give the samples of a key for what `draw_spans` draws, without what does not occur."""
    look = _CROWD if crowd else _LOOK
    known = np.isfinite(spans.value)
    found: list[tuple[Artist, str]] = []
    if (known & np.isfinite(spans.upper)).any():
        cap = Mark("", 0.0) if crowd else _CAPS[False]
        found.append((look.total.sample(cap), f"{context.percent} interval, own and shared"))
        found.append((look.own.sample(), "own part of it, in the ratio u_own / u"))
    if (known & (np.isnan(spans.upper) ^ np.isnan(spans.lower))).any() and not crowd:
        found.append((look.total.sample(_open_end(upright, up=True)), "interval without that end"))
    if spans.one_sided.any():
        sample = look.one_sided.sample(_open_end(upright, up=False))
        found.append((sample, "no value: upper end of the interval only"))
    return found


def why_missing(frames: Frames, ids: Sequence[str], column: str, spans: Spans) -> list[str]:
    """Say for each coupon which rule emptied its value, or that it has no interval.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        The published tables; `flags` says what each finding empties.
    ids : sequence of str, length n
        The coupons, in their order.
    column : str
        The quantity's column.
    spans : Spans
        The quantity.

    Returns
    -------
    list of str, length n
        The rule's id, `no value`, `no interval`, or empty where nothing is missing.
    """
    flags = frame_of(frames, "flags")
    found: list[list[str]] = [
        [rule for rule in text.split(";") if rule in _GRAVEST]
        for text in texts(frame_of(frames, "coupons"), "flags")
    ]
    rows = zip(
        aligned(ids, texts(flags, "coupon_id")).tolist(),
        texts(flags, "rule"),
        texts(flags, "empties"),
        strict=True,
    )
    for place, rule, empties in rows:
        if place >= 0 and column in empties.split(";"):
            found[place].append(rule)
    words = []
    for rules, value, lower, upper in zip(
        found, spans.value, spans.lower, spans.upper, strict=True
    ):
        if np.isnan(value):
            rules.sort(key=lambda rule: _GRAVEST.get(rule, len(_GRAVEST)))
            words.append(rules[0] if rules else "no value")
        else:
            words.append("no interval" if np.isnan(lower) and np.isnan(upper) else "")
    return words


def _open_end(upright: bool, *, up: bool) -> Mark:
    shapes = ("v", "^") if upright else ("<", ">")
    return Mark(shapes[up], 4.6, PAPER, INK, 0.8)


def _from_quantities(frames: Frames, ids: Sequence[str], column: str) -> list[FloatArray]:
    quantities = frame_of(frames, "quantities")
    ends = [np.full(len(ids), np.nan) for _ in range(4)]
    if "quantity" in quantities:
        chosen = quantities[quantities["quantity"] == column]
        places = aligned(ids, texts(chosen, "coupon_id"))
        for end, name in zip(ends, ("lower", "upper", "u_own", "u"), strict=True):
            end[places[places >= 0]] = numbers(chosen, name)[places >= 0]
    return ends
