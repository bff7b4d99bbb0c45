"""What an entry of the library holds: a metal, its constants, and which there may be."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

__all__ = ["CRYSTAL", "KEYS", "LATTICES", "NEEDED", "Key", "LibraryValue", "Material"]


@dataclass(frozen=True)
class Key:
    """A constant that an entry may hold.

    Attributes
    ----------
    unit : str
        UCUM code, the one that the key's name ends in.
    low, high : float
        Window, both ends allowed; wide, there to catch a number in the wrong unit. [`unit`]
    """

    unit: str
    low: float
    high: float


KEYS: Final[Mapping[str, Key]] = {
    "shear_modulus_gpa": Key("GPa", 0.1, 2000.0),
    "poisson_ratio": Key("1", -0.99, 0.499),
    "lattice_constant_nm": Key("nm", 0.1, 5.0),
    "c_over_a": Key("1", 0.5, 5.0),
    "burgers_vector_nm": Key("nm", 0.05, 5.0),
    "mass_density_kg_per_m3": Key("kg/m3", 100.0, 50000.0),
    "molar_mass_g_per_mol": Key("g/mol", 1.0, 500.0),
    "heat_capacity_j_per_kg_k": Key("J/(kg.K)", 10.0, 20000.0),
    "melting_point_k": Key("K", 100.0, 5000.0),
    "shear_modulus_slope": Key("1", -10.0, 10.0),
    "c11_gpa": Key("GPa", 0.1, 5000.0),
    "c12_gpa": Key("GPa", -5000.0, 5000.0),
    "c13_gpa": Key("GPa", -5000.0, 5000.0),
    "c33_gpa": Key("GPa", 0.1, 5000.0),
    "c44_gpa": Key("GPa", 0.1, 5000.0),
    "core_energy": Key("1", 0.0, 10.0),
    "boundary_energy_j_per_m2": Key("J/m2", 0.001, 10.0),
    "stacking_fault_energy_j_per_m2": Key("J/m2", 0.0001, 10.0),
    "edge_distance_d": Key("1", 0.1, 100.0),
    "centre_distance_d": Key("1", 0.1, 100.0),
}
"""Every constant that an entry may hold, in the order of the files."""

NEEDED: Final = (
    "shear_modulus_gpa",
    "poisson_ratio",
    "burgers_vector_nm",
    "mass_density_kg_per_m3",
    "edge_distance_d",
    "centre_distance_d",
)
"""The constants without which an entry is refused."""

CRYSTAL: Final[Mapping[str, tuple[str, ...]]] = {
    "fcc": ("c11_gpa", "c12_gpa", "c44_gpa"),
    "bcc": ("c11_gpa", "c12_gpa", "c44_gpa"),
    "hcp": ("c11_gpa", "c12_gpa", "c13_gpa", "c33_gpa", "c44_gpa"),
}
"""The elastic constants of a crystal by its lattice: all of them, or none."""

LATTICES: Final[Mapping[str, str]] = {
    "fcc": "{111}<110>",
    "bcc": "{110}<111>",
    "hcp": "{0001}<11-20>",
}
"""The slip system of a lattice where an entry names no other."""


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
    slip_system : str
        Plane and direction of the slip that the Burgers vector belongs to.
    note : str
        What to know before using the entry; may be empty.
    values : mapping of str to LibraryValue
        Constants under the keys of the sheet's ``[material]``, and the others of `KEYS`.
    """

    name: str
    title: str
    lattice: str
    slip_system: str
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
