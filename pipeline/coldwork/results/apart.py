"""A new folder for tables that are made of results or beside them, whole or not at all."""

import os
from collections.abc import Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Final

import pyarrow as pa

from coldwork.errors import ResultsNotWritten
from coldwork.results.disk import HashedFile, Output, shown, sync_folder, writing
from coldwork.results.documents import dump
from coldwork.results.staging import staging
from coldwork.results.tables import TableWriter

__all__ = ["write_apart"]

_ACCOUNT: Final = "account"


def write_apart(
    folder: Path,
    tables: Mapping[str, pa.Table],
    files: Sequence[tuple[str, bytes]],
    account: Mapping[str, object],
) -> Path:
    """Write tables, files and an account into a folder that does not exist yet.

    Parameters
    ----------
    folder : Path
        The folder; what is there already is never touched.
    tables : mapping of str to pyarrow.Table
        By name; each is held against its contract ``out/<name>``.
    files : sequence of (str, bytes)
        Relative path with ``/`` between its parts, and content.
    account : mapping
        Content of ``account.json`` but for ``outputs``.

    Returns
    -------
    Path
        The folder.

    Raises
    ------
    ResultsNotWritten
        If it exists or cannot be written; nothing is left behind.
    """
    folder = folder.parent.resolve() / folder.name
    if os.path.lexists(folder):
        message = (
            f"{shown(folder)}: results not written, something of that name is there. "
            "Choose another folder with --into."
        )
        raise ResultsNotWritten(message)
    with staging(folder.parent) as holder:
        place = holder / "results"
        with writing(folder):
            place.mkdir()
        outputs = [*_tables(place, tables), *(_file(place, *each) for each in files)]
        entries = [each.entry() for each in sorted(outputs, key=lambda each: each.path)]
        _file(place, f"{_ACCOUNT}.json", dump(_ACCOUNT, {**account, "outputs": entries}))
        with writing(folder):
            for each, _, _ in os.walk(place):
                sync_folder(Path(each))
            place.rename(folder)
            sync_folder(folder.parent)
    return folder


def _tables(place: Path, tables: Mapping[str, pa.Table]) -> list[Output]:
    outputs: list[Output] = []
    with ThreadPoolExecutor(1, thread_name_prefix="format") as pool:
        for name, table in tables.items():
            writer = TableWriter(place, name, ("csv",), pool)
            try:
                writer.write(table)
                writer.close()
            except BaseException:
                writer.abandon()
                raise
            outputs += writer.outputs
    return outputs


def _file(place: Path, name: str, data: bytes) -> Output:
    path = place / name
    with writing(path):
        path.parent.mkdir(parents=True, exist_ok=True)
    file = HashedFile(path)
    try:
        file.write(data)
        file.close()
    finally:
        file.abandon()
    return Output(name, file.sha256, file.size, None)
