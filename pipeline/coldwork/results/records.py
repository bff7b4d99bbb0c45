"""A coupon's record: its whole chain from raw cells to decision, on one line.

Built a slice of coupons at a time from the very tables that are published, so that
record and tables cannot disagree.
"""

import hashlib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from math import isfinite
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.results.documents import dump

__all__ = ["Common", "Sealed", "Slice", "Step", "build", "seal"]


@dataclass(frozen=True)
class Step:
    """One step of the chain for a slice of n coupons.

    Attributes
    ----------
    step : str
        Name of the step, such as ``flow stress``.
    relation : str
        Which relation, with its source.
    quantity : str
        What it gives, by its column in ``coupons.csv`` where it has one.
    unit : str
        UCUM code of `values`.
    values : ndarray, shape (n,)
        The quantity, NaN where there is none. [`unit`]
    explanation : str
        What was done, in a sentence for a person.
    inputs : tuple of str
        Names of what went in: inputs of the method, quantities of earlier steps, or
        what belongs to the coupon.
    only : mapping of str to ndarray of bool, shape (n,), optional
        For an input that not every coupon has, such as a constant of one hardness
        scale: which coupons have it.
    """

    step: str
    relation: str
    quantity: str
    unit: str
    values: NDArray[np.float64]
    explanation: str
    inputs: tuple[str, ...]
    only: Mapping[str, NDArray[np.bool_]] = field(default_factory=dict)


@dataclass(frozen=True)
class Common:
    """What all records of a batch share.

    Attributes
    ----------
    batch_id : str
        Id of the batch.
    method_sha256 : str
        Digest of the bytes of ``method.json``.
    inputs : mapping of str to mapping
        ``inputs`` of ``method.json``: each with its ``value``.
    """

    batch_id: str
    method_sha256: str
    inputs: Mapping[str, Mapping[str, object]]


@dataclass(frozen=True)
class Slice:
    """What a slice of n coupons is made of.

    Attributes
    ----------
    coupons : pyarrow.Table, n rows
        At least ``coupon_id``, ``lot_id``, ``condition`` and ``decision`` of
        ``out/coupons``.
    files : sequence of str
        The file of each coupon's row, as a path inside the batch folder.
    lines : sequence of int
        And the line.
    raw : pyarrow.Table, n rows
        The row's cells as written; null in a column that its file does not have.
    readings : pyarrow.Table
        The coupons' rows of ``out/readings``.
    raw_readings : pyarrow.Table
        Row for row, their cells as written; null where the file has no such column.
    set_aside, quantities, flags, decisions : pyarrow.Table
        Rows of ``out/...``; those of other coupons are passed over.
    repeatability : sequence of mapping
        For each coupon what its readings' scatter was judged by.
    steps : sequence of Step
        The chain in order.
    curves : sequence of mapping or None, optional
        For each coupon what is kept of its curve, None where it has none; None where the
        batch brings no curves.
    sampling : sequence of mapping or None, optional
        For each coupon what its draws came to, None where it was not drawn; None by first
        order.
    """

    coupons: pa.Table
    files: Sequence[str]
    lines: Sequence[int]
    raw: pa.Table
    readings: pa.Table
    raw_readings: pa.Table
    set_aside: pa.Table
    quantities: pa.Table
    flags: pa.Table
    decisions: pa.Table
    repeatability: Sequence[Mapping[str, object]]
    steps: Sequence[Step]
    curves: Sequence[Mapping[str, object] | None] | None = None
    sampling: Sequence[Mapping[str, object] | None] | None = None


@dataclass(frozen=True)
class Sealed:
    """A record as it is stored.

    Attributes
    ----------
    line : bytes
        The stored line without its line end.
    sha256 : str
        Its digest, in hexadecimal.
    """

    line: bytes
    sha256: str


