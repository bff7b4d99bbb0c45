"""A batch sheet read into a method: what is said, what the library says, what nobody says."""

import json
from collections.abc import Callable
from dataclasses import FrozenInstanceError
from datetime import date
from hashlib import sha256
from math import log
from pathlib import Path

import jsonschema
import pytest

from coldwork.contracts import document
from coldwork.inputs.keys import default_of
from coldwork.inputs.method import Limit
from coldwork.inputs.sheet import read_method
from coldwork.materials import load

Write = Callable[..., Path]

FULL = """\
[batch]
id = "CS-2026-31"
laboratory = "test laboratory 2"
operator = "operator-1"
timezone = "Europe/Vienna"
[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5 }
[files]
coupons = "coupons.csv"
indents = ["indents.csv", "indents-?.csv"]
exclusions = "exclusions.csv"
[strength]
route = "indent"
friction_mpa = 25.5
hall_petch_mpa_m05 = { value = 0.11, u = 0.01 }
terms_mpa = { solutes = 12.0, softening = -3 }
[indentation]
area = "projected"
constraint_factor = { value = 2.9, u = 0.1 }
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1
[indentation.HBW]
representative_strain = 0.08
[indentation.HK]
constraint_factor = 3.1
representative_strain = 0.07
[hardening]
slope_n_per_m = { value = 10.3, u = 1.0 }
[line_energy]
outer_radius = "fixed"
outer_radius_nm = 1000
core_energy = 0.1
[character]
mix = [ { angle_deg = 0, fraction = 0.4 }, { angle_deg = 60, fraction = 0.6 } ]
[temperature]
test_c = 25
reference_c = 25.0
[uncertainty]
coverage = 0.9
repeatability = "own"
[output]
tables = ["csv", "parquet"]
detail = "summary"
[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
valid_until = 2027-03-31
[[testers]]
id = "T2"
bias_rel = 0
u_rel = 0.01
[[limits]]
id = "anneal-window"
quantity = "stored_energy_j_per_g"
lower = 0.10
upper = 0.30
[[limits]]
id = "likely"
quantity = "dislocation_density_per_m2"
upper = 1e15
rule = "probability"
at_least = 0.9
[[limits]]
id = "plain"
quantity = "hardness"
lower = 80
rule = "simple"
max_relative_u = 0.05
basis = "own"
"""


def test_a_sheet_of_required_keys_takes_library_and_defaults(write: Write, sheet: str) -> None:
    method = read_method(write(sheet))
    assert method.batch_id == "CS-2026-31"
    assert method.timezone == "UTC"
    assert (method.material, method.lattice) == ("copper", "fcc")
    assert (method.edge_distance_d, method.centre_distance_d) == (2.5, 3.0)
    assert (method.laws.route, method.laws.baseline, method.laws.taylor) == (
        "indent",
        "given",
        "constant",
    )
    assert method.laws.area == {"HV": "contact", "HBW": "projected", "HK": "projected"}
    assert not method.laws.unwinding
    assert method.laws.outer_radius == "spacing"
    assert (method.laws.angles_deg, method.laws.fractions) == ((0.0, 90.0), (0.5, 0.5))
    assert (method.coverage, method.repeatability, method.plastic_strain) == (0.95, "pooled", 0.002)
    assert method.test_temperature == pytest.approx(296.15)  # 23 C
    assert (method.tables, method.detail) == (("csv",), "full")
    assert method.resolution is None
    assert method.repeatability_rel is None
    assert method.limits == ()
    assert method.testers == ()


@pytest.mark.parametrize(
    ("name", "value", "u", "origin"),
    [
        # Common practice and the library, in SI by hand.
        ("material.shear_modulus_gpa", 44e9, 2.5e9, "sheet"),
        ("material.poisson_ratio", 0.343, 0.010, "library"),
        ("material.burgers_vector_nm", 0.2556e-9, 0.0001e-9, "library"),
        ("material.molar_mass_g_per_mol", 0.063546, 3e-6, "library"),
        ("indentation.constraint_factor", 3.0, 0.15, "default"),
        ("indentation.intercept_mpa", 0.0, 0.0, "default"),
        ("indentation.representative_strain", 0.08, 0.005, "default"),
        ("indentation.HBW.constraint_factor", 2.8, 0.15, "default"),
        ("indentation.HBW.strain_ratio", 0.2, 0.01, "default"),
        ("indentation.HBW.intercept_mpa", 0.0, 0.0, "default"),
        ("indentation.HK.intercept_mpa", 0.0, 0.0, "default"),
        ("hardening.taylor_factor", 3.06, 0.15, "default"),
        ("hardening.coefficient", 0.30, 0.30 * log(1.2), "default"),
        ("line_energy.outer_radius_factor", 1.0, log(1.5), "default"),
        ("line_energy.core_radius_b", 1.0, log(1.6), "default"),
        ("line_energy.core_energy", 0.0, 0.0, "default"),
    ],
)
def test_inputs_come_in_si_and_say_who_gave_them(
    write: Write, sheet: str, name: str, value: float, u: float, origin: str
) -> None:
    found = read_method(write(sheet)).inputs[name]
    assert found.value == pytest.approx(value, rel=1e-14)
    assert found.u == pytest.approx(u, rel=1e-14)
    assert found.origin == origin
    assert found.name == name
    assert found.source or origin == "sheet"


