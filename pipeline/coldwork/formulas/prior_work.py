r"""What was done to the metal before the test: strain from dimensions, work from a curve.

Strains are equivalent ones after von Mises, as a tensile test would count them, so that those
of passes in turn add up and one flow curve serves for all. Homogeneous deformation: redundant
shear at the surface of a strip or in a die comes on top.

References
----------
.. [1] von Mises, Nachr. Ges. Wiss. Goettingen (1913) 582-592 (equivalent stress; the strain
   that does the same work).
.. [2] Dieter, Mechanical Metallurgy, McGraw-Hill (rolling in plane strain, drawing,
   upsetting; from memory).
"""

from math import sqrt
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.formulas.hardening_laws import voce_work
from coldwork.guards import not_negative, positive

__all__ = [
    "DRAWING_STRAIN",
    "PRIOR_WORK",
    "ROLLING_STRAIN",
    "UPSETTING_STRAIN",
    "drawing_strain",
    "drawing_strain_sensitivities",
    "prior_work",
    "prior_work_sensitivities",
    "rolling_strain",
    "rolling_strain_sensitivities",
    "upsetting_strain",
    "upsetting_strain_sensitivities",
]

FloatArray = NDArray[np.float64]

_PLANE_STRAIN: Final = 2.0 / sqrt(3.0)  # equivalent over thickness strain, no spread [1]
_AREA: Final = 2.0  # strain along a bar over that of its diameter [1]


def rolling_strain(initial_thickness: ArrayLike, final_thickness: ArrayLike) -> FloatArray:
    r"""Compute the equivalent strain of rolling without spread.

    .. math:: \bar\varepsilon = \frac{2}{\sqrt 3} \ln\frac{t_0}{t}

    Parameters
    ----------
    initial_thickness : array_like, shape (...)
        :math:`t_0`. [m]
    final_thickness : array_like, broadcast against `initial_thickness`
        :math:`t`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\bar\varepsilon`; NaN where an input is NaN, and where the metal would have
        become thicker. [1]

    Raises
    ------
    InvalidArgument
        If any thickness is zero, negative or infinite.

    References
    ----------
    Von Mises 1913, plane strain: principal strains e, 0, -e have the equivalent 2 e / sqrt 3.

    Examples
    --------
    >>> print(f"{float(rolling_strain(2e-3, 1e-3)):.4f}")
    0.8004
    """
    log = _log_ratio("initial_thickness", initial_thickness, "final_thickness", final_thickness)
    return np.asarray(_PLANE_STRAIN * log)


