"""The elastic line: where it lies, and where a line parallel to it meets the curve."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve_branch import Branch, moving_mean
from coldwork.statistics.robust_line import Line, robust_line

__all__ = [
    "LEAST_ELASTIC_POINTS",
    "PROOF_OFFSET",
    "Elastic",
    "crossing",
    "find_elastic",
    "fit_line",
]

FloatArray = NDArray[np.float64]

LEAST_ELASTIC_POINTS: Final = 8  # in the stated range, for a slope that may be reported
PROOF_OFFSET: Final = 0.002  # that the stated range refers to [1]
_ROUNDS: Final = 15
_CLIP: Final = 4.0  # distances from a line count up to this many standard deviations
_FAR: Final = 6.0  # standard deviations from the line beyond which a point is not of it
_EVIDENCE: Final = 2.5  # points well below a parallel that the end of a curve must show
_LEVELS: Final = 60


@dataclass(frozen=True)
class Elastic:
    """The elastic part.

    Attributes
    ----------
    line : Line
        Stress over strain as recorded. [Pa], [1]
    start, stop : int
        Places in the branch between which it was fitted.
    proof_at : int or None
        Place where the curve passes the 0.2 % parallel; None where it ends before.
    """

    line: Line
    start: int
    stop: int
    proof_at: int | None


def find_elastic(
    branch: Branch, between: tuple[float, float], stated: float | None
) -> Elastic | None:
    """Fit the line in the stated range of the proof stress that it leads to itself.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    between : tuple of float
        The range, as fractions of the 0.2 % proof stress. [1]
    stated : float or None
        Slope, where it is stated. [Pa]

    Returns
    -------
    Elastic or None
        None where fewer than 3 points rise at all.
    """
    line = _first_line(branch, stated)
    if line is None:
        return None
    seen: list[tuple[int, int]] = []
    proof_at = crossing(branch, line, PROOF_OFFSET, 0)
    for _ in range(_ROUNDS):
        top = branch.peak if proof_at is None else proof_at
        start, stop = _range(branch, line, between, float(branch.mean[top]), top)
        found = _line_through(branch, (start, stop), stated)
        if found is None:
            return None
        line = found
        proof_at = crossing(branch, line, PROOF_OFFSET, stop)
        if (start, stop) in seen:
            break
        seen.append((start, stop))
    return Elastic(line, start, stop, proof_at)


def _line_through(branch: Branch, places: tuple[int, int], stated: float | None) -> Line | None:
    """Fit the line where there are 3 points that rise; None where there are not."""
    strain = branch.strain[slice(*places)]
    if strain.size < 3 or not float(np.ptp(strain)) > 0.0:
        return None
    line = fit_line(branch, branch.stress, branch.strain, places, stated)
    return line if np.isfinite(line.slope) and line.slope > 0.0 else None


def fit_line(
    branch: Branch,
    stress: FloatArray,
    strain: FloatArray,
    places: tuple[int, int],
    stated: float | None,
) -> Line:
    """Fit the elastic line through the places; stress and strain may be rescaled ones."""
    here = slice(*places)
    return robust_line(
        strain[here],
        stress[here],
        branch.noise_strain,
        branch.noise_stress,
        stated,
        branch.long_run,
    )


def crossing(branch: Branch, line: Line, offset: float, start: int) -> int | None:
    """Find the place where the curve goes from above to below a parallel of the line.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    line : Line
        The elastic line.
    offset : float
        By how much strain the parallel is shifted. [1]
    start : int
        Place from which to look.

    Returns
    -------
    int or None
        The first place below, by the balance of all points before and after; None where
        the curve ends above.
    """
    stop = len(branch)
    if stop - start < 3:
        return None
    above = branch.stress[start:stop] - line.at(branch.strain[start:stop] - offset)
    noise = np.hypot(branch.noise_stress, line.slope * branch.noise_strain)
    clip = max(_CLIP * float(noise), 1e-9 * abs(line.slope) * offset)
    balance = np.cumsum(np.clip(above, -clip, clip))
    best = int(np.argmax(balance))
    if balance[best] - balance[-1] < _EVIDENCE * clip:
        return None
    return start + best + 1


def _first_line(branch: Branch, stated: float | None) -> Line | None:
    """Take a line to begin with: the steepest stretch that noise does not explain."""
    mean, run = branch.mean, branch.run
    top = float(mean[branch.peak])
    if not top > 0.0 or branch.peak < 2:
        return None
    rising = np.maximum.accumulate(mean[: branch.peak + 1])
    levels = np.geomspace(0.02, 0.95, _LEVELS) * top
    at = np.minimum(np.searchsorted(rising, levels), branch.peak)
    best, chosen = -np.inf, None
    for reach in (4, 8, 16):
        low, high = at[:-reach], at[reach:]
        rise, strain = mean[high] - mean[low], run[high] - run[low]
        wide = (high - low >= 2) & (strain > 0.0) & (rise > 0.0)
        if not wide.any():
            continue
        low, high, rise, strain = low[wide], high[wide], rise[wide], strain[wide]
        relative = np.hypot(branch.noise_stress / rise, branch.noise_strain / strain)
        sure = rise / strain * (1.0 - 2.0 * np.minimum(relative, 1.0))
        k = int(np.argmax(sure))
        if sure[k] > best:
            best, chosen = float(sure[k]), (int(low[k]), int(high[k]) + 1)
    return None if chosen is None else _line_through(branch, chosen, stated)


def _range(
    branch: Branch, line: Line, between: tuple[float, float], level: float, top: int
) -> tuple[int, int]:
    """Find the places between which the stress goes from one fraction of the level to the other.

    The stress is the one on the line that a point most likely stands for, from its stress
    and its strain. Its error has nothing to do with the point's distance from the line, so
    that points are not taken in or left out for being above or below it.
    """
    by_strain = (line.slope * branch.noise_strain) ** 2
    by_stress = branch.noise_stress**2
    share = by_strain / (by_strain + by_stress) if by_strain + by_stress > 0.0 else 1.0
    here = slice(0, top + 1)
    rough = np.maximum.accumulate(branch.mean[here])
    ends = np.array(between) * level
    count = int(np.diff(np.searchsorted(rough, ends))[0])
    length = min(9, 2 * (count // 16) + 1)
    reach = _FAR * float(np.sqrt(by_strain + by_stress))
    off = np.clip(line.at(branch.strain[here]) - branch.stress[here], -reach, reach)
    likely = branch.stress[here] + (1.0 - share) * off
    start, stop = np.searchsorted(np.maximum.accumulate(moving_mean(likely, length)), ends)
    return int(start), min(int(stop), top + 1)
