"""Times of day and date: ISO 8601 text to microseconds of universal time."""

import re
from datetime import UTC, datetime, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.contracts.contract import ISO_TIME
from coldwork.intake.cells import as_mask, byte_lengths, texts
from coldwork.intake.numbers import Parsed

__all__ = ["ABSENT", "FIRST_YEAR", "LAST_YEAR", "parse_times", "time_hint"]

ABSENT: Final = int(np.iinfo(np.int64).min)
FIRST_YEAR: Final = 1900  # no hardness number is older; a year below is a slip of the pen
LAST_YEAR: Final = 2199

_SHAPE: Final = re.compile(ISO_TIME)
_ZONE: Final = r"[T ].*(Z|[+-][0-9:]{2,5})$"
_DAY: Final = 86_400_000_000  # us
_MICROSECOND: Final = timedelta(microseconds=1)
_EPOCH: Final = datetime(1970, 1, 1)  # noqa: DTZ001 (local times are counted without a zone)
_EARLIEST: Final = (datetime(FIRST_YEAR, 1, 1) - _EPOCH) // _MICROSECOND  # noqa: DTZ001
_LATEST: Final = (datetime(LAST_YEAR + 1, 1, 1) - _EPOCH) // _MICROSECOND  # noqa: DTZ001


def parse_times(cells: pa.StringArray, zone: str) -> Parsed:
    """Parse cells as ISO 8601 dates, or dates and times.

    Parameters
    ----------
    cells : pyarrow.StringArray, n cells
        Text without nulls; an empty cell is an absent time.
    zone : str
        IANA name of the zone in which a time without one is meant.

    Returns
    -------
    Parsed
        `values` as int64, microseconds since 1970-01-01T00:00Z, `ABSENT` where
        absent or bad. Bad is also a local time that its zone skips or has twice,
        a leap second, and a year outside 1900 to 2199. A date alone means its
        first moment. Digits past the microsecond are cut off.

    Raises
    ------
    zoneinfo.ZoneInfoNotFoundError
        If there is no such zone.
    """
    absent = byte_lengths(cells) == 0
    values = np.full(len(cells), ABSENT, dtype=np.int64)
    zoned = as_mask(pc.match_substring_regex(cells, pattern=_ZONE))
    for rows, kind in ((zoned, "UTC"), (~zoned & ~absent, None)):
        if rows.any():
            moments = _moments(cells.filter(pa.array(rows)), kind)
            if kind is None:
                moments = _universal(moments, ZoneInfo(zone))
            values[rows] = moments
    return Parsed(values, absent, ~absent & (values == ABSENT))


def time_hint(raw: str, zone: str) -> str:
    """Say why a cell is not a time and what to write instead.

    Parameters
    ----------
    raw : str
        The cell as written.
    zone : str
        IANA name of the zone in which a time without one is meant.
    """
    moment = _moment(raw)
    if moment is None and _SHAPE.fullmatch(raw):
        return "there is no such day, or no such time of a day"
    if moment is None:
        return "write it as 2026-07-31T14:05:00+02:00: year, month, day, then the time and its zone"
    if not _EARLIEST <= moment < _LATEST:
        return f"check the year: it is expected from {FIRST_YEAR} to {LAST_YEAR}"
    return f"when the clocks change in {zone} this time does not exist or comes twice: add +hh:mm"


def _moments(cells: pa.StringArray, zone: str | None) -> NDArray[np.int64]:
    """Microseconds since the epoch, by the offset written or, without one, by the local clock."""
    try:
        times = cells.cast(pa.timestamp("us", zone)).cast(pa.int64())
        moments = np.array(times.to_numpy(zero_copy_only=False), dtype=np.int64)
    except pa.ArrowInvalid:
        found = (_moment(text) for text in texts(cells))
        moments = np.array([ABSENT if each is None else each for each in found], dtype=np.int64)
    return np.where((moments >= _EARLIEST) & (moments < _LATEST), moments, ABSENT)


def _moment(text: str) -> int | None:
    if not _SHAPE.fullmatch(text):
        return None
    try:
        time = datetime.fromisoformat(text)
    except ValueError:
        return None
    if time.tzinfo is not None:
        try:
            time = time.astimezone(UTC).replace(tzinfo=None)
        except OverflowError:
            return None
    return (time - _EPOCH) // _MICROSECOND


def _universal(local: NDArray[np.int64], zone: ZoneInfo) -> NDArray[np.int64]:
    """Turn local clock times [us] into universal ones, `ABSENT` where that is not one time.

    A day that begins and ends with the same offset has that offset throughout.
    """
    there = local != ABSENT
    days, place = np.unique(local[there] // _DAY, return_inverse=True)
    first = np.array([_offset(int(day) * _DAY, zone) for day in days], dtype=np.int64)
    next_ = np.array([_offset((int(day) + 1) * _DAY, zone) for day in days], dtype=np.int64)
    offsets = first[place]
    rows = np.flatnonzero(there)
    for row in np.flatnonzero((first != next_)[place]):
        early, late = (_offset(int(local[rows[row]]), zone, fold) for fold in (0, 1))
        offsets[row] = early if early == late else ABSENT
    result = local.copy()
    result[rows] = np.where(offsets == ABSENT, ABSENT, local[rows] - offsets)
    return result


def _offset(local: int, zone: ZoneInfo, fold: int = 0) -> int:
    time = (_EPOCH + local * _MICROSECOND).replace(tzinfo=zone, fold=fold)
    offset = time.utcoffset()
    return 0 if offset is None else offset // _MICROSECOND
