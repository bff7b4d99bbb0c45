"""Why a limit decided as it did: one plain sentence for each coupon."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.inputs.method import Limit
from coldwork.judge.evidence import CONFORMING, NON_CONFORMING, UNDECIDED, Evidence
from coldwork.judge.wording import number_texts, or_else, plain_number, scattered, sentence

__all__ = ["reasons"]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
Part = tuple[NDArray[np.intp], pa.StringArray]

_WITH_INDENT: Final = "; the state includes the indent's own strain"
_OWN: Final = "; shared inputs are taken as exact"
_DIGITS_OF_P: Final = 1e-3  # as an uncertainty, makes probabilities come out to four decimals
_DIGITS_OF_RATIO: Final = np.nan


def reasons(
    limit: Limit, evidence: Evidence, code: NDArray[np.int8], probability: FloatArray
) -> pa.StringArray:
    """Say in one sentence why each coupon was decided as it was.

    Parameters
    ----------
    limit : Limit
        The limit.
    evidence : Evidence
        What it was held against, n coupons.
    code : ndarray of int8, shape (n,)
        The decisions.
    probability : ndarray of float64, shape (n,)
        Conformance probability. [1]

    Returns
    -------
    pyarrow.StringArray, length n
        Sentences without a stop, never null.
    """
    n = len(code)
    valueless = np.isnan(evidence.value)
    unknown = ~evidence.blocked & ~valueless & ~np.isfinite(evidence.u)
    rest = ~evidence.blocked & ~unknown
    case = _Case(limit, evidence, probability)
    parts = [_same(evidence.blocked, "an error leaves this quantity empty, see the flags")]
    parts.append(case.without_uncertainty(unknown))
    if limit.rule == "probability":
        parts.extend(case.by_probability(rest, code))
    elif limit.rule == "simple":
        parts.extend(case.by_value(rest & ~valueless, code))
        parts.extend(case.by_bounds(rest & valueless, code))
    else:
        parts.extend(case.by_bounds(rest, code))
    return _with_endings(scattered(n, parts), limit, evidence.with_indent)


@dataclass(frozen=True)
class _Case:
    """One limit on one quantity, as sentences need it."""

    limit: Limit
    evidence: Evidence
    probability: FloatArray

    @property
    def ends(self) -> list[float]:
        return [x for x in (self.limit.lower, self.limit.upper) if x is not None]

    def named(self) -> str:
        """Name the limits that there are."""
        low, high = self.limit.lower, self.limit.upper
        unit = "" if self.evidence.unit in {"", "1"} else f" {self.evidence.unit}"
        if low is None or high is None:
            side = "lower" if high is None else "upper"
            return f"the {side} limit {plain_number(self.ends[0])}{unit}"
        return f"the limits {plain_number(low)} and {plain_number(high)}{unit}"

    def one_named(self, side: str) -> str:
        """Name one of the limits."""
        unit = "" if self.evidence.unit in {"", "1"} else f" {self.evidence.unit}"
        end = self.limit.lower if side == "lower" else self.limit.upper
        return f"the {side} limit {plain_number(np.nan if end is None else end)}{unit}"

    def texts(self, numbers: FloatArray, rows: NDArray[np.intp]) -> pa.StringArray:
        """Write numbers of the quantity, null where one is missing."""
        return number_texts(numbers[rows], self.evidence.u[rows], self.ends)

    def without_uncertainty(self, where: BoolArray) -> Part:
        rows = np.flatnonzero(where)
        value = self.texts(self.evidence.value, rows)
        return rows, sentence("the value ", value, " has no known uncertainty to decide with")

    def by_bounds(self, where: BoolArray, code: NDArray[np.int8]) -> list[Part]:
        e, limit = self.evidence, self.limit
        low = np.zeros(where.shape, dtype=np.bool_)
        if limit.lower is not None:
            low = e.upper_bound < limit.lower
        beyond = where & (code == NON_CONFORMING)
        return [
            self._inside(where & (code == CONFORMING)),
            self._passed(beyond & low, "upper", "below", "lower"),
            self._passed(beyond & ~low, "lower", "above", "upper"),
            *self._between(where & (code == UNDECIDED)),
        ]

    def _inside(self, where: BoolArray) -> Part:
        rows = np.flatnonzero(where)
        if self.limit.upper is None:
            low = self.texts(self.evidence.lower_bound, rows)
            return rows, sentence("the lower bound ", low, f" is not below {self.named()}")
        high = self.texts(self.evidence.upper_bound, rows)
        if self.limit.lower is None:
            return rows, sentence("the upper bound ", high, f" is not above {self.named()}")
        low = self.texts(self.evidence.lower_bound, rows)
        return rows, sentence("the bounds ", low, " and ", high, f" lie within {self.named()}")

    def _passed(self, where: BoolArray, bound: str, how: str, side: str) -> Part:
        rows = np.flatnonzero(where)
        e = self.evidence
        number = self.texts(e.upper_bound if bound == "upper" else e.lower_bound, rows)
        return rows, sentence(f"the {bound} bound ", number, f" is {how} {self.one_named(side)}")

    def _between(self, where: BoolArray) -> list[Part]:
        """Say which limits the range between the bounds is not clear of."""
        e, limit = self.evidence, self.limit
        low = ~(e.lower_bound >= (-np.inf if limit.lower is None else limit.lower))
        high = ~(e.upper_bound <= (np.inf if limit.upper is None else limit.upper))
        low, high = low & (limit.lower is not None), high & (limit.upper is not None)
        return [
            self._unclear(where & low & high, self.named()),
            self._unclear(where & low & ~high, self.one_named("lower")),
            self._unclear(where & ~low & high, self.one_named("upper")),
        ]

    def _unclear(self, where: BoolArray, limits: str) -> Part:
        rows = np.flatnonzero(where)
        e = self.evidence
        low, high = e.lower_bound[rows], e.upper_bound[rows]
        valueless = np.isnan(e.value[rows])
        starts = pa.array(("the range", "there is no value, and the range"), pa.string())
        from_low = or_else(sentence(" from ", self.texts(e.lower_bound, rows)), " up")
        to_high = or_else(sentence(" to ", self.texts(e.upper_bound, rows)), " upward")
        nowhere = np.isnan(low) & np.isnan(high)
        known = sentence(
            starts.take(valueless.astype(np.int32)),
            from_low,
            to_high,
            f" is not clear of {limits}",
        )
        unknown = _same(nowhere, f"no bounds are known to hold against {limits}")
        clear = np.flatnonzero(~nowhere)
        return rows, scattered(len(rows), [(clear, known.take(clear)), unknown])

    def by_value(self, where: BoolArray, code: NDArray[np.int8]) -> list[Part]:
        e, limit = self.evidence, self.limit
        low = np.zeros(where.shape, dtype=np.bool_)
        if limit.lower is not None:
            low = e.value < limit.lower
        rows = [
            np.flatnonzero(where & (code == CONFORMING)),
            np.flatnonzero(where & (code == NON_CONFORMING) & low),
            np.flatnonzero(where & (code == NON_CONFORMING) & ~low),
        ]
        within = " lies within" if len(self.ends) > 1 else " is not above"
        if limit.upper is None:
            within = " is not below"
        ends = [
            f"{within} {self.named()}",
            f" is below {self.one_named('lower')}",
            f" is above {self.one_named('upper')}",
        ]
        parts = [
            (r, sentence("the value ", self.texts(e.value, r), end))
            for r, end in zip(rows, ends, strict=True)
        ]
        return [*parts, self._too_uncertain(where & (code == UNDECIDED))]

    def _too_uncertain(self, where: BoolArray) -> Part:
        rows = np.flatnonzero(where)
        if self.limit.max_relative_u is None:
            return _same(where, "the sheet says no max_relative_u to decide by the value with")
        most = self.limit.max_relative_u
        value = self.evidence.value[rows]
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio = self.evidence.u[rows] / np.abs(value)
        text = number_texts(ratio, np.full(ratio.shape, _DIGITS_OF_RATIO), [most])
        return rows, sentence(
            "the relative uncertainty ",
            or_else(text, "of a value of 0"),
            f" is above the {plain_number(most)} that is allowed",
        )

    def by_probability(self, where: BoolArray, code: NDArray[np.int8]) -> list[Part]:
        at_least = 1.0 if self.limit.at_least is None else self.limit.at_least
        most = 1.0 - at_least
        known = np.isfinite(self.probability)
        ends = [
            (where & (code == CONFORMING), f", reaches {plain_number(at_least)}"),
            (where & (code == NON_CONFORMING), f", is not above {plain_number(most)}"),
            (
                where & known & (code == UNDECIDED),
                f", lies between {plain_number(most)} and {plain_number(at_least)}",
            ),
        ]
        parts = [_same(where & ~known, "the probability of conforming is not known")]
        for mask, end in ends:
            rows = np.flatnonzero(mask)
            u = np.full(rows.shape, _DIGITS_OF_P)
            p = number_texts(self.probability[rows], u, (most, at_least))
            parts.append((rows, sentence("the probability of conforming, ", p, end)))
        return parts


def _same(where: BoolArray, text: str) -> Part:
    rows = np.flatnonzero(where)
    return rows, pa.array([text], pa.string()).take(np.zeros(rows.shape, dtype=np.int32))


def _with_endings(texts: pa.StringArray, limit: Limit, with_indent: BoolArray) -> pa.StringArray:
    endings: Sequence[str] = ("", _WITH_INDENT)
    if limit.basis == "own":
        endings = (_OWN, _WITH_INDENT + _OWN)
    if not with_indent.any():
        return texts if not endings[0] else sentence(texts, endings[0])
    ending = pa.array(endings, pa.string()).take(with_indent.astype(np.int32))
    return sentence(texts, ending)
