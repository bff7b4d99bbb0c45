"""Force and extension to engineering and true stress and strain.

One set of relations for both senses: in compression force and extension, stress
and strain are negative.
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import between, finite, positive

__all__ = [
    "ENGINEERING_STRAIN",
    "ENGINEERING_STRESS",
    "TRUE_PLASTIC_STRAIN",
    "TRUE_STRAIN",
    "TRUE_STRESS",
    "engineering_from_true",
    "engineering_strain",
    "engineering_strain_sensitivities",
    "engineering_stress",
    "engineering_stress_sensitivities",
    "true_plastic_strain",
    "true_plastic_strain_sensitivities",
    "true_strain",
    "true_strain_sensitivities",
    "true_stress",
    "true_stress_sensitivities",
]


def engineering_stress(force: ArrayLike, area: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the engineering stress.

    .. math:: R = F / S_0

    Parameters
    ----------
    force : array_like, shape (...)
        Force :math:`F`, negative in compression. [N]
    area : array_like, broadcast against `force`
        Cross-section before the test :math:`S_0`. [m2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Engineering stress :math:`R`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any force is infinite, or an area zero, negative or infinite.

    References
    ----------
    ISO 6892-1, terms and definitions: stress (from memory).
    """
    return np.asarray(finite("force", force) / positive("area", area))


