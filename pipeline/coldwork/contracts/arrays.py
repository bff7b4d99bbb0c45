"""A contract held against whole columns: Arrow tables, and the stream's arrays.

Nothing here looks at one cell at a time. A column that keeps its contract costs
one pass; only a column that breaks it is searched for where and how often.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any, Final, TypeAlias, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.contracts.checks import CHECKS
from coldwork.contracts.contract import Contract, Field

__all__ = ["arrow_type", "check_table", "shape_problems", "violations"]

_Column: TypeAlias = "pa.ChunkedArray[Any]"
_Texts: TypeAlias = "pa.ChunkedArray[pa.StringScalar] | pa.StringArray"
_Bools: TypeAlias = "NDArray[np.bool_]"

_TYPES: Final[Mapping[str, pa.DataType]] = {
    "string": pa.string(),
    "datetime": pa.string(),
    "number": pa.float64(),
    "integer": pa.int64(),
    "boolean": pa.bool_(),
}
_LONGEST_SHOWN: Final = 60  # characters of a cell in a message


def arrow_type(field: Field) -> pa.DataType:
    """Give the Arrow type of a column: float64, int64, bool, and string for text and times."""
    return _TYPES[field.type]


def violations(field: Field, values: NDArray[Any]) -> _Bools:
    """Mark the numbers that lie outside a column's range.

    Parameters
    ----------
    field : Field
        The column; a number or an integer.
    values : ndarray of float64 or int64, shape (n,)
        Its values. NaN stands for an absent cell and passes. [`field.unit`]

    Returns
    -------
    ndarray of bool, shape (n,)
        True where a value is infinite or outside the range.
    """
    bad = np.isinf(values) if values.dtype.kind == "f" else np.zeros(values.shape, dtype=np.bool_)
    if field.minimum is not None:
        bad |= values < field.minimum
    if field.exclusive_minimum is not None:
        bad |= values <= field.exclusive_minimum
    if field.maximum is not None:
        bad |= values > field.maximum
    if field.exclusive_maximum is not None:
        bad |= values >= field.exclusive_maximum
    return bad


def check_table(contract: Contract, table: pa.Table) -> list[str]:
    """Hold a table against its contract.

    Parameters
    ----------
    contract : Contract
        What the table must be.
    table : pyarrow.Table
        Its columns in the contract's units. A null, a NaN and an empty text are
        absent cells. Text may be dictionary-encoded.

    Returns
    -------
    list of str
        What is wrong, a sentence each with the count and the first row (from
        1); empty where nothing is. Uniqueness is judged within this table: a
        caller who checks slices answers for it across them.
    """
    problems = shape_problems(contract, table.column_names)
    sound = not problems
    for field in contract.fields:
        if table.column_names.count(field.name) != 1:
            continue
        column = table.column(field.name)
        if not _type_fits(field, column.type):
            problems.append(_wrong_type(field, column.type))
            sound = False
        elif field.text:
            problems.extend(_text_problems(field, _plain_text(column)))
        else:
            problems.extend(_number_problems(field, column))
    problems.extend(_repeats(contract, table))
    if sound:
        problems.extend(_cross_problems(contract, table))
    return problems


def shape_problems(contract: Contract, names: Iterable[str]) -> list[str]:
    """Hold the names of a table's columns against its contract.

    Parameters
    ----------
    contract : Contract
        What the table must be.
    names : iterable of str
        The columns that it has, in order.

    Returns
    -------
    list of str
        Columns that are missing, unknown, twice, or (where the table is
        published) out of order.
    """
    have = list(names)
    problems = [f"column {name}: missing" for name in contract.required_columns if name not in have]
    unknown = [name for name in have if name not in contract.columns]
    problems += [f"column {name}: not in the contract" for name in dict.fromkeys(unknown)]
    twice = [name for name in dict.fromkeys(have) if have.count(name) > 1]
    problems += [f"column {name}: there {have.count(name)} times" for name in twice]
    if not problems and contract.direction == "out" and tuple(have) != contract.columns:
        first = next(i for i, name in enumerate(have) if name != contract.columns[i])
        problems.append(
            f"column {have[first]}: stands where {contract.columns[first]} belongs, "
            f"place {first + 1}"
        )
    return problems


def _type_fits(field: Field, kind: pa.DataType) -> bool:
    if pa.types.is_dictionary(kind):
        kind = kind.value_type
    if field.text:
        return pa.types.is_string(kind) or pa.types.is_large_string(kind)
    return bool(kind == arrow_type(field))


def _wrong_type(field: Field, kind: pa.DataType) -> str:
    return f"column {field.name}: must be {arrow_type(field)}, not {kind}"


def _plain_text(column: _Column) -> _Column:
    return column.cast(pa.string()) if pa.types.is_dictionary(column.type) else column


def _text_problems(field: Field, column: _Column) -> Iterator[str]:
    # Most texts repeat from row to row: judge each distinct one, and the rows only on a fault.
    distinct = cast("pa.StringArray", column.unique())
    if any(bad.any() for bad, _ in _text_faults(field, distinct)):
        for bad, rule in _text_faults(field, column):
            yield from _bad_rows(field, column, bad, rule)
    if field.unique:
        absent = _mask(pc.equal(column, pa.scalar(""))).sum() + column.null_count
        absent_distinct = _mask(pc.equal(distinct, pa.scalar(""))).sum() + distinct.null_count
        count = int(len(column) - absent) - int(len(distinct) - absent_distinct)
        if count:
            yield f"column {field.name}: must be unique: {count} rows repeat another"


def _text_faults(field: Field, column: _Texts) -> Iterator[tuple[_Bools, str]]:
    filled = _mask(pc.greater(pc.binary_length(column), pa.scalar(0)))
    if field.required:
        yield ~filled, "is required and empty"
    if field.enum:
        known = _mask(pc.is_in(column, value_set=pa.array(field.enum, column.type)))
        yield filled & ~known, f"must be one of {', '.join(field.enum)}"
    if field.max_length is not None:
        long = _mask(pc.greater(pc.utf8_length(column), pa.scalar(field.max_length)))
        yield long, f"must have at most {field.max_length} characters"
    if field.whole_pattern:
        fits = _mask(pc.match_substring_regex(column, rf"\A(?:{field.whole_pattern})\z"))
        words = f"must match {field.pattern}" if field.pattern else "must be an ISO 8601 time"
        yield filled & ~fits, words


def _number_problems(field: Field, column: _Column) -> Iterator[str]:
    floats = pa.types.is_floating(column.type)
    if field.required:
        absent = _mask(pc.is_null(column, nan_is_null=floats))
        yield from _bad_rows(field, column, absent, "is required and empty")
    if not field.numeric:
        return
    ends = cast("dict[str, float | None]", pc.min_max(column).as_py())
    if not violations(field, np.array([end for end in ends.values() if end is not None])).any():
        return
    words = [field.range_text] if field.range_text else []
    words += ["finite"] if floats else []
    bad = violations(field, column.to_numpy())
    yield from _bad_rows(field, column, bad, f"must be {' and '.join(words)}")


def _bad_rows(field: Field, column: _Column, bad: _Bools, rule: str) -> Iterator[str]:
    count = int(bad.sum())
    if count:
        row = int(np.argmax(bad))
        seen = repr(column[row].as_py())[:_LONGEST_SHOWN]
        where = f"{count} of {len(column)} rows, first row {row + 1}"
        yield f"column {field.name}: {rule}: {where}: {seen}"


def _mask(values: object) -> _Bools:
    """Give an Arrow column of truths as an array, false where it is null."""
    filled = pc.call_function("coalesce", [values, pa.scalar(False)])
    return np.asarray(filled, dtype=np.bool_)


def _repeats(contract: Contract, table: pa.Table) -> list[str]:
    key = list(contract.primary_key)
    told = len(key) == 1 and contract.field(key[0]).unique
    if not key or told or any(table.column_names.count(name) != 1 for name in key):
        return []
    distinct = table.select(key).group_by(key).aggregate([]).num_rows
    if distinct == table.num_rows:
        return []
    count = table.num_rows - distinct
    return [f"columns {', '.join(key)}: must be unique together: {count} rows repeat another"]


def _cross_problems(contract: Contract, table: pa.Table) -> Iterator[str]:
    columns = _ArrowColumns(table)
    for name in contract.checks:
        check = CHECKS[name]
        bad = check.violations(columns)
        if bad.any():
            where = "" if check.whole else f", first row {int(np.argmax(bad)) + 1}"
            count = "" if check.whole else f" {int(bad.sum())} of {table.num_rows} rows break it"
            yield f"check {name}: {check.statement}{count}{where}"


class _ArrowColumns:
    """Columns of an Arrow table as the cross-column checks see them."""

    def __init__(self, table: pa.Table) -> None:
        self._table = table
        self.names = tuple(table.column_names)
        self.rows = table.num_rows

    def number(self, name: str) -> NDArray[np.float64]:
        if name not in self.names:
            return np.full(self.rows, np.nan)
        return np.asarray(self._table.column(name).to_numpy(), dtype=np.float64)

    def text(self, name: str) -> NDArray[Any]:
        if name not in self.names:
            return np.full(self.rows, "", dtype=object)
        column = _plain_text(self._table.column(name))
        filled = pc.call_function("coalesce", [column, pa.scalar("", column.type)])
        return np.asarray(filled.to_numpy(), dtype=object)
