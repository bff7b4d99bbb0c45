"""Bytes of a file in the encoding that its layout says, as UTF-8, or why they are not that."""

import codecs
import re
from typing import Final

from coldwork.errors import Cause
from coldwork.inputs.words import shown

__all__ = ["Decoder"]

_MARKS: Final = (  # longest first
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF16_LE, "utf-16-le"),
    (codecs.BOM_UTF16_BE, "utf-16-be"),
)
_PYTHON: Final = {"latin-9": "iso8859-15", "mac-roman": "mac_roman"}
_SINGLE: Final = frozenset(
    ("latin-1", "latin-9", "cp1250", "cp1251", "cp1252", "cp437", "cp850", "mac-roman")
)
_CONTROLS: Final = bytes(range(0x80, 0xA0))
_WITH_CONTROLS: Final = ("latin-1", "latin-9")
_SHOWN: Final = 40  # bytes of a line that a message repeats
_ONE: Final = "Bytes are read in one way, the one that the layout says."


class Decoder:
    """Turns a file into UTF-8 text, block by block.

    Parameters
    ----------
    encoding : str
        As a layout says it.
    name : str
        What messages call the file.

    Attributes
    ----------
    causes : list of Cause
        Why the bytes are not text in that encoding, or may be text in another one. The
        second is known at the end only.
    """

    def __init__(self, encoding: str, name: str) -> None:
        self.causes: list[Cause] = []
        self._encoding = encoding
        self._name = name
        self._codec = _PYTHON.get(encoding, encoding)
        self._like_ascii = bytes(range(128)).decode(self._codec, "replace").isascii()
        self._decoder: codecs.IncrementalDecoder | None = None
        self._utf8: codecs.IncrementalDecoder | None = None
        self._sample: tuple[int, bytes] | None = None
        self._offset = 0  # bytes that were given so far
        self._line = 1
        self._after_return = False

    def feed(self, block: bytes) -> bytes:
        """Decode the next bytes of the file; what is cut at their end waits for the rest."""
        text = block
        if self._decoder is None:
            text = self._begun(block)
        if self.causes:
            return b""
        self._offset += len(block) - len(text)  # the mark
        self._watch(text)
        decoded = self._decoded(text, last=False)
        self._offset += len(text)
        return decoded

    def finish(self) -> bytes:
        """Give what was waiting at the end of the file, and judge the file as a whole."""
        if self._decoder is None or self.causes:
            return b""
        decoded = self._decoded(b"", last=True)
        if self._utf8 is not None and self._sample is not None and _ends(self._utf8):
            self._refuse_utf8(*self._sample)
        return decoded

    def _begun(self, block: bytes) -> bytes:
        """Hold the byte order mark against the encoding and take it off."""
        mark, marked = next(
            ((m, name) for m, name in _MARKS if block.startswith(m)), (b"", self._encoding)
        )
        codec = self._codec
        if self._encoding == "utf-16":
            if not mark or marked == "utf-8":
                self._refuse_markless(block, marked)
            codec = marked
        elif marked != self._encoding:
            what = f"begins with the byte order mark of {marked}, and the layout says "
            what += self._encoding
            self._refuse(f"{self._name}, line 1", what, f"Say encoding = {marked!r}, or mend it.")
        self._decoder = codecs.getincrementaldecoder(codec)("strict")
        if self._encoding in _SINGLE:
            self._utf8 = codecs.getincrementaldecoder("utf-8")("strict")
        return block[len(mark) :]

    def _decoded(self, data: bytes, *, last: bool) -> bytes:
        if self._decoder is None:
            return b""
        pending = self._decoder.getstate()[0]
        if self._like_ascii and not pending and data.isascii():
            text = data
        else:
            try:
                text = self._decoder.decode(data, final=last).encode("utf-8")
            except UnicodeDecodeError as error:
                self._refuse_bytes(error, len(pending))
                return b""
        self._count(text)
        return text

    def _watch(self, data: bytes) -> None:
        """Note whether a file that is said to have one byte a character could be UTF-8."""
        if self._sample is not None and len(self._sample[1]) < _SHOWN:
            line, sample = self._sample
            self._sample = line, (sample + data)[:_SHOWN]
        if data.isascii():
            if self._utf8 is not None and self._utf8.getstate()[0]:
                self._utf8 = None  # a character was broken off
            return
        at = next(place for place, byte in enumerate(data) if byte > 0x7F)
        if self._encoding in _WITH_CONTROLS and data.translate(None, _CONTROLS) != data:
            self._refuse_controls(data)
        if self._utf8 is None:
            return
        if self._sample is None:
            begin = max(data.rfind(b"\n", 0, at), data.rfind(b"\r", 0, at)) + 1
            line = self._line + _ends_of_lines(data[:at])
            self._sample = line, data[max(begin, at - _SHOWN // 2) :][:_SHOWN]
        try:
            self._utf8.decode(data)
        except UnicodeDecodeError:
            self._utf8 = None

    def _count(self, text: bytes) -> None:
        """Keep the number of the line that the next text begins in."""
        if self._after_return and text.startswith(b"\n"):
            self._line -= 1
        self._line += _ends_of_lines(text)
        if text:
            self._after_return = text.endswith(b"\r")

    def _refuse_bytes(self, error: UnicodeDecodeError, pending: int) -> None:
        bad = error.object[error.start : error.end]
        before = error.object[: error.start].decode(self._codec, "ignore").encode("utf-8")
        line = self._line + _ends_of_lines(before)
        byte = self._offset - pending + error.start
        what = f"byte {byte} (0x{bad[:4].hex()}) is no {self._encoding}"
        mend = "Say the encoding that it is in, or export it again."
        self._refuse(f"{self._name}, line {line}", what, mend)

    def _refuse_markless(self, block: bytes, marked: str) -> None:
        if marked == "utf-8":
            what = "begins with the byte order mark of utf-8, and the layout says utf-16"
            self._refuse(f"{self._name}, line 1", what, "Say encoding = 'utf-8', or mend it.")
            return
        either = [
            f"{name} reads {shown(block[:_SHOWN].decode(name, 'replace').splitlines()[:1])}"
            for name in ("utf-16-le", "utf-16-be")
        ]
        what = f"has no byte order mark; {either[0]}, {either[1]}"
        self._refuse(f"{self._name}, line 1", what, "Say utf-16-le or utf-16-be in the layout.")

    def _refuse_controls(self, data: bytes) -> None:
        at = next(place for place, byte in enumerate(data) if byte in _CONTROLS)
        line = self._line + _ends_of_lines(data[:at])
        other = data[at : at + 1].decode("cp1252", "replace")
        what = f"byte {self._offset + at} is 0x{data[at]:02x}: a control character in "
        what += f"{self._encoding}, and {shown(other)} in cp1252"
        mend = "Say encoding = 'cp1252', if that is meant."
        self._refuse(f"{self._name}, line {line}", what, mend)

    def _refuse_utf8(self, line: int, sample: bytes) -> None:
        sample = re.split(rb"[\r\n]", sample)[0]
        ours, theirs = sample.decode(self._codec, "replace"), sample.decode("utf-8", "ignore")
        what = f"is valid UTF-8 throughout, and the layout says {self._encoding}: this line reads "
        what += f"{shown(ours)} in {self._encoding} and {shown(theirs)} in UTF-8"
        mend = "Say encoding = 'utf-8', if the second is right; otherwise export it anew in UTF-8."
        self._refuse(f"{self._name}, line {line}", what, mend)

    def _refuse(self, where: str, what: str, mend: str) -> None:
        if not self.causes:
            self.causes.append(Cause(where, what, _ONE, mend))


def _ends(decoder: codecs.IncrementalDecoder) -> bool:
    return not decoder.getstate()[0]


def _ends_of_lines(text: bytes) -> int:
    if b"\r" not in text:
        return text.count(b"\n")
    return text.count(b"\n") + text.count(b"\r") - text.count(b"\r\n")
