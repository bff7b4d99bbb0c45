"""Documents: bytes that do not vary, and schemas that are kept."""

import json
import re
from pathlib import Path
from typing import Any

import jsonschema
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from coldwork import contracts
from coldwork.results.documents import dump, violations
from coldwork.results.shape import UnknownKeyword, compiled


def test_keys_are_sorted_text_is_utf_8_and_floats_are_shortest(manifest: dict[str, Any]) -> None:
    full = {**manifest, "outputs": [], "replaced": None}
    full["unused_columns"] = {"ä.csv": ["x"]}
    data = dump("manifest", full)
    assert data == dump("manifest", dict(reversed(full.items())))
    assert data.endswith(b"}\n")
    assert '\n  "batch_id": "B-1",\n' in data.decode()
    assert '"ä.csv"' in data.decode()
    keys = re.findall(r'^  "(\w+)"', data.decode(), re.MULTILINE)
    assert keys == sorted(full)
    assert json.loads(data) == full


def test_a_key_that_the_schema_does_not_know_is_refused(manifest: dict[str, Any]) -> None:
    with pytest.raises(RuntimeError, match=r"manifest breaks its schema: .*'colour'"):
        dump("manifest", {**manifest, "outputs": [], "replaced": None, "colour": "red"})


@pytest.mark.parametrize("number", [float("nan"), float("inf"), np.float64("-inf")])
def test_what_is_no_number_is_refused(manifest: dict[str, Any], number: float) -> None:
    manifest["reconciled"]["coupons"] = number
    with pytest.raises(RuntimeError, match="cannot be written as JSON"):
        dump("manifest", {**manifest, "outputs": [], "replaced": None})


def test_scalars_of_numpy_are_numbers(manifest: dict[str, Any]) -> None:
    manifest["reconciled"]["coupons"] = np.int64(3)
    data = dump("manifest", {**manifest, "outputs": [], "replaced": None})
    assert json.loads(data)["reconciled"]["coupons"] == 3


def test_other_objects_have_no_place(manifest: dict[str, Any]) -> None:
    with pytest.raises(TypeError, match="PosixPath"):
        dump("manifest", {**manifest, "batch_id": Path("x")})


def test_violations_say_where(manifest: dict[str, Any]) -> None:
    full = {**manifest, "outputs": [], "replaced": None}
    full["inputs"][0]["bytes"] = -1
    assert violations("manifest", full) == ["inputs/0/bytes: -1 is less than the minimum of 0"]


# The quick test must say what the general-purpose library `jsonschema` says.

LEAF = {"type": ["number", "null"], "minimum": -1, "exclusiveMaximum": 3}
BRANCH = {"anyOf": [{"$ref": "#/$defs/leaf"}, {"$ref": "#/$defs/tree"}]}
SCHEMA: dict[str, Any] = {
    "$schema": "https://json-schema.org/draft/2020-12/schema",
    "title": "All that is compiled",
    "$defs": {"leaf": LEAF, "tree": {"type": "array", "items": BRANCH}},
    "type": "object",
    "required": ["a"],
    "properties": {
        "a": {"type": "integer", "maximum": 2, "exclusiveMinimum": -1},
        "b": {"enum": ["x", 1, None, True]},
        "c": {"$ref": "#/$defs/tree"},
        "d": {"type": "string", "pattern": "^[xy]+$", "minLength": 1, "maxLength": 2},
        "e": {"prefixItems": [{"type": "string"}], "items": {"const": 1}, "maxItems": 2},
        "f": {"oneOf": [{"type": "number"}, {"type": "integer"}, {"type": "boolean"}]},
        "g": {"allOf": [{"type": ["number", "array"]}, {"minimum": 0}], "minItems": 1},
    },
    "patternProperties": {"^z": {"type": "boolean"}},
    "additionalProperties": False,
}
scalars = st.sampled_from([None, True, False, -1, 0, 1, 2, 3, 1.0, 0.5, "", "x", "xy", "xyx", "q"])
values = st.recursive(scalars, lambda inner: st.lists(inner, max_size=3), max_leaves=5)
objects = st.dictionaries(st.sampled_from("aaabcdefgzq"), values, max_size=5)


@given(st.one_of(objects, values, objects.map(lambda x: {"a": 1, **x})))
def test_the_quick_test_agrees_with_the_general_one(document: object) -> None:
    general = jsonschema.Draft202012Validator(SCHEMA).is_valid(document)
    assert compiled(SCHEMA)(document) is general


@pytest.mark.parametrize("name", ["manifest", "method", "record"])
def test_the_schemas_of_written_documents_are_all_compiled(name: str) -> None:
    compiled(contracts.document(name))


def test_an_unknown_keyword_is_not_passed_over() -> None:
    with pytest.raises(UnknownKeyword, match="uniqueItems"):
        compiled({"type": "array", "uniqueItems": True})
