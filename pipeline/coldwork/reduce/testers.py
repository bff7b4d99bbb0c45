"""Testers: each reading without its tester's bias, and what is known of the tester."""

from datetime import date, datetime, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.inputs.method import Method, Tester
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.rules.batch import (
    TESTER_CHECK_MISSING,
    TESTER_CHECK_OUT_OF_LIMITS,
    TESTER_CHECK_TOO_OLD,
    TESTER_OUT_OF_DATE,
    TESTER_UNKNOWN,
)

__all__ = ["corrected", "note_testers"]

_ABSENT: Final = np.iinfo(np.int64).min
_DAY: Final = 86_400_000_000  # [us]


def corrected(
    readings: Readings, method: Method, strength: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.int64]]:
    """Divide each reading by 1 + bias of its tester.

    Parameters
    ----------
    readings : Readings
        The stretch.
    method : Method
        The testers that the sheet lists.
    strength : ndarray, shape (n,)
        Hardness or flow stress as read. [Pa]

    Returns
    -------
    ndarray of float64, shape (n,)
        As it would read on a tester without bias. [Pa]
    ndarray of int64, shape (n,)
        Place of its tester in the sheet, -1 for none of them.
    """
    text = readings.texts.get("tester")
    if text is None or not method.testers:
        return strength, np.full(len(readings), -1, dtype=np.int64)
    ids = pa.array([t.id for t in method.testers], pa.string())
    found = pc.index_in(text, value_set=ids).fill_null(-1)
    which = found.to_numpy(zero_copy_only=False).astype(np.int64)
    divisor = np.array([1.0 + t.bias.value for t in method.testers] + [1.0])
    return strength / divisor[which], which


def note_testers(
    readings: Readings, method: Method, tester: NDArray[np.int64], marks: Marks
) -> None:
    """Note readings of a tester that is not listed, has run out, or was not well checked.

    Parameters
    ----------
    readings : Readings
        The stretch.
    method : Method
        The testers that the sheet lists; without any there is nothing to note.
    tester : ndarray of int64, shape (n,)
        From `corrected`.
    marks : Marks
        Where findings go.
    """
    if not method.testers:
        return
    marks.note(TESTER_UNKNOWN, tester < 0)
    zone = ZoneInfo(method.timezone)
    for i, t in enumerate(method.testers):
        if t.checked:
            _note_checks(readings.times, t, tester == i, zone, marks)
        if t.valid_until is None:
            continue
        end = _midnight(t.valid_until + timedelta(days=1), zone)
        late = (tester == i) & (readings.times != _ABSENT) & (readings.times >= end)
        days = (readings.times - end) // _DAY + 1.0
        marks.note(TESTER_OUT_OF_DATE, late, np.asarray(days, dtype=np.float64))


def _note_checks(
    times: NDArray[np.int64], tester: Tester, here: NDArray[np.bool_], zone: ZoneInfo, marks: Marks
) -> None:
    """Note readings without a check on their day, with one too old, or with a bad one."""
    days = sorted({check.day for check in tester.checks})
    bad = np.array([any(c.day == day and not c.within for c in tester.checks) for day in days])
    begins = np.array([_midnight(day, zone) for day in days])
    ends = np.array([_midnight(day + timedelta(days=1), zone) for day in days])
    timed = here & (times != _ABSENT)
    last = np.searchsorted(begins, times, side="right") - 1
    before = timed & (last >= 0)
    at = np.maximum(last, 0)
    age = np.where(before, np.ceil((times - ends[at] + 1) / _DAY), np.nan)
    old = (timed & ~before) | (before & (age > tester.max_age_days))
    limit = float(tester.max_age_days)
    marks.note(TESTER_CHECK_TOO_OLD, old, age, limit=limit)
    same_day = before & (times < ends[at])
    marks.note(TESTER_CHECK_MISSING, here & ~old & ~same_day, age)
    marks.note(TESTER_CHECK_OUT_OF_LIMITS, before & ~old & bad[at])


def _midnight(day: date, zone: ZoneInfo) -> int:
    """Give the begin of a day in a zone [us]."""
    return round(datetime(day.year, day.month, day.day, tzinfo=zone).timestamp() * 1e6)
