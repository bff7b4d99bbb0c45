"""Choices that a sheet may come to offer and that do not work yet, refused by name.

Each has a sentence of its own, so that nobody looks for a spelling mistake
where there is none. What is refused is cut out, and the checks that follow see
the sheet without it.
"""

from collections.abc import Mapping
from typing import Any, Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.positions import KeyPath

__all__ = ["refuse_unbuilt"]

_KEYS: Final[Mapping[KeyPath, str]] = {
    ("strength", "baseline_from_coupon"): "A baseline from a coupon is not built yet.",
}
_CONSTANTS: Final[Mapping[str, str]] = {
    "boundary_energy_j_per_m2": "recrystallisation",
    "stacking_fault_energy_j_per_m2": "recovery and recrystallisation",
}
_ORIGINS: Final[Mapping[str, str]] = {
    "from_coupon": "A value that is taken from a coupon is not built yet.",
}


def refuse_unbuilt(causes: Causes) -> None:
    """Refuse, each by its own name, the choices that do not work yet; cut them out."""
    for path, why in _KEYS.items():
        _refuse_key(causes, path, why)
    for key, job in _CONSTANTS.items():
        why = f"It belongs to {job}, which is not built yet."
        _refuse_key(causes, ("material", key), why)
    _refuse_values_from_elsewhere(causes)


def _table(causes: Causes, path: KeyPath) -> dict[Any, Any]:
    at: object = causes.sheet.tables
    for part in path:
        at = at.get(part) if isinstance(at, dict) else None
    return at if isinstance(at, dict) else {}


def _refuse_key(causes: Causes, path: KeyPath, why: str) -> None:
    table = _table(causes, path[:-1])
    if path[-1] in table:
        causes.add(path, f"{path[-1]} cannot be used", why, "Take it out.")
        del table[path[-1]]


def _refuse_values_from_elsewhere(causes: Causes) -> None:
    for section, keys in causes.sheet.tables.items():
        for key, value in list(keys.items()) if isinstance(keys, dict) else ():
            for part in (part for part in _ORIGINS if isinstance(value, dict) and part in value):
                causes.add(
                    (section, key), f"{part} cannot be used", _ORIGINS[part], "Give the number."
                )
