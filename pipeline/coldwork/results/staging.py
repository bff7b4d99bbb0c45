"""A folder beside the target in which results grow until they are whole.

Each staging is a folder ``.coldwork-partial-<random>`` and a lock file of the same
name with ``.lock`` behind it. The process that fills the folder holds the lock
(``flock``), and the system lets go of it however that process ends. So a lock that
can be had belongs to a run that died, and its staging may go; one that cannot be
had lives and stays. The lock exists before the folder and outlives it.
"""

import fcntl
import os
import secrets
import shutil
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Final

from coldwork.results.disk import writing

__all__ = ["PREFIX", "make_folder", "staging", "sweep"]

PREFIX: Final = ".coldwork-partial-"
_TRIES: Final = 10


def make_folder(folder: Path, made: list[Path]) -> None:
    """Make a folder and those above it; add the ones that were made to `made`, outermost first."""
    missing = [f for f in (folder, *folder.parents) if not os.path.lexists(f)]
    for each in reversed(missing):
        with suppress(FileExistsError):  # another run was quicker
            each.mkdir()
            made.append(each)
    if not folder.is_dir():
        folder.mkdir()  # says what is in the way


@contextmanager
def staging(into: Path) -> Iterator[Path]:
    """Keep a new empty folder in `into` for as long as the block runs.

    Parameters
    ----------
    into : Path
        Where the results will go. Made when it is missing, and taken away again when
        it is left empty.

    Yields
    ------
    Path
        The folder. Whatever is left in it at the end is removed.

    Raises
    ------
    ResultsNotWritten
        If it cannot be made.
    """
    made: list[Path] = []
    try:
        with writing(into):
            make_folder(into, made)
            sweep(into)
            folder, handle = _locked_name(into)
        try:
            with writing(folder):
                folder.mkdir()
            yield folder
        finally:
            _remove(folder, handle)
    finally:
        for each in reversed(made):
            with suppress(OSError):  # it holds results by now
                each.rmdir()


def sweep(into: Path) -> int:
    """Remove the stagings of runs that died and give their number.

    One whose lock is held is alive and stays, and so does one that may not be
    opened or removed.
    """
    removed = 0
    for lock in sorted(into.glob(f"{PREFIX}*.lock")):
        handle = _take(lock, os.O_RDWR)
        if handle is not None:
            removed += _remove(lock.with_suffix(""), handle)
    return removed


def _locked_name(into: Path) -> tuple[Path, int]:
    for _ in range(_TRIES):
        folder = into / f"{PREFIX}{secrets.token_hex(8)}"
        # A sweep may hold the lock between its making and its locking: then another name.
        handle = _take(_lock_of(folder), os.O_RDWR | os.O_CREAT | os.O_EXCL, quiet=False)
        if handle is not None:
            return folder, handle
    message = "no lock file could be had"
    raise OSError(message)


def _lock_of(folder: Path) -> Path:
    return folder.with_name(folder.name + ".lock")


def _take(lock: Path, flags: int, *, quiet: bool = True) -> int | None:
    """Open and lock a lock file; None where another holds it or removes it meanwhile."""
    try:
        handle = os.open(lock, flags | os.O_CLOEXEC, 0o666)
    except OSError:
        if quiet:
            return None
        raise
    taken = False
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        taken = os.path.samestat(os.fstat(handle), lock.stat())
    except (BlockingIOError, FileNotFoundError):
        taken = False
    except OSError:  # a file system without locks
        if not quiet:
            raise
    finally:
        if not taken:
            os.close(handle)
    return handle if taken else None


def _remove(folder: Path, handle: int) -> bool:
    try:
        shutil.rmtree(folder, ignore_errors=True)
        gone = not os.path.lexists(folder)
        if gone:
            with suppress(OSError):
                _lock_of(folder).unlink()
        return gone
    finally:
        os.close(handle)
