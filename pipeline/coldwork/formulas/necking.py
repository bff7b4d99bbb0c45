"""The stress in a neck: Bridgman's correction.

References
----------
.. [1] Bridgman, Studies in Large Plastic Flow and Fracture, McGraw-Hill 1952, ch. 1
   (from memory; the relation is in every textbook of mechanical metallurgy).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import positive

__all__ = ["BRIDGMAN_FACTOR", "bridgman_factor", "bridgman_factor_sensitivities"]


def bridgman_factor(neck_radius: ArrayLike, profile_radius: ArrayLike) -> NDArray[np.float64]:
    r"""Compute flow stress over mean axial stress in the neck of a round coupon.

    .. math:: \frac{\sigma}{\bar\sigma}
              = \left[\left(1 + \frac{2R}{a}\right) \ln\left(1 + \frac{a}{2R}\right)\right]^{-1}

    Parameters
    ----------
    neck_radius : array_like, shape (...)
        Radius of the smallest cross-section :math:`a`. [m]
    profile_radius : array_like, broadcast against `neck_radius`
        Radius of the neck's outline in a plane through the axis :math:`R`. [m]

    Returns
    -------
    ndarray of float64, the broadcast shape
        The factor, between 0 and 1, NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any radius is zero, negative or infinite.

    Notes
    -----
    For round coupons. It takes the strain as even over the neck's cross-section, which
    holds to a few per cent for a/R up to about 1.

    References
    ----------
    Bridgman, Studies in Large Plastic Flow and Fracture, McGraw-Hill 1952, ch. 1.
    """
    x = _ratio(neck_radius, profile_radius)
    return np.asarray(x / ((1.0 + x) * np.log1p(x)))


def bridgman_factor_sensitivities(
    neck_radius: ArrayLike, profile_radius: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `bridgman_factor` by each argument.

    Parameters
    ----------
    neck_radius, profile_radius : array_like
        As for `bridgman_factor`. [m], [m]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1/m]

    Raises
    ------
    InvalidArgument
        As `bridgman_factor` does.
    """
    x = _ratio(neck_radius, profile_radius)
    logarithm = np.log1p(x)
    by_ratio = (logarithm - x) / ((1.0 + x) * logarithm) ** 2
    a, r = np.asarray(neck_radius, dtype=np.float64), np.asarray(profile_radius, dtype=np.float64)
    return {
        "neck_radius": np.asarray(by_ratio / (2.0 * r)),
        "profile_radius": np.asarray(-by_ratio * a / (2.0 * r**2)),
    }


def _ratio(neck_radius: ArrayLike, profile_radius: ArrayLike) -> NDArray[np.float64]:
    """Give a / 2R, checked."""
    a, r = positive("neck_radius", neck_radius), positive("profile_radius", profile_radius)
    return np.asarray(a / (2.0 * r))


BRIDGMAN_FACTOR: Final = Formula(bridgman_factor, bridgman_factor_sensitivities)
