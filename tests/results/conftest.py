"""Small valid tables and a small valid manifest."""

from collections.abc import Callable, Sequence
from typing import Any, TypeAlias

import pyarrow as pa
import pytest

from coldwork import contracts
from coldwork.contracts.arrays import arrow_type

TableOf: TypeAlias = Callable[..., pa.Table]

FILLED: dict[str, dict[str, Any]] = {
    "flags": {
        "level": "warning",
        "rule": "few-readings",
        "statement": "fewer than 3 readings",
        "source": "common practice",
    },
    "set_aside": {
        "table": "indents",
        "file": "indents.csv",
        "rule": "not-a-number",
        "statement": "the cell is not a number",
    },
    "readings": {"route": "flow", "file": "flow_stress.csv", "plastic_strain": 0.002},
    "coupons": {
        "batch_id": "B-1",
        "material": "copper",
        "route": "indent",
        "readings_used": 5,
        "readings_set_aside": 0,
    },
}


@pytest.fixture
def table_of() -> TableOf:
    """Make a table by its contract: given columns, plain fillings, nothing elsewhere."""

    def make(name: str, rows: int, **columns: Sequence[object]) -> pa.Table:
        contract = contracts.load(f"out/{name}")
        made = {}
        for field in contract.fields:
            kind = arrow_type(field)
            if field.name in columns:
                made[field.name] = pa.array(columns[field.name], kind)
            elif field.name in FILLED.get(name, {}):
                made[field.name] = pa.array([FILLED[name][field.name]] * rows, kind)
            else:
                made[field.name] = pa.nulls(rows).cast(kind)
        return pa.table(made)

    return make


@pytest.fixture
def manifest() -> dict[str, Any]:
    """Make a manifest's content, but for what the commit adds."""
    return {
        "schema_version": "1.0.0",
        "batch_id": "B-1",
        "inputs": [
            {
                "path": "batch.toml",
                "table": "sheet",
                "sha256": "0" * 64,
                "bytes": 1,
                "rows_read": 0,
                "rows_used": 0,
                "rows_set_aside": 0,
            }
        ],
        "reconciled": {
            "readings_read": 0,
            "readings_used": 0,
            "readings_set_aside": 0,
            "coupons": 0,
        },
        "run": {
            "started_at": "2026-05-04T08:00:00Z",
            "finished_at": "2026-05-04T08:00:01Z",
            "host": "bench-1",
            "user": "operator-1",
            "python": "3.11",
            "platform": "linux",
        },
    }