def test_inputs_are_those_that_the_laws_use(write: Write, sheet: str) -> None:
    # DESIGN's chain: no Knoop factor without one, no slope beside alpha, no fixed radius.
    assert set(read_method(write(sheet)).inputs) == {
        "material.shear_modulus_gpa",
        "material.poisson_ratio",
        "material.burgers_vector_nm",
        "material.mass_density_kg_per_m3",
        "material.molar_mass_g_per_mol",
        "material.heat_capacity_j_per_kg_k",
        "strength.baseline_mpa",
        "indentation.constraint_factor",
        "indentation.intercept_mpa",
        "indentation.representative_strain",
        "indentation.HBW.constraint_factor",
        "indentation.HBW.intercept_mpa",
        "indentation.HBW.strain_ratio",
        "indentation.HK.intercept_mpa",
        "hardening.taylor_factor",
        "hardening.coefficient",
        "line_energy.outer_radius_factor",
        "line_energy.core_radius_b",
        "line_energy.core_energy",
    }


def test_a_full_sheet(write: Write) -> None:
    folder = write(FULL)
    method = read_method(folder)
    assert (method.laboratory, method.operator) == ("test laboratory 2", "operator-1")
    assert method.timezone == "Europe/Vienna"
    home = folder.resolve()
    assert method.indents == (home / "indents.csv", home / "indents-2.csv")
    assert method.coupons == (home / "coupons.csv",)
    assert method.exclusions == (home / "exclusions.csv",)
    laws = method.laws
    assert (laws.baseline, laws.taylor, laws.unwinding) == ("parts", "slope", True)
    assert (laws.area["HV"], laws.outer_radius) == ("projected", "fixed")
    assert (laws.angles_deg, laws.fractions) == ((0.0, 60.0), (0.4, 0.6))
    assert method.resolution == pytest.approx(1e-7)
    assert (method.coverage, method.repeatability) == (0.9, "own")
    assert method.reference_temperature == pytest.approx(298.15)
    assert (method.tables, method.detail) == (("csv", "parquet"), "summary")
    expected = {
        "strength.friction_mpa": 25.5e6,
        "strength.hall_petch_mpa_m05": 0.11e6,
        "strength.terms_mpa.solutes": 12e6,
        "strength.terms_mpa.softening": -3e6,
        "indentation.initial_hardening_mpa": 1.7e9,
        "indentation.saturation_stress_mpa": 320e6,
        "indentation.HK.constraint_factor": 3.1,
        "hardening.slope_n_per_m": 10.3,
        "line_energy.outer_radius_nm": 1e-6,
        "tester:T1": 0.004,
        "tester:T2": 0.0,
    }
    for name, value in expected.items():
        assert method.inputs[name].value == pytest.approx(value, rel=1e-14), name
    for name in ("hardening.coefficient", "indentation.HBW.strain_ratio", "strength.baseline_mpa"):
        assert name not in method.inputs


def test_testers_and_limits(write: Write) -> None:
    method = read_method(write(FULL))
    first, second = method.testers
    assert (first.id, first.valid_until) == ("T1", date(2027, 3, 31))
    assert (first.bias.value, first.bias.u, first.bias.shared) == (0.004, 0.008, True)
    assert second.valid_until is None
    window = "stored_energy_j_per_g"
    assert method.limits == (
        Limit("anneal-window", window, 0.10, 0.30, "guarded", "total", None, None),
        Limit(
            "likely", "dislocation_density_per_m2", None, 1e15, "probability", "total", 0.9, None
        ),
        Limit("plain", "hardness", 80.0, None, "simple", "own", None, 0.05),
    )


def test_a_day_may_be_quoted_and_a_probability_has_a_default(write: Write) -> None:
    text = FULL.replace("2027-03-31", '"2027-03-31"').replace("at_least = 0.9\n", "")
    method = read_method(write(text))
    assert method.testers[0].valid_until == date(2027, 3, 31)
    assert method.limits[1].at_least == 0.95


def test_the_flow_route_uses_no_indentation(write: Write, sheet: str) -> None:
    text = sheet.replace('indents = "indents.csv"', 'flow_stress = "flow_stress.csv"')
    text = text.replace('route = "indent"', 'route = "flow"')
    text += "[indentation]\ninitial_hardening_mpa = 1700\nsaturation_stress_mpa = 320\n"
    text += "[flow]\nplastic_strain = 0.01\nrepeatability_rel = 0.02\n"
    method = read_method(write(text))
    assert method.flow_stress == (method.folder / "flow_stress.csv",)
    assert method.indents == ()
    assert (method.plastic_strain, method.repeatability_rel) == (0.01, 0.02)
    assert not method.laws.unwinding
    assert not any(name.startswith("indentation") for name in method.inputs)


