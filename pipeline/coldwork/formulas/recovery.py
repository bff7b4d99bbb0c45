r"""Recovery: how the dislocation stress falls in the furnace before new grains come.

.. math:: \frac{d\sigma}{dt} = -\frac{64\, \sigma^2 \nu_D}{9 M^3 \alpha^2 E}\,
          e^{-U_0 / k T} \sinh\frac{\sigma V}{k T}

Dislocations move under the stress that they themselves keep up, thermally activated and both
ways. Two constants, an energy :math:`U_0` and a volume :math:`V`, are the metal's own to be
measured; no others are invented.

References
----------
.. [1] Verdier, Brechet and Guyot, Acta Mater. 47 (1999) 127-134,
   doi:10.1016/S1359-6454(98)00350-4 (the law, for Al-Mg; from memory, equation number not
   seen).
.. [2] Verdier and Brechet, Key Eng. Mater. 103 (1995) 239-242: logarithmic in time.
"""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.integrate import solve_ivp
from scipy.interpolate import CubicHermiteSpline, CubicSpline

from coldwork.formulas.constants import BOLTZMANN_CONSTANT
from coldwork.formulas.formula import Formula
from coldwork.formulas.schedule import Schedule, Stretch
from coldwork.guards import not_negative, positive

__all__ = [
    "RECOVERED_ENERGY",
    "RecoveryLaw",
    "recovered_energy",
    "recovered_energy_sensitivities",
    "recovered_stress",
    "recovered_stress_sensitivities",
    "recovery_rate",
]

FloatArray = NDArray[np.float64]

_RELATIVE: Final = 1e-9  # what the solver may be off by in ln of the stress, a step [1]
_LEAST: Final = 1e-300  # of sV/kT, so that x coth x is 1 and not 0/0 [1]
_MOST: Final = 512  # different stresses that are solved for
_POWERS: Final = {  # powers with which the constants enter the prefactor
    "taylor_factor": -3.0,
    "coefficient": -2.0,
    "youngs_modulus": -1.0,
    "attempt_frequency": 1.0,
}


@dataclass(frozen=True)
class RecoveryLaw:
    """The constants of the law.

    Attributes
    ----------
    activation_energy : float
        At no stress, per event. [J]
    activation_volume : float
        Over macroscopic stress. [m^3]
    taylor_factor : float
        [1]
    coefficient : float
        Of Taylor's relation. [1]
    youngs_modulus : float
        At the temperature of the furnace. [Pa]
    attempt_frequency : float
        Debye's, about 1e13 per second. [1/s]

    Raises
    ------
    InvalidArgument
        If any of them is zero, negative or infinite.
    """

    activation_energy: float
    activation_volume: float
    taylor_factor: float
    coefficient: float
    youngs_modulus: float
    attempt_frequency: float = 1e13

    def __post_init__(self) -> None:
        for name, value in vars(self).items():
            positive(name, value)

    @property
    def prefactor(self) -> float:
        """What stands before the square of the stress. [1/(Pa.s)]."""
        fall = 9.0 * self.taylor_factor**3 * self.coefficient**2 * self.youngs_modulus
        return 64.0 * self.attempt_frequency / fall


def recovery_rate(stress: ArrayLike, temperature: ArrayLike, law: RecoveryLaw) -> FloatArray:
    r"""Compute how fast the dislocation stress changes.

    .. math:: \frac{d\sigma}{dt} = -\frac{64\, \sigma^2 \nu_D}{9 M^3 \alpha^2 E}\,
              e^{-U_0 / k T} \sinh\frac{\sigma V}{k T}

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress :math:`\sigma`. [Pa]
    temperature : array_like, broadcast against `stress`
        :math:`T`. [K]
    law : RecoveryLaw
        Its constants. [SI]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Rate, negative; NaN where an input is NaN, and where the stress alone would take the
        lines over, :math:`\sigma V \ge U_0`: the law does not reach there. [Pa/s]

    Raises
    ------
    InvalidArgument
        If any stress or temperature is zero, negative or infinite.

    Notes
    -----
    A low stress, :math:`\sigma V \ll k T`, falls as :math:`\sigma^{-2}` grows in proportion to
    time; a high one by :math:`(k T / V) \ln(1 + t/\tau)`.

    References
    ----------
    Verdier, Brechet and Guyot, Acta Mater. 47 (1999) 127-134 (from memory).
    """
    s, kelvin = positive("stress", stress), positive("temperature", temperature)
    per_time, _ = _relative_rate(_within(s, law), kelvin, law)
    return np.asarray(-s * per_time)


