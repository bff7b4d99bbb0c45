"""Mean pressure under an indent over its projected area, and a ball's strain.

The pressure that plasticity theory speaks of is force over the area that the
indent covers on the surface. Vickers and Brinell numbers are force over the
larger area of contact, so they are smaller than that pressure.
"""

from math import sin
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.formulas.hardness import FACE_ANGLE, depth_ratio
from coldwork.guards import positive

__all__ = [
    "BRINELL_PROJECTED_PRESSURE",
    "BRINELL_STRAIN",
    "PROJECTED_OVER_CONTACT",
    "PROJECTED_PRESSURE",
    "brinell_projected_pressure",
    "brinell_projected_pressure_sensitivities",
    "brinell_strain",
    "brinell_strain_sensitivities",
    "projected_pressure",
    "projected_pressure_sensitivities",
]

PROJECTED_OVER_CONTACT: Final = sin(FACE_ANGLE / 2.0)  # 0.92718 for the Vickers pyramid [1]


def projected_pressure(hardness: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the mean pressure over the projected area of a Vickers indent.

    .. math:: p = H / \sin(136^\circ / 2)

    Parameters
    ----------
    hardness : array_like, shape (...)
        Vickers hardness :math:`H`, over the area of contact. [Pa]

    Returns
    -------
    ndarray of float64, shape of `hardness`
        Mean pressure :math:`p`, 7.9 % above :math:`H`; NaN where it is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any hardness is zero, negative or infinite.

    References
    ----------
    Geometry of the pyramid of ISO 6507-1:2018: each face leans by 22 degrees,
    so its projection is sin 68 deg of it.

    Examples
    --------
    >>> print(round(float(projected_pressure(200 * 9.80665e6)) / 1e6, 1))
    2115.4
    """
    return np.asarray(positive("hardness", hardness) / PROJECTED_OVER_CONTACT)


def projected_pressure_sensitivities(hardness: ArrayLike) -> dict[str, NDArray[np.float64]]:
    """Differentiate `projected_pressure` by its argument.

    Parameters
    ----------
    hardness : array_like, shape (...)
        As for `projected_pressure`. [Pa]

    Returns
    -------
    dict of str to ndarray, shape ()
        By argument's name; the same for every hardness. [1]

    Raises
    ------
    InvalidArgument
        As `projected_pressure` does.
    """
    positive("hardness", hardness)
    return {"hardness": np.asarray(1.0 / PROJECTED_OVER_CONTACT)}


def brinell_projected_pressure(
    hardness: ArrayLike, force: ArrayLike, ball: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the mean pressure over the projected area of a Brinell indent.

    .. math:: p = \frac{4 F}{\pi d^2} = \frac{H}{1 - F / (\pi D^2 H)}

    Parameters
    ----------
    hardness : array_like, shape (...)
        Brinell hardness :math:`H`, over the area of contact. [Pa]
    force : array_like, broadcast against `hardness`
        Test force :math:`F`. [N]
    ball : array_like, broadcast against `hardness`
        Diameter of the ball :math:`D`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Mean pressure :math:`p`; NaN where an input is NaN, and where so soft a
        metal would let the ball in to its middle. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    Notes
    -----
    A cap of depth h has the area of contact pi D h, so x = h/D = F/(pi D^2 H).
    Its rim obeys (d/2)^2 = h (D - h), so d^2 = 4 D^2 x (1 - x), and
    4F/(pi d^2) = F/(pi D^2 x (1 - x)) = H/(1 - x). The range of the standard,
    0.24 D < d < 0.6 D, is x from 0.015 to 0.1.

    References
    ----------
    ISO 6506-1:2014, definition of HBW; Tabor, The Hardness of Metals, Oxford 1951
    (mean pressure 4F/(pi d^2), Meyer).
    """
    x = depth_ratio(force, hardness, ball)
    return np.asarray(np.asarray(hardness) / (1.0 - x))


def brinell_projected_pressure_sensitivities(
    hardness: ArrayLike, force: ArrayLike, ball: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `brinell_projected_pressure` by each argument.

    Parameters
    ----------
    hardness, force, ball : array_like
        As for `brinell_projected_pressure`. [Pa], [N], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `brinell_projected_pressure` does.
    """
    x = depth_ratio(force, hardness, ball)
    p = np.asarray(hardness) / (1.0 - x)
    log_slope = x / (1.0 - x)  # d ln(1 / (1 - x)) / d ln x
    return {
        "hardness": np.asarray((1.0 - log_slope) / (1.0 - x)),
        "force": np.asarray(p * log_slope / np.asarray(force)),
        "ball": np.asarray(-2.0 * p * log_slope / np.asarray(ball)),
    }


def brinell_strain(
    hardness: ArrayLike, force: ArrayLike, ball: ArrayLike, strain_ratio: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the representative strain of a Brinell indent.

    .. math:: \varepsilon = c\, d / D, \qquad d/D = 2 \sqrt{x (1 - x)}, \quad x = F / (\pi D^2 H)

    Parameters
    ----------
    hardness : array_like, shape (...)
        Brinell hardness :math:`H`. [Pa]
    force : array_like, broadcast against `hardness`
        Test force :math:`F`. [N]
    ball : array_like, broadcast against `hardness`
        Diameter of the ball :math:`D`. [m]
    strain_ratio : array_like, broadcast against `hardness`
        Strain over :math:`d/D`, :math:`c`, near 0.2. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Representative strain; NaN where an input is NaN, and where so soft a
        metal would let the ball in to its middle. [1]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Tabor, The Hardness of Metals, Oxford 1951: strain at the edge 0.2 d/D (from memory).
    """
    ratio = positive("strain_ratio", strain_ratio)
    x = depth_ratio(force, hardness, ball)
    return np.asarray(2.0 * ratio * np.sqrt(x * (1.0 - x)))


def brinell_strain_sensitivities(
    hardness: ArrayLike, force: ArrayLike, ball: ArrayLike, strain_ratio: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `brinell_strain` by each argument.

    Parameters
    ----------
    hardness, force, ball, strain_ratio : array_like
        As for `brinell_strain`. [Pa], [N], [m], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `brinell_strain` does.
    """
    strain = brinell_strain(hardness, force, ball, strain_ratio)
    x = depth_ratio(force, hardness, ball)
    by_log_depth = strain * (1.0 - 2.0 * x) / (2.0 * (1.0 - x))
    return {
        "hardness": np.asarray(-by_log_depth / np.asarray(hardness)),
        "force": np.asarray(by_log_depth / np.asarray(force)),
        "ball": np.asarray(-2.0 * by_log_depth / np.asarray(ball)),
        "strain_ratio": np.asarray(strain / np.asarray(strain_ratio)),
    }


PROJECTED_PRESSURE: Final = Formula(projected_pressure, projected_pressure_sensitivities)
BRINELL_PROJECTED_PRESSURE: Final = Formula(
    brinell_projected_pressure, brinell_projected_pressure_sensitivities
)
BRINELL_STRAIN: Final = Formula(brinell_strain, brinell_strain_sensitivities)
