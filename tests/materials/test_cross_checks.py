"""The library of metals against what general packages carry, and against itself.

Nothing may be off by more than its own u. Where a package's number does not go with the
package's own other numbers, that is shown here, and the check must find it.
"""

import gzip
import json
from functools import cache
from importlib.metadata import distribution
from math import sqrt
from typing import Any

import numpy as np
import periodictable
import pytest
from numpy.typing import NDArray

from coldwork.formulas.crystals import cubic_stiffness, hexagonal_stiffness, hill_shear_modulus
from coldwork.materials import Material, names
from coldwork.materials import load as read
from coldwork.materials.entry import CRYSTAL

load = cache(read)

AVOGADRO = 6.02214076e23  # per mole; SI Brochure, 9th edition, exact
GAS = 8.314462618  # J/(mol K); SI Brochure, 9th edition, exact
ELEMENTS = {
    "alpha-iron": "Fe",
    "aluminium": "Al",
    "chromium": "Cr",
    "cobalt": "Co",
    "copper": "Cu",
    "gold": "Au",
    "lead": "Pb",
    "magnesium": "Mg",
    "molybdenum": "Mo",
    "nickel": "Ni",
    "niobium": "Nb",
    "platinum": "Pt",
    "silver": "Ag",
    "tantalum": "Ta",
    "titanium": "Ti",
    "tungsten": "W",
    "vanadium": "V",
    "zinc": "Zn",
    "zirconium": "Zr",
}
WRONG = {  # in the packages; each is shown to be so below
    ("molybdenum", "Rigidity modulus"),
    ("zirconium", "Youngs modulus"),
    ("titanium", "density"),
    ("tantalum", "lattice"),
}
ALLOYS = {  # mass fractions in per cent, after the entry's title or source
    "aluminium-3xxx": {"Al": 97.9, "Mn": 1.2, "Fe": 0.5, "Si": 0.3, "Cu": 0.1},
    "aluminium-5xxx": {"Al": 97.2, "Mg": 2.5, "Fe": 0.3},
    "austenitic-17-12-2": {"Fe": 68.5, "Cr": 17.0, "Ni": 12.0, "Mo": 2.5},
    "austenitic-18-10": {"Fe": 72.0, "Cr": 18.0, "Ni": 10.0},
    "brass-70-30": {"Cu": 70.0, "Zn": 30.0},
    "brass-85-15": {"Cu": 85.0, "Zn": 15.0},
    "low-carbon-steel": {"Fe": 99.5, "C": 0.1, "Mn": 0.4},
    "nickel-16cr-8fe": {"Ni": 76.0, "Cr": 16.0, "Fe": 8.0},
    "nickel-32cu": {"Ni": 66.0, "Cu": 31.5, "Fe": 1.5, "Mn": 1.0},
    "tin-bronze-94-6": {"Cu": 94.0, "Sn": 6.0},
    "titanium-6al-4v": {"Ti": 90.0, "Al": 6.0, "V": 4.0},
    "titanium-grade-2": {"Ti": 99.73, "O": 0.12, "Fe": 0.15},
}
# Young's modulus in GPa, lowest and highest of the makers' data sheets that were read;
# 207 for N06600 is from memory.
SHEETS = {
    "aluminium-3xxx": (68.9, 70.0),
    "aluminium-5xxx": (68.0, 70.3),
    "austenitic-17-12-2": (193.0, 200.0),
    "austenitic-18-10": (193.0, 200.0),
    "brass-70-30": (110.0, 117.0),
    "brass-85-15": (110.0, 110.0),
    "low-carbon-steel": (190.0, 210.0),
    "nickel-16cr-8fe": (190.0, 207.0),
    "nickel-32cu": (173.0, 182.0),
    "tin-bronze-94-6": (110.0, 110.0),
    "titanium-6al-4v": (114.0, 114.0),
    "titanium-grade-2": (102.0, 105.0),
}
ATOMS = {"fcc": 4, "bcc": 2, "hcp": 2}  # in the cell
BURGERS = {"fcc": sqrt(2) / 2, "bcc": sqrt(3) / 2, "hcp": 1.0}  # a/2 <110>, a/2 <111>, a; over a
WITH_CRYSTAL = [name for name in names() if "c11_gpa" in load(name).values]


