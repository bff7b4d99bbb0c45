"""The lines on which the keys of an entry stand, for messages.

`tomllib` reads the values but gives no positions, and an entry is plain: tables of one
key a line. What this misses is named by the table around it.
"""

import re
from collections.abc import Mapping
from typing import Final, TypeAlias

__all__ = ["Path", "line_of", "lines_of"]

Path: TypeAlias = tuple[str, ...]

_TABLE: Final = re.compile(r"\s*\[+([^\[\]]+)\]+\s*(?:#.*)?")
_KEY: Final = re.compile(r"\s*([\w\"'.\- ]+?)\s*=.*")


def lines_of(text: str) -> dict[Path, int]:
    """Find the lines of keys in a TOML text that `tomllib` has taken.

    Parameters
    ----------
    text : str
        The text.

    Returns
    -------
    dict of tuple of str to int
        Names from the outermost on, to the first line that has them, from 1.
    """
    lines: dict[Path, int] = {}
    table: Path = ()
    for number, line in enumerate(text.split("\n"), 1):
        opened, said = _TABLE.fullmatch(line.rstrip("\r")), _KEY.fullmatch(line.rstrip("\r"))
        if opened:
            path = table = _names(opened[1])
        elif said:
            path = (*table, *_names(said[1]))
        else:
            continue
        for length in range(1, len(path) + 1):
            lines.setdefault(path[:length], number)
    return lines


def line_of(lines: Mapping[Path, int], path: Path) -> int | None:
    """Give the line of a key, or of the innermost table around it that has one.

    Parameters
    ----------
    lines : mapping of tuple of str to int
        As `lines_of` gives them.
    path : tuple of str
        The key.

    Returns
    -------
    int or None
        None when not even its table is there.
    """
    for length in range(len(path), 0, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return None


def _names(written: str) -> Path:
    return tuple(name.strip().strip("\"'") for name in written.split("."))