def recovered_stress(stress: ArrayLike, furnace: Schedule, law: RecoveryLaw) -> FloatArray:
    r"""Compute the dislocation stress that is left at the end of a schedule.

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress before. [Pa]
    furnace : Schedule
        Temperature over time. [s], [K]
    law : RecoveryLaw
        Its constants. [SI]

    Returns
    -------
    ndarray of float64, shape of `stress`
        Dislocation stress after; NaN where it is NaN, and where :math:`\sigma V \ge U_0`. [Pa]

    Raises
    ------
    InvalidArgument
        If any stress is zero, negative or infinite.

    Notes
    -----
    The logarithm of the stress goes along each stretch by the explicit rule of Dormand and
    Prince, eighth order: the law is not stiff, as a stress that falls with the logarithm of
    time has at every time no constant shorter than that time. Beyond 512 different stresses the
    law is solved for 512 and read off between them, by cubics that keep its slopes: to 1e-6.

    References
    ----------
    Verdier, Brechet and Guyot, Acta Mater. 47 (1999) 127-134 (from memory); Hairer, Norsett
    and Wanner, Solving Ordinary Differential Equations I, Springer 1993 (the rule).
    """
    s = _within(positive("stress", stress), law)
    return np.asarray(np.exp(_solved(s, furnace, law)[0]))


def recovered_stress_sensitivities(
    stress: ArrayLike, furnace: Schedule, law: RecoveryLaw
) -> dict[str, FloatArray]:
    r"""Differentiate `recovered_stress` by the stress before and by the law's constants.

    The equations of variation go along with the law itself: with :math:`y = \ln\sigma` and
    :math:`\dot y = -r`, each :math:`\partial y / \partial p` has the rate
    :math:`-(\partial r/\partial y)\, \partial y / \partial p - \partial r / \partial p`.

    Parameters
    ----------
    stress, furnace, law
        As for `recovered_stress`. [Pa], [s], [K], [SI]

    Returns
    -------
    dict of str to ndarray
        By ``stress`` and by each attribute of `law`. [Pa per unit of it]

    Raises
    ------
    InvalidArgument
        As `recovered_stress` does.
    """
    s = _within(positive("stress", stress), law)
    y, by_stress, by_prefactor, by_energy, by_volume = _solved(s, furnace, law)
    left = np.exp(y)
    constants = {
        name: np.asarray(power * left * by_prefactor / getattr(law, name))
        for name, power in _POWERS.items()
    }
    return {
        "stress": np.asarray(left * by_stress / s),
        "activation_energy": np.asarray(left * by_energy / law.activation_energy),
        "activation_volume": np.asarray(left * by_volume / law.activation_volume),
    } | constants


def recovered_energy(
    stored_energy: ArrayLike, stress_before: ArrayLike, stress_after: ArrayLike
) -> FloatArray:
    r"""Compute the stored energy that recovery leaves.

    .. math:: u = u_0 \left(\frac{\sigma}{\sigma_0}\right)^2

    Parameters
    ----------
    stored_energy : array_like, shape (...)
        Before :math:`u_0`. [J/m^3]
    stress_before : array_like, broadcast against `stored_energy`
        Dislocation stress that went with it :math:`\sigma_0`. [Pa]
    stress_after : array_like, broadcast against `stored_energy`
        What recovery leaves of that :math:`\sigma`, 0 for nothing. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Stored energy, the driving pressure after recovery; NaN where an input is NaN. [J/m^3]

    Raises
    ------
    InvalidArgument
        If any energy or stress after is negative or infinite, or a stress before zero,
        negative or infinite.

    Notes
    -----
    Density with the square of the stress, line energy as it was: that grows by a few per cent
    as the lines draw apart, and falls as they find their places in walls.

    References
    ----------
    Taylor's relation with a constant coefficient; Verdier, Brechet and Guyot 1999.
    """
    ratio = _ratio(stress_before, stress_after)
    return np.asarray(not_negative("stored_energy", stored_energy) * ratio**2)


