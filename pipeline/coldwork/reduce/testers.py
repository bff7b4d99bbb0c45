"""Testers: each reading without its tester's bias, and what is known of the tester."""

from datetime import datetime, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.inputs.method import Method
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.rules.batch import TESTER_OUT_OF_DATE, TESTER_UNKNOWN

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
    """Note readings of a tester that is not listed, or whose calibration had run out.

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
        if t.valid_until is None:
            continue
        after = t.valid_until + timedelta(days=1)
        midnight = datetime(after.year, after.month, after.day, tzinfo=zone)
        end = round(midnight.timestamp() * 1e6)
        late = (tester == i) & (readings.times != _ABSENT) & (readings.times >= end)
        days = (readings.times - end) // _DAY + 1.0
        marks.note(TESTER_OUT_OF_DATE, late, np.asarray(days, dtype=np.float64))
