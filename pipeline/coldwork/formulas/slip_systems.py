"""Slip systems in Miller or Miller-Bravais indices, as directions in Cartesian axes."""

import re
from dataclasses import dataclass
from itertools import permutations, product
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument

__all__ = ["SlipSystem", "slip_system"]

_Floats = NDArray[np.float64]
_BRACKETS: Final = re.compile(r"\s*([({])([^)}]*)[)}]\s*([\[<])([^\]>]*)[\]>]\s*")
_INDEX: Final = re.compile(r"-?\d")


@dataclass(frozen=True)
class SlipSystem:
    """A slip plane with a Burgers vector in it.

    Attributes
    ----------
    text : str
        As it was written.
    normal, burgers : tuple of float
        Directions of the plane's normal and of the Burgers vector, in the crystal's
        Cartesian axes (hexagonal: x along [2 -1 -1 0], z along [0001]). [1]
    """

    text: str
    normal: tuple[float, float, float]
    burgers: tuple[float, float, float]


def slip_system(text: str, *, hexagonal: bool, c_over_a: float | None = None) -> SlipSystem:
    """Read a slip system such as ``{111}<110>``, ``(1-11)[110]`` or ``{0001}<11-20>``.

    Braces and angle brackets name families: of all their members the first plane and
    direction that fit together are taken, which stand for the others.

    Parameters
    ----------
    text : str
        Plane, then direction; one digit an index, a minus before it, spaces between
        them if wanted.
    hexagonal : bool
        Whether the indices are Miller-Bravais, four each, or Miller, three each.
    c_over_a : float, optional
        Axial ratio; needed where a hexagonal plane or direction leaves the basal plane
        other than along its normal. [1]

    Returns
    -------
    SlipSystem
        The first member of the families.

    Raises
    ------
    InvalidArgument
        If the text is not a slip system, has another number of indices, names a plane
        in which no such direction lies, or needs `c_over_a`.
    """
    found = _BRACKETS.fullmatch(text)
    if found is None:
        message = f"{text!r} is no slip system: write it like {{111}}<110> or {{0001}}<11-20>"
        raise InvalidArgument(message)
    count = 4 if hexagonal else 3
    plane, direction = _indices(text, found[2], count), _indices(text, found[4], count)
    planes = _family(plane, hexagonal=hexagonal) if found[1] == "{" else [plane]
    directions = _family(direction, hexagonal=hexagonal) if found[3] == "<" else [direction]
    for p, d in product(planes, directions):
        if sum(x * y for x, y in zip(p, d, strict=True)) == 0:
            ratio = _ratio(text, p, d, c_over_a) if hexagonal else 1.0
            normal = _hexagonal_normal(p, ratio) if hexagonal else np.array(p, dtype=float)
            burgers = _hexagonal_direction(d, ratio) if hexagonal else np.array(d, dtype=float)
            return SlipSystem(text, _unit(normal), _unit(burgers))
    message = f"{text!r} is no slip system: the direction does not lie in the plane"
    raise InvalidArgument(message)


def _indices(text: str, written: str, count: int) -> tuple[int, ...]:
    indices = tuple(int(x) for x in _INDEX.findall(written))
    rest = _INDEX.sub("", written).strip()
    if rest or len(indices) != count or not any(indices):
        kind = "Miller-Bravais indices, four" if count == 4 else "Miller indices, three"
        message = f"{text!r} is no slip system: {kind} each, one digit an index"
        raise InvalidArgument(message)
    if count == 4 and sum(indices[:3]) != 0:
        message = f"{text!r} is no slip system: the first three Miller-Bravais indices sum to 0"
        raise InvalidArgument(message)
    return indices


def _family(indices: tuple[int, ...], *, hexagonal: bool) -> list[tuple[int, ...]]:
    """All members of a family; the one that was written comes first."""
    members: dict[tuple[int, ...], None] = {indices: None}
    if hexagonal:
        for turned in permutations(indices[:3]):
            for sign, up in product((1, -1), repeat=2):
                members[(*(sign * x for x in turned), up * indices[3])] = None
        return list(members)
    for turned in permutations(indices):
        for signs in product((1, -1), repeat=3):
            members[tuple(s * x for s, x in zip(signs, turned, strict=True))] = None
    return list(members)


def _ratio(
    text: str, plane: tuple[int, ...], direction: tuple[int, ...], c_over_a: float | None
) -> float:
    """Give the axial ratio, or any number where it does not matter."""
    in_basal, upright = direction[3] == 0, plane[3] == 0 or not any(plane[:3])
    along_c = not any(direction[:3])
    if upright and (in_basal or along_c):
        return 1.0
    if c_over_a is None or not c_over_a > 0.0:
        message = f"{text!r} needs the axial ratio c/a of the crystal"
        raise InvalidArgument(message)
    return c_over_a


def _hexagonal_direction(d: tuple[int, ...], ratio: float) -> _Floats:
    u, v, t, w = d
    a1, a2, a3 = _axes()
    return np.asarray(u * a1 + v * a2 + t * a3 + np.array([0.0, 0.0, w * ratio]))


def _hexagonal_normal(p: tuple[int, ...], ratio: float) -> _Floats:
    h, k, i, j = p
    a1, a2, a3 = _axes()
    return np.asarray(h * a1 + k * a2 + i * a3 + np.array([0.0, 0.0, 1.5 * j / ratio]))


def _axes() -> tuple[_Floats, _Floats, _Floats]:
    """Three basal axes at 120 degrees, of length 1."""
    half = np.sqrt(3.0) / 2.0
    return np.array([1.0, 0.0, 0.0]), np.array([-0.5, half, 0.0]), np.array([-0.5, -half, 0.0])


def _unit(d: _Floats) -> tuple[float, float, float]:
    x, y, z = d / np.linalg.norm(d)
    return float(x), float(y), float(z)
