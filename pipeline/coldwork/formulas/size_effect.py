r"""Small indents read hard: from the hardness at a depth to that of a large indent.

Lines that the shape of the indent asks for crowd together as it shrinks, and add to those
that are there:

.. math:: H^2 = H_0^2 (1 + h^* / h)

References
----------
.. [1] Nix and Gao, J. Mech. Phys. Solids 46 (1998) 411-425,
   doi:10.1016/S0022-5096(97)00086-0 (the relation; form as Kucharski et al., Exp. Mech. 56
   (2016) 381, quote it).
"""

from math import sqrt, tan
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.formulas.hardness import FACE_ANGLE
from coldwork.guards import finite, not_negative, positive

__all__ = [
    "BULK_HARDNESS_FROM_LENGTH",
    "BULK_HARDNESS_FROM_STRENGTH",
    "DIAGONAL_OVER_DEPTH",
    "INDENTATION_DEPTH",
    "SIZE_EFFECT_HARDNESS",
    "bulk_hardness_from_length",
    "bulk_hardness_from_length_sensitivities",
    "bulk_hardness_from_strength",
    "bulk_hardness_from_strength_sensitivities",
    "constants_of_line",
    "indentation_depth",
    "indentation_depth_sensitivities",
    "size_effect_hardness",
    "size_effect_hardness_sensitivities",
]

FloatArray = NDArray[np.float64]

DIAGONAL_OVER_DEPTH: Final = 2.0 * sqrt(2.0) * tan(FACE_ANGLE / 2.0)  # 7.0006, Vickers [1]


def indentation_depth(diagonal: ArrayLike) -> FloatArray:
    r"""Compute the depth of a Vickers indent from its mean diagonal.

    .. math:: h = \frac{d}{2 \sqrt 2 \tan 68^\circ} = d / 7.0006

    Parameters
    ----------
    diagonal : array_like, shape (...)
        Mean diagonal :math:`d`. [m]

    Returns
    -------
    ndarray of float64, shape of `diagonal`
        Depth :math:`h` below the surface, NaN where it is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any diagonal is zero, negative or infinite.

    References
    ----------
    Geometry of the pyramid of ISO 6507-1:2018, 136 deg between opposite faces; the standard
    rounds it to d/7.
    """
    return np.asarray(positive("diagonal", diagonal) / DIAGONAL_OVER_DEPTH)


def indentation_depth_sensitivities(diagonal: ArrayLike) -> dict[str, FloatArray]:
    """Differentiate `indentation_depth` by its argument.

    Parameters
    ----------
    diagonal : array_like, shape (...)
        As for `indentation_depth`. [m]

    Returns
    -------
    dict of str to ndarray, shape ()
        By argument's name; the same for every diagonal. [1]

    Raises
    ------
    InvalidArgument
        As `indentation_depth` does.
    """
    positive("diagonal", diagonal)
    return {"diagonal": np.asarray(1.0 / DIAGONAL_OVER_DEPTH)}


def size_effect_hardness(
    bulk_hardness: ArrayLike, depth: ArrayLike, characteristic_depth: ArrayLike
) -> FloatArray:
    r"""Compute the hardness that an indent of some depth reads.

    .. math:: H = H_0 \sqrt{1 + h^* / h}

    Parameters
    ----------
    bulk_hardness : array_like, shape (...)
        Hardness of a large indent :math:`H_0`. [Pa]
    depth : array_like, broadcast against `bulk_hardness`
        Depth of the indent :math:`h`. [m]
    characteristic_depth : array_like, broadcast against `bulk_hardness`
        :math:`h^*`, 0 for a metal without the effect. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Hardness :math:`H`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any hardness or depth is zero, negative or infinite, or a characteristic depth
        negative or infinite.

    Notes
    -----
    Self-similar indenters. Below a depth of some 0.2 um measured hardness falls short of it:
    see ``rules``.

    References
    ----------
    Nix and Gao, J. Mech. Phys. Solids 46 (1998) 411-425.

    Examples
    --------
    >>> print(f"{float(size_effect_hardness(0.581e9, 1e-6, 1.60e-6)) / 1e9:.4f}")
    0.9368
    """
    growth = _growth(depth, characteristic_depth)
    return np.asarray(positive("bulk_hardness", bulk_hardness) * np.sqrt(growth))


