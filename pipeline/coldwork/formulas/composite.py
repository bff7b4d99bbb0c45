r"""Walls and interiors of a cell structure: two densities behind one stress.

Both regions strain alike, so that each carries its own flow stress and the stresses add by
the volume that each takes up:

.. math:: \sigma = f\, \sigma_w + (1 - f)\, \sigma_c

One ratio of wall to interior, of stresses or of densities, then settles both.

References
----------
.. [1] Mughrabi, Acta Metall. 31 (1983) 1367-1379, doi:10.1016/0001-6160(83)90007-X (the
   composite; from memory).
.. [2] Wilkens, in Fundamental Aspects of Dislocation Theory, NBS Special Publication 317 II,
   1970, 1195-1221 (arrangement of lines; from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.bounds import from_to
from coldwork.formulas.formula import Formula
from coldwork.guards import not_negative, positive

__all__ = [
    "EFFECTIVE_OUTER_RADIUS",
    "INTERIOR_DENSITY",
    "INTERIOR_STRESS",
    "MEAN_LINE_ENERGY",
    "MEAN_OVER_REGIONS",
    "STRESS_RATIO",
    "WALL_DENSITY",
    "WALL_STRESS",
    "effective_outer_radius",
    "effective_outer_radius_sensitivities",
    "interior_density",
    "interior_density_sensitivities",
    "interior_stress",
    "interior_stress_sensitivities",
    "mean_line_energy",
    "mean_line_energy_sensitivities",
    "mean_over_regions",
    "mean_over_regions_sensitivities",
    "stress_ratio",
    "stress_ratio_sensitivities",
    "wall_density",
    "wall_density_sensitivities",
    "wall_stress",
    "wall_stress_sensitivities",
]

FloatArray = NDArray[np.float64]


def interior_stress(
    stress: ArrayLike, wall_fraction: ArrayLike, stress_ratio: ArrayLike
) -> FloatArray:
    r"""Compute the dislocation stress in the cells' interiors.

    .. math:: \sigma_c = \frac{\sigma_d}{1 - f + f r}, \qquad r = \sigma_w / \sigma_c

    Parameters
    ----------
    stress : array_like, shape (...)
        Dislocation stress of the whole :math:`\sigma_d`. [Pa]
    wall_fraction : array_like, broadcast against `stress`
        Fraction of the volume that walls take up :math:`f`. [1]
    stress_ratio : array_like, broadcast against `stress`
        Dislocation stress in the walls over that in the interiors :math:`r`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\sigma_c`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any stress or ratio is zero, negative or infinite, or a fraction not from 0 to 1.

    Notes
    -----
    The stress of a region goes through the same Taylor law as that of the whole, whichever
    the sheet names: the logarithmic one gives each region a coefficient of its own. Below,
    `interior_density` and `wall_density` do both steps in one for a constant coefficient.

    References
    ----------
    Mughrabi, Acta Metall. 31 (1983) 1367-1379: sum of the regions' stresses by volume
    (from memory).
    """
    *_, weight = _weight(wall_fraction, "stress_ratio", stress_ratio)
    return np.asarray(positive("stress", stress) / weight)


def interior_stress_sensitivities(
    stress: ArrayLike, wall_fraction: ArrayLike, stress_ratio: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `interior_stress` by each argument.

    Parameters
    ----------
    stress, wall_fraction, stress_ratio : array_like
        As for `interior_stress`. [Pa], [1], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `interior_stress` does.
    """
    inside = interior_stress(stress, wall_fraction, stress_ratio)
    f, r, weight = _weight(wall_fraction, "stress_ratio", stress_ratio)
    return {
        "stress": np.asarray(1.0 / weight),
        "wall_fraction": np.asarray(inside * (1.0 - r) / weight),
        "stress_ratio": np.asarray(-inside * f / weight),
    }


def wall_stress(stress: ArrayLike, wall_fraction: ArrayLike, stress_ratio: ArrayLike) -> FloatArray:
    r"""Compute the dislocation stress in the walls.

    .. math:: \sigma_w = \frac{r\, \sigma_d}{1 - f + f r}, \qquad r = \sigma_w / \sigma_c

    Parameters
    ----------
    stress, wall_fraction, stress_ratio : array_like, shape (...)
        As for `interior_stress`. [Pa], [1], [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\sigma_w`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        As `interior_stress` does.

    References
    ----------
    Mughrabi, Acta Metall. 31 (1983) 1367-1379 (from memory).
    """
    _, r, weight = _weight(wall_fraction, "stress_ratio", stress_ratio)
    return np.asarray(positive("stress", stress) * r / weight)


def wall_stress_sensitivities(
    stress: ArrayLike, wall_fraction: ArrayLike, stress_ratio: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `wall_stress` by each argument.

    Parameters
    ----------
    stress, wall_fraction, stress_ratio : array_like
        As for `wall_stress`. [Pa], [1], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `wall_stress` does.
    """
    wall = wall_stress(stress, wall_fraction, stress_ratio)
    f, r, weight = _weight(wall_fraction, "stress_ratio", stress_ratio)
    return {
        "stress": np.asarray(r / weight),
        "wall_fraction": np.asarray(wall * (1.0 - r) / weight),
        "stress_ratio": np.asarray(wall * (1.0 - f) / (r * weight)),
    }


