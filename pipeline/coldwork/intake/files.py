"""Files of a batch: read once from front to back, digested, and cut into whole lines."""

import os
import stat
from collections.abc import Iterator
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import Final, NamedTuple

from coldwork.contracts import Contract
from coldwork.errors import Cause

__all__ = ["BLOCK_BYTES", "LONGEST_LINE", "LineReader", "Lines", "SourceFile", "TableFiles"]

BLOCK_BYTES: Final = 2 << 20  # byte; large enough for the parser's stride, small enough for a cache
LONGEST_LINE: Final = 64 << 20  # byte
_BOM: Final = b"\xef\xbb\xbf"
_WIDE_BOMS: Final = (b"\xff\xfe", b"\xfe\xff")  # UTF-16


@dataclass(frozen=True)
class TableFiles:
    """The files of a batch that together hold one table.

    Attributes
    ----------
    contract : Contract
        The table's contract.
    folder : Path
        The batch's folder; files are named by their paths inside it.
    paths : tuple of Path
        The files, in order.
    """

    contract: Contract
    folder: Path
    paths: tuple[Path, ...]

    @property
    def names(self) -> tuple[str, ...]:
        """Path of each file inside the batch, with forward slashes."""
        return tuple(_name(path, self.folder) for path in self.paths)


@dataclass(frozen=True)
class SourceFile:
    """What was read of one file; `rows_read` is `rows_used` and `rows_set_aside` together.

    Attributes
    ----------
    path : str
        Path inside the batch.
    table : str
        The table that it holds, such as ``indents``.
    sha256 : str
        Digest of the bytes that were read.
    bytes : int
        How many those were. [byte]
    rows_read, rows_used, rows_set_aside : int
        Rows apart from the header and blank lines.
    """

    path: str
    table: str
    sha256: str
    bytes: int
    rows_read: int
    rows_used: int
    rows_set_aside: int


class Lines(NamedTuple):
    """Some whole lines of a file, each ended by a line feed but for a last one without end.

    Attributes
    ----------
    data : bytes
        UTF-8 without NUL.
    first : int
        Number of the first line, from 1.
    lines : int
        How many they are.
    """

    data: bytes
    first: int
    lines: int


class LineReader:
    """Whole lines of one file, a block at a time; what is wrong with the bytes; their digest.

    Parameters
    ----------
    path : Path
        The file.
    name : str
        What messages call it.
    block_bytes : int
        How much is read at once; a longer line makes a longer block. [byte]

    Attributes
    ----------
    causes : list of Cause
        Why the file cannot be used, as far as it has been read. From the first
        cause on no more lines are given, but the reading goes on to find the rest.
    sha256 : str
        Digest of the bytes that were read, once the end was reached.
    size : int
        How many those were. [byte]
    """

    def __init__(self, path: Path, name: str, block_bytes: int = BLOCK_BYTES) -> None:
        self.path = path
        self.name = name
        self.block_bytes = block_bytes
        self.causes: list[Cause] = []
        self.sha256 = ""
        self.size = 0

    def __iter__(self) -> Iterator[Lines]:
        """Read the file once from front to back."""
        try:
            before = self.path.stat()
            if not stat.S_ISREG(before.st_mode):
                self._refuse("is no file", "A table is a file.", "Name a CSV file in [files].")
                return
            yield from self._sound_lines()
            self._hold_against(before)
        except FileNotFoundError:
            self._refuse("does not exist", "The sheet names it.", "Add it or mend [files].")
        except OSError as error:
            what = f"cannot be read ({error.strerror or error})"
            self._refuse(what, "Every table must be readable.", "Mend the file or its permissions.")

    def _sound_lines(self) -> Iterator[Lines]:
        line, offset = 1, 0
        for data in self._whole_lines():
            text = data
            if offset == 0:
                if data.startswith(_WIDE_BOMS):
                    what = "is not UTF-8 at byte 0 (line 1): it begins like UTF-16"
                    self._refuse(what, "Tables are UTF-8.", "Save it as CSV UTF-8.")
                    return
                text = data.removeprefix(_BOM)
            self._check(text, offset + len(data) - len(text), line)
            offset += len(data)
            text = _with_line_feeds(text)
            count = text.count(b"\n") + (not text.endswith(b"\n"))
            if text and not self.causes:
                yield Lines(text, line, count)
            line += count

    def _whole_lines(self) -> Iterator[bytes]:
        digest = sha256()
        held: list[bytes] = []
        length = 0
        with self.path.open("rb") as file:
            while block := file.read(self.block_bytes):
                digest.update(block)
                self.size += len(block)
                cut = max(block.rfind(b"\n"), block.rfind(b"\r", 0, len(block) - 1)) + 1
                if cut:
                    yield b"".join((*held, block[:cut]))
                    held, length = [block[cut:]], len(block) - cut
                else:
                    held.append(block)
                    length += len(block)
                if length > LONGEST_LINE:
                    self._refuse(
                        f"holds a line of more than {LONGEST_LINE >> 20} MiB",
                        "A table has one row a line.",
                        "Check that it is a CSV file.",
                    )
                    return
        if any(held):
            yield b"".join(held)
        self.sha256 = digest.hexdigest()

    def _check(self, data: bytes, offset: int, line: int) -> None:
        """Note bytes that no text table holds, the first of each kind."""
        if (at := data.find(b"\0")) >= 0:
            what = f"holds a NUL byte at byte {offset + at} (line {line + _lines_before(data, at)})"
            mend = "Export it again as CSV UTF-8; it may be damaged or no text at all."
            self._refuse_once(what, "Text holds no NUL.", mend)
        if not data.isascii():
            try:
                data.decode("utf-8")
            except UnicodeDecodeError as error:
                number = line + _lines_before(data, error.start)
                what = f"is not UTF-8 at byte {offset + error.start} (line {number})"
                self._refuse_once(what, "Tables are UTF-8.", "Save it as CSV UTF-8.")

    def _hold_against(self, before: os.stat_result) -> None:
        """Note a file that is no longer what was read; hash it again only if it was touched."""
        after = self.path.stat()
        if not self.sha256 or (_mark(before) == _mark(after) and self.size == after.st_size):
            return
        with self.path.open("rb") as file:
            again = sha256()
            while block := file.read(BLOCK_BYTES):
                again.update(block)
        if again.hexdigest() != self.sha256:
            mend = "Wait until whatever writes it has finished, then run the batch again."
            self._refuse("changed while it was read", "What was read would be neither.", mend)

    def _refuse_once(self, what: str, why: str, mend: str) -> None:
        kind = what.split(" at byte ")[0]
        if not any(cause.what.startswith(kind) for cause in self.causes):
            self._refuse(what, why, mend)

    def _refuse(self, what: str, why: str, mend: str) -> None:
        self.causes.append(Cause(self.name, what, why, mend))


def _with_line_feeds(data: bytes) -> bytes:
    if b"\r" not in data:
        return data
    return data.replace(b"\r\n", b"\n").replace(b"\r", b"\n")


def _lines_before(data: bytes, at: int) -> int:
    """How many lines end before a byte of `data`; a line end may be cut in two by `at`."""
    return _with_line_feeds(data[:at]).count(b"\n")


def _mark(status: os.stat_result) -> tuple[int, int, int, int]:
    return status.st_dev, status.st_ino, status.st_size, status.st_mtime_ns


def _name(path: Path, folder: Path) -> str:
    for file, base in ((path, folder), (path.resolve(), folder.resolve())):
        if file.is_relative_to(base):
            return file.relative_to(base).as_posix()
    return path.as_posix()
