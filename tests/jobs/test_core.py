"""The core of a line: from the sheet or the library, and what is said of it."""

from math import exp, log, pi
from pathlib import Path
from typing import Final

import pytest
from numpy.testing import assert_allclose
from scipy import constants

import coldwork
from coldwork.errors import UsageError
from coldwork.formulas.line_energy import core_radius_alone, line_energy
from coldwork.inputs.sheet import read_method
from coldwork.materials import load, names

LIBRARY: Final = 'line_energy.core_energy_from = "library"'
STRIP: Final = Path(__file__).parents[2] / "sample_data" / "copper-strip"
WITH_CORE: Final = tuple(name for name in names() if "core_energy" in load(name).values)


@pytest.mark.parametrize("name", WITH_CORE)
def test_the_library_takes_in_both_rules(name: str) -> None:
    # A tenth of G b^2 (common practice), and the order of 1 eV per atom plane (read at
    # princeton.edu, course MAE 324, glossary, "dislocation core").
    values = load(name).values
    b = values["burgers_vector_nm"].value * 1e-9
    plane = constants.e / (values["shear_modulus_gpa"].value * 1e9 * b**3)
    core = values["core_energy"]
    for rule in (0.1, plane):
        assert abs(core.value - rule) <= 1.02 * core.u
    assert core.u >= 0.03


def test_only_unalloyed_cubic_metals_have_one() -> None:
    assert len(WITH_CORE) == 13
    assert {load(name).lattice for name in WITH_CORE} == {"fcc", "bcc"}


def test_iron_takes_in_atomistic_cores() -> None:
    # 0.22 to 0.29 eV per angstrom (Clouet 2009, two papers, from memory) over G b^2.
    values = load("alpha-iron").values
    b = values["burgers_vector_nm"].value * 1e-9
    unit = values["shear_modulus_gpa"].value * 1e9 * b**2
    core = values["core_energy"]
    for ev in (0.22, 0.29):
        assert abs(core.value - ev * constants.e / 1e-10 / unit) <= 1.2 * core.u


def test_the_radius_alone_gives_the_same_line_energy() -> None:
    k, b, g, outer = 55e9, 0.2556e-9, 44e9, 50e-9
    alone = core_radius_alone(1.3, 0.15, g, k)
    with_core = line_energy(k, b, outer, 1.3 * b, g, 0.15)
    assert_allclose(line_energy(k, b, outer, alone * b, g, 0.0), with_core, rtol=1e-13)
    assert core_radius_alone(1.3, 0.0, g, k) == 1.3


def test_the_librarys_energy_adds_to_the_field_outside_one_burgers_vector() -> None:
    plain = coldwork.estimate("copper", density_per_m2=1e14)
    core = coldwork.estimate("copper", density_per_m2=1e14, settings=[LIBRARY])
    values = load("copper").values
    unit = values["shear_modulus_gpa"].value * 1e9 * (values["burgers_vector_nm"].value * 1e-9) ** 2
    added = core.line_energy_j_per_m.value - plain.line_energy_j_per_m.value
    assert_allclose(added, values["core_energy"].value * unit, rtol=1e-12)
    # r0 is then no longer uncertain by a factor, and the energy of the core is
    nu = values["poisson_ratio"].value
    mix = (1.0 - nu / 2.0) / (1.0 - nu) / (4.0 * pi)
    of_mix = (log(1.5) * mix) ** 2 + values["core_energy"].u ** 2
    alone = (log(1.5) ** 2 + log(1.6) ** 2) * mix**2
    assert (core.line_energy_j_per_m.u / unit) ** 2 > of_mix
    assert (plain.line_energy_j_per_m.u / unit) ** 2 > alone
    assert_allclose(exp(-values["core_energy"].value / mix), 0.23, atol=5e-3)
    assert "the same as a core radius of 0.23 b alone" in core.text()
    assert "stands for the core as well" in plain.text()


def test_the_method_says_what_the_core_radius_means() -> None:
    said = read_method(STRIP).document
    assert isinstance(said["derived"], dict)
    assert "core radius of 1 b stands for the core as well" in said["derived"]["core"]


@pytest.mark.parametrize(
    ("metal", "settings", "told"),
    [
        ("zinc", [LIBRARY], "the library has no core energy of this metal"),
        ("copper", [LIBRARY, "line_energy.core_radius_b = 2"], "another core radius is given"),
        ("copper", [LIBRARY, "line_energy.core_energy = 0.1"], "no other can stand beside it"),
        ("copper", ['line_energy.core_energy_from = "book"'], "one of sheet, library"),
    ],
)
def test_what_does_not_fit_is_refused(metal: str, settings: list[str], told: str) -> None:
    with pytest.raises(UsageError, match=told):
        coldwork.estimate(metal, density_per_m2=1e14, settings=settings)
