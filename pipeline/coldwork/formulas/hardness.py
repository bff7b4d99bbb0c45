"""Hardness of an indent from its force and its size, for three indenters.

SI only: force in newton, lengths in metre, hardness in pascal. The hardness
number is the hardness in kgf/mm²; that conversion happens when results are
published. Vickers and Brinell divide the force by the area of contact, Knoop
by the area projected on the surface. Whether two diagonals agree well enough
is a verdict, not a formula: see ``rules``.

References
----------
.. [1] ISO 6507-1:2018, Metallic materials, Vickers hardness test, Part 1: test
   method; definition of HV (0.102 x 2 F sin(136 deg / 2) / d^2, N and mm).
.. [2] ISO 6506-1:2014, Metallic materials, Brinell hardness test, Part 1: test
   method; definition of HBW (0.102 x 2 F / (pi D (D - sqrt(D^2 - d^2)))).
.. [3] ISO 4545-1:2017, Metallic materials, Knoop hardness test, Part 1: test
   method; definition of HK (0.102 x 14.229 F / d^2).
"""

from math import pi, radians, sin, tan
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import positive

__all__ = [
    "BRINELL_DIAMETER",
    "BRINELL_HARDNESS",
    "FACE_ANGLE",
    "KNOOP_DIAGONAL",
    "KNOOP_HARDNESS",
    "LONG_EDGE_ANGLE",
    "SHORT_EDGE_ANGLE",
    "VICKERS_DIAGONAL",
    "VICKERS_HARDNESS",
    "brinell_diameter",
    "brinell_diameter_sensitivities",
    "brinell_hardness",
    "brinell_hardness_sensitivities",
    "depth_ratio",
    "knoop_diagonal",
    "knoop_diagonal_sensitivities",
    "knoop_hardness",
    "knoop_hardness_sensitivities",
    "vickers_diagonal",
    "vickers_diagonal_sensitivities",
    "vickers_hardness",
    "vickers_hardness_sensitivities",
]

FACE_ANGLE: Final = radians(136.0)  # between opposite faces of the Vickers pyramid [rad]
LONG_EDGE_ANGLE: Final = radians(172.5)  # between the long edges of the Knoop pyramid [rad]
SHORT_EDGE_ANGLE: Final = radians(130.0)  # between its short edges [rad]
_VICKERS: Final = 2.0 * sin(FACE_ANGLE / 2.0)  # 1.8544: d^2 over the area of contact [1]
_KNOOP: Final = 2.0 * tan(LONG_EDGE_ANGLE / 2.0) / tan(SHORT_EDGE_ANGLE / 2.0)
# 14.229: square of the long diagonal over the projected area [1]


