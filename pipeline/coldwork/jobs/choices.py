"""The grid of other choices for a batch: from words of the command line to methods.

A choice may change what is done with a coupon's reduced readings, and nothing before that.
"""

import tomllib
from collections.abc import Iterator, Mapping, Sequence
from copy import deepcopy
from dataclasses import dataclass
from itertools import product
from typing import Any, Final

from coldwork.errors import BatchRefused, UsageError
from coldwork.inputs.keys import schema_of
from coldwork.inputs.method import Method
from coldwork.inputs.sheet import method_of
from coldwork.inputs.source import Sheet, SheetFile
from coldwork.inputs.words import nearest, shown

__all__ = ["MOST_CHOICES", "OWN", "Choice", "choices_of"]

MOST_CHOICES: Final = 60  # more of them make no table that anybody reads
OWN: Final = "as the sheet says"
_WHOLE: Final = frozenset({"character"})  # sections whose keys exclude one another
_REDUCES: Final[Mapping[str, frozenset[str]]] = {  # keys that act on readings, by section
    "material": frozenset({"name", "lattice", "edge_distance_d", "centre_distance_d"}),
    "strength": frozenset({"route"}),
    "indentation": frozenset(
        {"resolution_um", "size_effect", "characteristic_depth_um", "size_strength_gpa2_um"}
    ),
    "hardening": frozenset(),
    "line_energy": frozenset(),
    "character": frozenset(),
    "temperature": frozenset(),
}
_OPEN: Final = {"[": 1, "{": 1, "]": -1, "}": -1}


@dataclass(frozen=True)
class Choice:
    """One point of the grid.

    Attributes
    ----------
    said : tuple of (str, str)
        Each key with its value as it was said; empty for the sheet itself.
    method : Method
        The batch's method under it.
    """

    said: tuple[tuple[str, str], ...]
    method: Method

    @property
    def label(self) -> str:
        """Keys and values in words."""
        return ", ".join(f"{key} = {value}" for key, value in self.said) or OWN

    @property
    def short(self) -> str:
        """The values alone."""
        return " · ".join(value for _, value in self.said) or OWN


def choices_of(sheet: Sheet, method: Method, varied: Sequence[str]) -> list[Choice]:
    """Make the full grid of choices.

    Parameters
    ----------
    sheet : Sheet
        The batch's sheet.
    method : Method
        What it comes to.
    varied : sequence of str
        ``KEY=V1,V2,...`` each; values are TOML, words may stand bare.

    Returns
    -------
    list of Choice
        The sheet's own first, then the grid, the last key running fastest.

    Raises
    ------
    UsageError
        If a key changes how readings are read or reduced, is unknown or stands twice, or a
        choice makes no method; the message names it.
    """
    axes = [_axis(text) for text in varied]
    if not axes:
        message = "nothing to compare: say --vary KEY=V1,V2,..., such as --vary hardening.law=..."
        raise UsageError(message)
    keys = [key for key, _ in axes]
    for key in keys:
        _refuse_reducing(key)
        if keys.count(key) > 1:
            message = f"--vary {key}: this key is varied twice; name all its values at once"
            raise UsageError(message)
    points = list(product(*[[(key, value) for value in values] for key, values in axes]))
    if len(points) > MOST_CHOICES:
        message = f"these are {len(points)} choices; compare takes {MOST_CHOICES} at most"
        raise UsageError(message)
    return [Choice((), method), *(_choice(sheet, method, point) for point in points)]


def _axis(text: str) -> tuple[str, list[str]]:
    """Split ``KEY=V1,V2`` at the commas outside brackets and quotes."""
    key, equals, rest = text.partition("=")
    values = [value.strip() for value in _split(rest)]
    if not equals or not key.strip() or not all(values):
        message = f"--vary {shown(text)}: write it as KEY=V1,V2,..., such as hardening.law=constant"
        raise UsageError(message)
    if len(set(values)) < len(values):
        message = f"--vary {key.strip()}: a value stands twice"
        raise UsageError(message)
    return key.strip(), values


def _split(text: str) -> Iterator[str]:
    depth, quote, piece = 0, "", ""
    for sign in text:
        if quote:
            quote = "" if sign == quote else quote
        elif sign in "\"'":
            quote = sign
        depth += 0 if quote else _OPEN.get(sign, 0)
        if sign == "," and not depth and not quote:
            yield piece
            piece = ""
        else:
            piece += sign
    yield piece


def _refuse_reducing(key: str) -> None:
    section, _, name = key.partition(".")
    if not schema_of((section,)):
        known = [s for s in _REDUCES if schema_of((s,))]
        message = f"--vary {key}: the sheet has no section [{section}]. {nearest(section, known)}"
        raise UsageError(message)
    first = name.partition(".")[0]
    if section not in _REDUCES or first in _REDUCES[section]:
        message = (
            f"--vary {key}: this key acts on how readings are read, reduced or pooled, and compare "
            "works from coupons that are reduced already. Process the batch once under each value."
        )
        raise UsageError(message)


def _choice(sheet: Sheet, method: Method, point: tuple[tuple[str, str], ...]) -> Choice:
    tables = deepcopy(sheet.tables)
    for key, value in point:
        _lay(tables, key, _parsed(key, value))
    file = SheetFile("the choice", "0" * 64, tables, {})
    label = ", ".join(f"{key} = {value}" for key, value in point)
    try:
        found = method_of(Sheet(tables, (file,)), method.folder, with_files=False)
    except BatchRefused as refused:
        message = "\n".join(
            [f"--vary {label}: this choice makes no method:", *(f"  {c}" for c in refused.causes)]
        )
        raise UsageError(message) from refused
    return Choice(point, found)


def _parsed(key: str, value: str) -> Any:  # noqa: ANN401 - whatever TOML can hold
    """Read a value as TOML, and a bare word as text."""
    try:
        return tomllib.loads(f"value = {value}")["value"]
    except tomllib.TOMLDecodeError as error:
        if "=" in value or value[0] in "[\"'":
            message = f"--vary {key}: {shown(value)} is no value of TOML ({error})"
            raise UsageError(message) from error
        return value


def _lay(tables: dict[str, Any], key: str, value: object) -> None:
    """Put a value at its key; a table given for a section is laid over what stands there."""
    *path, last = key.split(".")
    at = tables
    for name in path:
        below = at.get(name)
        at[name] = dict(below) if isinstance(below, dict) else {}
        at = at[name]
    below = at.get(last)
    if path or not isinstance(value, dict):
        at[last] = value
        return
    for name in value:
        _refuse_reducing(f"{last}.{name}")
    laid_over = isinstance(below, dict) and last not in _WHOLE
    at[last] = {**below, **value} if laid_over and isinstance(below, dict) else value
