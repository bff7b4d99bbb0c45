"""A table that is written slice by slice: checked, then as CSV, Parquet or both.

Slices are checked against the contract and formatted by the target's pool of
threads, and written in order by one thread a file, so that the caller goes on
computing. Only a few slices wait at a time.
"""

from collections.abc import Sequence
from concurrent.futures import Executor, Future
from contextlib import suppress
from dataclasses import dataclass
from functools import partial
from io import IOBase
from pathlib import Path
from typing import Any, Final, cast

import pyarrow as pa
import pyarrow.compute as pc
import pyarrow.parquet as pq

from coldwork import contracts
from coldwork.contracts.arrays import arrow_type, check_table
from coldwork.results.csv_text import csv_header, csv_lines
from coldwork.results.disk import HashedFile, Output
from coldwork.results.lanes import Lane

__all__ = ["FORMS", "TableWriter", "arrow_schema"]

FORMS: Final = ("csv", "parquet")
_ROWS_AT_ONCE: Final = 8192  # checked and formatted in one go: 9 MB of text for the widest table
_ROW_GROUP: Final = 16384  # rows; fixed, so that slices leave no mark on the bytes
_VIOLATIONS_SHOWN: Final = 5


class TableWriter:
    """Writes one published table; made by `Target.table`.

    Parameters
    ----------
    folder : Path
        Where its files go.
    name : str
        Of the table; its contract is ``out/<name>``.
    forms : sequence of str
        Of `FORMS`.
    pool : Executor
        Threads that check and format.

    Attributes
    ----------
    rows : int
        Rows given so far.

    Raises
    ------
    ResultsNotWritten
        If a file cannot be made.
    ValueError
        If a form is unknown, or there is none.
    """

    def __init__(self, folder: Path, name: str, forms: Sequence[str], pool: Executor) -> None:
        if not forms or set(forms) - set(FORMS):
            message = f"tables are written as {' or '.join(FORMS)}, not as {', '.join(forms)}"
            raise ValueError(message)
        self.rows = 0
        self._contract = contracts.load(f"out/{name}")
        self._pool = pool
        self._files: list[_CsvFile | _ParquetFile] = []
        self._lanes: list[Lane] = []
        self.closed = False
        self._with_csv = "csv" in forms
        try:
            for form in sorted(set(forms)):
                kind = _CsvFile if form == "csv" else _ParquetFile
                self._files.append(kind(folder / f"{name}.{form}", self._contract))
                self._lanes.append(Lane(f"write {name}.{form}"))
        except BaseException:
            self.abandon()
            raise

    @property
    def outputs(self) -> tuple[Output, ...]:
        """The finished files; empty while they are open."""
        return tuple(file.output for file in self._files if file.output is not None)

    def write(self, table: pa.Table) -> None:
        """Append the rows of a slice.

        Parameters
        ----------
        table : pyarrow.Table, n rows
            Exactly the columns of the contract, in its units. NaN is an absent value.

        Raises
        ------
        ResultsNotWritten
            If the file system did not take this slice or one before it.
        RuntimeError
            If this slice or one before it breaks the contract; it was not written.
        """
        for start in range(0, len(table), _ROWS_AT_ONCE):
            piece = table.slice(start, _ROWS_AT_ONCE)
            ready = self._pool.submit(_made_ready, piece, self._contract, with_csv=self._with_csv)
            for file, lane in zip(self._files, self._lanes, strict=True):
                lane.put(partial(file.add, ready))
            self.rows += len(piece)

    def close(self) -> None:
        """Wait until everything is on the disk; closing twice is harmless.

        Raises
        ------
        ResultsNotWritten
            If the file system did not take it.
        RuntimeError
            If a slice breaks the contract.
        """
        if self.closed:
            return
        for file, lane in zip(self._files, self._lanes, strict=True):
            lane.put(file.finish)
        for lane in self._lanes:
            lane.finish()
        self.closed = True

    def abandon(self) -> None:
        """Stop; what was written is lost."""
        self.closed = True
        for lane in self._lanes:
            lane.abandon()
        for file in self._files:
            file.abandon()


@dataclass(frozen=True)
class _Slice:
    """Rows that passed their contract, and the same as CSV where that is asked for."""

    table: pa.Table
    lines: memoryview | None


