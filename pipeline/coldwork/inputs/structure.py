"""Hold a sheet against its schema and say in plain words what does not fit."""

from collections.abc import Callable, Iterable, Mapping, Set
from datetime import date, datetime
from typing import Any, Final

import jsonschema

from coldwork.contracts import document
from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import spec_of
from coldwork.inputs.positions import KeyPath
from coldwork.inputs.words import listed, near, nearest, shown

__all__ = ["refuse_misfits"]

_TYPES: Final = {
    "number": "a number",
    "integer": "a whole number",
    "string": "text in quotes",
    "boolean": "true or false",
    "array": "a list",
    "object": "a table",
}
_COMPARED: Final = {
    "minimum": "at least",
    "exclusiveMinimum": "greater than",
    "maximum": "at most",
    "exclusiveMaximum": "less than",
}


def refuse_misfits(causes: Causes, schema: str = "batch_sheet") -> None:
    """Refuse what a schema does not allow, that of the batch sheet unless said.

    Numbers with uncertainty are left out: `numbers` has looked at them closer.
    """
    validator = jsonschema.Draft202012Validator(document(schema))
    instance = _with_dates_as_text(causes.sheet.tables)
    errors = [each for each in validator.iter_errors(instance) if not _is_about_a_number(each)]
    meant = {path for error in errors for path in _meant(error)}
    for error in errors:
        for path, what, why, mend in _explained(error):
            if not (causes.within(path) or _is_but_a_typo(error, path, meant)):
                causes.add(path, what, why, mend)


def _meant(error: jsonschema.ValidationError) -> Iterable[KeyPath]:
    """Give the keys that unknown ones stand for, where a known name is near."""
    if error.validator == "additionalProperties":
        known = list(_schema(error).get("properties", {}))
        for key in _found(error):
            name = None if key in known else near(key, known)
            if name is not None:
                yield (*error.absolute_path, name)


def _is_but_a_typo(error: jsonschema.ValidationError, path: KeyPath, meant: Set[KeyPath]) -> bool:
    """Tell whether a key is missing only since its name was mistyped, which is told anyway."""
    if error.validator == "required":
        return path in meant
    return error.validator == "anyOf" and any(key[:-1] == path[:-1] for key in meant)


def _with_dates_as_text(tables: dict[str, Any]) -> dict[str, Any]:
    testers = tables.get("testers")
    if not isinstance(testers, list):
        return tables
    return tables | {"testers": [_tester(tester) for tester in testers]}


def _tester(tester: object) -> object:
    last = tester.get("valid_until") if isinstance(tester, dict) else None
    if isinstance(tester, dict) and isinstance(last, date) and not isinstance(last, datetime):
        return tester | {"valid_until": last.isoformat()}
    return tester


def _is_about_a_number(error: jsonschema.ValidationError) -> bool:
    """Tell whether an error lies in a number, and not in whether the number may stand there."""
    names = tuple(part for part in error.absolute_path if isinstance(part, str))
    inside = [n for n in range(1, len(names) + 1) if spec_of(names[:n]) is not None]
    return bool(inside) and (inside[0] < len(names) or error.validator != "not")


_Words = tuple[KeyPath, str, str, str]


def _explained(error: jsonschema.ValidationError) -> Iterable[_Words]:
    explain = _EXPLAIN.get(str(error.validator))
    if explain is not None:
        return explain(error)
    return [(tuple(error.absolute_path), "it does not fit", _why(error), "")]


def _why(error: jsonschema.ValidationError) -> str:
    return _plain(_schema(error).get("description", ""))


def _schema(error: jsonschema.ValidationError) -> Mapping[str, Any]:
    return error.schema if isinstance(error.schema, Mapping) else {}


def _found(error: jsonschema.ValidationError) -> Mapping[str, Any]:
    return error.instance if isinstance(error.instance, Mapping) else {}


def _rule(error: jsonschema.ValidationError) -> Any:  # noqa: ANN401  # what a JSON Schema keyword holds
    return error.validator_value


def _plain(text: object) -> str:
    return " ".join(str(text).replace("`", "").split())


