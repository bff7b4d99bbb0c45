"""A new folder for tables that are made of results or beside them, whole or not at all."""

import os
from collections.abc import Iterator, Mapping
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from pathlib import Path
from typing import Final

import pyarrow as pa

from coldwork.errors import ResultsNotWritten
from coldwork.results.disk import HashedFile, Output, shown, sync_folder, writing
from coldwork.results.documents import dump
from coldwork.results.staging import staging
from coldwork.results.tables import TableWriter

__all__ = ["Apart", "open_apart"]

_ACCOUNT: Final = "account"
_FORMATTERS: Final = 2  # threads that format; the caller computes meanwhile


@contextmanager
def open_apart(folder: Path) -> Iterator["Apart"]:
    """Open a folder that does not exist yet; nothing is seen there until `Apart.commit`.

    Parameters
    ----------
    folder : Path
        The folder; what is there already is never touched.

    Yields
    ------
    Apart
        What tables and files are written through.

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
    with (
        staging(folder.parent) as holder,
        ThreadPoolExecutor(_FORMATTERS, thread_name_prefix="format") as pool,
    ):
        apart = Apart(folder, holder / "results", pool)
        try:
            yield apart
        finally:
            apart.abandon()


class Apart:
    """A folder that is being written; made by `open_apart`.

    Attributes
    ----------
    folder : Path
        Where it will stand after `commit`.
    """

    def __init__(self, folder: Path, place: Path, pool: ThreadPoolExecutor) -> None:
        self.folder = folder
        self._place = place
        self._pool = pool
        self._files: list[Output] = []
        self._tables: dict[str, TableWriter] = {}
        with writing(folder):
            place.mkdir()

    def add(self, name: str, table: pa.Table) -> None:
        """Append rows to a table; each slice is held against its contract ``out/<name>``."""
        if name not in self._tables:
            self._tables[name] = TableWriter(self._place, name, ("csv",), self._pool)
        self._tables[name].write(table)

    def write(self, name: str, data: bytes) -> None:
        """Write one whole file, under a path with ``/`` between its parts."""
        path = self._place / name
        with writing(path):
            path.parent.mkdir(parents=True, exist_ok=True)
        file = HashedFile(path)
        try:
            file.write(data)
            file.close()
        finally:
            file.abandon()
        self._files.append(Output(name, file.sha256, file.size, None))

    def commit(self, account: Mapping[str, object]) -> Path:
        """Write the account, with ``outputs`` added, and move everything to its place.

        Returns
        -------
        Path
            The folder.

        Raises
        ------
        ResultsNotWritten
            If the file system does not take it.
        """
        for writer in self._tables.values():
            writer.close()
        outputs = [*self._files, *(x for w in self._tables.values() for x in w.outputs)]
        entries = [each.entry() for each in sorted(outputs, key=lambda each: each.path)]
        self.write(f"{_ACCOUNT}.json", dump(_ACCOUNT, {**account, "outputs": entries}))
        with writing(self.folder):
            for each, _, _ in os.walk(self._place):
                sync_folder(Path(each))
            self._place.rename(self.folder)
            sync_folder(self.folder.parent)
        return self.folder

    def abandon(self) -> None:
        """Stop every writer; what they hold is lost unless it was committed."""
        for writer in self._tables.values():
            writer.abandon()
