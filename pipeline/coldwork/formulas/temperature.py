r"""What temperature does to a strength: the shear modulus, and the part that heat helps over.

A density carries over from one temperature to another, a stress does not: the modulus falls as
the metal warms, and so does the part of the flow stress that thermal activation overcomes.

References
----------
.. [1] Frost and Ashby, Deformation-Mechanism Maps, Pergamon 1982 (linear law of the modulus and
   its table; from memory).
.. [2] Kocks, Argon and Ashby, Prog. Mater. Sci. 19 (1975) 1-291 (thermal activation past
   obstacles; from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.constants import BOLTZMANN_CONSTANT
from coldwork.formulas.formula import Formula
from coldwork.guards import finite, not_negative, positive

__all__ = [
    "ATHERMAL_TEMPERATURE",
    "SHEAR_MODULUS_AT",
    "TABLE_TEMPERATURE",
    "THERMAL_STRESS",
    "athermal_temperature",
    "athermal_temperature_sensitivities",
    "shear_modulus_at",
    "shear_modulus_at_sensitivities",
    "thermal_stress",
    "thermal_stress_sensitivities",
]

FloatArray = NDArray[np.float64]

TABLE_TEMPERATURE: Final = 300.0  # of Frost and Ashby's moduli [K]
_BARRIER: Final = 2.0 / 3.0  # 1/q, how the energy falls near the full stress [1]
_TAIL: Final = 2.0  # 1/p, how it falls near no stress [1]


def shear_modulus_at(
    modulus: ArrayLike,
    temperature: ArrayLike,
    reference_temperature: ArrayLike,
    slope: ArrayLike,
    melting_point: ArrayLike,
) -> FloatArray:
    r"""Compute the shear modulus at a temperature from that at another.

    .. math:: G(T) = G_{ref} \frac{g(T)}{g(T_{ref})}, \qquad
              g(T) = 1 + s\, \frac{T - 300\,\mathrm{K}}{T_M}, \quad
              s = \frac{T_M}{G_{300}} \frac{dG}{dT}

    Parameters
    ----------
    modulus : array_like, shape (...)
        Shear modulus at the reference temperature :math:`G_{ref}`. [Pa]
    temperature : array_like, broadcast against `modulus`
        :math:`T`. [K]
    reference_temperature : array_like, broadcast against `modulus`
        :math:`T_{ref}`. [K]
    slope : array_like, broadcast against `modulus`
        :math:`s`, relative to the modulus that it was measured on at 300 K. [1]
    melting_point : array_like, broadcast against `modulus`
        :math:`T_M`. [K]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`G(T)`; NaN where an input is NaN, where one of the temperatures is above the
        melting point, and where the line comes down to no modulus. [Pa]

    Raises
    ------
    InvalidArgument
        If any slope is infinite, or another argument zero, negative or infinite.

    Notes
    -----
    The book's slope goes with the book's own modulus at 300 K: of alpha iron 64 GPa, where the
    polycrystal has 82. What carries over to another modulus is how the line falls in
    proportion, and that is what is taken here. The law is a straight line through a slightly
    bent curve: good to some per cent from 77 K to two thirds of the melting point, and not near
    the Curie point of iron.

    References
    ----------
    Frost and Ashby 1982, the modulus in their table of material data (from memory).

    Examples
    --------
    >>> g = shear_modulus_at(42.1e9, 500.0, 300.0, -0.54, 1356.0)
    >>> print(f"{float(g) / 1e9:.2f}")
    38.75
    """
    g, fraction, base = _fractions(
        modulus, temperature, reference_temperature, slope, melting_point
    )
    return np.asarray(g * fraction / base)


def shear_modulus_at_sensitivities(
    modulus: ArrayLike,
    temperature: ArrayLike,
    reference_temperature: ArrayLike,
    slope: ArrayLike,
    melting_point: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `shear_modulus_at` by each argument.

    Parameters
    ----------
    modulus, temperature, reference_temperature, slope, melting_point : array_like
        As for `shear_modulus_at`. [Pa], [K], [K], [1], [K]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `shear_modulus_at` does.
    """
    g, fraction, base = _fractions(
        modulus, temperature, reference_temperature, slope, melting_point
    )
    s, melting = np.asarray(slope, dtype=np.float64), np.asarray(melting_point, dtype=np.float64)
    by_kelvin = g * s / melting / base
    apart = np.asarray(temperature, dtype=np.float64) - np.asarray(reference_temperature)
    by_line = g * apart / base**2  # by s / T_M, the line's slope per kelvin
    return {
        "modulus": np.asarray(fraction / base),
        "temperature": np.asarray(by_kelvin),
        "reference_temperature": np.asarray(-by_kelvin * fraction / base),
        "slope": np.asarray(by_line / melting),
        "melting_point": np.asarray(-by_line * s / melting**2),
    }


