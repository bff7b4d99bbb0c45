"""A JSON Schema compiled to plain functions, for documents that come in ten thousands.

The general validator says well what is wrong, at a hundred times the cost of seeing
that nothing is. So `compiled` gives a quick yes or no, and whoever gets a no asks the
general validator for the reason.
"""

import re
from collections.abc import Callable, Mapping, Sequence
from typing import Any, Final, TypeAlias

__all__ = ["Test", "UnknownKeyword", "compiled"]

Test: TypeAlias = Callable[[Any], bool]
_Schema: TypeAlias = "Mapping[str, Any] | bool"

_ANNOTATIONS: Final = frozenset(
    {
        *("$comment", "$defs", "$id", "$schema", "default", "description", "examples"),
        *("format", "source", "title", "unit", "version"),
    }
)
_OBJECT: Final = frozenset({"properties", "required", "additionalProperties", "patternProperties"})
_ARRAY: Final = frozenset({"items", "prefixItems", "minItems", "maxItems"})


class UnknownKeyword(Exception):  # noqa: N818
    """The schema uses a keyword that is not compiled here."""


def compiled(schema: Mapping[str, Any]) -> Test:
    """Compile a schema: JSON Schema 2020-12, the keywords that documents here use.

    Parameters
    ----------
    schema : mapping
        The whole schema; ``$ref`` finds its target in it.

    Returns
    -------
    callable
        Takes a value as the JSON reader makes it, and tells whether it conforms.

    Raises
    ------
    UnknownKeyword
        If the schema uses a keyword that is not known here.
    """
    return _Compiler(schema).test(schema)


class _Compiler:
    """Compiles the parts of one schema."""

    def __init__(self, root: Mapping[str, Any]) -> None:
        self._root = root
        self._targets: dict[str, Test] = {}

    def test(self, schema: _Schema) -> Test:
        if isinstance(schema, bool):
            return _always if schema else _never
        keywords = set(schema) - _ANNOTATIONS
        # The type first: it is the cheapest, and the likeliest to fail.
        singles = sorted(keywords - _OBJECT - _ARRAY, key=lambda word: (word != "type", word))
        tests = [self._single(word, schema[word]) for word in singles]
        if keywords & _OBJECT:
            tests.append(self._object(schema))
        if keywords & _ARRAY:
            tests.append(self._array(schema))
        return _every(tests)

    def _single(self, keyword: str, argument: Any) -> Test:  # noqa: ANN401
        if keyword in _PLAIN:
            return _PLAIN[keyword](argument)
        if keyword == "$ref":
            return self._reference(argument)
        if keyword == "allOf":
            return _every([self.test(part) for part in argument])
        if keyword in {"anyOf", "oneOf"}:
            return _alternatives([self.test(part) for part in argument], exact=keyword == "oneOf")
        if keyword == "propertyNames":
            name = self.test(argument)
            return lambda x: not isinstance(x, dict) or all(map(name, x))
        raise UnknownKeyword(keyword)

    def _reference(self, target: str) -> Test:
        if target not in self._targets:
            self._targets[target] = lambda x: self._targets[target](x)  # while it is being made
            part: Any = self._root
            for step in target.removeprefix("#").strip("/").split("/"):
                part = part[step] if step else part
            self._targets[target] = self.test(part)
        return self._targets[target]

    def _object(self, schema: Mapping[str, Any]) -> Test:
        required = frozenset(schema.get("required", ()))
        known = {name: self.test(part) for name, part in schema.get("properties", {}).items()}
        patterns = [
            (re.compile(pattern).search, self.test(part))
            for pattern, part in schema.get("patternProperties", {}).items()
        ]
        others = self.test(schema.get("additionalProperties", True))

        def member(name: str, value: object) -> bool:
            matching = [part for search, part in patterns if search(name)]
            if name in known:
                matching.append(known[name])
            return all(part(value) for part in matching or [others])

        def test(x: object) -> bool:
            if not isinstance(x, dict):
                return True
            if not required <= x.keys():
                return False
            if patterns:
                return all(member(name, value) for name, value in x.items())
            return all(known.get(name, others)(value) for name, value in x.items())

        return test

    def _array(self, schema: Mapping[str, Any]) -> Test:
        first = [self.test(part) for part in schema.get("prefixItems", ())]
        rest = self.test(schema.get("items", True))
        fewest, most = schema.get("minItems", 0), schema.get("maxItems", float("inf"))

        def test(x: object) -> bool:
            if not isinstance(x, list):
                return True
            if not fewest <= len(x) <= most:
                return False
            front = all(part(value) for part, value in zip(first, x, strict=False))
            return front and all(map(rest, x[len(first) :]))

        return test


def _always(_: object) -> bool:
    return True


def _never(_: object) -> bool:
    return False


def _every(tests: Sequence[Test]) -> Test:
    if not tests:
        return _always
    if len(tests) == 1:
        return tests[0]
    if len(tests) == 2:
        one, other = tests
        return lambda x: one(x) and other(x)
    return lambda x: all(test(x) for test in tests)


def _alternatives(tests: Sequence[Test], *, exact: bool) -> Test:
    if exact:
        return lambda x: sum(test(x) for test in tests) == 1
    return lambda x: any(test(x) for test in tests)


def _is_number(x: object) -> bool:
    return isinstance(x, int | float) and not isinstance(x, bool)


_KINDS: Final[Mapping[str, Test]] = {
    "null": lambda x: x is None,
    "boolean": lambda x: isinstance(x, bool),
    "string": lambda x: isinstance(x, str),
    "array": lambda x: isinstance(x, list),
    "object": lambda x: isinstance(x, dict),
    "number": _is_number,
    "integer": lambda x: _is_number(x) and x == int(x),
}


def _type(kinds: str | Sequence[str]) -> Test:
    names = [kinds] if isinstance(kinds, str) else kinds
    return (
        _alternatives([_KINDS[name] for name in names], exact=False)
        if len(names) > 1
        else (_KINDS[names[0]])
    )


def _enum(values: Sequence[object]) -> Test:
    """Test for one of `values`, compared with their kind: true is not 1 in JSON."""
    texts = frozenset(value for value in values if isinstance(value, str))
    others = [value for value in values if not isinstance(value, str)]

    def same(x: object, value: object) -> bool:
        return isinstance(x, bool) == isinstance(value, bool) and x == value

    return lambda x: x in texts if isinstance(x, str) else any(same(x, v) for v in others)


def _pattern(pattern: str) -> Test:
    search = re.compile(pattern).search
    return lambda x: not isinstance(x, str) or search(x) is not None


_PLAIN: Final[Mapping[str, Callable[[Any], Test]]] = {
    "type": _type,
    "enum": _enum,
    "const": lambda value: _enum([value]),
    "pattern": _pattern,
    "minLength": lambda end: lambda x: not isinstance(x, str) or len(x) >= end,
    "maxLength": lambda end: lambda x: not isinstance(x, str) or len(x) <= end,
    "minimum": lambda end: lambda x: not _is_number(x) or x >= end,
    "maximum": lambda end: lambda x: not _is_number(x) or x <= end,
    "exclusiveMinimum": lambda end: lambda x: not _is_number(x) or x > end,
    "exclusiveMaximum": lambda end: lambda x: not _is_number(x) or x < end,
}
