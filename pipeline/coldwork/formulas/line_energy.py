"""Energy per length of a dislocation line in an isotropic metal.

References
----------
.. [1] Hirth and Lothe, Theory of Dislocations, 2nd edition, Wiley 1982, chapter 3
   (straight dislocations, isotropic; from memory).
"""

from math import pi
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas.formula import Formula
from coldwork.guards import between, finite, not_negative, positive

__all__ = [
    "CORE_RADIUS",
    "ENERGY_FACTOR",
    "LINE_ENERGY",
    "LINE_ENERGY_RULE_OF_THUMB",
    "OUTER_RADIUS",
    "UNIFORM_MEAN_COS2",
    "core_radius",
    "core_radius_alone",
    "core_radius_sensitivities",
    "energy_factor",
    "energy_factor_sensitivities",
    "line_energy",
    "line_energy_rule_of_thumb",
    "line_energy_rule_of_thumb_sensitivities",
    "line_energy_sensitivities",
    "mean_cos2",
    "outer_radius",
    "outer_radius_sensitivities",
]

UNIFORM_MEAN_COS2: Final = 0.5  # every angle alike [1]
_ROUNDING: Final = 1e-9  # how far off fractions and their means may be written [1]


def mean_cos2(angles: ArrayLike, fractions: ArrayLike) -> float:
    r"""Compute the mean square cosine of a mix of characters.

    .. math:: \langle\cos^2\beta\rangle = \sum_i f_i \cos^2 \beta_i

    Parameters
    ----------
    angles : array_like, shape (n,)
        Angle between line and Burgers vector :math:`\beta_i`: 0 screw, pi/2 edge. [rad]
    fractions : array_like, shape (n,)
        Fraction of the length of line at each angle :math:`f_i`, sum 1. [1]

    Returns
    -------
    float
        Between 0, all edge, and 1, all screw. [1]

    Raises
    ------
    InvalidArgument
        If an angle is infinite, a fraction negative or infinite, the numbers of both
        differ, or the fractions do not sum to 1.

    References
    ----------
    Definition of a mean over the length of line.
    """
    beta, f = finite("angles", angles), not_negative("fractions", fractions)
    if beta.shape != f.shape:
        message = f"angles and fractions must go in pairs ({beta.size} angles, {f.size} fractions)"
        raise InvalidArgument(message)
    if abs(float(f.sum()) - 1.0) > _ROUNDING:
        message = f"fractions must sum to 1 (they sum to {float(f.sum()):.10g})"
        raise InvalidArgument(message)
    return float(np.sum(f * np.cos(beta) ** 2))


