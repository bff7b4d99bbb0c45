"""Where the force is greatest: the end of uniform strain."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve_branch import Branch, moving_mean
from coldwork.statistics.local_polynomial import (
    BASE,
    LEAST_POINTS,
    Window,
    choose_window,
    fit_window,
)

__all__ = ["Top", "find_top"]

FloatArray = NDArray[np.float64]

_ROUNDS: Final = 8
_STILL: Final = 0.02  # of the window: a top that moves less is not looked for again
_COARSE: Final = 200  # stretches that the first look averages over
_WITHIN: Final = 2.0  # the record goes on past the top by this many of its u
_SAME: Final = 3.0  # standard deviations within which a mean is not told from the greatest
_WIDER: Final = (0.0, 0.25, 0.5, 1.0)  # of those points, that join on either side
_CLEAR: Final = 0.3  # relative uncertainty of the bend above which a wider window is tried


@dataclass(frozen=True)
class Top:
    """Where the greatest stress is read.

    Attributes
    ----------
    window : Window
        What to fit stress against strain in.
    near : float
        Strain of the top as recorded, to begin from. [1]
    least_u : float
        Standard uncertainty of that strain at least: where several tops lie within the
        noise, that of all of them. [1]
    """

    window: Window
    near: float
    least_u: float


def find_top(branch: Branch, start: int) -> Top | None:
    """Find the greatest stress of the smoothed curve.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    start : int
        Place past which to look: the end of the elastic part, or of a yield plateau.

    Returns
    -------
    Top or None
        None where the stress has not clearly fallen by the end.

    Notes
    -----
    Where the window is so narrow that the noise in it hides how the curve bends, several
    tops may lie in one; a polynomial of two more powers then takes a wider one. If that
    does not clear it, the uncertainty is that of all strains at which the mean stress is
    not told from the greatest.
    """
    if len(branch) - start < LEAST_POINTS or not _has_fallen(branch, start):
        return None
    first = _look(branch, start, BASE)
    if first is not None and first[1] <= _CLEAR:
        return first[0]
    second = _look(branch, start, BASE + 2)
    found = [look for look in (first, second) if look is not None]
    if not found:
        return _of_region(branch, start)
    top, doubt = min(found, key=lambda look: look[1])
    if doubt <= _CLEAR:
        return top
    low, high = _region(branch, start)
    spread = float(branch.run[high] - branch.run[low]) / np.sqrt(12.0)
    return Top(top.window, top.near, float(spread))


def _look(branch: Branch, start: int, base: int) -> tuple[Top, float] | None:
    """Go from the greatest mean to the top of the polynomial about it, until it stands.

    Beside the top stands its doubt: the relative uncertainty of the bend there.
    """
    stop = len(branch)
    place = start + int(np.argmax(_coarse(branch, start)[0]))
    centre, least, last = (float(branch.run[k]) for k in (place, start, -1))
    for _ in range(_ROUNDS):
        window = choose_window(
            branch.strain,
            branch.stress,
            centre,
            (start, stop),
            branch.alike,
            branch.lasting,
            base,
        )
        fit = fit_window(branch.strain, branch.stress, window)
        top = fit.top(centre)
        if not least <= top <= last:
            return None
        still = abs(top - centre) <= _STILL * fit.scale
        centre = top
        if still:
            break
    if top + _WITHIN * fit.u_top(top) > last:
        return None
    return Top(window, top, 0.0), fit.u_bend(top) / abs(fit.bend(top))


def _of_region(branch: Branch, start: int) -> Top | None:
    """Take the top of a parabola through all points that are not told from the greatest.

    Where noise leaves it without a top among them, points on either side join.
    """
    low, high = _region(branch, start)
    if high - low < LEAST_POINTS:
        return None
    middle = float(branch.run[(low + high) // 2])
    u = float(branch.run[high] - branch.run[low]) / float(np.sqrt(12.0))
    for more in _WIDER:
        beside = int(more * (high - low))
        ends = max(start, low - beside), min(len(branch), high + 1 + beside)
        window = Window(*ends, middle, 2, branch.alike)
        near = fit_window(branch.strain, branch.stress, window).top(middle)
        if branch.run[low] <= near <= branch.run[high]:
            return Top(window, near, u)
    return None


def _has_fallen(branch: Branch, start: int) -> bool:
    """Say whether the stress is clearly below the greatest by the end."""
    mean, noise, length = _coarse(branch, start)
    end = float(branch.stress[-length:].mean())
    return end < float(mean.max()) - 2.0 * _SAME * noise


def _region(branch: Branch, start: int) -> tuple[int, int]:
    """Find the first and last place whose mean is within 3 standard deviations of the top."""
    mean, noise, _ = _coarse(branch, start)
    near = np.flatnonzero(mean >= mean.max() - _SAME * noise)
    return start + int(near[0]), start + int(near[-1])


def _coarse(branch: Branch, start: int) -> tuple[FloatArray, float, int]:
    """Average the stress over half a per cent of the points; with its noise, and how many."""
    length = 2 * ((len(branch) - start) // _COARSE // 2) + 1
    noise = branch.noise_stress * np.sqrt(branch.long_run / length)
    return (
        moving_mean(branch.stress[start:], length),
        float(np.hypot(noise, branch.lasting)),
        length,
    )
