"""The stress before superposition, in which ends of the dislocation stress are taken.

Beside obstacles that join with an exponent above 1 the dislocation stress rises from nothing
with a slope without bound, so that s -+ k u(s) means little there. The excess over the baseline
does not: ends are taken in it, at x -+ k u(s) / (ds/dx), and mapped. What is not known of the
obstacle and of the exponent goes along, as the excess that would do the same to s.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import dislocation_stress
from coldwork.inputs.method import Laws
from coldwork.measured import Measured, Value, value_of

__all__ = ["Before", "before_superposition"]

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Before:
    """The excess over the baseline, and how it becomes a dislocation stress.

    Attributes
    ----------
    excess : ndarray, shape (n,)
        Its value. [Pa]
    slope : ndarray, shape (n,)
        Derivative of the dislocation stress by it. [1]
    stress_of : callable
        Goes from excess to dislocation stress, arrays of shape (n,). [Pa]
    """

    excess: FloatArray
    slope: FloatArray
    stress_of: Callable[[FloatArray], FloatArray]

    def moved(self, steps: FloatArray) -> FloatArray:
        """Give the dislocation stress where first order would put it `steps` away. [Pa]."""
        with np.errstate(invalid="ignore", over="ignore"):
            return self.stress_of(self.excess + steps / self.slope)


def before_superposition(
    laws: Laws, inputs: Mapping[str, Value], excess: FloatArray, strain: FloatArray
) -> Before | None:
    """Make it of an excess over the baseline; None where no obstacle stress joins.

    Parameters
    ----------
    laws : Laws
        The choices that the sheet names.
    inputs : mapping of str to Value
        Inputs by their name in the sheet. [SI]
    excess : ndarray, shape (n,)
        Flow stress as tested less the baseline. [Pa]
    strain : ndarray, shape (n,) or ()
        Strain of the indent itself; not used where nothing is unwound. [1]
    """
    if not laws.superposed:
        return None
    plain = {name: value_of(x) for name, x in inputs.items()}
    name = "excess"
    _, stress = dislocation_stress(laws, plain, Measured.of_input(name, excess), strain)
    slope = stress.sensitivities[name] if isinstance(stress, Measured) else np.asarray(1.0)

    def stress_of(x: FloatArray) -> FloatArray:
        return value_of(dislocation_stress(laws, plain, x, strain)[1])

    return Before(excess, slope, stress_of)
