"""The zip that a workbook is: opened within limits, its parts read within limits.

Whatever a header promises, no more than the limits is ever unpacked. The second reader
is given a new, uncompressed zip of the parts that were looked at and of nothing else.
"""

import io
import zipfile
import zlib
from collections import Counter
from collections.abc import Mapping
from typing import IO, Final

from coldwork.inputs.words import shown
from coldwork.intake.workbooks.faults import BookFaultError

__all__ = ["LARGEST_BOOK", "LARGEST_UNPACKED", "MOST_PARTS", "STEEPEST", "Package", "repacked"]

LARGEST_BOOK: Final = 256 << 20  # byte, as a file
LARGEST_UNPACKED: Final = 512 << 20  # byte, of the parts that are read
MOST_PARTS: Final = 10_000
STEEPEST: Final = 250  # unpacked over packed; sheets that repeat themselves reach about 100
_STEEP_FROM: Final = 8 << 20  # byte; below, a steep part does no harm
_PIECE: Final = 1 << 20  # byte
_COMPOUND: Final = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_METHODS: Final = {zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED}
_COPY: Final = "Copy it again from where it was made."


class Package:
    """The parts of a workbook, by their paths in its zip.

    Parameters
    ----------
    data : bytes
        The file.

    Raises
    ------
    BookFaultError
        If it is no zip, is locked, names a part twice, or would unpack to more than
        the limits.
    """

    def __init__(self, data: bytes) -> None:
        self._left = LARGEST_UNPACKED
        self._zip = _opened(data)
        self._parts = {part.filename: part for part in self._zip.infolist()}
        self._read: dict[str, bytes] = {}
        _refuse_bombs(self._zip.infolist())

    def __contains__(self, name: str) -> bool:
        """Tell whether there is such a part."""
        return name in self._parts

    def read(self, name: str) -> bytes:
        """Unpack one part, once.

        Parameters
        ----------
        name : str
            Its path in the zip.

        Returns
        -------
        bytes

        Raises
        ------
        BookFaultError
            If it is not there, is damaged or is too large.
        """
        if name in self._read:
            return self._read[name]
        part = self._parts.get(name)
        if part is None:
            what = f"its part {shown(name)} is not there"
            raise BookFaultError(what, "A workbook must be whole.", _COPY)
        try:
            with self._zip.open(part) as stream:
                data = self._within_limit(stream)
        except (zipfile.BadZipFile, zlib.error, EOFError, OSError, NotImplementedError) as error:
            what = f"its part {shown(name)} is damaged ({error})"
            raise BookFaultError(what, "A workbook must be whole.", _COPY) from error
        self._read[name] = data
        return data

    def _within_limit(self, stream: IO[bytes]) -> bytes:
        pieces = []
        while piece := stream.read(_PIECE):
            self._left -= len(piece)
            if self._left < 0:
                raise _too_much()
            pieces.append(piece)
        return b"".join(pieces)


def repacked(parts: Mapping[str, bytes]) -> io.BytesIO:
    """Make a zip of these parts alone, uncompressed.

    Parameters
    ----------
    parts : mapping of str to bytes
        By path, in order.

    Returns
    -------
    io.BytesIO
        At its begin.
    """
    target = io.BytesIO()
    with zipfile.ZipFile(target, "w", zipfile.ZIP_STORED) as zipped:
        for name, data in parts.items():
            zipped.writestr(zipfile.ZipInfo(name), data)
    target.seek(0)
    return target


def _opened(data: bytes) -> zipfile.ZipFile:
    if data.startswith(_COMPOUND):
        what = "is locked by a password, or is a workbook of the old binary kind (.xls)"
        raise BookFaultError(
            what,
            "Workbooks are read as .xlsx or .ods, unlocked.",
            "Open it, and save it as .xlsx without a password.",
        )
    why = "A workbook is a zip of XML, .xlsx or .ods."
    if not data.startswith(b"PK"):
        what = "is no workbook: it does not begin like a zip" if data else "is empty"
        mend = "A text file needs a layout with [text] instead of [workbook]."
        raise BookFaultError(what, why, mend)
    try:
        zipped = zipfile.ZipFile(io.BytesIO(data))
    except (zipfile.BadZipFile, OSError, ValueError, NotImplementedError, EOFError) as error:
        what = f"is a damaged or cut-off zip ({error})"
        raise BookFaultError(what, why, _COPY) from error
    _refuse_odd_parts(zipped.infolist())
    return zipped


def _refuse_odd_parts(parts: list[zipfile.ZipInfo]) -> None:
    why = "Each part of a workbook stands once and can be read."
    if len(parts) > MOST_PARTS:
        what = f"holds {len(parts)} parts, more than {MOST_PARTS}"
        raise BookFaultError(what, why, "Ask where the file comes from.")
    twice = [name for name, count in Counter(part.filename for part in parts).items() if count > 1]
    if twice:
        what = f"holds its part {shown(twice[0])} twice"
        mend = "Save it anew with a spreadsheet program, and ask where the file comes from."
        raise BookFaultError(what, why, mend)
    for part in parts:
        if part.flag_bits & 1:
            what = f"its part {shown(part.filename)} is locked by a password"
            raise BookFaultError(what, why, "Save it without a password.")
        if part.compress_type not in _METHODS:
            what = f"its part {shown(part.filename)} is packed in a way that workbooks are not"
            raise BookFaultError(what, why, "Save it anew with a spreadsheet program.")


def _refuse_bombs(parts: list[zipfile.ZipInfo]) -> None:
    """Refuse by what the directory says; `Package.read` holds the parts to it."""
    for part in parts:
        steep = part.file_size > STEEPEST * max(part.compress_size, 1)
        if steep and part.file_size > _STEEP_FROM:
            ratio = part.file_size // max(part.compress_size, 1)
            what = (
                f"its part {shown(part.filename)} would unpack to {ratio} times its size, "
                "as zip bombs do"
            )
            raise BookFaultError(
                what,
                f"No part may grow more than {STEEPEST}-fold.",
                "Ask where the file comes from; a real one can be saved as CSV instead.",
            )
    if sum(part.file_size for part in parts) > LARGEST_UNPACKED:
        raise _too_much()


def _too_much() -> BookFaultError:
    return BookFaultError(
        f"would unpack to more than {LARGEST_UNPACKED >> 20} MiB",
        "Workbooks are held in memory while they are read.",
        "Save the sheet as CSV: text is read in a stream.",
    )