def build(common: Common, part: Slice) -> list[dict[str, Any]]:
    """Build the records of a slice of coupons, in its order.

    Parameters
    ----------
    common : Common
        What is the same for the batch.
    part : Slice
        The slice, n coupons.

    Returns
    -------
    list of dict
        n records that follow the schema ``record``.
    """
    facts = list(_rows(part.coupons.select(["coupon_id", "lot_id", "condition", "decision"])))
    place = {fact["coupon_id"]: i for i, fact in enumerate(facts)}
    n = len(facts)
    readings = _by_coupon(part.readings, place, n, part.raw_readings)
    set_aside = _by_coupon(part.set_aside, place, n)
    quantities = _by_coupon(part.quantities, place, n)
    flags = _by_coupon(part.flags, place, n)
    decisions = _by_coupon(part.decisions, place, n)
    raw = list(_cells(part.raw))
    steps = _steps(part.steps, common.inputs, n)
    version = contracts.document("record")["version"]
    return [
        {
            "schema_version": version,
            "batch_id": common.batch_id,
            **fact,
            "coupon": {"file": part.files[i], "line": int(part.lines[i]), "raw": raw[i]},
            "readings": readings[i],
            "set_aside": set_aside[i],
            **({} if part.curves is None else {"curve": part.curves[i]}),
            **({} if part.sampling is None else {"sampling": part.sampling[i]}),
            "repeatability": {name: _known(x) for name, x in part.repeatability[i].items()},
            "steps": steps[i],
            "quantities": {row.pop("quantity"): row for row in quantities[i]},
            "flags": flags[i],
            "decisions": decisions[i],
            "method_sha256": common.method_sha256,
        }
        for i, fact in enumerate(facts)
    ]


def seal(record: Mapping[str, object]) -> Sealed:
    """Write a record as its line, with the digest that ``coupons.csv`` carries.

    Raises
    ------
    RuntimeError
        If it breaks the schema ``record``.
    """
    line = dump("record", record)
    return Sealed(line, hashlib.sha256(line).hexdigest())


def _by_coupon(
    table: pa.Table, place: Mapping[str, int], n: int, raw: pa.Table | None = None
) -> list[list[dict[str, Any]]]:
    """Deal the rows of a table out to the coupons; the coupon's own names are left out."""
    dealt: list[list[dict[str, Any]]] = [[] for _ in range(n)]
    mine = pc.is_in(table["coupon_id"], value_set=pa.array(list(place), pa.string()))
    cells = None if raw is None else _cells(raw.filter(mine))
    for row in _rows(table.filter(mine)):
        row.pop("lot_id", None)
        if cells is not None:
            row["raw"] = next(cells)
        dealt[place[row.pop("coupon_id")]].append(row)
    return dealt


def _rows(table: pa.Table) -> Iterator[dict[str, Any]]:
    """Rows as dicts; NaN and empty text are None."""
    names = table.column_names
    columns = [_plain(column.to_pylist(), column.type) for column in table.columns]
    return (dict(zip(names, row, strict=True)) for row in zip(*columns, strict=True))


def _cells(raw: pa.Table) -> Iterator[dict[str, str]]:
    """Rows of cells as written; a column that the file does not have is left out."""
    names = raw.column_names
    columns = [column.to_pylist() for column in raw.columns]
    for row in zip(*columns, strict=True):
        yield {name: cell for name, cell in zip(names, row, strict=True) if cell is not None}


def _plain(values: list[Any], kind: pa.DataType) -> list[Any]:
    if pa.types.is_floating(kind):
        return [None if x is None or not isfinite(x) else x for x in values]
    if pa.types.is_integer(kind) or pa.types.is_boolean(kind):
        return values
    return [x or None for x in values]


def _known(x: object) -> object:
    """Give a plain value; a number that is not finite is unknown or unlimited, None."""
    if isinstance(x, np.generic):
        x = x.item()
    return None if isinstance(x, float) and not isfinite(x) else x


def _steps(
    steps: Sequence[Step], inputs: Mapping[str, Mapping[str, object]], n: int
) -> list[list[dict[str, Any]]]:
    """Give each coupon its steps, with the numbers that went in beside their names."""
    fixed = {name: entry.get("value") for name, entry in inputs.items()}
    columns = [[_known(x) for x in step.values.tolist()] for step in steps]
    written: list[list[dict[str, Any]]] = []
    for i in range(n):
        known = dict(fixed)
        mine = []
        for step, column in zip(steps, columns, strict=True):
            mine.append(
                {
                    "step": step.step,
                    "relation": step.relation,
                    "quantity": step.quantity,
                    "value": column[i],
                    "unit": step.unit,
                    "explanation": step.explanation,
                    "from": {
                        name: known.get(name)
                        for name in step.inputs
                        if name not in step.only or step.only[name][i]
                    },
                }
            )
            known[step.quantity] = column[i]
        written.append(mine)
    return written
