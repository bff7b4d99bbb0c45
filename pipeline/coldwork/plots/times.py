"""The axis of time: sittings side by side, the idle time between them left out."""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime
from math import ceil
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd
from matplotlib.axes import Axes
from numpy.typing import NDArray

from coldwork.plots.columns import FloatArray
from coldwork.plots.names import width
from coldwork.plots.style import GREY, Sizes

__all__ = ["Clock", "seconds_of"]

_MINUTE, _HOUR, _DAY = 60, 3600, 86400  # [s]
_STEPS = (1, 5, 15, 30, _MINUTE, 120, 300, 600, 900, 1800, _HOUR, 7200, 10800, 21600, 43200)  # [s]
_LONG_STEPS = tuple(_DAY * n for n in (1, 2, 7, 14, 28, 91, 182, 364, 728, 3640))  # [s]
_TICKS = 9
_EPOCH, _SECOND = pd.Timestamp(0, tz="UTC"), pd.Timedelta(seconds=1)
_IDLE = 0.4  # share of the whole time from which idle time is left out
_MOST_SITTINGS = 12
_BREAK = 0.03  # room for a break [time with readings]
_ZONE = re.compile(r"(?:[zZ]|[+-]\d\d(?::?\d\d)?)$")


def seconds_of(texts: Sequence[str], zone: str) -> FloatArray:
    """Read times.

    Parameters
    ----------
    texts : sequence of str, length n
        ISO 8601; empty where absent.
    zone : str
        Zone of those that name none.

    Returns
    -------
    ndarray, shape (n,)
        NaN where absent or where there is no such time. [s since 1970 UTC]
    """
    aware = np.array([bool(_ZONE.search(text[10:])) for text in texts], dtype=np.bool_)
    cells = pd.Series(list(texts), dtype="object")
    seconds = np.full(len(texts), np.nan)
    if aware.any():
        times = pd.to_datetime(cells[aware], format="ISO8601", utc=True, errors="coerce")
        seconds[aware] = (times - _EPOCH) / _SECOND
    if not aware.all():
        local = pd.to_datetime(cells[~aware], format="ISO8601", errors="coerce")
        times = local.dt.tz_localize(zone, ambiguous="NaT", nonexistent="NaT")
        seconds[~aware] = (times - _EPOCH) / _SECOND
    return seconds


@dataclass(frozen=True)
class Clock:
    """Where times stand on an axis.

    Attributes
    ----------
    starts, stops : ndarray, shape (k,)
        First and last time of each sitting. [s since 1970 UTC]
    offsets : ndarray, shape (k,)
        Place of each sitting's start on the axis. [s]
    zone : ZoneInfo
        Zone that the axis is labelled in.
    """

    starts: FloatArray
    stops: FloatArray
    offsets: FloatArray
    zone: ZoneInfo

    @classmethod
    def of(cls, seconds: FloatArray, zone: str) -> "Clock":
        """Divide times into sittings, one only where little time is idle."""
        times = np.unique(seconds)
        gaps = np.diff(times)
        idle = gaps > max(_HOUR, 6.0 * float(np.median(gaps)) if gaps.size else 0.0)
        whole = float(times[-1] - times[0])
        if gaps[idle].sum() < _IDLE * whole or idle.sum() >= _MOST_SITTINGS:
            idle[:] = False
        cuts = np.flatnonzero(idle)
        starts = times[np.concatenate([[0], cuts + 1]).astype(np.intp)]
        stops = times[np.concatenate([cuts, [len(times) - 1]]).astype(np.intp)]
        lengths = np.maximum(stops - starts, 0.01 * float((stops - starts).sum()) or 60.0)
        room = lengths + _BREAK * float(lengths.sum())
        offsets = np.concatenate([[0.0], np.cumsum(room)[:-1]])
        return cls(starts, stops, offsets, ZoneInfo(zone))

    @property
    def length(self) -> float:
        """Length of the axis in seconds."""
        return float(self.offsets[-1] + max(self.stops[-1] - self.starts[-1], 60.0))

    def sitting(self, seconds: FloatArray) -> NDArray[np.intp]:
        """Give the sitting of each time, shape (n,)."""
        return np.searchsorted(self.starts, seconds, side="right") - 1

    def place(self, seconds: FloatArray) -> FloatArray:
        """Give the place of each time on the axis in seconds, shape (n,)."""
        sitting = self.sitting(seconds)
        return np.asarray(self.offsets[sitting] + seconds - self.starts[sitting])

    def on(self, panels: Sequence[Axes], wide: float) -> None:
        """Set the time axis of panels that stand above each other, `wide` inches each."""
        room = 0.02 * self.length
        low, high = -room, self.length + room
        ticks = list(self._spaced(wide / (high - low)))
        breaks = self.offsets[1:] - (self.offsets[1:] - self._ends()[:-1]) / 2.0
        for panel in panels:
            panel.set_xlim(low, high)
            panel.set_xticks([at for at, _ in ticks], [text for _, text in ticks])
            for at in breaks:
                panel.axvline(at, color=GREY, linewidth=1.0, linestyle=(0, (1, 1.5)))
            panel.tick_params(axis="x", labelbottom=panel is panels[-1])

    def _ends(self) -> FloatArray:
        return np.asarray(self.offsets + self.stops - self.starts)

    def _spaced(self, scale: float) -> Iterator[tuple[float, str]]:
        """Give ticks whose labels do not touch, with the date where it begins."""
        busy, day = -np.inf, ""
        for at, moment, step in self._candidates():
            date = f"{moment:%Y-%m-%d}"
            label = f"{moment:%H:%M:%S}" if step < _MINUTE else f"{moment:%H:%M}"
            if step >= _DAY:
                label = day = date
            wider = label if date == day else max(label, date, key=len)
            half = width(wider, Sizes.small) / 2.0 + 0.05
            if at * scale - half > busy:
                busy = at * scale + half
                yield at, label if date == day else f"{label}\n{date}"
                day = date

    def _candidates(self) -> Iterator[tuple[float, datetime, int]]:
        active = float((self.stops - self.starts).sum())
        steps = (*_STEPS, *_LONG_STEPS)
        step = next((s for s in steps if active / s <= _TICKS), steps[-1])
        for start, stop, offset in zip(self.starts, self.stops, self.offsets, strict=True):
            ahead = datetime.fromtimestamp(start, self.zone).utcoffset()
            shift = ahead.total_seconds() if ahead else 0.0
            first = ceil((start + shift) / step) * step - shift
            marks = np.arange(first, stop + 1e-6, step) if first <= stop else np.array([start])
            for mark in marks:
                moment = datetime.fromtimestamp(float(mark), self.zone)
                yield float(offset + mark - start), moment, step
