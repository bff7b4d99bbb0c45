"""What cells look like: numbers and their signs, times and their form, what stands for none."""

import re
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Final

__all__ = ["SignLook", "TimeLook", "absent_words", "is_number", "look_at_signs", "look_at_times"]

_NUMBER: Final = re.compile(r"-?(\d+([.,' ]\d{3})*([.,]\d*)?|[.,]\d+)([eE][+-]?\d+)?", re.ASCII)
_LONGEST: Final = 40
_MARKED: Final = re.compile(r"-?\d{1,3}([.,' ])\d{3}(?:\1\d{3})*(?:([.,])\d+)?", re.ASCII)
_EITHER: Final = re.compile(r"-?[1-9]\d{0,2}[.,]\d{3}", re.ASCII)
_DECIMAL: Final = re.compile(r"-?\d*([.,])\d+([eE][+-]?\d+)?", re.ASCII)
_ISO: Final = re.compile(r"\d{4}-\d{2}-\d{2}([T ]\d{2}:\d{2}.*)?", re.ASCII)
_TIME: Final = re.compile(
    r"(\d{1,4})([./-])(\d{1,2})\2(\d{1,4})"
    r"(?:([ T]+)(\d{1,2}):(\d{2})(?::(\d{2})(\.\d{1,6})?)?(?: ?(AM|PM|am|pm))?"
    r"(?:( ?)(?:Z|[+-]\d{2}:?\d{2}))?)?",
    re.ASCII,
)
_NAMED: Final = re.compile(r"\d{1,2}([ .-])([A-Z][a-z]{2,8})\1(\d{4}|\d{2})", re.ASCII)
_MOSTLY: Final = 0.8
_MOST_WORDS: Final = 4
_NO_DIGIT: Final = re.compile(r"[^0-9]{1,12}")


@dataclass(frozen=True)
class SignLook:
    """Decimal sign and thousands mark.

    Attributes
    ----------
    decimal, thousands : str or None
        None where none was seen.
    sure : bool
        Whether every number has one reading.
    sample : str
        A cell that tells, or that does not.
    """

    decimal: str | None
    thousands: str | None
    sure: bool
    sample: str = ""


@dataclass(frozen=True)
class TimeLook:
    """The form of times; `sure` is False where day and month could change places."""

    form: str | None
    sure: bool
    sample: str


def is_number(cell: str) -> bool:
    """Tell whether a cell looks like a number, in whatever signs."""
    bare = cell.strip(" \t")
    return 0 < len(bare) <= _LONGEST and _NUMBER.fullmatch(bare) is not None


def look_at_signs(cells: Iterable[str]) -> SignLook:
    """Say which decimal sign and which thousands mark cells are written with."""
    votes: Counter[str] = Counter()
    marks: Counter[str] = Counter()
    samples: dict[str, str] = {}
    doubtful: dict[str, str] = {}
    for cell in cells:
        bare = cell.strip(" \t")
        marked = _MARKED.fullmatch(bare)
        if marked and ((marked[2] and marked[2] != marked[1]) or bare.count(marked[1]) > 1):
            marks[marked[1]] += 1
            votes[marked[2] or ""] += 1
            samples.setdefault(marked[2] or "", bare)
        elif _EITHER.fullmatch(bare):
            doubtful.setdefault("," if "," in bare else ".", bare)
        elif match := _DECIMAL.fullmatch(bare):
            votes[match[1]] += 1
            samples.setdefault(match[1], bare)
    votes.pop("", None)
    thousands = marks.most_common(1)[0][0] if marks else None
    if len(votes) > 1:
        both = " and ".join(samples[sign] for sign in votes)
        return SignLook(votes.most_common(1)[0][0], None, sure=False, sample=both)
    if votes:
        (sign,) = votes
        other = "," if sign == "." else "."
        if thousands is None and other in doubtful:  # 7,460 beside 0.5
            return SignLook(sign, other, sure=False, sample=doubtful[other])
        return SignLook(
            sign, thousands if thousands != sign else None, sure=True, sample=samples[sign]
        )
    if doubtful:
        sign = "," if "," in doubtful else "."
        return SignLook(sign, None, sure=False, sample=doubtful[sign])
    return SignLook("." if thousands == "," else None, thousands, sure=not marks)


def look_at_times(cells: Sequence[str]) -> TimeLook | None:
    """Say which form times have; None if these are no times, a form of None is ISO 8601."""
    filled = [cell.strip(" \t") for cell in cells if cell.strip(" \t")]
    if not filled:
        return None
    if sum(_ISO.fullmatch(cell) is not None for cell in filled) > _MOSTLY * len(filled):
        return TimeLook(None, sure=True, sample=filled[0])
    named = [match for cell in filled if (match := _NAMED.fullmatch(cell))]
    if len(named) > _MOSTLY * len(filled):
        mark, month, year = named[0].groups()
        parts = ("%d", "%b" if len(month) == 3 else "%B", "%Y" if len(year) == 4 else "%y")
        return TimeLook(mark.join(parts), sure=True, sample=filled[0])
    found = [match for cell in filled if (match := _TIME.fullmatch(cell))]
    if not found or len(found) <= _MOSTLY * len(filled):
        return None
    firsts, thirds = {int(m[1]) for m in found}, {int(m[3]) for m in found}
    long_first = len(found[0][1]) == 4
    day_first = max(firsts) > 12 or max(thirds) <= 12
    sure = long_first or max(firsts) > 12 or max(thirds) > 12
    return TimeLook(_form(found[0], long_first, day_first), sure=sure, sample=filled[0])


def absent_words(cells: Sequence[str]) -> list[str]:
    """Give the words that stand for no value in a column that is numbers otherwise."""
    filled = [cell.strip(" \t") for cell in cells if cell.strip(" \t")]
    numbers = sum(is_number(cell) for cell in filled)
    if not filled or numbers < len(filled) / 2:
        return []
    words = Counter(cell for cell in filled if _NO_DIGIT.fullmatch(cell))
    return [word for word, _ in words.most_common(_MOST_WORDS)]


def _form(match: re.Match[str], long_first: bool, day_first: bool) -> str:
    mark = match[2]
    year = "%Y" if long_first or len(match[4]) == 4 else "%y"
    order = [year, "%m", "%d"] if long_first else ["%d", "%m", year]
    if not long_first and not day_first:
        order = ["%m", "%d", year]
    form = mark.join(order)
    if match[6] is None:
        return form
    half = match[10] is not None
    form += f"{match[5]}{'%I' if half else '%H'}:%M"
    form += ":%S" if match[8] else ""
    form += ".%f" if match[9] else ""
    if half:
        form += " %p" if f" {match[10]}" in match[0] else "%p"
    return form if match[11] is None else f"{form}{match[11]}%z"
