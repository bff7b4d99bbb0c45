"""A furnace schedule: temperature over time, straight between the points given."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas.bounds import refuse
from coldwork.guards import finite, positive

__all__ = ["Schedule", "Stretch", "schedule"]

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Stretch:
    """A part of a schedule in which temperature goes straight from one value to another.

    Attributes
    ----------
    duration : float
        How long it takes. [s]
    start, end : float
        Temperatures at its two ends. [K]
    """

    duration: float
    start: float
    end: float

    def at(self, time: float) -> float:
        """Give the temperature [K] at a time [s] from the start of the stretch."""
        return self.start + (self.end - self.start) * time / self.duration


@dataclass(frozen=True)
class Schedule:
    """Temperature over time.

    Attributes
    ----------
    times : ndarray of float64, shape (m,)
        Not falling; one time twice is a jump. [s]
    temperatures : ndarray of float64, shape (m,)
        At those times. [K]
    """

    times: FloatArray
    temperatures: FloatArray

    def stretches(self) -> Iterator[Stretch]:
        """Go through the stretches [s], [K] that take any time, in order."""
        ends = zip(self.temperatures, self.temperatures[1:], strict=False)
        for duration, (start, end) in zip(np.diff(self.times), ends, strict=True):
            if duration > 0.0:
                yield Stretch(float(duration), float(start), float(end))


def schedule(times: ArrayLike, temperatures: ArrayLike) -> Schedule:
    """Make a schedule, or say why it is none.

    Parameters
    ----------
    times : array_like, shape (m,), m of 2 or more
        [s]
    temperatures : array_like, shape (m,)
        [K]

    Returns
    -------
    Schedule
        The two as arrays.

    Raises
    ------
    InvalidArgument
        If there are fewer than 2 points, they do not go in pairs, a time or temperature is
        missing or infinite, a temperature is zero or negative, or a time falls.

    References
    ----------
    Definition of a schedule here.
    """
    t, kelvin = finite("times", times), positive("temperatures", temperatures)
    if t.ndim != 1 or t.shape != kelvin.shape or t.size < 2:
        message = (
            "times and temperatures must be 2 points or more in pairs "
            f"(shapes {t.shape} and {kelvin.shape})"
        )
        raise InvalidArgument(message)
    refuse("times", t, np.isnan(t), "present")
    refuse("temperatures", kelvin, np.isnan(kelvin), "present")
    refuse("times", t[1:], np.diff(t) < 0.0, "in order, none before the one above it")
    return Schedule(t, kelvin)