def test_every_angle_alike(write: Write, sheet: str) -> None:
    text = sheet.replace("screw = 0.5\nedge = 0.5", 'mix = "uniform"')
    laws = read_method(write(text)).laws
    assert (laws.uniform_mix, laws.angles_deg, laws.fractions) == (True, (), ())


def test_all_screw(write: Write, sheet: str) -> None:
    laws = read_method(write(sheet.replace("screw = 0.5\nedge = 0.5", "screw = 1"))).laws
    assert (laws.angles_deg, laws.fractions) == ((0.0, 90.0), (1.0, 0.0))


def test_three_thirds_sum_to_one(write: Write, sheet: str) -> None:
    third = "{ angle_deg = 0, fraction = 0.3333333333 }"
    text = sheet.replace("screw = 0.5\nedge = 0.5", f"mix = [{third}, {third}, {third}]")
    assert read_method(write(text)).laws.fractions == (0.3333333333,) * 3


def test_a_new_metal_with_every_constant(write: Write, sheet: str) -> None:
    constants = (
        'name = "hafnium"\nshear_modulus_gpa = 30.3\npoisson_ratio = 0.367\n'
        "burgers_vector_nm = 0.2889\nmass_density_kg_per_m3 = 10500"
    )
    text = sheet.replace(
        'name = "copper"\nshear_modulus_gpa = { value = 44.0, u = 2.5 }', constants
    )
    method = read_method(write(text))
    assert (method.material, method.lattice) == ("hafnium", None)
    assert (method.edge_distance_d, method.centre_distance_d) == (3.0, 6.0)  # the wider rule
    assert "material.molar_mass_g_per_mol" not in method.inputs
    text = text.replace("10500", '10500\nlattice = "fcc"\nedge_distance_d = 2.5')
    method = read_method(write(text))
    assert (method.lattice, method.edge_distance_d, method.centre_distance_d) == ("fcc", 2.5, 6.0)


def test_line_ends_and_a_byte_order_mark_are_ordinary(write: Write, sheet: str) -> None:
    plain = read_method(write(sheet))
    for data in (sheet.replace("\n", "\r\n").encode(), b"\xef\xbb\xbf" + sheet.encode()):
        other = read_method(write(data))
        assert (other.laws, other.inputs) == (plain.laws, plain.inputs)
        assert other.sheets == (("batch.toml", sha256(data).hexdigest()),)


def test_a_method_is_frozen(write: Write, sheet: str) -> None:
    method = read_method(write(sheet))
    with pytest.raises(FrozenInstanceError):
        method.coverage = 0.5  # type: ignore[misc]


@pytest.mark.parametrize("text", [FULL, None])
def test_the_document_fits_its_schema(write: Write, sheet: str, text: str | None) -> None:
    method = read_method(write(text or sheet))
    content = json.loads(json.dumps(method.document, allow_nan=False))
    assert content == method.document
    jsonschema.Draft202012Validator(document("method")).validate(content)


def test_the_document_says_numbers_as_they_were_written(write: Write) -> None:
    content = json.loads(json.dumps(read_method(write(FULL)).document))
    shear = content["inputs"]["material.shear_modulus_gpa"]
    assert (shear["value"], shear["u"], shear["unit"]) == (44.0, 2.5, "GPa")
    burgers = content["inputs"]["material.burgers_vector_nm"]
    assert burgers["value"] == load("copper").values["burgers_vector_nm"].value
    assert burgers["origin"] == "library"
    assert content["inputs"]["tester:T1"]["u"] == 0.008
    assert content["files"]["indents"] == ["indents.csv", "indents-2.csv"]
    same = {"test_c": 25, "reference_c": 25.0, "correction": "none"}
    assert content["temperature"] == same
    assert content["limits"][0]["rule"] == "guarded"
    assert content["versions"]["coldwork"]


def test_the_document_marks_defaults(write: Write, sheet: str) -> None:
    content = json.loads(json.dumps(read_method(write(sheet)).document))
    defaults = set(content["defaults"])
    assert {
        "hardening.coefficient",
        "hardening.law",
        "indentation.area",
        "batch.timezone",
    } <= defaults
    assert not {"strength.route", "strength.baseline_mpa", "flow.plastic_strain"} & defaults
    full = set(json.loads(json.dumps(read_method(write(FULL)).document))["defaults"])
    assert "limits.anneal-window.rule" in full
    assert "limits.plain.rule" not in full
    assert "uncertainty.coverage" not in full


def test_the_document_states_the_law_in_density(write: Write) -> None:
    # k1 = 2 theta_0 / (M alpha G b) and k2 = 2 theta_0 / sigma_s (Kocks and Mecking 2003):
    # 2 * 1700e6 / 10.3 and 2 * 1700 / 320.
    derived = json.loads(json.dumps(read_method(write(FULL)).document))["derived"]
    assert derived["k1_per_m"] == pytest.approx(3.300970873786e8, rel=1e-12)
    assert derived["k2"] == pytest.approx(10.625, rel=1e-14)


def test_defaults_are_fresh_each_time() -> None:
    default_of(("hardening", "coefficient"))["value"] = 7.0
    assert default_of(("hardening", "coefficient"))["value"] == 0.30
