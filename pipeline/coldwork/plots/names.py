"""Names of coupons, operators and inputs as they stand on a plot.

A name may be long, may hold characters that the plots' font lacks, and may
differ from its neighbour in one character in the middle. What is shown always
fits its room and always differs where the names differ.
"""

from collections import Counter, defaultdict
from collections.abc import Sequence
from functools import cache

from matplotlib.font_manager import findfont
from matplotlib.ft2font import FT2Font, LoadFlags

__all__ = [
    "ELLIPSIS",
    "FONT",
    "counted",
    "fitted",
    "label_lines",
    "listed",
    "shown",
    "signed_percent",
    "told_apart",
    "width",
    "wrapped",
]

FONT = "DejaVu Sans"  # comes with matplotlib, so it is the same everywhere
ELLIPSIS = "…"
_POINTS_PER_INCH = 72.0


@cache
def _font() -> FT2Font:
    font = FT2Font(findfont(FONT))
    font.set_size(1.0, _POINTS_PER_INCH)  # advances come out in ems
    return font


@cache
def _advance(character: str) -> float:
    flags = LoadFlags.NO_HINTING | LoadFlags.NO_SCALE
    font = _font()
    return float(font.load_char(ord(character), flags=flags).horiAdvance) / font.units_per_EM


@cache
def _drawable(character: str) -> bool:
    return character.isprintable() and _font().get_char_index(ord(character)) != 0


def width(text: str, size: float) -> float:
    """Measure a line of text, kerning left out.

    Parameters
    ----------
    text : str
        One line.
    size : float
        Font size. [pt]

    Returns
    -------
    float
        Its width. [inch]
    """
    return sum(map(_advance, text)) * size / _POINTS_PER_INCH


def shown(text: str) -> str:
    r"""Give a text that the plots' font can draw.

    A character that the font lacks, or that prints as nothing, is written as
    its code (`\u4e2d`); a space at either end is written as an open box, so that
    `A` and `A ` do not look alike.
    """
    inner = text.strip(" ")
    before = len(text) - len(text.lstrip(" "))
    after = len(text) - len(inner) - before if inner else 0
    drawn = "".join(c if _drawable(c) else f"\\u{ord(c):04x}" for c in inner)
    return "␣" * before + drawn + "␣" * after


def fitted(text: str, size: float, room: float) -> str:
    """Shorten a text in the middle until it fits.

    Parameters
    ----------
    text : str
        One line that the font can draw.
    size : float
        Font size. [pt]
    room : float
        Width that it may take. [inch]

    Returns
    -------
    str
        The text itself where it fits, else its head and tail about an ellipsis.
    """
    if width(text, size) <= room:
        return text
    left = room - width(ELLIPSIS, size)
    head = _taken(text, size, 0.55 * left)
    tail = _taken(text[::-1], size, left - width(head, size))[::-1]
    return head + ELLIPSIS + tail


def told_apart(names: Sequence[str], size: float, room: float) -> list[str]:
    """Shorten names so that each fits and no two look the same.

    Where shortening in the middle would make two names equal, the part in which
    they differ is kept between two ellipses; where even that does not tell them
    apart, the name's place in the list follows it.

    Parameters
    ----------
    names : sequence of str, length n
        The names as they came, all different.
    size : float
        Font size. [pt]
    room : float
        Width that each may take. [inch]

    Returns
    -------
    list of str, length n
        What to show for each.
    """
    full = [shown(name) for name in names]
    labels = [fitted(text, size, room) for text in full]
    for members in _alike(labels):
        if len({full[i] for i in members}) > 1:
            for i, label in _differing([full[j] for j in members], members, size, room):
                labels[i] = label
    sign = " #"
    while alike := _alike(labels):
        for i in (i for members in alike for i in members):
            mark = f"{sign}{i + 1}"
            labels[i] = fitted(full[i], size, room - width(mark, size)) + mark
        sign += "#"
    return labels


def wrapped(text: str, size: float, room: float) -> list[str]:
    """Break a sentence into lines that fit.

    Parameters
    ----------
    text : str
        Words between single spaces; a word wider than the room is shortened.
    size : float
        Font size. [pt]
    room : float
        Width of a line. [inch]

    Returns
    -------
    list of str
        The lines.
    """
    lines: list[str] = []
    line = ""
    for word in text.split(" "):
        longer = f"{line} {word}" if line else word
        if line and width(longer, size) > room:
            lines.append(line)
            longer = word
        line = fitted(longer, size, room) if longer == word else longer
    return [*lines, line] if line else lines


def counted(n: int, noun: str) -> str:
    """Give a number with its noun, such as `1 coupon` or `5 coupons`."""
    return f"{n} {noun}" if n == 1 else f"{n} {noun}s"


def signed_percent(x: float) -> str:
    """Give a deviation in percent with its sign, such as `−5.1 %`."""
    return f"{x:+.1f} %".replace("-", "−")


def listed(items: Sequence[str], most: int = 8) -> str:
    """Give the first items of a list in words, and how many more there are."""
    more = len(items) - most
    return ", ".join(items[:most]) + (f", and {more} more" if more > 0 else "")


def label_lines(label: str, size: float, room: float) -> list[str]:
    """Break the label of an axis into lines as `wrapped` does, its unit kept with a word."""
    name, bracket, unit = label.partition(" [")
    bound = f"\u00a0[{unit}".replace(" ", "\u00a0") if bracket else ""
    return wrapped(name + bound, size, room)


def _taken(text: str, size: float, room: float) -> str:
    used = 0.0
    for i, character in enumerate(text):
        used += _advance(character) * size / _POINTS_PER_INCH
        if used > room:
            return text[:i]
    return text


def _alike(labels: Sequence[str]) -> list[list[int]]:
    counts = Counter(labels)
    places: defaultdict[str, list[int]] = defaultdict(list)
    for i, label in enumerate(labels):
        if counts[label] > 1:
            places[label].append(i)
    return list(places.values())


def _differing(
    texts: Sequence[str], members: Sequence[int], size: float, room: float
) -> list[tuple[int, str]]:
    first, last = min(texts), max(texts)
    pairs = zip(first, last, strict=False)
    prefix = next((i for i, (a, b) in enumerate(pairs) if a != b), min(len(first), len(last)))
    left = room - 2.0 * width(ELLIPSIS, size)
    found = []
    for i, text in zip(members, texts, strict=True):
        head = _taken(text, size, 0.3 * left)
        start = max(prefix - 2, len(head))
        middle = _taken(text[start:], size, 0.45 * left)
        rest = text[start + len(middle) :]
        tail = _taken(rest[::-1], size, left - width(head + middle, size))[::-1]
        joint = ELLIPSIS if start > len(head) else ""
        end = ELLIPSIS if len(tail) < len(rest) else ""
        found.append((i, head + joint + middle + end + tail))
    return found