def rolling_strain_sensitivities(
    initial_thickness: ArrayLike, final_thickness: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `rolling_strain` by each argument.

    Parameters
    ----------
    initial_thickness, final_thickness : array_like
        As for `rolling_strain`. [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1/m]

    Raises
    ------
    InvalidArgument
        As `rolling_strain` does.
    """
    rolling_strain(initial_thickness, final_thickness)
    return {
        "initial_thickness": np.asarray(_PLANE_STRAIN / np.asarray(initial_thickness)),
        "final_thickness": np.asarray(-_PLANE_STRAIN / np.asarray(final_thickness)),
    }


def drawing_strain(initial_diameter: ArrayLike, final_diameter: ArrayLike) -> FloatArray:
    r"""Compute the equivalent strain of drawing a round bar or wire.

    .. math:: \bar\varepsilon = 2 \ln\frac{d_0}{d}

    Parameters
    ----------
    initial_diameter : array_like, shape (...)
        :math:`d_0`. [m]
    final_diameter : array_like, broadcast against `initial_diameter`
        :math:`d`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\bar\varepsilon`; NaN where an input is NaN, and where the metal would have
        become thicker. [1]

    Raises
    ------
    InvalidArgument
        If any diameter is zero, negative or infinite.

    References
    ----------
    Von Mises 1913, uniaxial: the strain along the bar, ln of the ratio of areas.
    """
    log = _log_ratio("initial_diameter", initial_diameter, "final_diameter", final_diameter)
    return np.asarray(_AREA * log)


def drawing_strain_sensitivities(
    initial_diameter: ArrayLike, final_diameter: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `drawing_strain` by each argument.

    Parameters
    ----------
    initial_diameter, final_diameter : array_like
        As for `drawing_strain`. [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1/m]

    Raises
    ------
    InvalidArgument
        As `drawing_strain` does.
    """
    drawing_strain(initial_diameter, final_diameter)
    return {
        "initial_diameter": np.asarray(_AREA / np.asarray(initial_diameter)),
        "final_diameter": np.asarray(-_AREA / np.asarray(final_diameter)),
    }


def upsetting_strain(initial_height: ArrayLike, final_height: ArrayLike) -> FloatArray:
    r"""Compute the equivalent strain of upsetting without friction.

    .. math:: \bar\varepsilon = \ln\frac{h_0}{h}

    Parameters
    ----------
    initial_height : array_like, shape (...)
        :math:`h_0`. [m]
    final_height : array_like, broadcast against `initial_height`
        :math:`h`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\bar\varepsilon`; NaN where an input is NaN, and where the metal would have
        become taller. [1]

    Raises
    ------
    InvalidArgument
        If any height is zero, negative or infinite.

    References
    ----------
    Von Mises 1913, uniaxial: the strain along the axis.
    """
    return _log_ratio("initial_height", initial_height, "final_height", final_height)


def upsetting_strain_sensitivities(
    initial_height: ArrayLike, final_height: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `upsetting_strain` by each argument.

    Parameters
    ----------
    initial_height, final_height : array_like
        As for `upsetting_strain`. [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1/m]

    Raises
    ------
    InvalidArgument
        As `upsetting_strain` does.
    """
    upsetting_strain(initial_height, final_height)
    return {
        "initial_height": np.asarray(1.0 / np.asarray(initial_height, dtype=np.float64)),
        "final_height": np.asarray(-1.0 / np.asarray(final_height, dtype=np.float64)),
    }


def prior_work(
    strain: ArrayLike,
    baseline: ArrayLike,
    initial_stress: ArrayLike,
    initial_hardening: ArrayLike,
    saturation_stress: ArrayLike,
) -> FloatArray:
    r"""Compute the plastic work per volume of a strain along a Voce curve.

    .. math:: W = (\sigma_0 + \sigma_s) \varepsilon - (\sigma_s - \sigma_i)
              \frac{\sigma_s}{\theta_0} \left(1 - e^{-\theta_0 \varepsilon / \sigma_s}\right)

    Parameters
    ----------
    strain : array_like, shape (...)
        Equivalent plastic strain :math:`\varepsilon`. [1]
    baseline : array_like, broadcast against `strain`
        Part of the flow stress that dislocations do not carry :math:`\sigma_0`. [Pa]
    initial_stress : array_like, broadcast against `strain`
        Dislocation stress at the start :math:`\sigma_i`, 0 for annealed metal. [Pa]
    initial_hardening : array_like, broadcast against `strain`
        Hardening rate at no dislocation stress :math:`\theta_0`. [Pa]
    saturation_stress : array_like, broadcast against `strain`
        Dislocation stress at which the rate is gone :math:`\sigma_s`. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Plastic work :math:`W`, NaN where an input is NaN. [J/m^3]

    Raises
    ------
    InvalidArgument
        If any strain, baseline or initial stress is negative or infinite, or a hardening or
        saturation stress zero, negative or infinite.

    Notes
    -----
    The constants are those of relation 6. From strains that go far past the flow curve that
    they were taken from, and in passes with heat between, it is an estimate.

    References
    ----------
    Voce, J. Inst. Met. 74 (1948) 537-562, for the curve; its integral by strain.
    """
    base = not_negative("baseline", baseline)
    x = not_negative("strain", strain)
    start = not_negative("initial_stress", initial_stress)
    return np.asarray(base * x + voce_work(x, start, saturation_stress, initial_hardening))


def prior_work_sensitivities(
    strain: ArrayLike,
    baseline: ArrayLike,
    initial_stress: ArrayLike,
    initial_hardening: ArrayLike,
    saturation_stress: ArrayLike,
) -> dict[str, FloatArray]:
    """Differentiate `prior_work` by each argument.

    Parameters
    ----------
    strain, baseline, initial_stress, initial_hardening, saturation_stress : array_like
        As for `prior_work`. [1], [Pa], [Pa], [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/m^3 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `prior_work` does.
    """
    prior_work(strain, baseline, initial_stress, initial_hardening, saturation_stress)
    eps, base, start, theta, limit = (
        np.asarray(a, dtype=np.float64)
        for a in (strain, baseline, initial_stress, initial_hardening, saturation_stress)
    )
    x = theta * eps / limit
    rise, bent = -np.expm1(-x), x * np.exp(-x)
    room = limit - start
    return {
        "strain": np.asarray(base + limit - room * np.exp(-x)),
        "baseline": np.asarray(eps),
        "initial_stress": np.asarray(limit / theta * rise),
        "initial_hardening": np.asarray(room * limit / theta**2 * (rise - bent)),
        "saturation_stress": np.asarray(eps - ((limit + room) * rise - room * bent) / theta),
    }


def _log_ratio(first: str, initial: ArrayLike, second: str, final: ArrayLike) -> FloatArray:
    ratio = positive(first, initial) / positive(second, final)
    return np.asarray(np.log(np.where(ratio >= 1.0, ratio, np.nan)))


ROLLING_STRAIN: Final = Formula(rolling_strain, rolling_strain_sensitivities)
DRAWING_STRAIN: Final = Formula(drawing_strain, drawing_strain_sensitivities)
UPSETTING_STRAIN: Final = Formula(upsetting_strain, upsetting_strain_sensitivities)
PRIOR_WORK: Final = Formula(prior_work, prior_work_sensitivities)
