"""Contracts put into words: what a table's columns are, hold and must keep to.

Text fits a hundred columns. A base name such as ``coupons`` stands for the table
that comes in and the one that goes out.
"""

from collections.abc import Iterator
from dataclasses import asdict
from difflib import get_close_matches
from textwrap import wrap
from typing import Any, Final

from coldwork import contracts
from coldwork.contracts import Contract, Field
from coldwork.contracts.checks import CHECKS
from coldwork.errors import UsageError

__all__ = ["as_json", "overview", "render"]

_WIDTH: Final = 100  # characters
_INDENT: Final = "    "
_SIDES: Final = {"in": "comes in", "out": "goes out"}
_KINDS: Final = {
    "string": "text",
    "datetime": "ISO 8601 time",
    "number": "number",
    "integer": "whole number",
    "boolean": "true or false",
}


def overview() -> str:
    """List the tables and documents, a line each.

    Returns
    -------
    str
        Name, number of columns and title, as `render` takes the name.
    """
    lines = ["Tables", ""]
    for name in contracts.names():
        contract = contracts.load(name)
        lines.append(f"  {name:<16} {len(contract.columns):>3} columns  {contract.title}")
    lines += ["", "Documents (JSON Schema)", ""]
    for name in contracts.documents():
        lines.append(f"  {name:<16} {contracts.document(name)['title']}")
    lines += ["", "`coldwork contract NAME` shows one of them."]
    return "\n".join(lines)


def render(name: str) -> str:
    """Describe a table or document for a person.

    Parameters
    ----------
    name : str
        ``in/indents``, a base name such as ``coupons`` for both directions, or
        a document such as ``batch_sheet``.

    Returns
    -------
    str
        Lines of at most 100 characters.

    Raises
    ------
    UsageError
        If there is none of that name; the message names the nearest.
    """
    tables, document = _found(name)
    parts = ["\n".join(_table_lines(contracts.load(table))) for table in tables]
    if document:
        parts.append("\n".join(_document_lines(contracts.document(document))))
    return "\n\n".join(parts)


def as_json(name: str | None = None) -> dict[str, Any]:
    """Give tables or a document as data.

    Parameters
    ----------
    name : str, optional
        As `render` takes it; without it, every table and document in short.

    Returns
    -------
    dict
        ``tables``, by name, and ``documents``, by name. A table has the keys of
        `Contract`, its checks with their sentences; a document is its JSON Schema.

    Raises
    ------
    UsageError
        If there is none of that name; the message names the nearest.
    """
    if name is None:
        return {
            "tables": {table: _short(contracts.load(table)) for table in contracts.names()},
            "documents": {
                each: {"title": contracts.document(each)["title"]} for each in contracts.documents()
            },
        }
    tables, document = _found(name)
    return {
        "tables": {table: _as_data(contracts.load(table)) for table in tables},
        "documents": {document: contracts.document(document)} if document else {},
    }


def _found(name: str) -> tuple[list[str], str | None]:
    """Give the tables that a name stands for, and the document."""
    plain = name.removesuffix(".csv").removesuffix(".json").removesuffix(".toml")
    plain = "batch_sheet" if plain == "batch" else plain
    tables = [each for each in contracts.names() if plain in (each, each.partition("/")[2])]
    document = plain if plain in contracts.documents() else None
    if not tables and document is None:
        known = [*contracts.names(), *contracts.documents()]
        bases = [each.partition("/")[2] for each in contracts.names()]
        near = get_close_matches(plain, [*known, *bases], n=1)
        hint = f"the nearest is {near[0]!r}" if near else f"known are {', '.join(known)}"
        message = f"no table or document is called {name!r}; {hint}"
        raise UsageError(message)
    return tables, document


def _short(contract: Contract) -> dict[str, Any]:
    return {
        "title": contract.title,
        "version": contract.version,
        "columns": list(contract.columns),
    }


def _as_data(contract: Contract) -> dict[str, Any]:
    data = asdict(contract)
    data["checks"] = {name: CHECKS[name].statement for name in contract.checks}
    return data


def _table_lines(contract: Contract) -> Iterator[str]:
    head = f"{contract.name}: {contract.title} ({_SIDES[contract.direction]}, "
    yield f"{head}version {contract.version})"
    yield from _wrapped(contract.description, "")
    if contract.primary_key:
        yield f"One row for each {' and '.join(contract.primary_key)}."
    if contract.direction == "in":
        yield "Columns that are not required may be left out; their order does not matter."
    else:
        yield "Always exactly these columns, in this order."
    for field in contract.fields:
        yield ""
        yield from _field_lines(field)
    if contract.checks:
        yield ""
        yield "Across columns"
        for name in contract.checks:
            yield from _wrapped(f"{name}: {CHECKS[name].statement}", "  ")