def recovered_energy_sensitivities(
    stored_energy: ArrayLike, stress_before: ArrayLike, stress_after: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `recovered_energy` by each argument.

    Parameters
    ----------
    stored_energy, stress_before, stress_after : array_like
        As for `recovered_energy`. [J/m^3], [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/m^3 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `recovered_energy` does.
    """
    left = recovered_energy(stored_energy, stress_before, stress_after)
    ratio = _ratio(stress_before, stress_after)
    before = np.asarray(stress_before, dtype=np.float64)
    return {
        "stored_energy": np.asarray(ratio**2),
        "stress_before": np.asarray(-2.0 * left / before),
        "stress_after": np.asarray(2.0 * np.asarray(stored_energy) * ratio / before),
    }


def _ratio(stress_before: ArrayLike, stress_after: ArrayLike) -> FloatArray:
    before = positive("stress_before", stress_before)
    return np.asarray(not_negative("stress_after", stress_after) / before)


def _within(stress: FloatArray, law: RecoveryLaw) -> FloatArray:
    """Blank stresses that need no heat."""
    barred = stress * law.activation_volume < law.activation_energy
    return np.asarray(np.where(barred, stress, np.nan))


def _relative_rate(
    stress: FloatArray, kelvin: FloatArray | float, law: RecoveryLaw
) -> tuple[FloatArray, FloatArray]:
    """Give r = -d ln(stress)/dt [1/s], and x coth x, how its sinh goes with x = sV/kT [1]."""
    heat = BOLTZMANN_CONSTANT * kelvin
    x = np.maximum(stress * law.activation_volume / heat, _LEAST)
    half = np.exp(x - law.activation_energy / heat) * -np.expm1(-2.0 * x) / 2.0
    return np.asarray(law.prefactor * stress * half), np.asarray(x / np.tanh(x))


def _solved(stress: FloatArray, furnace: Schedule, law: RecoveryLaw) -> FloatArray:
    """Give ln of the stress after, and its slopes by ln of four things, for every stress.

    They are: the stress before, the prefactor, the energy, the volume. Shape (5, ...).
    """
    known = np.isfinite(stress)
    out = np.full((5, *stress.shape), np.nan)
    before = np.log(stress[known])
    if before.size:
        different, place = np.unique(before, return_inverse=True)
        if different.size <= _MOST:
            out[:, known] = _integrated(different, furnace, law)[:, place]
        else:
            nodes = np.linspace(different[0], different[-1], _MOST)
            rows = _integrated(nodes, furnace, law)
            out[0, known] = CubicHermiteSpline(nodes, rows[0], rows[1])(before)
            out[1:, known] = CubicSpline(nodes, rows[1:], axis=1)(before)
    return out


def _integrated(start: FloatArray, furnace: Schedule, law: RecoveryLaw) -> FloatArray:
    """Take logarithms of stresses along a schedule, and with them the four slopes of each."""

    def along(time: float, state: FloatArray, stretch: Stretch) -> FloatArray:
        rows = state.reshape(5, -1)
        kelvin = stretch.at(time)
        stress = np.exp(np.minimum(rows[0], start))  # a step on trial may go astray, it may not
        per_time, steep = _relative_rate(stress, kelvin, law)
        over = np.full_like(steep, law.activation_energy / (BOLTZMANN_CONSTANT * kelvin))
        own = np.stack([0.0 * over, 0.0 * over + 1.0, -over, steep])
        changes = -per_time * ((1.0 + steep) * rows[1:] + own)
        return np.concatenate([-per_time, changes.ravel()])

    state = np.zeros(5 * start.size)
    state[: start.size], state[start.size : 2 * start.size] = start, 1.0
    step: float | None = None  # the longest of the stretch before, to begin with
    for stretch in furnace.stretches():
        solved = solve_ivp(
            along,
            (0.0, stretch.duration),
            state,
            method="DOP853",
            rtol=_RELATIVE,
            atol=_RELATIVE,
            first_step=None if step is None else min(step, stretch.duration),
            args=(stretch,),
        )
        step = float(np.diff(solved.t).max())
        state = np.asarray(solved.y[:, -1], dtype=np.float64)
    return state.reshape(5, -1)


RECOVERED_ENERGY: Final = Formula(recovered_energy, recovered_energy_sensitivities)
