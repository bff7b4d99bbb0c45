"""One-way analysis of variance: how much groups differ, and how much what is in them."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import fdtrc

from coldwork.errors import InvalidArgument
from coldwork.guards import finite

__all__ = ["OneWay", "one_way"]


@dataclass(frozen=True)
class OneWay:
    """N values in k groups, taken apart.

    Attributes
    ----------
    between_ss, within_ss : float
        Sums of squares of group means about the mean of all, and of values about their group's.
        [unit of the values, squared]
    between_df, within_df : int
        k - 1 and N - k. [1]
    size : float
        Of a group, for the variance between: its n0, the number itself where all are equal. [1]
    """

    between_ss: float
    within_ss: float
    between_df: int
    within_df: int
    size: float

    @property
    def between_ms(self) -> float:
        """Mean square between groups [unit squared]."""
        return self.between_ss / self.between_df

    @property
    def within_ms(self) -> float:
        """Mean square within: the variance of a value about its group [unit squared]."""
        return self.within_ss / self.within_df

    @property
    def f(self) -> float:
        """Ratio of the two; infinite where nothing scatters within [1]."""
        return self.between_ms / self.within_ms if self.within_ss else float("inf")

    @property
    def probability(self) -> float:
        """Chance of a larger F where the groups do not differ [1]."""
        return float(fdtrc(self.between_df, self.within_df, self.f))

    @property
    def r_squared(self) -> float:
        """Share of the sum of squares that lies between [1]."""
        return self.between_ss / (self.between_ss + self.within_ss)

    @property
    def residual_sd(self) -> float:
        """Standard deviation within [unit]."""
        return float(np.sqrt(self.within_ms))

    @property
    def between_variance(self) -> float:
        """Variance between groups beyond what scatter within explains, 0 at least [unit squared].

        An estimate below zero says that none can be seen.
        """
        return max(0.0, (self.between_ms - self.within_ms) / self.size)

    @property
    def between_share(self) -> float:
        """Its share in the variance of one value of one group taken at random [1]."""
        total = self.between_variance + self.within_ms
        return self.between_variance / total if total > 0.0 else float("nan")


def one_way(values: ArrayLike, group: ArrayLike) -> OneWay:
    r"""Take the variance of values apart by group.

    .. math::
        n_0 = \frac{N - \sum n_i^2 / N}{k - 1}, \qquad
        \sigma_b^2 = (MS_b - MS_w) / n_0

    Parameters
    ----------
    values : array_like, shape (N,)
        The values. [any unit]
    group : array_like of int, shape (N,)
        Which group each belongs to.

    Returns
    -------
    OneWay
        Sums of squares, F and the two variances.

    Raises
    ------
    InvalidArgument
        If a value is missing or infinite, there are fewer than two groups, or none of them has
        two values.

    Notes
    -----
    Sums are taken of distances from the first value, in which values that agree in many leading
    digits lose nothing, and twice about the means.

    References
    ----------
    Searle, Casella, McCulloch, Variance Components (1992), 3.6 (unequal groups; from memory).
    """
    y = finite("values", values)
    label, place = np.unique(np.asarray(group), return_inverse=True)
    if y.ndim != 1 or place.shape != y.shape or np.isnan(y).any():
        message = "values must be one present number for each group label"
        raise InvalidArgument(message)
    count = np.bincount(place).astype(np.float64)
    if label.size < 2 or y.size <= label.size:
        message = (
            "variances between and within need two groups or more, and one of them with two values"
            f" (found {label.size} groups and {y.size} values)"
        )
        raise InvalidArgument(message)
    off = y - y[0]
    mean = np.bincount(place, off) / count
    mean += np.bincount(place, off - mean[place]) / count  # what rounding left over
    middle = float(count @ mean / y.size)
    middle += float(count @ (mean - middle) / y.size)
    within = off - mean[place]
    return OneWay(
        between_ss=float(count @ (mean - middle) ** 2),
        within_ss=float(within @ within),
        between_df=int(label.size - 1),
        within_df=int(y.size - label.size),
        size=float((y.size - count @ count / y.size) / (label.size - 1)),
    )
