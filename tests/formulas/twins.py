"""What a twin of a formula is: the same relation at any precision, and its dimensions."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from mpmath import mpf  # type: ignore[import-untyped]

Twin = Callable[..., mpf]
Dimensions = tuple[float, float, float, float, float]  # powers of kg, m, s, K, mol

ONE: Dimensions = (0, 0, 0, 0, 0)
FORCE: Dimensions = (1, 1, -2, 0, 0)
LENGTH: Dimensions = (0, 1, 0, 0, 0)
STRESS: Dimensions = (1, -1, -2, 0, 0)
DENSITY: Dimensions = (0, -2, 0, 0, 0)
PER_LENGTH: Dimensions = (1, 0, -2, 0, 0)  # N/m and J/m^2
LINE: Dimensions = (1, 1, -2, 0, 0)  # J/m
MASS_DENSITY: Dimensions = (1, -3, 0, 0, 0)
MOLAR_MASS: Dimensions = (1, 0, 0, 0, -1)
MOLAR: Dimensions = (1, 2, -2, 0, -1)
SPECIFIC: Dimensions = (0, 2, -2, 0, 0)
HEAT: Dimensions = (0, 2, -2, -1, 0)
KELVIN: Dimensions = (0, 0, 0, 1, 0)
RATE: Dimensions = (0, 0, -1, 0, 0)
TIME: Dimensions = (0, 0, 1, 0, 0)


@dataclass(frozen=True)
class Case:
    """A formula's twin, where to compare them, and what its arguments are."""

    twin: Twin
    arguments: Mapping[str, Dimensions]
    result: Dimensions
    points: tuple[tuple[float, ...], ...]
    zero_is_fine: frozenset[str] = field(default_factory=frozenset)
    sign_is_free: frozenset[str] = field(default_factory=frozenset)

    def at(self, place: int) -> dict[str, float]:
        return dict(zip(self.arguments, self.points[place], strict=True))
