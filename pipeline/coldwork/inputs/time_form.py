"""The form that a layout says times are written in, as a pattern and its way to ISO 8601."""

import re
from dataclasses import dataclass
from functools import cached_property
from typing import Final

from coldwork.errors import InvalidArgument

__all__ = ["TimeForm", "time_form"]

_MONTHS: Final = (
    *("January", "February", "March", "April", "May", "June"),
    *("July", "August", "September", "October", "November", "December"),
)
_SHORT: Final = "|".join(month[:3] for month in _MONTHS)
_LONG: Final = "|".join(_MONTHS)
_PIECES: Final = {  # directive: what it gives, how many digits or which text
    "Y": ("year", r"[0-9]{4}"),
    "y": ("short_year", r"[0-9]{2}"),
    "m": ("month", r"[0-9]{1,2}"),
    "b": ("month_name", f"(?:{_SHORT})"),
    "B": ("month_name", f"(?:{_LONG})"),
    "d": ("day", r"[0-9]{1,2}"),
    "H": ("hour", r"[0-9]{1,2}"),
    "I": ("half_hour", r"[0-9]{1,2}"),
    "p": ("half", r"(?:AM|PM|am|pm)"),
    "M": ("minute", r"[0-9]{2}"),
    "S": ("second", r"[0-9]{2}"),
    "f": ("fraction", r"[0-9]{1,6}"),
    "z": ("zone", r"(?:Z|[+-][0-9]{2}:?[0-9]{2})"),
}
_LOOSE: Final = r"[0-9]{1,2}"
_FIXED: Final = r"[0-9]{2}"
_CLOCK: Final = ("hour", "minute", "second", "fraction")


@dataclass(frozen=True)
class TimeForm:
    """Times of one form.

    Attributes
    ----------
    text : str
        As the layout says it, such as ``%d.%m.%Y %H:%M``.
    pattern : str
        Regular expression, in the syntax that Python and RE2 share, whose groups are
        the pieces; it matches from begin to end of a cell.
    pieces : tuple of str
        What each group holds.
    """

    text: str
    pattern: str
    pieces: tuple[str, ...]

    @cached_property
    def strict_pattern(self) -> str:
        """The same for cells in which every piece has two digits or more."""
        return self.pattern.replace(_LOOSE, _FIXED)

    @cached_property
    def rewritten(self) -> str | None:
        """What turns a match of `strict_pattern` into ISO 8601, as RE2 writes it.

        None where the pieces themselves have to be changed, as a month's name has.
        """
        place = {piece: rf"\{number}" for number, piece in enumerate(self.pieces, 1)}
        if {"short_year", "month_name", "half_hour", "zone"} & set(place):
            return None
        return _joined(place)

    def iso(self, cell: str) -> str | None:
        """Give the same time in ISO 8601; None if the cell is not of this form.

        Whether the day exists is not its business.
        """
        match = self._compiled.fullmatch(cell)
        if match is None:
            return None
        found = dict(zip(self.pieces, match.groups(), strict=True))
        if "short_year" in found:
            found["year"] = f"20{found['short_year']}"
        if "month_name" in found:
            first = found["month_name"][:3]
            found["month"] = str(1 + [month[:3] for month in _MONTHS].index(first))
        if "half_hour" in found:
            hour = int(found["half_hour"])
            if not 1 <= hour <= 12:
                return None
            found["hour"] = str(hour % 12 + 12 * (found["half"].lower() == "pm"))
        for piece in ("month", "day", "hour"):
            if piece in found:
                found[piece] = found[piece].rjust(2, "0")
        return _joined(found)

    @cached_property
    def _compiled(self) -> re.Pattern[str]:
        return re.compile(self.pattern)


def time_form(text: str) -> TimeForm:
    """Read the form of times that a layout says.

    Parameters
    ----------
    text : str
        Directives as the schema of layouts lists them, and what stands between them.

    Returns
    -------
    TimeForm

    Raises
    ------
    InvalidArgument
        If a directive is unknown or stands twice, or year, month and day, or what a
        clock needs, are not all there.
    """
    pattern, pieces = "", []
    for match in re.finditer(r"%(.?)|[^%]+", text, re.DOTALL):
        directive = match.group(1)
        if directive is None or directive == "%":
            pattern += re.escape("%" if directive else match.group())
            continue
        if directive not in _PIECES:
            message = f"%{directive} is not known; known are {', '.join(f'%{d}' for d in _PIECES)}"
            raise InvalidArgument(message)
        piece, form = _PIECES[directive]
        glued = pattern.endswith(")") or text[match.end() : match.end() + 1] == "%"
        pattern += f"({_FIXED if glued and form == _LOOSE else form})"
        pieces.append(piece)
    _refuse_incomplete(pieces)
    return TimeForm(text, pattern, tuple(pieces))


def _refuse_incomplete(pieces: list[str]) -> None:
    have = set(pieces)
    lacks = [
        words
        for words, choice in (
            ("the year, %Y or %y, once", {"year", "short_year"}),
            ("the month, %m, %b or %B, once", {"month", "month_name"}),
            ("the day, %d, once", {"day"}),
        )
        if sum(pieces.count(each) for each in choice) != 1
    ]
    if len(have) != len(pieces) or {"hour", "half_hour"} <= have:
        lacks.append("no piece twice")
    if ("half_hour" in have) != ("half" in have):
        lacks.append("%I and %p together")
    if have & {"minute", "zone"} and not have & {"hour", "half_hour"}:
        lacks.append("the hour, %H or %I with %p")
    if have & {"hour", "half_hour"} and "minute" not in have:
        lacks.append("the minute, %M")
    if "second" in have and "minute" not in have:
        lacks.append("the minute, %M")
    if "fraction" in have and "second" not in have:
        lacks.append("the second, %S, before its decimals")
    if lacks:
        message = f"it needs {'; '.join(dict.fromkeys(lacks))}"
        raise InvalidArgument(message)


def _joined(found: dict[str, str]) -> str:
    day = f"{found['year']}-{found['month']}-{found['day']}"
    clock = [found[piece] for piece in _CLOCK if piece in found]
    if not clock:
        return day
    words = ":".join(clock[:3]) + "".join(f".{each}" for each in clock[3:])
    return f"{day}T{words}{found.get('zone', '')}"
