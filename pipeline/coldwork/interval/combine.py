"""Contributions of inputs to a quantity, combined: own, shared, total, and plain intervals."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coldwork.measured import Measured
from coldwork.statistics.student import (
    student_probability,
    student_quantile,
    welch_satterthwaite,
)

__all__ = [
    "Combined",
    "Ends",
    "Spread",
    "acting",
    "combine",
    "strength_ends",
    "strength_probability_above",
]


@dataclass(frozen=True)
class Spread:
    """How uncertain an input is.

    Attributes
    ----------
    u : float or ndarray, shape (n,)
        Standard uncertainty; NaN where there is nothing to judge it by. [SI of the input]
    shared : bool
        Whether one error holds for every coupon that the input touches.
    degrees_of_freedom : float or ndarray, shape (n,)
        Of `u`; infinite where it is taken as known. [1]
    """

    u: float | NDArray[np.float64]
    shared: bool
    degrees_of_freedom: float | NDArray[np.float64]


@dataclass(frozen=True)
class Combined:
    """Combined standard uncertainty of a quantity, all of shape (n,).

    Attributes
    ----------
    u_own, u_shared, u : ndarray
        Own part, shared part, and the root sum of their squares. [SI]
    degrees_of_freedom : ndarray
        Effective (JCGM 100:2008, G.4, not rounded). [1]
    """

    u_own: NDArray[np.float64]
    u_shared: NDArray[np.float64]
    u: NDArray[np.float64]
    degrees_of_freedom: NDArray[np.float64]


@dataclass(frozen=True)
class Ends:
    """Ends of an interval in SI, NaN where there is none.

    Attributes
    ----------
    lower, upper : ndarray, shape (n,)
        An infinite end is NaN, like one that cannot be known.
    """

    lower: NDArray[np.float64]
    upper: NDArray[np.float64]


def combine(result: Measured, spreads: Mapping[str, Spread], *, own_only: bool = False) -> Combined:
    """Combine the contributions of all inputs (JCGM 100:2008, 5.1.2 and G.4).

    Parameters
    ----------
    result : Measured, shape (n,)
        The quantity with its sensitivities. [SI]
    spreads : mapping of str to Spread
        Of every input that `result` may depend on.
    own_only : bool, optional
        Take shared inputs as exact.

    Returns
    -------
    Combined
        Arrays of shape (n,), NaN where the value is.
    """
    shape = np.shape(result.value)
    own = np.zeros(shape)
    shared = np.zeros(shape)
    parts: list[NDArray[np.float64]] = []
    freedom: list[float | NDArray[np.float64]] = []
    for name, c in result.sensitivities.items():
        spread = spreads[name]
        if spread.shared and own_only:
            continue
        spread = acting(c, spread)
        part = np.abs(c * spread.u)
        if spread.shared:
            shared = shared + part**2
        else:
            own = own + part**2
        parts.append(np.broadcast_to(part, shape))
        freedom.append(spread.degrees_of_freedom)
    missing = np.isnan(result.value)
    u = np.where(missing, np.nan, np.sqrt(own + shared))
    return Combined(
        np.where(missing, np.nan, np.sqrt(own)),
        np.where(missing, np.nan, np.sqrt(shared)),
        u,
        np.broadcast_to(welch_satterthwaite(parts, freedom), shape),
    )


def acting(c: NDArray[np.float64], spread: Spread) -> Spread:
    """Take out the spread of an input where a quantity does not depend on it.

    A coupon's reading by a route that was not taken may have none that is known.

    Parameters
    ----------
    c : ndarray
        Sensitivity to the input.
    spread : Spread
        Of the input.

    Returns
    -------
    Spread
        With u 0 and infinite degrees of freedom where `c` is 0.
    """
    if not (np.ndim(c) and np.ndim(spread.u)) or bool(np.all(c)):
        return spread
    idle = c == 0.0
    u, nu = np.where(idle, 0.0, spread.u), np.where(idle, np.inf, spread.degrees_of_freedom)
    return Spread(u, spread.shared, nu)


def strength_ends(value: NDArray[np.float64], combined: Combined, probability: float) -> Ends:
    """Give the ends y -+ k u of a strength, with P(t <= k) = `probability`.

    Parameters
    ----------
    value : ndarray, shape (n,)
        The strength. [Pa]
    combined : Combined
        Its uncertainty. [Pa]
    probability : float
        (1 + coverage) / 2 for an interval, the coverage for one-sided bounds. [1]

    Returns
    -------
    Ends
        Shape (n,). [Pa]
    """
    reach = student_quantile(probability, combined.degrees_of_freedom) * combined.u
    return Ends(value - reach, value + reach)


def strength_probability_above(
    value: NDArray[np.float64], combined: Combined, limit: float
) -> NDArray[np.float64]:
    """Give the probability that a strength is above a limit: P(t <= (y - limit) / u).

    Parameters
    ----------
    value : ndarray, shape (n,)
        The strength. [Pa]
    combined : Combined
        Its uncertainty. [Pa]
    limit : float
        The limit. [Pa]

    Returns
    -------
    ndarray, shape (n,)
        NaN where the uncertainty is not known. [1]
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        k = (value - limit) / combined.u
    return student_probability(k, combined.degrees_of_freedom)
