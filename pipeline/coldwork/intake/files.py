"""Files of a batch: read once from front to back, digested, and cut into whole lines."""

import os
import stat
from collections.abc import Iterator
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO, Final, NamedTuple

from coldwork.contracts import Contract
from coldwork.errors import Cause
from coldwork.inputs.layout import Layout
from coldwork.intake.decoding import Decoder

if TYPE_CHECKING:
    import hashlib

__all__ = [
    "BLOCK_BYTES",
    "LONGEST_LINE",
    "KeptLine",
    "LineReader",
    "Lines",
    "SourceFile",
    "TableFiles",
]

BLOCK_BYTES: Final = 2 << 20  # byte; large enough for the parser's stride, small enough for a cache
LONGEST_LINE: Final = 64 << 20  # byte
_BOM: Final = b"\xef\xbb\xbf"
_WIDE_BOMS: Final = (b"\xff\xfe", b"\xfe\xff")  # UTF-16


class KeptLine(NamedTuple):
    """A line of a file that is neither a row nor passed over, such as one of averages.

    Attributes
    ----------
    line : int
        Its number.
    text : str
        As written.
    """

    line: int
    text: str


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
    layouts : tuple of (Layout or None)
        How each is written, None for the tidy form; empty where all are tidy.
    """

    contract: Contract
    folder: Path
    paths: tuple[Path, ...]
    layouts: tuple[Layout | None, ...] = ()

    @property
    def names(self) -> tuple[str, ...]:
        """Path of each file inside the batch, with forward slashes.

        Rows of a workbook are told apart by their sheet, ``book.xlsx!Readings``.
        """
        sheets = [layout.workbook if layout else None for layout in self._all_layouts]
        return tuple(
            name + (f"!{sheet.sheet}" if sheet else "")
            for name, sheet in zip(self.file_names, sheets, strict=True)
        )

    @property
    def file_names(self) -> tuple[str, ...]:
        """Path of each file inside the batch, as `names` but for sheets."""
        return tuple(_name(path, self.folder) for path in self.paths)

    @property
    def _all_layouts(self) -> tuple[Layout | None, ...]:
        return self.layouts or (None,) * len(self.paths)

    def source(self, file: int, sha256: str, size: int, rows: int, aside: int) -> "SourceFile":
        """Say what was read of one file: its digest, its bytes, its rows and those set aside."""
        layout = self.layout(file)
        return SourceFile(
            path=self.file_names[file],
            table=self.contract.table,
            sha256=sha256,
            bytes=size,
            rows_read=rows,
            rows_used=rows - aside,
            rows_set_aside=aside,
            sheet=layout.workbook.sheet if layout and layout.workbook else None,
        )

    def layout(self, file: int) -> Layout | None:
        """Give the layout of a file, None where it is tidy."""
        return self.layouts[file] if self.layouts else None

    def raw_name(self, file: int, column: str) -> str:
        """Tell what the cells of one of our columns are called in a file itself."""
        layout = self.layout(file)
        return column if layout is None else layout.raw_columns.get(column, column)

    def raw_names(self) -> tuple[str, ...]:
        """Give every name that a raw cell of any of the files may stand under, once each."""
        names: list[str] = []
        for layout in self._all_layouts:
            names += self.contract.columns if layout is None else layout.raw_columns.values()
        return tuple(dict.fromkeys(names))


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
    unused_columns : tuple of str
        Columns of the file that its layout passes over.
    kept_lines : tuple of KeptLine
        Lines that close the table.
    sheet : str or None
        Which sheet of a workbook was read.
    """

    path: str
    table: str
    sha256: str
    bytes: int
    rows_read: int
    rows_used: int
    rows_set_aside: int
    unused_columns: tuple[str, ...] = ()
    kept_lines: tuple[KeptLine, ...] = ()
    sheet: str | None = None

    @property
    def name(self) -> str:
        """What rows of it are said to stand in: the path, and the sheet of a workbook."""
        return f"{self.path}!{self.sheet}" if self.sheet else self.path


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
    decoder : Decoder, optional
        What turns the file into UTF-8, where it is not said to be that.

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

    def __init__(
        self,
        path: Path,
        name: str,
        block_bytes: int = BLOCK_BYTES,
        decoder: Decoder | None = None,
    ) -> None:
        self.path = path
        self.name = name
        self.block_bytes = block_bytes
        self._decoder = decoder
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
            if offset == 0 and self._decoder is None:
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
            for block in self._text_blocks(file, digest):
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
        if self._decoder is None or not self._decoder.causes:  # else it was not read to the end
            self.sha256 = digest.hexdigest()

    def _text_blocks(self, file: BinaryIO, digest: "hashlib._Hash") -> Iterator[bytes]:
        """Read on, and decode where the file is not said to be UTF-8."""
        while block := file.read(self.block_bytes):
            digest.update(block)
            self.size += len(block)
            yield block if self._decoder is None else self._decoder.feed(block)
            if self._decoder is not None and self._decoder.causes:
                self.causes += self._decoder.causes
                return
        if self._decoder is not None:
            yield self._decoder.finish()
            self.causes += self._decoder.causes

    def _check(self, data: bytes, offset: int, line: int) -> None:
        """Note bytes that no text table holds, the first of each kind."""
        if (at := data.find(b"\0")) >= 0:
            number = line + _lines_before(data, at)
            place = f"byte {offset + at} (line {number})"
            what = f"holds a NUL byte at {place if self._decoder is None else f'line {number}'}"
            mend = "Export it again as CSV UTF-8; it may be damaged or no text at all."
            self._refuse_once(what, "Text holds no NUL.", mend)
        if self._decoder is None and not data.isascii():
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
        kind = what.split(" at ")[0]
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
