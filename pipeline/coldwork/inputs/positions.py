"""The lines on which the keys of a TOML text stand, for messages.

`tomllib` reads the values but gives no positions. This scanner goes over a
text that `tomllib` has already taken (so it may trust the syntax), token by
token and without recursion, and keeps the line of every key, table and element.
"""

import re
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Final, TypeAlias

__all__ = ["KeyPath", "line_of", "lines_of"]

KeyPath: TypeAlias = tuple[str | int, ...]

_TOKEN: Final = re.compile(
    r"""
      (?P<text>"{3}(?:[^\\]|\\.)*?"{3,5} | '{3}.*?'{3,5}
              | "(?:[^"\\\n]|\\.)*" | '[^'\n]*')
    | (?P<comment>\#[^\n]*)
    | (?P<newline>\n)
    | (?P<mark>[][{},=.])
    | (?P<bare>[^\s"'#\[\]{},=.]+)
    """,
    re.VERBOSE | re.DOTALL,
)


def lines_of(text: str) -> dict[KeyPath, int]:
    """Find the line of every key in a TOML text.

    Parameters
    ----------
    text : str
        A text that `tomllib` has read without complaint.

    Returns
    -------
    dict of tuple to int
        Path (keys, and from 0 the places in arrays) to line, from 1. Whatever
        could not be made out is missing; nothing is ever raised.
    """
    scan = _Scan()
    try:
        for kind, piece, line in _tokens(text):
            scan.take(kind, piece, line)
    except (LookupError, ValueError):
        pass  # a key without a line is named by its section instead
    return scan.lines


def line_of(lines: Mapping[KeyPath, int], path: KeyPath) -> int | None:
    """Give the line of a key, or of the innermost table around it that has one.

    Parameters
    ----------
    lines : mapping of tuple to int
        As `lines_of` gives them.
    path : tuple of str and int
        The key.

    Returns
    -------
    int or None
        None when not even its section is there.
    """
    for length in range(len(path), 0, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return None


def _tokens(text: str) -> Iterator[tuple[str, str, int]]:
    line, at = 1, 0
    for match in _TOKEN.finditer(text):
        line += text.count("\n", at, match.start())
        yield str(match.lastgroup), match.group(), line
        at = match.start()


@dataclass
class _Inside:
    """An array or inline table that is open: where it stands and what comes next."""

    path: KeyPath
    array: bool
    index: int = 0


@dataclass
class _Scan:
    """State of the scan; `take` is given one token after another."""

    lines: dict[KeyPath, int] = field(default_factory=dict)
    table: KeyPath = ()
    counts: dict[KeyPath, int] = field(default_factory=dict)
    open: list[_Inside] = field(default_factory=list)
    key: list[str] = field(default_factory=list)
    key_line: int = 0
    value_path: KeyPath = ()
    in_value: bool = False
    header: int = 0  # how many [ a table header has opened

    def take(self, kind: str, piece: str, line: int) -> None:
        """Go on by one token."""
        if kind == "newline":
            self._end_of_line()
        elif kind == "comment":
            pass
        elif self.header:
            self._header(kind, piece, line)
        elif self.in_value:
            self._value(kind, piece, line)
        else:
            self._key(kind, piece, line)

    def _end_of_line(self) -> None:
        if not self.open:
            self.in_value, self.header, self.key = False, 0, []

    def _header(self, kind: str, piece: str, line: int) -> None:
        if piece == "[" and not self.key:
            self.header += 1
        elif kind in {"text", "bare"}:
            self.key.append(_name(kind, piece))
        elif piece == "]" and self.key:
            self._open_table(line)
            self.key = []

    def _open_table(self, line: int) -> None:
        path: KeyPath = ()
        for name in self.key[:-1]:
            self.lines.setdefault((*path, name), line)
            path = self._entered((*path, name))
        path = (*path, self.key[-1])
        if self.header > 1:
            self.lines.setdefault(path, line)
            self.counts[path] = self.counts.get(path, -1) + 1
            path = (*path, self.counts[path])
        self.table = path
        self.lines.setdefault(path, line)

    def _entered(self, path: KeyPath) -> KeyPath:
        return (*path, self.counts[path]) if path in self.counts else path

    def _key(self, kind: str, piece: str, line: int) -> None:
        if piece == "[" and not self.key and not self.open:
            self.header = 1
        elif kind in {"text", "bare"}:
            self.key_line = self.key_line if self.key else line
            self.key.append(_name(kind, piece))
        elif piece == "=":
            self._start_value()
        elif piece == "}":
            self._close()

    def _start_value(self) -> None:
        base = self.open[-1].path if self.open else self.table
        for length in range(1, len(self.key) + 1):
            self.lines.setdefault((*base, *self.key[:length]), self.key_line)
        self.value_path = (*base, *self.key)
        self.key, self.in_value = [], True

    def _value(self, kind: str, piece: str, line: int) -> None:
        inside = self.open[-1] if self.open else None
        if piece in {"[", "{"} and kind == "mark":
            self._open_value(piece, line)
        elif piece in {"]", "}"} and kind == "mark":
            self._close()
        elif piece == "," and kind == "mark" and inside is not None:
            inside.index += 1
            self.in_value = inside.array
        elif inside is not None and inside.array:
            self.lines.setdefault((*inside.path, inside.index), line)

    def _open_value(self, piece: str, line: int) -> None:
        path = self.value_path
        if self.open and self.open[-1].array:
            path = (*self.open[-1].path, self.open[-1].index)
            self.lines.setdefault(path, line)
        self.open.append(_Inside(path, array=piece == "["))
        self.in_value = piece == "["

    def _close(self) -> None:
        self.open.pop()
        self.in_value = True  # what follows is still the value around it, up to the line's end


def _name(kind: str, piece: str) -> str:
    if kind == "bare":
        return piece
    return piece[1:-1] if piece[0] == "'" else str(tomllib.loads(f"k = {piece}")["k"])
