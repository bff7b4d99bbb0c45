r"""The rising branch of a line tension that grows with a logarithm, inverted.

With :math:`y = \ell \sqrt\rho` for a length :math:`\ell` of the order of the Burgers
vector, a stress is in proportion to :math:`y \ln(1/y)`. It rises with density up to
:math:`y = 1/e` and falls beyond, where no dislocations are left to speak of: the branch
that a metal is on is the rising one.

References
----------
.. [1] Corless, Gonnet, Hare, Jeffrey and Knuth, Adv. Comput. Math. 5 (1996) 329-359,
   doi:10.1007/BF02124750: the branch W_-1 of Lambert's function, of which this is -W_-1(-r);
   its series about the branch point (from memory).
.. [2] Halley's iteration, of third order.
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.bounds import refuse
from coldwork.guards import positive

__all__ = ["logarithm_of", "reference_logarithm", "solved_logarithm"]

FloatArray = NDArray[np.float64]

_STEPS: Final = 2  # of Halley: 1e-2, then 1e-7, then 2e-16 at the worst place


def logarithm_of(length: FloatArray, density: FloatArray) -> FloatArray:
    r"""Give :math:`L = \ln(1 / (\ell \sqrt\rho))`, NaN past the branch.

    Parameters
    ----------
    length : ndarray, shape (...)
        :math:`\ell`. [m]
    density : ndarray, broadcast against `length`
        :math:`\rho`. [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`L`, 1 or more; NaN where it would be less. [1]

    References
    ----------
    Definition of the branch, :math:`\ell \sqrt\rho \le 1/e`.
    """
    log = -np.log(length * np.sqrt(density))
    return np.asarray(np.where(log >= 1.0, log, np.nan))


def reference_logarithm(length: FloatArray, reference_density: ArrayLike) -> FloatArray:
    r"""Give :math:`L` at the density that a coefficient was measured at.

    Parameters
    ----------
    length : ndarray, shape (...)
        :math:`\ell`. [m]
    reference_density : array_like, broadcast against `length`
        :math:`\rho_{ref}`. [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`L_{ref}`, above 1. [1]

    Raises
    ------
    InvalidArgument
        If any reference density is zero, negative, infinite, or not on the rising branch:
        no coefficient was ever measured there.

    References
    ----------
    Definition of the branch, :math:`\ell \sqrt\rho < 1/e`.
    """
    rho = positive("reference_density", reference_density)
    log = np.asarray(-np.log(length * np.sqrt(rho)))
    refuse("reference_density", rho, log <= 1.0, "below 1/(e b)^2, on the rising branch,")
    return log


def solved_logarithm(ratio: FloatArray) -> FloatArray:
    r"""Solve :math:`y \ln(1/y) = r` on the rising branch for :math:`L = \ln(1/y)`.

    Parameters
    ----------
    ratio : ndarray, shape (...)
        :math:`r > 0`. [1]

    Returns
    -------
    ndarray of float64, shape of `ratio`
        :math:`L > 1`, to the last digit or two of what :math:`r` says; NaN where
        :math:`r` is NaN, and from :math:`1/e` on, the greatest that there is. [1]

    Notes
    -----
    With :math:`L = 1 + s` it is :math:`s - \ln(1 + s) = \delta`, :math:`\delta = -\ln(e r)`,
    which near the branch point loses no digits to a difference of large numbers. The first two
    terms of the series about that point, :math:`s = \sqrt{2 \delta} + 2 \delta / 3`, put once
    into :math:`s = \delta + \ln(1 + s)`, are within 1.2 % everywhere; two steps of Halley on
    whole arrays end at the last digit.

    References
    ----------
    Corless et al. 1996, branch W_-1 (from memory).
    """
    delta = np.asarray(-np.log(ratio) - 1.0)
    delta = np.where(delta > 0.0, delta, np.nan)
    s = delta + np.log1p(np.sqrt(2.0 * delta) + 2.0 / 3.0 * delta)
    for _ in range(_STEPS):
        excess = s - np.log1p(s) - delta
        slope = s / (1.0 + s)
        s = s - 2.0 * excess * slope / (2.0 * slope**2 - excess / (1.0 + s) ** 2)
    return np.asarray(1.0 + s)
