"""Files that are hashed while they are written, and write errors told in one line."""

import errno
import hashlib
import os
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from coldwork.errors import ResultsNotWritten

__all__ = ["HashedFile", "Output", "shown", "sync_folder", "writing"]

_OTHER_FOLDER: Final = "or choose another folder with --into"
_CAUSES: Final = {
    errno.ENOSPC: ("the disk is full", f"Free some space {_OTHER_FOLDER}."),
    errno.EDQUOT: ("the disk quota is used up", f"Free some space {_OTHER_FOLDER}."),
    errno.EFBIG: ("a file may not grow that large here", f"Raise the limit {_OTHER_FOLDER}."),
    errno.EROFS: ("the file system is read-only", f"Make it writable {_OTHER_FOLDER}."),
    errno.EACCES: ("permission denied", f"Ask for the right to write there {_OTHER_FOLDER}."),
    errno.EPERM: ("permission denied", f"Ask for the right to write there {_OTHER_FOLDER}."),
    errno.ENOTDIR: (
        "a file stands where a folder should be",
        f"Move that file away {_OTHER_FOLDER}.",
    ),
    errno.EEXIST: (
        "a file stands where a folder should be",
        f"Move that file away {_OTHER_FOLDER}.",
    ),
    errno.ENOTEMPTY: (
        "another run's result came to stand there",
        f"Look at it, {_OTHER_FOLDER.removeprefix('or ')}, or replace it with a reason.",
    ),
    errno.ENAMETOOLONG: ("the path is too long", "Shorten the batch id or the folder's name."),
}


@dataclass(frozen=True)
class Output:
    """One file of the results.

    Attributes
    ----------
    path : str
        Relative to the results' folder, with ``/`` between its parts.
    sha256 : str
        Digest of its bytes, in hexadecimal.
    size : int
        Length. [B]
    rows : int or None
        Rows of a table or lines of records, the header aside; None for others.
    """

    path: str
    sha256: str
    size: int
    rows: int | None

    def entry(self) -> dict[str, str | int | None]:
        """Give its entry in the manifest."""
        return {"path": self.path, "sha256": self.sha256, "bytes": self.size, "rows": self.rows}


def shown(path: Path) -> str:
    """Write a path so that it stays on one line."""
    text = str(path)
    return text if text.isprintable() else repr(text)


@contextmanager
def writing(path: Path) -> Iterator[None]:
    """Turn any error of the file system inside the block into one clear line.

    Parameters
    ----------
    path : Path
        What the block writes; the message names it.

    Raises
    ------
    ResultsNotWritten
        In place of an OSError: the path, what is wrong with it, what to do.
    """
    try:
        yield
    except OSError as problem:
        what, mend = _CAUSES.get(
            problem.errno or 0,
            (problem.strerror or str(problem), f"Mend it {_OTHER_FOLDER}."),
        )
        message = f"{shown(path)}: results not written, {what}. {mend}"
        raise ResultsNotWritten(message.replace("\n", " ")) from problem


def sync_folder(folder: Path) -> None:
    """Make the entries of a folder safe against a power cut."""
    handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


class HashedFile:
    """A new file, hashed while it is written; it does until a file object is asked for.

    Parameters
    ----------
    path : Path
        Where it goes; the folder must exist and the file must not.

    Attributes
    ----------
    size : int
        Bytes written so far. [B]

    Raises
    ------
    ResultsNotWritten
        If the file cannot be made, written or closed.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        self.size = 0
        self.closed = True
        self._abandoned = False
        self._hash = hashlib.sha256()
        with writing(path):
            flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC
            self._handle = os.open(path, flags, 0o666)
        self.closed = False

    @property
    def sha256(self) -> str:
        """Digest of what was written so far, in hexadecimal."""
        return self._hash.hexdigest()

    def write(self, data: bytes | bytearray | memoryview) -> int:
        """Append `data`, all of it, and give its length in bytes.

        Raises
        ------
        ResultsNotWritten
            If the file system does not take it.
        """
        view = memoryview(data).cast("B")
        if self._abandoned:  # a library that winds up its file may still write to it
            return len(view)
        self._hash.update(view)
        done = 0
        with writing(self.path):
            while done < len(view):
                done += os.write(self._handle, view[done:])
        self.size += done
        return done

    def tell(self) -> int:
        """Give the place of the next byte."""
        return self.size

    def flush(self) -> None:
        """Do nothing: no bytes are held back."""

    def close(self) -> None:
        """Flush to the disk and close; closing twice is harmless.

        Raises
        ------
        ResultsNotWritten
            If the disk does not take it.
        """
        if self.closed:
            return
        self.closed = True
        with writing(self.path):
            try:
                os.fsync(self._handle)
            finally:
                os.close(self._handle)

    def output(self, rows: int | None = None) -> Output:
        """Describe the file as one that lies directly in the results' folder."""
        return Output(self.path.name, self.sha256, self.size, rows)

    def abandon(self) -> None:
        """Close without a care for what becomes of the file; later writes go nowhere."""
        self._abandoned = True
        if not self.closed:
            self.closed = True
            with suppress(OSError):
                os.close(self._handle)
