"""The library of metals against what general packages carry, and against itself."""

import gzip
import json
from importlib.metadata import distribution
from math import sqrt
from typing import Any

import periodictable
import pytest

from coldwork.errors import UsageError
from coldwork.inputs.keys import WINDOWS, number_specs
from coldwork.materials import load, names

AVOGADRO = 6.02214076e23  # per mole; SI Brochure, 9th edition, exact
METALS = ("alpha-iron", "aluminium", "austenitic-18-10", "brass-70-30", "copper", "nickel")
ELEMENTS = {"alpha-iron": "Fe", "aluminium": "Al", "copper": "Cu", "nickel": "Ni"}
ALLOYS = {  # mass fractions, after the entry's title
    "austenitic-18-10": {"Fe": 0.72, "Cr": 0.18, "Ni": 0.10},
    "brass-70-30": {"Cu": 0.70, "Zn": 0.30},
}
ATOMS = {"fcc": 4, "bcc": 2}  # in the cubic cell
BURGERS = {"fcc": sqrt(2) / 2, "bcc": sqrt(3) / 2}  # a/2 <110> and a/2 <111>, over a


def elements() -> dict[str, dict[str, Any]]:
    """Read the element table of pymatgen-core without importing the package."""
    package = distribution("pymatgen-core")
    path = package.locate_file("pymatgen/core/periodic_table.json.gz")
    with gzip.open(str(path), "rt", encoding="utf-8") as stream:
        table: dict[str, dict[str, Any]] = json.load(stream)
    return table


def test_holds_these_six_metals() -> None:
    assert names() == METALS


@pytest.mark.parametrize("name", METALS)
def test_an_entry_is_complete(name: str) -> None:
    metal = load(name)
    assert metal.name == name
    assert metal.title
    assert metal.lattice in ATOMS
    needed = {key for section, key, *_ in number_specs() if section == "material"}
    needed |= {"c11_gpa", "c12_gpa", "c44_gpa", "melting_point_k", "boundary_energy_j_per_m2"}
    assert needed <= set(metal.values)
    for key, entry in metal.values.items():
        assert entry.source, key
        assert entry.seen or "from memory" in entry.source or "lattice constant" in entry.source
        assert entry.u > 0.0 or key.endswith("_distance_d"), key


@pytest.mark.parametrize("name", METALS)
def test_units_are_those_of_the_sheet_and_values_inside_its_windows(name: str) -> None:
    metal = load(name)
    for (section, key, *_), spec in number_specs().items():
        if section == "material":
            assert metal.values[key].unit == spec.unit
            low, high = WINDOWS[key]
            assert low < metal.values[key].value < high


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
@pytest.mark.parametrize(
    ("key", "column"),
    [("shear_modulus_gpa", "Rigidity modulus"), ("poisson_ratio", "Poissons ratio")],
)
def test_moduli_agree_with_a_general_package(name: str, symbol: str, key: str, column: str) -> None:
    # pymatgen-core, periodic_table.json.gz: moduli rounded to 1 GPa, ratios to 0.01.
    entry = load(name).values[key]
    rounding = {"shear_modulus_gpa": 0.5, "poisson_ratio": 0.005}[key]
    assert abs(entry.value - elements()[symbol][column]) <= entry.u + rounding


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_shear_modulus_and_ratio_give_youngs_modulus(name: str, symbol: str) -> None:
    # E = 2 G (1 + nu), isotropic elasticity, against pymatgen-core's Young's modulus (to 1 GPa).
    shear, ratio = (load(name).values[key] for key in ("shear_modulus_gpa", "poisson_ratio"))
    youngs = 2.0 * shear.value * (1.0 + ratio.value)
    u = youngs * sqrt((shear.u / shear.value) ** 2 + (ratio.u / (1.0 + ratio.value)) ** 2)
    assert abs(youngs - elements()[symbol]["Youngs modulus"]) <= u + 0.5


def test_that_check_would_find_a_wrong_modulus() -> None:
    # The same table's molybdenum: 20 GPa printed, E = 329 and nu = 0.31 ask for 126.
    row = elements()["Mo"]
    expected = row["Youngs modulus"] / (2.0 * (1.0 + row["Poissons ratio"]))
    assert abs(row["Rigidity modulus"] - expected) > 100.0


