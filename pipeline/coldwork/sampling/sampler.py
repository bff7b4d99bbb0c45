"""Slices of coupons by Monte Carlo: draws through the one chain, and what they say."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import ceil, inf
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import Start, energy, strength
from coldwork.errors import BatchRefused, Cause, InvalidArgument
from coldwork.inputs.method import Draws, Laws
from coldwork.interval.combine import Ends
from coldwork.interval.reach import BELOW_ZERO
from coldwork.measured import Value, value_of
from coldwork.sampling.drawn import Coupons, Pool
from coldwork.sampling.streams import BLOCK, THE_BATCH
from coldwork.statistics.monte_carlo import (
    Stretch,
    is_settled,
    order_statistic,
    ranks,
    stretch_of,
)

__all__ = ["Question", "Sampled", "sample"]

_Floats = NDArray[np.float64]
_TOGETHER: Final = 16  # coupons that are drawn together: shared factors are computed once for them
_HELD: Final = 1_600_000  # draws of a quantity that are held at a time, of all these together
_WIDTH: Final = 2000  # draws that go through the chain at once, so that all stays in the cache
_NO_STRENGTH: Final = 1e-9  # of its value stands for a hardness drawn at or below zero [1]


@dataclass(frozen=True)
class Question:
    """What is asked of the draws.

    Attributes
    ----------
    quantities : tuple of str
        Columns whose standard deviation and interval are wanted.
    coverage : float
        Of the interval and of one-sided bounds. [1]
    limits : tuple of (str, float)
        Quantities with a limit, for probabilities. [SI]
    has_sd : mapping of str to ndarray of bool, shape (n,)
        Where a quantity has a standard deviation at all.
    """

    quantities: tuple[str, ...]
    coverage: float
    limits: tuple[tuple[str, float], ...]
    has_sd: Mapping[str, NDArray[np.bool_]]


@dataclass(frozen=True)
class Sampled:
    """What the draws of n coupons say. SI, arrays of shape (n,), NaN where nothing is known.

    Attributes
    ----------
    draws : ndarray of int64
        How many were made; 0 for a coupon without a stress or its uncertainty.
    settled : ndarray of bool
        Whether more draws would not change the digits that count, where that was asked.
    below_baseline : ndarray
        Share of draws at or below the baseline. [1]
    sd : mapping of str to ndarray
        Standard deviation of a quantity.
    ends : mapping of str to Ends
        Its equal-tailed interval.
    bounds : mapping of str to Ends
        One-sided bounds at the coverage, of quantities with a limit.
    above : mapping of (str, float) to Ends
        Share of draws above a limit: at least, and at most, where some have no value. [1]
    """

    draws: NDArray[np.int64]
    settled: NDArray[np.bool_]
    below_baseline: _Floats
    sd: Mapping[str, _Floats]
    ends: Mapping[str, Ends]
    bounds: Mapping[str, Ends]
    above: Mapping[tuple[str, float], Ends]


def sample(
    laws: Laws,
    how: Draws,
    pool: Pool,
    coupons: Coupons,
    question: Question,
) -> Sampled:
    """Draw a slice of coupons and say what is asked.

    A draw at or below the baseline stays, with density and energies of 0, and without a
    spacing or a line energy, which grow without bound there. A draw that the laws have no
    value for (no line energy, a stress past a branch) could lie anywhere and counts
    against both ends.

    Parameters
    ----------
    laws : Laws
        The choices that the sheet names.
    how : Draws
        How many draws, or when they are enough.
    pool : Pool
        The draws of inputs.
    coupons : Coupons
        Those of the slice that can be drawn.
    question : Question
        What is asked.

    Returns
    -------
    Sampled
        For all n coupons of the slice.

    Raises
    ------
    BatchRefused
        If an input's distribution reaches too far into what it cannot be.
    """
    answer = _blank(len(coupons.start.scale), question)
    step = max(1, min(_TOGETHER, _HELD // how.number, len(coupons.names)))
    np.empty(_HELD)  # freed at once: from then on the allocator keeps what tiles free
    held = {name: np.empty((step, how.number)) for name in _wanted(question)}
    for begin in range(0, len(coupons.names), step):
        places = range(begin, min(begin + step, len(coupons.names)))
        together = coupons.only(places)
        watches = _draw(laws, how, pool, together, question, held)
        for i, watch in enumerate(watches):
            row = int(together.rows[i])
            drawn = {name: x[i, : watch.count] for name, x in held.items()}
            _reduce(answer, row, drawn, question)
            answer.settled[row] = watch.settled
    return answer


def _draw(
    laws: Laws,
    how: Draws,
    pool: Pool,
    coupons: Coupons,
    question: Question,
    held: Mapping[str, _Floats],
) -> list["_Watch"]:
    """Draw a few coupons into `held`, block by block, until each has enough."""
    watches = [_Watch(how, question, int(row)) for row in coupons.rows]
    active = list(range(len(watches)))
    block = 0
    while active:
        here = slice(block * BLOCK, min((block + 1) * BLOCK, how.number))
        _block(
            laws,
            pool,
            coupons.only(active),
            block,
            {n: x[:, here] for n, x in held.items()},
            active,
        )
        block += 1
        for i in active:
            watches[i].look({name: x[i] for name, x in held.items()}, here.stop)
        active = [i for i in active if not watches[i].done]
    return watches


class _Watch:
    """Says when a coupon has enough draws (JCGM 101:2008, 7.9.4)."""

    def __init__(self, how: Draws, question: Question, row: int) -> None:
        self.count = 0
        self.done = False
        self.settled = True
        self._how = how
        self._question = question
        self._row = row
        self._runs: dict[str, list[Stretch]] = {name: [] for name in question.quantities}
        self._run = BLOCK * ceil(max(1.0, how.least(question.coverage) / BLOCK))

    def look(self, drawn: Mapping[str, _Floats], count: int) -> None:
        """Look at a coupon's draws so far."""
        self.count = count
        if not self._how.adaptive:
            self.done = count >= self._how.number
            return
        if count % self._run:
            return
        for name, runs in self._runs.items():
            run = drawn[name][count - self._run : count]
            runs.append(stretch_of(run, self._question.coverage))
        has_sd, digits = self._question.has_sd, self._how.digits
        self.settled = all(
            is_settled(runs, self._run, digits, has_sd=bool(has_sd[name][self._row]))
            for name, runs in self._runs.items()
        )
        self.done = self.settled or count + self._run > self._how.number


