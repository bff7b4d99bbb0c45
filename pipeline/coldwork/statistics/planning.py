"""How many groups, and how many values in each, for a mean that is known well enough."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.guards import positive
from coldwork.statistics.student import student_probability, student_quantile

__all__ = ["MOST_GROUPS", "Variances", "best_in_each", "fewest", "half_width", "specific_risk"]

MOST_GROUPS: Final = 1000  # that are searched [1]


@dataclass(frozen=True)
class Variances:
    """What the mean of n groups of m values is uncertain by, taken apart.

    Attributes
    ----------
    between : float
        Of a group, however many values it has. [unit squared]
    within : float
        Of one value about its group. [unit squared]
    least : float
        Of a group's mean for its values: more of them do not go below. [unit squared]
    shared : float
        One and the same in all groups. [unit squared]
    shared_freedom : float
        Degrees of freedom of the shared part. [1]
    """

    between: float
    within: float
    least: float
    shared: float
    shared_freedom: float = float("inf")

    def own(self, groups: ArrayLike, values: ArrayLike) -> NDArray[np.float64]:
        r"""Compute the part that averages out, :math:`(s_b^2 + \max(s_w^2/m, s_0^2)) / n`.

        Parameters
        ----------
        groups, values : array_like, broadcast against each other
            n, and m in each. [1]

        Returns
        -------
        ndarray of float64
            Variance of the mean without the shared part. [unit squared]

        Raises
        ------
        InvalidArgument
            If one is not positive.

        References
        ----------
        .. [1] W. G. Cochran, Sampling Techniques, 3rd ed. (1977), 10.3: the variance of a mean in
           two stages (from memory).
        """
        n, m = positive("groups", groups), positive("values", values)
        return np.asarray((self.between + np.maximum(self.within / m, self.least)) / n)

    def u(self, groups: ArrayLike, values: ArrayLike) -> NDArray[np.float64]:
        """Compute the standard uncertainty of the mean, the shared part with it [unit]."""
        return np.sqrt(self.own(groups, values) + self.shared)

    def freedom(self, groups: ArrayLike, values: ArrayLike) -> NDArray[np.float64]:
        """Compute its effective degrees of freedom; the own part has n - 1 (JCGM 100, G.4) [1].

        None (0) for one group whose own part is not zero.
        """
        own = self.own(groups, values)
        of_own = np.asarray(groups, dtype=np.float64) - 1.0
        with np.errstate(divide="ignore", invalid="ignore"):
            below = np.where(own > 0.0, own**2 / of_own, 0.0)
            below = below + self.shared**2 / self.shared_freedom
            return np.where(below > 0.0, (own + self.shared) ** 2 / below, np.inf)


def half_width(
    parts: Variances, groups: ArrayLike, values: ArrayLike, coverage: float
) -> NDArray[np.float64]:
    """Compute half of the interval of the mean, k u with Student's k.

    Parameters
    ----------
    parts : Variances
        What the mean is uncertain by. [unit squared]
    groups, values : array_like, broadcast against each other
        n, and m in each. [1]
    coverage : float
        Two-sided. [1]

    Returns
    -------
    ndarray of float64
        Infinite where there is less than one degree of freedom. [unit]
    """
    freedom = parts.freedom(groups, values)
    k = student_quantile((1.0 + coverage) / 2.0, np.maximum(freedom, 1.0))
    return np.where(freedom < 1.0, np.inf, k * parts.u(groups, values))


def specific_risk(
    parts: Variances,
    groups: ArrayLike,
    values: ArrayLike,
    below: float,
    above: float,
) -> NDArray[np.float64]:
    r"""Compute the chance that the truth lies outside limits within which the mean was found.

    Parameters
    ----------
    parts : Variances
        What the mean is uncertain by. [unit squared]
    groups, values : array_like, broadcast against each other
        n, and m in each. [1]
    below, above : float
        How far the mean lies above the lower limit and below the upper one; infinite where
        there is none. [unit]

    Returns
    -------
    ndarray of float64
        The specific consumer's risk of an accepted mean; 1 where there is less than one
        degree of freedom. [1]

    References
    ----------
    .. [1] JCGM 106:2012, 9.3.2: 1 less the conformance probability (clause from memory).
    """
    freedom, u = parts.freedom(groups, values), parts.u(groups, values)
    held = np.maximum(freedom, 1.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        outside = [student_probability(-np.divide(room, u), held) for room in (below, above)]
    return np.where(freedom < 1.0, 1.0, np.minimum(outside[0] + outside[1], 1.0))


def fewest(met: NDArray[np.bool_]) -> NDArray[np.int64]:
    """Find the fewest groups from which on all is met.

    Parameters
    ----------
    met : ndarray of bool, shape (groups, values)
        Whether n = 1, 2, ... groups do, for each number of values.

    Returns
    -------
    ndarray of int64, shape (values,)
        n, or 0 where none of those looked at does.
    """
    found = np.argmax(met, axis=0) + 1
    return np.where(met.any(axis=0), found, 0).astype(np.int64)


def best_in_each(parts: Variances, group_cost: float, value_cost: float) -> float:
    r"""Compute how many values in each group are the cheapest.

    .. math:: m = (s_w / s_b) \sqrt{c_g / c_v}

    Parameters
    ----------
    parts : Variances
        Its `least` is not looked at. [unit squared]
    group_cost, value_cost : float
        Of one group and of one value. [any one unit]

    Returns
    -------
    float
        m, not rounded; infinite where groups do not differ. [1]

    References
    ----------
    .. [1] W. G. Cochran, Sampling Techniques, 3rd ed. (1977), 10.6 (from memory).
    """
    if parts.between == 0.0:
        return float("inf")
    return float(np.sqrt(parts.within / parts.between * group_cost / value_cost))
