"""Plastic work per volume along a measured curve."""

import numpy as np
from numpy.typing import ArrayLike

from coldwork.errors import InvalidArgument
from coldwork.guards import finite

__all__ = ["elastic_line_work", "polyline_work"]


def polyline_work(true_stress: ArrayLike, true_plastic_strain: ArrayLike) -> float:
    r"""Compute the plastic work per volume under a polyline.

    .. math:: W = \sum_i \tfrac{1}{2} (\sigma_i + \sigma_{i+1})
              (\varepsilon_{i+1} - \varepsilon_i)

    Parameters
    ----------
    true_stress : array_like, shape (n,)
        :math:`\sigma` of the points in their order. [Pa]
    true_plastic_strain : array_like, shape (n,)
        :math:`\varepsilon`; it may fall where noise or unloading makes it. [1]

    Returns
    -------
    float
        Work :math:`W`; 0 for fewer than 2 points, NaN where an input is NaN. [J/m3]

    Raises
    ------
    InvalidArgument
        If a stress or strain is infinite, or their numbers differ.

    Notes
    -----
    Exact for the polyline; of the curve behind it it misses a part that falls with the
    square of the spacing. Independent noise of stress and strain adds no bias.

    References
    ----------
    The work of a stress over a strain; trapezoidal rule.
    """
    sigma = finite("true_stress", true_stress)
    epsilon = finite("true_plastic_strain", true_plastic_strain)
    if sigma.shape != epsilon.shape or sigma.ndim != 1:
        message = (
            "true_stress and true_plastic_strain must go in pairs "
            f"(shapes {sigma.shape} and {epsilon.shape})"
        )
        raise InvalidArgument(message)
    return float(np.sum(0.5 * (sigma[:-1] + sigma[1:]) * np.diff(epsilon)))


def elastic_line_work(slope: float, strain: float) -> float:
    r"""Compute what the elastic line itself adds to the integral of stress over plastic strain.

    .. math:: \int \sigma\, d\left(\ln(1 + e) - \sigma / m\right)
              = -m \left(e^3 + \tfrac{1}{2} e^4\right), \qquad \sigma = m e (1 + e)

    Parameters
    ----------
    slope : float
        Of engineering stress by engineering strain :math:`m`. [Pa]
    strain : float
        Engineering strain up to which the line goes :math:`e`, negative in
        compression. [1]

    Returns
    -------
    float
        The (tiny, and in tension negative) part. [J/m3]

    Raises
    ------
    InvalidArgument
        If the slope or strain is infinite.

    Notes
    -----
    A line that is straight in engineering stress and strain is not quite straight in true
    ones; with this part the work counts from the unloaded state whichever point is first.

    References
    ----------
    Derived here: the integrand is -m e (3 e + 2 e^2) de.
    """
    m, e = float(finite("slope", slope)), float(finite("strain", strain))
    return -m * (e**3 + 0.5 * e**4)
