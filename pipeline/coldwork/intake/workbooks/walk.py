"""XML that may be hostile: one pass, no document types, no entities, no tree.

A document type is the only door to entities that grow or reach outside, and no
workbook needs one: it is refused where it begins. What is not well-formed is refused
with its line. Memory does not grow with the document, but for what the caller keeps.
"""

from collections.abc import Callable, Mapping
from typing import Final, TypeAlias
from xml.parsers import expat

from coldwork.intake.workbooks.faults import BookFaultError

__all__ = ["End", "Start", "Text", "local_attributes", "walk"]

Start: TypeAlias = Callable[[str, Mapping[str, str]], None]
End: TypeAlias = Callable[[str], None]
Text: TypeAlias = Callable[[str], None]

_PIECE: Final = 1 << 20  # byte that are parsed at once


def walk(data: bytes, part: str, start: Start, end: End, text: Text | None = None) -> None:
    """Go over an XML document and tell what begins, ends and is written.

    Parameters
    ----------
    data : bytes
        The document.
    part : str
        What messages call it.
    start, end : callable
        Given the local name (without prefix) of each element; `start` also its
        attributes, by their names as written.
    text : callable, optional
        Given each piece of text.

    Raises
    ------
    BookFaultError
        If it has a document type or is not well-formed.
    """
    local = _LocalNames()

    def begin(name: str, attributes: dict[str, str]) -> None:
        start(local[name], attributes)

    def finish(name: str) -> None:
        end(local[name])

    def refuse(*_: object) -> None:
        what = f"its part {part} declares a document type, as entity bombs do"
        raise BookFaultError(
            what,
            "No workbook needs one.",
            "Save it anew with a spreadsheet program, and ask where the file comes from.",
        )

    parser = expat.ParserCreate()
    parser.buffer_text = True
    parser.StartElementHandler = begin
    parser.EndElementHandler = finish
    parser.CharacterDataHandler = text
    parser.StartDoctypeDeclHandler = refuse
    try:
        for place in range(0, len(data), _PIECE):
            parser.Parse(data[place : place + _PIECE], False)
        parser.Parse(b"", True)
    except (expat.ExpatError, UnicodeError, ValueError, LookupError) as error:
        what = f"its part {part} is no well-formed XML ({error})"
        mend = "It is damaged: copy it again, or save it anew with a spreadsheet program."
        raise BookFaultError(what, "A workbook is made of XML.", mend) from error


def local_attributes(attributes: Mapping[str, str]) -> dict[str, str]:
    """Give attributes by their names without prefixes."""
    return {name.rpartition(":")[2]: value for name, value in attributes.items()}


class _LocalNames(dict[str, str]):
    """Names without their prefixes, each cut once."""

    def __missing__(self, name: str) -> str:
        self[name] = local = name.rpartition(":")[2]
        return local
