"""Results read back: tables by their contracts, text as it was, digests on request.

Only `Results.frames` imports pandas; looking at one coupon or checking digests does not.
"""

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

import pyarrow as pa
import pyarrow.csv as pacsv
import pyarrow.parquet as pq

from coldwork import contracts
from coldwork.contracts.arrays import arrow_type
from coldwork.errors import UsageError
from coldwork.results.csv_text import unguarded
from coldwork.results.disk import shown

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "Results",
    "blocks",
    "document",
    "read_results",
    "read_table",
    "record_line",
    "sha256_of",
    "verify",
]

_BLOCK: Final = 8 << 20  # bytes of CSV at a time; no row is longer
_RECORDS: Final = "records.jsonl"


@dataclass(frozen=True)
class Results:
    """A batch's results.

    Attributes
    ----------
    folder : Path
        Where they stand.
    frames : mapping of str to pandas.DataFrame
        The tables by name (``coupons``, ``quantities``, ...), each read when it is first
        asked for. Types are those of the contracts: text stays text (``0012``, ``NA``),
        absent numbers are NaN.
    method, manifest : dict
        ``method.json`` and ``manifest.json``.
    """

    folder: Path
    frames: "Mapping[str, pd.DataFrame]"
    method: dict[str, Any]
    manifest: dict[str, Any]

    @cached_property
    def _places(self) -> dict[str, int]:
        names = (block.column("coupon_id").to_pylist() for block in blocks(self.folder, "coupons"))
        return {str(name): i for i, name in enumerate(name for some in names for name in some)}

    def record(self, coupon_id: str) -> dict[str, Any]:
        """Give a coupon's record.

        Raises
        ------
        UsageError
            If there is no such coupon, or the results have no records.
        """
        if coupon_id not in self._places:
            message = f"{shown(self.folder)}: no coupon is called {coupon_id!r}"
            raise UsageError(message)
        record: dict[str, Any] = json.loads(record_line(self.folder, self._places[coupon_id]))
        return record


def read_results(folder: Path) -> Results:
    """Read a batch's results.

    Parameters
    ----------
    folder : Path
        The batch's own folder, the one that holds ``manifest.json``.

    Returns
    -------
    Results
        Its tables, documents and records.

    Raises
    ------
    UsageError
        If the folder does not hold results.
    """
    folder = Path(folder)
    manifest = document(folder, "manifest")
    return Results(folder, _Frames(folder), document(folder, "method"), manifest)


def document(folder: Path, name: str) -> dict[str, Any]:
    """Read ``method.json`` or ``manifest.json`` of results.

    Raises
    ------
    UsageError
        If it is not there or is not JSON; the message names results nearby.
    """
    path = folder / f"{name}.json"
    try:
        content = json.loads(path.read_bytes())
    except (OSError, ValueError) as problem:
        nearby = sorted(p.parent.name for p in folder.glob("*/manifest.json"))
        hint = f" It holds the results {', '.join(nearby[:5])}: name one of them." if nearby else ""
        message = f"{shown(folder)}: no results are here ({path.name} cannot be read).{hint}"
        raise UsageError(message) from problem
    if not isinstance(content, dict):
        message = f"{shown(path)}: is no document of coldwork"
        raise UsageError(message)
    return content


def read_table(folder: Path, name: str) -> pa.Table:
    """Read a table whole.

    Parameters
    ----------
    folder : Path
        The results.
    name : str
        Of the table, such as ``coupons``.

    Returns
    -------
    pyarrow.Table
        Columns by contract; absent text is empty, absent numbers are null.

    Raises
    ------
    UsageError
        If the results do not have it.
    """
    return pa.Table.from_batches(list(blocks(folder, name)), _types(name))


