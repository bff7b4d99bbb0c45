"""Taking out of a strength the hardening that the test's own strain added.

References
----------
.. [1] Voce, J. Inst. Met. 74 (1948) 537-562.
.. [2] Kocks and Mecking, Prog. Mater. Sci. 48 (2003) 171-273,
   doi:10.1016/S0079-6425(02)00003-8.
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import finite, not_negative, positive

__all__ = [
    "UNWOUND_STRESS",
    "hardening_constants",
    "unwound_stress",
    "unwound_stress_sensitivities",
]


def unwound_stress(
    stress: ArrayLike,
    initial_hardening: ArrayLike,
    saturation_stress: ArrayLike,
    strain: ArrayLike,
) -> NDArray[np.float64]:
    r"""Compute the dislocation stress before the test's own strain.

    The hardening law
    :math:`d\sigma/d\varepsilon = \theta_0 (1 - \sigma / \sigma_s)`, run backwards:

    .. math:: \sigma = \sigma_i e^x - \sigma_s (e^x - 1), \qquad
              x = \theta_0 \varepsilon / \sigma_s

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress with the test's strain in it :math:`\sigma_i`, of
        either sign. [Pa]
    initial_hardening : array_like, broadcast against `stress`
        Slope of the flow curve at no dislocation stress :math:`\theta_0`. [Pa]
    saturation_stress : array_like, broadcast against `stress`
        Dislocation stress at which the slope is gone :math:`\sigma_s`. [Pa]
    strain : array_like, broadcast against `stress`
        Macroscopic plastic strain of the test :math:`\varepsilon`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation stress before the test, at or below zero where less stress was
        there than the test adds; `stress` itself where it is at or above
        `saturation_stress`; NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any stress is infinite, a hardening or saturation stress zero, negative or
        infinite, or a strain negative or infinite.

    Notes
    -----
    Both constants are of the dislocation stress, from a flow curve. With
    :math:`x \to 0`, as :math:`\sigma_s` grows, it is :math:`\sigma_i - \theta_0 \varepsilon`.

    References
    ----------
    Voce, J. Inst. Met. 74 (1948) 537-562; Kocks and Mecking, Prog. Mater. Sci. 48
    (2003) 171-273, for the law of the slope (integrated here).
    """
    s, limit, x = _checked(stress, initial_hardening, saturation_stress, strain)
    return np.asarray(np.where(s >= limit, s, s * np.exp(x) - limit * np.expm1(x)))


def unwound_stress_sensitivities(
    stress: ArrayLike,
    initial_hardening: ArrayLike,
    saturation_stress: ArrayLike,
    strain: ArrayLike,
) -> dict[str, NDArray[np.float64]]:
    """Differentiate the relation of `unwound_stress` by each argument.

    Parameters
    ----------
    stress, initial_hardening, saturation_stress, strain : array_like
        As for `unwound_stress`. [Pa], [Pa], [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name, those of the relation also where nothing is unwound.
        [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `unwound_stress` does.
    """
    s, limit, x = _checked(stress, initial_hardening, saturation_stress, strain)
    growth = np.exp(x)
    room = growth * (s / limit - 1.0)
    return {
        "stress": np.asarray(growth),
        "initial_hardening": np.asarray(np.asarray(strain) * room),
        "saturation_stress": np.asarray(-x * room - np.expm1(x)),
        "strain": np.asarray(np.asarray(initial_hardening) * room),
    }


def hardening_constants(
    initial_hardening: float, saturation_stress: float, slope: float
) -> tuple[float, float]:
    r"""Compute the constants of the same hardening law written in density.

    .. math:: \frac{d\rho}{d\varepsilon} = k_1 \sqrt\rho - k_2 \rho, \qquad
              k_1 = 2 \theta_0 / S, \quad k_2 = 2 \theta_0 / \sigma_s

    Parameters
    ----------
    initial_hardening : float
        :math:`\theta_0`. [Pa]
    saturation_stress : float
        :math:`\sigma_s`. [Pa]
    slope : float
        Stress over root of density :math:`S = M \alpha G b`. [N/m]

    Returns
    -------
    k1 : float
        Storage. [m^-1]
    k2 : float
        Dynamic recovery. [1]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Kocks and Mecking, Prog. Mater. Sci. 48 (2003) 171-273 (form; over macroscopic strain,
    so without a further Taylor factor).
    """
    theta = positive("initial_hardening", initial_hardening)
    k1 = 2.0 * theta / positive("slope", slope)
    k2 = 2.0 * theta / positive("saturation_stress", saturation_stress)
    return float(k1), float(k2)


def _checked(
    stress: ArrayLike,
    initial_hardening: ArrayLike,
    saturation_stress: ArrayLike,
    strain: ArrayLike,
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    s = finite("stress", stress)
    theta = positive("initial_hardening", initial_hardening)
    limit = positive("saturation_stress", saturation_stress)
    return s, limit, np.asarray(theta * not_negative("strain", strain) / limit)


UNWOUND_STRESS: Final = Formula(unwound_stress, unwound_stress_sensitivities)
