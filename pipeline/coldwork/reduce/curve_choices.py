"""What is decided about a curve before anything is computed from it."""

from dataclasses import replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import CurveSettings
from coldwork.reduce.curve_branch import Branch
from coldwork.reduce.curve_elastic import PROOF_OFFSET, Elastic, crossing
from coldwork.reduce.curve_top import find_top
from coldwork.reduce.curve_values import Choices, State, state_of
from coldwork.reduce.curve_yield import Yield
from coldwork.statistics.local_polynomial import Window, choose_window, fit_window

__all__ = ["choose", "fitted_places", "is_by_crosshead"]

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

_LEAST: Final = 5  # points that a window needs
_ROUNDS: Final = 3


def choose(
    branch: Branch,
    elastic: Elastic,
    settings: CurveSettings,
    yielding: Yield | None,
    sense: float,
) -> Choices:
    """Decide which points each result is read from.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    elastic : Elastic
        Its elastic part.
    settings : CurveSettings
        Offsets and reported strains.
    yielding : Yield or None
        Its yield point: the greatest force is looked for past the plateau.
    sense : float
        1 in tension, -1 in compression. [1]

    Returns
    -------
    Choices
        Results that the curve does not reach are not in it.
    """
    proof = {}
    for offset in sorted({PROOF_OFFSET, *settings.offsets}):
        found = _proof_window(branch, elastic, offset)
        if found is not None:
            proof[offset] = found
    past = elastic.stop if yielding is None else yielding.end
    top = find_top(branch, past) if sense > 0 else None
    end = len(branch) - 1
    if top is not None:
        rising = np.maximum.accumulate(branch.strain)
        end = int(np.searchsorted(rising, top.near)) - 1
    bare = Choices(
        sense=sense,
        by_crosshead=is_by_crosshead(settings),
        elastic=(elastic.start, elastic.stop),
        stated=settings.slope,
        proof=proof,
        top=top,
        strains={},
        begin=elastic.start,
        stops={},
        end=max(end, elastic.stop),
    )
    return _with_strains(branch, bare, settings.reported_strains)


def fitted_places(
    state: State, choices: Choices, settings: CurveSettings, yielding: Yield | None
) -> IntArray:
    """Give the places of the true curve that the laws are fitted to.

    Parameters
    ----------
    state : State
        The curve.
    choices : Choices
        What was decided.
    settings : CurveSettings
        Range, where one is stated.
    yielding : Yield or None
        Its yield point: by default the laws begin past the plateau.

    Returns
    -------
    ndarray of int64, shape (k,)
        Places of positive stress and strain, by default from the 0.2 % proof stress to the
        end of uniform strain.
    """
    rising = np.maximum.accumulate(state.strain)
    last = state.strain.size
    if settings.fit_between is not None:
        first, last = (int(k) for k in np.searchsorted(rising, settings.fit_between))
    else:
        first = int(np.searchsorted(rising, PROOF_OFFSET))
        if yielding is not None:
            first = max(first, yielding.end - choices.begin)
    positive = (state.strain[first:last] > 0.0) & (state.stress[first:last] > 0.0)
    return first + np.flatnonzero(positive)


def is_by_crosshead(settings: CurveSettings) -> bool:
    """Say whether the strain of the curve is the crosshead's."""
    return settings.strain_from == "crosshead" and settings.stress_is is None


def _proof_window(branch: Branch, elastic: Elastic, offset: float) -> tuple[Window, float] | None:
    place = crossing(branch, elastic.line, offset, elastic.stop)
    if place is None or len(branch) - elastic.stop < _LEAST:
        return None
    line = elastic.line
    near = float(np.median(branch.strain[max(place - 2, 0) : place + 3]))
    window = None
    for _ in range(_ROUNDS):
        window = choose_window(
            branch.strain,
            branch.stress,
            near,
            (elastic.stop, len(branch)),
            branch.alike,
            branch.lasting,
        )
        fit = fit_window(branch.strain, branch.stress, window)
        at = fit.root(line.slope, line.intercept - line.slope * offset, near)
        if not abs(at - near) <= 3.0 * fit.scale:
            return None
        near = at
    return None if window is None else (window, near)


def _with_strains(branch: Branch, bare: Choices, wanted: tuple[float, ...]) -> Choices:
    """Add the reported strains that lie on the true curve."""
    if not wanted:
        return bare
    state = state_of(branch, bare)
    rising = np.maximum.accumulate(state.strain)
    low = bare.elastic[1] - bare.begin
    strains: dict[float, Window] = {}
    stops: dict[float, int] = {}
    if state.strain.size - low < _LEAST:
        return bare
    for strain in sorted(set(wanted)):
        if rising[low] < strain <= rising[-1]:
            strains[strain] = choose_window(
                state.strain,
                state.stress,
                strain,
                (low, state.strain.size),
                branch.alike,
                branch.lasting,
            )
            stops[strain] = int(np.searchsorted(rising, strain)) - 1
    return replace(bare, strains=strains, stops=stops)
