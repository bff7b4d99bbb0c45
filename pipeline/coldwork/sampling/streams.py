"""Draws of inputs: which come out is decided by the seed and by names alone.

Every input, and every input of every coupon, has a stream of its own, whose key is a
digest of the seed and the names. Neither the order nor the number of coupons, nor how
the work is divided, can move a draw.
"""

from dataclasses import dataclass
from hashlib import blake2b
from math import inf, log, sqrt
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.keys import WINDOWS
from coldwork.inputs.quantity import Input
from coldwork.statistics.student import student_of_normal

__all__ = ["BLOCK", "THE_BATCH", "Distribution", "deviations", "distribution_of", "generator"]

THE_BATCH: Final = "the batch"  # what is refused, by the name that draws know it by
BLOCK: Final = 10_000  # draws of a stream that are made at once
_MOST_REDRAWN: Final = 1e-3  # share of draws outside what the input can be [1]
_SEPARATOR: Final = "\x1f"  # no name can hold it
_FROM_ZERO: Final = (-1e-300, inf)  # zero is allowed
_BOUNDS: Final = {
    "poisson_ratio": (-1.0, 0.5),
    "superposition_exponent": (1.0, 2.0),
    "wall_fraction": (0.0, 1.0),
    **dict.fromkeys(("hall_petch_mpa_m05", "obstacle_mpa", "thermal_mpa"), _FROM_ZERO),
}


@dataclass(frozen=True)
class Distribution:
    """How an input is distributed.

    Attributes
    ----------
    name : str
        The input, for messages.
    value : float
        Centre; the median of a lognormal one. [SI]
    u : float
        Standard uncertainty. [SI]
    shape : str
        ``normal``, ``uniform``, ``triangular`` or ``lognormal``.
    log_factor : float
        Standard deviation of ln value of a lognormal input. [1]
    degrees_of_freedom : float
        Of `u`: a normal input is Student's where they are finite, and so is the logarithm
        of a lognormal one. [1]
    low, high : float
        What it must lie between. [SI]
    """

    name: str
    value: float
    u: float
    shape: str = "normal"
    log_factor: float = 0.0
    degrees_of_freedom: float = inf
    low: float = -inf
    high: float = inf


def distribution_of(x: Input) -> Distribution:
    """Give the distribution that the sheet means for an input."""
    key = x.name.rpartition(".")[2]
    positive = WINDOWS.get(key, (0.0, 0.0))[0] > 0.0
    low, high = _BOUNDS.get(key, (0.0 if positive else -inf, inf))
    if x.name.startswith("tester:"):
        low = -1.0
    return Distribution(
        name=x.name,
        value=x.value,
        u=x.u,
        shape=x.shape,
        log_factor=log(x.factor) if x.factor else 0.0,
        degrees_of_freedom=x.degrees_of_freedom,
        low=low,
        high=high,
    )


def generator(seed: int, *names: str, block: int) -> np.random.Generator:
    """Give the random numbers of one input, or of one coupon's own input.

    Parameters
    ----------
    seed : int
        Of the batch sheet.
    *names : str
        The input, and for an own one the coupon.
    block : int
        Which block of `BLOCK` draws, from 0.

    Returns
    -------
    numpy.random.Generator
        Philox, keyed with BLAKE2 of seed and names; its counter starts anew in each block.
    """
    text = _SEPARATOR.join((str(seed), *names)).encode("utf-8", "surrogatepass")
    key = int.from_bytes(blake2b(text, digest_size=16).digest(), "little")
    return np.random.Generator(np.random.Philox(key=key, counter=block << 128))


def deviations(
    x: Distribution, rng: np.random.Generator, draws: int
) -> tuple[NDArray[np.float64], int]:
    """Draw how far an input is off its value.

    Parameters
    ----------
    x : Distribution
        The input.
    rng : numpy.random.Generator
        Its stream.
    draws : int
        How many.

    Returns
    -------
    ndarray, shape (draws,)
        Draw less value. [SI]
    int
        How many were drawn again.

    Raises
    ------
    BatchRefused
        If more than 1 in 1,000 draws were outside what the input can be. Fewer are drawn
        again.
    """
    found = _raw(x, rng, draws)
    if x.low == -inf and x.high == inf:
        return found, 0
    again = 0
    outside = np.flatnonzero(_is_outside(x, found))
    while outside.size:
        again += outside.size
        if again > _MOST_REDRAWN * draws:
            raise BatchRefused(THE_BATCH, [_cause(x, again, draws)])
        found[outside] = _raw(x, rng, outside.size)
        outside = outside[_is_outside(x, found[outside])]
    return found, again


def _is_outside(x: Distribution, deviation: NDArray[np.float64]) -> NDArray[np.bool_]:
    drawn = x.value + deviation
    return (drawn <= x.low) | (drawn >= x.high)


def _raw(x: Distribution, rng: np.random.Generator, draws: int) -> NDArray[np.float64]:
    if x.shape == "uniform":
        return x.u * sqrt(3.0) * (2.0 * rng.random(draws) - 1.0)
    if x.shape == "triangular":
        return x.u * sqrt(6.0) * (rng.random(draws) - rng.random(draws))
    t = student_of_normal(rng.standard_normal(draws), x.degrees_of_freedom)
    if x.shape == "lognormal":
        t *= x.log_factor
        return np.asarray(x.value * np.expm1(t))
    t *= x.u
    return t


def _cause(x: Distribution, again: int, draws: int) -> Cause:
    bound = f"at or below {x.low:g}" if x.high == inf else f"outside {x.low:g} to {x.high:g}"
    bound = "below 0" if -1.0 < x.low < 0.0 else bound
    lognormal = x.low == 0.0 and x.shape != "lognormal" and "." in x.name
    return Cause(
        x.name,
        f"at least {again} of {draws} draws came out {bound}",
        "Up to 1 draw in 1,000 that an input cannot take is drawn again; more would bend "
        "its distribution.",
        'Make it lognormal: give a factor instead of u, or shape = "lognormal".'
        if lognormal
        else "Check its value and u: so wide a spread reaches what it cannot be.",
    )
