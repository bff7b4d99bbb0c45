"""Whatever TOML holds, a sheet becomes a method or the batch is refused: nothing else."""

import json
import math
import tempfile
from collections.abc import Mapping
from contextlib import suppress
from copy import deepcopy
from datetime import date, datetime, time
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.errors import BatchRefused
from coldwork.inputs.method import Method
from coldwork.inputs.sheet import read_method

VALID: dict[str, Any] = {
    "batch": {"id": "B-1", "laboratory": "x", "timezone": "UTC"},
    "material": {"name": "copper", "shear_modulus_gpa": {"value": 44.0, "u": 2.5}},
    "files": {"coupons": "coupons.csv", "indents": ["indents.csv"], "exclusions": "exclusions.csv"},
    "strength": {"route": "indent", "friction_mpa": 25.5, "terms_mpa": {"solutes": 12.0}},
    "indentation": {
        "area": "contact",
        "constraint_factor": {"value": 3.0, "factor": 1.1},
        "HBW": {"strain_ratio": 0.2},
        "HK": {"constraint_factor": 3, "representative_strain": 0.08},
    },
    "hardening": {"law": "constant", "coefficient": {"value": 0.3, "factor": 1.2}},
    "line_energy": {"outer_radius": "fixed", "outer_radius_nm": 1000},
    "character": {"mix": [{"angle_deg": 0, "fraction": 0.4}, {"angle_deg": 60, "fraction": 0.6}]},
    "temperature": {"test_c": 23.0},
    "uncertainty": {"coverage": 0.95},
    "output": {"tables": ["csv"]},
    "testers": [{"id": "T1", "bias_rel": 0.0, "u_rel": 0.01, "valid_until": date(2027, 3, 31)}],
    "limits": [{"id": "a", "quantity": "hardness", "lower": 1, "upper": 2, "rule": "guarded"}],
}
KEYS = sorted(
    {
        *VALID,
        *(key for section in VALID.values() if isinstance(section, dict) for key in section),
        *("value", "u", "factor", "shape", "source", "id", "route", "size_effect", "draws"),
        *("slope_n_per_m", "baseline_mpa", "obstacle_mpa", "builds_on", "layout", "from_coupon"),
    }
)

texts = st.text(
    st.characters(codec="utf-8", exclude_categories=["Cs"]), max_size=12
) | st.sampled_from([*KEYS, "grain", "both", "../x.csv", "*.csv", "a\x00b", "x" * 300, "/", "~"])
leaves = st.one_of(
    st.booleans(),
    st.integers(),
    st.sampled_from([10**400, -(10**400), 0, 1]),
    st.floats(),
    st.floats(0, 1),
    texts,
    st.dates(),
    st.datetimes(),
    st.times(),
)
values = st.recursive(
    leaves,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(texts, inner, max_size=3),
    max_leaves=6,
)


def written(value: object) -> str:
    """Write a value as TOML."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
    if isinstance(value, float) and not math.isfinite(value):
        return str(value)
    if isinstance(value, list):
        return f"[{', '.join(map(written, value))}]"
    if isinstance(value, Mapping):
        inner = ", ".join(f"{written(key)} = {written(item)}" for key, item in value.items())
        return f"{{ {inner} }}"
    return value.isoformat() if isinstance(value, date | datetime | time) else str(value)


def as_toml(tables: Mapping[str, Any]) -> str:
    return "".join(f"{written(key)} = {written(value)}\n" for key, value in tables.items())


def method_or_refusal(folder: Path) -> Method | BatchRefused:
    try:
        return read_method(folder)
    except BatchRefused as refusal:
        return refusal


def read(text: str) -> Method | BatchRefused:
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place)
        for name in ("coupons.csv", "indents.csv", "exclusions.csv"):
            (folder / name).touch()
        (folder / "batch.toml").write_bytes(text.encode())
        outcome = method_or_refusal(folder)
        if isinstance(outcome, BatchRefused):
            assert outcome.causes
            assert all("\n" not in str(cause) for cause in outcome.causes)
            return outcome
        json.dumps(outcome.document, allow_nan=False)
        assert all(math.isfinite(i.value) and math.isfinite(i.u) for i in outcome.inputs.values())
        return outcome


def places(tables: object, path: tuple[str | int, ...] = ()) -> list[tuple[str | int, ...]]:
    items: list[tuple[str | int, object]] = []
    if isinstance(tables, dict):
        items = list(tables.items())
    elif isinstance(tables, list):
        items = list(enumerate(tables))
    return [path, *(deep for key, item in items for deep in places(item, (*path, key)))]


PLACES = [path for path in places(VALID) if path]


def changed(path: tuple[str | int, ...], key: str, value: object, *, add: bool) -> dict[str, Any]:
    tables = deepcopy(VALID)
    at: Any = tables
    for part in path[:-1]:
        at = at[part]
    if add and isinstance(at[path[-1]], dict):
        at[path[-1]][key] = value
    else:
        at[path[-1]] = value
    return tables


def test_the_sheet_that_is_changed_fits() -> None:
    assert isinstance(read(as_toml(VALID)), Method)


@settings(max_examples=200, deadline=None)
@given(st.sampled_from(PLACES), st.sampled_from(KEYS), values, st.booleans())
def test_any_value_anywhere(
    path: tuple[str | int, ...],
    key: str,
    value: object,
    add: bool,
) -> None:
    read(as_toml(changed(path, key, value, add=add)))


@settings(max_examples=60, deadline=None)
@given(st.dictionaries(st.sampled_from(KEYS) | texts, values, max_size=5))
def test_any_document(tables: dict[str, Any]) -> None:
    assert isinstance(read(as_toml(tables)), BatchRefused)


@pytest.mark.parametrize("path", PLACES, ids=str)
def test_any_key_may_be_missing(path: tuple[str | int, ...]) -> None:
    tables = deepcopy(VALID)
    at: Any = tables
    for part in path[:-1]:
        at = at[part]
    del at[path[-1]]
    read(as_toml(tables))


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=80) | st.text(max_size=80).map(str.encode))
def test_any_bytes(data: bytes) -> None:
    with tempfile.TemporaryDirectory() as place:
        (Path(place) / "batch.toml").write_bytes(data)
        with suppress(BatchRefused):
            read_method(Path(place))
