"""Rules on single readings: where each begins to fire, and the value that it reports."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.rules import reading as rules
from coldwork.rules.rule import Fired

NAN = np.nan
KGF_PER_MM2 = 9.80665e6  # Pa


def floats(*x: float) -> NDArray[np.float64]:
    return np.array(x)


def check(found: Fired, fired: list[bool], value: list[float] | None = None) -> None:
    assert found[0].dtype == np.bool_
    assert found[0].tolist() == fired
    if value is not None:
        assert_allclose(found[1], value, rtol=1e-12)


def test_diagonals_that_differ_by_more_than_five_per_cent() -> None:
    # ISO 6507-1 (from memory): more than 5 %. 100 and 106 um differ by 6 um in 103.
    found = rules.unequal_diagonals(
        floats(100e-6, 106e-6, 100e-6, 100e-6, NAN), floats(106e-6, 100e-6, 105e-6, 100e-6, 1e-4)
    )
    check(found, [True, True, False, False, False], [6 / 103, 6 / 103, 5 / 102.5, 0.0, NAN])


def test_diagonals_under_20_um() -> None:
    # ISO 6507-1:2018, scope (from memory): diagonals from 0.020 mm.
    found = rules.too_small(floats(19.9e-6, 20.0e-6, 20.1e-6, NAN))
    check(found, [True, False, False, False], [19.9, 20.0, 20.1, NAN])


def test_a_diagonal_of_20_um_read_from_a_cell_is_not_small() -> None:
    check(rules.too_small(floats(*(np.array([20.0]) / 1e6))), [False])


def test_a_force_held_from_10_to_15_s() -> None:
    # ISO 6507-1, older editions: 10 to 15 s; 2018: 14 s + 1 s - 4 s, the same ends.
    found = rules.dwell_outside(floats(9.9, 10.0, 14.0, 15.0, 15.1, NAN))
    check(found, [True, False, False, False, True, False])


def test_a_temperature_from_10_to_35_degrees() -> None:
    # ISO 6507-1: 10 to 35 degrees Celsius.
    kelvin = floats(9.9, 10.0, 23.0, 35.0, 35.1, NAN) + 273.15
    found = rules.temperature_outside(kelvin)
    check(found, [True, False, False, False, True, False], [9.9, 10.0, 23.0, 35.0, 35.1, NAN])


@pytest.mark.parametrize(
    ("given", "diagonals", "fired"),
    [
        (185.0, 185.45, False),  # three figures
        (185.4, 185.45, False),
        (184.0, 185.45, True),  # 0.8 % off
        (51.0, 51.49, False),  # a whole number: half a unit is 1 %
        (51.0, 51.51, True),
        (51.2, 51.49, True),  # one decimal: 0.5 % of 51.49 is 0.257
        (51.3, 51.49, False),
        (653.0, 653.6, False),  # as tables cut it off (ISO 6506-1, HBW of 2.40 mm)
        (NAN, 100.0, False),
        (100.0, NAN, False),
        (1.0, 1.4, False),
    ],
)
def test_a_written_hardness_may_differ_by_its_rounding(
    given: float, diagonals: float, fired: bool
) -> None:
    found = rules.hardness_contradicts(floats(given * KGF_PER_MM2), floats(diagonals * KGF_PER_MM2))
    check(found, [fired], [given / diagonals - 1.0])