def _as_described(error: jsonschema.ValidationError) -> Iterable[_Words]:
    path = tuple(error.absolute_path)
    names = [name for way in _rule(error) for name in way.get("required", ())]
    if not names:
        return [(path, "it does not fit", _why(error), "")]
    what = f"none of {listed(names)} is given"
    return [((*path, names[0]), what, _why(error), "Add what is missing.")]


def _not_here(error: jsonschema.ValidationError) -> Iterable[_Words]:
    path = tuple(error.absolute_path)
    return [(path, "it cannot stand here", _why(error), "Take one of them out.")]


def _unknown(error: jsonschema.ValidationError) -> Iterable[_Words]:
    path = tuple(error.absolute_path)
    known = list(_schema(error).get("properties", {}))
    noun = "key" if path else "section"
    for key in _found(error):
        if key not in known:
            name = key if key.isprintable() else shown(key)
            what = f"unknown {noun} '{name}'"
            yield (*path, key), what, "Unknown keys are errors.", nearest(key, known)


def _missing(error: jsonschema.ValidationError) -> Iterable[_Words]:
    path = tuple(error.absolute_path)
    for key in _rule(error):
        if key not in _found(error):
            noun = "key" if path else "section"
            described = _schema(error).get("properties", {}).get(key, {})
            why = _plain(described.get("description", "")) or _why(error)
            yield (*path, key), f"this {noun} is missing", why, "Add it."


def _missing_beside(error: jsonschema.ValidationError) -> Iterable[_Words]:
    path = tuple(error.absolute_path)
    for key, others in _rule(error).items():
        for other in others:
            if key in _found(error) and other not in _found(error):
                what = f"this key is missing, {key} is there"
                yield (*path, other), what, "They go together, both or neither.", "Add it."


def _wrong_type(error: jsonschema.ValidationError) -> Iterable[_Words]:
    allowed = _rule(error)
    names = [allowed] if isinstance(allowed, str) else list(allowed)
    need = " or ".join(_TYPES.get(name, name) for name in names)
    what = f"{shown(error.instance)} is not {need}"
    return [(tuple(error.absolute_path), what, f"It must be {need}.", "Write it so.")]


def _not_a_choice(error: jsonschema.ValidationError) -> Iterable[_Words]:
    choices = _rule(error) if error.validator == "enum" else [_rule(error)]
    known = [str(choice) for choice in choices]
    why = f"It is one of {listed(known)}." if len(known) > 1 else f"It is {known[0]}."
    path = tuple(error.absolute_path)
    if path == ("indentation", "HK", "area"):
        why = "The Knoop number is over the projected area by definition."
    mend = nearest(str(error.instance), known) if len(known) > 1 else "Leave the key out."
    return [(path, f"{shown(error.instance)} cannot be chosen", why, mend)]


def _out_of_range(error: jsonschema.ValidationError) -> Iterable[_Words]:
    need = f"{_COMPARED[str(error.validator)]} {_rule(error):g}"
    what = f"{shown(error.instance)} is out of range"
    return [(tuple(error.absolute_path), what, f"It must be {need}.", _unit_hint(error))]


def _unit_hint(error: jsonschema.ValidationError) -> str:
    unit = _schema(error).get("unit", "1")
    return "Check the number." if unit == "1" else f"Check the number; its unit is {unit}."


def _bad_text(error: jsonschema.ValidationError) -> Iterable[_Words]:
    what = f"{shown(error.instance)} does not fit"
    return [(tuple(error.absolute_path), what, _why(error), "Write another.")]


def _repeated(error: jsonschema.ValidationError) -> Iterable[_Words]:
    return [(tuple(error.absolute_path), "an entry stands twice", "Each counts once.", "Keep one.")]


_EXPLAIN: Final[Mapping[str, Callable[[jsonschema.ValidationError], Iterable[_Words]]]] = {
    "additionalProperties": _unknown,
    "required": _missing,
    "dependentRequired": _missing_beside,
    "type": _wrong_type,
    "enum": _not_a_choice,
    "const": _not_a_choice,
    **dict.fromkeys(_COMPARED, _out_of_range),
    "not": _not_here,
    "anyOf": _as_described,
    "pattern": _bad_text,
    "minLength": _bad_text,
    "maxLength": _bad_text,
    "minItems": _bad_text,
    "minProperties": _bad_text,
    "uniqueItems": _repeated,
}
