r"""Taylor's relation with a coefficient that falls as the forest thickens.

.. math:: \alpha(\rho) = \alpha_{ref} \frac{\ln(1 / (b\sqrt\rho))}{\ln(1 / (b\sqrt{\rho_{ref}}))}

The line tension that a dislocation bows against has the logarithm of the mean spacing over
the Burgers vector in it. Both ways, and the greatest stress that there is.

References
----------
.. [1] Basinski and Basinski, in Dislocations in Solids 4, North-Holland 1979, 261-362
   (the logarithm; from memory).
.. [2] Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746,
   doi:10.1016/j.scriptamat.2005.10.066 (0.35 at 1e12 per m^2 in fcc; from memory).
"""

from math import e
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.formulas.logarithmic_branch import (
    logarithm_of,
    reference_logarithm,
    solved_logarithm,
)
from coldwork.guards import positive

__all__ = [
    "GREATEST_STRESS_LOGARITHMIC",
    "TAYLOR_DENSITY_LOGARITHMIC",
    "TAYLOR_STRESS_LOGARITHMIC",
    "coefficient_logarithmic",
    "greatest_stress_logarithmic",
    "greatest_stress_logarithmic_sensitivities",
    "taylor_density_logarithmic",
    "taylor_density_logarithmic_sensitivities",
    "taylor_stress_logarithmic",
    "taylor_stress_logarithmic_sensitivities",
]

FloatArray = NDArray[np.float64]


