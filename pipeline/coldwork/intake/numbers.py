"""The number grammar: which cells are numbers, and what the others look like.

``-`` if negative, then digits with optionally a point and digits (or a point and
digits alone), then optionally ``e`` or ``E`` with an exponent; ASCII, at most
40 characters, finite in double precision and not rounded down to nothing. Whatever
else a program or a locale may write is refused rather than guessed at.
"""

import re
from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.intake.cells import as_mask, byte_lengths, content, last_bytes, only

__all__ = ["LARGEST_COUNT", "LONGEST", "Parsed", "hint", "parse_counts", "parse_floats"]

LONGEST: Final = 40  # characters of a number
LARGEST_COUNT: Final = 10**9

_NUMBER: Final = r"^-?([0-9]+(\.[0-9]+)?|\.[0-9]+)([eE][+-]?[0-9]+)?$"
_COUNT: Final = r"^[0-9]+$"
_ZERO: Final = r"^-?[0.]+([eE].*)?$"  # given that it is a number: no digit of it counts
_PLAIN: Final = b"0123456789.eE-"
_DIGITS: Final = b"0123456789"
_POINT: Final = ord(".")
_BARE_POINT: Final = re.compile(rb"\.[eE]")


@dataclass(frozen=True)
class Parsed:
    """One column of cells as numbers.

    Attributes
    ----------
    values : ndarray, shape (n,)
        The numbers. What stands where there is none depends on the parser.
    absent : ndarray of bool, shape (n,)
        Where the cell is empty.
    bad : ndarray of bool, shape (n,)
        Where the cell is neither empty nor a number.
    """

    values: NDArray[np.float64] | NDArray[np.int64]
    absent: NDArray[np.bool_]
    bad: NDArray[np.bool_]


def parse_floats(cells: pa.StringArray) -> Parsed:
    """Parse cells by the number grammar.

    Parameters
    ----------
    cells : pyarrow.StringArray, n cells
        Text without nulls; an empty cell is an absent value.

    Returns
    -------
    Parsed
        `values` as float64, correctly rounded, NaN where absent or bad.

    Notes
    -----
    One look at the column's bytes and lengths usually settles that Arrow's
    conversion accepts nothing but this grammar; otherwise a regular expression
    says so cell by cell.
    """
    lengths = byte_lengths(cells)
    absent = lengths == 0
    data = content(cells)
    numeric = None
    if _is_plain(cells, data, lengths):
        numeric = _converted(cells, ~absent)
    if numeric is None:
        matching = as_mask(pc.match_substring_regex(cells, pattern=_NUMBER)) & (lengths <= LONGEST)
        numeric = _forced(cells, matching)
    bad = ~(absent | np.isfinite(numeric))
    if _has_exponent(data):
        bad |= _underflown(cells, numeric)
    if bad.any():
        numeric = np.where(bad, np.nan, numeric)
    return Parsed(numeric, absent, bad)


def parse_counts(cells: pa.StringArray) -> Parsed:
    """Parse cells as whole numbers from 0 to 1e9, written in digits alone.

    Parameters
    ----------
    cells : pyarrow.StringArray, n cells
        Text without nulls; an empty cell is an absent value.

    Returns
    -------
    Parsed
        `values` as int64, -1 where absent or bad.
    """
    lengths = byte_lengths(cells)
    absent = lengths == 0
    usable = ~absent & (lengths <= len(str(LARGEST_COUNT)))
    if content(cells).translate(None, _DIGITS):
        usable &= as_mask(pc.match_substring_regex(cells, pattern=_COUNT))
    whole = only(cells, usable).cast(pa.int64())
    values = whole.fill_null(-1).to_numpy(zero_copy_only=False)
    bad = ~absent & ((values < 0) | (values > LARGEST_COUNT))
    return Parsed(np.where(bad, -1, values) if bad.any() else values, absent, bad)


