"""Student's distribution for whole columns, and effective degrees of freedom.

References
----------
.. [1] JCGM 100:2008, Guide to the expression of uncertainty in measurement, annex G:
   G.3 (Student's distribution), G.4 and equation (G.2b) (Welch and Satterthwaite).
"""

from collections.abc import Sequence
from functools import lru_cache
from typing import Final

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtr, stdtr, stdtrit

from coldwork.errors import InvalidArgument
from coldwork.guards import finite

__all__ = [
    "student_of_normal",
    "student_probability",
    "student_quantile",
    "welch_satterthwaite",
]

_NODES: Final = 56  # of the fit; enough for a tail of 1e-9
_DROPPED: Final = 1e-12  # coefficients below this do not show in ten digits [1]
_BLOCK: Final = 1 << 15  # values that stay in the cache together
_FARTHEST: Final = 8.5  # of a normal draw; beyond it the series is held [1]
_SEEN: Final = 1e-7  # relative size of what does not show in a draw [1]
_ROUNDING: Final = 1e-9  # effective degrees of freedom may fall this short of 1 [1]


def student_quantile(probability: float, degrees_of_freedom: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the coverage factor k of Student's distribution, P(t <= k) = probability.

    Parameters
    ----------
    probability : float
        One-sided, between 0 and 1: 0.975 for 95 % in the middle. [1]
    degrees_of_freedom : array_like, shape (...)
        :math:`\nu` from 1 to infinity, not rounded. [1]

    Returns
    -------
    ndarray of float64, shape of `degrees_of_freedom`
        :math:`k`; the normal quantile at infinity, NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If `probability` is not between 0 and 1, or any degrees of freedom are below 1.

    Notes
    -----
    ln |k| is smooth in 1/nu down to 0, so a Chebyshev series in 1/nu, fitted once per
    probability, gives it to ten digits without an inversion for each value.

    References
    ----------
    JCGM 100:2008, G.3.2 and table G.2.

    Examples
    --------
    >>> print(round(float(student_quantile(0.975, 10.0)), 2))
    2.23
    """
    nu = _from_one("degrees_of_freedom", degrees_of_freedom)
    if not 0.0 < probability < 1.0:
        message = f"probability must be between 0 and 1 (it is {probability:g})"
        raise InvalidArgument(message)
    if probability == 0.5:
        return np.asarray(np.where(np.isnan(nu), np.nan, 0.0))
    sign = 1.0 if probability > 0.5 else -1.0
    series = _log_quantile_series(min(probability, 1.0 - probability))
    flat = nu.ravel()
    k = np.empty_like(flat)
    for start in range(0, flat.size, _BLOCK):
        here = slice(start, start + _BLOCK)
        k[here] = chebyshev.chebval(2.0 / np.maximum(flat[here], 1.0) - 1.0, series)
    return np.asarray(sign * np.exp(k, out=k).reshape(nu.shape))


def student_probability(k: ArrayLike, degrees_of_freedom: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the probability that Student's t is at most k.

    Parameters
    ----------
    k : array_like, shape (...)
        Of either sign; may be infinite. [1]
    degrees_of_freedom : array_like, broadcast against `k`
        :math:`\nu` from 1 to infinity, not rounded. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        P(t <= k); that of the normal distribution at infinite degrees of freedom, NaN
        where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If any degrees of freedom are below 1.

    References
    ----------
    JCGM 100:2008, G.3.2.
    """
    nu = np.maximum(_from_one("degrees_of_freedom", degrees_of_freedom), 1.0)
    x, nu = np.broadcast_arrays(np.asarray(k, dtype=np.float64), nu)
    normal = np.isinf(nu)
    p = np.asarray(stdtr(np.where(normal, 1.0, nu), x))
    return np.asarray(np.where(normal, ndtr(x), p) if normal.any() else p)


def student_of_normal(z: NDArray[np.float64], degrees_of_freedom: float) -> NDArray[np.float64]:
    r"""Turn draws of a standard normal quantity into draws of Student's t.

    .. math:: t = F_\nu^{-1}(\Phi(z))

    Parameters
    ----------
    z : ndarray, shape (...)
        Draws. [1]
    degrees_of_freedom : float
        :math:`\nu`, from 1 to infinity. [1]

    Returns
    -------
    ndarray of float64, shape of `z`
        :math:`t`, to six digits or more; `z` itself at infinity. [1]

    Raises
    ------
    InvalidArgument
        If the degrees of freedom are below 1 or no number.

    Notes
    -----
    ln(t / z) is smooth and even in z, so a Chebyshev series in z^2 gives it in a few
    products, where dividing by the root of a chi-square draw needs a second draw.

    References
    ----------
    JCGM 101:2008, 6.4.9.2 (draws of a scaled and shifted t).
    """
    nu = float(_from_one("degrees_of_freedom", degrees_of_freedom))
    if np.isnan(nu):
        message = "degrees_of_freedom must be a number (it is nan)"
        raise InvalidArgument(message)
    if np.isinf(nu):
        return z
    x = np.square(z)
    np.minimum(x, _FARTHEST**2, out=x)
    x *= 4.0 / _FARTHEST**2
    x -= 2.0  # twice the argument of the series
    series = _log_ratio_series(max(nu, 1.0))
    last, ratio = np.zeros_like(x), np.full_like(x, series[-1])
    for c in series[-2:0:-1]:  # Clenshaw's recurrence, in place
        last *= -1.0
        last += c
        step = x * ratio
        last += step
        last, ratio = ratio, last
    ratio *= x
    ratio *= 0.5
    ratio -= last
    ratio += series[0]
    return np.asarray(z * np.exp(ratio, out=ratio))


def welch_satterthwaite(
    contributions: Sequence[ArrayLike], degrees_of_freedom: Sequence[ArrayLike]
) -> NDArray[np.float64]:
    r"""Compute the effective degrees of freedom of a combined uncertainty.

    .. math:: \nu_{eff} = \frac{u_c^4}{\sum_i u_i^4 / \nu_i}, \qquad u_c^2 = \sum_i u_i^2

    Parameters
    ----------
    contributions : sequence of array_like, broadcast against each other
        Contribution of each independent input :math:`u_i`, of either sign. [any unit, one
        for all]
    degrees_of_freedom : sequence of array_like, broadcast against `contributions`
        Degrees of freedom of each :math:`\nu_i`; infinite ones drop out. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\nu_{eff}`, not rounded; infinite where nothing but exactly known
        contributions, or none, are left; NaN where an input is NaN. [1]

    Raises
    ------
    InvalidArgument
        If there are not as many contributions as degrees of freedom, a contribution is
        infinite, or any degrees of freedom are below 1.

    References
    ----------
    JCGM 100:2008, G.4.1, equation (G.2b).
    """
    if len(contributions) != len(degrees_of_freedom):
        message = (
            f"contributions and degrees_of_freedom must go in pairs "
            f"({len(contributions)} and {len(degrees_of_freedom)})"
        )
        raise InvalidArgument(message)
    squares = [finite("contributions", c) ** 2 for c in contributions]
    total = np.asarray(sum(squares, start=np.asarray(0.0)))
    inverse = np.zeros_like(total)
    with np.errstate(divide="ignore", invalid="ignore"):
        for square, own in zip(squares, degrees_of_freedom, strict=True):
            nu = _from_one("degrees_of_freedom", own)
            inverse = inverse + np.where(total == 0.0, 0.0, square / total) ** 2 / nu
        return np.asarray(1.0 / inverse)


@lru_cache(maxsize=64)
def _log_quantile_series(tail: float) -> NDArray[np.float64]:
    """Fit ln k of the upper tail in 2/nu - 1, at the zeros of a Chebyshev polynomial."""
    nodes = np.cos(np.pi * (np.arange(_NODES) + 0.5) / _NODES)
    log_k = np.log(-np.asarray(stdtrit(2.0 / (nodes + 1.0), tail)))
    orders = np.arange(_NODES)[:, np.newaxis]
    series = 2.0 / _NODES * (np.cos(orders * np.arccos(nodes)) @ log_k)
    series[0] /= 2.0
    kept = int(np.flatnonzero(np.abs(series) > _DROPPED)[-1]) + 1
    return np.asarray(series[:kept])


@lru_cache(maxsize=4096)
def _log_ratio_series(nu: float) -> NDArray[np.float64]:
    """Fit ln(t / z) at equal tails in z^2, at the zeros of a Chebyshev polynomial."""
    nodes = np.cos(np.pi * (np.arange(_NODES) + 0.5) / _NODES)
    z = _FARTHEST * np.sqrt((nodes + 1.0) / 2.0)
    log_ratio = np.log(-np.asarray(stdtrit(nu, ndtr(-z))) / z)
    orders = np.arange(_NODES)[:, np.newaxis]
    series = 2.0 / _NODES * (np.cos(orders * np.arccos(nodes)) @ log_ratio)
    series[0] /= 2.0
    kept = np.flatnonzero(np.abs(series) > _SEEN)
    return np.asarray(series[: max(2, int(kept[-1]) + 1) if kept.size else 2])


def _from_one(name: str, value: ArrayLike) -> NDArray[np.float64]:
    x = np.asarray(value, dtype=np.float64)
    below = x < 1.0 - _ROUNDING
    if below.any():
        first = np.ravel(x)[np.flatnonzero(below)[0]]
        message = (
            f"{name} must be 1 or more ({int(below.sum())} bad of {x.size}, the first is {first:g})"
        )
        raise InvalidArgument(message)
    return x
