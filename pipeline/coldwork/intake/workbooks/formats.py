"""Number formats of .xlsx: which of them show something else than the cell stores.

References
----------
.. [1] ECMA-376-1:2016, 18.8.30 (numFmt: the built-in formats by number) and 18.8.31
   (numFmts: the codes).
"""

import re
from enum import Enum, auto
from typing import Final

__all__ = ["Shown", "shown_by"]

_PLAIN_NUMBERS: Final = {0, 1, 49}  # General, 0 and @
_PERCENT_NUMBERS: Final = {9, 10}
_DATE_NUMBERS: Final = {*range(14, 23), *range(27, 37), 45, 46, 47, *range(50, 59)}
_PLAIN_CODES: Final = {"general", "0", "@", ""}
_WORDS: Final = re.compile(r'"[^"]*"|\\.|_.|\*.|\[(?![hms]+\])[^\]]*\]', re.IGNORECASE | re.DOTALL)
_DATE: Final = re.compile(r"[dmyhs]", re.IGNORECASE)
_SCALED: Final = re.compile(r"[0#?],+(?![0#?,])")


class Shown(Enum):
    """How a number appears on the sheet."""

    PLAIN = auto()
    DATE = auto()  # as a date, a time or a duration
    PERCENT = auto()  # a hundred times as large
    SCALED = auto()  # a thousand times smaller, or more
    OTHER = auto()  # rounded, with zeros in front, with words


def shown_by(number: int, code: str | None) -> Shown:
    """Tell what a format does to a number.

    Parameters
    ----------
    number : int
        Its number.
    code : str or None
        Its code, where the workbook gives one.

    Returns
    -------
    Shown
    """
    if code is None:
        return _built_in(number)
    first = code.split(";")[0]
    if first.lower() in _PLAIN_CODES:
        return Shown.PLAIN
    bare = _WORDS.sub("", first)
    if "general" in bare.lower():
        return Shown.OTHER
    if _DATE.search(bare):
        return Shown.DATE
    if "%" in bare:
        return Shown.PERCENT
    return Shown.SCALED if _SCALED.search(bare) else Shown.OTHER


def _built_in(number: int) -> Shown:
    if number in _PLAIN_NUMBERS:
        return Shown.PLAIN
    if number in _PERCENT_NUMBERS:
        return Shown.PERCENT
    return Shown.DATE if number in _DATE_NUMBERS else Shown.OTHER