def stress_ratio(density_ratio: ArrayLike) -> FloatArray:
    r"""Compute the ratio of stresses that a ratio of densities makes, constant coefficient.

    .. math:: \sigma_w / \sigma_c = \sqrt{\rho_w / \rho_c}

    Parameters
    ----------
    density_ratio : array_like, shape (...)
        Density in the walls over that in the interiors. [1]

    Returns
    -------
    ndarray of float64, shape of `density_ratio`
        Ratio of stresses, NaN where it is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any ratio is zero, negative or infinite.

    References
    ----------
    Taylor's relation with one coefficient for both regions (Mughrabi 1983, from memory).
    """
    return np.asarray(np.sqrt(positive("density_ratio", density_ratio)))


def stress_ratio_sensitivities(density_ratio: ArrayLike) -> dict[str, FloatArray]:
    """Differentiate `stress_ratio` by its argument.

    Parameters
    ----------
    density_ratio : array_like, shape (...)
        As for `stress_ratio`. [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1]

    Raises
    ------
    InvalidArgument
        As `stress_ratio` does.
    """
    return {"density_ratio": np.asarray(0.5 / stress_ratio(density_ratio))}


def interior_density(
    density: ArrayLike, wall_fraction: ArrayLike, density_ratio: ArrayLike
) -> FloatArray:
    r"""Compute the density in the interiors behind the stress of the whole.

    .. math:: \rho_c = \frac{\rho_h}{(1 - f + f \sqrt k)^2}, \qquad k = \rho_w / \rho_c

    Parameters
    ----------
    density : array_like, shape (...)
        Density :math:`\rho_h` that would carry the stress if it were the same everywhere:
        what Taylor's relation gives for the whole. [m^-2]
    wall_fraction : array_like, broadcast against `density`
        Fraction of the volume that walls take up :math:`f`. [1]
    density_ratio : array_like, broadcast against `density`
        Density in the walls over that in the interiors :math:`k`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\rho_c`, NaN where an input is NaN. [m^-2]

    Raises
    ------
    InvalidArgument
        If any density or ratio is zero, negative or infinite, or a fraction not from 0 to 1.

    Notes
    -----
    One constant coefficient for both regions, given as itself or as a slope. With the
    logarithmic law go by `interior_stress`.

    References
    ----------
    Mughrabi, Acta Metall. 31 (1983) 1367-1379 (from memory), with Taylor's relation in both
    regions: (1 - f) sqrt(rho_c) + f sqrt(rho_w) = sqrt(rho_h).
    """
    *_, weight = _root_weight(wall_fraction, density_ratio)
    return np.asarray(positive("density", density) / weight**2)