def vickers_hardness(
    force: ArrayLike, diagonal_1: ArrayLike, diagonal_2: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute Vickers hardness, force over the area of contact of the pyramid.

    .. math:: H = 2 \sin(136^\circ / 2)\, F / d^2, \qquad d = (d_1 + d_2) / 2

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    diagonal_1, diagonal_2 : array_like, broadcast against `force`
        The two diagonals of the indent. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Hardness :math:`H`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any force or diagonal is zero, negative or infinite.

    References
    ----------
    ISO 6507-1:2018, definition of HV; printed there with 0.1891 for
    0.102 x 2 sin 68 deg, which is 0.004 % more than the exact constant.

    Examples
    --------
    >>> hv = vickers_hardness(9.80665, 100e-6, 100e-6) / 9.80665e6
    >>> print(round(float(hv), 1))
    185.4
    """
    f = positive("force", force)
    d = (positive("diagonal_1", diagonal_1) + positive("diagonal_2", diagonal_2)) / 2.0
    return np.asarray(_VICKERS * f / d**2)


def vickers_hardness_sensitivities(
    force: ArrayLike, diagonal_1: ArrayLike, diagonal_2: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `vickers_hardness` by each argument.

    Parameters
    ----------
    force, diagonal_1, diagonal_2 : array_like
        As for `vickers_hardness`. [N], [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `vickers_hardness` does.
    """
    h = vickers_hardness(force, diagonal_1, diagonal_2)
    d = (np.asarray(diagonal_1) + np.asarray(diagonal_2)) / 2.0
    by_diagonal = np.asarray(-h / d)  # half of -2 H/d each
    return {
        "force": np.asarray(h / np.asarray(force)),
        "diagonal_1": by_diagonal,
        "diagonal_2": by_diagonal,
    }


def vickers_diagonal(force: ArrayLike, hardness: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the mean diagonal of a Vickers indent; undoes `vickers_hardness`.

    .. math:: d = \sqrt{2 \sin(136^\circ / 2)\, F / H}

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    hardness : array_like, broadcast against `force`
        Vickers hardness :math:`H`. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Mean diagonal :math:`d`, NaN where an input is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any force or hardness is zero, negative or infinite.

    References
    ----------
    ISO 6507-1:2018, definition of HV, solved for d.
    """
    return np.asarray(np.sqrt(_VICKERS * positive("force", force) / positive("hardness", hardness)))


def vickers_diagonal_sensitivities(
    force: ArrayLike, hardness: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `vickers_diagonal` by each argument.

    Parameters
    ----------
    force, hardness : array_like
        As for `vickers_diagonal`. [N], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `vickers_diagonal` does.
    """
    return _root_sensitivities(vickers_diagonal(force, hardness), force, hardness)


def knoop_hardness(force: ArrayLike, long_diagonal: ArrayLike) -> NDArray[np.float64]:
    r"""Compute Knoop hardness, force over the projected area of the pyramid.

    .. math:: H = \frac{2 \tan(172.5^\circ / 2)}{\tan(130^\circ / 2)} \frac{F}{d^2}

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    long_diagonal : array_like, broadcast against `force`
        Long diagonal of the indent :math:`d`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Hardness :math:`H`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any force or diagonal is zero, negative or infinite.

    References
    ----------
    ISO 4545-1:2017, definition of HK; the constant, 14.22896 here, is printed 14.229.
    """
    return np.asarray(
        _KNOOP * positive("force", force) / positive("long_diagonal", long_diagonal) ** 2
    )


def knoop_hardness_sensitivities(
    force: ArrayLike, long_diagonal: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `knoop_hardness` by each argument.

    Parameters
    ----------
    force, long_diagonal : array_like
        As for `knoop_hardness`. [N], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `knoop_hardness` does.
    """
    h = knoop_hardness(force, long_diagonal)
    return {
        "force": np.asarray(h / np.asarray(force)),
        "long_diagonal": np.asarray(-2.0 * h / np.asarray(long_diagonal)),
    }


def knoop_diagonal(force: ArrayLike, hardness: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the long diagonal of a Knoop indent; undoes `knoop_hardness`.

    .. math:: d = \sqrt{14.229\, F / H}

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    hardness : array_like, broadcast against `force`
        Knoop hardness :math:`H`. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Long diagonal :math:`d`, NaN where an input is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any force or hardness is zero, negative or infinite.

    References
    ----------
    ISO 4545-1:2017, definition of HK, solved for d.
    """
    return np.asarray(np.sqrt(_KNOOP * positive("force", force) / positive("hardness", hardness)))


def knoop_diagonal_sensitivities(
    force: ArrayLike, hardness: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `knoop_diagonal` by each argument.

    Parameters
    ----------
    force, hardness : array_like
        As for `knoop_diagonal`. [N], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `knoop_diagonal` does.
    """
    return _root_sensitivities(knoop_diagonal(force, hardness), force, hardness)


def brinell_hardness(
    force: ArrayLike, diameter_1: ArrayLike, diameter_2: ArrayLike, ball: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute Brinell hardness, force over the area of contact of the ball.

    .. math:: H = \frac{2 F}{\pi D (D - \sqrt{D^2 - d^2})}, \qquad d = (d_1 + d_2) / 2

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    diameter_1, diameter_2 : array_like, broadcast against `force`
        Two diameters of the indent at right angles. [m]
    ball : array_like, broadcast against `force`
        Diameter of the ball :math:`D`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Hardness :math:`H`; NaN where an input is NaN, and where the indent is
        as wide as the ball or wider, which no ball can make. [Pa]

    Raises
    ------
    InvalidArgument
        If any force or diameter is zero, negative or infinite.

    Notes
    -----
    The standard wants 0.24 D < d < 0.6 D. Computed from the form without the
    difference of two nearly equal lengths, (D + sqrt(D^2 - d^2)) / d^2.

    References
    ----------
    ISO 6506-1:2014, definition of HBW.
    """
    f = positive("force", force)
    d = (positive("diameter_1", diameter_1) + positive("diameter_2", diameter_2)) / 2.0
    ball = positive("ball", ball)
    return np.asarray(2.0 * f * (ball + _rim(d, ball)) / (pi * ball * d**2))


def brinell_hardness_sensitivities(
    force: ArrayLike, diameter_1: ArrayLike, diameter_2: ArrayLike, ball: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `brinell_hardness` by each argument.

    Parameters
    ----------
    force, diameter_1, diameter_2, ball : array_like
        As for `brinell_hardness`. [N], [m], [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `brinell_hardness` does.
    """
    h = brinell_hardness(force, diameter_1, diameter_2, ball)
    d = (np.asarray(diameter_1) + np.asarray(diameter_2)) / 2.0
    ball = np.asarray(ball, dtype=np.float64)
    rim = _rim(d, ball)
    by_diameter = np.asarray(-0.5 * h * (ball + rim) / (d * rim))
    return {
        "force": np.asarray(h / np.asarray(force)),
        "diameter_1": by_diameter,
        "diameter_2": by_diameter,
        "ball": np.asarray(h * (1.0 / rim - 1.0 / ball)),
    }


def depth_ratio(force: ArrayLike, hardness: ArrayLike, ball: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the depth of a Brinell indent over the diameter of its ball.

    The area of contact of a cap of depth :math:`h` is :math:`\pi D h`, hence

    .. math:: x = h / D = F / (\pi D^2 H)

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    hardness : array_like, broadcast against `force`
        Brinell hardness :math:`H`. [Pa]
    ball : array_like, broadcast against `force`
        Diameter of the ball :math:`D`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`x`; NaN where an input is NaN, and from 1/2 on, where the ball
        would have sunk in to its middle. [1]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    ISO 6506-1:2014, definition of HBW.
    """
    f, h = positive("force", force), positive("hardness", hardness)
    x = f / (pi * positive("ball", ball) ** 2 * h)
    return np.asarray(np.where(x < 0.5, x, np.nan))


def brinell_diameter(force: ArrayLike, hardness: ArrayLike, ball: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the mean diameter of a Brinell indent; undoes `brinell_hardness`.

    .. math:: d = 2 D \sqrt{x (1 - x)}, \qquad x = F / (\pi D^2 H)

    Parameters
    ----------
    force : array_like, shape (...)
        Test force :math:`F`. [N]
    hardness : array_like, broadcast against `force`
        Brinell hardness :math:`H`. [Pa]
    ball : array_like, broadcast against `force`
        Diameter of the ball :math:`D`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Mean diameter :math:`d`; NaN where an input is NaN, and where so soft a
        metal would let the ball in to its middle. [m]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    ISO 6506-1:2014, definition of HBW, solved for d.
    """
    x = depth_ratio(force, hardness, ball)
    return np.asarray(2.0 * np.asarray(ball) * np.sqrt(x * (1.0 - x)))


def brinell_diameter_sensitivities(
    force: ArrayLike, hardness: ArrayLike, ball: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `brinell_diameter` by each argument.

    Parameters
    ----------
    force, hardness, ball : array_like
        As for `brinell_diameter`. [N], [Pa], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `brinell_diameter` does.
    """
    x = depth_ratio(force, hardness, ball)
    d = 2.0 * np.asarray(ball) * np.sqrt(x * (1.0 - x))
    log_slope = (1.0 - 2.0 * x) / (2.0 * (1.0 - x))  # d ln(d/D) / d ln x
    return {
        "force": np.asarray(d * log_slope / np.asarray(force)),
        "hardness": np.asarray(-d * log_slope / np.asarray(hardness)),
        "ball": np.asarray(d * (1.0 - 2.0 * log_slope) / np.asarray(ball)),
    }


def _rim(d: NDArray[np.float64], ball: NDArray[np.float64]) -> NDArray[np.float64]:
    """Give twice the height of the ball's centre over the rim, sqrt(D^2 - d^2), in metre."""
    return np.asarray(np.sqrt(np.where(d < ball, (ball - d) * (ball + d), np.nan)))


def _root_sensitivities(
    d: NDArray[np.float64], force: ArrayLike, hardness: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    return {
        "force": np.asarray(0.5 * d / np.asarray(force)),
        "hardness": np.asarray(-0.5 * d / np.asarray(hardness)),
    }


VICKERS_HARDNESS: Final = Formula(vickers_hardness, vickers_hardness_sensitivities)
VICKERS_DIAGONAL: Final = Formula(vickers_diagonal, vickers_diagonal_sensitivities)
KNOOP_HARDNESS: Final = Formula(knoop_hardness, knoop_hardness_sensitivities)
KNOOP_DIAGONAL: Final = Formula(knoop_diagonal, knoop_diagonal_sensitivities)
BRINELL_HARDNESS: Final = Formula(brinell_hardness, brinell_hardness_sensitivities)
BRINELL_DIAMETER: Final = Formula(brinell_diameter, brinell_diameter_sensitivities)
