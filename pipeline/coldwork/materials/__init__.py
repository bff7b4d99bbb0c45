"""The library of metals: one TOML file each, every value with its source.

To add a metal, add a file beside these; its name is the file's name. A file of the same
form elsewhere is read with `load_file`.
"""

from difflib import get_close_matches
from importlib.resources import files
from pathlib import Path
from typing import Final

from coldwork.errors import Cause, UsageError
from coldwork.materials.entry import KEYS, LATTICES, LibraryValue, Material
from coldwork.materials.reading import examine

__all__ = [
    "KEYS",
    "LATTICES",
    "LibraryValue",
    "Material",
    "faults_of_file",
    "load",
    "load_file",
    "names",
]

_LARGEST: Final = 1_000_000  # bytes; an entry of the library has three thousand


def names() -> tuple[str, ...]:
    """Give the names of all metals in the library, sorted."""
    entries = (entry.name for entry in files(__name__).iterdir())
    return tuple(sorted(name.removesuffix(".toml") for name in entries if name.endswith(".toml")))


def load(name: str) -> Material:
    """Give a metal by its name.

    Parameters
    ----------
    name : str
        One of `names()`.

    Returns
    -------
    Material
        Freshly read.

    Raises
    ------
    UsageError
        If the library has no such metal; the message names the nearest.
    """
    known = names()
    if name not in known:
        close = get_close_matches(name.lower(), known, n=1)
        hint = (
            f"the nearest name is '{close[0]}'"
            if close
            else f"'coldwork materials' lists the {len(known)} that it has"
        )
        message = f"the library has no metal '{name}'; {hint}"
        raise UsageError(message)
    text = (files(__name__) / f"{name}.toml").read_text(encoding="utf-8")
    examined = examine(text, f"{name}.toml")
    if examined.faults:
        raise UsageError("\n".join(str(fault) for fault in examined.faults))
    return examined.material


def load_file(path: Path) -> Material:
    """Read a metal from a file of one's own, written as those of the library are.

    Parameters
    ----------
    path : Path
        The TOML file; its name does not matter.

    Returns
    -------
    Material
        What the file says. The library may hold a metal of the same name.

    Raises
    ------
    UsageError
        If the file cannot be read or is no entry; the message lists every fault with
        file, line and key.
    """
    faults, metal = _examined(path)
    if metal is None:
        raise UsageError("\n".join(str(fault) for fault in faults))
    return metal


def faults_of_file(path: Path) -> tuple[Cause, ...]:
    """Look for what is wrong with a metal's file.

    Parameters
    ----------
    path : Path
        The TOML file.

    Returns
    -------
    tuple of Cause
        All that `load_file` would refuse it for; empty if it would not.
    """
    return _examined(path)[0]


def _examined(path: Path) -> tuple[tuple[Cause, ...], Material | None]:
    """Give the faults of a file, or the metal where there are none."""
    try:
        text = _text(path)
    except UnicodeDecodeError as error:
        line = error.object[: error.start].count(b"\n") + 1
        what = f"byte {error.start} is not UTF-8"
        why = "A metal's file is UTF-8 text."
        return (Cause(f"{path}, line {line}", what, why, "Save it as UTF-8."),), None
    except (OSError, ValueError) as error:
        what = f"it cannot be read: {getattr(error, 'strerror', None) or error}"
        why = "A metal is a readable TOML file."
        return (Cause(str(path), what, why, "Name another, or mend it."),), None
    examined = examine(text, str(path))
    faults = tuple(examined.faults)
    return faults, None if faults else examined.material


def _text(path: Path) -> str:
    if path.exists() and not path.is_file():
        message = "it is not a file"
        raise OSError(message)
    with path.open("rb") as stream:
        data = stream.read(_LARGEST + 1)
    if len(data) > _LARGEST:
        message = f"it holds more than {_LARGEST // 1_000_000} MB"
        raise OSError(message)
    return data.decode("utf-8-sig").replace("\r\n", "\n")
