"""Tables of text that know the line they are writing, and random numbers that stay the same."""

import csv
import io
from collections.abc import Mapping, Sequence
from datetime import datetime, timedelta, timezone
from typing import Final

import numpy as np
from numpy.typing import NDArray

__all__ = ["YARD_TIME", "Table", "clock", "normals"]

YARD_TIME: Final = timezone(timedelta(hours=2))  # summer time of the yard


class Table:
    """A CSV file in the making.

    Parameters
    ----------
    columns : sequence of str
        Its header.
    """

    def __init__(self, columns: Sequence[str]) -> None:
        self._columns = tuple(columns)
        self._lines = [_row(self._columns)]

    def add(self, cells: Mapping[str, str]) -> int:
        """Add a row, empty where a column is not given, and tell its line."""
        unknown = set(cells) - set(self._columns)
        if unknown:
            message = f"no such column: {sorted(unknown)}"
            raise ValueError(message)
        return self.add_line(_row([cells.get(name, "") for name in self._columns]))

    def add_line(self, line: str) -> int:
        """Add a line as it is, and tell its number."""
        self._lines.append(line)
        return len(self._lines)

    def text(self) -> str:
        """Give the whole file."""
        return "".join(f"{line}\n" for line in self._lines)


def clock(moment: datetime) -> str:
    """Write a moment as ISO 8601 with its zone, to the second."""
    return moment.isoformat(timespec="seconds")


def normals(bits: np.random.PCG64, count: int) -> NDArray[np.float64]:
    """Draw standard normal numbers (Box and Muller 1958).

    From the generator's raw bits, which numpy promises to keep; the stream of its
    normal numbers it does not. Shape (count,). [1]
    """
    raw = np.asarray(bits.random_raw(2 * count), dtype=np.uint64) >> np.uint64(11)
    first, second = ((raw.astype(np.float64) + 0.5) * 2.0**-53).reshape(2, count)
    return np.asarray(np.sqrt(-2.0 * np.log(first)) * np.cos(2.0 * np.pi * second))


def _row(cells: Sequence[str]) -> str:
    line = io.StringIO()
    csv.writer(line, lineterminator="").writerow(cells)
    return line.getvalue()
