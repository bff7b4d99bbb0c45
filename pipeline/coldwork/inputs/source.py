"""The text of a batch sheet and of the file that it builds on, merged key by key."""

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from hashlib import sha256
from pathlib import Path, PurePosixPath, PureWindowsPath
from typing import Any, Final, TypeAlias

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.positions import KeyPath, line_of, lines_of
from coldwork.inputs.words import key_text, shown

__all__ = ["SHEET_NAME", "Sheet", "SheetFile", "Table", "path_fault", "read_sheet", "read_toml"]

SHEET_NAME: Final = "batch.toml"
_LARGEST: Final = 4_000_000  # bytes; a sheet with a thousand limits has a twentieth of that
_SUBTABLES: Final = frozenset({("indentation", "HBW"), ("indentation", "HK")})
_NOT_IN_A_HOUSE: Final = {
    "builds_on": "Only a batch sheet builds on another file, one step deep.",
    "id": "An id belongs to one batch alone.",
}

_NEEDS: Final = {"sheet": "A batch is a folder with a sheet, batch.toml, and its tables."}

Table: TypeAlias = dict[str, Any]


@dataclass(frozen=True)
class SheetFile:
    """One TOML file as it was read.

    Attributes
    ----------
    name : str
        Path as the sheet writes it.
    digest : str
        SHA-256 of its bytes.
    tables : dict
        Content.
    lines : mapping of tuple to int
        Line of every key.
    """

    name: str
    digest: str
    tables: Table
    lines: Mapping[KeyPath, int]


@dataclass(frozen=True)
class Sheet:
    """A sheet: its own tables over those of the file that it builds on.

    Attributes
    ----------
    tables : dict
        Merged content, values as TOML has them.
    files : tuple of SheetFile
        The sheet itself, then what it builds on.
    """

    tables: Table
    files: tuple[SheetFile, ...]

    @property
    def digests(self) -> tuple[tuple[str, str], ...]:
        """Path as written and SHA-256 of every file that was read."""
        return tuple((file.name, file.digest) for file in self.files)

    def origin(self, path: KeyPath) -> str:
        """Tell who gave a key: ``sheet``, ``builds_on``, or ``default`` for nobody."""
        place = self._place(path)
        return "default" if place is None else ("sheet", "builds_on")[place]

    def where(self, path: KeyPath) -> str:
        """Write where a key stands: file, line, key."""
        file = self.files[self._place(path) or 0]
        line = line_of(file.lines, path)
        at = "" if line is None else f", line {line}"
        return f"{file.name}{at}, key {key_text(path)}" if path else file.name

    def order(self, path: KeyPath) -> tuple[int, int, str]:
        """Give a sort key that puts keys in the order of their lines."""
        place = self._place(path) or 0
        return (place, line_of(self.files[place].lines, path) or 0, repr(path))

    def _place(self, path: KeyPath) -> int | None:
        unit = _unit(path)
        for place, file in enumerate(self.files):
            if _holds(file.tables, unit):
                return place
        return None


def read_sheet(folder: Path) -> Sheet:
    """Read ``batch.toml`` of a batch folder and the file that it builds on.

    Parameters
    ----------
    folder : Path
        The batch folder.

    Returns
    -------
    Sheet
        Its syntax is right; nothing else has been checked.

    Raises
    ------
    BatchRefused
        If a file is missing, unreadable, not UTF-8 or not TOML, or if the sheet
        builds on a file that itself builds on another or that names a batch.
    """
    if not folder.is_dir():
        cause = Cause(
            str(folder),
            "there is no such folder",
            "A batch is a folder with a sheet and its tables.",
            "Check the path, or start one with 'coldwork new'.",
        )
        raise BatchRefused(str(folder), [cause])
    own = read_toml(folder, SHEET_NAME)
    batch = own.tables.get("batch")
    named = batch.get("builds_on") if isinstance(batch, dict) else None
    if not isinstance(named, str):
        return Sheet(_merged({}, own.tables), (own,))
    fault = path_fault(named)
    if fault:
        cause = Cause(
            Sheet(own.tables, (own,)).where(("batch", "builds_on")),
            f"{shown(named)} {fault}",
            "What a sheet builds on is another .toml file, named from the batch folder.",
            "Name it like '../house.toml'.",
        )
        raise BatchRefused(str(folder), [cause])
    house = read_toml(folder, named)
    _refuse_house(folder, house)
    return Sheet(_merged(_merged({}, house.tables), own.tables), (own, house))


def path_fault(named: str) -> str:
    """Say why a path cannot name a TOML file beside the sheet, empty if it can."""
    path = PurePosixPath(named)
    if not named.isprintable() or path.suffix != ".toml":
        return "is not the path of a .toml file"
    if path.is_absolute() or PureWindowsPath(named).drive:
        return "is an absolute path"
    return "is the sheet itself" if path == PurePosixPath(SHEET_NAME) else ""