@pytest.mark.parametrize("name", METALS)
def test_shear_modulus_agrees_with_the_crystals_hill_mean(name: str) -> None:
    # Hill 1952: mean of Voigt's and Reuss' averages over the cubic constants.
    metal = load(name)
    c11, c12, c44 = (metal.values[key].value for key in ("c11_gpa", "c12_gpa", "c44_gpa"))
    voigt = (c11 - c12 + 3.0 * c44) / 5.0
    reuss = 5.0 * c44 * (c11 - c12) / (4.0 * c44 + 3.0 * (c11 - c12))
    shear = metal.values["shear_modulus_gpa"]
    assert abs(shear.value - (voigt + reuss) / 2.0) <= shear.u


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_mass_and_density_agree_with_a_general_package(name: str, symbol: str) -> None:
    # periodictable: standard atomic weights, handbook densities in g/cm3.
    metal, element = load(name), getattr(periodictable, symbol)
    mass = metal.values["molar_mass_g_per_mol"]
    assert abs(mass.value - element.mass) <= mass.u
    density = metal.values["mass_density_kg_per_m3"]
    assert abs(density.value - 1000.0 * element.density) <= density.u


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_lattice_agrees_with_a_general_package(name: str, symbol: str) -> None:
    # periodictable: lattice constants to 0.01 angstrom, so to 0.0005 nm.
    metal, crystal = load(name), getattr(periodictable, symbol).crystal_structure
    assert crystal["symmetry"].lower() == metal.lattice
    constant = metal.values["lattice_constant_nm"]
    assert abs(constant.value - crystal["a"] / 10.0) <= constant.u + 0.0005
    burgers = metal.values["burgers_vector_nm"]
    factor = BURGERS[metal.lattice]
    assert abs(burgers.value - factor * crystal["a"] / 10.0) <= burgers.u + factor * 0.0005


@pytest.mark.parametrize(("name", "symbol"), ELEMENTS.items())
def test_melting_point_agrees_with_a_general_package(name: str, symbol: str) -> None:
    # pymatgen-core, periodic_table.json.gz, in kelvin.
    entry = load(name).values["melting_point_k"]
    assert abs(entry.value - elements()[symbol]["Melting point"]) <= entry.u


@pytest.mark.parametrize("name", METALS)
def test_burgers_vector_follows_from_the_lattice(name: str) -> None:
    metal = load(name)
    constant, burgers = (metal.values[key] for key in ("lattice_constant_nm", "burgers_vector_nm"))
    factor = BURGERS[metal.lattice]
    assert abs(burgers.value - factor * constant.value) <= 0.00005 + 1e-12  # four digits
    assert burgers.u >= 0.9 * factor * constant.u


@pytest.mark.parametrize("name", METALS)
def test_density_follows_from_lattice_and_mass(name: str) -> None:
    metal = load(name)
    mass, constant, density = (
        metal.values[key]
        for key in ("molar_mass_g_per_mol", "lattice_constant_nm", "mass_density_kg_per_m3")
    )
    volume = (constant.value * 1e-9) ** 3  # m3
    expected = ATOMS[metal.lattice] * mass.value * 1e-3 / AVOGADRO / volume
    u = sqrt(
        density.u**2
        + (expected * mass.u / mass.value) ** 2
        + (3.0 * expected * constant.u / constant.value) ** 2
    )
    assert abs(density.value - expected) <= u


@pytest.mark.parametrize(("name", "parts"), ALLOYS.items())
def test_an_alloys_molar_mass_is_the_mean_per_mole_of_atoms(
    name: str, parts: dict[str, float]
) -> None:
    # periodictable's atomic weights; atoms per kilogram add, so the mean is harmonic in mass.
    moles = sum(part / getattr(periodictable, symbol).mass for symbol, part in parts.items())
    entry = load(name).values["molar_mass_g_per_mol"]
    assert abs(entry.value - sum(parts.values()) / moles) <= entry.u


def test_heat_capacities_are_near_three_times_the_gas_constant() -> None:
    # Dulong and Petit 1819: about 3 R = 24.94 J/(mol K) at room temperature for a metal.
    for name in METALS:
        values = load(name).values
        heat = values["heat_capacity_j_per_kg_k"].value
        molar = heat * values["molar_mass_g_per_mol"].value * 1e-3
        assert molar == pytest.approx(3.0 * 8.314462618, rel=0.12)


def test_single_crystals_are_mechanically_stable() -> None:
    # Born's criteria for a cubic crystal.
    for name in METALS:
        values = load(name).values
        c11, c12, c44 = (values[key].value for key in ("c11_gpa", "c12_gpa", "c44_gpa"))
        assert c11 > abs(c12)
        assert c11 + 2.0 * c12 > 0.0
        assert c44 > 0.0


@pytest.mark.parametrize("name", METALS)
def test_spacing_of_indents(name: str) -> None:
    # ISO 6507-1: 2.5 d and 3 d for steel, copper and copper alloys, 3 d and 6 d for light metals.
    metal = load(name)
    light = metal.values["mass_density_kg_per_m3"].value < 5000.0
    expected = (3.0, 6.0) if light else (2.5, 3.0)
    assert (metal.edge_distance_d, metal.centre_distance_d) == expected


def test_an_unknown_metal_is_refused_with_the_nearest_name() -> None:
    with pytest.raises(UsageError, match="nearest name is 'aluminium'"):
        load("aluminum")
    with pytest.raises(UsageError, match="it has alpha-iron, aluminium"):
        load("unobtainium-xyz")


def test_a_metal_is_no_path() -> None:
    with pytest.raises(UsageError):
        load("../inputs/new_sheet")
