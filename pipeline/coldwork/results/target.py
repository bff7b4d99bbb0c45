"""The place where one batch's results go, whole or not at all.

Everything is written into a staging folder on the same file system, forced onto the
disk, and moved to ``<into>/<batch id>`` in one step. An existing result is never
overwritten: it stays, or, with a reason, moves whole to ``<into>/replaced/``.
"""

import fcntl
import hashlib
import os
from collections.abc import Iterator, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager, suppress
from itertools import count
from pathlib import Path
from typing import Final

from coldwork.errors import ResultsNotWritten
from coldwork.results.disk import HashedFile, Output, shown, sync_folder, writing
from coldwork.results.documents import dump
from coldwork.results.lines import LineWriter
from coldwork.results.staging import PREFIX, make_folder, staging
from coldwork.results.tables import TableWriter

__all__ = ["REPLACED", "Target", "open_target"]

REPLACED: Final = "replaced"
_MANIFEST: Final = "manifest.json"
_FORMATTERS: Final = 2  # threads that format; the caller computes meanwhile
_DIGITS: Final = 12  # of the old manifest's digest, in the name that the old result gets


@contextmanager
def open_target(
    into: Path, batch_id: str, *, replace: bool = False, reason: str | None = None
) -> Iterator["Target"]:
    """Open the place for a batch's results; nothing is seen there until `Target.commit`.

    Parameters
    ----------
    into : Path
        The folder of all results; made when it is missing.
    batch_id : str
        Name of the batch's own folder in it; one path component.
    replace : bool
        Whether an existing result may move to ``replaced/``.
    reason : str, optional
        Why; an existing result stays without one.

    Yields
    ------
    Target
        What the tables, records and documents are written through. When the block ends
        without `Target.commit`, in whatever way, all of it is removed.

    Raises
    ------
    ResultsNotWritten
        If a result exists that may not be replaced, or nothing can be written there.
    """
    path = into / batch_id
    why = (reason or "").strip() if replace else ""
    with writing(path):
        _refuse_name(path, batch_id)
        _refuse_existing(path, why)
    with staging(into) as holder:
        target = Target(path, holder, why)
        try:
            yield target
        finally:
            target.abandon()


class Target:
    """Results that are being written; made by `open_target`.

    Attributes
    ----------
    path : Path
        Where the results will stand after `commit`.
    scratch : Path
        A folder on the same file system for what is needed on the way only.
    """

    def __init__(self, path: Path, holder: Path, reason: str) -> None:
        self.path = path
        self.scratch = holder / "scratch"
        self._folder = holder / "results"
        self._reason = reason
        self._documents: list[Output] = []
        self._writers: list[TableWriter | LineWriter] = []
        self._pool = ThreadPoolExecutor(_FORMATTERS, thread_name_prefix="format")
        with writing(path):
            self._folder.mkdir()
            self.scratch.mkdir()

    @property
    def outputs(self) -> tuple[Output, ...]:
        """Every file that is written and closed, by path; the manifest aside."""
        tables = [output for writer in self._writers for output in writer.outputs]
        return tuple(sorted([*self._documents, *tables], key=lambda output: output.path))

    def table(self, name: str, tables: Sequence[str] = ("csv",)) -> TableWriter:
        """Open a table for writing, one slice at a time.

        Parameters
        ----------
        name : str
            Of the table, such as ``coupons``; its contract is ``out/<name>``.
        tables : sequence of str
            The forms it is written in, of ``csv`` and ``parquet``.

        Raises
        ------
        ResultsNotWritten
            If its files cannot be made.
        """
        writer = TableWriter(self._folder, name, tables, self._pool)
        self._writers.append(writer)
        return writer

    def lines(self, name: str) -> LineWriter:
        """Open a file of lines, such as ``records.jsonl``.

        Raises
        ------
        ResultsNotWritten
            If the file cannot be made.
        """
        writer = LineWriter(self._folder, name)
        self._writers.append(writer)
        return writer

    def write(self, name: str, data: bytes) -> Output:
        """Write one whole file.

        Parameters
        ----------
        name : str
            Relative path with ``/`` between its parts, such as ``plots/drift.svg``.
        data : bytes
            All of it.

        Raises
        ------
        ResultsNotWritten
            If it cannot be written.
        """
        path = self._folder / name
        with writing(path):
            path.parent.mkdir(parents=True, exist_ok=True)
        file = HashedFile(path)
        try:
            file.write(data)
            file.close()
        finally:
            file.abandon()
        output = Output(name, file.sha256, file.size, None)
        self._documents.append(output)
        return output

    def commit(self, manifest: Mapping[str, object]) -> Path:
        """Write the manifest last and move everything to its place.

        Parameters
        ----------
        manifest : mapping
            The manifest's content but for two entries that are added here:
            ``outputs``, and ``replaced`` with the old manifest's digest, the reason
            and the place that the old result moves to, or None.

        Returns
        -------
        Path
            Where the results stand.

        Raises
        ------
        ResultsNotWritten
            If another run was quicker, or the file system does not take it; an old
            result is then where it was.
        RuntimeError
            If a table or file of lines is still open.
        """
        if not all(writer.closed for writer in self._writers):
            message = "a table is still open at the commit"
            raise RuntimeError(message)
        with writing(self.path), _turn(self.path.parent):
            _refuse_existing(self.path, self._reason)
            old = _Old.found(self.path)
            document = {
                **manifest,
                "outputs": [output.entry() for output in self.outputs],
                "replaced": None if old is None else old.entry(self._reason),
            }
            self.write(_MANIFEST, dump("manifest", document))
            for folder, _, _ in os.walk(self._folder):
                sync_folder(Path(folder))
            self._publish(old)
        return self.path

    def abandon(self) -> None:
        """Stop every writer; what they hold is lost."""
        for writer in self._writers:
            writer.abandon()
        self._pool.shutdown(cancel_futures=True)

    def _publish(self, old: "_Old | None") -> None:
        if old is None:
            # A folder with something in it is never renamed over: another run's result is safe.
            self._folder.rename(self.path)
        else:
            made: list[Path] = []
            make_folder(old.kept.parent, made)
            try:
                self.path.rename(old.kept)
                self._folder.rename(self.path)
            except BaseException:
                if not os.path.lexists(self.path):
                    old.kept.rename(self.path)
                for folder in made:
                    with suppress(OSError):
                        folder.rmdir()
                raise
            sync_folder(old.kept.parent)
        sync_folder(self.path.parent)


