r"""How far recrystallisation has come, and how long it takes, given constants of its kinetics.

.. math:: X = 1 - e^{-(B t)^n}, \qquad B = B_0 e^{-Q / R T}

Along a schedule what counts is :math:`\int B\, dt` in place of :math:`B t`.

References
----------
.. [1] Johnson and Mehl, Trans. AIME 135 (1939) 416-442; Avrami, J. Chem. Phys. 7 (1939)
   1103-1112, doi:10.1063/1.1750380; Kolmogorov, Izv. Akad. Nauk SSSR 3 (1937) 355-359.
.. [2] Scheil, Arch. Eisenhuettenwes. 8 (1935) 565-567; Cahn, Acta Metall. 4 (1956) 572-575,
   doi:10.1016/0001-6160(56)90158-4 (when parts of a schedule add up; from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import xlogy

from coldwork.formulas.constants import GAS_CONSTANT
from coldwork.formulas.formula import Formula
from coldwork.formulas.schedule import Schedule
from coldwork.guards import between, not_negative, positive

__all__ = [
    "RECRYSTALLISATION_RATE",
    "RECRYSTALLISED_FRACTION",
    "TEMPERATURE_FOR_FRACTION",
    "TIME_FOR_FRACTION",
    "recrystallisation_rate",
    "recrystallisation_rate_sensitivities",
    "recrystallised_fraction",
    "recrystallised_fraction_sensitivities",
    "schedule_progress",
    "schedule_progress_sensitivities",
    "temperature_for_fraction",
    "temperature_for_fraction_sensitivities",
    "time_for_fraction",
    "time_for_fraction_sensitivities",
]

FloatArray = NDArray[np.float64]

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(8)


def recrystallisation_rate(
    prefactor: ArrayLike, activation_energy: ArrayLike, temperature: ArrayLike
) -> FloatArray:
    r"""Compute the rate constant at a temperature.

    .. math:: B = B_0 e^{-Q / R T}

    Parameters
    ----------
    prefactor : array_like, shape (...)
        :math:`B_0`. [1/s]
    activation_energy : array_like, broadcast against `prefactor`
        :math:`Q`, of :math:`B` and not of :math:`B^n`. [J/mol]
    temperature : array_like, broadcast against `prefactor`
        :math:`T`. [K]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`B`, NaN where an input is NaN. [1/s]

    Raises
    ------
    InvalidArgument
        If any prefactor or temperature is zero, negative or infinite, or an activation energy
        negative or infinite.

    Notes
    -----
    A rate constant k in X = 1 - exp(-k t^n) is B^n, and its activation energy n Q.

    References
    ----------
    Arrhenius' law for the rate in Avrami, J. Chem. Phys. 7 (1939) 1103-1112.
    """
    q = not_negative("activation_energy", activation_energy)
    over = q / (GAS_CONSTANT * positive("temperature", temperature))
    return np.asarray(positive("prefactor", prefactor) * np.exp(-over))


def recrystallisation_rate_sensitivities(
    prefactor: ArrayLike, activation_energy: ArrayLike, temperature: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `recrystallisation_rate` by each argument.

    Parameters
    ----------
    prefactor, activation_energy, temperature : array_like
        As for `recrystallisation_rate`. [1/s], [J/mol], [K]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1/s per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `recrystallisation_rate` does.
    """
    rate = recrystallisation_rate(prefactor, activation_energy, temperature)
    kelvin = np.asarray(temperature, dtype=np.float64)
    by_energy = rate / (GAS_CONSTANT * kelvin)
    return {
        "prefactor": np.asarray(rate / np.asarray(prefactor)),
        "activation_energy": np.asarray(-by_energy),
        "temperature": np.asarray(by_energy * np.asarray(activation_energy) / kelvin),
    }


def recrystallised_fraction(progress: ArrayLike, exponent: ArrayLike) -> FloatArray:
    r"""Compute the fraction that has recrystallised.

    .. math:: X = 1 - e^{-p^n}, \qquad p = B t \ \text{or}\ \int B\, dt

    Parameters
    ----------
    progress : array_like, shape (...)
        :math:`p`: rate times time, or `schedule_progress`. [1]
    exponent : array_like, broadcast against `progress`
        :math:`n`, 1 to 2 in most cold-rolled metals. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Fraction :math:`X`, from 0 to 1; NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any progress is negative or infinite, or an exponent zero, negative or infinite.

    Notes
    -----
    Nuclei at random and a driving pressure that stays. Recovery alongside and uneven stored
    energy make the exponent fall as the reaction goes on: constants serve where they were
    measured.

    References
    ----------
    Johnson and Mehl, Trans. AIME 135 (1939) 416-442; Avrami, J. Chem. Phys. 7 (1939) 1103-1112.
    """
    p, n = not_negative("progress", progress), positive("exponent", exponent)
    return np.asarray(-np.expm1(-(p**n)))


