"""A contract held against a pandas frame by pandera: the declared second gate.

Built from the same `Contract` as the array checks, out of pandera's own checks,
so that one gate watches the other. Nothing is coerced: a frame of the wrong
type fails, and parsing has been done cell by cell before. Only this module
imports pandas and pandera.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from functools import cache
from typing import Any, Final

import numpy as np
import pandas as pd
import pandera.pandas as pandera
import pyarrow as pa
from numpy.typing import NDArray
from pandas.api.extensions import ExtensionDtype
from pandera.errors import SchemaErrors

from coldwork.contracts.arrays import shape_problems
from coldwork.contracts.checks import CHECKS, Check
from coldwork.contracts.contract import Contract, Field

__all__ = ["check", "frame", "schema"]

_MOST_PROBLEMS: Final = 50
_LONGEST_SHOWN: Final = 60  # characters of a cell in a message
_DTYPES: Final = {
    "string": "str",
    "datetime": "str",
    "number": "float64",
    "boolean": "boolean",
}


def frame(contract: Contract, table: pa.Table) -> pd.DataFrame:
    """Make a frame of a table, with the types that `schema` asks for.

    Parameters
    ----------
    contract : Contract
        What the table is.
    table : pyarrow.Table
        Its columns.

    Returns
    -------
    pandas.DataFrame
        Text as pandas' `str`, numbers as float64 with NaN where absent, counts as
        int64 where they are required and as nullable Int64 where not. An empty
        text stays one. A column of another type is left as Arrow gives it.
    """
    names = table.column_names
    series = {i: _series(contract, name, table.column(i)) for i, name in enumerate(names)}
    made = pd.DataFrame(series, index=pd.RangeIndex(table.num_rows))
    made.columns = pd.Index(names, dtype="str")  # by place until here: a name may stand twice
    return made


@cache
def schema(contract: Contract) -> pandera.DataFrameSchema:
    """Build the pandera schema of a contract.

    Parameters
    ----------
    contract : Contract
        What the frame must be.

    Returns
    -------
    pandera.DataFrameSchema
        Strict, without coercion; ordered where the table is published. The same
        object each time. pandera lets an empty frame pass every check of rows,
        so ask `check` rather than the schema.
    """
    together = list(contract.primary_key) if len(contract.primary_key) > 1 else None
    return pandera.DataFrameSchema(
        columns={field.name: _column(contract, field) for field in contract.fields},
        checks=[_cross(CHECKS[name], contract) for name in contract.checks],
        strict=True,
        ordered=contract.direction == "out",
        coerce=False,
        unique=together,
        name=contract.name,
        title=contract.title,
        description=contract.description,
        metadata={"version": contract.version},
    )


def check(contract: Contract, data: pd.DataFrame) -> list[str]:
    """Hold a frame against its contract, and tell everything that is wrong.

    Parameters
    ----------
    contract : Contract
        What the frame must be.
    data : pandas.DataFrame
        The frame, in the contract's units.

    Returns
    -------
    list of str
        What is wrong, at most 50 sentences; empty where nothing is.
    """
    if not data.columns.is_unique:
        return shape_problems(contract, data.columns)
    try:
        schema(contract).validate(data.reset_index(drop=True), lazy=True)
    except SchemaErrors as found:
        return _report(found.failure_cases, len(data))
    return []


def _dtype(contract: Contract, field: Field) -> str:
    if field.type == "integer":
        certain = field.required or field.name in contract.primary_key
        return "int64" if certain else "Int64"
    return _DTYPES[field.type]


def _series(contract: Contract, name: str, column: pa.ChunkedArray[Any]) -> pd.Series[Any]:
    if pa.types.is_dictionary(column.type):
        column = column.cast(column.type.value_type)
    if name in contract.columns and pa.types.is_integer(column.type):
        wanted = _dtype(contract, contract.field(name))
        if wanted == "Int64" or column.null_count:
            return column.to_pandas(types_mapper=_nullable)
    if pa.types.is_boolean(column.type):
        return column.to_pandas(types_mapper=_nullable)
    return column.to_pandas()


def _nullable(kind: pa.DataType) -> ExtensionDtype | None:
    return pd.BooleanDtype() if pa.types.is_boolean(kind) else pd.Int64Dtype()


def _column(contract: Contract, field: Field) -> pandera.Column:
    return pandera.Column(
        dtype=_dtype(contract, field),
        checks=list(_number_checks(field) if field.numeric else _text_checks(field)),
        nullable=not field.required,
        unique=field.unique,
        required=field.name in contract.required_columns,
        title=field.title,
        description=field.description,
        metadata={"unit": field.unit, "source": field.source},
    )


def _number_checks(field: Field) -> Iterator[pandera.Check]:
    if field.type == "number":
        yield pandera.Check(_finite, name="finite", error="must be finite")
    if field.minimum is not None:
        yield pandera.Check.greater_than_or_equal_to(field.minimum)
    if field.exclusive_minimum is not None:
        yield pandera.Check.greater_than(field.exclusive_minimum)
    if field.maximum is not None:
        yield pandera.Check.less_than_or_equal_to(field.maximum)
    if field.exclusive_maximum is not None:
        yield pandera.Check.less_than(field.exclusive_maximum)


def _text_checks(field: Field) -> Iterator[pandera.Check]:
    # An empty text is an absent cell: only `required` may object to it.
    if field.required and field.text:
        yield pandera.Check.str_length(min_value=1)
    if field.enum:
        yield pandera.Check.isin([*field.enum, ""])
    if field.max_length is not None:
        yield pandera.Check.str_length(max_value=field.max_length)
    if field.whole_pattern:
        yield pandera.Check.str_matches(re.compile(rf"(?:(?:{field.whole_pattern})?)\Z"))


def _finite(values: pd.Series[float]) -> pd.Series[bool]:
    return ~values.isin([np.inf, -np.inf])


def _cross(named: Check, contract: Contract) -> pandera.Check:
    def holds(data: pd.DataFrame) -> NDArray[np.bool_] | pd.Series[bool] | bool:
        columns = _FrameColumns(contract, data)
        good = ~named.violations(columns)
        return bool(good[0]) if named.whole else pd.Series(good, index=data.index)

    keep: Callable[[pd.DataFrame], Any] = holds
    return pandera.Check(keep, name=named.id, error=named.statement, ignore_na=False)


def _report(failures: pd.DataFrame, rows: int) -> list[str]:
    statements = {check.statement: f"check {check.id}" for check in CHECKS.values()}
    problems = []
    # A cross-column check fails once for each column of a row: it is told once.
    where = failures["check"].map(statements)
    where = where.where(where.notna(), "column " + failures["column"].fillna("").astype("str"))
    for (place, rule), group in failures.groupby([where, "check"], sort=False):
        indices = group["index"].dropna().unique()
        first = f", first row {int(indices.min()) + 1}" if len(indices) else ""
        count = f": {len(indices)} of {rows} rows" if len(indices) else ""
        case = "" if rule in statements else f": {group['failure_case'].iloc[0]}"[:_LONGEST_SHOWN]
        problems.append(f"{place}: {rule}{count}{first}{case}")
    if len(problems) > _MOST_PROBLEMS:
        more = len(problems) - _MOST_PROBLEMS
        problems = [*problems[:_MOST_PROBLEMS], f"and {more} more"]
    return problems


class _FrameColumns:
    """Columns of a frame as the cross-column checks see them."""

    def __init__(self, contract: Contract, data: pd.DataFrame) -> None:
        self._data = data
        self.names = tuple(name for name in data.columns if name in contract.columns)
        self.rows = len(data)

    def number(self, name: str) -> NDArray[np.float64]:
        if name not in self.names:
            return np.full(self.rows, np.nan)
        column: pd.Series[float] = self._data[name]
        return np.asarray(column.to_numpy(dtype=np.float64, na_value=np.nan))

    def text(self, name: str) -> NDArray[Any]:
        if name not in self.names:
            return np.full(self.rows, "", dtype=object)
        return self._data[name].fillna("").to_numpy(dtype=object)
