"""Yielding at a point: upper and lower yield stress, and the plateau between."""

from dataclasses import dataclass
from typing import Final

import numpy as np

from coldwork.reduce.curve_branch import Branch, moving_mean
from coldwork.reduce.curve_elastic import Elastic

__all__ = ["YIELD_DROP", "Yield", "find_yield"]

YIELD_DROP: Final = 0.005  # of the upper yield stress: the stress falls by at least this
_STAYS: Final = 0.0005  # strain for which it does not come back [1]
_WITHIN: Final = 0.002  # strain within which it falls so far [1]
_EARLY: Final = 0.005  # strain past the 0.2 % proof stress in which this is looked for [1]
_NOISE: Final = 8.0
_HARDER: Final = 1.02  # of the plateau's level: there it has ended
_LONG: Final = 0.006  # strain over which that level is taken [1]


@dataclass(frozen=True)
class Yield:
    """A yield point, by places in the branch."""

    upper: int
    lower: int  # the lowest mean of `length` points past the first fall
    length: int
    end: int  # of the plateau


def find_yield(branch: Branch, elastic: Elastic) -> Yield | None:
    """Find upper and lower yield, where the metal has them.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    elastic : Elastic
        Its elastic part.

    Returns
    -------
    Yield or None
        None where the stress rises steadily.

    References
    ----------
    ISO 6892-1, determination of the upper yield strength: a fall by at least 0.5 % and no
    return within 0.05 % of strain (from memory).
    """
    if elastic.proof_at is None:
        return None
    mean, run = moving_mean(branch.stress, 3), branch.run
    rising = np.maximum.accumulate(run)
    reach = int(np.searchsorted(rising, run[elastic.proof_at] + _EARLY))
    best = np.maximum.accumulate(mean[:reach])
    least = np.maximum(YIELD_DROP * best, _NOISE * branch.noise_stress / np.sqrt(3.0))
    fallen = np.flatnonzero(mean[elastic.stop : reach] < (best - least)[elastic.stop :])
    if fallen.size == 0:
        return None
    first = elastic.stop + int(fallen[0])
    upper = int(np.argmax(mean[: first + 1]))
    stays = int(np.searchsorted(rising, run[upper] + _STAYS))
    quick = run[first] - run[upper] <= _WITHIN
    if not quick or stays >= len(branch) or mean[first:stays].max(initial=0.0) >= mean[upper]:
        return None
    return _plateau(branch, upper, first)


def _plateau(branch: Branch, upper: int, first: int) -> Yield:
    """Follow the stress from the first fall to where it has clearly risen again."""
    rising = np.maximum.accumulate(branch.run)
    some = int(np.searchsorted(rising, rising[first] + _LONG))
    level = float(np.median(branch.stress[first : max(some, first + 3)]))
    length = max(3, 2 * ((some - first) // 40) + 1)
    mean = moving_mean(branch.stress, length)
    above = np.flatnonzero(mean[first:] > _HARDER * level + 3.0 * branch.noise_stress)
    past = above[above > some - first] if above.size else above
    end = first + int(past[0]) if past.size else len(branch) - 1
    settled = int(np.searchsorted(rising, rising[first] + _STAYS))
    begin = settled if settled < end - length else first
    lower = begin + int(np.argmin(mean[begin : end + 1]))
    return Yield(upper, lower, length, end)
