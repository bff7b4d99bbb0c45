"""Where uniform strain ends: the greatest force of a law of hardening, in closed form.

References
----------
.. [1] Considere, Annales des Ponts et Chaussees 9 (1885) 574-775: the force is
   greatest where the rate of hardening by true strain equals the true stress.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.guards import finite, not_negative, positive

__all__ = ["considere_excess", "hollomon_uniform_strain", "voce_uniform_strain"]

_STEPS = 60  # of the fixed point; each gains a factor of n sigma / m, below 0.01


def considere_excess(
    rate: ArrayLike, stress: ArrayLike, compliance: ArrayLike = 0.0
) -> NDArray[np.float64]:
    r"""Compute by how much hardening still outweighs the loss of cross-section.

    .. math:: \theta (1 - \sigma c) - \sigma, \qquad \theta = d\sigma / d\varepsilon_p

    It is positive before the greatest force, zero there, and negative past it.

    Parameters
    ----------
    rate : array_like, shape (...)
        Hardening rate by plastic strain :math:`\theta`. [Pa]
    stress : array_like, broadcast against `rate`
        True stress :math:`\sigma`. [Pa]
    compliance : array_like, broadcast against `rate`
        One over the elastic slope :math:`c`; 0 for plastic strain alone. [1/Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        The excess, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any rate or stress is infinite, or a compliance negative or infinite.

    Notes
    -----
    From :math:`dF = 0` with :math:`F = \sigma S`, constant volume, and
    :math:`d\varepsilon = d\varepsilon_p + c\, d\sigma`.

    References
    ----------
    Considere, Annales des Ponts et Chaussees 9 (1885) 574-775 (for c = 0).
    """
    s = finite("stress", stress)
    c = not_negative("compliance", compliance)
    return np.asarray(finite("rate", rate) * (1.0 - s * c) - s)


def voce_uniform_strain(
    yield_stress: ArrayLike,
    saturation_stress: ArrayLike,
    initial_hardening: ArrayLike,
    compliance: ArrayLike = 0.0,
) -> NDArray[np.float64]:
    r"""Compute the true plastic strain at the greatest force, Voce's law.

    With :math:`\kappa = \theta_0 / \sigma_s` the stress there solves
    :math:`\kappa (\sigma_s - \sigma)(1 - \sigma c) = \sigma`, and

    .. math:: \varepsilon_u = \frac{1}{\kappa}
              \ln \frac{\sigma_s - \sigma_y}{\sigma_s - \sigma_u}

    Parameters
    ----------
    yield_stress, saturation_stress, initial_hardening : array_like, shape (...)
        As for ``hardening_laws.voce_stress``. [Pa], [Pa], [Pa]
    compliance : array_like, broadcast against them
        One over the elastic slope :math:`c`. [1/Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\varepsilon_u`; 0 where the force falls from the start, NaN where an input
        is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any yield stress is infinite, a compliance negative or infinite, or another
        argument zero, negative or infinite.

    References
    ----------
    Considere, Annales des Ponts et Chaussees 9 (1885) 574-775, for Voce's law (derived
    here).
    """
    start = finite("yield_stress", yield_stress)
    limit = positive("saturation_stress", saturation_stress)
    kappa = positive("initial_hardening", initial_hardening) / limit
    c = not_negative("compliance", compliance)
    b = 1.0 + kappa + kappa * limit * c
    stress = 2.0 * kappa * limit / (b + np.sqrt(b**2 - 4.0 * kappa**2 * limit * c))
    with np.errstate(invalid="ignore", divide="ignore"):
        strain = np.log((limit - start) / (limit - stress)) / kappa
    return np.asarray(np.where(start >= stress, 0.0, strain))


def hollomon_uniform_strain(
    coefficient: ArrayLike, exponent: ArrayLike, compliance: ArrayLike = 0.0
) -> NDArray[np.float64]:
    r"""Compute the true plastic strain at the greatest force, Hollomon's law.

    .. math:: \varepsilon_u = n (1 - K \varepsilon_u^n c)

    Parameters
    ----------
    coefficient, exponent : array_like, shape (...)
        As for ``hardening_laws.hollomon_stress``. [Pa], [1]
    compliance : array_like, broadcast against them
        One over the elastic slope :math:`c`. [1/Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\varepsilon_u`, :math:`n` itself without elastic strain; NaN where an input
        is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any coefficient or exponent is zero, negative or infinite, or a compliance
        negative or infinite.

    References
    ----------
    Considere, Annales des Ponts et Chaussees 9 (1885) 574-775, for Hollomon's law.
    """
    k, n = positive("coefficient", coefficient), positive("exponent", exponent)
    c = not_negative("compliance", compliance)
    strain = n + 0.0 * k * c
    for _ in range(_STEPS):
        strain = n * (1.0 - k * strain**n * c)
    return np.asarray(strain)
