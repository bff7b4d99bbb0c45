"""The entries of the library: which there are, what each holds, and against printed tables."""

import re
from functools import cache

import pytest

from coldwork.errors import UsageError
from coldwork.formulas.slip_systems import slip_system
from coldwork.inputs.keys import WINDOWS, number_specs
from coldwork.materials import KEYS, LATTICES, names
from coldwork.materials import load as read
from coldwork.materials.entry import CRYSTAL, NEEDED

load = cache(read)

METALS = (
    "alpha-iron",
    "aluminium",
    "aluminium-3xxx",
    "aluminium-5xxx",
    "austenitic-17-12-2",
    "austenitic-18-10",
    "brass-70-30",
    "brass-85-15",
    "chromium",
    "cobalt",
    "copper",
    "gold",
    "lead",
    "low-carbon-steel",
    "magnesium",
    "molybdenum",
    "nickel",
    "nickel-16cr-8fe",
    "nickel-32cu",
    "niobium",
    "platinum",
    "silver",
    "tantalum",
    "tin-bronze-94-6",
    "titanium",
    "titanium-6al-4v",
    "titanium-grade-2",
    "tungsten",
    "vanadium",
    "zinc",
    "zirconium",
)
EVERYWHERE = {
    *NEEDED,
    "lattice_constant_nm",
    "molar_mass_g_per_mol",
    "heat_capacity_j_per_kg_k",
    "melting_point_k",
    "boundary_energy_j_per_m2",
}
UNSEEN = ("from memory", "from the lattice constant", "common practice")

# Hertzberg 2012 and Kaye and Laby, as a public data table quotes them: G in GPa and nu.
PRINTED_MODULI = {
    "silver": (30.3, 0.367),
    "aluminium": (26.1, 0.345),
    "gold": (27.0, 0.440),
    "chromium": (115.4, 0.210),
    "copper": (48.3, 0.343),
    "alpha-iron": (81.6, 0.293),
    "magnesium": (17.3, 0.291),
    "niobium": (37.5, 0.397),
    "nickel": (76.0, 0.312),
    "tantalum": (69.2, 0.342),
    "titanium": (43.8, 0.321),
    "tungsten": (160.6, 0.280),
    "zinc": (43.4, 0.249),
}
# Frost and Ashby 1982, from memory: G at 300 K in GPa, and T_M/G dG/dT.
SLOPES = {
    "nickel": (78.9, -0.64),
    "copper": (42.1, -0.54),
    "silver": (26.4, -0.54),
    "aluminium": (25.4, -0.50),
    "lead": (7.3, -0.76),
    "alpha-iron": (64.0, -1.09),
    "tungsten": (160.0, -0.38),
    "molybdenum": (134.0, -0.42),
    "tantalum": (61.2, -0.42),
    "chromium": (126.0, -0.50),
    "magnesium": (16.6, -0.49),
    "titanium": (43.6, -1.20),
    "zinc": (49.3, -0.50),
}
# Murr 1975 as tabulated by Humphreys and Hatherly, from memory, in J/m2.
BOUNDARIES = {
    "silver": 0.375,
    "aluminium": 0.324,
    "gold": 0.378,
    "copper": 0.625,
    "nickel": 0.866,
    "lead": 0.200,
    "zinc": 0.340,
    "austenitic-18-10": 0.835,
}


def test_holds_these_metals() -> None:
    assert names() == METALS


@pytest.mark.parametrize("name", METALS)
def test_an_entry_is_complete(name: str) -> None:
    metal = load(name)
    assert metal.name == name
    assert metal.title
    assert set(metal.values) >= EVERYWHERE
    assert list(metal.values) == [key for key in KEYS if key in metal.values]  # one order
    for key, entry in metal.values.items():
        assert entry.source, key
        assert entry.seen or any(words in entry.source for words in UNSEEN), key
        assert entry.u > 0.0 or key.endswith("_distance_d"), key
        assert entry.u < abs(entry.value) / 2.0, key


