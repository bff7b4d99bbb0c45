"""A tester's bias from its checks on reference blocks, with its uncertainty."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import inf, sqrt

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument

__all__ = ["BiasOfTester", "Check", "bias_of_tester"]


@dataclass(frozen=True)
class Check:
    """The n readings of one check: one tester, one block, one day.

    Attributes
    ----------
    readings : ndarray of float64, shape (n,)
        As read. [any unit of hardness]
    certified, u_certified : float
        Of the block. [the same unit]
    """

    readings: NDArray[np.float64]
    certified: float
    u_certified: float

    @property
    def bias(self) -> float:
        """Mean over certified value, less 1 [1]."""
        return float(self.readings.mean()) / self.certified - 1.0

    @property
    def repeatability(self) -> float:
        """Largest less smallest reading over their mean [1]."""
        return float(np.ptp(self.readings) / self.readings.mean())


@dataclass(frozen=True)
class BiasOfTester:
    """What k checks say of a tester: relative bias, its u and effective freedom. [1]."""

    bias: float
    u: float
    degrees_of_freedom: float


def bias_of_tester(checks: Sequence[Check]) -> BiasOfTester:
    r"""Find a tester's relative bias.

    .. math::
        b = \frac1k \sum b_j, \qquad u^2 = u_{crm}^2 + s^2

    Parameters
    ----------
    checks : sequence of Check
        One or more.

    Returns
    -------
    BiasOfTester
        The mean of the checks' biases. s is the standard deviation of those from check to check,
        since a coupon meets the tester on one day and not on the mean day; it is at least, and of
        a single check exactly, that of the mean of its readings. The blocks' certified values are
        taken as one error, since they come from one laboratory.

    Raises
    ------
    InvalidArgument
        If there is no check, or one alone with a single reading.

    References
    ----------
    ISO 6507-1:2018, informative annex on the periodic verification by the user, and that on
    uncertainty (from memory); JCGM 100:2008, G.4.
    """
    if not checks:
        message = "there must be a check"
        raise InvalidArgument(message)
    n = len(checks)
    biases = np.array([check.bias for check in checks])
    block = float(np.mean([check.u_certified / check.certified for check in checks]))
    within = [
        (check.readings / check.certified).var(ddof=1) if check.readings.size > 1 else np.nan
        for check in checks
    ]
    sizes = np.array([check.readings.size for check in checks], dtype=np.float64)
    freedom = float((sizes - 1.0).sum())
    pooled = float(np.nansum((sizes - 1.0) * np.array(within)) / freedom) if freedom else np.nan
    of_mean = pooled * float(np.mean(1.0 / sizes))
    days = float(biases.var(ddof=1)) if n > 1 else np.nan
    if np.isnan(of_mean) and np.isnan(days):
        message = "one check of one reading tells no scatter; read the block more often"
        raise InvalidArgument(message)
    scatter, nu = (of_mean, freedom) if of_mean >= days or np.isnan(days) else (days, n - 1.0)
    u2 = block**2 + scatter
    effective = u2**2 * nu / scatter**2 if scatter > 0.0 else inf
    return BiasOfTester(float(biases.mean()), sqrt(u2), max(1.0, effective))
