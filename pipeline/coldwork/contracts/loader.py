"""``schemas/`` -> contracts and documents.

The copy that travels in the wheel is taken first, the checkout's folder second.
A key that is not known here is refused: a misspelt ``maximun`` must not
switch a check off in silence.
"""

import json
from collections.abc import Mapping
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Any, Final, cast

from coldwork.contracts.contract import Contract, Direction, Field, FieldType
from coldwork.errors import ColdworkError, UsageError

__all__ = ["contract_of", "document", "documents", "load", "names"]

_ORDER: Final = {
    "in": (
        "coupons",
        "indents",
        "flow_stress",
        "curves",
        "exclusions",
        "verification",
        "pairs",
        "schedule",
    ),
    "out": (
        "coupons",
        "quantities",
        "budget",
        "lots",
        "readings",
        "set_aside",
        "flags",
        "decisions",
        "tensile",
        "evolution",
        "curve_points",
        "expected_heat",
        "routes",
        "anneal",
        "compare",
        "compare_choices",
        "plan",
    ),
    "documents": (
        "batch_sheet",
        "layout",
        "calibration",
        "furnace",
        "method",
        "manifest",
        "record",
        "account",
    ),
}
_TABLE_KEYS: Final = {
    "name",
    "direction",
    "title",
    "description",
    "version",
    "fields",
    "primaryKey",
    "missingValues",
    "checks",
}
_FIELD_KEYS: Final = {
    "name",
    "type",
    "title",
    "description",
    "unit",
    "source",
    "checks",
    "constraints",
}
_CONSTRAINT_KEYS: Final = {
    "required",
    "minimum",
    "exclusiveMinimum",
    "maximum",
    "exclusiveMaximum",
    "enum",
    "pattern",
    "unique",
    "maxLength",
}
_TYPES: Final = ("string", "number", "integer", "boolean", "datetime")


def names() -> tuple[str, ...]:
    """Give the names of all tables, ``in/coupons`` first, in the order people meet them."""
    return tuple(f"{side}/{table}" for side in ("in", "out") for table in _ORDER[side])


def documents() -> tuple[str, ...]:
    """Give the names of all documents that have a JSON Schema."""
    return _ORDER["documents"]


@cache
def load(name: str) -> Contract:
    """Load the contract of a table.

    Parameters
    ----------
    name : str
        Direction and table, such as ``in/coupons``; one of `names`.

    Returns
    -------
    Contract
        The same object each time.

    Raises
    ------
    UsageError
        If there is no such table; the message names the nearest.
    ColdworkError
        If the schema holds an unknown key or contradicts itself.
    """
    _known("table", name, names())
    contract = contract_of(_read(name), f"schemas/{name}.json")
    if contract.name != name:
        message = f"schemas/{name}.json: says that it is {contract.name}"
        raise ColdworkError(message)
    return contract


def document(name: str) -> dict[str, Any]:
    """Load the JSON Schema of a document.

    Parameters
    ----------
    name : str
        One of `documents`, such as ``batch_sheet``.

    Returns
    -------
    dict
        A fresh copy each time.

    Raises
    ------
    UsageError
        If there is no such document; the message names the nearest.
    """
    _known("document", name, documents())
    return _read(f"documents/{name}")


def contract_of(schema: Mapping[str, Any], where: str) -> Contract:
    """Make a contract from a Table Schema.

    Parameters
    ----------
    schema : mapping
        The schema as JSON reads it.
    where : str
        What messages call it.

    Raises
    ------
    ColdworkError
        If a key is unknown, a type is unknown, a number has no unit, a column
        stands twice, or a key or check names something that is not there.
    """
    _refuse_unknown(schema, _TABLE_KEYS, where)
    fields = tuple(_field(entry, where) for entry in schema["fields"])
    contract = Contract(
        name=f"{schema['direction']}/{schema['name']}",
        direction=cast("Direction", schema["direction"]),
        title=schema["title"],
        description=schema["description"],
        version=schema["version"],
        fields=fields,
        checks=tuple(schema.get("checks", ())),
        primary_key=tuple(schema.get("primaryKey", ())),
    )
    _refuse_contradictions(contract, schema.get("missingValues", [""]), where)
    return contract


