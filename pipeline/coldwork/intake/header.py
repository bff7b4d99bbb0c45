"""The header of a table: which columns a file has, and why it may be refused."""

from collections import Counter
from typing import Final

from coldwork.contracts import Contract
from coldwork.errors import Cause
from coldwork.inputs.words import listed, nearest, shown

__all__ = ["header_causes"]

_SEPARATORS: Final = {";": "semicolons", "\t": "tabs", "|": "bars"}
_CURVE: Final = "force-with-length-or-stress-with-strain"
_TWO_DIAGONALS: Final = ("d1_um", "d2_um")


def header_causes(columns: list[str], contract: Contract, where: str) -> list[Cause]:
    """Say what is wrong with a header.

    Parameters
    ----------
    columns : list of str
        The header's cells.
    contract : Contract
        The table's contract.
    where : str
        File and line of the header.

    Returns
    -------
    list of Cause
        A column that is unknown, that stands twice or that is missing; empty where
        the header is fine.
    """
    if len(columns) == 1:
        for mark, words in _SEPARATORS.items():
            if mark in columns[0]:
                what = f"the cells are separated by {words}"
                mend = "Save it with commas between the cells and a point in the numbers, or name a"
                mend += " layout for it in [files]."
                return [Cause(where, what, "Tables are CSV with commas.", mend)]
    return [
        *_unknown(columns, contract, where),
        *_repeated(columns, where),
        *_missing(columns, contract, where),
    ]


def _unknown(columns: list[str], contract: Contract, where: str) -> list[Cause]:
    why = f"{contract.table}.csv has only the columns of its contract."
    causes = []
    for place, column in enumerate(columns, 1):
        if not column:
            what, mend = f"column {place} has no name", "Name it, or delete it with its commas."
            causes.append(Cause(where, what, why, mend))
        elif column not in contract.columns:
            mend = f"{nearest(column, contract.columns)} Rename or delete the column."
            causes.append(Cause(where, f"unknown column {shown(column)}", why, mend))
    return causes


def _repeated(columns: list[str], where: str) -> list[Cause]:
    twice = [column for column, count in Counter(columns).items() if count > 1 and column]
    mend = "Delete the one that is not meant."
    return [
        Cause(where, f"column {shown(column)} stands {Counter(columns)[column]} times",
              "Each column stands once.", mend)
        for column in twice
    ]  # fmt: skip


def _missing(columns: list[str], contract: Contract, where: str) -> list[Cause]:
    lost = [column for column in contract.required_columns if column not in columns]
    causes = []
    if lost:
        noun = "column is" if len(lost) == 1 else "columns are"
        what = f"the required {noun} missing: {listed(lost)}"
        why = f"{contract.table}.csv needs {listed(contract.required_columns)}."
        causes.append(Cause(where, what, why, "Add what is missing."))
    if "hardness-or-diagonals" in contract.checks and not _has_size(columns):
        what = "neither hardness nor the diagonals are there"
        why = "An indent needs hardness, or d1_um and, for HV and HBW, d2_um."
        causes.append(Cause(where, what, why, "Add d1_um and d2_um, or hardness."))
    if _CURVE in contract.checks and not _has_curve(columns):
        what = "neither a force with a length nor a stress with a strain is there"
        why = "A curve is force_n with extension_mm or crosshead_mm, or stress_mpa with strain."
        causes.append(Cause(where, what, why, "Add what is missing of one of them."))
    return causes


def _has_curve(columns: list[str]) -> bool:
    """Whether a table can have both halves of a point of a curve."""
    length = "extension_mm" in columns or "crosshead_mm" in columns
    return ("force_n" in columns and length) or {"stress_mpa", "strain"} <= set(columns)


def _has_size(columns: list[str]) -> bool:
    """Whether some scale of this table can have its hardness, or its diagonals, filled."""
    if "hardness" in columns or all(name in columns for name in _TWO_DIAGONALS):
        return True
    return "d1_um" in columns and "scale" in columns
