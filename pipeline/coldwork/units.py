"""Column unit to SI and back: the one place where a unit changes.

A unit is named by its UCUM code, as the contracts name it; stress intensity has
none (a half power) and is written ``MPa.m^0.5``. Hardness numbers are
kilogram-force per square millimetre.

References
----------
.. [1] BIPM, The International System of Units, 9th edition (2019), table 7 (prefixes).
.. [2] 3rd General Conference on Weights and Measures (1901): standard acceleration
   of free fall 9.80665 m/s², exact.
.. [3] The Unified Code for Units of Measure, https://ucum.org/ucum.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from math import pi
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument

__all__ = ["STANDARD_GRAVITY", "UNITS", "Scale", "from_si", "to_si"]

STANDARD_GRAVITY: Final = 9.80665  # [m/s2]


@dataclass(frozen=True)
class Scale:
    """How a unit lies to SI: SI value = value * `times` / `over` + `offset`.

    One of `times` and `over` is 1, or both are needed to be exact: a value in
    micrometre is divided by a million, since a millionth is no binary number.
    """

    times: float = 1.0
    over: float = 1.0
    offset: float = 0.0


_SAME: Final = Scale()

UNITS: Final[Mapping[str, Scale]] = {
    "1": _SAME,
    "N": _SAME,
    "m": _SAME,
    "mm": Scale(over=1e3),
    "um": Scale(over=1e6),
    "nm": Scale(over=1e9),
    "nm3": Scale(over=1e27),
    "s": _SAME,
    "/s": _SAME,
    "K": _SAME,
    "Cel": Scale(offset=273.15),
    "deg": Scale(times=pi, over=180.0),
    "Pa": _SAME,
    "MPa": Scale(times=1e6),
    "GPa": Scale(times=1e9),
    "kgf/mm2": Scale(times=STANDARD_GRAVITY * 1e6),
    "MPa.m^0.5": Scale(times=1e6),
    "GPa2.um": Scale(times=1e12),
    "m-2": _SAME,
    "N/m": _SAME,
    "J/m": _SAME,
    "J/m2": _SAME,
    "J/m3": _SAME,
    "J/mol": _SAME,
    "kJ/mol": Scale(times=1e3),
    "J/g": Scale(times=1e3),
    "kg/m3": _SAME,
    "g/mol": Scale(over=1e3),
    "J/(kg.K)": _SAME,
}


def to_si(values: ArrayLike, unit: str) -> NDArray[np.float64]:
    """Convert values of a column or key to SI.

    Parameters
    ----------
    values : array_like, shape (...)
        The values; NaN stays NaN. [`unit`]
    unit : str
        UCUM code, a key of `UNITS`.

    Returns
    -------
    ndarray of float64, shape of `values`
        The same values. [SI]

    Raises
    ------
    InvalidArgument
        If the unit is not in the table.

    Examples
    --------
    >>> float(to_si(44.0, "GPa"))
    44000000000.0
    """
    scale = _scale(unit)
    return np.asarray(
        np.asarray(values, dtype=np.float64) * scale.times / scale.over + scale.offset
    )


def from_si(values: ArrayLike, unit: str) -> NDArray[np.float64]:
    """Convert SI values to the unit of a column or key; undoes `to_si`.

    Parameters
    ----------
    values : array_like, shape (...)
        The values; NaN stays NaN. [SI]
    unit : str
        UCUM code, a key of `UNITS`.

    Returns
    -------
    ndarray of float64, shape of `values`
        The same values. [`unit`]

    Raises
    ------
    InvalidArgument
        If the unit is not in the table.

    Notes
    -----
    Units of stress come back to the last bit from `to_si`, lengths to the last
    place of a double.
    """
    scale = _scale(unit)
    return np.asarray(
        (np.asarray(values, dtype=np.float64) - scale.offset) * scale.over / scale.times
    )


def _scale(unit: str) -> Scale:
    try:
        return UNITS[unit]
    except KeyError:
        message = f"unit {unit!r} is not known; known are {', '.join(UNITS)}"
        raise InvalidArgument(message) from None
