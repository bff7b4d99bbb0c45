"""What a file of readings prints of itself, held against its rows while they stream by."""

from collections.abc import Mapping, Sequence
from typing import Final, NamedTuple

import numpy as np
from numpy.typing import NDArray

from coldwork.inputs.layout import Layout
from coldwork.intake.cells import take
from coldwork.intake.closing import ClosingLine, Disagreement, Tally
from coldwork.intake.column import Column

__all__ = ["FileTally", "Printed"]

_SAMPLED: Final = 2000  # cells a block that tell how finely a column is written


class Printed(NamedTuple):
    """A printed mean or scatter that the rows of its file do not give.

    Attributes
    ----------
    file : int
        Which of the table's files.
    coupon : int
        Place of the coupon in coupons.csv if all its rows belong to one, otherwise -1.
    found : Disagreement
        Line, column and numbers.
    """

    file: int
    coupon: int
    found: Disagreement


class FileTally:
    """Counts in the numbers of one file, where its layout names lines that print some.

    Parameters
    ----------
    layout : Layout or None
        How the file is written.
    """

    def __init__(self, layout: Layout | None) -> None:
        self._wanted = layout is not None and any(closing.holds for closing in layout.ends_before)
        self._tally = Tally()
        self._coupons: set[int] = set()

    def add(self, columns: Mapping[str, Column], coupon: NDArray[np.int32]) -> None:
        """Count in a block: all numbers that could be read, used or not."""
        if not self._wanted or not len(coupon):
            return
        self._coupons |= {int(coupon.min()), int(coupon.max())}
        first = np.arange(min(len(coupon), _SAMPLED))
        for name, column in columns.items():
            if column.field.type == "number" and column.values is not None:
                values = np.where(column.faulty, np.nan, column.values)
                self._tally.add(name, values, take(column.text, first))

    def printed(self, file: int, lines: Sequence[ClosingLine]) -> list[Printed]:
        """Hold the lines that close the file against its rows."""
        coupon = min(self._coupons) if len(self._coupons) == 1 else -1
        return [
            Printed(file, coupon, found)
            for line in lines
            for found in self._tally.disagreements(line)
        ]