def blocks(folder: Path, name: str) -> Iterator[pa.RecordBatch]:
    """Read a table a block of rows at a time, as `read_table` does.

    Raises
    ------
    UsageError
        If the results do not have it, or it does not follow its contract.
    """
    path = _table_path(folder, name)
    types = _types(name)
    try:
        if path.suffix == ".parquet":
            with pq.ParquetFile(path) as file:
                for batch in file.iter_batches():
                    yield _filled(batch, types)
            return
        with _open_csv(path, types) as reader:
            for batch in reader:
                yield _filled(batch, types, strip=True)
    except (pa.ArrowInvalid, pa.ArrowKeyError, KeyError) as problem:
        message = f"{shown(path)}: does not follow its contract: {problem}"
        raise UsageError(message) from problem


def record_line(folder: Path, row: int) -> bytes:
    """Give the stored line of the coupon in a row of ``coupons``, without its line end.

    Raises
    ------
    UsageError
        If the results have no such line.
    """
    path = folder / _RECORDS
    if path.is_file():
        with path.open("rb") as file:
            for line in islice(file, row, row + 1):
                return line.removesuffix(b"\n")
    message = f"{shown(path)}: holds no record of the coupon in row {row + 1}"
    raise UsageError(message)


def sha256_of(path: Path) -> str:
    """Digest of a file, in hexadecimal."""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def verify(folder: Path) -> list[str]:
    """Hold the files of results against their manifest.

    Parameters
    ----------
    folder : Path
        The results.

    Returns
    -------
    list of str
        What is wrong, a sentence each; empty where every file is as it was written.

    Raises
    ------
    UsageError
        If the folder does not hold results.
    """
    folder = Path(folder)
    outputs = document(folder, "manifest")["outputs"]
    problems = []
    for entry in outputs:
        path = folder / entry["path"]
        if not path.is_file():
            problems.append(f"{entry['path']}: is missing")
        elif sha256_of(path) != entry["sha256"]:
            problems.append(f"{entry['path']}: was changed after it was written")
    known = {"manifest.json", *(entry["path"] for entry in outputs)}
    files = (p.relative_to(folder).as_posix() for p in sorted(folder.rglob("*")) if p.is_file())
    return problems + [f"{name}: is not in the manifest" for name in files if name not in known]


class _Frames(Mapping[str, "pd.DataFrame"]):
    """Tables as frames, each read when it is first asked for."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._read: dict[str, pd.DataFrame] = {}
        names = (name.removeprefix("out/") for name in contracts.names() if name[:4] == "out/")
        self._names = [name for name in names if _paths(folder, name)]

    def __getitem__(self, name: str) -> "pd.DataFrame":
        if name not in self._names:
            raise KeyError(name)
        if name not in self._read:
            from coldwork.contracts.frames import frame  # pandas is slow to import

            table = read_table(self._folder, name)
            self._read[name] = frame(contracts.load(f"out/{name}"), table)
        return self._read[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self._names)

    def __len__(self) -> int:
        return len(self._names)


def _paths(folder: Path, name: str) -> list[Path]:
    """Files that hold a table, the one to read first."""
    return [p for p in (folder / f"{name}.parquet", folder / f"{name}.csv") if p.is_file()]


def _table_path(folder: Path, name: str) -> Path:
    paths = _paths(folder, name)
    if not paths:
        message = f"{shown(folder)}: these results have no table {name}"
        raise UsageError(message)
    return paths[0]


def _types(name: str) -> pa.Schema:
    fields = contracts.load(f"out/{name}").fields
    return pa.schema([pa.field(field.name, arrow_type(field)) for field in fields])


def _open_csv(path: Path, types: pa.Schema) -> pacsv.CSVStreamingReader:
    return pacsv.open_csv(
        path,
        read_options=pacsv.ReadOptions(block_size=_BLOCK),
        convert_options=pacsv.ConvertOptions(
            column_types=types,
            null_values=[""],
            true_values=["true"],
            false_values=["false"],
            strings_can_be_null=False,
        ),
    )


def _filled(batch: pa.RecordBatch, types: pa.Schema, *, strip: bool = False) -> pa.RecordBatch:
    """Columns of the contract in their types; those that a later version added are left out."""
    columns = []
    for field in types:
        column = batch.column(field.name).cast(field.type)
        if pa.types.is_string(field.type):
            column = column.fill_null("")
            column = unguarded(column) if strip else column
        columns.append(column)
    return pa.record_batch(columns, schema=types)
