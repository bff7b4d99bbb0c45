"""Two routes to one stress: do they agree, and what do they say together.

Both are known with their sensitivities to the same named inputs, so an input that both
share acts once, on their difference and on their mean:

    d = s_1 - s_2,  E_n = |d| / (k u(d)),
    w = (u_2^2 - u_12) / u^2(d) = 1/2 + (u_2^2 - u_1^2) / (2 u^2(d)),
    s = w s_1 + (1 - w) s_2

with s the best linear unbiased estimate (A. C. Aitken, Proc. R. Soc. Edinb. 55 (1936) 42,
for two values in closed form). E_n is that of ISO 13528 and ISO/IEC 17043 (from memory),
written there for two values that share nothing.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coldwork.interval.combine import Combined, Spread, combine
from coldwork.measured import Measured
from coldwork.statistics.student import student_quantile

__all__ = ["Agreement", "agreement", "joined"]


@dataclass(frozen=True)
class Agreement:
    """How two routes compare; arrays of shape (n,), NaN where they cannot be compared.

    Attributes
    ----------
    first, second : Combined
        Uncertainty of the two values.
    difference : Measured
        First less second.
    of_difference : Combined
        Its uncertainty, with shared inputs counted once.
    error : ndarray
        The normalised error E_n. [1]
    weight : ndarray
        Share of the first in the joined value; 1 or 0 where one alone is taken. It may
        lie outside 0 to 1 where both lean on the same inputs. [1]
    """

    first: Combined
    second: Combined
    difference: Measured
    of_difference: Combined
    error: NDArray[np.float64]
    weight: NDArray[np.float64]


def agreement(
    first: Measured,
    second: Measured,
    spreads: Mapping[str, Spread],
    coverage: float,
    alike: NDArray[np.bool_],
) -> Agreement:
    """Compare two routes, and weigh them by generalised least squares.

    Parameters
    ----------
    first, second : Measured, shape (n,)
        The two values, NaN where a route gives none. [SI]
    spreads : mapping of str to Spread
        Of every input.
    coverage : float
        Of the interval of the difference that E_n is held against. [1]
    alike : ndarray of bool, shape (n,)
        Where both describe one state.

    Returns
    -------
    Agreement
        Where only one route has a value, or an uncertainty, that one has all the weight;
        of two that cannot be weighed the first one has it.
    """
    one, two = combine(first, spreads), combine(second, spreads)
    difference = (first - second).where(alike)
    apart = combine(difference, spreads)
    k = student_quantile((1.0 + coverage) / 2.0, apart.degrees_of_freedom)
    with np.errstate(invalid="ignore", divide="ignore"):
        error = np.abs(difference.value) / (k * apart.u)
        weight = 0.5 + (two.u**2 - one.u**2) / (2.0 * apart.u**2)
    error = np.where(np.isfinite(apart.u), error, np.nan)
    known = np.isfinite(first.value), np.isfinite(second.value)
    sure = known[0] & np.isfinite(one.u), known[1] & np.isfinite(two.u)
    second_alone = (known[1] & ~known[0]) | (alike & sure[1] & ~sure[0])
    weight = np.where(np.isfinite(weight), weight, np.where(second_alone, 0.0, 1.0))
    return Agreement(one, two, difference, apart, error, weight)


def joined(weight: NDArray[np.float64], first: Measured, second: Measured) -> Measured:
    """Give weight times the first plus the rest times the second.

    Parameters
    ----------
    weight : ndarray, shape (n,)
        Share of the first. Where it is 1 or 0 the other is not looked at. [1]
    first, second : Measured, shape (n,)
        The two values. [SI]

    Returns
    -------
    Measured, shape (n,)
        With the sensitivities of both. [SI]
    """

    def share(a: NDArray[np.float64], b: NDArray[np.float64]) -> NDArray[np.float64]:
        with np.errstate(invalid="ignore"):
            parts = weight * a, (1.0 - weight) * b
        return np.where(weight == 0.0, 0.0, parts[0]) + np.where(weight == 1.0, 0.0, parts[1])

    nothing = np.zeros(weight.shape)
    names = dict.fromkeys((*first.sensitivities, *second.sensitivities))
    return Measured(
        share(first.value, second.value),
        {
            name: share(
                first.sensitivities.get(name, nothing), second.sensitivities.get(name, nothing)
            )
            for name in names
        },
    )
