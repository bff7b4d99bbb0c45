"""The keys of a batch sheet as its schema lists them: numbers, units, defaults.

The schema says which keys there are, in what unit and with which default. Only
the windows stand here: wide ones, there to catch a number in the wrong unit (a
modulus in MPa under a key in GPa) before it becomes a density, and to keep the
arithmetic far from overflow.
"""

from collections.abc import Iterator, Mapping
from copy import deepcopy
from dataclasses import dataclass
from functools import cache
from typing import Any, Final, TypeAlias

from coldwork.contracts import document
from coldwork.inputs.positions import KeyPath

__all__ = [
    "TERMS",
    "WINDOWS",
    "KeyName",
    "Spec",
    "default_of",
    "number_specs",
    "schema_of",
    "spec_of",
]

KeyName: TypeAlias = tuple[str, ...]
TERMS: Final = ("strength", "terms_mpa")
_INPUT: Final = "#/$defs/input"

WINDOWS: Final[Mapping[str, tuple[float, float]]] = {
    "shear_modulus_gpa": (0.1, 2000.0),
    "poisson_ratio": (-0.99, 0.499),
    "burgers_vector_nm": (0.05, 5.0),
    "mass_density_kg_per_m3": (100.0, 50000.0),
    "molar_mass_g_per_mol": (1.0, 500.0),
    "heat_capacity_j_per_kg_k": (10.0, 20000.0),
    **dict.fromkeys(("c11_gpa", "c12_gpa", "c13_gpa", "c33_gpa", "c44_gpa"), (0.1, 5000.0)),
    "c_over_a": (1.0, 3.0),
    "melting_point_k": (100.0, 5000.0),
    "shear_modulus_slope": (-10.0, 10.0),
    "thermal_mpa": (0.0, 1e5),
    "athermal_k": (1.0, 1e5),
    "baseline_mpa": (0.0, 1e5),
    "friction_mpa": (0.0, 1e5),
    "hall_petch_mpa_m05": (0.0, 100.0),
    "terms_mpa": (-1e5, 1e5),
    "obstacle_mpa": (0.0, 1e5),
    "superposition_exponent": (1.0, 2.0),
    "constraint_factor": (0.1, 100.0),
    "intercept_mpa": (-1e5, 1e5),
    "representative_strain": (1e-6, 2.0),
    "strain_ratio": (1e-6, 2.0),
    "characteristic_depth_um": (0.0, 1e3),
    "size_strength_gpa2_um": (0.0, 1e4),
    "initial_hardening_mpa": (1e-3, 1e6),
    "saturation_stress_mpa": (1e-3, 1e6),
    "initial_stress_mpa": (0.0, 1e5),
    "taylor_factor": (0.1, 100.0),
    "coefficient": (1e-3, 100.0),
    "slope_n_per_m": (1e-3, 1e5),
    "reference_density_per_m2": (1e6, 1e18),
    "outer_radius_nm": (1e-3, 1e9),
    "outer_radius_factor": (1e-3, 1e3),
    "arrangement": (1e-3, 1e3),
    "wall_fraction": (0.0, 1.0),
    "density_ratio": (1.0, 1e4),
    "stress_ratio": (1.0, 100.0),
    "core_radius_b": (1e-3, 1e3),
    "core_energy": (0.0, 100.0),
    "bias_rel": (-0.5, 0.5),
    "slope_gpa": (1e-3, 2000.0),
    "ratio": (1e-3, 1e3),
    "intercept_j_per_g": (-100.0, 100.0),
}
"""Window of each numeric input by its key, both ends allowed. [unit of the key]"""


@dataclass(frozen=True)
class Spec:
    """What a numeric key may hold.

    Attributes
    ----------
    unit : str
        UCUM code of the key's unit.
    low, high : float
        Window, both ends allowed. [`unit`]
    """

    unit: str
    low: float
    high: float

    def fault(self, value: float) -> str:
        """Say in a sentence what a value must be, empty if it is. [`unit`]."""
        if self.low <= value <= self.high:
            return ""
        if self.low > 0.0 >= value:
            return "It must be greater than zero."
        if self.low == 0.0 > value:
            return "It must not be negative."
        unit = "" if self.unit == "1" else f" {self.unit}"
        return f"It must lie between {self.low:g} and {self.high:g}{unit}."


@cache
def _schema() -> Mapping[str, Any]:
    return document("batch_sheet")


def schema_of(path: KeyPath) -> Mapping[str, Any]:
    """Give the schema of a section or key, empty if the sheet knows none of that name."""
    at: Mapping[str, Any] = _schema()
    for part in path:
        at = (
            at.get("items", {}) if isinstance(part, int) else at.get("properties", {}).get(part, {})
        )
    return at


def default_of(key: KeyPath) -> Any:  # noqa: ANN401  # a default is whatever TOML can hold
    """Give the default of a key, a fresh copy; None if it is absent unless said."""
    return deepcopy(schema_of(key).get("default"))


@cache
def number_specs() -> Mapping[KeyName, Spec]:
    """Give all keys that take a number with its uncertainty, but for named terms."""
    return dict(_numbers((), _schema()))


def spec_of(key: KeyName) -> Spec | None:
    """Give what a key may hold if it takes a number with uncertainty, named terms too."""
    if key[:2] == TERMS and len(key) == len(TERMS) + 1:
        return Spec("MPa", *WINDOWS["terms_mpa"])
    return number_specs().get(key)


def _numbers(path: KeyName, schema: Mapping[str, Any]) -> Iterator[tuple[KeyName, Spec]]:
    for name, inner in schema.get("properties", {}).items():
        if inner.get("$ref") == _INPUT:
            yield (*path, name), Spec(inner["unit"], *WINDOWS[name])
        elif inner.get("type") == "object":
            yield from _numbers((*path, name), inner)
