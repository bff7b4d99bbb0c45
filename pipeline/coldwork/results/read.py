"""Results read back: tables by their contracts, text as it was, and only what was written.

Every table and document is held against its digest in the manifest before it is read, and
every record against its digest in ``coupons``.

Only `Results.frames` imports pandas; looking at one coupon or checking digests does not.
"""

import hashlib
import json
from collections.abc import Iterator, Mapping, Sequence
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
    "genuine_table",
    "read_results",
    "read_table",
    "sealed_record",
    "sha256_of",
    "verify",
]

_BLOCK: Final = 8 << 20  # bytes of CSV at a time; no row is longer
_RECORDS: Final = "records.jsonl"
_MANIFEST: Final = "manifest.json"
_UNKNOWN: Final = "is not in the manifest"
_MEND: Final = "Fetch the results from where they are kept, or process the batch again."


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
    def _seals(self) -> dict[str, tuple[int, str]]:
        coupons = read_table(self.folder, "coupons")
        names, seals = (coupons.column(x).to_pylist() for x in ("coupon_id", "record_sha256"))
        pairs = zip(names, seals, strict=True)
        return {str(name): (row, str(seal)) for row, (name, seal) in enumerate(pairs)}

    def record(self, coupon_id: str) -> dict[str, Any]:
        """Give a coupon's record.

        Raises
        ------
        UsageError
            If there is no such coupon, the results have no records, or this one was changed.
        """
        if coupon_id not in self._seals:
            message = f"{shown(self.folder)}: no coupon is called {coupon_id!r}"
            raise UsageError(message)
        row, seal = self._seals[coupon_id]
        return sealed_record(self.folder, row, coupon_id, seal)


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
        If the folder does not hold results. Asking for a table or a record that was changed
        after it was written is refused too.
    """
    folder = Path(folder)
    manifest = document(folder, "manifest")
    return Results(folder, _Frames(folder), document(folder, "method"), manifest)


def document(folder: Path, name: str) -> dict[str, Any]:
    """Read ``method.json`` or ``manifest.json`` of results.

    Raises
    ------
    UsageError
        If it is not there or is not JSON, where the message names results nearby; or if
        ``method.json`` was changed after it was written.
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
    if path.name != _MANIFEST:
        _refuse_changed(folder, [path])
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
        If the results do not have it, or it was changed after it was written.
    """
    return pa.Table.from_batches(list(blocks(folder, name)), _types(name))


def blocks(folder: Path, name: str) -> Iterator[pa.RecordBatch]:
    """Read a table a block of rows at a time, as `read_table` does.

    Raises
    ------
    UsageError
        If the results do not have it, it was changed after it was written, or it does not
        follow its contract.
    """
    path = genuine_table(folder, name)
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


def genuine_table(folder: Path, name: str) -> Path:
    """Give the file to read a table from, all its forms being as they were written.

    Parameters
    ----------
    folder : Path
        The results.
    name : str
        Of the table, such as ``coupons``.

    Raises
    ------
    UsageError
        If the results do not have it, or one of its files is not the one in the manifest.
    """
    paths = _paths(folder, name)
    if not paths:
        message = f"{shown(folder)}: these results have no table {name}"
        raise UsageError(message)
    if (folder / _MANIFEST).is_file():  # folders of compare and anneal have none
        _refuse_changed(folder, paths)
    return paths[0]


def sealed_record(folder: Path, row: int, coupon_id: str, seal: str) -> dict[str, Any]:
    """Give the record of the coupon in a row of ``coupons``.

    Parameters
    ----------
    folder : Path
        The results.
    row : int
        Place of the coupon.
    coupon_id : str
        Its name.
    seal : str
        SHA-256 of its record, as ``coupons`` has it.

    Raises
    ------
    UsageError
        If the results have no such record, or it is not the one that `seal` was taken of.
    """
    line = _record_line(folder, row)
    if hashlib.sha256(line).hexdigest() != seal:
        message = (
            f"{shown(folder / _RECORDS)}: the record of coupon {coupon_id!r} is not the one that "
            f"coupons was written with: it was changed after it was written. {_MEND}"
        )
        raise UsageError(message)
    record: dict[str, Any] = json.loads(line)
    return record


def _record_line(folder: Path, row: int) -> bytes:
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
        fault = _fault(folder / entry["path"], entry["sha256"])
        if fault:
            problems.append(f"{entry['path']}: {fault}")
    known = {"manifest.json", *(entry["path"] for entry in outputs)}
    files = (p.relative_to(folder).as_posix() for p in sorted(folder.rglob("*")) if p.is_file())
    return problems + [f"{name}: {_UNKNOWN}" for name in files if name not in known]


def _fault(path: Path, sha256: str | None) -> str:
    """Say what is wrong with a file that has a digest in the manifest; empty if nothing is."""
    if not path.is_file():
        return "is missing"
    if sha256 is None:
        return _UNKNOWN
    return "" if sha256_of(path) == sha256 else "was changed after it was written"


def _refuse_changed(folder: Path, paths: Sequence[Path]) -> None:
    digests = {x["path"]: x["sha256"] for x in document(folder, "manifest").get("outputs", ())}
    for path in paths:
        fault = _fault(path, digests.get(path.name))
        if fault:
            message = f"{shown(path)}: {fault}, so nothing is told from it. {_MEND}"
            raise UsageError(message)


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
