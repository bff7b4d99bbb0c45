"""Units as instruments write them, and the exact step from one to another.

One table, of our own: a unit is so many of its kind's first unit, as a fraction, so
that nothing is rounded before the last step.

References
----------
.. [1] BIPM, The International System of Units, 9th edition (2019), tables 4, 7 and 8.
.. [2] 3rd General Conference on Weights and Measures (1901): standard acceleration
   of free fall 9.80665 m/s², exact; it makes the kilogram-force.
.. [3] ISO 80000-3:2019 and NIST SP 811 (2008), B.8: inch 25.4 mm, pound 0.45359237 kg,
   both exact since 1959; they make pound-force and psi.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from typing import Final

__all__ = ["UNITS", "Step", "WrittenUnit", "spelled", "step_between"]

_GRAVITY: Final = Fraction("9.80665")  # m/s2
_POUND: Final = Fraction("0.45359237")  # kg
_INCH: Final = Fraction("25.4")  # mm
_LBF: Final = _POUND * _GRAVITY  # N
_PSI: Final = _LBF / _INCH**2  # MPa
_MOST_ZEROS: Final = 30  # of a power of ten


@dataclass(frozen=True)
class WrittenUnit:
    """A unit that a file may be written in.

    Attributes
    ----------
    name : str
        As layouts spell it.
    kind : str
        What it measures; units of one kind turn into one another.
    times, plus : Fraction
        A value in it is value * `times` + `plus` in the first unit of its kind.
    """

    name: str
    kind: str
    times: Fraction
    plus: Fraction = Fraction(0)

    def same(self, other: "WrittenUnit") -> bool:
        """Tell whether both say the same of a value, as MPa and N/mm2 do."""
        return (self.kind, self.times, self.plus) == (other.kind, other.times, other.plus)


@dataclass(frozen=True)
class Step:
    """From a written unit to a column's: value * `times` + `plus`.

    Attributes
    ----------
    times, plus : Fraction
        Exact.
    """

    times: Fraction = Fraction(1)
    plus: Fraction = Fraction(0)

    @cached_property
    def shift(self) -> int | None:
        """By how many places the decimal point moves to the right; None if that is not all."""
        if self.plus:
            return None
        for zeros in range(_MOST_ZEROS):
            if self.times == 10**zeros:
                return zeros
            if self.times * 10**zeros == 1:
                return -zeros
        return None


def _table() -> Mapping[str, WrittenUnit]:
    kinds: dict[str, dict[str, Fraction]] = {
        "force": {
            "N": Fraction(1),
            "kN": Fraction(1000),
            "kgf": _GRAVITY,
            "gf": _GRAVITY / 1000,
            "lbf": _LBF,
        },
        "length": {"mm": Fraction(1), "um": Fraction(1, 1000), "in": _INCH},
        "stress": {
            "MPa": Fraction(1),
            "GPa": Fraction(1000),
            "N/mm2": Fraction(1),
            "ksi": _PSI * 1000,
            "psi": _PSI,
            "kgf/mm2": _GRAVITY,
        },
        "time": {"s": Fraction(1), "min": Fraction(60)},
        "ratio": {"1": Fraction(1), "%": Fraction(1, 100)},
        "rate": {"/s": Fraction(1)},
        "energy": {"J/m3": Fraction(1)},
    }
    units = {
        name: WrittenUnit(name, kind, times)
        for kind, members in kinds.items()
        for name, times in members.items()
    }
    zero = Fraction("273.15")
    ninths = Fraction(5, 9)
    units["K"] = WrittenUnit("K", "temperature", Fraction(1))
    units["C"] = WrittenUnit("C", "temperature", Fraction(1), zero)
    units["F"] = WrittenUnit("F", "temperature", ninths, zero - 32 * ninths)
    return units


UNITS: Final[Mapping[str, WrittenUnit]] = _table()
"""Every unit that a layout may name, by its name."""

_OTHER_SPELLINGS: Final[Mapping[str, str]] = {
    "Cel": "C",
    "degC": "C",
    "degF": "F",
    "HV": "kgf/mm2",
    "HBW": "kgf/mm2",
    "HK": "kgf/mm2",
    "kp": "kgf",
    "p": "gf",
    "inch": "in",
    '"': "in",
    "sec": "s",
    "1/s": "/s",
    "s-1": "/s",
    "J/m^3": "J/m3",
    "-": "1",
    "": "1",
}
_SIGNS: Final = str.maketrans({"µ": "u", "μ": "u", "°": None, "²": "2", "³": "3", "^": None})
_BRACKETS: Final = {"[": "]", "(": ")", "<": ">"}


def spelled(text: str) -> WrittenUnit | None:
    """Give the unit that a cell of a units line means, in one of its usual spellings.

    Parameters
    ----------
    text : str
        Such as ``mm``, ``[µm]`` or ``N/mm²``.

    Returns
    -------
    WrittenUnit or None
        None if it is no unit of the table.
    """
    bare = text.strip()
    if len(bare) > 1 and _BRACKETS.get(bare[0]) == bare[-1]:
        bare = bare[1:-1].strip()
    bare = bare.translate(_SIGNS)
    return UNITS.get(_OTHER_SPELLINGS.get(bare, bare))


def step_between(written: str, wanted: str) -> Step | None:
    """Give the step from one unit to another.

    Parameters
    ----------
    written : str
        A name of `UNITS`.
    wanted : str
        UCUM code of a column's unit.

    Returns
    -------
    Step or None
        None if they do not measure the same.
    """
    one, other = UNITS.get(written), spelled(wanted)
    if one is None or other is None or one.kind != other.kind:
        return None
    return Step(one.times / other.times, (one.plus - other.plus) / other.times)