def taylor_density_logarithmic(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute the dislocation density that carries a stress, logarithmic coefficient.

    The solution with :math:`b \sqrt\rho < 1/e` of

    .. math:: \sigma_d = M \alpha_{ref} G b \sqrt\rho\,
              \frac{\ln(1 / (b\sqrt\rho))}{\ln(1 / (b\sqrt{\rho_{ref}}))}

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress :math:`\sigma_d`, flow stress less baseline. [Pa]
    taylor_factor : array_like, broadcast against `stress`
        :math:`M`. [1]
    coefficient : array_like, broadcast against `stress`
        :math:`\alpha_{ref}`, at `reference_density`. [1]
    shear_modulus : array_like, broadcast against `stress`
        :math:`G` at the temperature of the test. [Pa]
    burgers_vector : array_like, broadcast against `stress`
        Length of the Burgers vector :math:`b`. [m]
    reference_density : array_like, broadcast against `stress`
        :math:`\rho_{ref}`. [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation density :math:`\rho`, NaN where an input is NaN, and from
        `greatest_stress_logarithmic` on. [m^-2]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite, or a reference density not on the
        rising branch. A stress at or below zero has no density: blank it to NaN first.

    Notes
    -----
    Drawn from densities of 1e10 to 1e16 per m^2. The branch ends at 1/(e b)^2, 2e18 per m^2
    for copper, where the sensitivities grow without bound; a tenth of the greatest stress
    is far from that. `solved_logarithm` says how it is solved.

    References
    ----------
    Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746, in the form without the
    coefficient in the logarithm (from memory); inverted here.

    Examples
    --------
    >>> rho = taylor_density_logarithmic(200e6, 3.06, 0.35, 42.1e9, 0.256e-9, 1e12)
    >>> print(f"{float(rho):.3g}")
    8.58e+14
    """
    density, *_ = _solved(
        stress, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    return density


def taylor_density_logarithmic_sensitivities(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> dict[str, FloatArray]:
    r"""Differentiate `taylor_density_logarithmic` by each argument.

    With :math:`L` and :math:`L_{ref}` the two logarithms, a relative change of the stress
    comes out :math:`2 L / (L - 1)` times as large in the density.

    Parameters
    ----------
    stress, taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like
        As for `taylor_density_logarithmic`. [Pa], [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name, NaN where there is no density. [m^-2 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_density_logarithmic` does.
    """
    rho, log, reference = _solved(
        stress, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    gain = rho * log / (log - 1.0)
    by_length = 1.0 - 1.0 / log + 1.0 / reference
    return {
        "stress": np.asarray(2.0 * gain / np.asarray(stress)),
        "taylor_factor": np.asarray(-2.0 * gain / np.asarray(taylor_factor)),
        "coefficient": np.asarray(-2.0 * gain / np.asarray(coefficient)),
        "shear_modulus": np.asarray(-2.0 * gain / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(-2.0 * gain * by_length / np.asarray(burgers_vector)),
        "reference_density": np.asarray(-gain / reference / np.asarray(reference_density)),
    }


def taylor_stress_logarithmic(
    density: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute the stress that a density carries; undoes `taylor_density_logarithmic`.

    .. math:: \sigma_d = M \alpha_{ref} G b \sqrt\rho\,
              \frac{\ln(1 / (b\sqrt\rho))}{\ln(1 / (b\sqrt{\rho_{ref}}))}

    Parameters
    ----------
    density : array_like, shape (...)
        Dislocation density :math:`\rho`. [m^-2]
    taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like, broadcast against `density`
        As for `taylor_density_logarithmic`. [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation stress :math:`\sigma_d`, NaN where an input is NaN, and for a density
        past the branch. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite, or a reference density not on the
        rising branch.

    References
    ----------
    Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746, in the form without the
    coefficient in the logarithm (from memory).
    """
    b, prefactor = _prefactor(taylor_factor, coefficient, shear_modulus, burgers_vector)
    reference = reference_logarithm(b, reference_density)
    rho = positive("density", density)
    return np.asarray(prefactor * b * np.sqrt(rho) * logarithm_of(b, rho) / reference)


def taylor_stress_logarithmic_sensitivities(
    density: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `taylor_stress_logarithmic` by each argument.

    Parameters
    ----------
    density, taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like
        As for `taylor_stress_logarithmic`. [m^-2], [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_stress_logarithmic` does.
    """
    stress = taylor_stress_logarithmic(
        density, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    rho, b = np.asarray(density, dtype=np.float64), np.asarray(burgers_vector, dtype=np.float64)
    left = 1.0 - 1.0 / logarithm_of(b, rho)
    reference = reference_logarithm(b, reference_density)
    return {
        "density": np.asarray(stress * left / (2.0 * rho)),
        "taylor_factor": np.asarray(stress / np.asarray(taylor_factor)),
        "coefficient": np.asarray(stress / np.asarray(coefficient)),
        "shear_modulus": np.asarray(stress / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(stress * (left + 1.0 / reference) / b),
        "reference_density": np.asarray(stress / (2.0 * reference * np.asarray(reference_density))),
    }


def greatest_stress_logarithmic(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute the greatest stress that the logarithmic law has a density for.

    .. math:: \sigma_{max} = \frac{M \alpha_{ref} G}{e \ln(1 / (b\sqrt{\rho_{ref}}))}
              \quad\text{at}\quad \rho = \frac{1}{(e\, b)^2}

    Parameters
    ----------
    taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like, shape (...)
        As for `taylor_density_logarithmic`. [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Greatest stress, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite, or a reference density not on the
        rising branch.

    References
    ----------
    The greatest value of :math:`y \ln(1/y)`, :math:`1/e` at :math:`y = 1/e`.
    """
    b, prefactor = _prefactor(taylor_factor, coefficient, shear_modulus, burgers_vector)
    return np.asarray(prefactor / (e * reference_logarithm(b, reference_density)))


def greatest_stress_logarithmic_sensitivities(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `greatest_stress_logarithmic` by each argument.

    Parameters
    ----------
    taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density : array_like
        As for `greatest_stress_logarithmic`. [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `greatest_stress_logarithmic` does.
    """
    greatest = greatest_stress_logarithmic(
        taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    b = np.asarray(burgers_vector, dtype=np.float64)
    by_log = greatest / reference_logarithm(b, reference_density)
    return {
        "taylor_factor": np.asarray(greatest / np.asarray(taylor_factor)),
        "coefficient": np.asarray(greatest / np.asarray(coefficient)),
        "shear_modulus": np.asarray(greatest / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(by_log / b),
        "reference_density": np.asarray(by_log / (2.0 * np.asarray(reference_density))),
    }


def coefficient_logarithmic(
    density: ArrayLike,
    coefficient: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute what the coefficient is at a density.

    .. math:: \alpha = \alpha_{ref}
              \frac{\ln(1 / (b\sqrt\rho))}{\ln(1 / (b\sqrt{\rho_{ref}}))}

    Parameters
    ----------
    density : array_like, shape (...)
        :math:`\rho`. [m^-2]
    coefficient, burgers_vector, reference_density : array_like, broadcast against `density`
        As for `taylor_density_logarithmic`. [1], [m], [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\alpha(\rho)`, `coefficient` itself at `reference_density`; NaN where an
        input is NaN, and past the branch. [1]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite, or a reference density not on the
        rising branch.

    References
    ----------
    Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746, in the form without the
    coefficient in the logarithm (from memory).
    """
    b = positive("burgers_vector", burgers_vector)
    log = logarithm_of(b, positive("density", density))
    alpha = positive("coefficient", coefficient)
    return np.asarray(alpha * (log / reference_logarithm(b, reference_density)))


def _prefactor(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> tuple[FloatArray, FloatArray]:
    """Give b and M alpha G."""
    per_length = positive("taylor_factor", taylor_factor) * positive("coefficient", coefficient)
    b = positive("burgers_vector", burgers_vector)
    return b, np.asarray(per_length * positive("shear_modulus", shear_modulus))


def _solved(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the density and the logarithms at it and at the reference."""
    b, prefactor = _prefactor(taylor_factor, coefficient, shear_modulus, burgers_vector)
    reference = reference_logarithm(b, reference_density)
    ratio = np.asarray(positive("stress", stress) / prefactor * reference)
    log = solved_logarithm(ratio)
    return np.asarray((ratio / (log * b)) ** 2), log, reference


TAYLOR_DENSITY_LOGARITHMIC: Final = Formula(
    taylor_density_logarithmic, taylor_density_logarithmic_sensitivities
)
TAYLOR_STRESS_LOGARITHMIC: Final = Formula(
    taylor_stress_logarithmic, taylor_stress_logarithmic_sensitivities
)
GREATEST_STRESS_LOGARITHMIC: Final = Formula(
    greatest_stress_logarithmic, greatest_stress_logarithmic_sensitivities
)
