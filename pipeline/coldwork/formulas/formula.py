"""A formula: a function beside the function of its sensitivities."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

__all__ = ["Formula"]


@dataclass(frozen=True)
class Formula:
    """One relation in a form that uncertainty can be carried through.

    Attributes
    ----------
    value : callable
        Keyword arguments to an array of the broadcast shape, all SI.
    sensitivities : callable
        The same arguments to the derivative of `value` by each of them, keyed
        by the argument's name.
    """

    value: Callable[..., NDArray[np.float64]]
    sensitivities: Callable[..., dict[str, NDArray[np.float64]]]

    @property
    def name(self) -> str:
        """Name of the relation: that of the function which computes it."""
        return self.value.__name__