def _block(
    laws: Laws,
    pool: Pool,
    coupons: Coupons,
    block: int,
    held: Mapping[str, _Floats],
    places: Sequence[int],
) -> None:
    """Draw one block of coupons into their places in `held`, arrays of shape (c, draws)."""
    size = next(iter(held.values())).shape[1]
    inputs, start = pool.inputs(coupons, block), pool.start(coupons, block)
    whole = len(places) == places[-1] + 1  # none before the last has dropped out
    rows: slice | list[int] = slice(0, len(places)) if whole else list(places)
    for begin in range(0, size, _WIDTH):
        here = slice(begin, min(begin + _WIDTH, size))
        part = {name: _cut(x, here) for name, x in inputs.items()}
        found = _chain(laws, part, _cut_start(start, here))
        for name, into in held.items():
            into[rows, here] = found[name]


def _chain(laws: Laws, inputs: Mapping[str, Value], start: Start) -> dict[str, _Floats]:
    """Run draws through the chain; what a draw without density has stands in `sample`."""
    found = {"hardness": value_of(start.mean)}
    try:
        half = strength(laws, inputs, _with_strength(laws, start))
        stress = value_of(half.dislocation_stress)
        present = stress > 0.0
        everywhere = bool(present.all())
        pivot = stress if everywhere else np.where(present, stress, np.nan)
        late = energy(laws, inputs, pivot, start)
    except InvalidArgument as error:
        raise BatchRefused(THE_BATCH, [_beyond(error)]) from error
    found |= {
        "flow_stress_mpa": value_of(half.flow_stress),
        "baseline_stress_mpa": value_of(half.baseline_stress),
        "dislocation_stress_mpa": np.where(np.isnan(stress), -inf, stress),
    }
    for name, x in late.items():
        y = value_of(x)
        found[name] = y if everywhere else np.where(present, y, 0.0 if name in BELOW_ZERO else inf)
    return found