def engineering_stress_sensitivities(
    force: ArrayLike, area: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `engineering_stress` by each argument.

    Parameters
    ----------
    force, area : array_like
        As for `engineering_stress`. [N], [m2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `engineering_stress` does.
    """
    stress = engineering_stress(force, area)
    s0 = np.asarray(area, dtype=np.float64)
    return {"force": np.asarray(1.0 / s0), "area": np.asarray(-stress / s0)}


def engineering_strain(extension: ArrayLike, gauge_length: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the engineering strain.

    .. math:: e = \Delta L / L_e

    Parameters
    ----------
    extension : array_like, shape (...)
        Change of the gauge length :math:`\Delta L`, negative in compression. [m]
    gauge_length : array_like, broadcast against `extension`
        Length before the test that it belongs to :math:`L_e`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Engineering strain :math:`e`, NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any extension is infinite, or a gauge length zero, negative or infinite.

    References
    ----------
    ISO 6892-1, terms and definitions: percentage extension (from memory).
    """
    return np.asarray(finite("extension", extension) / positive("gauge_length", gauge_length))


def engineering_strain_sensitivities(
    extension: ArrayLike, gauge_length: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `engineering_strain` by each argument.

    Parameters
    ----------
    extension, gauge_length : array_like
        As for `engineering_strain`. [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1/m]

    Raises
    ------
    InvalidArgument
        As `engineering_strain` does.
    """
    strain = engineering_strain(extension, gauge_length)
    length = np.asarray(gauge_length, dtype=np.float64)
    return {"extension": np.asarray(1.0 / length), "gauge_length": np.asarray(-strain / length)}


def true_stress(
    engineering_stress: ArrayLike, engineering_strain: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the true stress of a length that deforms evenly at constant volume.

    .. math:: \sigma = R\,(1 + e)

    Parameters
    ----------
    engineering_stress : array_like, shape (...)
        :math:`R`, negative in compression. [Pa]
    engineering_strain : array_like, broadcast against `engineering_stress`
        :math:`e`, negative in compression. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        True stress :math:`\sigma`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any stress is infinite, or a strain -1 or less, or infinite.

    Notes
    -----
    Up to the greatest force; past it the strain is no longer even. Elastic changes of
    volume, (1 - 2 nu) R / E, are neglected: below 0.1 % of the stress.

    References
    ----------
    Dieter, Mechanical Metallurgy, ch. 8 (from memory): from S L = S0 L0.
    """
    r, e = _checked(engineering_stress, engineering_strain)
    return np.asarray(r * (1.0 + e))


def true_stress_sensitivities(
    engineering_stress: ArrayLike, engineering_strain: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `true_stress` by each argument.

    Parameters
    ----------
    engineering_stress, engineering_strain : array_like
        As for `true_stress`. [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1], [Pa]

    Raises
    ------
    InvalidArgument
        As `true_stress` does.
    """
    r, e = _checked(engineering_stress, engineering_strain)
    return {"engineering_stress": np.asarray(1.0 + e), "engineering_strain": r}


def true_strain(engineering_strain: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the true strain of a length that deforms evenly.

    .. math:: \varepsilon = \ln(1 + e)

    Parameters
    ----------
    engineering_strain : array_like, shape (...)
        :math:`e`, negative in compression. [1]

    Returns
    -------
    ndarray of float64, shape of `engineering_strain`
        True strain :math:`\varepsilon`, NaN where the input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any strain is -1 or less, or infinite.

    References
    ----------
    Dieter, Mechanical Metallurgy, ch. 8 (from memory): the integral of dL / L.
    """
    return np.asarray(np.log1p(_strain(engineering_strain)))


def true_strain_sensitivities(engineering_strain: ArrayLike) -> dict[str, NDArray[np.float64]]:
    """Differentiate `true_strain` by its argument.

    Parameters
    ----------
    engineering_strain : array_like, shape (...)
        As for `true_strain`. [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1]

    Raises
    ------
    InvalidArgument
        As `true_strain` does.
    """
    return {"engineering_strain": np.asarray(1.0 / (1.0 + _strain(engineering_strain)))}


def true_plastic_strain(
    true_strain: ArrayLike, true_stress: ArrayLike, slope: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the true plastic strain: the true strain less its elastic part.

    .. math:: \varepsilon_p = \varepsilon - \sigma / m

    Parameters
    ----------
    true_strain : array_like, shape (...)
        :math:`\varepsilon`, negative in compression. [1]
    true_stress : array_like, broadcast against `true_strain`
        :math:`\sigma`, negative in compression. [Pa]
    slope : array_like, broadcast against `true_strain`
        Slope of the elastic part of the curve :math:`m`; with crosshead travel that
        of coupon and machine together. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        True plastic strain :math:`\varepsilon_p`, NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any strain or stress is infinite, or a slope zero, negative or infinite.

    References
    ----------
    Dieter, Mechanical Metallurgy, ch. 8 (from memory): a definition.
    """
    total, stress = finite("true_strain", true_strain), finite("true_stress", true_stress)
    return np.asarray(total - stress / positive("slope", slope))


def true_plastic_strain_sensitivities(
    true_strain: ArrayLike, true_stress: ArrayLike, slope: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `true_plastic_strain` by each argument.

    Parameters
    ----------
    true_strain, true_stress, slope : array_like
        As for `true_plastic_strain`. [1], [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `true_plastic_strain` does.
    """
    plastic = true_plastic_strain(true_strain, true_stress, slope)
    m = np.asarray(slope, dtype=np.float64)
    return {
        "true_strain": np.ones_like(plastic),
        "true_stress": np.asarray(-1.0 / m),
        "slope": np.asarray(np.asarray(true_stress, dtype=np.float64) / m**2),
    }


def engineering_from_true(
    true_stress: ArrayLike, true_strain: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    r"""Compute engineering stress and strain from true ones.

    .. math:: e = e^\varepsilon - 1, \qquad R = \sigma e^{-\varepsilon}

    Parameters
    ----------
    true_stress : array_like, shape (...)
        :math:`\sigma`, negative in compression. [Pa]
    true_strain : array_like, broadcast against `true_stress`
        Elastic and plastic together :math:`\varepsilon`. [1]

    Returns
    -------
    stress : ndarray of float64, the broadcast shape
        :math:`R`. [Pa]
    strain : ndarray of float64, shape of `true_strain`
        :math:`e`. [1]

    Raises
    ------
    InvalidArgument
        If any stress or strain is infinite.

    References
    ----------
    Dieter, Mechanical Metallurgy, ch. 8 (from memory): inverse of `true_stress` and
    `true_strain`.
    """
    sigma, epsilon = finite("true_stress", true_stress), finite("true_strain", true_strain)
    return np.asarray(sigma * np.exp(-epsilon)), np.asarray(np.expm1(epsilon))


def _strain(engineering_strain: ArrayLike) -> NDArray[np.float64]:
    return between("engineering_strain", engineering_strain, -1.0, np.inf)


def _checked(
    stress: ArrayLike, strain: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    return finite("engineering_stress", stress), _strain(strain)


ENGINEERING_STRESS: Final = Formula(engineering_stress, engineering_stress_sensitivities)
ENGINEERING_STRAIN: Final = Formula(engineering_strain, engineering_strain_sensitivities)
TRUE_STRESS: Final = Formula(true_stress, true_stress_sensitivities)
TRUE_STRAIN: Final = Formula(true_strain, true_strain_sensitivities)
TRUE_PLASTIC_STRAIN: Final = Formula(true_plastic_strain, true_plastic_strain_sensitivities)
