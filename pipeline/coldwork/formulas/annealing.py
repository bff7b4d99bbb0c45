r"""What drives a boundary through cold-worked metal, and what holds it.

The stored energy per volume is itself the driving pressure, J/m^3 being Pa. Particles and the
boundary's own curvature pull back. A piece of boundary that bulges out grows only if it is
larger than a critical size.

References
----------
.. [1] Smith, Trans. AIME 175 (1948) 15-51 (drag by particles, after Zener; from memory).
.. [2] Bailey and Hirsch, Proc. R. Soc. Lond. A 267 (1962) 11-30,
   doi:10.1098/rspa.1962.0080 (bulging; from memory).
.. [3] Humphreys and Hatherly, Recrystallization and Related Annealing Phenomena, 2nd edition,
   Elsevier 2004, chapters 4 and 7 (from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.bounds import from_to
from coldwork.formulas.formula import Formula
from coldwork.guards import finite, not_negative, positive

__all__ = [
    "CRITICAL_BULGE_RADIUS",
    "CURVATURE_PRESSURE",
    "NET_PRESSURE",
    "ZENER_PRESSURE",
    "critical_bulge_radius",
    "critical_bulge_radius_sensitivities",
    "curvature_pressure",
    "curvature_pressure_sensitivities",
    "net_pressure",
    "net_pressure_sensitivities",
    "zener_pressure",
    "zener_pressure_sensitivities",
]

FloatArray = NDArray[np.float64]


def zener_pressure(
    volume_fraction: ArrayLike, particle_radius: ArrayLike, boundary_energy: ArrayLike
) -> FloatArray:
    r"""Compute the pressure with which particles hold a boundary.

    .. math:: P_Z = \frac{3 f \gamma}{2 r}

    Parameters
    ----------
    volume_fraction : array_like, shape (...)
        Of the particles :math:`f`. [1]
    particle_radius : array_like, broadcast against `volume_fraction`
        :math:`r`. [m]
    boundary_energy : array_like, broadcast against `volume_fraction`
        Of the boundary that moves :math:`\gamma`. [J/m^2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`P_Z`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any fraction is not from 0 to 1, or a radius or energy zero, negative or infinite.

    Notes
    -----
    Incoherent spheres of one size at random: N = f / (4/3 pi r^3) to a volume, 2 r N to an area
    of boundary, each holding with pi r gamma at most. Particles in rows or on boundaries hold
    more; coherent ones twice as much.

    References
    ----------
    Smith, Trans. AIME 175 (1948) 15-51 (after Zener).

    Examples
    --------
    >>> print(f"{float(zener_pressure(0.01, 50e-9, 0.3)) / 1e6:.4f}")
    0.0900
    """
    f = from_to("volume_fraction", volume_fraction, 0.0, 1.0)
    gamma = positive("boundary_energy", boundary_energy)
    return np.asarray(1.5 * f * gamma / positive("particle_radius", particle_radius))


def zener_pressure_sensitivities(
    volume_fraction: ArrayLike, particle_radius: ArrayLike, boundary_energy: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `zener_pressure` by each argument.

    Parameters
    ----------
    volume_fraction, particle_radius, boundary_energy : array_like
        As for `zener_pressure`. [1], [m], [J/m^2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `zener_pressure` does.
    """
    drag = zener_pressure(volume_fraction, particle_radius, boundary_energy)
    r = np.asarray(particle_radius, dtype=np.float64)
    gamma = np.asarray(boundary_energy, dtype=np.float64)
    return {
        "volume_fraction": np.asarray(1.5 * gamma / r),
        "particle_radius": np.asarray(-drag / r),
        "boundary_energy": np.asarray(drag / gamma),
    }


def curvature_pressure(boundary_energy: ArrayLike, radius: ArrayLike) -> FloatArray:
    r"""Compute the pressure with which a boundary's curvature pulls it back.

    .. math:: P_C = \frac{2 \gamma}{R}

    Parameters
    ----------
    boundary_energy : array_like, shape (...)
        :math:`\gamma`. [J/m^2]
    radius : array_like, broadcast against `boundary_energy`
        Radius of curvature :math:`R`, of a sphere: half the diameter of the grain that
        grows. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`P_C`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    Notes
    -----
    Of the grains of a recrystallised metal of mean diameter D it is about 3 gamma / D, that
    is R = 2 D / 3.

    References
    ----------
    Laplace's pressure over a curved surface; Humphreys and Hatherly 2004 (from memory).
    """
    gamma = positive("boundary_energy", boundary_energy)
    return np.asarray(2.0 * gamma / positive("radius", radius))


def curvature_pressure_sensitivities(
    boundary_energy: ArrayLike, radius: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `curvature_pressure` by each argument.

    Parameters
    ----------
    boundary_energy, radius : array_like
        As for `curvature_pressure`. [J/m^2], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `curvature_pressure` does.
    """
    pressure = curvature_pressure(boundary_energy, radius)
    return {
        "boundary_energy": np.asarray(pressure / np.asarray(boundary_energy)),
        "radius": np.asarray(-pressure / np.asarray(radius)),
    }


def net_pressure(
    driving_pressure: ArrayLike, zener_pressure: ArrayLike, curvature_pressure: ArrayLike
) -> FloatArray:
    r"""Compute what is left to drive a boundary.

    .. math:: P = P_D - P_Z - P_C

    Parameters
    ----------
    driving_pressure : array_like, shape (...)
        Stored energy per volume :math:`P_D`, after any recovery. [Pa]
    zener_pressure : array_like, broadcast against `driving_pressure`
        Drag of particles :math:`P_Z`, 0 for none. [Pa]
    curvature_pressure : array_like, broadcast against `driving_pressure`
        :math:`P_C`, 0 for a boundary that is flat. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Net pressure :math:`P`; at or below 0 the boundary is held. NaN where an input is
        NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any pressure is negative or infinite.

    References
    ----------
    Humphreys and Hatherly 2004: sum of the pressures on a boundary (from memory).
    """
    drive = not_negative("driving_pressure", driving_pressure)
    drag = not_negative("zener_pressure", zener_pressure)
    return np.asarray(drive - drag - not_negative("curvature_pressure", curvature_pressure))


def net_pressure_sensitivities(
    driving_pressure: ArrayLike, zener_pressure: ArrayLike, curvature_pressure: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `net_pressure` by each argument.

    Parameters
    ----------
    driving_pressure, zener_pressure, curvature_pressure : array_like
        As for `net_pressure`. [Pa], [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray, shape ()
        By argument's name; the same for all. [1]

    Raises
    ------
    InvalidArgument
        As `net_pressure` does.
    """
    net_pressure(driving_pressure, zener_pressure, curvature_pressure)
    return {
        "driving_pressure": np.asarray(1.0),
        "zener_pressure": np.asarray(-1.0),
        "curvature_pressure": np.asarray(-1.0),
    }


def critical_bulge_radius(boundary_energy: ArrayLike, net_pressure: ArrayLike) -> FloatArray:
    r"""Compute the radius from which a bulge of boundary grows by itself.

    .. math:: R^* = \frac{2 \gamma}{P}

    Parameters
    ----------
    boundary_energy : array_like, shape (...)
        :math:`\gamma`. [J/m^2]
    net_pressure : array_like, broadcast against `boundary_energy`
        What drives it :math:`P`, of either sign: with the drag of particles taken off, and
        without curvature, which is the other side of this balance. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Critical radius :math:`R^*`, half the critical diameter; NaN where an input is NaN,
        and where the pressure is at or below 0, so that no size grows. [m]

    Raises
    ------
    InvalidArgument
        If any energy is zero, negative or infinite, or a pressure infinite.

    Notes
    -----
    The bulge starts from between subgrain boundaries or particles about 2 R* apart.

    References
    ----------
    Bailey and Hirsch, Proc. R. Soc. Lond. A 267 (1962) 11-30.

    Examples
    --------
    >>> print(f"{float(critical_bulge_radius(0.625, 10e6)) * 1e6:.3f}")
    0.125
    """
    p = finite("net_pressure", net_pressure)
    gamma = positive("boundary_energy", boundary_energy)
    return np.asarray(2.0 * gamma / np.where(p > 0.0, p, np.nan))


def critical_bulge_radius_sensitivities(
    boundary_energy: ArrayLike, net_pressure: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `critical_bulge_radius` by each argument.

    Parameters
    ----------
    boundary_energy, net_pressure : array_like
        As for `critical_bulge_radius`. [J/m^2], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name, NaN where no size grows. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `critical_bulge_radius` does.
    """
    radius = critical_bulge_radius(boundary_energy, net_pressure)
    gamma = np.asarray(boundary_energy, dtype=np.float64)
    return {  # radius / pressure, without a pressure of 0 in it
        "boundary_energy": np.asarray(radius / gamma),
        "net_pressure": np.asarray(-(radius**2) / (2.0 * gamma)),
    }


ZENER_PRESSURE: Final = Formula(zener_pressure, zener_pressure_sensitivities)
CURVATURE_PRESSURE: Final = Formula(curvature_pressure, curvature_pressure_sensitivities)
NET_PRESSURE: Final = Formula(net_pressure, net_pressure_sensitivities)
CRITICAL_BULGE_RADIUS: Final = Formula(critical_bulge_radius, critical_bulge_radius_sensitivities)
