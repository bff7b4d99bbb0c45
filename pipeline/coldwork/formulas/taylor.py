"""Dislocation density and the stress that it carries, both ways.

References
----------
.. [1] Taylor, Proc. R. Soc. Lond. A 145 (1934) 362-387, doi:10.1098/rspa.1934.0106.
.. [2] Mecking and Kocks, Acta Metall. 29 (1981) 1865-1875,
   doi:10.1016/0001-6160(81)90112-7 (stress as alpha G b sqrt(rho); from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import positive

__all__ = [
    "MEAN_SPACING",
    "TAYLOR_DENSITY",
    "TAYLOR_DENSITY_FROM_SLOPE",
    "TAYLOR_STRESS",
    "TAYLOR_STRESS_FROM_SLOPE",
    "mean_spacing",
    "mean_spacing_sensitivities",
    "taylor_density",
    "taylor_density_from_slope",
    "taylor_density_from_slope_sensitivities",
    "taylor_density_sensitivities",
    "taylor_stress",
    "taylor_stress_from_slope",
    "taylor_stress_from_slope_sensitivities",
    "taylor_stress_sensitivities",
]


def taylor_density(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> NDArray[np.float64]:
    r"""Compute the dislocation density that carries a stress, constant coefficient.

    .. math:: \rho = \left(\frac{\sigma_d}{M \alpha G b}\right)^2

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress :math:`\sigma_d`, flow stress less baseline. [Pa]
    taylor_factor : array_like, broadcast against `stress`
        :math:`M`, macroscopic over resolved shear stress. [1]
    coefficient : array_like, broadcast against `stress`
        :math:`\alpha`. [1]
    shear_modulus : array_like, broadcast against `stress`
        :math:`G` at the temperature of the test. [Pa]
    burgers_vector : array_like, broadcast against `stress`
        Length of the Burgers vector :math:`b`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation density :math:`\rho`, NaN where an input is NaN. [m^-2]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite. A stress at or below zero
        has no density: blank it to NaN first.

    Notes
    -----
    Forest hardening; alpha is taken as the same at all densities, though it falls by
    about a tenth of its value per decade. Densities of 1e10 to 1e17 per m^2.

    References
    ----------
    Taylor, Proc. R. Soc. Lond. A 145 (1934) 362-387; with M, Mecking and Kocks,
    Acta Metall. 29 (1981) 1865-1875.
    """
    slope = _slope(taylor_factor, coefficient, shear_modulus, burgers_vector)
    return np.asarray((positive("stress", stress) / slope) ** 2)


def taylor_density_sensitivities(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `taylor_density` by each argument.

    Parameters
    ----------
    stress, taylor_factor, coefficient, shear_modulus, burgers_vector : array_like
        As for `taylor_density`. [Pa], [1], [1], [Pa], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m^-2 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_density` does.
    """
    rho = taylor_density(stress, taylor_factor, coefficient, shear_modulus, burgers_vector)
    twice = 2.0 * rho
    return {
        "stress": np.asarray(twice / np.asarray(stress)),
        "taylor_factor": np.asarray(-twice / np.asarray(taylor_factor)),
        "coefficient": np.asarray(-twice / np.asarray(coefficient)),
        "shear_modulus": np.asarray(-twice / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(-twice / np.asarray(burgers_vector)),
    }


def taylor_density_from_slope(stress: ArrayLike, slope: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the dislocation density from a stress and a measured slope.

    .. math:: \rho = (\sigma_d / S)^2

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress :math:`\sigma_d`. [Pa]
    slope : array_like, broadcast against `stress`
        Stress over root of density :math:`S`, measured for M alpha G b as one. [N/m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation density :math:`\rho`, NaN where an input is NaN. [m^-2]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Tetsu-to-Hagane 104 (2018) 683-688: 18 N/m for cold-rolled ferritic steel.

    Examples
    --------
    >>> print(f"{float(taylor_density_from_slope(180e6, 18.0)):.3g}")
    1e+14
    """
    return np.asarray((positive("stress", stress) / positive("slope", slope)) ** 2)


def taylor_density_from_slope_sensitivities(
    stress: ArrayLike, slope: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `taylor_density_from_slope` by each argument.

    Parameters
    ----------
    stress, slope : array_like
        As for `taylor_density_from_slope`. [Pa], [N/m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m^-2 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_density_from_slope` does.
    """
    twice = 2.0 * taylor_density_from_slope(stress, slope)
    return {
        "stress": np.asarray(twice / np.asarray(stress)),
        "slope": np.asarray(-twice / np.asarray(slope)),
    }


def taylor_stress(
    density: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> NDArray[np.float64]:
    r"""Compute the stress that a dislocation density carries; undoes `taylor_density`.

    .. math:: \sigma_d = M \alpha G b \sqrt{\rho}

    Parameters
    ----------
    density : array_like, shape (...)
        Dislocation density :math:`\rho`. [m^-2]
    taylor_factor : array_like, broadcast against `density`
        :math:`M`. [1]
    coefficient : array_like, broadcast against `density`
        :math:`\alpha`. [1]
    shear_modulus : array_like, broadcast against `density`
        :math:`G` at the temperature of the test. [Pa]
    burgers_vector : array_like, broadcast against `density`
        Length of the Burgers vector :math:`b`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation stress :math:`\sigma_d`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Taylor, Proc. R. Soc. Lond. A 145 (1934) 362-387; with M, Mecking and Kocks,
    Acta Metall. 29 (1981) 1865-1875.
    """
    slope = _slope(taylor_factor, coefficient, shear_modulus, burgers_vector)
    return np.asarray(slope * np.sqrt(positive("density", density)))


def taylor_stress_sensitivities(
    density: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `taylor_stress` by each argument.

    Parameters
    ----------
    density, taylor_factor, coefficient, shear_modulus, burgers_vector : array_like
        As for `taylor_stress`. [m^-2], [1], [1], [Pa], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_stress` does.
    """
    stress = taylor_stress(density, taylor_factor, coefficient, shear_modulus, burgers_vector)
    return {
        "density": np.asarray(0.5 * stress / np.asarray(density)),
        "taylor_factor": np.asarray(stress / np.asarray(taylor_factor)),
        "coefficient": np.asarray(stress / np.asarray(coefficient)),
        "shear_modulus": np.asarray(stress / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(stress / np.asarray(burgers_vector)),
    }


def taylor_stress_from_slope(density: ArrayLike, slope: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the stress of a density from a slope; undoes `taylor_density_from_slope`.

    .. math:: \sigma_d = S \sqrt{\rho}

    Parameters
    ----------
    density : array_like, shape (...)
        Dislocation density :math:`\rho`. [m^-2]
    slope : array_like, broadcast against `density`
        Stress over root of density :math:`S`. [N/m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation stress :math:`\sigma_d`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Tetsu-to-Hagane 104 (2018) 683-688: 18 N/m for cold-rolled ferritic steel.
    """
    return np.asarray(positive("slope", slope) * np.sqrt(positive("density", density)))


def taylor_stress_from_slope_sensitivities(
    density: ArrayLike, slope: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `taylor_stress_from_slope` by each argument.

    Parameters
    ----------
    density, slope : array_like
        As for `taylor_stress_from_slope`. [m^-2], [N/m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_stress_from_slope` does.
    """
    stress = taylor_stress_from_slope(density, slope)
    return {
        "density": np.asarray(0.5 * stress / np.asarray(density)),
        "slope": np.asarray(stress / np.asarray(slope)),
    }


def mean_spacing(density: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the mean spacing of dislocations.

    .. math:: \ell = 1 / \sqrt{\rho}

    Parameters
    ----------
    density : array_like, shape (...)
        Dislocation density :math:`\rho`, length of line per volume. [m^-2]

    Returns
    -------
    ndarray of float64, shape of `density`
        Spacing of parallel lines on a square net, NaN where an input is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any density is zero, negative or infinite.

    References
    ----------
    Hull and Bacon, Introduction to Dislocations (from memory; it is a definition).
    """
    return np.asarray(1.0 / np.sqrt(positive("density", density)))


def mean_spacing_sensitivities(density: ArrayLike) -> dict[str, NDArray[np.float64]]:
    """Differentiate `mean_spacing` by its argument.

    Parameters
    ----------
    density : array_like, shape (...)
        As for `mean_spacing`. [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per m^-2]

    Raises
    ------
    InvalidArgument
        As `mean_spacing` does.
    """
    return {"density": np.asarray(-0.5 * mean_spacing(density) / np.asarray(density))}


def _slope(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> NDArray[np.float64]:
    """Multiply M alpha G b, stress over root of density, in N/m."""
    return np.asarray(
        positive("taylor_factor", taylor_factor)
        * positive("coefficient", coefficient)
        * positive("shear_modulus", shear_modulus)
        * positive("burgers_vector", burgers_vector)
    )


TAYLOR_DENSITY: Final = Formula(taylor_density, taylor_density_sensitivities)
TAYLOR_DENSITY_FROM_SLOPE: Final = Formula(
    taylor_density_from_slope, taylor_density_from_slope_sensitivities
)
TAYLOR_STRESS: Final = Formula(taylor_stress, taylor_stress_sensitivities)
TAYLOR_STRESS_FROM_SLOPE: Final = Formula(
    taylor_stress_from_slope, taylor_stress_from_slope_sensitivities
)
MEAN_SPACING: Final = Formula(mean_spacing, mean_spacing_sensitivities)