@pytest.mark.parametrize("name", METALS)
def test_the_crystal_is_whole_and_fits_the_lattice(name: str) -> None:
    metal = load(name)
    elastic = {key for key in metal.values if re.fullmatch(r"c\d\d_gpa", key)}
    assert elastic in (set(), set(CRYSTAL[metal.lattice]))
    assert ("c_over_a" in metal.values) == (metal.lattice == "hcp")
    ratio = metal.values.get("c_over_a")
    slip = slip_system(
        metal.slip_system,
        hexagonal=metal.lattice == "hcp",
        c_over_a=ratio.value if ratio else None,
    )
    assert sum(x * y for x, y in zip(slip.normal, slip.burgers, strict=True)) == pytest.approx(0)


def test_elements_have_elastic_constants_and_two_slip_on_prisms() -> None:
    assert all("c11_gpa" in load(name).values for name in METALS if "-" not in name)
    other = {n for n in METALS if load(n).slip_system != LATTICES[load(n).lattice]}
    assert other == {"titanium", "titanium-grade-2", "titanium-6al-4v", "zirconium"}


@pytest.mark.parametrize("name", METALS)
def test_units_are_those_of_the_sheet_and_values_inside_its_windows(name: str) -> None:
    metal = load(name)
    assert all(entry.unit == KEYS[key].unit for key, entry in metal.values.items())
    for (section, key, *_), spec in number_specs().items():
        if section == "material" and key in metal.values:
            assert metal.values[key].unit == spec.unit
            low, high = WINDOWS[key]
            assert low < metal.values[key].value < high


@pytest.mark.parametrize("name", METALS)
def test_spacing_of_indents(name: str) -> None:
    # ISO 6507-1: 2.5 d and 3 d for steel, copper and copper alloys; 3 d and 6 d for light
    # metals, lead and tin. Zinc and zirconium are not named; they take the wider ones.
    metal = load(name)
    light = metal.values["mass_density_kg_per_m3"].value < 5000.0
    wide = light or name in {"lead", "zinc", "zirconium"}
    expected = (3.0, 6.0) if wide else (2.5, 3.0)
    assert (metal.edge_distance_d, metal.centre_distance_d) == expected


@pytest.mark.parametrize(("name", "printed"), PRINTED_MODULI.items())
def test_moduli_take_in_the_printed_ones(name: str, printed: tuple[float, float]) -> None:
    values = load(name).values
    for key, expected in zip(("shear_modulus_gpa", "poisson_ratio"), printed, strict=True):
        assert abs(values[key].value - expected) <= values[key].u, key


@pytest.mark.parametrize(("name", "printed"), SLOPES.items())
def test_a_slope_goes_with_its_own_modulus(name: str, printed: tuple[float, float]) -> None:
    modulus, slope = printed
    entry = load(name).values["shear_modulus_slope"]
    assert entry.value == slope
    own = re.search(r"own modulus, ([\d.]+) GPa at 300 K", entry.source)
    assert own is not None
    assert float(own[1]) == modulus


@pytest.mark.parametrize("name", METALS)
def test_every_slope_names_its_modulus(name: str) -> None:
    entry = load(name).values.get("shear_modulus_slope")
    assert entry is None or re.search(r"own modulus, [\d.]+ GPa at 300 K", entry.source)


@pytest.mark.parametrize(("name", "printed"), BOUNDARIES.items())
def test_boundary_energies_are_the_tabulated_ones(name: str, printed: float) -> None:
    entry = load(name).values["boundary_energy_j_per_m2"]
    assert entry.value == printed
    assert not entry.seen


def test_an_unknown_metal_is_refused_with_the_nearest_name() -> None:
    with pytest.raises(UsageError, match="nearest name is 'aluminium'"):
        load("aluminum")
    with pytest.raises(UsageError, match="'coldwork materials' lists the 31 that it has"):
        load("unobtainium-xyz")


def test_a_metal_is_no_path() -> None:
    with pytest.raises(UsageError):
        load("../inputs/new_sheet")
