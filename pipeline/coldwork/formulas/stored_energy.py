"""Stored energy in dislocations, and what it is compared with.

Stored energy in dislocations only: calorimetry finds more, since point defects
and stacking faults also release heat.

References
----------
.. [1] Humphreys and Hatherly, Recrystallization and Related Annealing Phenomena,
   chapter 2 (density times line energy; from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import not_negative, positive

__all__ = [
    "STORED_ENERGY",
    "STORED_ENERGY_MOLAR",
    "STORED_ENERGY_SPECIFIC",
    "STORED_FRACTION",
    "TEMPERATURE_RISE",
    "stored_energy",
    "stored_energy_molar",
    "stored_energy_molar_sensitivities",
    "stored_energy_sensitivities",
    "stored_energy_specific",
    "stored_energy_specific_sensitivities",
    "stored_fraction",
    "stored_fraction_sensitivities",
    "temperature_rise",
    "temperature_rise_sensitivities",
]


def stored_energy(density: ArrayLike, line_energy: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the energy stored in dislocations, per volume.

    .. math:: u = \rho E

    Parameters
    ----------
    density : array_like, shape (...)
        Dislocation density :math:`\rho`. [m^-2]
    line_energy : array_like, broadcast against `density`
        Energy per length of line :math:`E`. [J/m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Stored energy :math:`u`, NaN where an input is NaN; also the driving pressure
        for recrystallisation in pascal. [J/m^3]

    Raises
    ------
    InvalidArgument
        If any density is negative or infinite, or a line energy zero, negative or
        infinite.

    References
    ----------
    Humphreys and Hatherly, chapter 2 (from memory; line length per volume times
    energy per length).
    """
    rho = not_negative("density", density)
    return np.asarray(rho * positive("line_energy", line_energy))


