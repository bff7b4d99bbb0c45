"""What a set of random draws of one quantity says: ends, tolerance, enough draws, verdict.

References
----------
.. [1] JCGM 101:2008, Supplement 1 to the GUM: 7.7 (coverage interval), 7.9 (adaptive
   procedure), 8 (validation of the first-order interval). (Clauses from memory.)
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import floor, isfinite, log10, sqrt
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument

__all__ = ["Stretch", "is_settled", "order_statistic", "ranks", "stretch_of", "tolerance"]

_Floats = NDArray[np.float64]
_ROUNDING: Final = 1e-9


@dataclass(frozen=True)
class Stretch:
    """What one of several equal runs of draws found of a quantity, in its unit.

    Attributes
    ----------
    mean, sd, lower, upper : float
        Mean, standard deviation and ends of the interval; NaN or infinite where there
        is none.
    """

    mean: float
    sd: float
    lower: float
    upper: float


def ranks(draws: int, coverage: float) -> tuple[int, int]:
    """Give the ranks, from 1, of the draws at the ends of the equal-tailed interval.

    With q the whole number nearest to coverage times draws, the interval goes from the
    draw of rank r to that of rank r + q, with r = (draws - q) / 2, rounded up.

    Parameters
    ----------
    draws : int
        Number of draws M.
    coverage : float
        Probability of the interval, between 0 and 1. [1]

    Returns
    -------
    tuple of int
        r and r + q.

    Raises
    ------
    InvalidArgument
        If there are too few draws for an end to exist.

    References
    ----------
    JCGM 101:2008, 7.7.2.
    """
    q = floor(coverage * draws + 0.5)
    r = (draws - q + 1) // 2
    if not 0.0 < coverage < 1.0 or r < 1 or r + q > draws:
        message = f"{draws} draws are too few for the ends of an interval of {coverage:g}"
        raise InvalidArgument(message)
    return r, r + q


def order_statistic(x: _Floats, rank: int) -> float:
    """Give the draw of a rank counted from 1; `x` of shape (draws,) is put in another order."""
    x.partition(rank - 1)
    return float(x[rank - 1])


def tolerance(u: float, digits: int) -> float:
    r"""Give half of the last digit that counts in a standard uncertainty.

    .. math:: u = c \times 10^l, \qquad \delta = \tfrac{1}{2} 10^l

    Parameters
    ----------
    u : float
        Standard uncertainty, above zero. [any unit]
    digits : int
        Digits of the whole number :math:`c`.

    Returns
    -------
    float
        :math:`\delta`, NaN where `u` is no positive finite number. [unit of `u`]

    References
    ----------
    JCGM 101:2008, 7.9.2.

    Examples
    --------
    >>> print(tolerance(0.35, 2), tolerance(0.35, 1))
    0.005 0.05
    """
    if not (isfinite(u) and u > 0.0):
        return float("nan")
    power = floor(log10(u)) - digits + 1
    if round(u / 10.0**power) >= 10**digits:  # 0.0999 has one digit more, written to two
        power += 1
    return 0.5 * 10.0**power


def stretch_of(x: _Floats, coverage: float) -> Stretch:
    """Tell of one run of draws, `x` of shape (draws,), what `is_settled` compares."""
    low, high = ranks(x.shape[0], coverage)
    with np.errstate(invalid="ignore"):
        mean, sd = float(x.mean()), float(x.std(ddof=1))
    work = x.copy()
    return Stretch(mean, sd, order_statistic(work, low), order_statistic(work, high))


def is_settled(runs: Sequence[Stretch], draws_each: int, digits: int, *, has_sd: bool) -> bool:
    """Say whether further runs of draws would no longer change the digits that count.

    Twice the standard deviation of the average of the runs' means, standard deviations
    and ends must each be at most the tolerance that goes with the standard deviation of
    all draws. Where that does not exist, half the interval over 2 stands for it and the
    ends alone are compared; an end that is infinite in every run is settled.

    Parameters
    ----------
    runs : sequence of Stretch
        At least two, of equal size.
    draws_each : int
        Draws in each.
    digits : int
        Digits of the standard uncertainty that count.
    has_sd : bool
        Whether the quantity has a standard deviation at all.

    Returns
    -------
    bool

    References
    ----------
    JCGM 101:2008, 7.9.4.
    """
    if len(runs) < 2:
        return False
    columns = {
        name: np.array([getattr(run, name) for run in runs])
        for name in ("mean", "sd", "lower", "upper")
    }
    has_sd = has_sd and bool(np.isfinite(columns["sd"]).all())
    if has_sd:
        n, h = draws_each, len(runs)
        between = float(np.var(columns["mean"])) * h * n
        within = float(np.sum(columns["sd"] ** 2)) * (n - 1)
        u = sqrt((between + within) / (n * h - 1))
    else:
        with np.errstate(invalid="ignore"):
            u = float(np.mean(columns["upper"] - columns["lower"])) / 4.0
    compared = ("mean", "sd", "lower", "upper") if has_sd else ("lower", "upper")
    delta = tolerance(u, digits)
    for name in compared:
        values = columns[name]
        if not np.isfinite(values).any():
            continue
        with np.errstate(invalid="ignore"):
            spread = float(np.std(values, ddof=1)) / sqrt(len(runs))
        if isfinite(delta) and not 2.0 * spread <= delta * (1.0 + _ROUNDING):
            return False
        if not isfinite(delta) and not spread <= abs(float(np.mean(values))) * 0.1**digits / 2.0:
            return False
    return True
