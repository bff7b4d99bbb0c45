"""Own and shared uncertainty of every result of a curve."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import AREA, EXTENSION, FORCE, SLOPE, CurveSettings, Fit, Valued
from coldwork.reduce.curve_branch import Branch
from coldwork.reduce.curve_laws import FittedLaw
from coldwork.reduce.curve_values import (
    Choices,
    Key,
    State,
    own_noise,
    state_of,
    values_of,
)

__all__ = ["Budget", "budget_of"]

FloatArray = NDArray[np.float64]

_STEP: Final = 1e-5  # relative, of the central differences
_TOE_STEP: Final = 1e-7  # of the toe strain, for the intercept [1]


@dataclass(frozen=True)
class Budget:
    """Results with their sensitivities, and the curves behind the differences.

    Attributes
    ----------
    values, noise : mapping of Key to float
        Results, and their noise with the elastic line held. [SI]
    by_line : mapping of Key to ndarray of float64, shape (2,)
        Derivatives by intercept and slope of the line.
    by_input : mapping of str to mapping of Key to float
        Derivatives by the relative error of each machine input (by the slope itself for
        `SLOPE`).
    state : State
        The curve as it is.
    moves : mapping of str to tuple of ndarray
        Derivatives of true stress and true plastic strain of each point by ``intercept``,
        ``slope`` and each machine input.
    units : mapping of str to float
        Standard uncertainty of each machine input.
    """

    values: Mapping[Key, float]
    noise: Mapping[Key, float]
    by_line: Mapping[Key, FloatArray]
    by_input: Mapping[str, Mapping[Key, float]]
    state: State
    moves: Mapping[str, tuple[FloatArray, FloatArray]]
    units: Mapping[str, float]

    def valued(self, key: Key) -> Valued | None:
        """Give one result with its uncertainties; None where the curve bears none."""
        if not np.isfinite(self.values.get(key, np.nan)):
            return None
        by_line = self.by_line[key]
        of_line = float(by_line @ self.state.line.covariance @ by_line)
        u_own = float(np.sqrt(self.noise[key] ** 2 + of_line))
        sensitivities = {name: by[key] for name, by in self.by_input.items()}
        if not np.isfinite([u_own, *sensitivities.values()]).all():
            return None
        shared = {name: c * self.units[name] for name, c in sensitivities.items()}
        return Valued(self.values[key], u_own, sensitivities, shared)

    def recorded(self, value: float, u_own: float) -> Valued:
        """Make a result of a recorded stress: it goes with force over area alone."""
        sensitivities = dict.fromkeys(self.by_input, 0.0) | {FORCE: value, AREA: -value}
        shared = {name: c * self.units[name] for name, c in sensitivities.items()}
        return Valued(value, u_own, sensitivities, shared)

    def fit(self, law: str, fitted: FittedLaw, places: NDArray[np.int64]) -> Fit:
        """Make a result of a fitted law, with the line and the machine in its uncertainty."""
        stress, strain = (
            np.column_stack([move[k][places] for move in self.moves.values()]) for k in (0, 1)
        )
        shifts = dict(zip(self.moves, fitted.shifts(stress, strain).T, strict=True))
        line = np.column_stack([shifts["intercept"], shifts["slope"]])
        alike = max(fitted.like_neighbours, self.state.branch.long_run)
        covariance = fitted.found.covariance * alike + line @ self.state.line.covariance @ line.T
        fitted_strain = self.state.strain[places]
        noise = np.hypot(
            self.state.branch.noise_stress,
            float(np.median(fitted.by_strain)) * self.state.branch.noise_strain,
        )
        return Fit(
            law=law,
            names=fitted.names,
            parameters=fitted.found.parameters,
            covariance=covariance,
            u_shared={name: shifts[name] * u for name, u in self.units.items()},
            residual_sd=fitted.found.residual_sd,
            degrees_of_freedom=float(fitted.found.degrees_of_freedom),
            between=(float(fitted_strain[0]), float(fitted_strain[-1])),
            misfit=fitted.found.residual_sd / max(float(noise), 1e-300),
        )


def budget_of(branch: Branch, choices: Choices, settings: CurveSettings) -> Budget:
    """Evaluate a curve as it is, rescaled, and with its elastic line moved.

    Parameters
    ----------
    branch : Branch
        The part of the curve that is reduced.
    choices : Choices
        What was decided about it.
    settings : CurveSettings
        The machine's uncertainties.

    Returns
    -------
    Budget
        All results.
    """
    state = state_of(branch, choices)
    slope = state.line.slope
    steps: dict[str, tuple[tuple[float, float], tuple[float, float], float]] = {
        "intercept": ((0.0, 0.0), (_TOE_STEP * slope, 0.0), _TOE_STEP * slope),
        "slope": ((0.0, 0.0), (0.0, _STEP * slope), _STEP * slope),
        FORCE: ((_STEP, 0.0), (0.0, 0.0), _STEP),
        EXTENSION: ((0.0, _STEP), (0.0, 0.0), _STEP),
    }
    slopes: dict[str, dict[Key, float]] = {}
    moves: dict[str, tuple[FloatArray, FloatArray]] = {}
    for name, (scaled, moved, size) in steps.items():
        ends = [
            state_of(
                branch,
                choices,
                (1.0 + sign * scaled[0], 1.0 + sign * scaled[1]),
                (sign * moved[0], sign * moved[1]),
            )
            for sign in (1.0, -1.0)
        ]
        high, low = (values_of(end, choices) for end in ends)
        slopes[name] = {key: (high[key] - low[key]) / (2.0 * size) for key in high}
        moves[name] = (
            (ends[0].stress - ends[1].stress) / (2.0 * size),
            (ends[0].strain - ends[1].strain) / (2.0 * size),
        )
    slopes[AREA] = {key: -c for key, c in slopes[FORCE].items()}
    moves[AREA] = (-moves[FORCE][0], -moves[FORCE][1])
    units = {
        FORCE: settings.force_u_rel,
        EXTENSION: settings.extension_u_rel,
        AREA: settings.area_u_rel,
    }
    if settings.slope is not None:
        units[SLOPE] = settings.slope_u
        slopes[SLOPE], moves[SLOPE] = slopes["slope"], moves["slope"]
    values = values_of(state, choices)
    return Budget(
        values=values,
        noise=own_noise(state, choices),
        by_line={k: np.array([slopes["intercept"][k], slopes["slope"][k]]) for k in values},
        by_input={name: slopes[name] for name in units},
        state=state,
        moves=moves,
        units=units,
    )
