"""The results of a curve as a smooth function of its points.

What had to be decided (which points are elastic, which window a stress is read in) is
decided once and kept in `Choices`. With it fixed, the same function is evaluated on the
curve as it is, on the curve with its stress or strain rescaled, and with the elastic line
moved: the differences are the sensitivities.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from coldwork.formulas.plastic_work import elastic_line_work, polyline_work
from coldwork.reduce.curve_branch import Branch
from coldwork.reduce.curve_elastic import fit_line
from coldwork.reduce.curve_points import plastic_states
from coldwork.reduce.curve_top import Top
from coldwork.statistics.local_polynomial import LocalFit, Window, fit_window
from coldwork.statistics.robust_line import Line

__all__ = ["Choices", "Key", "State", "own_noise", "state_of", "values_of"]

FloatArray = NDArray[np.float64]

Key: TypeAlias = tuple[str, float]
"""Name of a result, and the offset or strain that it belongs to (else 0)."""


@dataclass(frozen=True)
class Choices:
    """What was decided about a curve, in places of its branch.

    Attributes
    ----------
    sense : float
        1 in tension, -1 in compression. [1]
    by_crosshead : bool
        Whether the strain is the crosshead's.
    elastic : tuple of int
        Where the line is fitted.
    stated : float or None
        Slope as stated. [Pa]
    proof : mapping of float to tuple of Window and float
        By offset: where to fit stress against strain, and the strain to begin from. [1]
    top : Top or None
        The same for the greatest stress.
    strains : mapping of float to Window
        By true plastic strain: where to fit true stress against it.
    begin : int
        First place of the true curve.
    stops : mapping of float to int
        By reported strain: last place of the polyline before it.
    end : int
        Last place before the end of uniform strain.
    """

    sense: float
    by_crosshead: bool
    elastic: tuple[int, int]
    stated: float | None
    proof: Mapping[float, tuple[Window, float]]
    top: Top | None
    strains: Mapping[float, Window]
    begin: int
    stops: Mapping[float, int]
    end: int


@dataclass(frozen=True)
class State:
    """A curve with its elastic line, and the true curve that they make.

    Attributes
    ----------
    branch : Branch
        The points.
    line : Line
        Elastic line of stress over strain as recorded.
    stress, strain : ndarray of float64, shape (k,)
        True stress and true plastic strain from ``Choices.begin`` to ``Choices.end``.
        [Pa], [1]
    work_before : float
        Of the elastic line up to the first of these. [J/m3]
    """

    branch: Branch
    line: Line
    stress: FloatArray
    strain: FloatArray
    work_before: float


def state_of(
    branch: Branch,
    choices: Choices,
    scales: tuple[float, float] = (1.0, 1.0),
    moved: tuple[float, float] = (0.0, 0.0),
) -> State:
    """Give the curve's state, with its stress and strain rescaled and its line moved.

    Parameters
    ----------
    branch : Branch
        The points as recorded.
    choices : Choices
        What was decided.
    scales : tuple of float
        Factors on stress and strain. [1]
    moved : tuple of float
        Added to intercept and slope of the line. [Pa], [Pa]

    Returns
    -------
    State
        With everything recomputed from the rescaled points.
    """
    if scales != (1.0, 1.0):
        by_stress, by_strain = scales
        branch = replace(
            branch,
            stress=branch.stress * by_stress,
            strain=branch.strain * by_strain,
            noise_stress=branch.noise_stress * by_stress,
            noise_strain=branch.noise_strain * by_strain,
        )
    stated = None if choices.stated is None else choices.stated + moved[1]
    line = fit_line(branch, branch.stress, branch.strain, choices.elastic, stated)
    free = 0.0 if choices.stated is not None else moved[1]
    line = replace(line, intercept=line.intercept + moved[0], slope=line.slope + free)
    here = slice(choices.begin, choices.end + 1)
    toe = -line.intercept / line.slope
    stress, strain = _true(choices, branch.stress[here], branch.strain[here] - toe, line)
    before = 0.0  # by definition where the elastic line is the machine's
    if not choices.by_crosshead:
        first = choices.sense * (float(branch.strain[choices.begin]) - toe)
        before = elastic_line_work(line.slope, first)
    return State(branch, line, stress, strain, before)


def values_of(state: State, choices: Choices) -> dict[Key, float]:
    """Evaluate every result that the points determine.

    Parameters
    ----------
    state : State
        The curve.
    choices : Choices
        What was decided.

    Returns
    -------
    dict of Key to float
        ``slope``, ``toe``, ``proof`` by offset, ``top`` (smoothed greatest stress),
        ``total_at_top``, ``elongation``, ``uniform``, ``work_to_uniform``; by reported
        strain ``flow``, ``work`` and ``rate``. [SI]
    """
    line, branch = state.line, state.branch
    toe = -line.intercept / line.slope
    values: dict[Key, float] = {("slope", 0.0): line.slope, ("toe", 0.0): toe}
    for offset, (window, near) in choices.proof.items():
        fit = fit_window(branch.strain, branch.stress, window)
        values["proof", offset] = fit.value(_meet(fit, line, offset, near))
    if choices.top is not None:
        top, at = _top(state, choices)
        sigma, uniform = _true(choices, np.array([top]), np.array([at - toe]), line)
        values |= {
            ("top", 0.0): top,
            ("total_at_top", 0.0): at - toe,
            ("elongation", 0.0): at - toe - top / line.slope,
            ("uniform", 0.0): float(uniform[0]),
            ("work_to_uniform", 0.0): _work(
                state, choices.end - choices.begin, float(sigma[0]), float(uniform[0])
            ),
        }
    for strain, window in choices.strains.items():
        fit = fit_window(state.strain, state.stress, window)
        flow = fit.value(strain)
        values["flow", strain] = flow
        values["rate", strain] = fit.slope(strain)
        values["work", strain] = _work(state, choices.stops[strain], flow, strain)
    return values


def own_noise(state: State, choices: Choices) -> dict[Key, float]:
    """Give the standard uncertainty of each result from noise, the elastic line aside.

    Parameters
    ----------
    state : State
        The curve as it is.
    choices : Choices
        What was decided.

    Returns
    -------
    dict of Key to float
        For the keys of `values_of`; 0 where only the line counts. [SI]
    """
    line, branch = state.line, state.branch
    noise: dict[Key, float] = {("slope", 0.0): 0.0, ("toe", 0.0): 0.0}
    for offset, (window, near) in choices.proof.items():
        fit = fit_window(branch.strain, branch.stress, window)
        at = _meet(fit, line, offset, near)
        noise["proof", offset] = fit.u_value(at) * line.slope / abs(line.slope - fit.slope(at))
    if choices.top is not None:
        fit = fit_window(branch.strain, branch.stress, choices.top.window)
        at = fit.top(choices.top.near)
        u_at = max(fit.u_top(at), choices.top.least_u)
        sigma = float(fit.value(at)) * (1.0 + at)
        noise |= {
            ("top", 0.0): fit.u_value(at),
            ("total_at_top", 0.0): u_at,
            ("elongation", 0.0): float(np.hypot(u_at, fit.u_value(at) / line.slope)),
            ("uniform", 0.0): u_at / (1.0 + at),
            ("work_to_uniform", 0.0): float(
                np.hypot(sigma * u_at / (1.0 + at), _work_noise(state, state.stress.size))
            ),
        }
    for strain, window in choices.strains.items():
        fit = fit_window(state.strain, state.stress, window)
        noise["flow", strain] = fit.u_value(strain)
        noise["rate", strain] = fit.u_slope(strain)
        noise["work", strain] = _work_noise(state, choices.stops[strain])
    return noise


def _true(
    choices: Choices, stress: FloatArray, strain: FloatArray, line: Line
) -> tuple[FloatArray, FloatArray]:
    return plastic_states(
        stress, strain, line.slope, choices.sense, by_crosshead=choices.by_crosshead
    )


def _top(state: State, choices: Choices) -> tuple[float, float]:
    """Stress and strain as recorded of the top; NaN where it runs away from its window."""
    if choices.top is None:
        return np.nan, np.nan
    fit = fit_window(state.branch.strain, state.branch.stress, choices.top.window)
    at = fit.top(choices.top.near)
    greatest = float(state.branch.mean.max())
    value = fit.value(at)
    return (value, at) if 0.5 * greatest < value < 2.0 * greatest else (np.nan, np.nan)


def _meet(fit: LocalFit, line: Line, offset: float, near: float) -> float:
    """Strain where the fitted curve meets the parallel of the line."""
    return fit.root(line.slope, line.intercept - line.slope * offset, near)


def _work(state: State, stop: int, stress: float, strain: float) -> float:
    """Work along the polyline up to a place, and on to a state of its own."""
    along = slice(0, stop + 1)
    return state.work_before + polyline_work(
        np.append(state.stress[along], stress), np.append(state.strain[along], strain)
    )


def _work_noise(state: State, stop: int) -> float:
    """Give the standard uncertainty of a polyline's work from independent noise of its points."""
    by_stress = float(np.sum(np.diff(state.strain[:stop]) ** 2))
    by_strain = float(np.sum(np.diff(state.stress[:stop]) ** 2))
    return float(
        np.hypot(
            state.branch.noise_stress * np.sqrt(by_stress),
            state.branch.noise_strain * np.sqrt(by_strain),
        )
    )
