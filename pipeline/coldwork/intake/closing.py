"""Lines that close a table, and the means and scatters that they print held against ours."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import sqrt
from typing import Final, NamedTuple

import numpy as np
from numpy.typing import NDArray

from coldwork.intake.numbers import LARGEST_COUNT

__all__ = ["ClosingLine", "Disagreement", "Tally"]

_FLOATING: Final = 1e-9  # of a value, for the arithmetic
_LOOKED_AT: Final = 2000  # cells that tell how finely a column is written


class ClosingLine(NamedTuple):
    """A line that closes a table.

    Attributes
    ----------
    line : int
        Its number.
    text : str
        As written.
    holds : tuple of str
        What its numbers may be; see `inputs.layout.Closing`.
    cells : mapping of str to str
        By the contract's column: its number, in the contract's form and unit.
    written : mapping of str to str
        By the contract's column: the cell as written.
    """

    line: int
    text: str
    holds: tuple[str, ...]
    cells: Mapping[str, str]
    written: Mapping[str, str]


class Disagreement(NamedTuple):
    """A printed number that is not ours.

    Attributes
    ----------
    line : int
        Line that prints it.
    column : str
        The contract's column.
    printed, ours, limit : float
        What is printed, what the rows give, and how far apart rounding may bring the
        two. [unit of the column]
    words : str
        The same for a person.
    """

    line: int
    column: str
    printed: float
    ours: float
    limit: float
    words: str


@dataclass
class _Sums:
    """Count, mean, sum of squares about it, ends and decimal places of a column."""

    count: int = 0
    mean: float = 0.0
    squares: float = 0.0
    least: float = np.inf
    most: float = -np.inf
    places: int = 0

    def add(self, values: NDArray[np.float64]) -> None:
        n = len(values)
        if not n:
            return
        mean = float(values.mean())
        total = self.count + n
        apart = mean - self.mean
        self.squares += float(((values - mean) ** 2).sum()) + apart**2 * self.count * n / total
        self.mean += apart * n / total
        self.count = total
        self.least = min(self.least, float(values.min()))
        self.most = max(self.most, float(values.max()))

    def of(self, statistic: str) -> tuple[float, float]:
        """Give a statistic and how far the rounding of each cell may move it."""
        cell = 0.5 * 10.0**-self.places
        if statistic == "mean":
            return self.mean, cell
        if statistic == "range":
            return self.most - self.least, 2.0 * cell
        if self.count < 2:
            return 0.0, 0.0  # what machines print for one reading
        freedom = self.count - 1
        return sqrt(self.squares / freedom), cell * sqrt(self.count / freedom)


class Tally:
    """What the rows of one file come to, column by column, for comparing."""

    def __init__(self) -> None:
        self._sums: dict[str, _Sums] = {}

    def add(self, column: str, values: NDArray[np.float64], cells: list[str]) -> None:
        """Count in the numbers of a block.

        Parameters
        ----------
        column : str
            The contract's column.
        values : ndarray of float64, shape (n,)
            Its numbers; what is not finite is passed over. [unit of the column]
        cells : list of str
            Some of its cells as text in that unit.
        """
        sums = self._sums.setdefault(column, _Sums())
        sums.add(values[np.isfinite(values)])
        sums.places = max([sums.places, *(_places(cell) for cell in cells[:_LOOKED_AT])])

    def disagreements(self, line: ClosingLine) -> list[Disagreement]:
        """Hold a closing line against what was counted in.

        Parameters
        ----------
        line : ClosingLine
            The line.

        Returns
        -------
        list of Disagreement
            Where nothing that the line may hold agrees within the rounding of the
            printed number and of the cells.
        """
        found = []
        for column, cell in line.cells.items():
            sums = self._sums.get(column)
            if sums is None or not sums.count or not line.holds:
                continue
            printed = float(cell)
            choices = [(name, *sums.of(name)) for name in line.holds]
            rounding = 0.5 * 10.0 ** -_places(cell) + _FLOATING * abs(printed)
            if any(abs(ours - printed) <= rounding + own for _, ours, own in choices):
                continue
            statistic, ours, own = choices[0]
            words = f"{statistic.replace('-', ' ')} of {column}: printed {line.written[column]}"
            words += f" ({cell} in our unit), the {sums.count} rows give {ours:.7g}"
            found.append(Disagreement(line.line, column, printed, ours, rounding + own, words))
        return found


def _places(cell: str) -> int:
    """Give the decimal places of a number, those of its exponent taken off."""
    mantissa, _, exponent = cell.lower().partition("e")
    places = len(mantissa.partition(".")[2])
    if exponent.lstrip("+-").isdigit() and abs(int(exponent)) < LARGEST_COUNT:
        places -= int(exponent)
    return max(-300, min(300, places))