@cache
def elements() -> dict[str, dict[str, Any]]:
    """Read the element table of pymatgen-core without importing the package."""
    package = distribution("pymatgen-core")
    path = package.locate_file("pymatgen/core/periodic_table.json.gz")
    with gzip.open(str(path), "rt", encoding="utf-8") as stream:
        table: dict[str, dict[str, Any]] = json.load(stream)
    return table


def stiffness(metal: Material) -> NDArray[np.float64]:
    constants = [metal.values[key].value for key in CRYSTAL[metal.lattice]]
    return (hexagonal_stiffness if metal.lattice == "hcp" else cubic_stiffness)(*constants)


def youngs(name: str) -> tuple[float, float]:
    """E = 2 G (1 + nu), isotropic elasticity, and its u. [GPa]."""
    shear, ratio = (load(name).values[key] for key in ("shear_modulus_gpa", "poisson_ratio"))
    value = 2.0 * shear.value * (1.0 + ratio.value)
    return value, value * sqrt((shear.u / shear.value) ** 2 + (ratio.u / (1.0 + ratio.value)) ** 2)


def density(lattice: str, mass: float, a: float, c_over_a: float) -> float:
    """Density in kg/m3 from g/mol and nm."""
    cell = (a * 1e-9) ** 3 * (c_over_a * sqrt(3) / 2 if lattice == "hcp" else 1.0)
    return ATOMS[lattice] * mass * 1e-3 / AVOGADRO / cell


def crystal(symbol: str) -> dict[str, Any]:
    """Lattice constant in angstrom and c/a, as periodictable has them."""
    found: dict[str, Any] = getattr(periodictable, symbol).crystal_structure
    return found


def sound(what: str) -> list[tuple[str, str]]:
    return [(n, s) for n, s in ELEMENTS.items() if (n, what) not in WRONG]


def test_every_metal_is_an_element_or_an_alloy() -> None:
    assert sorted([*ELEMENTS, *ALLOYS]) == list(names())
    assert set(SHEETS) == set(ALLOYS)


@pytest.mark.parametrize(("name", "symbol"), sound("Rigidity modulus"))
def test_shear_moduli_agree_with_a_general_package(name: str, symbol: str) -> None:
    # pymatgen-core, periodic_table.json.gz: moduli rounded to 1 GPa.
    entry = load(name).values["shear_modulus_gpa"]
    assert abs(entry.value - elements()[symbol]["Rigidity modulus"]) <= entry.u + 0.5


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_poissons_ratios_agree_with_a_general_package(name: str, symbol: str) -> None:
    # pymatgen-core, periodic_table.json.gz: ratios rounded to 0.01.
    entry = load(name).values["poisson_ratio"]
    assert abs(entry.value - elements()[symbol]["Poissons ratio"]) <= entry.u + 0.005


@pytest.mark.parametrize(("name", "symbol"), sound("Youngs modulus"))
def test_shear_modulus_and_ratio_give_youngs_modulus(name: str, symbol: str) -> None:
    # against pymatgen-core's Young's modulus (to 1 GPa).
    value, u = youngs(name)
    assert abs(value - elements()[symbol]["Youngs modulus"]) <= u + 0.5


@pytest.mark.parametrize(("name", "printed"), SHEETS.items())
def test_an_alloys_youngs_modulus_is_that_of_its_data_sheets(
    name: str, printed: tuple[float, float]
) -> None:
    value, u = youngs(name)
    assert printed[0] - u <= value <= printed[1] + u