def _field_lines(field: Field) -> Iterator[str]:
    kind = _KINDS[field.type]
    if field.unit not in (None, "1"):
        kind = f"{kind}, {_unit_words(field.unit or '')}"
    need = "required" if field.required else "may be empty"
    yield f"  {field.name}  [{kind}; {need}]"
    yield from _wrapped(f"{field.title}. {field.description}", _INDENT)
    rules = list(_rules(field))
    if rules:
        yield from _wrapped(f"Rules: {'; '.join(rules)}.", _INDENT)
    if field.source:
        yield from _wrapped(f"Source: {field.source}.", _INDENT)


def _unit_words(unit: str) -> str:
    if unit == "{quantity}":
        return "in the unit of the quantity"
    told = unit.replace("{", "").replace("}", "")
    return f"unit given by {told}" if told != unit else unit


def _rules(field: Field) -> Iterator[str]:
    if field.range_text:
        yield field.range_text
    if field.enum:
        yield f"one of {', '.join(field.enum)}"
    if field.max_length is not None:
        yield f"at most {field.max_length} characters"
    if field.pattern:
        printable = r"\x00-\x1f" in field.pattern
        yield "printable text" if printable else f"matches {field.pattern}"
    if field.unique:
        yield "no value twice"
    if field.checks:
        yield f"takes part in {', '.join(field.checks)}"


def _document_lines(schema: dict[str, Any]) -> Iterator[str]:
    yield f"{schema['title']} (JSON Schema, version {schema['version']})"
    yield from _wrapped(schema["description"], "")
    yield from _property_lines(schema, "", schema.get("$defs", {}))


def _property_lines(schema: dict[str, Any], path: str, shared: dict[str, Any]) -> Iterator[str]:
    required = schema.get("required", ())
    for key, inner in schema.get("properties", {}).items():
        name = f"{path}.{key}" if path else key
        items = inner.get("items", {})
        inside = items if "properties" in items else inner
        name += "[]" if inside is items else ""
        yield ""
        yield from _key_lines(name, inner, key in required)
        if inner.get("$ref") != "#/$defs/input":
            yield from _property_lines(inside, name, shared)
    if not path and "input" in shared:
        yield ""
        yield from _wrapped(shared["input"]["description"], "")
        yield from _property_lines(shared["input"], "{...}", {})


def _key_lines(name: str, schema: dict[str, Any], required: bool) -> Iterator[str]:
    notes = [_type_words(schema)]
    if schema.get("unit", "1") != "1":
        notes[0] += f", {_unit_words(schema['unit'])}"
    notes.append("required" if required else "may be left out")
    if "default" in schema:
        notes.append(f"default {_toml(schema['default'])}")
    yield from _wrapped(f"{name}  [{'; '.join(notes)}]", "  ")
    yield from _wrapped(f"{schema['title']}. {schema['description']}", _INDENT)
    if "source" in schema:
        yield from _wrapped(f"Source: {schema['source']}.", _INDENT)


def _type_words(schema: dict[str, Any]) -> str:
    if "enum" in schema:
        return "one of " + ", ".join(str(each) for each in schema["enum"] if each is not None)
    if schema.get("$ref") == "#/$defs/input":
        return "number, bare or with its uncertainty"
    if schema.get("$ref") == "#/$defs/paths":
        return "path or pattern, table of path and layout, or list of these"
    words = {"string": "text", "object": "table", "array": "list", "integer": "whole number"}
    kinds = schema.get("type", "string")
    kinds = [kinds] if isinstance(kinds, str) else kinds
    return " or ".join(words.get(kind, kind) for kind in kinds)


def _toml(value: object) -> str:
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key} = {_toml(each)}" for key, each in value.items()) + " }"
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, list):
        return "[" + ", ".join(_toml(each) for each in value) + "]"
    return f'"{value}"' if isinstance(value, str) else str(value)


def _wrapped(text: str, indent: str) -> list[str]:
    return wrap(
        text,
        _WIDTH,
        initial_indent=indent,
        subsequent_indent=indent,
        break_long_words=False,
        break_on_hyphens=False,
    )
