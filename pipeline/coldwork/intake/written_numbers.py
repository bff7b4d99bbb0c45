"""Numbers in the signs that a layout declares: to the number grammar, or refused."""

import re
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from typing import Final

from coldwork.inputs.layout_units import Step
from coldwork.intake.numbers import LONGEST, hint
from coldwork.intake.text import REFUSED

__all__ = ["AMBIGUOUS", "LONGEST", "Signs", "shifted"]

AMBIGUOUS: Final = REFUSED + "?"  # stands for a cell with two readings
_NUMBER: Final = re.compile(
    r"(-?)(?:([0-9]+)(?:\.([0-9]+))?|\.([0-9]+))(?:[eE]([+-]?[0-9]+))?", re.ASCII
)
_EITHER: Final = re.compile(r"(-?)([1-9][0-9]{0,2})([.,])([0-9]{3})", re.ASCII)
_SPELLINGS: Final = {" ": " \N{NO-BREAK SPACE}\N{NARROW NO-BREAK SPACE}\N{THIN SPACE}", "'": "'’"}
_LARGEST_EXPONENT: Final = 400


@dataclass(frozen=True)
class Signs:
    """The decimal sign and the thousands mark that a file is said to use.

    Attributes
    ----------
    decimal, thousands : str or None
        As the layout declares them; see `Layout`.
    """

    decimal: str | None
    thousands: str | None

    def number(self, cell: str, step: Step) -> str:
        """Turn one cell into a number of the grammar, in the unit that `step` leads to.

        Parameters
        ----------
        cell : str
            As written, not empty and without padding.
        step : Step
            To the column's unit.

        Returns
        -------
        str
            The number, `REFUSED` if it is none, `AMBIGUOUS` if it is two.
        """
        text = self._pointed(cell)
        match = _NUMBER.fullmatch(text)
        if match is None:
            return text if text == AMBIGUOUS else REFUSED
        if step.shift == 0:
            return text
        return _stepped(text, match, step)

    def count(self, cell: str) -> str:
        """Turn one cell into a whole number, written in digits alone; see `number`."""
        text = self._pointed(cell)
        return text if text == AMBIGUOUS or (text.isascii() and text.isdigit()) else REFUSED

    def ambiguity(self, cell: str) -> tuple[str, str] | None:
        """Spell out both readings of a cell, with what to declare; None if it has one."""
        match = _EITHER.fullmatch(cell) if self.decimal is None else None
        if match is None:
            return None
        sign, whole, mark, rest = match.groups()
        name = "point" if mark == "." else "comma"
        return (
            f"{cell!r} is {sign}{whole}.{rest} with a decimal {name} and {sign}{whole}{rest} with "
            f"a {name} between thousands",
            f"Say decimal = '.' or decimal = ',' in the layout, and thousands = '{mark}' if it is "
            "such a mark.",
        )

    def hint(self, cell: str) -> str:
        """Say why a cell is no number in these signs."""
        if len(cell) > LONGEST:
            return hint(cell)
        said = self.decimal or "."
        for mark in (".", ","):
            if mark in cell and mark not in (said, self.thousands):
                return (
                    f"the decimal sign of the layout is {said!r} and {mark!r} is not declared: say "
                    f"decimal = {mark!r} or thousands = {mark!r} if it is one of the two"
                )
        if self.thousands and any(mark in cell for mark in self._marks):
            return f"{self.thousands!r} must stand between groups of three digits"
        return hint(cell if self.decimal is None else cell.replace(said, "."))

    @cached_property
    def _marks(self) -> str:
        return _SPELLINGS.get(self.thousands or "", self.thousands or "")

    @cached_property
    def _grouped(self) -> re.Pattern[str]:
        mark, sign = re.escape(self._marks), re.escape(self.decimal or ".")
        groups = rf"[1-9][0-9]{{0,2}}([{mark}])[0-9]{{3}}(?:\1[0-9]{{3}})*"
        return re.compile(rf"-?{groups}(?:{sign}[0-9]+)?")

    def _pointed(self, cell: str) -> str:
        """Write a cell with a decimal point and without marks; `REFUSED` where that fails."""
        if len(cell) > LONGEST:
            return REFUSED
        if self.decimal is None:
            return AMBIGUOUS if _EITHER.fullmatch(cell) else cell
        if self.thousands and self._grouped.fullmatch(cell):
            cell = "".join(c for c in cell if c not in self._marks)
        elif self.decimal != "." and "." in cell:
            return REFUSED
        return cell.replace(self.decimal, ".") if self.decimal != "." else cell


def shifted(text: str, places: int) -> str:
    """Move the decimal point of a number of the grammar to the right, or to the left.

    Parameters
    ----------
    text : str
        A number without exponent.
    places : int
        How far; negative to the left.

    Returns
    -------
    str
        The number times ten to the power of `places`, digit for digit.
    """
    sign = "-" * text.startswith("-")
    whole, _, rest = text.removeprefix("-").partition(".")
    if places > 0:
        whole, rest = whole + rest[:places].ljust(places, "0"), rest[places:]
    elif places < 0:
        whole = whole.rjust(1 - places, "0")
        whole, rest = whole[:places], whole[places:] + rest
    whole = whole.lstrip("0") or "0"
    return f"{sign}{whole}.{rest}" if rest else f"{sign}{whole}"


def _stepped(text: str, match: re.Match[str], step: Step) -> str:
    exponent = match.group(5)
    if exponent is not None and abs(int(exponent)) > _LARGEST_EXPONENT:
        return text  # beyond any double: the grammar says so
    if exponent is None and step.shift is not None:
        moved = shifted(text, step.shift)
        if len(moved) <= LONGEST:
            return moved
    exact = Fraction(text) * step.times + step.plus
    try:
        value = float(exact)
    except OverflowError:
        return REFUSED
    return repr(value) if value or not exact else REFUSED
