"""Quantities of a slice as they may be published: emptied where an error says so."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from coldwork.interval.combine import Combined, Ends
from coldwork.jobs.evaluate import Evaluated
from coldwork.measured import Measured
from coldwork.rules.bits import emptied

__all__ = ["Figures", "figures_of"]

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
    sd : ndarray or None
        Standard deviation of the draws, None by first order.
    """

    result: Measured
    combined: Combined
    ends: Ends
    sd: _Floats | None = None


def figures_of(evaluated: Evaluated, bits: NDArray[np.uint64]) -> dict[str, Figures]:
    """Empty what errors empty.

    Parameters
    ----------
    evaluated : Evaluated
        The slice.
    bits : ndarray of uint64, shape (n, words)
        Findings of its coupons.

    Returns
    -------
    dict of str to Figures
        By column name.
    """
    found = {
        name: _figures(name, result, evaluated.combined[name], evaluated.ends[name], bits)
        for name, result in evaluated.results.items()
    }
    if evaluated.sampled is None:
        return found
    for name, sd in evaluated.sampled.sd.items():
        kept = np.where(np.isnan(found[name].result.value), np.nan, sd)
        found[name] = replace(found[name], sd=kept)
    return found


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
