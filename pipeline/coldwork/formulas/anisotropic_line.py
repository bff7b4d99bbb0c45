r"""Energy factor of a straight dislocation in an anisotropic crystal.

The sextic problem is solved without its roots. Stroh's matrix :math:`N` of the line has
eigenvalues in conjugate pairs; its function that is :math:`i` above the real axis and
:math:`-i` below holds the Barnett-Lothe tensors,

.. math:: \begin{pmatrix} S & H \\ -L & S^T \end{pmatrix}, \qquad K = \hat b \cdot L \hat b,

and is the limit of :math:`Y \leftarrow (Y - Y^{-1}) / 2` from :math:`Y = N`: Newton's
iteration for the matrix sign of :math:`-iN`, kept real. Equal roots, as in an isotropic
crystal, do it no harm, where eigenvectors would be lost.

References
----------
.. [1] Stroh, Phil. Mag. 3 (1958) 625.
.. [2] Barnett and Lothe, Phys. Norv. 7 (1973) 13.
.. [3] Anderson, Hirth and Lothe, Theory of Dislocations, 3rd ed. (2017), chapter 13.
.. [4] Higham, Functions of Matrices (2008), 5.3 (Newton's iteration for the sign) and 3.2
   (its derivative).
"""

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas.crystals import stiffness_tensor

__all__ = ["UNIFORM_ANGLES", "energy_factor_of_line", "mean_energy_factor"]

_Floats = NDArray[np.float64]

_STEPS: Final = 60
_CLOSE: Final = 1e-15  # relative change at which the iteration has ended
_IN_PLANE: Final = 1e-9  # largest cosine between Burgers vector and plane normal

UNIFORM_ANGLES: Final = np.arange(64) * np.pi / 64  # rad; a periodic mean: exact to rounding


def energy_factor_of_line(
    stiffness: _Floats,
    burgers: ArrayLike,
    normal: ArrayLike,
    angle: ArrayLike,
    changes: _Floats | None = None,
) -> tuple[_Floats, _Floats]:
    r"""Compute K of a line that turns by `angle` from the Burgers vector in its slip plane.

    The line's energy per length is :math:`(K b^2 / 4\pi) \ln(R / r_0)`.

    Parameters
    ----------
    stiffness : ndarray, shape (..., 6, 6)
        In Voigt's notation, in the crystal's Cartesian axes. [Pa]
    burgers, normal : array_like, shape (3,)
        Directions of the Burgers vector and of the plane's normal. [1]
    angle : array_like, shape (a,)
        From Burgers vector to line. [rad]
    changes : ndarray, shape (p, 6, 6), optional
        Derivatives of `stiffness` by p elastic constants. [1]

    Returns
    -------
    factor : ndarray, shape (..., a)
        K. [Pa]
    slopes : ndarray, shape (..., a, p)
        Derivative of K by each of the constants. [1]

    Raises
    ------
    InvalidArgument
        If the Burgers vector does not lie in the plane, or a direction has no length.

    References
    ----------
    .. [1] Barnett and Lothe, Phys. Norv. 7 (1973) 13 (K from L).
    """
    b, n = _unit("burgers", burgers), _unit("normal", normal)
    if abs(float(b @ n)) > _IN_PLANE:
        message = "burgers must lie in the slip plane: its product with the normal is not 0"
        raise InvalidArgument(message)
    angles = np.atleast_1d(np.asarray(angle, dtype=np.float64))
    line = np.cos(angles)[:, np.newaxis] * b + np.sin(angles)[:, np.newaxis] * np.cross(n, b)
    m = np.cross(n, line)  # m, n and the line are right-handed
    ways = np.zeros((0, 6, 6)) if changes is None else changes
    scale = np.max(np.abs(stiffness), axis=(-2, -1), keepdims=True)
    y, slopes = _barnett_lothe(stiffness / scale, ways, m, n)
    factor = -np.einsum("i,...ij,j->...", b, y[..., 3:, :3], b)
    by = -np.einsum("i,...ij,j->...", b, slopes[..., 3:, :3], b)
    return factor * scale[..., 0], by


