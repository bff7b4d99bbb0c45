"""Which encodings a file may be in, and how its first telling line reads in each."""

import codecs
from dataclasses import dataclass
from typing import Final

from coldwork.inputs.words import shown
from coldwork.jobs.looks.ends import Ends

__all__ = ["EncodingLook", "decoded", "look_at_encoding"]

_MARKS: Final = (
    (codecs.BOM_UTF8, "utf-8", "utf-8"),
    (codecs.BOM_UTF16_LE, "utf-16", "utf-16-le"),
    (codecs.BOM_UTF16_BE, "utf-16", "utf-16-be"),
)
_CHOICE: Final = (  # by how often instruments write them: common practice
    *("cp1252", "latin-9", "latin-1", "cp1250", "cp850", "cp437", "mac-roman", "cp1251"),
    *("cp932", "shift_jis", "gb18030", "big5", "euc_jp", "euc_kr"),
)
_CODECS: Final = {"latin-9": "iso8859-15", "mac-roman": "mac_roman"}
_BARE_CONTROLS: Final = ("latin-1", "latin-9", "cp1250")
_LIKELY: Final = frozenset("µ°²³±×·øØäöüÄÖÜßéèêàâçñåÅæóíáúôîœ€§–‘’“”…²Ωασερ")
_SAMPLE: Final = 60  # characters
_WIDE: Final = 0.8  # share of zero bytes at one of two places that tells UTF-16


@dataclass(frozen=True)
class EncodingLook:
    """What the bytes say.

    Attributes
    ----------
    chosen : str
        As a layout says it.
    codec : str
        As Python says it, for what follows a byte order mark.
    mark : bytes
        The byte order mark, if there is one.
    sure : bool
        Whether nobody needs to decide.
    why : str
        What it was chosen by.
    candidates : tuple of (str, str)
        Encodings that the bytes allow, and how the first telling line reads in each.
    """

    chosen: str
    codec: str
    mark: bytes
    sure: bool
    why: str
    candidates: tuple[tuple[str, str], ...] = ()


def look_at_encoding(ends: Ends) -> EncodingLook:
    """Say which encodings begin and end of a file allow.

    Parameters
    ----------
    ends : Ends
        The bytes.

    Returns
    -------
    EncodingLook
    """
    for mark, name, codec in _MARKS:
        if ends.head.startswith(mark):
            return EncodingLook(name, codec, mark, sure=True, why="its byte order mark")
    wide = _wide(ends.head)
    if wide:
        return EncodingLook(wide, wide, b"", sure=True, why="every other byte is zero")
    both = ends.head + ends.tail
    if both.isascii():
        seen = "the whole file" if ends.whole else "begin and end"
        return EncodingLook("utf-8", "utf-8", b"", sure=True, why=f"{seen} is plain ASCII")
    if _fits(ends, "utf-8"):
        why = "it is valid UTF-8 with characters beyond ASCII"
        return EncodingLook("utf-8", "utf-8", b"", sure=True, why=why)
    sample = _telling_line(both)
    found = [name for name in _CHOICE if _fits(ends, name)]
    found = sorted(found, key=lambda name: -_likeliness(both, name)) or ["cp1252"]
    readings = tuple((name, _reading(sample, name)) for name in found)
    why = "no UTF-8; the likeliest reading of the bytes beyond ASCII"
    chosen = found[0]
    return EncodingLook(chosen, _codec(chosen), b"", sure=False, why=why, candidates=readings)


def decoded(data: bytes, look: EncodingLook) -> str:
    """Decode bytes in the chosen encoding; what cannot be is shown as such."""
    return data.removeprefix(look.mark).decode(look.codec, "replace")


def _codec(name: str) -> str:
    return _CODECS.get(name, name)


def _wide(head: bytes) -> str:
    half = len(head) // 2
    if not half:
        return ""
    zeros = [head[place : 2 * half : 2].count(0) / half for place in (0, 1)]
    if zeros[1] > _WIDE > zeros[0] * 4:
        return "utf-16-le"
    return "utf-16-be" if zeros[0] > _WIDE > zeros[1] * 4 else ""


def _fits(ends: Ends, name: str) -> bool:
    """Whether the bytes are text in an encoding, but for what was cut at the ends."""
    if name in _BARE_CONTROLS and any(0x80 <= byte < 0xA0 for byte in ends.head[: 64 << 10]):
        return False
    tail = ends.tail[max(ends.tail.find(b"\n"), 0) :]
    try:
        codecs.getincrementaldecoder(_codec(name))("strict").decode(ends.head, final=ends.whole)
        tail.decode(_codec(name))
    except UnicodeDecodeError:
        return False
    return True


def _likeliness(data: bytes, name: str) -> float:
    """Score what the bytes beyond ASCII become: letters and signs of the trade are likely."""
    text = data[: 64 << 10].decode(_codec(name), "ignore")
    beyond = [char for char in text if not char.isascii()]
    if not beyond:
        return 0.0
    points = sum(2.0 if char in _LIKELY else 0.2 if char.isalpha() else -1.0 for char in beyond)
    return points / len(beyond)


def _telling_line(data: bytes) -> bytes:
    at = next((place for place, byte in enumerate(data) if byte > 0x7F), 0)
    begin = max(data.rfind(b"\n", 0, at), data.rfind(b"\r", 0, at), at - _SAMPLE // 2) + 1
    return data[begin : begin + _SAMPLE]


def _reading(sample: bytes, name: str) -> str:
    lines = sample.decode(_codec(name), "replace").splitlines()
    return shown(lines[0] if lines else "")
