"""Gather the numbers that a method uses: from the sheet, the library or the defaults."""

from collections.abc import Iterator, Mapping
from typing import Final

from coldwork.formulas.crystal_factor import HEXAGONAL_CONSTANTS
from coldwork.inputs.calibrated import Calibrations, is_taken
from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import TERMS, KeyName, default_of, number_specs, schema_of, spec_of
from coldwork.inputs.method import Laws
from coldwork.inputs.numbers import Given, to_given
from coldwork.inputs.words import listed, nearest
from coldwork.materials import Material
from coldwork.materials import names as material_names

__all__ = [
    "CORE_ENERGY",
    "constant",
    "given_numbers",
    "refuse_missing_constants",
    "used_numbers",
]

CORE_ENERGY: Final = "core_energy"  # its key in the library
_OPTIONAL_CONSTANTS: Final = ("molar_mass_g_per_mol", "heat_capacity_j_per_kg_k")
_NEEDED_CONSTANTS: Final = (
    "shear_modulus_gpa",
    "poisson_ratio",
    "burgers_vector_nm",
    "mass_density_kg_per_m3",
)


def given_numbers(causes: Causes, calibrations: Calibrations) -> dict[KeyName, Given]:
    """Read every number with uncertainty that the sheet, or what it builds on, gives or takes."""
    found = {}
    for key, raw in _written(causes):
        spec = spec_of(key)
        if spec is None:
            continue
        if is_taken(raw):
            given = calibrations.give(causes, key, raw, spec)
        else:
            given = to_given(causes, key, raw, spec, causes.sheet.origin(key))
        if given is not None:
            found[key] = given
    return found


def _written(causes: Causes) -> Iterator[tuple[KeyName, object]]:
    keys = list(number_specs())
    terms = _at(causes.sheet.tables, TERMS)
    if isinstance(terms, dict):
        named = [name for name in terms if _is_a_name(name)]
        keys += [(*TERMS, name) for name in named]
        for name in set(terms) - set(named):
            causes.add(
                (*TERMS, name),
                "this name cannot be",
                "A term's name has letters, digits, _ and -, at most 60 of them.",
                "Write another.",
            )
    for key in keys:
        raw = _at(causes.sheet.tables, key)
        if raw is not None:
            yield key, raw


def _is_a_name(text: str) -> bool:
    bare = text.replace("_", "").replace("-", "")
    return 0 < len(text) <= 60 and text.isascii() and (bare.isalnum() or not bare)


def _at(tables: Mapping[str, object], key: KeyName) -> object:
    at: object = tables
    for name in key:
        at = at.get(name) if isinstance(at, Mapping) else None
    return at


def constant(key: str, given: Mapping[KeyName, Given], material: Material | None) -> float | None:
    """Give a constant of the metal as the sheet or the library has it, None if neither does.

    Parameters
    ----------
    key : str
        Its key in ``[material]``.
    given : mapping of tuple to Given
        What the sheet gives.
    material : Material or None
        What the library gives.

    Returns
    -------
    float or None
        In the key's unit.
    """
    own = given.get(("material", key))
    if own is not None:
        return own.value
    entry = None if material is None else material.values.get(key)
    return None if entry is None else entry.value


def refuse_missing_constants(causes: Causes, material: Material | None) -> None:
    """Refuse a metal that neither the library, a file nor the sheet knows enough of."""
    section = causes.sheet.tables.get("material")
    name = section.get("name") if isinstance(section, dict) else None
    if material is not None or not isinstance(section, dict) or not isinstance(name, str):
        return
    missing = [key for key in _NEEDED_CONSTANTS if key not in section]
    if missing:
        causes.add(
            ("material", "name"),
            f"the library has no '{name}' and the sheet does not give {listed(missing)}",
            "A metal comes from the library, from a file of one's own, or with all constants.",
            nearest(name, material_names()),
        )