def stored_energy_sensitivities(
    density: ArrayLike, line_energy: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `stored_energy` by each argument.

    Parameters
    ----------
    density, line_energy : array_like
        As for `stored_energy`. [m^-2], [J/m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/m^3 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `stored_energy` does.
    """
    return {
        "density": positive("line_energy", line_energy),
        "line_energy": not_negative("density", density),
    }


def stored_energy_molar(
    stored_energy: ArrayLike, molar_mass: ArrayLike, mass_density: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the stored energy per mole of atoms.

    .. math:: u_{mol} = u\, M / \rho_m

    Parameters
    ----------
    stored_energy : array_like, shape (...)
        Stored energy per volume :math:`u`. [J/m^3]
    molar_mass : array_like, broadcast against `stored_energy`
        Mass per mole of atoms :math:`M`; the mean for an alloy. [kg/mol]
    mass_density : array_like, broadcast against `stored_energy`
        :math:`\rho_m`. [kg/m^3]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Stored energy per mole, NaN where an input is NaN. [J/mol]

    Raises
    ------
    InvalidArgument
        If any stored energy is negative or infinite, or a molar mass or mass density
        zero, negative or infinite.

    References
    ----------
    Definition of molar volume, M / rho_m.
    """
    u, m = not_negative("stored_energy", stored_energy), positive("molar_mass", molar_mass)
    return np.asarray(u * m / positive("mass_density", mass_density))


def stored_energy_molar_sensitivities(
    stored_energy: ArrayLike, molar_mass: ArrayLike, mass_density: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `stored_energy_molar` by each argument.

    Parameters
    ----------
    stored_energy, molar_mass, mass_density : array_like
        As for `stored_energy_molar`. [J/m^3], [kg/mol], [kg/m^3]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/mol per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `stored_energy_molar` does.
    """
    molar = stored_energy_molar(stored_energy, molar_mass, mass_density)
    m, rho_m = np.asarray(molar_mass), np.asarray(mass_density)
    return {
        "stored_energy": np.asarray(m / rho_m),
        "molar_mass": np.asarray(molar / m),
        "mass_density": np.asarray(-molar / rho_m),
    }


def stored_energy_specific(
    stored_energy: ArrayLike, mass_density: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the stored energy per mass.

    .. math:: u_m = u / \rho_m

    Parameters
    ----------
    stored_energy : array_like, shape (...)
        Stored energy per volume :math:`u`. [J/m^3]
    mass_density : array_like, broadcast against `stored_energy`
        :math:`\rho_m`. [kg/m^3]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Stored energy per mass, NaN where an input is NaN. [J/kg]

    Raises
    ------
    InvalidArgument
        If any stored energy is negative or infinite, or a mass density zero,
        negative or infinite.

    References
    ----------
    Definition of mass density.
    """
    u = not_negative("stored_energy", stored_energy)
    return np.asarray(u / positive("mass_density", mass_density))


def stored_energy_specific_sensitivities(
    stored_energy: ArrayLike, mass_density: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `stored_energy_specific` by each argument.

    Parameters
    ----------
    stored_energy, mass_density : array_like
        As for `stored_energy_specific`. [J/m^3], [kg/m^3]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/kg per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `stored_energy_specific` does.
    """
    specific = stored_energy_specific(stored_energy, mass_density)
    rho_m = np.asarray(mass_density, dtype=np.float64)
    return {
        "stored_energy": np.asarray(1.0 / rho_m),
        "mass_density": np.asarray(-specific / rho_m),
    }


def temperature_rise(
    stored_energy: ArrayLike, mass_density: ArrayLike, heat_capacity: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute by how much the metal would warm if all of it were released as heat.

    .. math:: \Delta T = u / (\rho_m c_p)

    Parameters
    ----------
    stored_energy : array_like, shape (...)
        Stored energy per volume :math:`u`. [J/m^3]
    mass_density : array_like, broadcast against `stored_energy`
        :math:`\rho_m`. [kg/m^3]
    heat_capacity : array_like, broadcast against `stored_energy`
        :math:`c_p`, per mass. [J/(kg.K)]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Rise of temperature without loss, NaN where an input is NaN. [K]

    Raises
    ------
    InvalidArgument
        If any stored energy is negative or infinite, or a mass density or heat
        capacity zero, negative or infinite.

    References
    ----------
    Definition of heat capacity.
    """
    u, rho_m = not_negative("stored_energy", stored_energy), positive("mass_density", mass_density)
    return np.asarray(u / (rho_m * positive("heat_capacity", heat_capacity)))


def temperature_rise_sensitivities(
    stored_energy: ArrayLike, mass_density: ArrayLike, heat_capacity: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `temperature_rise` by each argument.

    Parameters
    ----------
    stored_energy, mass_density, heat_capacity : array_like
        As for `temperature_rise`. [J/m^3], [kg/m^3], [J/(kg.K)]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [K per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `temperature_rise` does.
    """
    rise = temperature_rise(stored_energy, mass_density, heat_capacity)
    rho_m, c = np.asarray(mass_density), np.asarray(heat_capacity)
    return {
        "stored_energy": np.asarray(1.0 / (rho_m * c)),
        "mass_density": np.asarray(-rise / rho_m),
        "heat_capacity": np.asarray(-rise / c),
    }


def stored_fraction(stored_energy: ArrayLike, plastic_work: ArrayLike) -> NDArray[np.float64]:
    r"""Compute which fraction of the plastic work is stored.

    .. math:: \eta = u / W_p

    Parameters
    ----------
    stored_energy : array_like, shape (...)
        Stored energy per volume :math:`u`. [J/m^3]
    plastic_work : array_like, broadcast against `stored_energy`
        Plastic work per volume done on the coupon before the test :math:`W_p`. [J/m^3]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Fraction, NaN where an input is NaN; above 1 is impossible and is a verdict,
        see ``rules``. [1]

    Raises
    ------
    InvalidArgument
        If any stored energy is negative or infinite, or a plastic work zero, negative
        or infinite.

    References
    ----------
    Bever, Holt and Titchener, Prog. Mater. Sci. 17 (1973): some per cent to 15 %, falling
    with strain (from memory).
    """
    u = not_negative("stored_energy", stored_energy)
    return np.asarray(u / positive("plastic_work", plastic_work))


def stored_fraction_sensitivities(
    stored_energy: ArrayLike, plastic_work: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `stored_fraction` by each argument.

    Parameters
    ----------
    stored_energy, plastic_work : array_like
        As for `stored_fraction`. [J/m^3], [J/m^3]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `stored_fraction` does.
    """
    fraction = stored_fraction(stored_energy, plastic_work)
    work = np.asarray(plastic_work, dtype=np.float64)
    return {
        "stored_energy": np.asarray(1.0 / work),
        "plastic_work": np.asarray(-fraction / work),
    }


STORED_ENERGY: Final = Formula(stored_energy, stored_energy_sensitivities)
STORED_ENERGY_MOLAR: Final = Formula(stored_energy_molar, stored_energy_molar_sensitivities)
STORED_ENERGY_SPECIFIC: Final = Formula(
    stored_energy_specific, stored_energy_specific_sensitivities
)
STORED_FRACTION: Final = Formula(stored_fraction, stored_fraction_sensitivities)
TEMPERATURE_RISE: Final = Formula(temperature_rise, temperature_rise_sensitivities)
