"""The files that a sheet names: found, inside the batch folder, each named once, with layouts."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from pathlib import Path, PurePosixPath, PureWindowsPath
from typing import Any, Final

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.causes import Causes
from coldwork.inputs.layout import Layout, read_layout
from coldwork.inputs.words import listed, shown

__all__ = ["Tables", "tables_of"]

_TABLES: Final = (
    "coupons",
    "indents",
    "flow_stress",
    "curves",
    "exclusions",
    "verification",
)
_READ_BY: Final = {"indents": "indent", "flow_stress": "flow"}
_PATTERN_MARKS: Final = frozenset("*?[")


@dataclass
class Tables:
    """The files that a sheet names.

    Attributes
    ----------
    paths : dict of str to tuple of Path
        By table; in the sheet's order, those of a pattern sorted by name.
    layouts : dict of str to tuple of (Layout or None)
        How each of them is written, None for the tidy form.
    causes : list of Cause
        What is wrong with layouts; each stands in a file of its own.
    """

    paths: dict[str, tuple[Path, ...]] = field(default_factory=dict)
    layouts: dict[str, tuple[Layout | None, ...]] = field(default_factory=dict)
    causes: list[Cause] = field(default_factory=list)


class _NotTakenError(Exception):
    """A named file cannot be taken: what was found, the rule, and how to mend it."""

    def __init__(self, what: str, why: str, mend: str) -> None:
        super().__init__(what)
        self.words = (what, why, mend)


def tables_of(causes: Causes, folder: Path) -> Tables:
    """Find the files of every table that the sheet names, and read their layouts.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong.
    folder : Path
        The batch folder, resolved.

    Returns
    -------
    Tables
        What was found; `causes` gets what is wrong with the sheet, the tables' own
        list what is wrong with layouts.
    """
    section = causes.sheet.tables.get("files")
    if not isinstance(section, dict):
        return Tables()
    found = Tables()
    layouts = _Layouts(folder)
    for table in _TABLES:
        named = section.get(table)
        if named is None or causes.within(("files", table)):
            continue
        entries = named if isinstance(named, list) else [named]
        try:
            files = tuple(_files(folder, table, entries, layouts))
        except _NotTakenError as refusal:
            causes.add(("files", table), *refusal.words)
        else:
            found.paths[table] = tuple(path for path, _ in files)
            found.layouts[table] = tuple(layout for _, layout in files)
    found.causes += layouts.causes
    _refuse_unread_table(causes, section)
    return found


def _refuse_unread_table(causes: Causes, section: dict[str, object]) -> None:
    strength = causes.sheet.tables.get("strength")
    route = strength.get("route") if isinstance(strength, dict) else None
    for table, reader in _READ_BY.items():
        if table in section and route in _READ_BY.values() and route != reader:
            causes.add(
                ("files", table),
                f"the route '{route}' does not read {table}",
                "A table that is named is read, or the batch is refused.",
                f"Take the key out, or choose the route '{reader}'.",
            )


class _Layouts:
    """The layouts that a sheet names, each read once."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._read: dict[str, Layout | None] = {}
        self.causes: list[Cause] = []

    def get(self, name: str, table: str) -> Layout | None:
        if name not in self._read:
            self._read[name] = None
            try:
                self._read[name] = read_layout(name, self._folder)
            except BatchRefused as refused:
                self.causes += refused.causes
        layout = self._read[name]
        if layout is not None and layout.fills != table:
            what = f"layout {shown(name)} fills {layout.fills}"
            why = f"These files hold {table}."
            raise _not_taken(what, why, "Name another layout, or the files in their own key.")
        return layout


def _files(
    folder: Path, table: str, entries: list[Any], layouts: _Layouts
) -> Iterator[tuple[Path, Layout | None]]:
    seen: set[tuple[Path, str | None]] = set()
    for entry in entries:
        named, layout = entry, None
        if isinstance(entry, Mapping):
            named = entry["path"]
            layout = layouts.get(entry["layout"], table)
        sheet = layout.workbook.sheet if layout and layout.workbook else None
        for path in _found(folder, named):
            if (path.resolve(), sheet) in seen:
                what = f"{shown(named)} names {path.name} a second time"
                raise _not_taken(what, "A file is read once.", "Name it once, by path or pattern.")
            seen.add((path.resolve(), sheet))
            yield path, layout


def _found(folder: Path, entry: str) -> list[Path]:
    path = PurePosixPath(entry)
    if not entry.isprintable() or not path.name:
        what = f"{shown(entry)} is not a path"
        raise _not_taken(what, "A table is a file in the batch folder.", "Name it.")
    if path.is_absolute() or PureWindowsPath(entry).drive:
        raise _outside(entry)
    try:
        if not _PATTERN_MARKS & set(entry) or (folder / path).is_file():
            return [_one(folder, path)]
        return _matching(folder, path)
    except (OSError, ValueError, RuntimeError, NotImplementedError) as error:
        what = f"{shown(entry)} cannot be looked up ({error})"
        why = "A table is a readable file in the batch folder."
        raise _not_taken(what, why, "Mend the path or the pattern.") from error


def _one(folder: Path, name: PurePosixPath) -> Path:
    path = folder / name
    if not path.resolve().is_relative_to(folder):
        raise _outside(str(name))
    if not path.is_file():
        raise _missing(path, name)
    return path.resolve() if ".." in name.parts else path


def _matching(folder: Path, pattern: PurePosixPath) -> list[Path]:
    if ".." in pattern.parts:
        raise _outside(str(pattern))
    names = sorted(
        p.relative_to(folder).as_posix() for p in folder.glob(str(pattern)) if p.is_file()
    )
    if not names:
        what = f"nothing matches the pattern {shown(str(pattern))}"
        why = "A pattern stands for one file or more."
        raise _not_taken(what, why, _what_is_there(folder, pattern.name))
    return [_one(folder, PurePosixPath(name)) for name in names]


def _not_taken(what: str, why: str, mend: str) -> _NotTakenError:
    return _NotTakenError(what, why, mend)


def _outside(entry: str) -> _NotTakenError:
    return _NotTakenError(
        f"{shown(entry)} leaves the batch folder",
        "Tables stay inside the folder of their batch, links too, so that it can be filed whole.",
        "Put the file into the folder.",
    )


def _missing(path: Path, name: PurePosixPath) -> _NotTakenError:
    what = "is not a file" if path.exists() else "is not there"
    why = "Every file that the sheet names must be in the folder."
    return _NotTakenError(f"{name} {what}", why, _what_is_there(path.parent, name.name))


def _what_is_there(place: Path, name: str) -> str:
    try:
        there = sorted(p.name for p in place.iterdir() if p.is_file() and p.suffix != ".toml")
    except OSError:
        return "The folder that it names is not there either."
    if not there:
        return "There is no table in that folder."
    close = get_close_matches(name, there, n=1)
    return f"The nearest name there is '{close[0]}'." if close else f"There are {listed(there, 8)}."