def size_effect_hardness_sensitivities(
    bulk_hardness: ArrayLike, depth: ArrayLike, characteristic_depth: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `size_effect_hardness` by each argument.

    Parameters
    ----------
    bulk_hardness, depth, characteristic_depth : array_like
        As for `size_effect_hardness`. [Pa], [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `size_effect_hardness` does.
    """
    hardness = size_effect_hardness(bulk_hardness, depth, characteristic_depth)
    growth = _growth(depth, characteristic_depth)
    h = np.asarray(depth, dtype=np.float64)
    by_length = hardness / (2.0 * growth * h)
    return {
        "bulk_hardness": np.asarray(np.sqrt(growth)),
        "depth": np.asarray(-by_length * np.asarray(characteristic_depth) / h),
        "characteristic_depth": np.asarray(by_length),
    }


def bulk_hardness_from_length(
    hardness: ArrayLike, depth: ArrayLike, characteristic_depth: ArrayLike
) -> FloatArray:
    r"""Compute the hardness of a large indent, the characteristic depth being known.

    .. math:: H_0 = H / \sqrt{1 + h^* / h}

    Parameters
    ----------
    hardness : array_like, shape (...)
        Hardness as read :math:`H`. [Pa]
    depth : array_like, broadcast against `hardness`
        Depth of the indent :math:`h`. [m]
    characteristic_depth : array_like, broadcast against `hardness`
        :math:`h^*` in the coupon's own state: it falls as the metal hardens. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Hardness of a large indent :math:`H_0`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any hardness or depth is zero, negative or infinite, or a characteristic depth
        negative or infinite.

    Notes
    -----
    Not below a depth of some 0.2 um: see ``rules``.

    References
    ----------
    Nix and Gao, J. Mech. Phys. Solids 46 (1998) 411-425.
    """
    growth = _growth(depth, characteristic_depth)
    return np.asarray(positive("hardness", hardness) / np.sqrt(growth))


def bulk_hardness_from_length_sensitivities(
    hardness: ArrayLike, depth: ArrayLike, characteristic_depth: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `bulk_hardness_from_length` by each argument.

    Parameters
    ----------
    hardness, depth, characteristic_depth : array_like
        As for `bulk_hardness_from_length`. [Pa], [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `bulk_hardness_from_length` does.
    """
    bulk = bulk_hardness_from_length(hardness, depth, characteristic_depth)
    growth = _growth(depth, characteristic_depth)
    h = np.asarray(depth, dtype=np.float64)
    by_length = bulk / (2.0 * growth * h)
    return {
        "hardness": np.asarray(1.0 / np.sqrt(growth)),
        "depth": np.asarray(by_length * np.asarray(characteristic_depth) / h),
        "characteristic_depth": np.asarray(-by_length),
    }


def bulk_hardness_from_strength(
    hardness: ArrayLike, depth: ArrayLike, strength: ArrayLike
) -> FloatArray:
    r"""Compute the hardness of a large indent, the strength of the effect being known.

    .. math:: H_0 = \sqrt{H^2 - S / h}, \qquad S = H_0^2 h^*

    Parameters
    ----------
    hardness : array_like, shape (...)
        Hardness as read :math:`H`. [Pa]
    depth : array_like, broadcast against `hardness`
        Depth of the indent :math:`h`. [m]
    strength : array_like, broadcast against `hardness`
        Slope of :math:`H^2` over :math:`1/h`, :math:`S`: in that theory the metal's own,
        whatever its state of hardening; a slope that was fitted to scatter may come out
        below zero. [Pa^2.m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Hardness of a large indent :math:`H_0`; NaN where an input is NaN, and where the
        effect would account for all of the hardness. [Pa]

    Raises
    ------
    InvalidArgument
        If any hardness or depth is zero, negative or infinite, or a strength infinite.

    Notes
    -----
    Not below a depth of some 0.2 um: see ``rules``.

    References
    ----------
    Nix and Gao, J. Mech. Phys. Solids 46 (1998) 411-425: h* goes with 1/H_0^2, so that
    H_0^2 h* has only modulus, Burgers vector, angle and alpha in it.
    """
    h2 = positive("hardness", hardness) ** 2
    left = h2 - finite("strength", strength) / positive("depth", depth)
    return np.asarray(np.sqrt(np.where(left > 0.0, left, np.nan)))


def bulk_hardness_from_strength_sensitivities(
    hardness: ArrayLike, depth: ArrayLike, strength: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `bulk_hardness_from_strength` by each argument.

    Parameters
    ----------
    hardness, depth, strength : array_like
        As for `bulk_hardness_from_strength`. [Pa], [m], [Pa^2.m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `bulk_hardness_from_strength` does.
    """
    bulk = bulk_hardness_from_strength(hardness, depth, strength)
    h = np.asarray(depth, dtype=np.float64)
    return {
        "hardness": np.asarray(np.asarray(hardness) / bulk),
        "depth": np.asarray(np.asarray(strength) / (2.0 * bulk * h**2)),
        "strength": np.asarray(-1.0 / (2.0 * bulk * h)),
    }


def constants_of_line(
    intercept: float, slope: float, covariance: FloatArray
) -> tuple[float, float, FloatArray]:
    r"""Compute bulk hardness and characteristic depth from a line of H^2 over 1/h.

    .. math:: H_0 = \sqrt a, \qquad h^* = s / a

    Parameters
    ----------
    intercept : float
        :math:`a`. [Pa^2]
    slope : float
        :math:`s`, which is :math:`H_0^2 h^*`. [Pa^2.m]
    covariance : ndarray of float64, shape (2, 2)
        Of intercept and slope, in this order. [products of their units]

    Returns
    -------
    bulk_hardness : float
        :math:`H_0`, NaN where the line does not meet 1/h = 0 above zero. [Pa]
    characteristic_depth : float
        :math:`h^*`, NaN there too. [m]
    covariance : ndarray of float64, shape (2, 2)
        Of the two, first order. [products of their units]

    Raises
    ------
    InvalidArgument
        If the intercept or the slope is infinite.

    References
    ----------
    Nix and Gao, J. Mech. Phys. Solids 46 (1998) 411-425 (the line); JCGM 102:2011, 6.2.1.3
    (covariance of several quantities).
    """
    a, s = float(finite("intercept", intercept)), float(finite("slope", slope))
    if not a > 0.0:
        return float("nan"), float("nan"), np.full((2, 2), np.nan)
    by_line = np.array([[0.5 / sqrt(a), 0.0], [-s / a**2, 1.0 / a]])
    return sqrt(a), s / a, np.asarray(by_line @ covariance @ by_line.T)


def _growth(depth: ArrayLike, characteristic_depth: ArrayLike) -> FloatArray:
    """Give 1 + h*/h."""
    length = not_negative("characteristic_depth", characteristic_depth)
    return np.asarray(1.0 + length / positive("depth", depth))


INDENTATION_DEPTH: Final = Formula(indentation_depth, indentation_depth_sensitivities)
SIZE_EFFECT_HARDNESS: Final = Formula(size_effect_hardness, size_effect_hardness_sensitivities)
BULK_HARDNESS_FROM_LENGTH: Final = Formula(
    bulk_hardness_from_length, bulk_hardness_from_length_sensitivities
)
BULK_HARDNESS_FROM_STRENGTH: Final = Formula(
    bulk_hardness_from_strength, bulk_hardness_from_strength_sensitivities
)
