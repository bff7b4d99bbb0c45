"""Units that files are written in, against an independent units library (pint)."""

from fractions import Fraction
from typing import Any

import pint
import pytest

from coldwork import contracts
from coldwork.inputs.layout_units import UNITS, Step, spelled, step_between

PINT = {  # what pint calls them; its definitions come from NIST SP 811 and CODATA
    "N": "newton",
    "kN": "kilonewton",
    "kgf": "kilogram_force",
    "gf": "gram_force",
    "lbf": "pound_force",
    "mm": "millimeter",
    "um": "micrometer",
    "in": "inch",
    "MPa": "megapascal",
    "GPa": "gigapascal",
    "N/mm2": "newton / millimeter ** 2",
    "ksi": "kip / inch ** 2",
    "psi": "pound_force / inch ** 2",
    "kgf/mm2": "kilogram_force / millimeter ** 2",
    "s": "second",
    "min": "minute",
    "1": "dimensionless",
    "%": "percent",
    "/s": "1 / second",
    "J/m3": "joule / meter ** 3",
    "K": "kelvin",
    "C": "degC",
    "F": "degF",
}
REGISTRY: Any = pint.UnitRegistry(non_int_type=Fraction)  # its types differ from release to release
PAIRS = [
    (one.name, other.name)
    for one in UNITS.values()
    for other in UNITS.values()
    if one.kind == other.kind
]


def test_every_unit_has_a_twin() -> None:
    assert set(PINT) == set(UNITS)


@pytest.mark.parametrize(("written", "wanted"), PAIRS)
def test_a_step_is_that_of_the_library_exactly(written: str, wanted: str) -> None:
    step = step_between(written, wanted)
    assert step is not None
    for value in (Fraction(0), Fraction(1), Fraction("451.2")):
        theirs = REGISTRY.Quantity(value, PINT[written]).to(PINT[wanted]).magnitude
        assert Fraction(theirs) == value * step.times + step.plus


def test_units_of_different_kinds_have_no_step() -> None:
    for one in UNITS.values():
        for other in UNITS.values():
            if one.kind != other.kind:
                assert step_between(one.name, other.name) is None


@pytest.mark.parametrize("table", ["coupons", "indents", "flow_stress"])
def test_every_unit_of_a_table_that_comes_in_can_be_written(table: str) -> None:
    for field in contracts.load(f"in/{table}").fields:
        if field.numeric:
            assert field.unit is not None
            named = spelled(field.unit)
            assert named is not None, field.unit
            assert step_between(named.name, field.unit) == Step()


@pytest.mark.parametrize(
    ("written", "wanted", "places"),
    [("mm", "um", 3), ("kN", "N", 3), ("um", "mm", -3), ("%", "1", -2), ("N/mm2", "MPa", 0)],
)
def test_a_power_of_ten_moves_the_decimal_point(written: str, wanted: str, places: int) -> None:
    step = step_between(written, wanted)
    assert step is not None
    assert step.shift == places


@pytest.mark.parametrize(
    ("written", "wanted"), [("kgf", "N"), ("in", "mm"), ("F", "Cel"), ("K", "Cel"), ("min", "s")]
)
def test_any_other_factor_does_not(written: str, wanted: str) -> None:
    step = step_between(written, wanted)
    assert step is not None
    assert step.shift is None


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("mm", "mm"),
        (" [µm] ", "um"),
        ("(μm)", "um"),
        ("N/mm²", "N/mm2"),
        ("N/mm^2", "N/mm2"),
        ("°C", "C"),
        ("HV", "kgf/mm2"),
        ("kp", "kgf"),
        ('"', "in"),
        ("-", "1"),
        ("", "1"),
        ("%", "%"),
    ],
)
def test_usual_spellings_are_understood(text: str, name: str) -> None:
    found = spelled(text)
    assert found is not None
    assert found.name == name


@pytest.mark.parametrize("text", ["MM", "furlong", "mm mm", "[mm", "m", "kpsi", "C F"])
def test_anything_else_is_no_unit(text: str) -> None:
    assert spelled(text) is None