def used_numbers(
    causes: Causes, laws: Laws, given: Mapping[KeyName, Given], material: Material | None
) -> dict[str, Given]:
    """Give every number that the laws use, by its name and in the schema's order.

    Parameters
    ----------
    causes : Causes
        Without any: the sheet fits.
    laws : Laws
        What is used.
    given : mapping of tuple to Given
        What the sheet gives.
    material : Material or None
        What the library gives.

    Returns
    -------
    dict of str to Given
        A constant that nobody gives is left out.
    """
    used = {}
    curves = "curves" in causes.sheet.tables["files"]
    for key in _used_keys(laws, given, curves=curves):
        number = (
            given.get(key)
            or _of_core(causes, key, laws, material)
            or _from_library(causes, key, material)
            or _default(causes, key)
        )
        if number is not None:
            used[number.input.name] = number
    return used


def _used_keys(laws: Laws, given: Mapping[KeyName, Given], *, curves: bool) -> list[KeyName]:
    unused: set[KeyName] = set()
    if laws.taylor == "slope":
        unused |= {("hardening", "taylor_factor"), ("hardening", "coefficient")}
    if ("indentation", "HBW", "representative_strain") in given:
        unused.add(("indentation", "HBW", "strain_ratio"))
    if not laws.superposed:
        unused.add(("strength", "superposition_exponent"))
    if laws.outer_radius == "arrangement":  # which says how far the field reaches by itself
        unused.add(("line_energy", "outer_radius_factor"))
    if laws.temperature == "none":
        unused |= {("material", "melting_point_k"), ("material", "shear_modulus_slope")}
    unused |= _unused_of_crystal(laws)
    unread = set() if laws.route == "indent" else {"indentation"}
    if not curves:
        unread.add("tensile")
    if laws.prior_work == "stated":
        unread.add("prior_work")
    keys = [*number_specs(), *(key for key in given if key[:2] == TERMS)]
    return [key for key in keys if key not in unused and key[0] not in unread]


def _unused_of_crystal(laws: Laws) -> set[KeyName]:
    """Constants of the metal that the line's elasticity does not ask for."""
    unused = {"c_over_a"}  # it is in the slip system already
    if laws.elasticity == "isotropic":
        unused |= {f"{name}_gpa" for name in HEXAGONAL_CONSTANTS}
    else:
        unused.add("poisson_ratio")
        if not laws.hexagonal:
            unused |= {"c13_gpa", "c33_gpa"}
    return {("material", name) for name in unused}


def _of_core(causes: Causes, key: KeyName, laws: Laws, material: Material | None) -> Given | None:
    """Give the library's core energy, and the radius that it is the energy inside of."""
    spec = spec_of(key)
    if laws.core != "library" or material is None or spec is None:
        return None
    if key == ("line_energy", "core_radius_b"):
        raw = {"value": 1.0, "source": "where the library's core energy ends, by definition"}
        return to_given(causes, key, raw, spec, "library")
    if key == ("line_energy", CORE_ENERGY):
        entry = material.values[CORE_ENERGY]
        raw = {"value": entry.value, "u": entry.u, "source": entry.source}
        return to_given(causes, key, raw, spec, "library")
    return None


def _from_library(causes: Causes, key: KeyName, material: Material | None) -> Given | None:
    spec = spec_of(key)
    if material is None or spec is None or key[0] != "material" or key[1] not in material.values:
        return None
    entry = material.values[key[1]]
    raw = {"value": entry.value, "u": entry.u, "source": entry.source}
    own = "file" in causes.sheet.tables["material"]
    return to_given(causes, key, raw, spec, "metal_file" if own else "library")


def _default(causes: Causes, key: KeyName) -> Given | None:
    raw, spec = default_of(key), spec_of(key)
    if raw is None or spec is None:
        return None
    table = raw if isinstance(raw, dict) else {"value": raw}
    source = str(schema_of(key).get("source", "common practice"))
    return to_given(causes, key, table | {"source": source}, spec, "default")
