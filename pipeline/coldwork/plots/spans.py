"""A value with its interval, and the own part of that interval."""

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray, Frames, aligned, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.style import GREY, INK, PAPER, Dashes, Mark

__all__ = ["MEAN", "Spans", "draw_spans", "span_key", "spans_of", "why_missing"]

MEAN = Mark("o", 4.2, INK, PAPER, 0.5)
_OWN_WIDTH, _TOTAL_WIDTH = 4.6, 0.9
_DASHES: Dashes = (0, (2.0, 1.6))  # of an interval without a value
_OWN = "#9a9a9a"
_REASONS = (  # rule that empties a quantity, and the words for it, the gravest first
    ("no-readings", "no readings"),
    ("mixed-forces", "no value: mixed forces"),
    ("baseline-contradicted", "no value: baseline contradicted"),
    ("below-baseline", "no value: below baseline"),
)


@dataclass(frozen=True)
class Spans:
    """Values with their intervals, one for each coupon.

    Attributes
    ----------
    value : ndarray, shape (n,)
        The value, NaN where there is none. [any unit]
    lower, upper : ndarray, shape (n,)
        Ends of the interval, NaN where open or unknown. [unit of `value`]
    own : ndarray, shape (n,)
        u_own / u, the part of the interval that is the coupon's own. [1]
    """

    value: FloatArray
    lower: FloatArray
    upper: FloatArray
    own: FloatArray

    def times(self, factor: FloatArray | float) -> "Spans":
        """Give them in another unit."""
        scaled = (self.value * factor, self.lower * factor, self.upper * factor)
        return Spans(*scaled, self.own)

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
    lower, upper, u_own, u = ends
    with np.errstate(divide="ignore", invalid="ignore"):
        own = np.clip(u_own / u, 0.0, 1.0)
    return Spans(value, lower, upper, own)


def draw_spans(
    axes: Axes, spans: Spans, places: FloatArray, *, upright: bool = False, raster: bool = False
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
    raster : bool
        Whether to draw as pixels, for very many.
    """
    low, high = axes.get_ylim() if upright else axes.get_xlim()
    known = np.isfinite(spans.value)
    bounded = known & (np.isfinite(spans.lower) | np.isfinite(spans.upper))
    left = np.clip(np.where(np.isfinite(spans.lower), spans.lower, low), low, high)
    right = np.clip(np.where(np.isfinite(spans.upper), spans.upper, high), low, high)

    def lines(
        keep: NDArray[np.bool_], a: FloatArray, b: FloatArray, width: float, colour: str
    ) -> None:
        ends = np.stack([a, places, b, places], axis=-1)[keep].reshape(-1, 2, 2)
        dashes = _DASHES if colour == GREY else "solid"
        collection = LineCollection(
            list(ends[..., ::-1] if upright else ends),
            linewidths=width,
            colors=colour,
            linestyles=[dashes],
            capstyle="butt",
            rasterized=raster,
            zorder=2,
        )
        axes.add_collection(collection, autolim=False)

    def marks(mark: Mark, keep: NDArray[np.bool_], x: FloatArray) -> None:
        pair = (places[keep], x[keep]) if upright else (x[keep], places[keep])
        mark.put(axes, *pair, raster=raster)

    cap = Mark("_" if upright else "|", 5.0, INK, INK, _TOTAL_WIDTH)
    lines(bounded, left, right, _TOTAL_WIDTH, INK)
    own = bounded & np.isfinite(spans.own)
    thick_left = spans.value - spans.own * (spans.value - left)
    thick_right = spans.value + spans.own * (right - spans.value)
    lines(own, thick_left, thick_right, _OWN_WIDTH, _OWN)
    marks(cap, bounded & (left > low), left)
    marks(cap, bounded & (right < high), right)
    marks(_open_end(upright, up=False), bounded & np.isnan(spans.lower), left)
    marks(_open_end(upright, up=True), bounded & np.isnan(spans.upper), right)
    one_sided = spans.one_sided
    lines(one_sided, left, right, _TOTAL_WIDTH, GREY)
    marks(_open_end(upright, up=False), one_sided, right)


def span_key(spans: Spans, context: Context, *, upright: bool = False) -> list[tuple[Artist, str]]:
    """Give the samples of a key for what `draw_spans` draws, without what does not occur."""
    known = np.isfinite(spans.value)
    found: list[tuple[Artist, str]] = []
    if (known & np.isfinite(spans.upper)).any():
        cap = Mark("|", 5.0, INK, INK, _TOTAL_WIDTH)
        found.append((cap.sample(_TOTAL_WIDTH), f"{context.percent} interval, own and shared"))
        own = Mark("", 0.0, _OWN, _OWN)
        found.append((own.sample(_OWN_WIDTH), "own part of it: interval × u_own / u"))
    if (known & (np.isnan(spans.upper) ^ np.isnan(spans.lower))).any():
        arrow = _open_end(upright, up=True)
        found.append((arrow.sample(_TOTAL_WIDTH), "interval without that end"))
    if spans.one_sided.any():
        arrow = _open_end(upright, up=False)
        dashed = Mark(arrow.shape, arrow.size, PAPER, GREY)
        found.append(
            (dashed.sample(_TOTAL_WIDTH, _DASHES), "no value: upper end of the interval only")
        )
    return found


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


def why_missing(frames: Frames, spans: Spans) -> list[str]:
    """Say for each coupon why it has no value, or no interval; empty where it has both."""
    flags = texts(frame_of(frames, "coupons"), "flags")
    words = []
    for flag, value, lower, upper in zip(flags, spans.value, spans.lower, spans.upper, strict=True):
        if np.isnan(value):
            found = set(flag.split(";"))
            words.append(next((w for rule, w in _REASONS if rule in found), "no value"))
        else:
            words.append("no interval" if np.isnan(lower) and np.isnan(upper) else "")
    return words