def thermal_stress(
    stress_at_zero: ArrayLike, temperature: ArrayLike, athermal_temperature: ArrayLike
) -> FloatArray:
    r"""Compute the part of a flow stress that thermal activation has not overcome.

    .. math:: \sigma_{th} = \sigma_{th,0} \left(1 - (T / T_0)^{2/3}\right)^2

    Parameters
    ----------
    stress_at_zero : array_like, shape (...)
        That part at absolute zero :math:`\sigma_{th,0}`. [Pa]
    temperature : array_like, broadcast against `stress_at_zero`
        Temperature of the test :math:`T`. [K]
    athermal_temperature : array_like, broadcast against `stress_at_zero`
        Temperature :math:`T_0` from which, at the strain rate of the test, nothing of it is
        left; see the function of that name. [K]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\sigma_{th}`, 0 from :math:`T_0` on; NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any stress is negative or infinite, or a temperature zero, negative or infinite.

    Notes
    -----
    A term of the baseline at the test's own temperature; strengths are compared after taking
    it off. The profile has p = 1/2 and q = 3/2, as for obstacles between square and smooth;
    the modulus is taken as constant within it. It is meant for lattice friction of bcc metals
    and for solutes. Where a difference was measured between two temperatures, give that
    instead.

    References
    ----------
    Kocks, Argon and Ashby 1975: g = g_0 (1 - (sigma/sigma_0)^p)^q, solved for the stress at
    g/g_0 = T/T_0 (from memory).
    """
    height, left, _ = _profile(stress_at_zero, temperature, athermal_temperature)
    return np.asarray(height * left**_TAIL)


def thermal_stress_sensitivities(
    stress_at_zero: ArrayLike, temperature: ArrayLike, athermal_temperature: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `thermal_stress` by each argument.

    Parameters
    ----------
    stress_at_zero, temperature, athermal_temperature : array_like
        As for `thermal_stress`. [Pa], [K], [K]

    Returns
    -------
    dict of str to ndarray
        By argument's name, 0 from the athermal temperature on. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `thermal_stress` does.
    """
    height, left, power = _profile(stress_at_zero, temperature, athermal_temperature)
    by_log = height * _TAIL * left ** (_TAIL - 1.0) * _BARRIER * power
    return {
        "stress_at_zero": np.asarray(left**_TAIL),
        "temperature": np.asarray(-by_log / np.asarray(temperature)),
        "athermal_temperature": np.asarray(by_log / np.asarray(athermal_temperature)),
    }


def athermal_temperature(
    activation_energy: ArrayLike, reference_rate: ArrayLike, strain_rate: ArrayLike
) -> FloatArray:
    r"""Compute the temperature from which obstacles are overcome by heat alone.

    .. math:: T_0 = \frac{g_0}{k \ln(\dot\varepsilon_0 / \dot\varepsilon)}

    Parameters
    ----------
    activation_energy : array_like, shape (...)
        Energy of an obstacle at no stress :math:`g_0`, per event. [J]
    reference_rate : array_like, broadcast against `activation_energy`
        :math:`\dot\varepsilon_0`, 1e6 to 1e8 per second. [1/s]
    strain_rate : array_like, broadcast against `activation_energy`
        Strain rate of the test :math:`\dot\varepsilon`. [1/s]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`T_0`; NaN where an input is NaN, and where the strain rate is not below the
        reference: nothing is thermally activated there. [K]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Kocks, Argon and Ashby 1975, rate = reference rate times exp(-g/kT) (from memory).
    """
    return np.asarray(
        positive("activation_energy", activation_energy)
        / (BOLTZMANN_CONSTANT * _log_rates(reference_rate, strain_rate))
    )


def athermal_temperature_sensitivities(
    activation_energy: ArrayLike, reference_rate: ArrayLike, strain_rate: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `athermal_temperature` by each argument.

    Parameters
    ----------
    activation_energy, reference_rate, strain_rate : array_like
        As for `athermal_temperature`. [J], [1/s], [1/s]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [K per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `athermal_temperature` does.
    """
    kelvin = athermal_temperature(activation_energy, reference_rate, strain_rate)
    by_log = kelvin / _log_rates(reference_rate, strain_rate)
    return {
        "activation_energy": np.asarray(kelvin / np.asarray(activation_energy)),
        "reference_rate": np.asarray(-by_log / np.asarray(reference_rate)),
        "strain_rate": np.asarray(by_log / np.asarray(strain_rate)),
    }


def _fractions(
    modulus: ArrayLike,
    temperature: ArrayLike,
    reference_temperature: ArrayLike,
    slope: ArrayLike,
    melting_point: ArrayLike,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the modulus, and the line at both temperatures relative to 300 K."""
    per_kelvin = finite("slope", slope) / positive("melting_point", melting_point)
    at, base = (
        _line(positive(name, kelvin), per_kelvin, np.asarray(melting_point))
        for name, kelvin in (
            ("temperature", temperature),
            ("reference_temperature", reference_temperature),
        )
    )
    return positive("modulus", modulus), at, base


def _line(kelvin: FloatArray, per_kelvin: FloatArray, melting: FloatArray) -> FloatArray:
    fraction = 1.0 + (kelvin - TABLE_TEMPERATURE) * per_kelvin
    return np.asarray(np.where((kelvin <= melting) & (fraction > 0.0), fraction, np.nan))


def _profile(
    stress_at_zero: ArrayLike, temperature: ArrayLike, athermal_temperature: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the height, what is left of 1, and the power of the ratio of temperatures."""
    height = not_negative("stress_at_zero", stress_at_zero)
    limit = positive("athermal_temperature", athermal_temperature)
    power = (positive("temperature", temperature) / limit) ** _BARRIER
    return height, np.asarray(np.maximum(1.0 - power, 0.0)), np.asarray(power)


def _log_rates(reference_rate: ArrayLike, strain_rate: ArrayLike) -> FloatArray:
    ratio = positive("reference_rate", reference_rate) / positive("strain_rate", strain_rate)
    return np.asarray(np.log(np.where(ratio > 1.0, ratio, np.nan)))


SHEAR_MODULUS_AT: Final = Formula(shear_modulus_at, shear_modulus_at_sensitivities)
THERMAL_STRESS: Final = Formula(thermal_stress, thermal_stress_sensitivities)
ATHERMAL_TEMPERATURE: Final = Formula(athermal_temperature, athermal_temperature_sensitivities)
