"""Variances taken together, and the rule by which one leaves the pool.

References
----------
.. [1] ISO 5725-2:2019, Cochran's test; for equal numbers of readings the rule here is
   the same test (C = F / (F + k - 1)).
.. [2] Cochran, Annals of Eugenics 11 (1941) 47-52, doi:10.1111/j.1469-1809.1941.tb02271.x.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import betainccinv, betaincinv

from coldwork.errors import InvalidArgument
from coldwork.guards import between, not_negative, positive

__all__ = ["PoolResult", "cochran_critical", "leave_noisy_out", "pooled", "scatter_limit"]


@dataclass(frozen=True)
class PoolResult:
    """A pooled variance, and which coupons it does not speak for.

    Attributes
    ----------
    variance : float
        Pooled over those still in; NaN where none is. [square of the readings' unit]
    degrees_of_freedom : float
        Theirs together. [1]
    left_out : ndarray of bool, shape (n,)
        Whether a coupon left the pool and keeps its own variance.
    ratio : ndarray of float64, shape (n,)
        Own variance over the pooled one of the others, in the round in which the
        coupon left, else in the last; infinite where the others do not scatter at all,
        NaN where there is nothing to compare. [1]
    limit : ndarray of float64, shape (n,)
        What that ratio may not exceed, of the same round. [1]
    """

    variance: float
    degrees_of_freedom: float
    left_out: NDArray[np.bool_]
    ratio: NDArray[np.float64]
    limit: NDArray[np.float64]


def pooled(variances: ArrayLike, degrees_of_freedom: ArrayLike) -> tuple[float, float]:
    r"""Pool variances.

    .. math:: s_p^2 = \sum_i \nu_i s_i^2 / \sum_i \nu_i

    Parameters
    ----------
    variances : array_like, shape (n,)
        :math:`s_i^2`; NaN ones are left out. [any unit, one for all]
    degrees_of_freedom : array_like, shape (n,)
        :math:`\nu_i`; those with 0 are left out. [1]

    Returns
    -------
    variance : float
        :math:`s_p^2`, NaN where nothing was pooled. [unit of `variances`]
    degrees_of_freedom : float
        :math:`\sum_i \nu_i`. [1]

    Raises
    ------
    InvalidArgument
        If a variance or degrees of freedom are negative or infinite, or their shapes
        differ.

    References
    ----------
    JCGM 100:2008, 4.2.4 (pooled estimate of variance).
    """
    s2, nu = _checked(variances, degrees_of_freedom)
    total = float(nu.sum())
    return (float(np.dot(nu, s2)) / total if total > 0.0 else float("nan")), total


def scatter_limit(
    count: int,
    degrees_of_freedom: ArrayLike,
    others: ArrayLike,
    significance: float = 0.01,
) -> NDArray[np.float64]:
    """Compute by how much a coupon's variance may exceed that of the others.

    Parameters
    ----------
    count : int
        Coupons that are looked at together. [1]
    degrees_of_freedom : array_like, shape (...)
        Of the coupon's variance. [1]
    others : array_like, broadcast against `degrees_of_freedom`
        Degrees of freedom of the others' pooled variance. [1]
    significance : float
        Chance that any of `count` honest coupons exceeds its limit. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Quantile of the F distribution at 1 - significance / count, NaN where an input
        is NaN. [1]

    Raises
    ------
    InvalidArgument
        If `count` or any degrees of freedom are zero, negative or infinite, or
        `significance` not between 0 and 1.

    Notes
    -----
    From the inverse of the upper tail (a beta function, x and 1 - x each by itself),
    which keeps its digits where 1 - significance / count has none left.

    References
    ----------
    Cochran, Annals of Eugenics 11 (1941) 47-52, approximation by F; ISO 5725-2:2019.
    """
    tail = float(between("significance", significance, 0.0, 1.0)) / float(positive("count", count))
    nu, rest = positive("degrees_of_freedom", degrees_of_freedom), positive("others", others)
    x = np.asarray(betainccinv(nu / 2.0, rest / 2.0, tail))  # nu F / (nu F + rest)
    y = np.asarray(betaincinv(rest / 2.0, nu / 2.0, tail))  # 1 - x
    return np.asarray(rest * x / (nu * y))


def cochran_critical(groups: int, readings: int, significance: float = 0.01) -> float:
    r"""Compute Cochran's critical value: largest variance over the sum of all.

    .. math:: C = F / (F + k - 1)

    Parameters
    ----------
    groups : int
        Groups compared :math:`k`, 2 or more. [1]
    readings : int
        Readings in each, 2 or more. [1]
    significance : float
        One-sided. [1]

    Returns
    -------
    float
        Critical value :math:`C`. [1]

    Raises
    ------
    InvalidArgument
        If there are fewer than 2 groups or readings, or `significance` is not between
        0 and 1.

    References
    ----------
    ISO 5725-2, table of Cochran's critical values; Cochran, Annals of Eugenics 11
    (1941) 47-52.

    Examples
    --------
    >>> print(round(cochran_critical(10, 3), 3))
    0.536
    """
    if groups < 2 or readings < 2:
        message = f"groups and readings must be 2 or more (they are {groups} and {readings})"
        raise InvalidArgument(message)
    nu = readings - 1
    f = float(scatter_limit(groups, nu, (groups - 1) * nu, significance))
    return f / (f + groups - 1)


def leave_noisy_out(relative_variances: ArrayLike, degrees_of_freedom: ArrayLike) -> PoolResult:
    """Pool variances of coupons, without those that scatter more than the others allow.

    In each round every coupon still in the pool is held against the pooled variance of
    the others in it; the one that exceeds its limit by the largest factor leaves.

    Parameters
    ----------
    relative_variances : array_like, shape (n,)
        Of each coupon's readings, over their mean squared; NaN where it has none. [1]
    degrees_of_freedom : array_like, shape (n,)
        Readings less one; a coupon with 0 has no variance and is only spoken for. [1]

    Returns
    -------
    PoolResult
        The pool and who left it.

    Raises
    ------
    InvalidArgument
        If a variance or degrees of freedom are negative or infinite, or their shapes
        differ.

    Notes
    -----
    Among coupons of equal degrees of freedom the one with the largest variance exceeds
    the most, so a round looks at one coupon per number of readings. The others' sum is
    added up from the smallest; a difference is taken only where it loses no digits.

    References
    ----------
    ISO 5725-2:2019, Cochran's test, repeated; F in its place for unequal numbers.
    """
    s2, nu = _checked(relative_variances, degrees_of_freedom)
    ratio, limit = np.full(s2.shape, np.nan), np.full(s2.shape, np.nan)
    left_out = np.zeros(s2.shape, dtype=np.bool_)
    classes = _classes(s2, nu)
    count = sum(c.order.size for c in classes)
    inside = np.array([c.order.size for c in classes], dtype=np.int64)
    while inside.sum() > 1:
        top = _largest(classes, inside, count)
        worst = int(np.argmax(np.nan_to_num(top.ratio / top.limit, posinf=np.inf)))
        if not top.ratio[worst] > top.limit[worst]:
            _compare_the_rest(classes, inside, top, (ratio, limit))
            break
        inside[worst] -= 1
        gone = classes[worst].order[inside[worst]]
        left_out[gone] = True
        ratio[gone], limit[gone] = top.ratio[worst], top.limit[worst]
    variance, total = pooled(np.where(left_out, np.nan, s2), nu)
    return PoolResult(variance, total, left_out, ratio, limit)


@dataclass(frozen=True)
class _Class:
    """Coupons of equal degrees of freedom, the smallest variance first."""

    nu: float
    order: NDArray[np.int64]  # places in the caller's arrays
    variances: NDArray[np.float64]
    sums: NDArray[np.float64]  # nu times the sum of the first 0, 1, 2, ... of them


@dataclass(frozen=True)
class _Largest:
    """The largest variance of each class against all others that are still in."""

    ratio: NDArray[np.float64]
    limit: NDArray[np.float64]


def _classes(s2: NDArray[np.float64], nu: NDArray[np.float64]) -> Sequence[_Class]:
    found = []
    for own in np.unique(nu[nu > 0.0]):
        members = np.flatnonzero(nu == own)
        order = members[np.argsort(s2[members], kind="stable")]
        sums = float(own) * np.concatenate([[0.0], np.cumsum(s2[order])])
        found.append(_Class(float(own), order, s2[order], sums))
    return found


def _largest(classes: Sequence[_Class], inside: NDArray[np.int64], count: int) -> _Largest:
    nu = np.array([c.nu for c in classes])
    own = np.array([c.variances[k - 1] if k else np.nan for c, k in _pairs(classes, inside)])
    with_top = np.array([c.sums[k] for c, k in _pairs(classes, inside)])
    below = np.array([c.sums[max(k - 1, 0)] for c, k in _pairs(classes, inside)])
    before = np.concatenate([[0.0], np.cumsum(with_top)[:-1]])
    after = np.concatenate([np.cumsum(with_top[::-1])[-2::-1], [0.0]])
    rest = float(np.dot(nu, inside)) - nu
    others = (before + below + after) / np.where(rest > 0.0, rest, np.nan)
    limit = scatter_limit(count, nu, np.where(rest > 0.0, rest, np.nan))
    return _Largest(_ratio(own, others), limit)


def _compare_the_rest(
    classes: Sequence[_Class],
    inside: NDArray[np.int64],
    top: _Largest,
    into: tuple[NDArray[np.float64], NDArray[np.float64]],
) -> None:
    """Fill ratio and limit of those that stayed."""
    ratio, limit = into
    total = sum(float(c.sums[k]) for c, k in _pairs(classes, inside))
    total_nu = sum(c.nu * k for c, k in _pairs(classes, inside))
    for place, (c, k) in enumerate(_pairs(classes, inside)):
        if k == 0:
            continue
        stayed = c.order[:k]
        others = (total - c.nu * c.variances[:k]) / (total_nu - c.nu)
        ratio[stayed] = _ratio(c.variances[:k], others)
        ratio[stayed[-1]] = top.ratio[place]  # the only one where the difference may lose digits
        limit[stayed] = top.limit[place]


def _pairs(classes: Sequence[_Class], inside: NDArray[np.int64]) -> Sequence[tuple[_Class, int]]:
    return [(c, int(k)) for c, k in zip(classes, inside, strict=True)]


def _ratio(own: NDArray[np.float64], others: NDArray[np.float64]) -> NDArray[np.float64]:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(own / others)


def _checked(
    variances: ArrayLike, degrees_of_freedom: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Give both as floats, with both 0 where there is nothing to pool."""
    s2 = not_negative("variances", variances)
    nu = not_negative("degrees_of_freedom", degrees_of_freedom)
    if s2.shape != nu.shape:
        message = (
            f"variances and degrees_of_freedom must go in pairs (shapes {s2.shape} and {nu.shape})"
        )
        raise InvalidArgument(message)
    there = (nu > 0.0) & ~np.isnan(s2)
    return np.where(there, s2, 0.0), np.where(there, nu, 0.0)
