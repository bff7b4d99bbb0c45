"""The choices of a sheet by name, and what a schema cannot say about them."""

from collections.abc import Mapping
from math import fsum
from typing import Any, Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.crystal import Crystal
from coldwork.inputs.keys import default_of
from coldwork.inputs.method import Laws
from coldwork.inputs.numbers import as_number

__all__ = ["choice", "laws_of", "refuse_bad_mix"]

_SUM_TOLERANCE: Final = 1e-9


def choice(tables: Mapping[str, Any], *key: str) -> Any:  # noqa: ANN401  # whatever TOML can hold
    """Give a key's value, its default if nobody said it, None if it has none either."""
    at: Any = tables
    for name in key:
        at = at.get(name) if isinstance(at, Mapping) else None
    return default_of(key) if at is None else at


def refuse_bad_mix(causes: Causes) -> None:
    """Refuse fractions of line length that do not sum to 1."""
    section = causes.sheet.tables.get("character")
    if causes.within(("character",)) or not isinstance(section, dict):
        return
    mix = section.get("mix")
    if mix == "uniform":
        return
    parts = [entry["fraction"] for entry in mix] if mix else list(section.values())
    total = fsum(number for number in map(as_number, parts) if number is not None)
    if abs(total - 1.0) > _SUM_TOLERANCE:
        causes.add(
            ("character", "mix") if mix else ("character",),
            f"the fractions sum to {total:.12g}",
            "They are shares of the whole line length and sum to 1.",
            "Mend them; write as many digits as it takes, such as 0.3333333333.",
        )


def laws_of(tables: Mapping[str, Any], crystal: Crystal | None = None) -> Laws:
    """Read the choices of a sheet that fits its schema; of its crystal where that matters."""
    strength, character = tables["strength"], tables["character"]
    indentation, hardening = tables.get("indentation", {}), tables.get("hardening", {})
    route = "flow" if strength["route"] == "flow" else "indent"  # both begin with the indents
    angles, fractions = _mix(character)
    return Laws(
        route=route,
        area={
            "HV": choice(tables, "indentation", "area"),
            "HBW": choice(tables, "indentation", "HBW", "area"),
            "HK": choice(tables, "indentation", "HK", "area"),
        },
        unwinding=route == "indent" and "initial_hardening_mpa" in indentation,
        baseline="given" if "baseline_mpa" in strength else "parts",
        taylor="slope" if "slope_n_per_m" in hardening else choice(tables, "hardening", "law"),
        elasticity=choice(tables, "line_energy", "elasticity"),
        slip=None if crystal is None else crystal.slip,
        hexagonal=crystal is not None and crystal.hexagonal,
        outer_radius=choice(tables, "line_energy", "outer_radius"),
        angles_deg=angles,
        fractions=fractions,
        uniform_mix=character.get("mix") == "uniform",
        flow_from=_flow_from(route, tables["files"]),
        superposed="obstacle_mpa" in strength,
        structure=choice(tables, "structure", "kind"),
        core=choice(tables, "line_energy", "core_energy_from"),
        temperature=_temperature(tables),
        prior_work=choice(tables, "prior_work", "from"),
        size_effect=choice(tables, "indentation", "size_effect") if route == "indent" else "none",
    )


def _temperature(tables: Mapping[str, Any]) -> str:
    correction = str(choice(tables, "temperature", "correction"))
    thermal = "thermal_mpa" in tables.get("temperature", {})
    return f"{correction}-and-thermal" if thermal else correction


def _flow_from(route: str, files: Mapping[str, Any]) -> str:
    if route != "flow":
        return ""
    return "points" if "flow_stress" in files else "curves"


def _mix(character: Mapping[str, Any]) -> tuple[tuple[float, ...], tuple[float, ...]]:
    mix = character.get("mix")
    if mix == "uniform":
        return (), ()
    if mix is None:
        return (0.0, 90.0), (float(character.get("screw", 0)), float(character.get("edge", 0)))
    angles = tuple(float(entry["angle_deg"]) for entry in mix)
    return angles, tuple(float(entry["fraction"]) for entry in mix)
