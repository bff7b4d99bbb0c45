"""Rules that look at single readings, and where they fire.

The predicates take SI arrays and give, for every reading, whether the rule fires
and the value to report in the rule's unit. A missing input never fires.
Those about test forces and distances are written in `rules.forces` and
`rules.spacing`, and are found here too.
"""

from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.rules.forces import FORCE_TOLERANCE, force_labels, force_not_nominal, nominal_force
from coldwork.rules.rule import Fired, Level, Rule
from coldwork.rules.spacing import (
    centres_too_near,
    edge_too_near,
    least_thickness_ratio,
    too_thin,
)

__all__ = [
    "CENTRE_DISTANCE",
    "DWELL_TIME",
    "EDGE_DISTANCE",
    "FORCE_NOT_NOMINAL",
    "HARDNESS_CONTRADICTS_DIAGONALS",
    "OUTLYING_READING",
    "READING_RULES",
    "SMALL_DIAGONAL",
    "TEST_TEMPERATURE",
    "UNEQUAL_DIAGONALS",
    "centres_too_near",
    "dwell_outside",
    "edge_too_near",
    "force_labels",
    "force_not_nominal",
    "hardness_contradicts",
    "least_thickness_ratio",
    "nominal_force",
    "temperature_outside",
    "too_small",
    "too_thin",
    "unequal_diagonals",
]

FloatArray = NDArray[np.float64]

UNEQUAL_DIAGONALS: Final = Rule(
    "unequal-diagonals",
    Level.WARNING,
    "the two diagonals differ by more than 5 % of their mean",
    0.05,
    "1",
    "ISO 6507-1, from memory",
    "The surface is not square to the force, or the metal is uneven below the indent.",
)
EDGE_DISTANCE: Final = Rule(
    "edge-distance",
    Level.WARNING,
    "the indent is too close to an edge; value and limit in diagonals",
    2.5,
    "1",
    "ISO 6507-1:2018: 2.5 d for steel, nickel and copper, 3 d for light metals",
    "The metal bulges towards the edge, and the hardness reads low.",
)
CENTRE_DISTANCE: Final = Rule(
    "centre-distance",
    Level.WARNING,
    "the indent is too close to another one; value and limit in the larger of their diagonals",
    3.0,
    "1",
    "ISO 6507-1:2018: 3 d for steel, nickel and copper, 6 d for light metals",
    "The metal around an indent is work-hardened, and the hardness reads high.",
)
SMALL_DIAGONAL: Final = Rule(
    "small-diagonal",
    Level.WARNING,
    "the mean diagonal is under 20 um",
    20.0,
    "um",
    "ISO 6507-1:2018, scope (from memory)",
    "An optical reading is not better than 1 um, ten per cent in the hardness of such an indent.",
)
FORCE_NOT_NOMINAL: Final = Rule(
    "force-not-nominal",
    Level.WARNING,
    "the test force differs by more than 1 % from the nearest nominal one of its scale;"
    " value as relative difference",
    FORCE_TOLERANCE,
    "1",
    "ISO 6507-1, ISO 6506-1 and ISO 4545-1, tables of test forces (from memory); 1 % is the"
    " tolerance of ISO 6507-2 (from memory)",
    "The force cell may be in another unit or belong to another test.",
)
TEST_TEMPERATURE: Final = Rule(
    "test-temperature",
    Level.WARNING,
    "the test was not made between 10 and 35 degrees Celsius",
    10.0,
    "Cel",
    "ISO 6507-1 and ISO 6892-1, from memory",
    "Strength, baseline and modulus of the sheet hold for room temperature.",
    upper=35.0,
)
OUTLYING_READING: Final = Rule(
    "outlying-reading",
    Level.WARNING,
    "the reading lies outside the others of its coupon, and is kept;"
    " value and limit in standard deviations",
    None,
    "1",
    "F. E. Grubbs, Technometrics 11 (1969) 1: two-sided test at 1 %",
    "One honest coupon in a hundred shows one: only a named person takes a reading out.",
)
HARDNESS_CONTRADICTS_DIAGONALS: Final = Rule(
    "hardness-contradicts-diagonals",
    Level.WARNING,
    "the hardness that was written down is not that of the diagonals, beyond rounding;"
    " value as relative difference",
    0.005,
    "1",
    "ISO 6507-1: hardness is reported to three figures, so rounding moves it by up to 0.5 %",
    "The diagonals count; force, scale or one of the cells may be wrong.",
)
DWELL_TIME: Final = Rule(
    "dwell-time",
    Level.INFORMATION,
    "the force was not held for 10 to 15 s",
    10.0,
    "s",
    "ISO 6507-1: 10 to 15 s, in 2018 14 s (+1 s, -4 s) (from memory)",
    "Another time belongs into the designation of the hardness, since the indent creeps.",
    upper=15.0,
)

