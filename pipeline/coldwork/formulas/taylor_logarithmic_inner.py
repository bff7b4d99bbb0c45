r"""The logarithmic law with the coefficient kept inside the logarithm.

.. math:: \alpha(\rho) = \alpha_{ref} \frac{\ln(1 / (\alpha_{ref} b\sqrt\rho))}
          {\ln(1 / (\alpha_{ref} b\sqrt{\rho_{ref}}))}

The same physics as in ``taylor_logarithmic``, written with the spacing of those forest lines
that hold, :math:`1/(\alpha\sqrt\rho)`, so that the coefficient falls more slowly. Published
coefficients go with one form or the other.

References
----------
.. [1] Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746,
   doi:10.1016/j.scriptamat.2005.10.066 (from memory).
.. [2] Kubin, Devincre and Hoc, Acta Mater. 56 (2008) 6040-6049,
   doi:10.1016/j.actamat.2008.08.012 (root of a = alpha, 0.35 at 1e12 per m^2; from memory).
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
    "GREATEST_STRESS_LOGARITHMIC_INNER",
    "TAYLOR_DENSITY_LOGARITHMIC_INNER",
    "TAYLOR_STRESS_LOGARITHMIC_INNER",
    "coefficient_logarithmic_inner",
    "greatest_stress_logarithmic_inner",
    "greatest_stress_logarithmic_inner_sensitivities",
    "taylor_density_logarithmic_inner",
    "taylor_density_logarithmic_inner_sensitivities",
    "taylor_stress_logarithmic_inner",
    "taylor_stress_logarithmic_inner_sensitivities",
]

FloatArray = NDArray[np.float64]


def taylor_density_logarithmic_inner(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute the dislocation density that carries a stress, coefficient in the logarithm.

    The solution with :math:`\alpha_{ref} b \sqrt\rho < 1/e` of

    .. math:: \sigma_d = M \alpha_{ref} G b \sqrt\rho\,
              \frac{\ln(1 / (\alpha_{ref} b\sqrt\rho))}
              {\ln(1 / (\alpha_{ref} b\sqrt{\rho_{ref}}))}

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
        `greatest_stress_logarithmic_inner` on. [m^-2]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite, or a reference density not on the
        rising branch. A stress at or below zero has no density: blank it to NaN first.

    Notes
    -----
    Drawn from densities of 1e10 to 1e16 per m^2. The branch ends at 1/(e alpha b)^2, which
    no metal reaches.

    References
    ----------
    Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746, with the root of the
    interaction coefficient as alpha (from memory); inverted here.
    """
    density, *_ = _solved(
        stress, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    return density


def taylor_density_logarithmic_inner_sensitivities(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> dict[str, FloatArray]:
    r"""Differentiate `taylor_density_logarithmic_inner` by each argument.

    Coefficient and Burgers vector enter as their product alone.

    Parameters
    ----------
    stress, taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like
        As for `taylor_density_logarithmic_inner`. [Pa], [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name, NaN where there is no density. [m^-2 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_density_logarithmic_inner` does.
    """
    rho, log, reference = _solved(
        stress, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    gain = rho * log / (log - 1.0)
    by_length = -2.0 * (gain / reference + rho)
    return {
        "stress": np.asarray(2.0 * gain / np.asarray(stress)),
        "taylor_factor": np.asarray(-2.0 * gain / np.asarray(taylor_factor)),
        "coefficient": np.asarray(by_length / np.asarray(coefficient)),
        "shear_modulus": np.asarray(-2.0 * gain / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(by_length / np.asarray(burgers_vector)),
        "reference_density": np.asarray(-gain / reference / np.asarray(reference_density)),
    }


def taylor_stress_logarithmic_inner(
    density: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute the stress that a density carries; undoes `taylor_density_logarithmic_inner`.

    .. math:: \sigma_d = M \alpha_{ref} G b \sqrt\rho\,
              \frac{\ln(1 / (\alpha_{ref} b\sqrt\rho))}
              {\ln(1 / (\alpha_{ref} b\sqrt{\rho_{ref}}))}

    Parameters
    ----------
    density : array_like, shape (...)
        Dislocation density :math:`\rho`. [m^-2]
    taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like, broadcast against `density`
        As for `taylor_density_logarithmic_inner`. [1], [1], [Pa], [m], [m^-2]

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
    Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746 (from memory).
    """
    length, modulus = _parts(taylor_factor, coefficient, shear_modulus, burgers_vector)
    reference = reference_logarithm(length, reference_density)
    rho = positive("density", density)
    return np.asarray(modulus * length * np.sqrt(rho) * logarithm_of(length, rho) / reference)


def taylor_stress_logarithmic_inner_sensitivities(
    density: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `taylor_stress_logarithmic_inner` by each argument.

    Parameters
    ----------
    density, taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like
        As for `taylor_stress_logarithmic_inner`. [m^-2], [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `taylor_stress_logarithmic_inner` does.
    """
    stress = taylor_stress_logarithmic_inner(
        density, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    rho = np.asarray(density, dtype=np.float64)
    length, _ = _parts(taylor_factor, coefficient, shear_modulus, burgers_vector)
    left = 1.0 - 1.0 / logarithm_of(length, rho)
    reference = reference_logarithm(length, reference_density)
    by_length = stress * (left + 1.0 / reference)
    return {
        "density": np.asarray(stress * left / (2.0 * rho)),
        "taylor_factor": np.asarray(stress / np.asarray(taylor_factor)),
        "coefficient": np.asarray(by_length / np.asarray(coefficient)),
        "shear_modulus": np.asarray(stress / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(by_length / np.asarray(burgers_vector)),
        "reference_density": np.asarray(stress / (2.0 * reference * np.asarray(reference_density))),
    }


def greatest_stress_logarithmic_inner(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute the greatest stress that this form of the law has a density for.

    .. math:: \sigma_{max} = \frac{M G}{e \ln(1 / (\alpha_{ref} b\sqrt{\rho_{ref}}))}
              \quad\text{at}\quad \rho = \frac{1}{(e\, \alpha_{ref} b)^2}

    Parameters
    ----------
    taylor_factor, coefficient, shear_modulus, burgers_vector, \
reference_density : array_like, shape (...)
        As for `taylor_density_logarithmic_inner`. [1], [1], [Pa], [m], [m^-2]

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
    length, modulus = _parts(taylor_factor, coefficient, shear_modulus, burgers_vector)
    return np.asarray(modulus / (e * reference_logarithm(length, reference_density)))


def greatest_stress_logarithmic_inner_sensitivities(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `greatest_stress_logarithmic_inner` by each argument.

    Parameters
    ----------
    taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density : array_like
        As for `greatest_stress_logarithmic_inner`. [1], [1], [Pa], [m], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `greatest_stress_logarithmic_inner` does.
    """
    greatest = greatest_stress_logarithmic_inner(
        taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )
    length, _ = _parts(taylor_factor, coefficient, shear_modulus, burgers_vector)
    by_log = greatest / reference_logarithm(length, reference_density)
    return {
        "taylor_factor": np.asarray(greatest / np.asarray(taylor_factor)),
        "coefficient": np.asarray(by_log / np.asarray(coefficient)),
        "shear_modulus": np.asarray(greatest / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(by_log / np.asarray(burgers_vector)),
        "reference_density": np.asarray(by_log / (2.0 * np.asarray(reference_density))),
    }


def coefficient_logarithmic_inner(
    density: ArrayLike,
    coefficient: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> FloatArray:
    r"""Compute what the coefficient is at a density.

    .. math:: \alpha = \alpha_{ref} \frac{\ln(1 / (\alpha_{ref} b\sqrt\rho))}
              {\ln(1 / (\alpha_{ref} b\sqrt{\rho_{ref}}))}

    Parameters
    ----------
    density : array_like, shape (...)
        :math:`\rho`. [m^-2]
    coefficient, burgers_vector, reference_density : array_like, broadcast against `density`
        As for `taylor_density_logarithmic_inner`. [1], [m], [m^-2]

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
    Devincre, Kubin and Hoc, Scripta Mater. 54 (2006) 741-746 (from memory).
    """
    alpha = positive("coefficient", coefficient)
    length = np.asarray(alpha * positive("burgers_vector", burgers_vector))
    log = logarithm_of(length, positive("density", density))
    return np.asarray(alpha * (log / reference_logarithm(length, reference_density)))


def _parts(
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
) -> tuple[FloatArray, FloatArray]:
    """Give alpha b, the length in the logarithm, and M G."""
    length = positive("coefficient", coefficient) * positive("burgers_vector", burgers_vector)
    modulus = positive("taylor_factor", taylor_factor) * positive("shear_modulus", shear_modulus)
    return np.asarray(length), np.asarray(modulus)


def _solved(
    stress: ArrayLike,
    taylor_factor: ArrayLike,
    coefficient: ArrayLike,
    shear_modulus: ArrayLike,
    burgers_vector: ArrayLike,
    reference_density: ArrayLike,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the density and the logarithms at it and at the reference."""
    length, modulus = _parts(taylor_factor, coefficient, shear_modulus, burgers_vector)
    reference = reference_logarithm(length, reference_density)
    ratio = np.asarray(positive("stress", stress) / modulus * reference)
    log = solved_logarithm(ratio)
    return np.asarray((ratio / (log * length)) ** 2), log, reference


TAYLOR_DENSITY_LOGARITHMIC_INNER: Final = Formula(
    taylor_density_logarithmic_inner, taylor_density_logarithmic_inner_sensitivities
)
TAYLOR_STRESS_LOGARITHMIC_INNER: Final = Formula(
    taylor_stress_logarithmic_inner, taylor_stress_logarithmic_inner_sensitivities
)
GREATEST_STRESS_LOGARITHMIC_INNER: Final = Formula(
    greatest_stress_logarithmic_inner, greatest_stress_logarithmic_inner_sensitivities
)