def test_that_check_would_find_a_wrong_shear_modulus() -> None:
    # The same table's molybdenum: 20 GPa printed, E = 329 and nu = 0.31 ask for 126.
    row, (_, u) = elements()["Mo"], youngs("molybdenum")
    expected = row["Youngs modulus"] / (2.0 * (1.0 + row["Poissons ratio"]))
    assert abs(row["Rigidity modulus"] - expected) > 100.0
    from_table = 2.0 * row["Rigidity modulus"] * (1.0 + row["Poissons ratio"])
    assert abs(from_table - row["Youngs modulus"]) > u + 0.5
    assert abs(load("molybdenum").values["shear_modulus_gpa"].value - expected) <= 2.5


def test_that_check_would_find_a_wrong_youngs_modulus() -> None:
    # The same table's zirconium: E = 68 GPa printed, G = 33 and nu = 0.34 ask for 88.
    row, (value, u) = elements()["Zr"], youngs("zirconium")
    expected = 2.0 * row["Rigidity modulus"] * (1.0 + row["Poissons ratio"])
    assert abs(row["Youngs modulus"] - expected) > 20.0
    assert abs(value - row["Youngs modulus"]) > u + 0.5


@pytest.mark.parametrize("name", WITH_CRYSTAL)
def test_shear_modulus_agrees_with_the_crystals_hill_mean(name: str) -> None:
    # Hill 1952: mean of Voigt's and Reuss' averages over the elastic constants.
    metal = load(name)
    shear = metal.values["shear_modulus_gpa"]
    assert abs(shear.value - float(hill_shear_modulus(stiffness(metal)))) <= shear.u


@pytest.mark.parametrize("name", WITH_CRYSTAL)
def test_poissons_ratio_agrees_with_the_crystals_hill_mean(name: str) -> None:
    # nu = (3 B - 2 G) / (6 B + 2 G), B being Hill's mean bulk modulus.
    metal = load(name)
    c = stiffness(metal)
    shear = float(hill_shear_modulus(c))
    bulk = (float(c[:3, :3].sum()) / 9.0 + 1.0 / float(np.linalg.inv(c)[:3, :3].sum())) / 2.0
    ratio = metal.values["poisson_ratio"]
    assert abs(ratio.value - (3 * bulk - 2 * shear) / (6 * bulk + 2 * shear)) <= ratio.u


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_mass_agrees_with_a_general_package(name: str, symbol: str) -> None:
    entry = load(name).values["molar_mass_g_per_mol"]
    assert abs(entry.value - getattr(periodictable, symbol).mass) <= entry.u


@pytest.mark.parametrize(("name", "symbol"), sound("density"))
def test_density_agrees_with_a_general_package(name: str, symbol: str) -> None:
    # periodictable: handbook densities in g/cm3.
    entry = load(name).values["mass_density_kg_per_m3"]
    assert abs(entry.value - 1000.0 * getattr(periodictable, symbol).density) <= entry.u


@pytest.mark.parametrize(("name", "symbol"), sound("lattice"))
def test_lattice_agrees_with_a_general_package(name: str, symbol: str) -> None:
    # periodictable: lattice constants to 0.01 angstrom, so to 0.0005 nm; c/a to 0.001.
    metal, cell = load(name), crystal(symbol)
    assert cell["symmetry"].lower() == metal.lattice
    constant = metal.values["lattice_constant_nm"]
    assert abs(constant.value - cell["a"] / 10.0) <= constant.u + 0.0005
    burgers = metal.values["burgers_vector_nm"]
    factor = BURGERS[metal.lattice]
    assert abs(burgers.value - factor * cell["a"] / 10.0) <= burgers.u + factor * 0.0005
    if metal.lattice == "hcp":
        ratio = metal.values["c_over_a"]
        assert abs(ratio.value - cell["c/a"]) <= ratio.u + 0.0005


