"""Times in the form that a layout declares: to ISO 8601, or refused."""

import re
from typing import Final

import pyarrow as pa
import pyarrow.compute as pc

from coldwork.inputs.time_form import TimeForm
from coldwork.intake.cells import as_mask, byte_lengths
from coldwork.intake.text import REFUSED
from coldwork.intake.written_numbers import AMBIGUOUS

__all__ = ["ambiguity", "hint", "may_be_ambiguous", "rewritten", "turned"]

_TWO_PARTS: Final = r"^[0-9]{1,2}[./-][0-9]{1,2}[./-][0-9]{2}"
_EITHER: Final = re.compile(r"([0-9]{1,2})([./-])([0-9]{1,2})\2([0-9]{4}|[0-9]{2})(?![0-9])(.*)")
_MONTHS: Final = (
    *("January", "February", "March", "April", "May", "June"),
    *("July", "August", "September", "October", "November", "December"),
)


def rewritten(cells: pa.StringArray, form: TimeForm) -> pa.StringArray | None:
    """Turn whole columns at once where every cell has all of its digits; None otherwise."""
    if form.rewritten is None:
        return None
    pattern = rf"^{form.strict_pattern}$"
    empty = byte_lengths(cells) == 0
    if not (as_mask(pc.match_substring_regex(cells, pattern=pattern)) | empty).all():
        return None
    return pc.replace_substring_regex(cells, pattern=pattern, replacement=form.rewritten)


def turned(cell: str, form: TimeForm | None) -> str:
    """Turn one cell into ISO 8601; `REFUSED` or `AMBIGUOUS` where that cannot be.

    Without a form the cell stays as it is, and the grammar of times judges it.
    """
    if form is not None:
        return form.iso(cell) or REFUSED
    if ambiguity(cell):
        return AMBIGUOUS
    return f"'{cell}" if cell.startswith("'") else cell  # readers take one apostrophe off


def may_be_ambiguous(cells: pa.StringArray) -> bool:
    """Tell whether any cell of a column begins like a date of two numbers and a year."""
    return bool(as_mask(pc.match_substring_regex(cells, pattern=_TWO_PARTS)).any())


def ambiguity(cell: str) -> tuple[str, str] | None:
    """Spell out both readings of a date, with what to declare; None if it has one at most."""
    match = _EITHER.fullmatch(cell)
    if match is None:
        return None
    first, mark, second, year, _ = match.groups()
    if not (1 <= int(first) <= 12 and 1 <= int(second) <= 12) or int(first) == int(second):
        return None
    return (
        f"{cell!r} is {int(first)} {_MONTHS[int(second) - 1]} and {int(second)} "
        f"{_MONTHS[int(first) - 1]}",
        f"Say times in the layout, such as '%d{mark}%m{mark}%{'Y' if len(year) == 4 else 'y'}'.",
    )


def hint(form: TimeForm | None) -> str:
    """Say what a time must look like."""
    if form is None:
        return "say in the layout, by times, how times are written"
    return f"the layout says that times are written as {form.text}"