READING_RULES: Final = (
    UNEQUAL_DIAGONALS,
    EDGE_DISTANCE,
    CENTRE_DISTANCE,
    SMALL_DIAGONAL,
    FORCE_NOT_NOMINAL,
    TEST_TEMPERATURE,
    OUTLYING_READING,
    HARDNESS_CONTRADICTS_DIAGONALS,
    DWELL_TIME,
)


def unequal_diagonals(diagonal_1: FloatArray, diagonal_2: FloatArray) -> Fired:
    """Find readings whose diagonals differ by more than 5 % of their mean.

    Parameters
    ----------
    diagonal_1, diagonal_2 : ndarray of float64, shape (n,)
        The two diagonals, NaN where there is none. [m]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        Difference over mean, not signed. [1]
    """
    value = np.abs(diagonal_1 - diagonal_2) / (0.5 * (diagonal_1 + diagonal_2))
    return UNEQUAL_DIAGONALS.above(value), value


def too_small(mean_diagonal: FloatArray) -> Fired:
    """Find indents whose mean diagonal is under 20 um.

    Parameters
    ----------
    mean_diagonal : ndarray of float64, shape (n,)
        Mean diagonal; for Knoop the long one. [m]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        The mean diagonal. [um]
    """
    value = units.from_si(mean_diagonal, "um")
    return SMALL_DIAGONAL.below(value), value


def dwell_outside(dwell: FloatArray) -> Fired:
    """Find readings whose force was not held for 10 to 15 s.

    Parameters
    ----------
    dwell : ndarray of float64, shape (n,)
        Time at full force. [s]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        The time. [s]
    """
    return DWELL_TIME.outside(dwell), dwell


def temperature_outside(temperature: FloatArray) -> Fired:
    """Find readings that were not taken between 10 and 35 degrees Celsius.

    Parameters
    ----------
    temperature : ndarray of float64, shape (n,)
        Temperature of the test. [K]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        The temperature. [Cel]
    """
    value = np.round(units.from_si(temperature, "Cel"), 9)  # 273.15 is no binary number
    return TEST_TEMPERATURE.outside(value), value


def hardness_contradicts(given: FloatArray, from_diagonals: FloatArray) -> Fired:
    """Find readings whose written hardness is not that of their diagonals.

    What rounding explains does not count: half a unit of the last digit that was
    written, or 0.5 %, whichever is more. The first alone would be too strict, since
    standards print three figures and the diagonals themselves were rounded (0.1 um of
    a 40 um diagonal are 0.25 % in the mean of two); the second alone would blame a soft
    metal's ``51`` for what whole numbers cannot say. The number of decimals is read off
    the value itself, so ``51.0`` counts as a whole number: that errs towards silence.

    Parameters
    ----------
    given : ndarray of float64, shape (n,)
        Hardness as it was written down, NaN where it was not. [Pa]
    from_diagonals : ndarray of float64, shape (n,)
        Hardness of the force and the diagonals, NaN where there are none. [Pa]

    Returns
    -------
    fired : ndarray of bool, shape (n,)
    value : ndarray of float64, shape (n,)
        Given over computed less 1. [1]
    """
    number = units.from_si(given, "kgf/mm2")
    computed = units.from_si(from_diagonals, "kgf/mm2")
    unit = np.full(number.shape, 1e-3)
    for step in (1e-2, 1e-1, 1.0):
        scaled = number / step
        unit = np.where(np.abs(scaled - np.rint(scaled)) < 1e-6, step, unit)
    relative = HARDNESS_CONTRADICTS_DIAGONALS.limit or 0.0
    allowed = np.maximum(0.5 * unit, relative * computed)
    return np.abs(number - computed) > allowed * (1.0 + 1e-9), number / computed - 1.0
