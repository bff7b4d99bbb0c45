"""What a row of readings must hold as a whole, beyond what each of its cells must."""

from collections.abc import Mapping, Sequence
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.formulas.hardness import brinell_diameter, brinell_hardness
from coldwork.intake.cells import replaced, same_as
from coldwork.intake.column import Column, Fault
from coldwork.rules import reasons
from coldwork.units import to_si

__all__ = ["DEFAULT_SCALE", "curve_faults", "filled_scale", "indent_faults"]

DEFAULT_SCALE: Final = "HV"


def filled_scale(columns: Mapping[str, Column], rows: int) -> pa.StringArray:
    """Give the scale of each row, `DEFAULT_SCALE` where the cell is empty or there is no column.

    Parameters
    ----------
    columns : mapping of str to Column
        The columns of a block.
    rows : int
        How many rows it has.

    Returns
    -------
    pyarrow.StringArray, `rows` texts
    """
    scale = columns.get("scale")
    if scale is None:
        return pa.repeat(DEFAULT_SCALE, rows)
    return replaced(scale.text, scale.absent, DEFAULT_SCALE)


def indent_faults(columns: Mapping[str, Column], scale: pa.StringArray) -> list[Fault]:
    """Find indents that lack what their scale is computed from, or that no ball can make.

    Parameters
    ----------
    columns : mapping of str to Column
        The columns of a block of n rows.
    scale : pyarrow.StringArray, n texts
        From `filled_scale`.

    Returns
    -------
    list of Fault
        ``required-empty`` in the first column that would have helped, ``ball-missing`` and
        ``impossible-indent``.
    """
    faults = _sizeless(columns, scale)
    if "scale" in columns:
        brinell = same_as(scale, "HBW")
        if brinell.any():
            faults += _ball_faults(columns, brinell)
    return faults


def curve_faults(columns: Mapping[str, Column], needed: Sequence[str]) -> list[Fault]:
    """Find points of curves that lack what the batch sheet reads a curve by.

    Parameters
    ----------
    columns : mapping of str to Column
        The columns of a block of n rows.
    needed : sequence of str
        Columns that every point must have filled; one that the file does not have
        lacks in no row.

    Returns
    -------
    list of Fault
        ``required-empty``, for each of those columns where some cell is empty.
    """
    found = [columns[name] for name in needed if name in columns]
    return [
        Fault(reasons.REQUIRED_EMPTY, column.field.name, column.absent)
        for column in found
        if column.absent.any()
    ]


def _sizeless(columns: Mapping[str, Column], scale: pa.StringArray) -> list[Fault]:
    """Rows with neither a hardness nor the diagonals that their scale is read by."""
    count = len(scale)
    lacks_1, lacks_2 = (_absent(columns, name, count) for name in ("d1_um", "d2_um"))
    if lacks_2.any() and "scale" in columns:
        lacks_2 &= ~same_as(scale, "HK")
    lacks = (lacks_1 | lacks_2) & _absent(columns, "hardness", count)
    if not lacks.any():
        return []
    if "d1_um" not in columns:
        return [Fault(reasons.REQUIRED_EMPTY, "hardness", lacks)]
    return [
        Fault(reasons.REQUIRED_EMPTY, "d1_um", lacks & lacks_1),
        Fault(reasons.REQUIRED_EMPTY, "d2_um", lacks & ~lacks_1),
    ]


def _ball_faults(columns: Mapping[str, Column], brinell: NDArray[np.bool_]) -> list[Fault]:
    missing = brinell & _absent(columns, "ball_mm", len(brinell))
    rows = np.flatnonzero(brinell & ~missing)
    faults = [Fault(reasons.BALL_MISSING, "ball_mm", missing)]
    for column, bad in _impossible(columns, rows).items():
        impossible = np.zeros(len(brinell), dtype=np.bool_)
        impossible[rows] = bad
        faults.append(Fault(reasons.IMPOSSIBLE_INDENT, column, impossible))
    return faults


def _impossible(
    columns: Mapping[str, Column], rows: NDArray[np.intp]
) -> Mapping[str, NDArray[np.bool_]]:
    """Which of `rows` no ball can make, by the column that says so; a missing number says nothing.

    The diagonals count where there are any, as they do for the hardness.
    """
    force, ball, d1, d2, hardness = (
        _si(columns, name, rows) for name in ("force_n", "ball_mm", "d1_um", "d2_um", "hardness")
    )
    there = np.isfinite(force) & np.isfinite(ball)
    measured = np.isfinite(d1) & np.isfinite(d2)
    shown = np.isfinite(hardness) & ~measured
    return {
        "d1_um": there & measured & np.isnan(brinell_hardness(force, d1, d2, ball)),
        "hardness": there & shown & np.isnan(brinell_diameter(force, hardness, ball)),
    }


def _si(columns: Mapping[str, Column], name: str, rows: NDArray[np.intp]) -> NDArray[np.float64]:
    """Values of a column in SI, NaN where there is none or it is not sound."""
    column = columns.get(name)
    if column is None or column.values is None:
        return np.full(len(rows), np.nan)
    values = np.where(column.faulty[rows], np.nan, column.values[rows])
    return to_si(values, column.field.unit or "1")


def _absent(columns: Mapping[str, Column], name: str, rows: int) -> NDArray[np.bool_]:
    column = columns.get(name)
    return np.ones(rows, dtype=np.bool_) if column is None else column.absent