def _with_strength(laws: Laws, start: Start) -> Start:
    """Take a hardness that was drawn at or below zero as next to none."""
    mean = value_of(start.mean)
    if laws.route != "indent" or not bool((mean <= 0.0).any()):
        return start
    floor = _NO_STRENGTH * np.nanmax(np.abs(mean), axis=-1, keepdims=True)
    return replace(start, mean=np.where(mean <= 0.0, floor, mean))


def _reduce(answer: Sampled, row: int, drawn: Mapping[str, _Floats], question: Question) -> None:
    """Write what one coupon's draws say into the answer."""
    stress = drawn["dislocation_stress_mpa"]
    count = stress.shape[0]
    answer.draws[row] = count
    share = np.count_nonzero(stress <= 0.0) / count
    answer.below_baseline[row] = share
    pair = ranks(count, question.coverage)
    bounds = {name for name, _ in question.limits}
    q = pair[1] - pair[0]
    for name, limit in question.limits:
        x = drawn[name]
        at_least = np.count_nonzero(x > limit) / count
        at_most = 1.0 - np.count_nonzero(x <= limit) / count
        answer.above[name, limit].lower[row] = at_least
        answer.above[name, limit].upper[row] = at_most
    for name, x in drawn.items():
        if name in answer.sd and question.has_sd[name][row]:
            answer.sd[name][row] = _sd(x)
        nothing_above = name in BELOW_ZERO and share >= pair[1] / count
        if name in answer.ends:
            low, high = _ends(x, *pair)
            _put(answer.ends[name], row, low, np.nan if nothing_above else high)
        if name in bounds:
            low, high = _ends(x, count - q, q)
            nothing_above = name in BELOW_ZERO and share >= q / count
            _put(answer.bounds[name], row, low, np.nan if nothing_above else high)


def _sd(x: _Floats) -> float:
    """Give the standard deviation, NaN where draws have no value or an infinite one."""
    n = x.shape[0]
    with np.errstate(invalid="ignore"):
        off = x - np.add.reduce(x) / n
        sd = float(np.sqrt(np.einsum("i,i->", off, off) / (n - 1)))
    return sd if np.isfinite(sd) else np.nan


def _ends(x: _Floats, low: int, high: int) -> tuple[float, float]:
    """Give the draws of two ranks; draws without a value count as beyond either end."""
    x.partition(low - 1)  # NaN go last
    lower, above = float(x[low - 1]), x[low:]
    above.partition(high - low - 1)
    upper = float(above[high - low - 1])
    beyond = above[high - low - 1 :]  # with any NaN among them
    missing = int(np.count_nonzero(np.isnan(beyond))) if np.isnan(beyond.max()) else 0
    if not missing:
        return lower, upper
    if low <= missing:
        return np.nan, upper
    return order_statistic(x, low - missing), upper


def _put(ends: Ends, row: int, low: float, high: float) -> None:
    ends.lower[row] = low if np.isfinite(low) else np.nan
    ends.upper[row] = high if np.isfinite(high) else np.nan


def _wanted(question: Question) -> tuple[str, ...]:
    limited = (name for name, _ in question.limits)
    return tuple(dict.fromkeys((*question.quantities, *limited, "dislocation_stress_mpa")))


def _blank(n: int, question: Question) -> Sampled:
    def nothing() -> _Floats:
        return np.full(n, np.nan)

    def ends() -> Ends:
        return Ends(nothing(), nothing())

    return Sampled(
        draws=np.zeros(n, dtype=np.int64),
        settled=np.zeros(n, dtype=np.bool_),
        below_baseline=nothing(),
        sd={name: nothing() for name in question.quantities},
        ends={name: ends() for name in question.quantities},
        bounds={name: ends() for name, _ in question.limits},
        above={key: ends() for key in question.limits},
    )


def _cut(x: Value, here: slice) -> Value:
    plain = value_of(x)
    return plain[..., here] if plain.ndim and plain.shape[-1] > 1 else plain


def _cut_start(start: Start, here: slice) -> Start:
    wide: dict[str, Any] = {
        name: x[:, here]
        for name, x in vars(start).items()
        if isinstance(x, np.ndarray) and x.ndim == 2 and x.shape[1] > 1
    }
    return replace(start, **wide)


def _beyond(error: InvalidArgument) -> Cause:
    return Cause(
        "[uncertainty]",
        f"a draw left what the laws can take: {error}",
        "Every draw of an input must be a value that it could have.",
        "Give that input less u, or a shape that ends where it has to.",
    )