def _refuse_house(folder: Path, house: SheetFile) -> None:
    batch = house.tables.get("batch")
    alone = Sheet(house.tables, (house,))
    causes = [
        Cause(
            alone.where(("batch", key)),
            f"{key} stands in a file that a sheet builds on",
            why,
            f"Take {key} out of {house.name}.",
        )
        for key, why in _NOT_IN_A_HOUSE.items()
        if isinstance(batch, dict) and key in batch
    ]
    if causes:
        raise BatchRefused(str(folder), causes)


def read_toml(folder: Path, name: str, kind: str = "sheet") -> SheetFile:
    """Read one TOML file.

    Parameters
    ----------
    folder : Path
        The batch folder.
    name : str
        Path of the file from there.
    kind : str, optional
        What messages call it.

    Returns
    -------
    SheetFile
        Its syntax is right; nothing else has been checked.

    Raises
    ------
    BatchRefused
        If it is missing, unreadable, not UTF-8 or not TOML.
    """
    try:
        data = _bytes(folder / name)
        text = data.decode("utf-8-sig").replace("\r\n", "\n")
        tables = tomllib.loads(text)
    except (OSError, ValueError, RecursionError) as error:
        raise BatchRefused(str(folder), [_unreadable(folder, name, kind, error)]) from error
    return SheetFile(name, sha256(data).hexdigest(), tables, lines_of(text))


def _bytes(path: Path) -> bytes:
    if path.exists() and not path.is_file():
        message = "it is not a file"
        raise OSError(message)
    with path.open("rb") as stream:
        data = stream.read(_LARGEST + 1)
    if len(data) > _LARGEST:
        message = f"it holds more than {_LARGEST // 1_000_000} MB"
        raise OSError(message)
    return data


def _unreadable(folder: Path, name: str, kind: str, error: Exception) -> Cause:
    if isinstance(error, FileNotFoundError):
        return _missing(folder, name, kind)
    if isinstance(error, UnicodeDecodeError):
        line = error.object[: error.start].count(b"\n") + 1
        return Cause(
            f"{name}, line {line}",
            f"byte {error.start} is not UTF-8",
            f"A {kind} is UTF-8 text.",
            "Save it as UTF-8.",
        )
    if isinstance(error, OSError):
        what = f"it cannot be read: {error.strerror or error}"
        return Cause(name, what, f"A batch needs its {kind}.", "Make it a readable file.")
    if isinstance(error, RecursionError):
        why = f"No key of a {kind} is deeper than a list of tables."
        return Cause(name, "its values are nested too deeply", why, "Undo that.")
    reason = str(error) if isinstance(error, tomllib.TOMLDecodeError) else "a number is too long"
    at = re.search(r" \(at line (\d+), column (\d+)\)$", reason)
    where = f"{name}, line {at[1]}, column {at[2]}" if at else name
    text = reason[: at.start()] if at else reason
    return Cause(where, _one_line(text), f"A {kind} is TOML 1.0.", "Mend the syntax there.")


def _one_line(text: str) -> str:
    return "".join(c if c.isprintable() else "�" for c in text)[:200]


def _missing(folder: Path, name: str, kind: str) -> Cause:
    place = (folder / name).parent
    try:
        there = sorted(p.name for p in place.iterdir() if p.suffix == ".toml")
    except OSError:
        there = []
    close = get_close_matches(PurePosixPath(name).name, there, n=1)
    return Cause(
        name,
        "there is no such file",
        _NEEDS.get(kind, "A file that the sheet names must be there."),
        f"The nearest name there is '{close[0]}'." if close else "Put it there, or name another.",
    )


def _merged(under: Table, over: Table, path: KeyPath = ()) -> Table:
    """Lay one file's tables over another's; sections are copies, so that checks may cut them."""
    merged = dict(under)
    for key, value in over.items():
        below = merged.get(key)
        if isinstance(value, dict) and (not path or (*path, key) in _SUBTABLES):
            merged[key] = _merged(below if isinstance(below, dict) else {}, value, (*path, key))
        else:
            merged[key] = value
    return merged


def _unit(path: KeyPath) -> KeyPath:
    """Cut a path to the part that a sheet overrides as one piece."""
    if len(path) > 1 and isinstance(path[1], int):
        return path[:1]
    return path[:3] if path[:2] in _SUBTABLES else path[:2]


def _holds(tables: Table, path: KeyPath) -> bool:
    at: object = tables
    for part in path:
        if not isinstance(at, dict) or part not in at:
            return False
        at = at[part]
    return True
