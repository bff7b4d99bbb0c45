"""What relation 10 needs of a sheet, and which temperatures it cannot be asked for."""

from collections.abc import Mapping
from typing import Any, Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.collect import constant
from coldwork.inputs.keys import KeyName, default_of
from coldwork.inputs.numbers import Given, as_number
from coldwork.inputs.words import listed
from coldwork.materials import Material
from coldwork.units import to_si

__all__ = ["refuse_bad_temperature"]

_CONSTANTS: Final = ("melting_point_k", "shear_modulus_slope")


def refuse_bad_temperature(
    causes: Causes, given: Mapping[KeyName, Given], material: Material | None
) -> None:
    """Refuse two temperatures without a correction, and a correction that cannot be made.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong.
    given : mapping of tuple to Given
        What the sheet gives.
    material : Material or None
        What the library gives.
    """
    section = causes.sheet.tables.get("temperature", {})
    if not isinstance(section, dict):
        return
    test, reference = (_celsius(section, key) for key in ("test_c", "reference_c"))
    if test is None or reference is None:
        return
    if section.get("correction", "none") == "none":
        _refuse_two(causes, section, test, reference)
        return
    found = {name: constant(name, given, material) for name in _CONSTANTS}
    missing = [name for name, value in found.items() if value is None]
    if missing:
        causes.add(
            ("temperature", "correction"),
            f"{listed(missing)} of the metal cannot be found",
            "By these the shear modulus falls with temperature (Frost and Ashby 1982).",
            "Give them in [material].",
        )
    melting = found["melting_point_k"]
    for key, celsius in (("test_c", test), ("reference_c", reference)):
        if melting is not None and float(to_si(celsius, "Cel")) > melting:
            causes.add(
                ("temperature", key),
                f"{celsius:g} C is above the melting point of {melting:g} K",
                "A melt has no shear modulus.",
                "Check the temperature, and melting_point_k.",
            )


def _celsius(section: Mapping[str, Any], key: str) -> float | None:
    return as_number(section.get(key, default_of(("temperature", key))))


def _refuse_two(causes: Causes, section: Mapping[str, Any], test: float, reference: float) -> None:
    if "thermal_mpa" in section:
        causes.add(
            ("temperature", "thermal_mpa"),
            "nothing is brought from one temperature to another",
            "A thermal part is taken off where correction is modulus.",
            'Say correction = "modulus", or take thermal_mpa and athermal_k out.',
        )
    if test != reference:
        causes.add(
            ("temperature", "test_c" if "test_c" in section else "reference_c"),
            f"the tests ran at {test:g} C and the shear modulus holds at {reference:g} C",
            "Two temperatures need relation 10, and the sheet does not ask for it.",
            'Say correction = "modulus", or give both keys the same number.',
        )