def test_two_numbers_of_that_package_do_not_go_with_themselves() -> None:
    # Titanium: 4.54 g/cm3 printed, 0.295 nm and 1.588 ask for 4.50. Tantalum: 0.331 nm
    # printed, 16.654 g/cm3 asks for 0.3305, to which 0.3303 is rounded, not 0.331.
    titanium, tantalum = periodictable.Ti, periodictable.Ta
    by_lattice = density("hcp", titanium.mass, crystal("Ti")["a"] / 10.0, crystal("Ti")["c/a"])
    assert 1000.0 * titanium.density - by_lattice > 30.0
    entry = load("titanium").values["mass_density_kg_per_m3"]
    assert abs(entry.value - by_lattice) <= entry.u
    assert abs(entry.value - elements()["Ti"]["Density of solid"]) <= entry.u
    by_lattice = density("bcc", tantalum.mass, crystal("Ta")["a"] / 10.0, 1.0)
    assert 1000.0 * tantalum.density - by_lattice > 70.0


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_melting_point_agrees_with_a_general_package(name: str, symbol: str) -> None:
    # pymatgen-core, periodic_table.json.gz, in kelvin.
    entry = load(name).values["melting_point_k"]
    assert abs(entry.value - elements()[symbol]["Melting point"]) <= entry.u


@pytest.mark.parametrize("name", names())
def test_burgers_vector_follows_from_the_lattice(name: str) -> None:
    metal = load(name)
    constant, burgers = (metal.values[key] for key in ("lattice_constant_nm", "burgers_vector_nm"))
    factor = BURGERS[metal.lattice]
    assert abs(burgers.value - factor * constant.value) <= 0.00005 + 1e-12  # four digits
    assert burgers.u >= 0.9 * factor * constant.u


@pytest.mark.parametrize("name", names())
def test_density_follows_from_lattice_and_mass(name: str) -> None:
    metal = load(name)
    mass, constant, printed = (
        metal.values[key]
        for key in ("molar_mass_g_per_mol", "lattice_constant_nm", "mass_density_kg_per_m3")
    )
    ratio = metal.values.get("c_over_a")
    axes, u_axes = (ratio.value, ratio.u) if ratio else (1.0, 0.0)
    expected = density(metal.lattice, mass.value, constant.value, axes)
    relative = (mass.u / mass.value, 3.0 * constant.u / constant.value, u_axes / axes)
    u = sqrt(printed.u**2 + expected**2 * sum(x**2 for x in relative))
    assert abs(printed.value - expected) <= u


@pytest.mark.parametrize(("name", "parts"), ALLOYS.items())
def test_an_alloys_molar_mass_is_the_mean_per_mole_of_atoms(
    name: str, parts: dict[str, float]
) -> None:
    # periodictable's atomic weights; atoms per kilogram add, so the mean is harmonic in mass.
    assert sum(parts.values()) == pytest.approx(100.0)
    moles = sum(part / getattr(periodictable, symbol).mass for symbol, part in parts.items())
    entry = load(name).values["molar_mass_g_per_mol"]
    assert abs(entry.value - 100.0 / moles) <= min(entry.u, 0.01)


@pytest.mark.parametrize("name", names())
def test_heat_capacities_are_near_three_times_the_gas_constant(name: str) -> None:
    # Dulong and Petit 1819: about 3 R = 24.94 J/(mol K) at room temperature for a metal.
    values = load(name).values
    heat = values["heat_capacity_j_per_kg_k"].value
    assert heat * values["molar_mass_g_per_mol"].value * 1e-3 == pytest.approx(3.0 * GAS, rel=0.12)


@pytest.mark.parametrize("name", names())
def test_interfaces_keep_their_order(name: str) -> None:
    # A stacking fault costs less than a boundary; a boundary costs about G b / 25: the largest
    # of Read and Shockley's, theta_m G b / 4 pi (1 - nu) with theta_m from 15 to 25 degrees,
    # is 0.03 to 0.05 G b (from memory).
    values = load(name).values
    boundary = values["boundary_energy_j_per_m2"].value
    fault = values.get("stacking_fault_energy_j_per_m2")
    assert fault is None or fault.value < boundary
    scale = values["shear_modulus_gpa"].value * values["burgers_vector_nm"].value  # J/m2
    assert 0.02 < boundary / scale < 0.09