def mean_energy_factor(
    stiffness: _Floats,
    burgers: ArrayLike,
    normal: ArrayLike,
    angles: Sequence[float] | _Floats,
    fractions: Sequence[float] | _Floats,
    changes: _Floats | None = None,
) -> tuple[_Floats, _Floats]:
    """Average K over a character mix; an angle stands for both senses of turn.

    Parameters
    ----------
    stiffness, burgers, normal, changes
        As in `energy_factor_of_line`.
    angles : sequence of float, a of them
        From Burgers vector to line. [rad]
    fractions : sequence of float, a of them
        Shares of line length, summing to 1. [1]

    Returns
    -------
    factor : ndarray, shape (...)
        Mean of K. [Pa]
    slopes : ndarray, shape (..., p)
        Its derivative by each of the constants. [1]

    Raises
    ------
    InvalidArgument
        As `energy_factor_of_line`.
    """
    turned = np.asarray(angles, dtype=np.float64)
    share = np.asarray(fractions, dtype=np.float64) / 2.0
    both = np.concatenate([turned, -turned])
    factor, slopes = energy_factor_of_line(stiffness, burgers, normal, both, changes)
    weights = np.concatenate([share, share])
    return factor @ weights, np.einsum("a,...ap->...p", weights, slopes)


def _barnett_lothe(
    stiffness: _Floats, ways: _Floats, m: _Floats, n: _Floats
) -> tuple[_Floats, _Floats]:
    """Iterate Stroh's matrix to the Barnett-Lothe matrix, its derivatives carried along.

    Shapes: stiffness (..., 6, 6), ways (p, 6, 6), m (a, 3), n (3,); the results are
    (..., a, 6, 6) and (..., a, p, 6, 6).
    """
    q, r, t = _christoffel(stiffness[..., np.newaxis, :, :], m, n)
    dq, dr, dt = _christoffel(ways, m[:, np.newaxis, :], n)
    y = _stroh(q, r, t)
    dy = _stroh_slope(r, t, dq, dr, dt)
    for _ in range(_STEPS):
        inverse = np.linalg.inv(y)
        step = (y - inverse) / 2.0
        wide = inverse[..., np.newaxis, :, :]
        dy = (dy + wide @ dy @ wide) / 2.0
        moved = float(np.max(np.abs(step - y)) / np.max(np.abs(step)))
        y = step
        if moved <= _CLOSE:
            break
    return y, dy


def _christoffel(stiffness: _Floats, m: _Floats, n: _Floats) -> tuple[_Floats, _Floats, _Floats]:
    """Matrices Q, R and T of Stroh for directions m and n in the plane across the line."""
    tensor = stiffness_tensor(stiffness)
    q = np.einsum("...ijkl,...j,...l->...ik", tensor, m, m)
    r = np.einsum("...ijkl,...j,l->...ik", tensor, m, n)
    t = np.einsum("...ijkl,j,l->...ik", tensor, n, n)
    return q, r, np.broadcast_to(t, q.shape)


def _stroh(q: _Floats, r: _Floats, t: _Floats) -> _Floats:
    inverse, turned = np.linalg.inv(t), np.swapaxes(r, -1, -2)
    n1 = -inverse @ turned
    n3 = r @ inverse @ turned - q
    return np.block([[n1, inverse], [n3, np.swapaxes(n1, -1, -2)]])


def _stroh_slope(r: _Floats, t: _Floats, dq: _Floats, dr: _Floats, dt: _Floats) -> _Floats:
    """Differentiate Stroh's matrix, shape (..., a, p, 6, 6)."""
    inverse = np.linalg.inv(t)[..., np.newaxis, :, :]
    wide = r[..., np.newaxis, :, :]
    turned, d_turned = np.swapaxes(wide, -1, -2), np.swapaxes(dr, -1, -2)
    d_inverse = -inverse @ dt @ inverse
    d1 = -(d_inverse @ turned + inverse @ d_turned)
    d3 = dr @ inverse @ turned + wide @ d_inverse @ turned + wide @ inverse @ d_turned - dq
    return np.block([[d1, d_inverse], [d3, np.swapaxes(d1, -1, -2)]])


def _unit(name: str, direction: ArrayLike) -> _Floats:
    d = np.asarray(direction, dtype=np.float64)
    length = float(np.linalg.norm(d))
    if not length > 0.0:
        message = f"{name} must have a length, not 0"
        raise InvalidArgument(message)
    return d / length
