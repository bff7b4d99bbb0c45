"""Which columns of a file of curves a batch sheet reads, and points without a number counted."""

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import Cause
from coldwork.inputs.method import Tensile

__all__ = ["LENGTHS", "POINT", "RunningCount", "column_causes", "needed_columns", "read_columns"]

POINT: Final = "point_no"
LENGTHS: Final = {"extension": "extension_mm", "crosshead": "crosshead_mm"}
_STRESS: Final = ("stress_mpa", "strain")


def read_columns(tensile: Tensile, columns: Sequence[str]) -> tuple[str, str] | None:
    """Give the pair of columns that a file's curves are read by.

    Parameters
    ----------
    tensile : Tensile
        What the sheet says.
    columns : sequence of str
        What the file has.

    Returns
    -------
    tuple of str or None
        A force with a length, or a stress with a strain; None where the file has neither
        as the sheet says, or both.
    """
    pairs = _pairs(tensile, columns)
    return pairs[0] if len(pairs) == 1 else None


def needed_columns(tensile: Tensile, columns: Sequence[str]) -> tuple[str, ...]:
    """Give the columns that every point must have filled: that pair, and a number if any."""
    pair = read_columns(tensile, columns) or ()
    return (*((POINT,) if POINT in columns else ()), *pair)


def column_causes(tensile: Tensile, columns: Sequence[str], where: str) -> list[Cause]:
    """Say why a file's curves cannot be read as the sheet says; empty where they can.

    Parameters
    ----------
    tensile : Tensile
        What the sheet says.
    columns : sequence of str
        What the file has; a header that fits its contract.
    where : str
        The file.
    """
    pairs = _pairs(tensile, columns)
    if len(pairs) == 1:
        return []
    if pairs:
        return [
            Cause(
                where,
                "it brings a force with a length and a stress with a strain",
                "The sheet says strain_from and stress_is, so either could be meant.",
                "Take one of the two keys out of [tensile].",
            )
        ]
    with_length = "force_n" in columns and any(name in columns for name in LENGTHS.values())
    if tensile.strain_from is not None and "force_n" in columns:
        column = LENGTHS[tensile.strain_from]
        what, mend = f"it has no {column}", "Add the column, or choose the other length."
        why = f"The sheet takes the strain from the {tensile.strain_from}."
    elif tensile.strain_from is None and with_length:
        what, mend = "it brings a force with a length", "Say strain_from in [tensile]."
        why = "Its strain comes from an extensometer or from the crosshead, which the sheet says."
    else:
        what, mend = "it brings a stress with a strain", "Say stress_is in [tensile]."
        why = "A stress is engineering or true, which the sheet says."
    return [Cause(where, what, why, mend)]


class RunningCount:
    """Numbers the rows of each coupon from 1, block after block.

    Parameters
    ----------
    coupons : int
        How many there are.
    """

    def __init__(self, coupons: int) -> None:
        self._next = np.ones(coupons, dtype=np.int64)

    def restart(self) -> None:
        """Begin again at 1."""
        self._next[:] = 1

    def of(
        self, coupon: NDArray[np.int32], lines: NDArray[np.int64], torn: Sequence[int] = ()
    ) -> NDArray[np.int64]:
        """Give each row of a block its number.

        Parameters
        ----------
        coupon : ndarray of int32, shape (n,)
            Place of each row's coupon; negative where there is none.
        lines : ndarray of int64, shape (n,)
            Line of each row.
        torn : sequence of int, optional
            Lines of further rows of the same coupon that take a number too, though they
            cannot be read: the numbers after them stay when they are mended.

        Returns
        -------
        ndarray of int64, shape (n,)
            -1 where there is no coupon.
        """
        number = np.full(len(coupon), -1, dtype=np.int64)
        rows = np.flatnonzero(coupon >= 0)
        if not rows.size:
            return number
        rows = rows[np.argsort(coupon[rows], kind="stable")]
        mine = coupon[rows]
        starts = np.flatnonzero(np.concatenate([[True], mine[1:] != mine[:-1]]))
        count = np.diff(np.append(starts, rows.size))
        number[rows] = np.arange(rows.size) - np.repeat(starts, count) + self._next[mine]
        self._next[mine[starts]] += count
        if torn and mine[0] == mine[-1]:
            number[rows] += np.searchsorted(torn, lines[rows])
            self._next[mine[0]] += len(torn)
        return number


def _pairs(tensile: Tensile, columns: Sequence[str]) -> list[tuple[str, str]]:
    pairs = []
    if tensile.strain_from is not None:
        pairs.append(("force_n", LENGTHS[tensile.strain_from]))
    if tensile.stress_is is not None:
        pairs.append(_STRESS)
    return [pair for pair in pairs if set(pair) <= set(columns)]
