"""Argument checks that formulas share.

Each takes the argument's name and value and gives back a float64 array. NaN
stands for a missing value and passes; what is refused is named with how many
values are bad and the first of them.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument

__all__ = ["between", "finite", "not_negative", "positive"]


def positive(name: str, value: ArrayLike) -> NDArray[np.float64]:
    """Give `value` as floats, in its own unit; refuse zero, negative and infinite ones.

    Raises
    ------
    InvalidArgument
        If any value is not positive and finite (NaN passes).
    """
    x = np.asarray(value, dtype=np.float64)
    if _all_finite_from(x, 0.0, above=True):
        return x
    return _keep(name, x, "positive and finite", (x <= 0.0) | np.isinf(x))


def not_negative(name: str, value: ArrayLike) -> NDArray[np.float64]:
    """Give `value` as floats, in its own unit; refuse negative and infinite ones.

    Raises
    ------
    InvalidArgument
        If any value is negative or infinite (NaN passes).
    """
    x = np.asarray(value, dtype=np.float64)
    if _all_finite_from(x, 0.0):
        return x
    return _keep(name, x, "zero or positive, and finite", (x < 0.0) | np.isinf(x))


def finite(name: str, value: ArrayLike) -> NDArray[np.float64]:
    """Give `value` as floats, in its own unit; refuse infinite ones.

    Raises
    ------
    InvalidArgument
        If any value is infinite (NaN passes).
    """
    x = np.asarray(value, dtype=np.float64)
    if _all_finite_from(x, -np.inf, above=True):
        return x
    return _keep(name, x, "finite", np.isinf(x))


def between(name: str, value: ArrayLike, low: float, high: float) -> NDArray[np.float64]:
    """Give `value` as floats, in its own unit; refuse what is not strictly between two ends.

    Raises
    ------
    InvalidArgument
        If any value is at or beyond `low` or `high` (NaN passes).
    """
    x = np.asarray(value, dtype=np.float64)
    return _keep(name, x, f"between {low:g} and {high:g}", (x <= low) | (x >= high))


def _all_finite_from(x: NDArray[np.float64], low: float, *, above: bool = False) -> bool:
    """Tell quickly that nothing is bad; a NaN, like a bad value, wants the closer look."""
    if not x.size:
        return True
    least = x.min()
    return bool((least > low if above else least >= low) and x.max() < np.inf)


def _keep(
    name: str, x: NDArray[np.float64], need: str, bad: NDArray[np.bool_]
) -> NDArray[np.float64]:
    if bad.any():
        first = np.ravel(x)[np.flatnonzero(bad)[0]]
        message = (
            f"{name} must be {need} ({int(bad.sum())} bad of {x.size}, the first is {first:g})"
        )
        raise InvalidArgument(message)
    return x
