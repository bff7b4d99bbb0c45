"""Where the force is greatest: the end of uniform strain."""

from typing import Final

import numpy as np

from coldwork.reduce.curve_branch import Branch, moving_mean
from coldwork.statistics.local_polynomial import Window, choose_window, fit_window

__all__ = ["find_top"]

_ROUNDS: Final = 8
_STILL: Final = 0.02  # of the window: a top that moves less is not looked for again
_COARSE: Final = 200  # stretches that the first look averages over
_WITHIN: Final = 2.0  # the record goes on past the top by this many of its u


def find_top(branch: Branch, start: int) -> tuple[Window, float] | None:
    """Find the greatest stress of the smoothed curve.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    start : int
        Place past which to look: the end of the elastic part, or of a yield plateau.

    Returns
    -------
    tuple of Window and float, or None
        What to fit stress against strain in, and the strain of the top as recorded; None
        where the stress still rises at the end. [1]
    """
    stop = len(branch)
    if stop - start < 12:
        return None
    coarse = moving_mean(branch.stress[start:], 2 * ((stop - start) // _COARSE // 2) + 1)
    place = start + int(np.argmax(coarse))
    centre, least, last = (float(branch.run[k]) for k in (place, start, -1))
    for _ in range(_ROUNDS):
        window = choose_window(branch.strain, branch.stress, centre, (start, stop), branch.alike)
        fit = fit_window(branch.strain, branch.stress, window)
        top = fit.top(centre)
        if not least <= top <= last:
            return None
        still = abs(top - centre) <= _STILL * fit.scale
        centre = top
        if still:
            break
    return (window, top) if top + _WITHIN * fit.u_top(top) <= last else None