class _Old:
    """A result that stands where the new one goes, and where it moves to."""

    def __init__(self, path: Path, digest: str) -> None:
        name = f"{path.name}-{digest[:_DIGITS]}"
        home = path.parent / REPLACED
        names = (name if n == 1 else f"{name}-{n}" for n in count(1))
        self.digest = digest
        self.kept = next(home / each for each in names if not os.path.lexists(home / each))

    @classmethod
    def found(cls, path: Path) -> "_Old | None":
        if not os.path.lexists(path):
            return None
        return cls(path, hashlib.sha256((path / _MANIFEST).read_bytes()).hexdigest())

    def entry(self, reason: str) -> dict[str, str]:
        moved_to = f"{REPLACED}/{self.kept.name}"
        return {"digest": self.digest, "reason": reason, "moved_to": moved_to}


def _refuse_name(path: Path, batch_id: str) -> None:
    taken = batch_id == REPLACED or batch_id.startswith(PREFIX)
    if taken or batch_id in {"", ".", ".."} or "/" in batch_id or "\0" in batch_id:
        message = (
            f"{shown(path)}: results not written, the batch id cannot be a folder's name here. "
            "Give the batch another id."
        )
        raise ResultsNotWritten(message)


def _refuse_existing(path: Path, reason: str) -> None:
    """Refuse a path that is taken; one too long for the file system is an OSError."""
    try:
        path.lstat()
    except FileNotFoundError:
        return
    if not reason:
        what = "a result of that name exists"
        mend = "Choose another folder with --into, or say --replace and --reason TEXT to keep both."
    elif (path / _MANIFEST).is_file():
        return
    else:
        what = f"what stands there is no result of coldwork (it has no {_MANIFEST})"
        mend = "Move it away yourself, or choose another folder with --into."
    message = f"{shown(path)}: results not written, {what}. {mend}"
    raise ResultsNotWritten(message)


@contextmanager
def _turn(folder: Path) -> Iterator[None]:
    """Let one run at a time move results in `folder`, where the file system can do that."""
    handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
    try:
        with suppress(OSError):  # without it the renames still never overwrite a result
            fcntl.flock(handle, fcntl.LOCK_EX)
        yield
    finally:
        os.close(handle)
