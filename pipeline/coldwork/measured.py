"""An array with its sensitivities to named inputs, and a formula applied to it.

The chain is written once over values that are either plain arrays or
`Measured`: with plain arrays it computes, with `Measured` it also carries the
first-order sensitivities along (JCGM 100:2008, 5.1.3).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from coldwork.formulas.formula import Formula

__all__ = ["Measured", "Value", "apply", "broadcast", "select", "value_of"]


@dataclass(frozen=True)
class Measured:
    """A value and its derivatives by named inputs.

    Attributes
    ----------
    value : ndarray of float64, shape (n,) or ()
        The value. [SI]
    sensitivities : mapping of str to ndarray, each broadcastable to `value`
        Derivative of the value by each input that it depends on. A scalar
        stays a scalar: what is the same for all coupons is stored once.
        [SI of the value per SI of the input]
    """

    value: NDArray[np.float64]
    sensitivities: Mapping[str, NDArray[np.float64]] = field(default_factory=dict)

    __array_ufunc__ = None  # so that `array - measured` asks Measured, not numpy

    @classmethod
    def of_input(cls, name: str, value: float | NDArray[np.float64]) -> Measured:
        """Make the value of an input itself, whose sensitivity to itself is 1."""
        return cls(np.asarray(value, dtype=np.float64), {name: np.asarray(1.0)})

    def __add__(self, other: Value) -> Measured:
        return _combine(self.value + value_of(other), [(1.0, self), (1.0, other)])

    def __sub__(self, other: Value) -> Measured:
        return _combine(self.value - value_of(other), [(1.0, self), (-1.0, other)])

    def __mul__(self, other: Value) -> Measured:
        a, b = self.value, value_of(other)
        return _combine(a * b, [(b, self), (a, other)])

    __radd__ = __add__
    __rmul__ = __mul__

    def __rsub__(self, other: Value) -> Measured:
        return _combine(value_of(other) - self.value, [(1.0, other), (-1.0, self)])

    def where(self, keep: NDArray[np.bool_]) -> Measured:
        """Blank the value to NaN where `keep` is false; sensitivities follow."""
        kept = {k: np.where(keep, c, np.nan) for k, c in self.sensitivities.items()}
        return Measured(np.where(keep, self.value, np.nan), kept)


Value: TypeAlias = float | NDArray[np.float64] | Measured


def value_of(x: Value) -> NDArray[np.float64]:
    """Give the plain value, without sensitivities."""
    return x.value if isinstance(x, Measured) else np.asarray(x, dtype=np.float64)


def broadcast(x: Value, shape: tuple[int, ...]) -> Value:
    """Give the same value at every element of a shape; scalar sensitivities stay scalars.

    Parameters
    ----------
    x : float, ndarray or Measured
        The value; its shape broadcasts to `shape`. [SI]
    shape : tuple of int
        The shape wanted.

    Returns
    -------
    ndarray or Measured
        Measured exactly if `x` is. [SI]
    """
    value = np.broadcast_to(value_of(x), shape)
    return Measured(value, x.sensitivities) if isinstance(x, Measured) else value


def kept_where(x: Value, keep: NDArray[np.bool_]) -> Value:
    """Blank a value to NaN where `keep` is false.

    Parameters
    ----------
    x : float, ndarray or Measured
        The value. [SI]
    keep : ndarray of bool, shape (n,)
        Where it stays.

    Returns
    -------
    ndarray or Measured, shape (n,)
        Measured exactly if `x` is. [SI]
    """
    return x.where(keep) if isinstance(x, Measured) else np.where(keep, x, np.nan)


def apply(formula: Formula, **arguments: Value) -> Value:
    """Compute a formula; carry sensitivities through it if any argument has some.

    Parameters
    ----------
    formula : Formula
        The relation.
    **arguments : float, ndarray or Measured
        Its arguments by name. [SI]

    Returns
    -------
    ndarray or Measured
        Measured exactly if an argument is. [SI]
    """
    plain = {name: value_of(x) for name, x in arguments.items()}
    value = formula.value(**plain)
    carried = {name: x for name, x in arguments.items() if isinstance(x, Measured)}
    if not carried:
        return value
    slopes = formula.sensitivities(**plain)
    return _combine(value, [(slopes[name], x) for name, x in carried.items()])


def select(which: NDArray[np.int8] | NDArray[np.int64], choices: Mapping[int, Value]) -> Value:
    """Take, element by element, the choice that `which` names.

    Parameters
    ----------
    which : ndarray of int8 or int64, shape (n,)
        Key into `choices` for each element; a key that is not there gives NaN.
    choices : mapping of int to float, ndarray or Measured
        The values to choose between. [SI]

    Returns
    -------
    ndarray or Measured
        The only choice as it is when every element takes it.
    """
    for key, choice in choices.items():
        if bool((which == key).all()):
            return choice
    value = np.full(which.shape, np.nan)
    sensitivities: dict[str, NDArray[np.float64]] = {}
    for key, choice in choices.items():
        here = which == key
        value = np.where(here, value_of(choice), value)
        if isinstance(choice, Measured):
            for name, c in choice.sensitivities.items():
                sensitivities[name] = np.where(here, c, sensitivities.get(name, np.float64(0.0)))
    if any(isinstance(choice, Measured) for choice in choices.values()):
        return Measured(value, sensitivities)
    return value


def _combine(
    value: NDArray[np.float64], parts: Sequence[tuple[float | NDArray[np.float64], Value]]
) -> Measured:
    total: dict[str, NDArray[np.float64]] = {}
    for slope, part in parts:
        if isinstance(part, Measured):
            for name, c in part.sensitivities.items():
                step = np.asarray(slope * c)
                total[name] = total[name] + step if name in total else step
    return Measured(value, total)
