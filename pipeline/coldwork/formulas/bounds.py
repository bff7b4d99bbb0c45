"""Argument checks of the formulas whose limits are not those that `guards` knows.

They read as those do: NaN stands for a missing value and passes; what is refused is
named with how many values are bad and the first of them.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite

__all__ = ["from_to", "refuse"]


def from_to(name: str, value: ArrayLike, low: float, high: float) -> NDArray[np.float64]:
    """Give `value` as floats, in its own unit; refuse what is below one end or above another.

    Raises
    ------
    InvalidArgument
        If any value is below `low`, above `high` or infinite (NaN passes).
    """
    x = finite(name, value)
    refuse(name, x, (x < low) | (x > high), f"from {low:g} to {high:g}")
    return x


def refuse(name: str, x: NDArray[np.float64], bad: NDArray[np.bool_], need: str) -> None:
    """Refuse the marked values of an argument, whatever their unit; [1] counts them.

    Raises
    ------
    InvalidArgument
        If any value is marked.
    """
    if bad.any():
        first = np.broadcast_to(x, bad.shape)[bad][0]
        message = (
            f"{name} must be {need} ({int(bad.sum())} bad of {bad.size}, the first is {first:g})"
        )
        raise InvalidArgument(message)
