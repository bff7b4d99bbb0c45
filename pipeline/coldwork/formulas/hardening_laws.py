"""Flow stress along the plastic strain: the laws of Voce and Hollomon.

References
----------
.. [1] Voce, J. Inst. Met. 74 (1948) 537-562.
.. [2] Hollomon, Trans. AIME 162 (1945) 268-290.
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import finite, positive

__all__ = [
    "HOLLOMON_STRESS",
    "VOCE_STRESS",
    "hollomon_stress",
    "hollomon_stress_sensitivities",
    "hollomon_work",
    "voce_stress",
    "voce_stress_sensitivities",
    "voce_work",
]

FloatArray = NDArray[np.float64]


def voce_stress(
    strain: ArrayLike,
    yield_stress: ArrayLike,
    saturation_stress: ArrayLike,
    initial_hardening: ArrayLike,
) -> FloatArray:
    r"""Compute the flow stress after Voce.

    .. math:: \sigma = \sigma_s - (\sigma_s - \sigma_y)\, e^{-\theta_0 \varepsilon / \sigma_s}

    which integrates :math:`d\sigma/d\varepsilon = \theta_0 (1 - \sigma / \sigma_s)`.

    Parameters
    ----------
    strain : array_like, shape (...)
        True plastic strain :math:`\varepsilon`, of either sign. [1]
    yield_stress : array_like, broadcast against `strain`
        Flow stress at no plastic strain :math:`\sigma_y`. [Pa]
    saturation_stress : array_like, broadcast against `strain`
        Flow stress at which hardening is gone :math:`\sigma_s`. [Pa]
    initial_hardening : array_like, broadcast against `strain`
        Hardening rate that the line has at no stress :math:`\theta_0`; the rate at
        :math:`\sigma_y` is less by :math:`1 - \sigma_y / \sigma_s`. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        True flow stress :math:`\sigma`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any strain or yield stress is infinite, or a saturation stress or hardening
        zero, negative or infinite.

    References
    ----------
    Voce, J. Inst. Met. 74 (1948) 537-562, with the constants of relation 6 (Kocks and
    Mecking, Prog. Mater. Sci. 48 (2003) 171-273, doi:10.1016/S0079-6425(02)00003-8).
    """
    _, start, limit, theta, decay = _voce(
        strain, yield_stress, saturation_stress, initial_hardening
    )
    del theta
    return np.asarray(limit - (limit - start) * decay)


def voce_stress_sensitivities(
    strain: ArrayLike,
    yield_stress: ArrayLike,
    saturation_stress: ArrayLike,
    initial_hardening: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `voce_stress` by each argument.

    Parameters
    ----------
    strain, yield_stress, saturation_stress, initial_hardening : array_like
        As for `voce_stress`. [1], [Pa], [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `voce_stress` does.
    """
    x, start, limit, theta, decay = _voce(
        strain, yield_stress, saturation_stress, initial_hardening
    )
    room = (limit - start) * decay
    return {
        "strain": np.asarray(room * theta / limit),
        "yield_stress": decay,
        "saturation_stress": np.asarray(1.0 - decay - room * theta * x / limit**2),
        "initial_hardening": np.asarray(room * x / limit),
    }


def voce_work(
    strain: ArrayLike,
    yield_stress: ArrayLike,
    saturation_stress: ArrayLike,
    initial_hardening: ArrayLike,
) -> FloatArray:
    r"""Compute the plastic work per volume of `voce_stress` up to a strain.

    .. math:: W = \sigma_s \varepsilon - (\sigma_s - \sigma_y) \frac{\sigma_s}{\theta_0}
              \left(1 - e^{-\theta_0 \varepsilon / \sigma_s}\right)

    Parameters
    ----------
    strain, yield_stress, saturation_stress, initial_hardening : array_like
        As for `voce_stress`. [1], [Pa], [Pa], [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Work :math:`W`, NaN where an input is NaN. [J/m3]

    Raises
    ------
    InvalidArgument
        As `voce_stress` does.

    References
    ----------
    The integral of `voce_stress` over the strain, from 0.
    """
    x, start, limit, theta, _ = _voce(strain, yield_stress, saturation_stress, initial_hardening)
    rise = -np.expm1(-theta * x / limit)
    return np.asarray(limit * x - (limit - start) * limit / theta * rise)


def hollomon_stress(strain: ArrayLike, coefficient: ArrayLike, exponent: ArrayLike) -> FloatArray:
    r"""Compute the flow stress after Hollomon.

    .. math:: \sigma = K \varepsilon^n

    Parameters
    ----------
    strain : array_like, shape (...)
        True plastic strain :math:`\varepsilon`. [1]
    coefficient : array_like, broadcast against `strain`
        Strength at a strain of 1 :math:`K`. [Pa]
    exponent : array_like, broadcast against `strain`
        :math:`n`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        True flow stress :math:`\sigma`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Hollomon, Trans. AIME 162 (1945) 268-290 (form; over plastic strain here).
    """
    x, k, n = _hollomon(strain, coefficient, exponent)
    return np.asarray(k * x**n)


def hollomon_stress_sensitivities(
    strain: ArrayLike, coefficient: ArrayLike, exponent: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `hollomon_stress` by each argument.

    Parameters
    ----------
    strain, coefficient, exponent : array_like
        As for `hollomon_stress`. [1], [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `hollomon_stress` does.
    """
    x, k, n = _hollomon(strain, coefficient, exponent)
    power = x**n
    return {
        "strain": np.asarray(n * k * power / x),
        "coefficient": np.asarray(power + 0.0 * k),
        "exponent": np.asarray(k * power * np.log(x)),
    }


def hollomon_work(strain: ArrayLike, coefficient: ArrayLike, exponent: ArrayLike) -> FloatArray:
    r"""Compute the plastic work per volume of `hollomon_stress` up to a strain.

    .. math:: W = K \varepsilon^{n + 1} / (n + 1)

    Parameters
    ----------
    strain, coefficient, exponent : array_like
        As for `hollomon_stress`. [1], [Pa], [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Work :math:`W`, NaN where an input is NaN. [J/m3]

    Raises
    ------
    InvalidArgument
        As `hollomon_stress` does.

    References
    ----------
    The integral of `hollomon_stress` over the strain, from 0.
    """
    x, k, n = _hollomon(strain, coefficient, exponent)
    return np.asarray(k * x ** (n + 1.0) / (n + 1.0))


def _voce(
    strain: ArrayLike,
    yield_stress: ArrayLike,
    saturation_stress: ArrayLike,
    initial_hardening: ArrayLike,
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]:
    x, start = finite("strain", strain), finite("yield_stress", yield_stress)
    limit = positive("saturation_stress", saturation_stress)
    theta = positive("initial_hardening", initial_hardening)
    return x, start, limit, theta, np.asarray(np.exp(-theta * x / limit))


def _hollomon(
    strain: ArrayLike, coefficient: ArrayLike, exponent: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    return (
        positive("strain", strain),
        positive("coefficient", coefficient),
        positive("exponent", exponent),
    )


VOCE_STRESS: Final = Formula(voce_stress, voce_stress_sensitivities)
HOLLOMON_STRESS: Final = Formula(hollomon_stress, hollomon_stress_sensitivities)
