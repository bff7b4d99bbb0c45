"""Where the table of a file stands: its width, its header, its units, its rows, its end."""

import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from coldwork.inputs.layout_units import spelled
from coldwork.intake.quotes import split_cells
from coldwork.jobs.looks.signs import is_number

__all__ = ["DELIMITERS", "Shape", "best_delimiter", "closes", "find_shape", "split"]

DELIMITERS: Final = {"tab": "\t", ";": ";", ",": ",", "|": "|", "spaces": " "}
_LEAST_NUMBERS: Final = 0.34  # share of a row's filled cells that look like numbers
_CLOSING: Final = re.compile(
    r"(mean|average|avg|mittel(wert)?|spread|scatter|std\.?( ?dev\.?)?|standard deviation|s\.?d\.?|"
    r"range|minimum|maximum|min|max|sum|total|count)\b[ :.=]*",
    re.IGNORECASE,
)
_LOOKED_AT: Final = 2000  # lines that tell the delimiter


@dataclass(frozen=True)
class Shape:
    """Where a table stands among rows of cells, all counted from 0.

    Attributes
    ----------
    width : int
        How many cells a row has.
    header, units : int or None
        The rows that name the columns and their units.
    first, last : int
        First and last row of readings.
    """

    width: int
    header: int | None
    units: int | None
    first: int
    last: int


def split(line: str, delimiter: str) -> list[str]:
    """Split a line by a delimiter as layouts name it."""
    if delimiter == "spaces":
        return line.split()
    mark = DELIMITERS[delimiter]
    return split_cells(line, mark) or line.split(mark)


def best_delimiter(lines: Sequence[str]) -> str | None:
    """Give the delimiter with which most lines become rows of one width; None if none does."""
    filled = [line for line in lines[:_LOOKED_AT] if line.strip(" \t")]
    points = {}
    for name in DELIMITERS:
        rows = [split(line, name) for line in filled]
        points[name] = _points(rows) * (0.5 if name == "spaces" else 1.0)
    best = max(points, key=lambda name: points[name])
    return best if points[best] > 0.0 else None


def find_shape(rows: Sequence[Sequence[str]]) -> Shape | None:
    """Find the table among rows of cells.

    Parameters
    ----------
    rows : sequence of rows of cells
        Every line, blank ones too.

    Returns
    -------
    Shape or None
        None if no row looks like one of readings.
    """
    width = _width(rows)
    if width is None:
        return None
    places = [place for place, row in enumerate(rows) if _is_reading(row, width)]
    first = places[0]
    lead = is_number(rows[first][0])
    places = [place for place in places if not closes(rows[place], lead_is_number=lead)]
    above = [place for place in range(first) if any(cell.strip() for cell in rows[place])]
    header = units = None
    if above and _is_header(rows[above[-1]], width):
        header = above[-1]
        if len(above) > 1 and _are_units(rows[header]) and _is_header(rows[above[-2]], width):
            header, units = above[-2], above[-1]
    return Shape(width, header, units, first, places[-1] if places else first)


def closes(row: Sequence[str], *, lead_is_number: bool) -> bool:
    """Tell whether a row closes a table, or stands between readings, by its first cell.

    Parameters
    ----------
    row : sequence of str
        Its cells.
    lead_is_number : bool
        Whether rows of readings begin with a number.
    """
    lead = row[0].strip() if row else ""
    return bool(_CLOSING.fullmatch(lead)) or (lead_is_number and lead != "" and not is_number(lead))


def _width(rows: Sequence[Sequence[str]]) -> int | None:
    widths = Counter(
        len(row) for row in rows[:_LOOKED_AT] if len(row) > 1 and _is_reading(row, len(row))
    )
    return widths.most_common(1)[0][0] if widths else None


def _points(rows: Sequence[Sequence[str]]) -> float:
    """Count rows of one width, by how many numbers they hold and how few other cells."""
    width = _width(rows)
    if width is None:
        return 0.0
    points = 0.0
    for row in rows:
        if _is_reading(row, width):
            filled = [cell for cell in row if cell.strip()]
            numbers = sum(map(is_number, filled))
            points += numbers * (numbers / len(filled)) ** 2
    return points


def _is_reading(row: Sequence[str], width: int) -> bool:
    filled = [cell for cell in row if cell.strip()]
    numbers = sum(map(is_number, filled))
    return len(row) == width and numbers > 0 and numbers >= _LEAST_NUMBERS * len(filled)


def _is_header(row: Sequence[str], width: int) -> bool:
    """Whether a row may name columns; its last cells may be missing."""
    filled = [cell for cell in row if cell.strip()]
    return len(row) == width and len(filled) > width / 3 and not any(map(is_number, filled))


def _are_units(row: Sequence[str]) -> bool:
    filled = [cell.strip() for cell in row if cell.strip()]
    return 2 * sum(spelled(cell) is not None for cell in filled) > len(filled)
