"""Documents as bytes: the same content is the same bytes, and none breaks its schema."""

import json
from collections.abc import Mapping
from functools import cache
from typing import Any, Final

import numpy as np

from coldwork import contracts
from coldwork.results.shape import Test, UnknownKeyword, compiled

__all__ = ["dump", "violations"]

_ONE_LINE: Final = frozenset({"record"})
_SHOWN: Final = 5


def dump(name: str, document: Mapping[str, object]) -> bytes:
    """Write a document as JSON.

    Keys are sorted, floats are in their shortest form that reads back the same, text
    is UTF-8. A record is one line without its line end; other documents are indented
    by two and end with a line end.

    Parameters
    ----------
    name : str
        Name of its schema, one of ``contracts.documents()``.
    document : mapping
        Its content: mappings, sequences, text, numbers, booleans and None. Arrays and
        scalars of numpy are taken too.

    Returns
    -------
    bytes
        The JSON text.

    Raises
    ------
    RuntimeError
        If the document breaks its schema, or holds NaN or an infinite number; the
        message says where.
    """
    one_line = name in _ONE_LINE
    layout: dict[str, Any] = {"separators": (",", ":")} if one_line else {"indent": 2}
    try:
        text = json.dumps(
            document, sort_keys=True, allow_nan=False, ensure_ascii=False, default=_plain, **layout
        )
    except ValueError as problem:
        message = f"{name}: cannot be written as JSON: {problem}"
        raise RuntimeError(message) from problem
    quick = _quick(name)  # reading the text back costs more than all the rest
    broken = [] if quick and quick(document) else violations(name, json.loads(text))
    if broken:
        message = f"{name} breaks its schema: {'; '.join(broken)}"
        raise RuntimeError(message)
    return text.encode() if one_line else text.encode() + b"\n"


def violations(name: str, document: object) -> list[str]:
    """Hold a document, as JSON reads it, against its schema.

    Parameters
    ----------
    name : str
        Name of the schema.
    document : object
        What the JSON reader gave.

    Returns
    -------
    list of str
        Where and how it breaks the schema, a few at most; empty where it does not.
    """
    quick = _quick(name)
    if quick is not None and quick(document):
        return []
    from jsonschema import Draft202012Validator  # slow to import, and seldom needed

    found = []
    for error in Draft202012Validator(contracts.document(name)).iter_errors(document):
        where = "/".join(str(step) for step in error.absolute_path) or "the whole"
        found.append(f"{where}: {error.message[:200]}")
    return sorted(found)[:_SHOWN]


@cache
def _quick(name: str) -> Test | None:
    try:
        return compiled(contracts.document(name))
    except UnknownKeyword:
        return None


def _plain(value: object) -> object:
    if isinstance(value, np.generic | np.ndarray):
        return value.tolist()
    message = f"{type(value).__name__} has no place in a document"
    raise TypeError(message)
