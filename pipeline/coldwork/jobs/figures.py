"""Quantities of a slice as they may be published: emptied where an error says so."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.interval.combine import Combined, Ends
from coldwork.jobs.evaluate import Evaluated
from coldwork.measured import Measured
from coldwork.rules import RULES

__all__ = ["Figures", "emptied", "figures_of"]

_Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Figures:
    """One quantity of n coupons, NaN where there is none. SI, arrays of shape (n,).

    Attributes
    ----------
    result : Measured
        Value with its sensitivities.
    combined : Combined
        Own, shared and total standard uncertainty, effective degrees of freedom.
    ends : Ends
        Interval at the method's coverage.
    """

    result: Measured
    combined: Combined
    ends: Ends


def emptied(column: str, bits: NDArray[np.uint64], *, ends: bool = False) -> NDArray[np.bool_]:
    """Say which coupons have no value, or no interval, in a column.

    Parameters
    ----------
    column : str
        Column of ``coupons.csv``.
    bits : ndarray of uint64, shape (n,)
        Findings of the coupons.
    ends : bool, optional
        Ask about the interval instead of the value.

    Returns
    -------
    ndarray of bool, shape (n,)
        True where a rule that fired empties it.
    """
    words = _EMPTIES_ENDS if ends else _EMPTIES
    return np.asarray((bits & np.uint64(words.get(column, 0))) != 0)


def figures_of(evaluated: Evaluated, bits: NDArray[np.uint64]) -> dict[str, Figures]:
    """Empty what errors empty.

    Parameters
    ----------
    evaluated : Evaluated
        The slice.
    bits : ndarray of uint64, shape (n,)
        Findings of its coupons.

    Returns
    -------
    dict of str to Figures
        By column name.
    """
    return {
        name: _figures(name, result, evaluated.combined[name], evaluated.ends[name], bits)
        for name, result in evaluated.results.items()
    }


def _figures(
    name: str, result: Measured, combined: Combined, ends: Ends, bits: NDArray[np.uint64]
) -> Figures:
    value, interval = emptied(name, bits), emptied(name, bits, ends=True)
    if not value.any():
        return Figures(result, combined, ends)

    def without(x: _Floats, gone: NDArray[np.bool_]) -> _Floats:
        return np.where(gone, np.nan, x)

    return Figures(
        result.where(~value),
        Combined(
            without(combined.u_own, value),
            without(combined.u_shared, value),
            without(combined.u, value),
            without(combined.degrees_of_freedom, value),
        ),
        Ends(without(ends.lower, interval), without(ends.upper, interval)),
    )


def _words(*, ends: bool) -> Mapping[str, int]:
    words: dict[str, int] = {}
    for i, rule in enumerate(RULES):
        for column in rule.empties:
            if not (ends and rule.ends_stay):
                words[column] = words.get(column, 0) | 1 << i
    return words


_EMPTIES: Final = _words(ends=False)
_EMPTIES_ENDS: Final = _words(ends=True)
