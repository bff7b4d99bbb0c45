"""Words that messages about a sheet share: keys, values and nearest names as people read them."""

from collections.abc import Iterable, Sequence
from difflib import get_close_matches
from typing import Final

from coldwork.inputs.positions import KeyPath

__all__ = ["key_text", "listed", "near", "nearest", "shown"]

_LONGEST: Final = 60  # characters of a value that a message repeats


def nearest(name: str, known: Iterable[str]) -> str:
    """Give ``the nearest known name is 'x'``, or the whole choice when nothing is near."""
    choice = sorted(known)
    close = near(name, choice)
    if close is not None:
        return f"The nearest known name is '{close}'."
    if not choice:
        return "There is none to choose from."
    return f"Known are {listed(choice)}."


def near(name: str, known: Iterable[str]) -> str | None:
    """Give the known name that is nearest, None when nothing is near."""
    lower = {each.lower(): each for each in sorted(known, reverse=True)}
    close = get_close_matches(name.lower(), list(lower), n=1, cutoff=0.6)
    return lower[close[0]] if close else None


def listed(names: Sequence[str], most: int = 24) -> str:
    """Join names for a sentence, no more than `most` of them."""
    head = ", ".join(names[:most])
    return head if len(names) <= most else f"{head} and {len(names) - most} more"


def shown(value: object) -> str:
    """Write a value as a message repeats it: on one line and not too long."""
    try:
        text = repr(value) if not isinstance(value, bool) else str(value).lower()
    except ValueError:
        text = "a number of too many digits"  # beyond what Python turns into text
    return text if len(text) <= _LONGEST else f"{text[: _LONGEST - 1]}…"


def key_text(path: KeyPath) -> str:
    """Write a key as a person finds it: ``[section] key``, ``[[limits]] no. 2, rule``.

    Parameters
    ----------
    path : tuple of str and int
        Names, and places in arrays from 0.

    Returns
    -------
    str
        Without line breaks, whatever the names hold.
    """
    if not path:
        return "the sheet"
    section, rest = _name(path[0]), path[1:]
    if rest and isinstance(rest[0], int):
        head, rest = f"[[{section}]] no. {rest[0] + 1}", rest[1:]
        return f"{head}, {_dotted(rest)}" if rest else head
    if rest and section == "indentation" and rest[0] in {"HBW", "HK"}:
        section, rest = f"{section}.{rest[0]}", rest[1:]
    return f"[{section}] {_dotted(rest)}" if rest else f"[{section}]"


def _dotted(path: KeyPath) -> str:
    text = ""
    for part in path:
        if isinstance(part, int):
            text += f" no. {part + 1}"
        else:
            text += f"{'.' if text else ''}{_name(part)}"
    return text


def _name(part: str | int) -> str:
    text = str(part)
    plain = text.isprintable() and text and len(text) <= _LONGEST
    return text if plain else shown(text)