def recrystallised_fraction_sensitivities(
    progress: ArrayLike, exponent: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `recrystallised_fraction` by each argument.

    Parameters
    ----------
    progress, exponent : array_like
        As for `recrystallised_fraction`. [1], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name; infinite by a progress of 0 for an exponent below 1. [1 per unit
        of the argument]

    Raises
    ------
    InvalidArgument
        As `recrystallised_fraction` does.
    """
    p, n = not_negative("progress", progress), positive("exponent", exponent)
    power = p**n
    left = np.exp(-power)
    with np.errstate(divide="ignore"):
        slope = n * p ** (n - 1.0) * left
    return {"progress": np.asarray(slope), "exponent": np.asarray(xlogy(power, p) * left)}


def time_for_fraction(fraction: ArrayLike, rate: ArrayLike, exponent: ArrayLike) -> FloatArray:
    r"""Compute how long it takes at one temperature to a fraction.

    .. math:: t = \frac{1}{B} \left(-\ln(1 - X)\right)^{1/n}

    Parameters
    ----------
    fraction : array_like, shape (...)
        :math:`X`. [1]
    rate : array_like, broadcast against `fraction`
        :math:`B` at that temperature. [1/s]
    exponent : array_like, broadcast against `fraction`
        :math:`n`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Time :math:`t`, NaN where an input is NaN. [s]

    Raises
    ------
    InvalidArgument
        If any fraction is not between 0 and 1, or another argument zero, negative or
        infinite.

    References
    ----------
    Avrami, J. Chem. Phys. 7 (1939) 1103-1112, solved for the time.
    """
    x = between("fraction", fraction, 0.0, 1.0)
    n = positive("exponent", exponent)
    return np.asarray((-np.log1p(-x)) ** (1.0 / n) / positive("rate", rate))


def time_for_fraction_sensitivities(
    fraction: ArrayLike, rate: ArrayLike, exponent: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `time_for_fraction` by each argument.

    Parameters
    ----------
    fraction, rate, exponent : array_like
        As for `time_for_fraction`. [1], [1/s], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [s per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `time_for_fraction` does.
    """
    t = time_for_fraction(fraction, rate, exponent)
    x, n = np.asarray(fraction, dtype=np.float64), np.asarray(exponent, dtype=np.float64)
    need = -np.log1p(-x)
    return {
        "fraction": np.asarray(t / (n * need * (1.0 - x))),
        "rate": np.asarray(-t / np.asarray(rate)),
        "exponent": np.asarray(-t * np.log(need) / n**2),
    }


def temperature_for_fraction(
    fraction: ArrayLike,
    time: ArrayLike,
    prefactor: ArrayLike,
    activation_energy: ArrayLike,
    exponent: ArrayLike,
) -> FloatArray:
    r"""Compute the temperature at which a time, such as one hour, brings a fraction.

    .. math:: T = \frac{Q}{R \left(\ln(B_0 t) - \frac{1}{n} \ln(-\ln(1 - X))\right)}

    Parameters
    ----------
    fraction : array_like, shape (...)
        :math:`X`. [1]
    time : array_like, broadcast against `fraction`
        At temperature :math:`t`. [s]
    prefactor, activation_energy : array_like, broadcast against `fraction`
        As for `recrystallisation_rate`. [1/s], [J/mol]
    exponent : array_like, broadcast against `fraction`
        :math:`n`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Temperature :math:`T`; NaN where an input is NaN, and where no temperature is high
        enough in that time. [K]

    Raises
    ------
    InvalidArgument
        If any fraction is not between 0 and 1, or another argument zero, negative or
        infinite.

    References
    ----------
    Avrami, J. Chem. Phys. 7 (1939) 1103-1112, with Arrhenius' rate, solved for the
    temperature.
    """
    log = _log_need(fraction, time, prefactor, exponent)
    q = positive("activation_energy", activation_energy)
    return np.asarray(q / (GAS_CONSTANT * log))


def temperature_for_fraction_sensitivities(
    fraction: ArrayLike,
    time: ArrayLike,
    prefactor: ArrayLike,
    activation_energy: ArrayLike,
    exponent: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `temperature_for_fraction` by each argument.

    Parameters
    ----------
    fraction, time, prefactor, activation_energy, exponent : array_like
        As for `temperature_for_fraction`. [1], [s], [1/s], [J/mol], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [K per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `temperature_for_fraction` does.
    """
    kelvin = temperature_for_fraction(fraction, time, prefactor, activation_energy, exponent)
    by_log = kelvin / _log_need(fraction, time, prefactor, exponent)
    x, n = np.asarray(fraction, dtype=np.float64), np.asarray(exponent, dtype=np.float64)
    need = -np.log1p(-x)
    return {
        "fraction": np.asarray(by_log / (n * need * (1.0 - x))),
        "time": np.asarray(-by_log / np.asarray(time)),
        "prefactor": np.asarray(-by_log / np.asarray(prefactor)),
        "activation_energy": np.asarray(kelvin / np.asarray(activation_energy)),
        "exponent": np.asarray(-by_log * np.log(need) / n**2),
    }


def schedule_progress(
    furnace: Schedule, prefactor: ArrayLike, activation_energy: ArrayLike
) -> FloatArray:
    r"""Compute the progress along a furnace schedule.

    .. math:: p = \int B_0 e^{-Q / R T(t)}\, dt

    Parameters
    ----------
    furnace : Schedule
        Temperature over time. [K], [s]
    prefactor : array_like, shape (...)
        :math:`B_0`. [1/s]
    activation_energy : array_like, broadcast against `prefactor`
        :math:`Q`. [J/mol]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`p`, NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any prefactor is zero, negative or infinite, or an activation energy negative or
        infinite.

    Notes
    -----
    Parts of a schedule add up like this where nucleation and growth keep step with each other
    at all temperatures. Each stretch is cut so that Q/RT changes by no more than 1 in a piece,
    and a piece goes by the Gauss rule of 8 points: exact to the last digits.

    References
    ----------
    Scheil 1935; Cahn, Acta Metall. 4 (1956) 572-575.
    """
    q = not_negative("activation_energy", activation_energy)
    weights, kelvin = _nodes(furnace, q)
    rates = np.exp(-q[..., None] / (GAS_CONSTANT * kelvin))
    return np.asarray(positive("prefactor", prefactor) * (rates @ weights))


def schedule_progress_sensitivities(
    furnace: Schedule, prefactor: ArrayLike, activation_energy: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `schedule_progress` by its two constants.

    Parameters
    ----------
    furnace, prefactor, activation_energy
        As for `schedule_progress`. [K], [s], [1/s], [J/mol]

    Returns
    -------
    dict of str to ndarray
        By the constant's name. [1 per unit of the constant]

    Raises
    ------
    InvalidArgument
        As `schedule_progress` does.
    """
    progress = schedule_progress(furnace, prefactor, activation_energy)
    b, q = np.asarray(prefactor), np.asarray(activation_energy, dtype=np.float64)
    weights, kelvin = _nodes(furnace, q)
    by_energy = np.exp(-q[..., None] / (GAS_CONSTANT * kelvin)) / (GAS_CONSTANT * kelvin)
    return {
        "prefactor": np.asarray(progress / b),
        "activation_energy": np.asarray(-b * (by_energy @ weights)),
    }


def _log_need(
    fraction: ArrayLike, time: ArrayLike, prefactor: ArrayLike, exponent: ArrayLike
) -> FloatArray:
    """Give Q / RT, what the logarithm of the rate has to be below that of its prefactor."""
    x = between("fraction", fraction, 0.0, 1.0)
    at_most = positive("prefactor", prefactor) * positive("time", time)
    log = np.log(at_most) - np.log(-np.log1p(-x)) / positive("exponent", exponent)
    return np.asarray(np.where(log > 0.0, log, np.nan))


def _nodes(furnace: Schedule, activation_energy: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Give weights [s] and temperatures [K] of a rule that is exact for these energies."""
    most = float(np.max(np.nan_to_num(activation_energy), initial=0.0))
    weights, kelvin = [np.zeros(0)], [np.ones(0)]
    for stretch in furnace.stretches():
        fall = most / GAS_CONSTANT * abs(1.0 / stretch.start - 1.0 / stretch.end)
        pieces = int(fall) + 1
        share = (np.arange(pieces)[:, None] + (_NODES + 1.0) / 2.0).ravel() / pieces
        kelvin.append(stretch.start + (stretch.end - stretch.start) * share)
        weights.append(np.tile(_WEIGHTS / 2.0, pieces) * stretch.duration / pieces)
    return np.concatenate(weights), np.concatenate(kelvin)


RECRYSTALLISATION_RATE: Final = Formula(
    recrystallisation_rate, recrystallisation_rate_sensitivities
)
RECRYSTALLISED_FRACTION: Final = Formula(
    recrystallised_fraction, recrystallised_fraction_sensitivities
)
TIME_FOR_FRACTION: Final = Formula(time_for_fraction, time_for_fraction_sensitivities)
TEMPERATURE_FOR_FRACTION: Final = Formula(
    temperature_for_fraction, temperature_for_fraction_sensitivities
)
