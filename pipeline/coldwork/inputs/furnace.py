"""A furnace file: what holds boundaries in a metal, how fast it recovers and recrystallises.

Read like a batch sheet: the same numbers with uncertainty, the same messages. Nothing has
to stand in it; what then cannot be predicted is said by whoever asks.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

from coldwork.contracts import document
from coldwork.errors import BatchRefused
from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import KeyName, Spec
from coldwork.inputs.numbers import Given, refuse_unreal_numbers, to_given
from coldwork.inputs.source import Sheet, read_toml
from coldwork.inputs.structure import refuse_misfits
from coldwork.units import to_si

__all__ = ["Furnace", "read_furnace"]

_INPUT: Final = "#/$defs/input"
_WINDOWS: Final[Mapping[KeyName, tuple[float, float]]] = {
    ("boundary", "energy_j_per_m2"): (1e-3, 10.0),
    ("boundary", "curvature_radius_um"): (1e-3, 1e5),
    ("particles", "fraction"): (0.0, 1.0),
    ("particles", "radius_nm"): (0.1, 1e6),
    ("recovery", "activation_energy_kj_per_mol"): (1.0, 2000.0),
    ("recovery", "activation_volume_nm3"): (1e-4, 1e3),
    ("recovery", "youngs_modulus_gpa"): (0.1, 2000.0),
    ("recovery", "attempt_frequency_per_s"): (1e6, 1e16),
    ("recovery", "taylor_factor"): (0.1, 100.0),
    ("recovery", "coefficient"): (1e-3, 100.0),
    ("recrystallisation", "exponent"): (0.05, 10.0),
    ("recrystallisation", "prefactor_per_s"): (1e-20, 1e60),
    ("recrystallisation", "activation_energy_kj_per_mol"): (1.0, 2000.0),
}
"""Window of each number, both ends allowed: it catches a wrong unit. [unit of the key]"""


@dataclass(frozen=True)
class Furnace:
    """What a furnace file says, checked.

    Attributes
    ----------
    numbers : mapping of str to Given
        Every number with uncertainty by its dotted place; defaults of sections that are there.
    correlation : float
        Of the errors of ln B_0 and Q. [1]
    hold_temperature : float or None
        At which times are told. [K]
    hold_time : float
        For which temperatures are told. [s]
    fractions : tuple of float
        Recrystallised fractions that times and temperatures are told to, as said. [1]
    file : tuple of (str, str), optional
        Name and SHA-256 of the file; empty without one.
    """

    numbers: Mapping[str, Given] = field(default_factory=dict)
    correlation: float = 0.0
    hold_temperature: float | None = None
    hold_time: float = 3600.0
    fractions: tuple[float, ...] = (0.05, 0.5, 0.95)
    file: tuple[tuple[str, str], ...] = ()

    def has(self, section: str) -> bool:
        """Tell whether a section gives any number."""
        return any(name.startswith(f"{section}.") for name in self.numbers)


def read_furnace(path: Path) -> Furnace:
    """Read a furnace file.

    Parameters
    ----------
    path : Path
        The TOML file.

    Returns
    -------
    Furnace
        Checked.

    Raises
    ------
    BatchRefused
        With everything that is wrong with it: where it stands, the rule that it breaks,
        the nearest known name, and how to mend it.
    """
    file = read_toml(path.parent, path.name, "furnace file")
    sheet = Sheet(file.tables, (file,))
    causes = Causes(sheet)
    refuse_unreal_numbers(causes)
    numbers = dict(_numbers(causes))
    refuse_misfits(causes, "furnace")
    if causes.found:
        raise BatchRefused(str(path), causes.all())
    holding = _with_defaults("holding", sheet.tables)
    said = holding.get("temperature_c")
    return Furnace(
        numbers=numbers,
        correlation=float(sheet.tables.get("recrystallisation", {}).get("correlation", 0.0)),
        hold_temperature=None if said is None else float(to_si(said, "Cel")),
        hold_time=float(holding["time_s"]),
        fractions=tuple(float(x) for x in holding["fractions"]),
        file=((file.name, file.digest),),
    )


def _numbers(causes: Causes) -> Iterator[tuple[str, Given]]:
    tables = causes.sheet.tables
    for section, schema in document("furnace")["properties"].items():
        table = tables.get(section)
        if not isinstance(table, dict):
            continue
        for key, inner in schema["properties"].items():
            if inner.get("$ref") != _INPUT or (key not in table and "default" not in inner):
                continue
            raw, origin = table.get(key), "sheet"
            if raw is None:
                raw, origin = {"value": inner["default"], "source": inner["source"]}, "default"
            place = (section, key)
            given = to_given(causes, place, raw, Spec(inner["unit"], *_WINDOWS[place]), origin)
            if given is not None:
                yield given.input.name, given


def _with_defaults(section: str, tables: Mapping[str, Any]) -> dict[str, Any]:
    properties = document("furnace")["properties"][section]["properties"]
    defaults = {key: inner["default"] for key, inner in properties.items() if "default" in inner}
    return {**defaults, **tables.get(section, {})}
