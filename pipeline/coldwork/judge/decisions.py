"""Limits on coupons: conforming, non-conforming or undecided.

Arrays in, arrays out: nothing here knows how bounds and probabilities came about.

References
----------
.. [1] JCGM 106:2012, Evaluation of measurement data -- The role of measurement
   uncertainty in conformity assessment: 7 (conformance probability), 8.2 (simple
   acceptance), 8.3 (guard bands). (Clauses from memory.)
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.inputs.method import Limit
from coldwork.judge.evidence import (
    CONFORMING,
    DECISIONS,
    NON_CONFORMING,
    NONE,
    UNDECIDED,
    Decided,
    Evidence,
    decision_texts,
    severity,
)
from coldwork.judge.reasons import reasons

__all__ = [
    "CONFORMING",
    "DECISIONS",
    "NONE",
    "NON_CONFORMING",
    "UNDECIDED",
    "Decided",
    "Evidence",
    "Worst",
    "conformance_probability",
    "decide",
    "decision_texts",
    "worst",
]

_NOISE: Final = 1e-14  # of a difference of two probabilities in doubles [1]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
Codes = NDArray[np.int8]


@dataclass(frozen=True)
class Worst:
    """The gravest of several decisions on n coupons.

    Attributes
    ----------
    code : ndarray of int8, shape (n,)
        Place in `DECISIONS`, -1 where there is no limit.
    limit : ndarray of int32, shape (n,)
        Place of the limit that decided, -1 where there is none.
    probability : ndarray of float64, shape (n,)
        Conformance probability under that limit, NaN where it is not known. [1]
    """

    code: Codes
    limit: NDArray[np.int32]
    probability: FloatArray


def decide(limit: Limit, evidence: Evidence) -> Decided:
    """Hold one limit against a quantity of many coupons.

    ``guarded``: conforming where the one-sided bounds at the coverage lie inside the
    limits, non-conforming where the opposite bound lies outside. ``probability``:
    conforming from `at_least` on, non-conforming up to 1 - `at_least`. ``simple``: by the
    value alone, where its relative uncertainty is at most `max_relative_u`. Else, and
    where an error or a missing uncertainty leaves nothing to go by, undecided. A coupon
    that has no value is decided by its upper bound; without one it is undecided, and no
    probability is told.

    Parameters
    ----------
    limit : Limit
        The limit; at least one of its two ends is given.
    evidence : Evidence
        The quantity, in the limit's unit.

    Returns
    -------
    Decided
    """
    probability = conformance_probability(limit, evidence)
    by_bounds = _guarded(limit, evidence)
    valueless = np.isnan(evidence.value)
    if limit.rule == "probability":
        code = _by_probability(limit, probability)
    elif limit.rule == "simple":
        code = np.where(valueless, by_bounds, _simple(limit, evidence))
    else:
        code = by_bounds
    unknown = np.where(valueless, evidence.upper_bound, evidence.u)  # what there is to go by
    nothing = evidence.blocked | ~np.isfinite(unknown)
    code = np.where(nothing, UNDECIDED, code).astype(np.int8)
    probability = np.where(nothing, np.nan, probability)
    bound = np.full(code.shape, np.nan)
    if limit.rule != "probability":
        bound = _deciding_bound(limit, evidence, code)
        bound = bound if limit.rule == "guarded" else np.where(valueless, bound, np.nan)
    return Decided(code, probability, bound, reasons(limit, evidence, code, probability))


def conformance_probability(limit: Limit, evidence: Evidence) -> FloatArray:
    """Give the probability that the truth lies inside the limits.

    .. math:: p = P(Y > T_L) + P(Y < T_U) - 1

    Parameters
    ----------
    limit : Limit
        The limit :math:`T_L`, :math:`T_U`; a missing one is never passed.
    evidence : Evidence
        Holds the probabilities for each end.

    Returns
    -------
    ndarray of float64, shape (n,)
        The probability, NaN where it is not known; exactly 0 where the sum tells nothing but
        the rounding of its terms. [1]

    References
    ----------
    .. [1] JCGM 106:2012, 7.4 (from memory).
    """
    n = evidence.value.shape
    above_lower = np.ones(n) if limit.lower is None else evidence.above_lower
    above_upper = np.zeros(n) if limit.upper is None else evidence.above_upper
    inside = np.clip(above_lower - above_upper, 0.0, 1.0)
    noise = 0.0 if limit.upper is None else _NOISE
    return np.where(inside < noise, 0.0, inside)


def worst(decided: Sequence[Decided], n: int) -> Worst:
    """Take the gravest decision of several limits for each coupon.

    Non-conforming is graver than undecided, and that than conforming. Of equal
    decisions the one with the lower probability counts, a known one before an unknown
    one, and then the limit that the sheet names first.

    Parameters
    ----------
    decided : sequence of Decided
        In the sheet's order of limits; may be empty.
    n : int
        How many coupons there are.

    Returns
    -------
    Worst
        Arrays of shape (n,).
    """
    code = np.full(n, NONE, dtype=np.int8)
    place = np.full(n, -1, dtype=np.int32)
    probability = np.full(n, np.nan)
    for i, one in enumerate(decided):
        graver = severity(one.code) > severity(code)
        known = np.where(np.isnan(one.probability), 2.0, one.probability)
        lower = known < np.where(np.isnan(probability), 2.0, probability)
        takes = graver | ((one.code == code) & lower)
        code = np.where(takes, one.code, code)
        place = np.where(takes, np.int32(i), place)
        probability = np.where(takes, one.probability, probability)
    return Worst(code, place, probability)


def _guarded(limit: Limit, evidence: Evidence) -> Codes:
    """Decide by the bounds; a bound that does not exist clears nothing."""
    inside = np.ones(evidence.value.shape, dtype=np.bool_)
    outside = np.zeros(evidence.value.shape, dtype=np.bool_)
    if limit.lower is not None:
        inside &= evidence.lower_bound >= limit.lower
        outside |= evidence.upper_bound < limit.lower
    if limit.upper is not None:
        inside &= evidence.upper_bound <= limit.upper
        outside |= evidence.lower_bound > limit.upper
    return _codes(inside, outside)


def _by_probability(limit: Limit, probability: FloatArray) -> Codes:
    at_least = 1.0 if limit.at_least is None else limit.at_least
    outside = probability <= 1.0 - at_least
    return _codes((probability >= at_least) & ~outside, outside)


def _simple(limit: Limit, evidence: Evidence) -> Codes:
    most = -1.0 if limit.max_relative_u is None else limit.max_relative_u
    fit = evidence.u <= most * np.abs(evidence.value)
    inside = np.ones(evidence.value.shape, dtype=np.bool_)
    if limit.lower is not None:
        inside &= evidence.value >= limit.lower
    if limit.upper is not None:
        inside &= evidence.value <= limit.upper
    return _codes(fit & inside, fit & ~inside)


def _codes(inside: BoolArray, outside: BoolArray) -> Codes:
    code = np.full(inside.shape, UNDECIDED, dtype=np.int8)
    code[inside] = CONFORMING
    code[outside] = NON_CONFORMING
    return code


def _deciding_bound(limit: Limit, evidence: Evidence, code: Codes) -> FloatArray:
    """Give the bound that decided: of two that clear their limits, the one that is nearer."""
    low, high = evidence.lower_bound, evidence.upper_bound
    if limit.lower is None or limit.upper is None:
        clearing = high if limit.lower is None else low
        passing = low if limit.lower is None else high
    else:
        clearing = np.where(low - limit.lower <= limit.upper - high, low, high)
        passing = np.where(high < limit.lower, high, low)
    return np.select([code == CONFORMING, code == NON_CONFORMING], [clearing, passing], np.nan)