def interior_density_sensitivities(
    density: ArrayLike, wall_fraction: ArrayLike, density_ratio: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `interior_density` by each argument.

    Parameters
    ----------
    density, wall_fraction, density_ratio : array_like
        As for `interior_density`. [m^-2], [1], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m^-2 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `interior_density` does.
    """
    inside = interior_density(density, wall_fraction, density_ratio)
    f, root, weight = _root_weight(wall_fraction, density_ratio)
    return {
        "density": np.asarray(1.0 / weight**2),
        "wall_fraction": np.asarray(2.0 * inside * (1.0 - root) / weight),
        "density_ratio": np.asarray(-inside * f / (root * weight)),
    }


def wall_density(
    density: ArrayLike, wall_fraction: ArrayLike, density_ratio: ArrayLike
) -> FloatArray:
    r"""Compute the density in the walls behind the stress of the whole.

    .. math:: \rho_w = \frac{k\, \rho_h}{(1 - f + f \sqrt k)^2}, \qquad k = \rho_w / \rho_c

    Parameters
    ----------
    density, wall_fraction, density_ratio : array_like, shape (...)
        As for `interior_density`. [m^-2], [1], [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\rho_w`, NaN where an input is NaN. [m^-2]

    Raises
    ------
    InvalidArgument
        As `interior_density` does.

    References
    ----------
    Mughrabi, Acta Metall. 31 (1983) 1367-1379 (from memory).
    """
    _, root, weight = _root_weight(wall_fraction, density_ratio)
    return np.asarray(positive("density", density) * (root / weight) ** 2)


def wall_density_sensitivities(
    density: ArrayLike, wall_fraction: ArrayLike, density_ratio: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `wall_density` by each argument.

    Parameters
    ----------
    density, wall_fraction, density_ratio : array_like
        As for `wall_density`. [m^-2], [1], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m^-2 per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `wall_density` does.
    """
    wall = wall_density(density, wall_fraction, density_ratio)
    f, root, weight = _root_weight(wall_fraction, density_ratio)
    return {
        "density": np.asarray((root / weight) ** 2),
        "wall_fraction": np.asarray(2.0 * wall * (1.0 - root) / weight),
        "density_ratio": np.asarray(wall * (1.0 - f) / (root**2 * weight)),
    }


def mean_over_regions(wall: ArrayLike, interior: ArrayLike, wall_fraction: ArrayLike) -> FloatArray:
    r"""Compute the mean over the volume of what walls and interiors hold.

    .. math:: \bar x = f x_w + (1 - f) x_c

    Parameters
    ----------
    wall, interior : array_like, shape (...)
        Per volume, in each of the two: density, or stored energy with each region's own
        outer radius. [m^-2 or J/m^3]
    wall_fraction : array_like, broadcast against `wall`
        Fraction of the volume that walls take up :math:`f`. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Mean, NaN where an input is NaN. [unit of `wall`]

    Raises
    ------
    InvalidArgument
        If any content is negative or infinite, or a fraction not from 0 to 1.

    Notes
    -----
    The mean density is never below the density that would carry the stress if it were the
    same everywhere: a mean of roots squared is at most the mean of the squares.

    References
    ----------
    Definition of a mean over the volume.
    """
    f = from_to("wall_fraction", wall_fraction, 0.0, 1.0)
    inside = not_negative("interior", interior)
    return np.asarray(f * not_negative("wall", wall) + (1.0 - f) * inside)


def mean_over_regions_sensitivities(
    wall: ArrayLike, interior: ArrayLike, wall_fraction: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `mean_over_regions` by each argument.

    Parameters
    ----------
    wall, interior, wall_fraction : array_like
        As for `mean_over_regions`. [m^-2 or J/m^3], [the same], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [unit of `wall` per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `mean_over_regions` does.
    """
    f = from_to("wall_fraction", wall_fraction, 0.0, 1.0)
    inside = not_negative("interior", interior)
    return {
        "wall": f,
        "interior": np.asarray(1.0 - f),
        "wall_fraction": np.asarray(not_negative("wall", wall) - inside),
    }


def mean_line_energy(stored_energy: ArrayLike, density: ArrayLike) -> FloatArray:
    r"""Compute the mean energy per length of lines that lie in several regions.

    .. math:: \bar E = u / \bar\rho

    Parameters
    ----------
    stored_energy : array_like, shape (...)
        Mean stored energy per volume :math:`u`. [J/m^3]
    density : array_like, broadcast against `stored_energy`
        Mean density :math:`\bar\rho`. [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Mean over the length of line, NaN where an input is NaN. [J/m]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Definition of a mean over the length.
    """
    return np.asarray(positive("stored_energy", stored_energy) / positive("density", density))


def mean_line_energy_sensitivities(
    stored_energy: ArrayLike, density: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `mean_line_energy` by each argument.

    Parameters
    ----------
    stored_energy, density : array_like
        As for `mean_line_energy`. [J/m^3], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [J/m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `mean_line_energy` does.
    """
    energy = mean_line_energy(stored_energy, density)
    return {
        "stored_energy": np.asarray(1.0 / np.asarray(density, dtype=np.float64)),
        "density": np.asarray(-energy / np.asarray(density)),
    }


def effective_outer_radius(arrangement: ArrayLike, density: ArrayLike) -> FloatArray:
    r"""Compute the effective outer radius of lines in a given arrangement.

    .. math:: R_e = M^* / \sqrt\rho

    Parameters
    ----------
    arrangement : array_like, shape (...)
        :math:`M^*`: below 1 where lines screen each other well, as in dipoles and walls,
        above 1 where they lie at random. [1]
    density : array_like, broadcast against `arrangement`
        Dislocation density :math:`\rho`. [m^-2]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`R_e`, which stands for the outer radius of the line energy; NaN where an input
        is NaN. [m]

    Raises
    ------
    InvalidArgument
        If any argument is zero, negative or infinite.

    References
    ----------
    Wilkens 1970, NBS Special Publication 317 II, 1195-1221: M = R_e sqrt(rho) (from memory).
    """
    rho = positive("density", density)
    return np.asarray(positive("arrangement", arrangement) / np.sqrt(rho))


def effective_outer_radius_sensitivities(
    arrangement: ArrayLike, density: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `effective_outer_radius` by each argument.

    Parameters
    ----------
    arrangement, density : array_like
        As for `effective_outer_radius`. [1], [m^-2]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [m per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `effective_outer_radius` does.
    """
    radius = effective_outer_radius(arrangement, density)
    return {
        "arrangement": np.asarray(radius / np.asarray(arrangement)),
        "density": np.asarray(-radius / (2.0 * np.asarray(density))),
    }


def _weight(
    wall_fraction: ArrayLike, name: str, ratio: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the wall fraction, the ratio of stresses, and the stress of the whole over sigma_c."""
    f = from_to("wall_fraction", wall_fraction, 0.0, 1.0)
    r = positive(name, ratio)
    return f, r, np.asarray(1.0 - f + f * r)


def _root_weight(
    wall_fraction: ArrayLike, density_ratio: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the wall fraction, the root of the ratio of densities, and the weight as above."""
    root = stress_ratio(density_ratio)
    f, _, weight = _weight(wall_fraction, "density_ratio", root)
    return f, root, weight


INTERIOR_STRESS: Final = Formula(interior_stress, interior_stress_sensitivities)
WALL_STRESS: Final = Formula(wall_stress, wall_stress_sensitivities)
STRESS_RATIO: Final = Formula(stress_ratio, stress_ratio_sensitivities)
INTERIOR_DENSITY: Final = Formula(interior_density, interior_density_sensitivities)
WALL_DENSITY: Final = Formula(wall_density, wall_density_sensitivities)
MEAN_OVER_REGIONS: Final = Formula(mean_over_regions, mean_over_regions_sensitivities)
MEAN_LINE_ENERGY: Final = Formula(mean_line_energy, mean_line_energy_sensitivities)
EFFECTIVE_OUTER_RADIUS: Final = Formula(
    effective_outer_radius, effective_outer_radius_sensitivities
)
