"""A slice of coupons by Monte Carlo: what is asked of the draws, and the verdict on first order."""

from collections.abc import Collection, Sequence
from dataclasses import replace
from math import isfinite
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.inputs.method import Draws, Method
from coldwork.interval.combine import Ends
from coldwork.interval.reach import BELOW_ZERO, LATE
from coldwork.jobs.evaluate import Evaluated, inputs_of
from coldwork.sampling.drawn import Coupons, Pool
from coldwork.sampling.sampler import Question, Sampled, sample
from coldwork.statistics.monte_carlo import tolerance

__all__ = ["Pools", "by_draws", "verdicts", "with_draws"]

_VARIANCE_FROM: Final = 2.0  # degrees of freedom above which Student's t has a variance
_SQUARED_FROM: Final = 4.0  # and those above which its square has one


class Pools:
    """The draws of a batch's shared inputs, for both bases of limits.

    Parameters
    ----------
    method : Method
        The batch's; it names a seed.
    """

    def __init__(self, method: Method) -> None:
        if method.draws is None:
            message = "draws without Monte Carlo"
            raise RuntimeError(message)
        values, spreads = inputs_of(method)
        seed = method.draws.seed
        self.how: Draws = method.draws
        self.total = Pool(seed, method.inputs, values, spreads)
        self.own = Pool(seed, method.inputs, values, spreads, exact_shared=True)


def with_draws(
    method: Method,
    pools: Pools,
    names: Sequence[str],
    evaluated: Evaluated,
    with_ends: Collection[str],
) -> Evaluated:
    """Draw a slice and put the ends of the draws in place of those of first order.

    Parameters
    ----------
    method : Method
        The batch's.
    pools : Pools
        Its draws.
    names : sequence of str
        Ids of the n coupons.
    evaluated : Evaluated
        The slice by first order.
    with_ends : collection of str
        Quantities whose intervals are wanted.

    Returns
    -------
    Evaluated
        The same with `sampled`, and `sampled_own` where a limit asks for it.
    """
    wanted = tuple(name for name in evaluated.results if name in with_ends)
    stress, u = evaluated.stress.value, evaluated.reach.u_stress.u
    rows = np.flatnonzero(np.isfinite(stress) & np.isfinite(u))
    coupons = Coupons([names[i] for i in rows.tolist()], rows, evaluated.start, evaluated.spreads)
    question = Question(
        quantities=wanted,
        coverage=method.coverage,
        limits=_limits(method, evaluated, "total"),
        has_sd={name: _has_sd(evaluated, name) for name in wanted},
    )
    sampled = sample(method.laws, pools.how, pools.total, coupons, question)
    own_limits = _limits(method, evaluated, "own")
    own = None
    if own_limits:
        limited = tuple(dict.fromkeys(name for name, _ in own_limits))
        has_sd = {name: _has_sd(evaluated, name) for name in limited}
        asked = Question(limited, method.coverage, own_limits, has_sd)
        own = sample(method.laws, pools.how, pools.own, coupons, asked)
    ends = {
        name: _where_there_is_one(name, evaluated, sampled.ends[name]) if name in wanted else found
        for name, found in evaluated.ends.items()
    }
    return replace(evaluated, ends=ends, first_order=evaluated.ends, sampled=sampled, own=own)


def by_draws(evaluated: Evaluated, basis: str) -> Sampled | None:
    """Give the draws that belong to a limit's basis; None by first order."""
    return evaluated.own if basis == "own" else evaluated.sampled


def verdicts(how: Draws, evaluated: Evaluated) -> list[dict[str, object] | None]:
    """Tell for each coupon what its draws came to and whether first order holds against them.

    First order holds where both of its ends lie within the tolerance of those of the
    draws; the tolerance is half of the last digit that counts in the first-order u.

    Parameters
    ----------
    how : Draws
        Seed, and digits that count.
    evaluated : Evaluated
        From `with_draws`.

    Returns
    -------
    list of dict or None
        None for a coupon that was not drawn.

    References
    ----------
    JCGM 101:2008, 8.
    """
    sampled, before = evaluated.sampled, evaluated.first_order
    if sampled is None or before is None:
        return []
    found: list[dict[str, object] | None] = []
    for i, draws in enumerate(sampled.draws.tolist()):
        if not draws:
            found.append(None)
            continue
        quantities = {name: _verdict(how, evaluated, name, i) for name in sampled.ends}
        found.append(
            {
                "seed": how.seed,
                "draws": draws,
                "adaptive": how.adaptive,
                "settled": bool(sampled.settled[i]) if how.adaptive else None,
                "digits": how.digits,
                "p_below_baseline": float(sampled.below_baseline[i]),
                "quantities": quantities,
            }
        )
    return found


def _verdict(how: Draws, evaluated: Evaluated, name: str, i: int) -> dict[str, object]:
    unit = _unit(name)

    def out(values: NDArray[np.float64]) -> float:
        return float(units.from_si(values[i], unit))

    first, drawn = (evaluated.first_order or {})[name], evaluated.ends[name]
    sampled = evaluated.sampled
    sd = out(sampled.sd[name]) if sampled is not None else float("nan")
    u = out(evaluated.combined[name].u)
    low, high = out(first.lower) - out(drawn.lower), out(first.upper) - out(drawn.upper)
    delta = tolerance(u, how.digits)
    judged = isfinite(delta) and isfinite(low) and isfinite(high)
    numbers = {
        "u_first_order": u,
        "sd": sd,
        "lower_first_order": out(first.lower),
        "upper_first_order": out(first.upper),
        "lower": out(drawn.lower),
        "upper": out(drawn.upper),
        "d_low": abs(low),
        "d_high": abs(high),
        "tolerance": delta,
    }
    known: dict[str, object] = {key: x if isfinite(x) else None for key, x in numbers.items()}
    holds = max(abs(low), abs(high)) <= delta if judged else None
    return known | {"first_order_holds": holds, "unit": unit}


def _limits(method: Method, evaluated: Evaluated, basis: str) -> tuple[tuple[str, float], ...]:
    found = []
    for limit in method.limits:
        if limit.basis == basis and limit.quantity in evaluated.results:
            unit = _unit(limit.quantity)
            ends = (x for x in (limit.lower, limit.upper) if x is not None)
            found += [(limit.quantity, float(units.to_si(x, unit))) for x in ends]
    return tuple(dict.fromkeys(found))


def _unit(quantity: str) -> str:
    return contracts.load("out/coupons").field(quantity).unit or "1"


def _has_sd(evaluated: Evaluated, name: str) -> NDArray[np.bool_]:
    """Tell where a quantity's distribution has a variance, by its Student inputs."""
    result = evaluated.results[name]
    needed = _SQUARED_FROM if name in LATE else _VARIANCE_FROM
    found = np.isfinite(result.value)
    for source, c in result.sensitivities.items():
        spread = evaluated.spreads[source]
        acts = np.asarray(c * spread.u) != 0.0
        found = found & ~(acts & (np.asarray(spread.degrees_of_freedom) <= needed))
    return found


def _where_there_is_one(name: str, evaluated: Evaluated, ends: Ends) -> Ends:
    """Leave out the ends of what a coupon without a density does not have."""
    if name in BELOW_ZERO or name not in LATE:
        return ends
    there = np.isfinite(evaluated.results[name].value)
    return Ends(np.where(there, ends.lower, np.nan), np.where(there, ends.upper, np.nan))
