"""The library of metals: one TOML file each, every value with its source.

To add a metal, add a file beside these; its name is the file's name.
"""

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from importlib.resources import files
from typing import Any

from coldwork.errors import UsageError

__all__ = ["LibraryValue", "Material", "load", "names"]


@dataclass(frozen=True)
class LibraryValue:
    """One constant of a metal.

    Attributes
    ----------
    value : float
        The value. [`unit`]
    u : float
        Standard uncertainty, wide enough to take in the values that differ. [`unit`]
    unit : str
        UCUM code, the one that the key's name ends in.
    source : str
        Where the value was found, with ``from memory`` where it is only remembered.
    seen : bool
        Whether the number itself was read somewhere when the entry was made.
    """

    value: float
    u: float
    unit: str
    source: str
    seen: bool


@dataclass(frozen=True)
class Material:
    """A metal of the library.

    Attributes
    ----------
    name : str
        What the batch sheet calls it.
    title : str
        What it is.
    lattice : str
        ``fcc``, ``bcc`` or ``hcp``.
    note : str
        What to know before using the entry; may be empty.
    values : mapping of str to LibraryValue
        Constants under the keys of the sheet's ``[material]``, and
        ``lattice_constant_nm``, ``edge_distance_d``, ``centre_distance_d``.
    """

    name: str
    title: str
    lattice: str
    note: str
    values: Mapping[str, LibraryValue]

    @property
    def edge_distance_d(self) -> float:
        """Least distance of an indent's centre from an edge, in mean diagonals. [1]."""
        return self.values["edge_distance_d"].value

    @property
    def centre_distance_d(self) -> float:
        """Least distance between the centres of two indents, in mean diagonals. [1]."""
        return self.values["centre_distance_d"].value


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
        hint = f"the nearest name is '{close[0]}'" if close else f"it has {', '.join(known)}"
        message = f"the library has no metal '{name}'; {hint}"
        raise UsageError(message)
    text = (files(__name__) / f"{name}.toml").read_text(encoding="utf-8")
    return _material(tomllib.loads(text))


def _material(entry: dict[str, Any]) -> Material:
    values = {key: LibraryValue(**value) for key, value in entry.pop("values").items()}
    return Material(values=values, **entry)