def _field(entry: Mapping[str, Any], where: str) -> Field:
    here = f"{where}, column {entry.get('name', '?')}"
    _refuse_unknown(entry, _FIELD_KEYS, here)
    limits = entry.get("constraints", {})
    _refuse_unknown(limits, _CONSTRAINT_KEYS, here)
    if entry["type"] not in _TYPES:
        message = f"{here}: unknown type {entry['type']!r}; known are {', '.join(_TYPES)}"
        raise ColdworkError(message)
    field = Field(
        name=entry["name"],
        type=cast("FieldType", entry["type"]),
        title=entry["title"],
        description=entry["description"],
        unit=entry.get("unit"),
        source=entry.get("source"),
        required=limits.get("required", False),
        minimum=limits.get("minimum"),
        maximum=limits.get("maximum"),
        exclusive_minimum=limits.get("exclusiveMinimum"),
        exclusive_maximum=limits.get("exclusiveMaximum"),
        enum=tuple(limits.get("enum", ())),
        pattern=limits.get("pattern"),
        unique=limits.get("unique", False),
        max_length=limits.get("maxLength"),
        checks=tuple(entry.get("checks", ())),
    )
    if field.numeric != (field.unit is not None):
        message = f"{here}: a number has a unit (1 where it has no dimension), text has none"
        raise ColdworkError(message)
    if (field.range_text and not field.numeric) or (_about_text(field) and not field.text):
        message = f"{here}: a range is for numbers; enum, pattern and maxLength are for text"
        raise ColdworkError(message)
    return field


def _about_text(field: Field) -> bool:
    return bool(field.enum or field.pattern or field.max_length)


def _refuse_contradictions(contract: Contract, missing: object, where: str) -> None:
    if missing != [""]:
        message = f"{where}: missingValues must be [''], since only an empty cell is absent"
        raise ColdworkError(message)
    if contract.direction not in ("in", "out"):
        message = f"{where}: direction must be 'in' or 'out', not {contract.direction!r}"
        raise ColdworkError(message)
    if len(set(contract.columns)) < len(contract.columns):
        message = f"{where}: a column stands twice"
        raise ColdworkError(message)
    lost = [key for key in contract.primary_key if key not in contract.columns]
    lost += [
        name for field in contract.fields for name in field.checks if name not in contract.checks
    ]
    if lost:
        message = f"{where}: names what is not there: {', '.join(sorted(set(lost)))}"
        raise ColdworkError(message)


def _refuse_unknown(entry: Mapping[str, Any], known: set[str], where: str) -> None:
    unknown = sorted(set(entry) - known)
    if unknown:
        message = f"{where}: unknown key {', '.join(unknown)}; known are {', '.join(sorted(known))}"
        raise ColdworkError(message)


def _known(noun: str, name: str, known: tuple[str, ...]) -> None:
    if name not in known:
        near = get_close_matches(name, known, n=1)
        hint = f"the nearest is {near[0]}" if near else f"known are {', '.join(known)}"
        message = f"no {noun} is called {name!r}; {hint}"
        raise UsageError(message)


def _read(name: str) -> dict[str, Any]:
    path = _root().joinpath(*f"{name}.json".split("/"))
    return cast("dict[str, Any]", json.loads(path.read_text(encoding="utf-8")))


@cache
def _root() -> Traversable:
    packaged = files("coldwork").joinpath("schemas")
    checkout = Path(__file__).parents[3] / "schemas"
    for root in (packaged, checkout):
        if root.joinpath("in").is_dir():
            return root
    message = f"the schemas are neither in the package nor in {checkout}: install coldwork again"
    raise ColdworkError(message)