def energy_factor(
    shear_modulus: ArrayLike, poisson_ratio: ArrayLike, mean_cos2: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the energy factor of a mix of characters, isotropic.

    .. math:: K = G\, \frac{1 - \nu \langle\cos^2\beta\rangle}{1 - \nu}

    Parameters
    ----------
    shear_modulus : array_like, shape (...)
        :math:`G`. [Pa]
    poisson_ratio : array_like, broadcast against `shear_modulus`
        :math:`\nu`. [1]
    mean_cos2 : array_like, broadcast against `shear_modulus`
        Mean square cosine of the angle between line and Burgers vector. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Energy factor :math:`K`: G for screw, G/(1 - nu) for edge; NaN where an input
        is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any shear modulus is zero, negative or infinite, a Poisson ratio not
        between -1 and 0.5, or a mean square cosine not from 0 to 1.

    References
    ----------
    Hirth and Lothe 1982, chapter 3, energy of a straight mixed dislocation (from
    memory); the energy is linear in cos^2, so the mean of K is K of the mean.
    """
    g = positive("shear_modulus", shear_modulus)
    nu = between("poisson_ratio", poisson_ratio, -1.0, 0.5)
    return np.asarray(g * (1.0 - nu * _share("mean_cos2", mean_cos2)) / (1.0 - nu))


def energy_factor_sensitivities(
    shear_modulus: ArrayLike, poisson_ratio: ArrayLike, mean_cos2: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `energy_factor` by each argument.

    Parameters
    ----------
    shear_modulus, poisson_ratio, mean_cos2 : array_like
        As for `energy_factor`. [Pa], [1], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `energy_factor` does.
    """
    k = energy_factor(shear_modulus, poisson_ratio, mean_cos2)
    g = np.asarray(shear_modulus, dtype=np.float64)
    nu = np.asarray(poisson_ratio, dtype=np.float64)
    return {
        "shear_modulus": np.asarray(k / g),
        "poisson_ratio": np.asarray(g * (1.0 - np.asarray(mean_cos2)) / (1.0 - nu) ** 2),
        "mean_cos2": np.asarray(-g * nu / (1.0 - nu)),
    }


def core_radius(multiple: ArrayLike, burgers_vector: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the inner cut-off radius of the elastic energy.

    .. math:: r_0 = m\, b

    Parameters
    ----------
    multiple : array_like, shape (...)
        Core radius in Burgers vectors :math:`m`. [1]
    burgers_vector : array_like, broadcast against `multiple`
        Length of the Burgers vector :math:`b`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Core radius :math:`r_0`, NaN where an input is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Hirth and Lothe 1982: from b/4 to b, the core's energy within it (from memory).
    """
    return np.asarray(positive("multiple", multiple) * positive("burgers_vector", burgers_vector))


def core_radius_sensitivities(
    multiple: ArrayLike, burgers_vector: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `core_radius` by each argument.

    Parameters
    ----------
    multiple, burgers_vector : array_like
        As for `core_radius`. [1], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `core_radius` does.
    """
    return {
        "multiple": positive("burgers_vector", burgers_vector),
        "burgers_vector": positive("multiple", multiple),
    }


def outer_radius(length: ArrayLike, factor: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the outer cut-off radius of the elastic energy.

    .. math:: R = f\, \ell

    Parameters
    ----------
    length : array_like, shape (...)
        What screens the line's field :math:`\ell`: the mean spacing, half of it, or
        the grain size. [m]
    factor : array_like, broadcast against `length`
        :math:`f`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Outer radius :math:`R`, NaN where an input is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Hirth and Lothe 1982: the distance to the nearest lines of opposite sign (from memory).
    """
    return np.asarray(positive("length", length) * positive("factor", factor))


def outer_radius_sensitivities(
    length: ArrayLike, factor: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `outer_radius` by each argument.

    Parameters
    ----------
    length, factor : array_like
        As for `outer_radius`. [m], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `outer_radius` does.
    """
    return {"length": positive("factor", factor), "factor": positive("length", length)}


def line_energy(
    energy_factor: ArrayLike,
    burgers_vector: ArrayLike,
    outer_radius: ArrayLike,
    core_radius: ArrayLike,
    shear_modulus: ArrayLike,
    core_energy: ArrayLike,
) -> NDArray[np.float64]:
    r"""Compute the energy per length of a dislocation line.

    .. math:: E = \frac{K b^2}{4 \pi} \ln\frac{R}{r_0} + c\, G b^2

    Parameters
    ----------
    energy_factor : array_like, shape (...)
        :math:`K` of the mix of characters. [Pa]
    burgers_vector : array_like, broadcast against `energy_factor`
        Length of the Burgers vector :math:`b`. [m]
    outer_radius : array_like, broadcast against `energy_factor`
        :math:`R`. [m]
    core_radius : array_like, broadcast against `energy_factor`
        :math:`r_0`. [m]
    shear_modulus : array_like, broadcast against `energy_factor`
        :math:`G`, of the core's term. [Pa]
    core_energy : array_like, broadcast against `energy_factor`
        Further energy of the core in units of :math:`G b^2`, :math:`c`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Line energy :math:`E`; NaN where an input is NaN, and where there is none:
        `outer_radius` not above `core_radius`, or a core term that leaves nothing. [J/m]

    Raises
    ------
    InvalidArgument
        If any argument but the last is zero, negative or infinite, or that one
        infinite.

    Notes
    -----
    Below R / r0 = 5 or so the logarithm says little: see ``rules``.

    References
    ----------
    Hirth and Lothe 1982, chapter 3, energy of a straight dislocation between two
    radii (from memory).
    """
    b2 = positive("burgers_vector", burgers_vector) ** 2
    log_ratio = _log_ratio(positive("outer_radius", outer_radius), core_radius)
    elastic = positive("energy_factor", energy_factor) * b2 / (4.0 * pi) * log_ratio
    core = finite("core_energy", core_energy) * positive("shear_modulus", shear_modulus) * b2
    energy = elastic + core
    return np.asarray(np.where(energy > 0.0, energy, np.nan))


def line_energy_sensitivities(
    energy_factor: ArrayLike,
    burgers_vector: ArrayLike,
    outer_radius: ArrayLike,
    core_radius: ArrayLike,
    shear_modulus: ArrayLike,
    core_energy: ArrayLike,
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `line_energy` by each argument.

    Parameters
    ----------
    energy_factor, burgers_vector, outer_radius, core_radius, shear_modulus, \
core_energy : array_like
        As for `line_energy`. [Pa], [m], [m], [m], [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `line_energy` does.
    """
    energy = line_energy(
        energy_factor, burgers_vector, outer_radius, core_radius, shear_modulus, core_energy
    )
    b = np.asarray(burgers_vector, dtype=np.float64)
    outer = np.asarray(outer_radius, dtype=np.float64)
    per_log = np.asarray(energy_factor) * b**2 / (4.0 * pi)
    return {
        "energy_factor": np.asarray(b**2 / (4.0 * pi) * _log_ratio(outer, core_radius)),
        "burgers_vector": np.asarray(2.0 * energy / b),
        "outer_radius": np.asarray(per_log / outer),
        "core_radius": np.asarray(-per_log / np.asarray(core_radius)),
        "shear_modulus": np.asarray(np.asarray(core_energy) * b**2),
        "core_energy": np.asarray(np.asarray(shear_modulus) * b**2),
    }


def core_radius_alone(
    multiple: ArrayLike, core_energy: ArrayLike, shear_modulus: ArrayLike, energy_factor: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the core radius that gives the same line energy without a core energy.

    .. math:: r_0' = r_0 \exp\left(-4 \pi c\, G / K\right)

    Parameters
    ----------
    multiple : array_like, shape (...)
        Core radius :math:`r_0`. [Burgers vectors]
    core_energy : array_like, broadcast against `multiple`
        Energy of the core in units of :math:`G b^2`, :math:`c`. [1]
    shear_modulus, energy_factor : array_like, broadcast against `multiple`
        :math:`G`, and :math:`K` of the mix of characters. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`r_0'`, NaN where an input is NaN. [Burgers vectors]

    Raises
    ------
    InvalidArgument
        If any argument but the core energy is zero, negative or infinite, or that one
        infinite.

    References
    ----------
    `line_energy`, with and without its last term set equal.
    """
    shift = finite("core_energy", core_energy) * positive("shear_modulus", shear_modulus)
    ratio = 4.0 * pi * shift / positive("energy_factor", energy_factor)
    return np.asarray(positive("multiple", multiple) * np.exp(-ratio))


def line_energy_rule_of_thumb(
    shear_modulus: ArrayLike, burgers_vector: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the usual estimate of a line energy.

    .. math:: E \approx \tfrac{1}{2} G b^2

    Parameters
    ----------
    shear_modulus : array_like, shape (...)
        :math:`G`. [Pa]
    burgers_vector : array_like, broadcast against `shear_modulus`
        Length of the Burgers vector :math:`b`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Line energy, NaN where an input is NaN. [J/m]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Common practice (Hull and Bacon, Introduction to Dislocations, from memory:
    0.5 to 1.0 G b^2).
    """
    b = positive("burgers_vector", burgers_vector)
    return np.asarray(0.5 * positive("shear_modulus", shear_modulus) * b**2)


def line_energy_rule_of_thumb_sensitivities(
    shear_modulus: ArrayLike, burgers_vector: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `line_energy_rule_of_thumb` by each argument.

    Parameters
    ----------
    shear_modulus, burgers_vector : array_like
        As for `line_energy_rule_of_thumb`. [Pa], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `line_energy_rule_of_thumb` does.
    """
    energy = line_energy_rule_of_thumb(shear_modulus, burgers_vector)
    return {
        "shear_modulus": np.asarray(energy / np.asarray(shear_modulus)),
        "burgers_vector": np.asarray(2.0 * energy / np.asarray(burgers_vector)),
    }


def _log_ratio(outer: NDArray[np.float64], core: ArrayLike) -> NDArray[np.float64]:
    """Give ln(R / r0), NaN where R is not above r0."""
    ratio = outer / positive("core_radius", core)
    return np.asarray(np.log(np.where(ratio > 1.0, ratio, np.nan)))


def _share(name: str, value: ArrayLike) -> NDArray[np.float64]:
    x = not_negative(name, value)
    above = x > 1.0 + _ROUNDING
    if above.any():
        first = np.ravel(x)[np.flatnonzero(above)[0]]
        message = (
            f"{name} must be from 0 to 1 ({int(above.sum())} bad of {x.size}, "
            f"the first is {first:g})"
        )
        raise InvalidArgument(message)
    return x


CORE_RADIUS: Final = Formula(core_radius, core_radius_sensitivities)
ENERGY_FACTOR: Final = Formula(energy_factor, energy_factor_sensitivities)
LINE_ENERGY: Final = Formula(line_energy, line_energy_sensitivities)
LINE_ENERGY_RULE_OF_THUMB: Final = Formula(
    line_energy_rule_of_thumb, line_energy_rule_of_thumb_sensitivities
)
OUTER_RADIUS: Final = Formula(outer_radius, outer_radius_sensitivities)