def hint(raw: str) -> str:
    """Say in a few words why a cell is not a number and what to write instead.

    Parameters
    ----------
    raw : str
        The cell as written.

    Returns
    -------
    str
        A hint of its own for what people and programs commonly write.
    """
    for pattern, words in _HINTS:
        if pattern.search(raw):
            return words
    return "write a plain decimal number such as 183.1, -0.5 or 1.2E-4"


_HINTS: Final = tuple(
    (re.compile(pattern), words)
    for pattern, words in (
        (rf"(?s)^.{{{LONGEST + 1},}}$", f"a number has at most {LONGEST} characters"),
        (r"^'", "remove the apostrophe: the cell was stored as text"),
        (r"^\s|\s$", "remove the space around the number"),
        (r"^\+", "write it without the plus sign"),
        (r"^[<>≤≥~≈=±]", "a bound or an approximation is no reading: leave the cell empty"),
        (r"(?i)^-?(inf|infinity|∞)$", "an infinite value is no reading: leave the cell empty"),
        (
            r"(?i)^(-?nan|n/?a|none|null|-+|–|—|\?+)$",
            "leave the cell empty where there is no value",
        ),
        (r"^#", "the cell holds an error of the spreadsheet: mend it there"),
        (r"^[−–—]\d", "write the minus sign as -"),
        (r"(?![0-9])\d", "write it in the digits 0 to 9"),
        (r"(?i)^-?0[xob]", "write it in decimal digits"),
        (r"_", "write it without the underscore"),
        (r"^-?\d+,\d+$", "write the decimal comma as a point"),
        (r"^-?\d{1,3}([,' ]\d{3})+(\.\d*)?$", "write it without separators between the thousands"),
        (r"^-?\d{1,3}(\.\d{3})+,\d*$", "write a decimal point and no separators"),
        (r"^[-\d]*\.\d*\.[\d.]*$", "it has more than one decimal point"),
        (r"^-?\d+\.([eE].*)?$", "a digit must follow the decimal point"),
        (r"^-?[\d.]+[eE][+-]?$", "the exponent has no digits"),
        (r"^-?[\d.]+[eE]-\d+$", "too small for a double: it would become zero"),
        (r"^-?[\d.]+[eE]\+?\d+$", "too large for a double"),
        (r"^-?[\d.]+\s*[A-Za-zµμ%°/]", "leave out the unit: the column's name says it"),
        (r"^[^\x00-\x7f]", "write it in plain ASCII characters"),
    )
)


def _is_plain(cells: pa.StringArray, data: bytes, lengths: NDArray[np.int32]) -> bool:
    """Whether whatever Arrow converts is a number of the grammar too.

    With these characters alone, Arrow takes one form more: a point that no digit follows.
    """
    if data.translate(None, _PLAIN) or (_has_exponent(data) and _BARE_POINT.search(data)):
        return False
    if b"." in data and (last_bytes(cells) == _POINT).any():
        return False
    return not len(cells) or bool(lengths.max() <= LONGEST)


def _has_exponent(data: bytes) -> bool:
    return b"e" in data or b"E" in data


def _converted(cells: pa.StringArray, kept: NDArray[np.bool_]) -> NDArray[np.float64] | None:
    try:
        return _forced(cells, kept)
    except pa.ArrowInvalid:
        return None


def _forced(cells: pa.StringArray, kept: NDArray[np.bool_]) -> NDArray[np.float64]:
    numbers = only(cells, kept).cast(pa.float64())
    return np.asarray(numbers.to_numpy(zero_copy_only=False), dtype=np.float64)


def _underflown(cells: pa.StringArray, values: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Where a number other than zero was rounded down to zero."""
    lost = np.zeros(len(values), dtype=np.bool_)
    rows = np.flatnonzero(values == 0.0)
    if rows.size:
        zeros = cells.take(rows)
        lost[rows] = ~as_mask(pc.match_substring_regex(zeros, pattern=_ZERO))
    return lost