class _CsvFile:
    """A table's CSV file."""

    def __init__(self, path: Path, contract: contracts.Contract) -> None:
        self.output: Output | None = None
        self._rows = 0
        self._file = HashedFile(path)
        try:
            self._file.write(csv_header(contract.columns))
        except BaseException:
            self._file.abandon()
            raise

    def add(self, ready: Future[_Slice]) -> None:
        piece = ready.result()
        if piece.lines is not None:
            self._file.write(piece.lines)
        self._rows += len(piece.table)

    def finish(self) -> None:
        self._file.close()
        self.output = self._file.output(self._rows)

    def abandon(self) -> None:
        self._file.abandon()


class _ParquetFile:
    """A table's Parquet file, in row groups of one size."""

    def __init__(self, path: Path, contract: contracts.Contract) -> None:
        self.output: Output | None = None
        self._rows = 0
        self._waiting: list[pa.Table] = []
        self._schema = arrow_schema(contract)
        self._file = HashedFile(path)
        texts = [field.name for field in contract.fields if field.text]
        sink = pa.PythonFile(cast("IOBase", self._file), "w")
        try:
            self._writer = pq.ParquetWriter(
                sink,
                self._schema,
                compression="zstd",
                use_dictionary=cast("bool", texts),
                version="2.6",
            )
        except BaseException:
            self._file.abandon()
            raise

    def add(self, ready: Future[_Slice]) -> None:
        table = ready.result().table
        self._waiting.append(table)
        self._rows += len(table)
        if sum(map(len, self._waiting)) >= _ROW_GROUP:
            self._write(_ROW_GROUP)

    def finish(self) -> None:
        if self._waiting:
            self._write(_ROW_GROUP)
        self._writer.close()
        self._file.close()
        self.output = self._file.output(self._rows)

    def abandon(self) -> None:
        self._file.abandon()
        with suppress(Exception):
            self._writer.close()

    def _write(self, rows: int) -> None:
        waiting = pa.concat_tables(self._waiting)
        self._waiting = [waiting.slice(rows)] if len(waiting) > rows else []
        self._writer.write_table(waiting.slice(0, rows).combine_chunks(), row_group_size=rows)


def arrow_schema(contract: contracts.Contract) -> pa.Schema:
    """Give a published table's Arrow schema, with units and meanings as metadata.

    Parameters
    ----------
    contract : Contract
        Of the table.

    Returns
    -------
    pyarrow.Schema
        Each field carries ``title``, ``description``, ``unit`` and ``source`` where it
        has them; the schema carries ``contract``, ``contract_version``, ``title`` and
        ``description``.
    """
    fields = []
    for field in contract.fields:
        about = {
            "title": field.title,
            "description": field.description,
            "unit": field.unit,
            "source": field.source,
        }
        meaning = {key: text for key, text in about.items() if text is not None}
        fields.append(pa.field(field.name, arrow_type(field), not field.required, meaning))
    return pa.schema(
        fields,
        {
            "contract": contract.name,
            "contract_version": contract.version,
            "title": contract.title,
            "description": contract.description,
        },
    )


def _made_ready(table: pa.Table, contract: contracts.Contract, *, with_csv: bool) -> _Slice:
    """Blank NaN, hold the rows against the contract, and format them."""
    types = {field.name: arrow_type(field) for field in contract.fields}
    plain = pa.table(
        {name: _plain(table.column(name), types.get(name)) for name in table.column_names}
    )
    broken = check_table(contract, plain)
    if broken:
        more = (
            "" if len(broken) <= _VIOLATIONS_SHOWN else f"; {len(broken) - _VIOLATIONS_SHOWN} more"
        )
        message = (
            f"{contract.name} breaks its contract: {'; '.join(broken[:_VIOLATIONS_SHOWN])}{more}"
        )
        raise RuntimeError(message)
    return _Slice(plain.cast(arrow_schema(contract)), csv_lines(plain) if with_csv else None)


def _plain(column: "pa.ChunkedArray[Any]", wanted: pa.DataType | None) -> "pa.Array[Any]":
    """One array of a plain type, with nulls for NaN; a column of nothing takes the type wanted."""
    kind: pa.DataType = column.type
    if isinstance(kind, pa.DictionaryType):
        kind = kind.value_type
    if pa.types.is_large_string(kind):
        kind = pa.string()
    if pa.types.is_null(kind) and wanted is not None:
        kind = wanted
    chunks = [chunk.cast(kind) for chunk in column.chunks]
    array: pa.Array[Any] = pa.concat_arrays(chunks) if chunks else pa.array([], kind)
    if pa.types.is_float64(kind):
        nan = pc.is_nan(array)
        if pc.any(nan).as_py():
            array = pc.if_else(nan, pa.scalar(None, kind), array)
    return array
