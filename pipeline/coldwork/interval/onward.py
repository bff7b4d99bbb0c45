"""Intervals of what is computed onward from quantities that have intervals of their own.

A pivot is such a quantity: a stored energy, whose published interval is not symmetrical. As in
`reach`, the ends of a result y are taken by moving the pivot to its ends, and what enters beside
it widens them,

    g(y) -+ sqrt(sum of A_p^2 + (k m)^2 + 2 sum of r_p A_p k m + 2 sum of r_pq A_p A_q),

on the scale g on which y is nearly normal: plain for a difference, the logarithm for what is
positive, the logarithm of -ln(1 - x) for a fraction that goes to 1 as x = 1 - exp(-exp(g)). A_p is
how far g goes when the pivot p goes to its end, m the joint uncertainty of the inputs that enter
beside the pivots, r_p the correlation of pivot and these, r_pq that of two pivots.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final, Literal, TypeAlias, TypeVar

import numpy as np
from numpy.typing import NDArray

from coldwork.interval.combine import Combined, Ends, Spread, combine
from coldwork.measured import Measured, Value, value_of
from coldwork.statistics.student import student_quantile

__all__ = ["Onward", "Outcome", "Pivot", "onward"]

_Floats: TypeAlias = NDArray[np.float64]
ScaleName = Literal["plain", "logarithm", "fraction"]
Key = TypeVar("Key")
_REST: Final = ""  # what enters beside the pivots, among their names


@dataclass(frozen=True)
class Pivot:
    """A quantity of n coupons with its own interval.

    Attributes
    ----------
    value : Measured, shape (n,)
        With its sensitivities to named inputs. [SI]
    ends : Ends
        Its interval; where the value is NaN and the upper end is not, the one-sided kind. [SI]
    """

    value: Measured
    ends: Ends


@dataclass(frozen=True)
class Onward:
    """What was computed, and on which scale it is nearly normal.

    Attributes
    ----------
    value : Value, shape (n,) or ()
        The quantity; of a ``fraction``, ln(-ln(1 - x)) in place of x. [SI]
    scale : str
        ``plain``, ``logarithm`` or ``fraction``.
    """

    value: Value
    scale: ScaleName = "logarithm"


@dataclass(frozen=True)
class Outcome:
    """A result with its uncertainty and interval, all of shape (n,). SI.

    Attributes
    ----------
    result : Measured
        Value, NaN where there is none, with its sensitivities to the inputs themselves.
    combined : Combined
        First order.
    ends : Ends
        The interval.
    """

    result: Measured
    combined: Combined
    ends: Ends

    @property
    def value(self) -> _Floats:
        """The value alone."""
        return self.result.value


Work: TypeAlias = Callable[[Mapping[str, Value]], Mapping[Key, Onward]]


def onward(
    work: Work[Key],
    pivots: Mapping[str, Pivot],
    spreads: Mapping[str, Spread],
    coverage: float,
) -> dict[Key, Outcome]:
    """Compute onward from pivots, with intervals.

    Parameters
    ----------
    work : callable
        From the pivots' values by name to results by key, `Measured` where they are uncertain.
    pivots : mapping of str to Pivot
        By name; where the first has no value but an upper end, results have one-sided ends.
    spreads : mapping of str to Spread
        Of every input that the pivots or the results depend on.
    coverage : float
        Of the intervals. [1]

    Returns
    -------
    dict
        An `Outcome` for each key of `work`, shape (n,).
    """
    shape = next(iter(pivots.values())).value.value.shape
    probability = (1.0 + coverage) / 2.0
    middle = {name: Measured.of_input(name, p.value.value) for name, p in pivots.items()}
    results = work(middle)
    moved = {
        name: [work(_moved(pivots, name, end)) for end in (p.ends.lower, p.ends.upper)]
        for name, p in pivots.items()
    }
    found = {}
    for key, one in results.items():
        here = _on_scale(one, shape)
        ends = {name: [_on_scale(w[key], shape) for w in pair] for name, pair in moved.items()}
        found[key] = _outcome(one.scale, here, ends, pivots, spreads, probability)
    return found


def _moved(pivots: Mapping[str, Pivot], name: str, end: _Floats) -> dict[str, Value]:
    """Give all pivots in the middle but for one."""
    return {n: end if n == name else p.value.value for n, p in pivots.items()}


def _outcome(
    scale: ScaleName,
    here: Measured,
    moved: Mapping[str, list[Measured]],
    pivots: Mapping[str, Pivot],
    spreads: Mapping[str, Spread],
    probability: float,
) -> Outcome:
    total = _through(here, pivots)
    on_scale = combine(total, spreads)
    k = student_quantile(probability, on_scale.degrees_of_freedom)
    km = k * _size(_beside(here, pivots), spreads, here.value.shape)
    effects = {name: _effect(here, name, pivots) for name in pivots}
    effects[_REST] = Measured(here.value, _beside(here, pivots))
    steps = {name: _steps(here, name, pair) for name, pair in moved.items()}
    with np.errstate(invalid="ignore", over="ignore"):
        ends = []
        for side in (0, 1):
            far = {name: each[side] for name, each in steps.items()} | {_REST: km}
            ends.append(_joined(far, effects, spreads))
        lower, upper = here.value - ends[0], here.value + ends[1]
    unknown = np.isnan(on_scale.u)
    found = Ends(np.where(unknown, np.nan, lower), np.where(unknown, np.nan, upper))
    for pair in moved.values():
        found = _one_sided(found, here, pair, pivots, spreads, probability)
    return _published(scale, total, on_scale, found)


def _beside(here: Measured, pivots: Mapping[str, Pivot]) -> dict[str, _Floats]:
    """Give the sensitivities to what is no pivot."""
    return {name: c for name, c in here.sensitivities.items() if name not in pivots}


def _effect(here: Measured, name: str, pivots: Mapping[str, Pivot]) -> Measured:
    """Give what a pivot brings into the result, by the inputs that the pivot came from."""
    slope = here.sensitivities.get(name, np.asarray(0.0))
    source = pivots[name].value.sensitivities
    return Measured(here.value, {n: slope * c for n, c in source.items()})


def _steps(here: Measured, name: str, pair: list[Measured]) -> tuple[_Floats, _Floats]:
    """Give how far the result goes down and up with a pivot; without end where it is not there."""
    slope = here.sensitivities.get(name, np.asarray(0.0))
    far = []
    for each, side in zip(pair, (-1.0, 1.0), strict=True):
        with np.errstate(invalid="ignore"):
            beyond = np.where(slope == 0.0, 0.0, side * np.sign(slope) * np.inf)
            far.append(np.where(np.isnan(each.value), beyond, each.value - here.value))
    return np.maximum(-np.minimum(*far), 0.0), np.maximum(np.maximum(*far), 0.0)


def _joined(
    far: Mapping[str, _Floats], effects: Mapping[str, Measured], spreads: Mapping[str, Spread]
) -> _Floats:
    """Join the ways that a result may go, with the correlation of every two of them."""
    names = list(far)
    total = np.zeros(1)
    for i, one in enumerate(names):
        total = total + far[one] ** 2
        for other in names[:i]:
            both = 2.0 * far[one] * far[other]
            r = _correlation(effects[one], effects[other], spreads)
            total = total + np.where((r == 0.0) | np.isinf(both), 0.0, r * both)
    return np.asarray(np.sqrt(np.maximum(total, 0.0)))


def _one_sided(
    ends: Ends,
    here: Measured,
    pair: list[Measured],
    pivots: Mapping[str, Pivot],
    spreads: Mapping[str, Spread],
    probability: float,
) -> Ends:
    """Fill the ends where there is no value, but one where a pivot is at its upper end."""
    low, high = pair
    only = np.isnan(here.value) & np.isfinite(high.value)
    if not only.any():
        return ends
    known = combine(Measured(high.value, _beside(high, pivots)), spreads)
    km = student_quantile(probability, known.degrees_of_freedom) * known.u
    rising = low.value <= high.value  # nowhere where it does not exist at the lower end
    lower = np.where(only, np.where(rising, low.value, high.value) - km, ends.lower)
    upper = np.where(only, np.where(rising, high.value + km, np.nan), ends.upper)
    return Ends(lower, upper)


def _published(scale: ScaleName, total: Measured, on_scale: Combined, ends: Ends) -> Outcome:
    g = total.value
    value = _back(scale, g)
    with np.errstate(over="ignore", invalid="ignore"):
        size = {
            "plain": np.ones_like(g),
            "logarithm": value,
            "fraction": np.exp(g - np.exp(g)),
        }[scale]
        combined = Combined(
            on_scale.u_own * size,
            on_scale.u_shared * size,
            on_scale.u * size,
            on_scale.degrees_of_freedom,
        )
        slopes = {name: c * size for name, c in total.sensitivities.items()}
    lower, upper = _back(scale, ends.lower), _back(scale, ends.upper)
    finite = [np.where(np.isinf(x), np.nan, x) for x in (lower, upper)]
    return Outcome(Measured(value, slopes), combined, Ends(*finite))


def _on_scale(one: Onward, shape: tuple[int, ...]) -> Measured:
    """Give a result on its scale, with sensitivities of that."""
    y = np.broadcast_to(value_of(one.value), shape)
    slopes = dict(one.value.sensitivities) if isinstance(one.value, Measured) else {}
    if one.scale != "logarithm":
        return Measured(y, slopes)
    with np.errstate(divide="ignore", invalid="ignore"):
        own = {n: np.where(y > 0.0, c / y, np.nan) for n, c in slopes.items()}
        return Measured(np.log(y), own)


def _back(scale: ScaleName, g: _Floats) -> _Floats:
    with np.errstate(over="ignore"):
        if scale == "logarithm":
            return np.asarray(np.exp(g))
        return np.asarray(-np.expm1(-np.exp(g))) if scale == "fraction" else g


def _through(here: Measured, pivots: Mapping[str, Pivot]) -> Measured:
    """Replace sensitivities to pivots by those to what the pivots came from."""
    total = {n: c for n, c in here.sensitivities.items() if n not in pivots}
    for name, pivot in pivots.items():
        slope = here.sensitivities.get(name)
        if slope is None:
            continue
        for source, c in pivot.value.sensitivities.items():
            step = slope * c
            total[source] = total[source] + step if source in total else step
    return Measured(here.value, total)


def _size(
    slopes: Mapping[str, _Floats], spreads: Mapping[str, Spread], shape: tuple[int, ...]
) -> _Floats:
    total = np.zeros(shape)
    for name, c in slopes.items():
        total = total + (c * spreads[name].u) ** 2
    return np.asarray(np.sqrt(total))


def _correlation(a: Measured, b: Measured, spreads: Mapping[str, Spread]) -> _Floats:
    """Give the correlation of two effects on one result, 0 where either is none."""
    shape = a.value.shape
    covariance = np.zeros(shape)
    for name, c in a.sensitivities.items():
        if name in b.sensitivities:
            covariance = covariance + c * b.sensitivities[name] * spreads[name].u ** 2
    sizes = _size(a.sensitivities, spreads, shape) * _size(b.sensitivities, spreads, shape)
    with np.errstate(invalid="ignore", divide="ignore"):
        r = covariance / sizes
    return np.clip(np.where(np.isfinite(r), r, 0.0), -1.0, 1.0)
