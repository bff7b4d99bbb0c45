"""A named number with its uncertainty, its distribution and where it came from."""

from dataclasses import dataclass
from math import log
from typing import Final

__all__ = ["ORIGINS", "SHAPES", "Input", "lognormal_u"]

SHAPES: Final = ("normal", "uniform", "triangular", "lognormal")
ORIGINS: Final = ("sheet", "builds_on", "metal_file", "library", "default", "calibration", "fitted")


@dataclass(frozen=True)
class Input:
    """One input of the method.

    Attributes
    ----------
    name : str
        Dotted path in the sheet, such as ``hardening.taylor_factor``; a
        tester's bias is ``tester:ID``, a component of a calibration ``calibration:ID:1``,
        a fitted size effect ``size_effect:CONDITION``.
    value : float
        The value. [SI]
    u : float
        Standard uncertainty, 0 for an exact input. [SI]
    unit : str
        UCUM code of the unit that the sheet's key carries.
    shape : str
        Distribution: ``normal``, ``uniform``, ``triangular`` or ``lognormal``.
    factor : float or None
        For a lognormal input, one standard deviation as a factor. [1]
    shared : bool
        Whether its error is the same for every coupon that it touches.
    degrees_of_freedom : float
        Behind `u`; infinite unless the sheet says otherwise. [1]
    source : str
        Where the value was found; empty if nobody said.
    origin : str
        Who gave it: ``sheet``, ``builds_on``, ``metal_file``, ``library``, ``default``,
        ``calibration`` or ``fitted`` to the batch itself.
    """

    name: str
    value: float
    u: float
    unit: str
    shape: str = "normal"
    factor: float | None = None
    shared: bool = True
    degrees_of_freedom: float = float("inf")
    source: str = ""
    origin: str = "sheet"

    @property
    def relative_u(self) -> float:
        """Standard uncertainty over the value's size, infinite at 0 unless exact [1]."""
        if self.u == 0.0:
            return 0.0
        return self.u / abs(self.value) if self.value else float("inf")


def lognormal_u(value: float, factor: float) -> float:
    """Give the standard uncertainty of a lognormal input to first order, value ln factor.

    Parameters
    ----------
    value : float
        Median of the input. [any unit]
    factor : float
        One standard deviation of ln value, as a factor above 1. [1]

    Returns
    -------
    float
        Standard uncertainty. [unit of `value`]
    """
    return value * log(factor)
