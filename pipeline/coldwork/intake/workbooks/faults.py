"""Why a workbook cannot be taken: one cause, in words."""

from coldwork.errors import Cause

__all__ = ["BookFaultError", "cell_name", "column_letters"]


class BookFaultError(Exception):
    """A workbook, or a sheet of it, that cannot be trusted as a whole.

    Parameters
    ----------
    what, why, mend : str
        What was found, the rule that it breaks, and what to do; see `errors.Cause`.
    place : str, optional
        Where in the workbook, such as ``sheet 'Readings', cell C4``.
    """

    def __init__(self, what: str, why: str, mend: str, place: str = "") -> None:
        super().__init__(what)
        self.what = what
        self.why = why
        self.mend = mend
        self.place = place

    def at(self, place: str) -> "BookFaultError":
        """Give the same fault with its place, unless it has one."""
        return BookFaultError(self.what, self.why, self.mend, self.place or place)

    def cause(self, name: str) -> Cause:
        """Say it of a file."""
        where = f"{name}, {self.place}" if self.place else name
        return Cause(where, self.what, self.why, self.mend)


def column_letters(column: int) -> str:
    """Give the letters of a column, counted from 1: 1 is A, 27 is AA."""
    letters = ""
    while column > 0:
        column, rest = divmod(column - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


def cell_name(row: int, column: int) -> str:
    """Name a cell, row and column counted from 1, as spreadsheets do: ``C4``."""
    return f"{column_letters(column)}{row}"
