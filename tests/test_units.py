"""Units: published definitions, round trips, refusals."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import constants

from coldwork.errors import InvalidArgument
from coldwork.units import UNITS, from_si, to_si

# scipy.constants carries the definitions of SI prefixes, of the kilogram-force, of the
# degree and of the Celsius scale independently of this package.
FACTORS = {
    "1": 1.0,
    "N": 1.0,
    "m": 1.0,
    "mm": constants.milli,
    "um": constants.micro,
    "nm": constants.nano,
    "nm3": 1e-27,  # a cube of `nano` is rounded three times
    "s": 1.0,
    "/s": 1.0,
    "K": 1.0,
    "Cel": 1.0,
    "deg": constants.degree,
    "Pa": 1.0,
    "MPa": constants.mega,
    "GPa": constants.giga,
    "kgf/mm2": constants.kilogram_force / constants.milli**2,
    "MPa.m^0.5": constants.mega,
    "GPa2.um": constants.giga**2 * constants.micro,
    "m-2": 1.0,
    "N/m": 1.0,
    "J/m": 1.0,
    "J/m2": 1.0,
    "J/m3": 1.0,
    "J/mol": 1.0,
    "kJ/mol": constants.kilo,
    "J/g": 1.0 / constants.gram,
    "kg/m3": 1.0,
    "g/mol": constants.gram,
    "J/(kg.K)": 1.0,
}
DECIMALS = np.arange(-2000, 200_000) / 1000.0  # 0.001 steps, as people write them


def test_every_unit_is_checked_here() -> None:
    assert set(FACTORS) == set(UNITS)


@pytest.mark.parametrize("unit", FACTORS)
def test_agrees_with_the_definitions(unit: str) -> None:
    zero = constants.zero_Celsius if unit == "Cel" else 0.0
    assert_allclose(to_si(DECIMALS, unit), DECIMALS * FACTORS[unit] + zero, rtol=4e-16, atol=1e-300)


def test_a_hardness_number_is_kilogram_force_per_square_millimetre() -> None:
    # ISO 6507-1:2018: 0.102 = 1/9.80665, so one unit of HV is 9.80665 MPa.
    assert to_si(1.0, "kgf/mm2") == 9.80665e6


@pytest.mark.parametrize("unit", UNITS)
def test_there_and_back(unit: str) -> None:
    back = from_si(to_si(DECIMALS, unit), unit)
    assert_allclose(back, DECIMALS, rtol=5e-16, atol=1e-13 if unit == "Cel" else 0.0)


@pytest.mark.parametrize("unit", ["MPa", "GPa", "J/g", "MPa.m^0.5", "GPa2.um", "1", "m-2"])
def test_a_written_stress_comes_back_to_the_last_bit(unit: str) -> None:
    assert np.array_equal(from_si(to_si(DECIMALS, unit), unit), DECIMALS)


@pytest.mark.parametrize("unit", ["um", "Cel", "MPa"])
@pytest.mark.parametrize("shape", [(), (3,), (2, 2), (0,)])
def test_keeps_shape_and_missing_values(unit: str, shape: tuple[int, ...]) -> None:
    missing = np.full(shape, np.nan)
    for convert in (to_si, from_si):
        assert convert(missing, unit).shape == shape
        assert convert(missing, unit).dtype == np.float64
        assert np.isnan(convert(missing, unit)).all()


@pytest.mark.parametrize("unit", ["psi", "", "mpa", "Um"])
def test_refuses_an_unknown_unit_by_name(unit: str) -> None:
    for convert in (to_si, from_si):
        with pytest.raises(InvalidArgument, match=f"unit {unit!r} is not known"):
            convert(1.0, unit)
