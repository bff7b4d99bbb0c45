"""How far the outermost of n values may lie from their mean."""

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import stdtrit

from coldwork.guards import between, not_negative

__all__ = ["grubbs_critical"]


def grubbs_critical(n: ArrayLike, significance: float = 0.01) -> NDArray[np.float64]:
    r"""Compute Grubbs' critical value, two-sided.

    .. math:: G = \frac{n - 1}{\sqrt n} \sqrt{\frac{t^2}{n - 2 + t^2}}

    with :math:`t` Student's quantile of n - 2 degrees of freedom at a tail of
    significance / 2n. A value is outlying where :math:`|x - \bar x| / s > G`.

    Parameters
    ----------
    n : array_like, shape (...)
        Number of values, the doubtful one among them. [1]
    significance : float
        Two-sided: 0.01 is the printed one-sided column of 0.5 %. [1]

    Returns
    -------
    ndarray of float64, shape of `n`
        Critical value; NaN where `n` is NaN, and below 3, where nothing can be said. [1]

    Raises
    ------
    InvalidArgument
        If any `n` is negative or infinite, or `significance` not between 0 and 1.

    References
    ----------
    Grubbs, Technometrics 11 (1969) 1-21, doi:10.1080/00401706.1969.10490657, table 1;
    the closed form as in the NIST/SEMATECH e-Handbook, 1.3.5.17.1.

    Examples
    --------
    >>> print(round(float(grubbs_critical(10, 0.05)), 3))
    2.29
    """
    tail = float(between("significance", significance, 0.0, 1.0)) / 2.0
    counts = not_negative("n", n)
    some, back = np.unique(counts, return_inverse=True)
    m = np.where(some >= 3.0, some, np.nan)
    t2 = np.asarray(stdtrit(m - 2.0, tail / m)) ** 2
    critical = (m - 1.0) / np.sqrt(m) * np.sqrt(t2 / (m - 2.0 + t2))
    return np.asarray(critical[back].reshape(counts.shape))
