"""Quoted cells: cells that are left open, and quotes that stand where none belongs.

A quoted cell begins and ends with a quote and doubles the quotes inside it
(RFC 4180, section 2, rules 5 to 7). A line break inside one is refused, because line
numbers, torn rows and a cut at any line end would lose their meaning.
"""

import re
from functools import cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

__all__ = ["split_cells", "with_clean_quotes"]

_QUOTE: Final = ord('"')
_FEED: Final = ord("\n")


def with_clean_quotes(data: bytes, delimiter: str = ",") -> tuple[bytes, int | None]:
    r"""Quote afresh the cells that are quoted in part, so that they are read as written.

    Parameters
    ----------
    data : bytes
        Whole lines, ended by line feeds, in UTF-8.
    delimiter : str, optional
        What stands between cells, one ASCII character.

    Returns
    -------
    bytes
        The same lines; a cell such as ``"12"34`` or ``5"`` becomes one whole quoted
        cell with that text. Nothing is moved to another line.
    int or None
        Index of the first line with a quoted cell that is still open at its end.
    """
    if b'"' not in data:
        return data, None
    spoilt = _spoilt_lines(np.frombuffer(data, dtype=np.uint8), ord(delimiter))
    if not spoilt.size:
        return data, None
    lines = data.split(b"\n")
    for index in spoilt:
        cells = split_cells(lines[index].decode("utf-8"), delimiter)
        if cells is None:
            return data, int(index)
        written = (_quoted(cell, delimiter) for cell in cells)
        lines[index] = delimiter.join(written).encode("utf-8")
    return b"\n".join(lines), None


def split_cells(line: str, delimiter: str = ",") -> list[str] | None:
    """Split one line into its cells; None if a quoted cell is still open at its end.

    A cell that is quoted only in part keeps its quotes, as written.
    """
    cells = []
    place = 0
    cell = _cell(delimiter)
    while True:
        match = cell.match(line, place)
        if match is None:
            return None
        inner, rest, plain = match.groups()
        if plain is not None:
            cells.append(plain)
        elif rest:
            cells.append(match.group())
        else:
            cells.append(inner.replace('""', '"'))
        place = match.end() + 1
        if place > len(line):
            return cells


@cache
def _cell(delimiter: str) -> re.Pattern[str]:
    other = f"[^{re.escape(delimiter)}]"
    return re.compile(rf'"((?:[^"]|"")*+)"({other}*)|((?!"){other}{other}*|(?!"))')


def _spoilt_lines(data: NDArray[np.uint8], delimiter: int) -> NDArray[np.intp]:
    """Lines, by index, whose quotes do not all open or close a cell or stand doubled in one.

    In a clean line the 1st, 3rd, 5th quote follows a delimiter, the line's begin or
    a quote, and the 2nd, 4th, 6th precedes a delimiter, the line's end or a quote.
    """
    quotes = np.flatnonzero(data == _QUOTE)
    ends = np.flatnonzero(data == _FEED)
    line = np.searchsorted(ends, quotes)
    before = np.searchsorted(line, line)  # quotes in earlier lines
    opening = (np.arange(len(quotes)) - before) % 2 == 0
    padded = np.concatenate(([_FEED], data, [_FEED]))
    beside = np.where(opening, padded[quotes], padded[quotes + 2])
    clean = (beside == delimiter) | (beside == _FEED) | (beside == _QUOTE)
    odd = np.bincount(line)[line] % 2 == 1
    return np.unique(line[~clean | odd])


def _quoted(cell: str, delimiter: str) -> str:
    if '"' in cell or delimiter in cell:
        doubled = cell.replace('"', '""')
        return f'"{doubled}"'
    return cell
