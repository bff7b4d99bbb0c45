"""Two results held against each other, with what their errors have in common."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import exp, inf, log, nan, sqrt

import numpy as np

from coldwork.errors import InvalidArgument
from coldwork.statistics.student import student_probability, student_quantile

__all__ = ["Contrast", "Part", "Side", "contrast"]


@dataclass(frozen=True)
class Part:
    """A contribution to u: sensitivity times u, with its sign, and the freedom of that u."""

    size: float
    degrees_of_freedom: float = inf


@dataclass(frozen=True)
class Side:
    """One of the two: a coupon's value, or the mean of some coupons.

    Attributes
    ----------
    name : str
        What it is called.
    value : float
        [any unit]
    own : tuple of Part
        Errors of its own, independent of one another. [that unit]
    shared : mapping of str to Part
        By input; an input of the same name on the other side is the same error. [that unit]
    """

    name: str
    value: float
    own: tuple[Part, ...]
    shared: Mapping[str, Part]


@dataclass(frozen=True)
class Contrast:
    """A less B, and A over B.

    Attributes
    ----------
    a, b : Side
        The two.
    difference, u_difference, u_own, u_shared : float
        A less B with its standard uncertainty and what that is made of. [the sides' unit]
    u_if_independent : float
        What would come out if nothing were shared. [the sides' unit]
    degrees_of_freedom : float
        Effective, of the difference. [1]
    log_ratio, u_log_ratio, log_degrees_of_freedom : float
        ln(A / B), its standard uncertainty and effective degrees of freedom; NaN where a value is
        not above zero. [1]
    """

    a: Side
    b: Side
    difference: float
    u_difference: float
    u_own: float
    u_shared: float
    u_if_independent: float
    degrees_of_freedom: float
    log_ratio: float
    u_log_ratio: float
    log_degrees_of_freedom: float

    @property
    def ratio(self) -> float:
        """A over B [1]."""
        return exp(self.log_ratio)

    def difference_interval(self, coverage: float) -> tuple[float, float]:
        """Give the interval of the difference at a coverage [the sides' unit]."""
        reach = _k(coverage, self.degrees_of_freedom) * self.u_difference
        return self.difference - reach, self.difference + reach

    def ratio_interval(self, coverage: float) -> tuple[float, float]:
        """Give the interval of the ratio at a coverage, taken in its logarithm [1]."""
        reach = _k(coverage, self.log_degrees_of_freedom) * self.u_log_ratio
        return exp(self.log_ratio - reach), exp(self.log_ratio + reach)

    @property
    def probability_a_above(self) -> float:
        """Probability that A is above B, from the difference [1]."""
        return _below(self.difference, self.u_difference, self.degrees_of_freedom)

    @property
    def probability_if_equal(self) -> float:
        """Chance of a difference at least as far from 0, either way, where they are equal [1]."""
        far = _below(-abs(self.difference), self.u_difference, self.degrees_of_freedom)
        return min(1.0, 2.0 * far)

    def probability_if_apart(self, margin: float) -> float:
        """Give the chance of a ratio as near to 1 as found, where A and B differ by a margin.

        Parameters
        ----------
        margin : float
            Relative, above 0: the ratio 1 + margin and its inverse are the two ends. [1]

        Returns
        -------
        float
            The larger of the two one-sided tests; small where the two are equivalent. [1]

        References
        ----------
        Schuirmann, J. Pharmacokin. Biopharm. 15 (1987) 657 (two one-sided tests).
        """
        room = log(1.0 + margin) - abs(self.log_ratio)
        return 1.0 - _below(room, self.u_log_ratio, self.log_degrees_of_freedom)


def contrast(a: Side, b: Side) -> Contrast:
    r"""Hold two results against each other.

    .. math:: u^2(a - b) = \sum_{own} u_a^2 + \sum_{own} u_b^2 + \sum_{shared} (c_a u - c_b u)^2

    and likewise for ln(a / b), each contribution over its side's value.

    Parameters
    ----------
    a, b : Side
        The two.

    Returns
    -------
    Contrast
        Difference and ratio, to first order.

    Raises
    ------
    InvalidArgument
        If a value or a contribution is not known.

    References
    ----------
    JCGM 100:2008, 5.2 (correlated inputs: those in common) and equation (G.2b).
    """
    for side in (a, b):
        parts = [*side.own, *side.shared.values()]
        if not np.isfinite(side.value):
            message = f"{side.name} must have a value (it is {side.value:g})"
            raise InvalidArgument(message)
        if not all(np.isfinite(part.size) for part in parts):
            message = f"{side.name} has an uncertainty that is not known: nothing tells its scatter"
            raise InvalidArgument(message)
    own, shared = _parts(a, b, 1.0, 1.0)
    positive = a.value > 0.0 and b.value > 0.0
    own_log, shared_log = _parts(a, b, 1.0 / a.value, 1.0 / b.value) if positive else ([], [])
    alone = [part.size for side in (a, b) for part in side.shared.values()]
    u_own, u_shared = _size(own), _size(shared)
    return Contrast(
        a=a,
        b=b,
        difference=a.value - b.value,
        u_difference=_size([*own, *shared]),
        u_own=u_own,
        u_shared=u_shared,
        u_if_independent=sqrt(u_own**2 + sum(size**2 for size in alone)),
        degrees_of_freedom=_freedom([*own, *shared]),
        log_ratio=log(a.value / b.value) if positive else nan,
        u_log_ratio=_size([*own_log, *shared_log]) if positive else nan,
        log_degrees_of_freedom=_freedom([*own_log, *shared_log]),
    )


def _parts(a: Side, b: Side, by_a: float, by_b: float) -> tuple[list[Part], list[Part]]:
    own = [Part(part.size * by_a, part.degrees_of_freedom) for part in a.own]
    own += [Part(part.size * by_b, part.degrees_of_freedom) for part in b.own]
    none = Part(0.0)
    shared = []
    for name in dict.fromkeys([*a.shared, *b.shared]):
        first, second = a.shared.get(name, none), b.shared.get(name, none)
        freedom = min(first.degrees_of_freedom, second.degrees_of_freedom)
        shared.append(Part(first.size * by_a - second.size * by_b, freedom))
    return own, shared


def _size(parts: list[Part]) -> float:
    return sqrt(sum(part.size**2 for part in parts))


def _freedom(parts: list[Part]) -> float:
    """Effective degrees of freedom after Welch and Satterthwaite, 1 at least [1]."""
    total = sum(part.size**2 for part in parts)
    below = sum(part.size**4 / part.degrees_of_freedom for part in parts)
    return max(1.0, total**2 / below) if below > 0.0 else inf


def _k(coverage: float, freedom: float) -> float:
    return float(student_quantile((1.0 + coverage) / 2.0, np.array([freedom]))[0])


def _below(distance: float, u: float, freedom: float) -> float:
    """Student's P(t <= distance / u); of no uncertainty at all a plain yes, no or even [1]."""
    if u == 0.0:
        return 0.5 if distance == 0.0 else float(distance > 0.0)
    return float(student_probability(np.array([distance / u]), np.array([freedom]))[0])
