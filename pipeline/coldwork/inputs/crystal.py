"""The crystal behind anisotropic elasticity: its slip system and elastic constants."""

from collections.abc import Mapping
from dataclasses import dataclass

from coldwork.errors import InvalidArgument
from coldwork.formulas.crystal_factor import CUBIC_CONSTANTS, HEXAGONAL_CONSTANTS
from coldwork.formulas.crystals import cubic_stiffness, hexagonal_stiffness
from coldwork.formulas.slip_systems import SlipSystem, slip_system
from coldwork.inputs.causes import Causes
from coldwork.inputs.collect import constant
from coldwork.inputs.keys import KeyName
from coldwork.inputs.numbers import Given
from coldwork.inputs.words import listed
from coldwork.materials import Material

__all__ = ["Crystal", "crystal_of"]

_CUBIC = ("fcc", "bcc")


@dataclass(frozen=True)
class Crystal:
    """What anisotropic elasticity needs to know beside numbers.

    Attributes
    ----------
    slip : SlipSystem
        Whose lines are meant.
    hexagonal : bool
        Whether the crystal is hexagonal and not cubic.
    """

    slip: SlipSystem
    hexagonal: bool


def crystal_of(
    causes: Causes, given: Mapping[KeyName, Given], material: Material | None
) -> Crystal | None:
    """Read the crystal of a sheet; None where elasticity is isotropic, or with a cause.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong: no lattice, constants that are missing or belong to
        the other lattice, an unstable crystal, a plane without its Burgers vector.
    given : mapping of tuple to Given
        What the sheet gives.
    material : Material or None
        What the library gives.

    Returns
    -------
    Crystal or None
        It.
    """
    section, metal = (causes.sheet.tables.get(name) for name in ("line_energy", "material"))
    if not isinstance(section, dict) or section.get("elasticity") != "anisotropic":
        return None
    if not isinstance(metal, dict) or causes.within(("material", "lattice")):
        return None
    lattice = metal.get("lattice", material.lattice if material else None)
    if lattice is None:
        causes.add(
            ("line_energy", "elasticity"),
            "the lattice of the metal is not known",
            "Anisotropic elasticity needs a cubic or a hexagonal crystal.",
            "Say lattice in [material].",
        )
        return None
    hexagonal = lattice not in _CUBIC
    constants = _constants(causes, given, material, lattice, hexagonal=hexagonal)
    if constants is not None:
        _refuse_unstable(causes, constants, hexagonal=hexagonal)
    slip = _slip(causes, section.get("slip_system"), given, material, hexagonal=hexagonal)
    return None if slip is None else Crystal(slip, hexagonal)


def _constants(
    causes: Causes,
    given: Mapping[KeyName, Given],
    material: Material | None,
    lattice: str,
    *,
    hexagonal: bool,
) -> list[float] | None:
    names = HEXAGONAL_CONSTANTS if hexagonal else CUBIC_CONSTANTS
    found = {name: constant(f"{name}_gpa", given, material) for name in names}
    missing = [f"{name}_gpa" for name, value in found.items() if value is None]
    if missing:
        kind = "hexagonal" if hexagonal else "cubic"
        causes.add(
            ("line_energy", "elasticity"),
            f"{listed(missing)} of the metal, which is {lattice}, cannot be found",
            f"A {kind} crystal has {listed([f'{name}_gpa' for name in names])}.",
            "Give them in [material], or choose isotropic.",
        )
        return None
    for name in set(HEXAGONAL_CONSTANTS) - set(names):
        if ("material", f"{name}_gpa") in given:
            causes.add(
                ("material", f"{name}_gpa"),
                f"{name}_gpa is given for a metal that is {lattice}",
                "A cubic crystal has no such constant.",
                "Take it out, or mend lattice.",
            )
    return [value for value in found.values() if value is not None]


def _refuse_unstable(causes: Causes, constants: list[float], *, hexagonal: bool) -> None:
    try:
        (hexagonal_stiffness if hexagonal else cubic_stiffness)(*constants)
    except InvalidArgument as problem:
        causes.add(
            ("line_energy", "elasticity"),
            str(problem),
            "No such crystal would hold together (Born).",
            "Check the elastic constants in [material].",
        )


def _slip(
    causes: Causes,
    written: object,
    given: Mapping[KeyName, Given],
    material: Material | None,
    *,
    hexagonal: bool,
) -> SlipSystem | None:
    if not isinstance(written, str) or causes.within(("line_energy", "slip_system")):
        return None
    try:
        ratio = constant("c_over_a", given, material)
        return slip_system(written, hexagonal=hexagonal, c_over_a=ratio)
    except InvalidArgument as problem:
        why = "Lines lie in a slip plane with their Burgers vector."
        mend = "Write {0001}<11-20> or another." if hexagonal else "Write {111}<110> or another."
        causes.add(("line_energy", "slip_system"), str(problem), why, mend)
        return None
