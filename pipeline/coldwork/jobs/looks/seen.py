"""What was seen of a file, for people, programs and the draft of a layout alike."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from coldwork.jobs.looks.signs import SignLook, TimeLook

__all__ = ["Entry", "Oddity", "Seen", "SeenColumn"]


@dataclass(frozen=True)
class Entry:
    """One line of the draft: a key with its value, what it rests on, whether to decide it."""

    key: str
    value: object
    note: str = ""
    decide: bool = False


@dataclass(frozen=True)
class SeenColumn:
    """One column of the file: its name, the unit that stands with it, some cells."""

    name: str
    unit: str
    samples: tuple[str, ...]
    numbers: bool


@dataclass(frozen=True)
class Oddity:
    """Something that a person should look at, and where."""

    where: str
    what: str


@dataclass
class Seen:
    """What was seen.

    Attributes
    ----------
    name : str
        The file's name, printable.
    size : int
        [byte]
    kind : str
        ``text``, ``workbook`` or ``unknown``.
    facts : list of (str, str)
        What was found, by subject, in words.
    form : list of Entry
        Of the layout's section ``text`` or ``workbook``.
    columns : list of SeenColumn
        Of the table; empty where none was found.
    above : list of (str, str)
        Labels over the table and their values.
    signs : SignLook
        Decimal sign and thousands mark.
    times : mapping of int to TimeLook
        By the place of a column.
    oddities : list of Oddity
        Suspicious lines and cells.
    """

    name: str
    size: int
    kind: str = "unknown"
    facts: list[tuple[str, str]] = field(default_factory=list)
    form: list[Entry] = field(default_factory=list)
    columns: list[SeenColumn] = field(default_factory=list)
    above: list[tuple[str, str]] = field(default_factory=list)
    signs: SignLook = field(default_factory=lambda: SignLook(None, None, sure=True))
    times: Mapping[int, TimeLook] = field(default_factory=dict)
    oddities: Sequence[Oddity] = ()
