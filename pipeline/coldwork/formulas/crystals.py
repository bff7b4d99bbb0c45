"""Stiffness of cubic and hexagonal crystals, and what a polycrystal makes of it.

SI only. Constants are arrays that broadcast against one another; a tensor adds its
own axes at the end.
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite, positive

__all__ = [
    "cubic_stiffness",
    "hexagonal_stiffness",
    "hill_shear_modulus",
    "reuss_shear_modulus",
    "stiffness_tensor",
    "voigt_shear_modulus",
    "youngs_modulus_along",
]

_Floats = NDArray[np.float64]

_VOIGT: Final = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])  # pair of axes to Voigt's index


def cubic_stiffness(c11: ArrayLike, c12: ArrayLike, c44: ArrayLike) -> _Floats:
    r"""Give the stiffness matrix of a cubic crystal in its own axes.

    Parameters
    ----------
    c11, c12, c44 : array_like, broadcast against one another, shape (...)
        Elastic constants. [Pa]

    Returns
    -------
    ndarray of float64, shape (..., 6, 6)
        Stiffness in Voigt's notation. [Pa]

    Raises
    ------
    InvalidArgument
        If the crystal is not stable: :math:`C_{44} > 0`, :math:`C_{11} > |C_{12}|` and
        :math:`C_{11} + 2 C_{12} > 0` are needed (Born).

    References
    ----------
    .. [1] Born, Proc. Cambridge Phil. Soc. 36 (1940) 160, conditions of stability of
       cubic crystals.
    """
    a, b, c = np.broadcast_arrays(finite("c11", c11), finite("c12", c12), positive("c44", c44))
    _stable((a > np.abs(b)) & (a + 2.0 * b > 0.0), "c11 > |c12| and c11 + 2 c12 > 0", a)
    matrix = np.zeros((*a.shape, 6, 6))
    for i in range(3):
        for j in range(3):
            matrix[..., i, j] = a if i == j else b
        matrix[..., i + 3, i + 3] = c
    return matrix


def hexagonal_stiffness(
    c11: ArrayLike, c12: ArrayLike, c13: ArrayLike, c33: ArrayLike, c44: ArrayLike
) -> _Floats:
    r"""Give the stiffness matrix of a hexagonal crystal, its sixfold axis along z.

    Parameters
    ----------
    c11, c12, c13, c33, c44 : array_like, broadcast against one another, shape (...)
        Elastic constants. [Pa]

    Returns
    -------
    ndarray of float64, shape (..., 6, 6)
        Stiffness in Voigt's notation, :math:`C_{66} = (C_{11} - C_{12}) / 2`. [Pa]

    Raises
    ------
    InvalidArgument
        If the crystal is not stable: :math:`C_{44} > 0`, :math:`C_{11} > |C_{12}|` and
        :math:`C_{33} (C_{11} + C_{12}) > 2 C_{13}^2` are needed.

    References
    ----------
    .. [1] Mouhat and Coudert, Phys. Rev. B 90 (2014) 224104, hexagonal class.
    """
    a, b, d, e, c = np.broadcast_arrays(
        finite("c11", c11),
        finite("c12", c12),
        finite("c13", c13),
        positive("c33", c33),
        positive("c44", c44),
    )
    sound = (a > np.abs(b)) & (e * (a + b) > 2.0 * d**2)
    _stable(sound, "c11 > |c12| and c33 (c11 + c12) > 2 c13^2", a)
    matrix = np.zeros((*a.shape, 6, 6))
    matrix[..., 0, 0] = matrix[..., 1, 1] = a
    matrix[..., 0, 1] = matrix[..., 1, 0] = b
    matrix[..., 2, 2] = e
    for i in range(2):
        matrix[..., i, 2] = matrix[..., 2, i] = d
        matrix[..., i + 3, i + 3] = c
    matrix[..., 5, 5] = (a - b) / 2.0
    return matrix


def stiffness_tensor(stiffness: _Floats) -> _Floats:
    """Write a stiffness matrix as a tensor of four axes.

    Parameters
    ----------
    stiffness : ndarray, shape (..., 6, 6)
        In Voigt's notation. [Pa]

    Returns
    -------
    ndarray, shape (..., 3, 3, 3, 3)
        The tensor. [Pa]
    """
    first = _VOIGT[:, :, np.newaxis, np.newaxis]
    second = _VOIGT[np.newaxis, np.newaxis, :, :]
    return np.asarray(stiffness[..., first, second])


def voigt_shear_modulus(stiffness: _Floats) -> _Floats:
    r"""Average the shear modulus over all orientations at one strain (Voigt 1889).

    .. math:: G_V = (C_{11}+C_{22}+C_{33} - C_{12}-C_{13}-C_{23} + 3(C_{44}+C_{55}+C_{66})) / 15

    Parameters
    ----------
    stiffness : ndarray, shape (..., 6, 6)
        In Voigt's notation. [Pa]

    Returns
    -------
    ndarray, shape (...)
        Upper bound of the polycrystal's shear modulus. [Pa]

    References
    ----------
    .. [1] Hill, Proc. Phys. Soc. A 65 (1952) 349, equation for :math:`G_V`.
    """
    c = stiffness
    along = c[..., 0, 0] + c[..., 1, 1] + c[..., 2, 2]
    across = c[..., 0, 1] + c[..., 0, 2] + c[..., 1, 2]
    shear = c[..., 3, 3] + c[..., 4, 4] + c[..., 5, 5]
    return np.asarray((along - across + 3.0 * shear) / 15.0)


def reuss_shear_modulus(stiffness: _Floats) -> _Floats:
    r"""Average the shear modulus over all orientations at one stress (Reuss 1929).

    .. math:: 15 / G_R = 4(S_{11}+S_{22}+S_{33} - S_{12}-S_{13}-S_{23}) + 3(S_{44}+S_{55}+S_{66})

    Parameters
    ----------
    stiffness : ndarray, shape (..., 6, 6)
        In Voigt's notation. [Pa]

    Returns
    -------
    ndarray, shape (...)
        Lower bound of the polycrystal's shear modulus. [Pa]

    References
    ----------
    .. [1] Hill, Proc. Phys. Soc. A 65 (1952) 349, equation for :math:`G_R`.
    """
    s = np.linalg.inv(stiffness)
    along = s[..., 0, 0] + s[..., 1, 1] + s[..., 2, 2]
    across = s[..., 0, 1] + s[..., 0, 2] + s[..., 1, 2]
    shear = s[..., 3, 3] + s[..., 4, 4] + s[..., 5, 5]
    return np.asarray(15.0 / (4.0 * (along - across) + 3.0 * shear))


def hill_shear_modulus(stiffness: _Floats) -> _Floats:
    """Give the mean of Voigt's and Reuss's shear moduli (Hill 1952).

    Parameters
    ----------
    stiffness : ndarray, shape (..., 6, 6)
        In Voigt's notation. [Pa]

    Returns
    -------
    ndarray, shape (...)
        Estimate of the polycrystal's shear modulus. [Pa]
    """
    return np.asarray((voigt_shear_modulus(stiffness) + reuss_shear_modulus(stiffness)) / 2.0)


def youngs_modulus_along(stiffness: _Floats, direction: ArrayLike) -> _Floats:
    r"""Give Young's modulus along a direction, :math:`1 / S_{ijkl} d_i d_j d_k d_l`.

    Parameters
    ----------
    stiffness : ndarray, shape (..., 6, 6)
        In Voigt's notation. [Pa]
    direction : array_like, shape (3,)
        In the crystal's Cartesian axes, of any length but 0. [1]

    Returns
    -------
    ndarray, shape (...)
        Young's modulus. [Pa]

    Raises
    ------
    InvalidArgument
        If the direction has no length.

    References
    ----------
    .. [1] Nye, Physical Properties of Crystals (1957), chapter VIII, 7.
    """
    d = np.asarray(direction, dtype=np.float64)
    length = float(np.linalg.norm(d))
    if not length > 0.0:
        message = "direction must have a length, not 0"
        raise InvalidArgument(message)
    x, y, z = d / length
    six = np.array([x * x, y * y, z * z, y * z, x * z, x * y])
    compliance = np.linalg.inv(stiffness)
    return np.asarray(1.0 / np.einsum("i,...ij,j->...", six, compliance, six))


def _stable(sound: NDArray[np.bool_], need: str, c11: _Floats) -> None:
    bad = ~(sound | np.isnan(c11))
    if bad.any():
        message = (
            f"the crystal is not stable: {need} is needed ({int(bad.sum())} bad of {bad.size})"
        )
        raise InvalidArgument(message)
