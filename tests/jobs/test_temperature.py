"""Tests cold and warm, brought to one temperature: published columns, refusals."""

from collections.abc import Callable
from math import sqrt
from pathlib import Path
from typing import Final

import pytest
from numpy.testing import assert_allclose

import coldwork
from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method
from coldwork.jobs.trace import trace

Make = Callable[..., Path]
# Copper of Frost and Ashby 1982 (from memory): 42.1 GPa at 300 K, -0.54, 1356 K, 0.256 nm.
SHEET: Final = """
[batch]
id = "cold"
[material]
name = "copper"
shear_modulus_gpa = 42.1
burgers_vector_nm = 0.256
shear_modulus_slope = -0.54
melting_point_k = 1356.0
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "flow"
baseline_mpa = 50.0
[hardening]
taylor_factor = 3.06
coefficient = 0.3
[character]
screw = 0.5
edge = 0.5
[temperature]
reference_c = 26.85
test_c = 26.85
correction = "modulus"
"""
PLAIN: Final = SHEET.replace('correction = "modulus"\n', "")
THERMAL: Final = "thermal_mpa = 200.0\nathermal_k = 600.0\n"
DENSITY: Final = "dislocation_density_per_m2"


def batch(make: Make, sheet: str, tests: dict[str, tuple[str, float]], name: str = "b") -> Path:
    """One point a coupon: its temperature as written, its flow stress in MPa."""
    rows = [
        {
            "coupon_id": coupon,
            "reading_no": no,
            "plastic_strain": 0.002,
            "flow_stress_mpa": mpa,
            "temperature_c": celsius,
        }
        for coupon, (celsius, mpa) in tests.items()
        for no in (1, 2, 3)
    ]
    coupons = [{"coupon_id": coupon} for coupon in tests]
    return make(sheet, name=name, coupons=coupons, flow_stress=rows)


# Shear moduli of that book's law at 77, 500 and 800 K, computed apart from this code: 45.84,
# 38.75 and 33.72 GPa (tests/reference/modulus_over_temperature.toml has the table).
@pytest.mark.parametrize(
    ("celsius", "gpa"), [("-196.15", 45.84), ("226.85", 38.75), ("526.85", 33.72), ("", 42.1)]
)
def test_density_goes_by_modulus_and_baseline_of_the_tests_temperature(
    make: Make, celsius: str, gpa: float
) -> None:
    # Relation 5 at the temperature of the test: the baseline of 50 MPa falls as the modulus does.
    row = coldwork.process(batch(make, SHEET, {"a": (celsius, 250.0)})).frames["coupons"].iloc[0]
    excess = 250.0e6 - 50.0e6 * gpa / 42.1
    expected = (excess / (3.06 * 0.3 * gpa * 1e9 * 0.256e-9)) ** 2
    assert_allclose(row[DENSITY], expected, rtol=5e-4)  # of the four printed digits
    # The row tells the stress at the reference temperature; nothing else is told there.
    assert_allclose(row["flow_stress_mpa"], 250.0 * 42.1 / gpa, rtol=2e-4)
    assert row["baseline_stress_mpa"] == 50.0


def test_one_metal_tested_at_three_temperatures_has_one_density(make: Make) -> None:
    # What the law itself says of a metal with 200 MPa of thermal stress at absolute zero.
    def strength(kelvin: float) -> float:
        modulus = 1.0 - 0.54 * (kelvin - 300.0) / 1356.0
        thermal, at_300 = (200.0 * (1.0 - (t / 600.0) ** (2 / 3)) ** 2 for t in (kelvin, 300.0))
        return float(modulus * (250.0 - at_300) + thermal)

    tests = {
        "cold": ("-196.15", strength(77.0)),
        "room": ("26.85", strength(300.0)),
        "warm": ("200", strength(473.15)),
    }
    assert tests["cold"][1] > 1.3 * tests["warm"][1]  # stresses do not carry over
    coupons = coldwork.process(batch(make, SHEET + THERMAL, tests)).frames["coupons"]
    assert_allclose(coupons["flow_stress_mpa"], 250.0, rtol=1e-12)
    assert_allclose(coupons[DENSITY], coupons[DENSITY][0], rtol=1e-12)
    assert_allclose(coupons["stored_energy_j_per_g"], coupons["stored_energy_j_per_g"][0])


def test_at_the_reference_temperature_nothing_moves(make: Make) -> None:
    tests = {"a": ("26.85", 250.0), "b": ("", 180.0)}
    plain = coldwork.process(batch(make, PLAIN, tests, "plain")).frames["coupons"]
    moved = coldwork.process(batch(make, SHEET + THERMAL, tests, "moved")).frames["coupons"]
    for name in ("flow_stress_mpa", DENSITY, "stored_energy_j_per_m3"):
        assert_allclose(moved[name], plain[name], rtol=1e-12)


def test_the_trace_tells_both_temperatures(make: Make, tmp_path: Path) -> None:
    cold = batch(make, SHEET + THERMAL, {"a": ("-196.15", 300.0)})
    coldwork.process(cold, into=tmp_path / "out")
    told = trace(tmp_path / "out" / "cold", "a").text()
    assert "temperature of the test: -196.2" in told
    assert "to 26.85 C, the thermal part taken off" in " ".join(told.split())
    assert "temperature.thermal_mpa: 200.0 MPa" in told
    assert "material.shear_modulus_slope: -0.54" in told


def test_hardness_is_told_as_tested(make: Make) -> None:
    sheet = SHEET.replace("flow_stress", "indents").replace('"flow"', '"indent"')
    indents = [
        {"coupon_id": "a", "indent_no": i, "force_n": 98.07, "hardness": 90, "temperature_c": 200}
        for i in (1, 2, 3)
    ]
    row = coldwork.process(make(sheet, coupons=[{"coupon_id": "a"}], indents=indents))
    found = row.frames["coupons"].iloc[0]
    ratio = 1.0 / (1.0 - 0.54 * (473.15 - 300.0) / 1356.0)
    assert_allclose(found["hardness"], 90.0)
    assert_allclose(found["flow_stress_mpa"], 90.0 * 9.80665 / 3.0 * ratio, rtol=1e-12)
    assert "test-temperature" not in found["flags"]


def test_an_estimate_takes_the_sheets_temperatures() -> None:
    settings = ["strength.baseline_mpa = 50.0", 'temperature.correction = "modulus"']
    room = coldwork.estimate("copper", stress_mpa=250.0, settings=settings)
    settings.append("temperature.test_c = 200.0")
    warm = coldwork.estimate("copper", stress_mpa=250.0, settings=settings)
    ratio = (1 - 0.54 * (296.15 - 300) / 1357.77) / (1 - 0.54 * (473.15 - 300) / 1357.77)
    assert_allclose(warm.flow_stress_mpa.value, 250.0 * ratio, rtol=1e-9)
    excess = (250.0 * ratio - 50.0) / 200.0
    found = warm.mean_spacing_nm.value / room.mean_spacing_nm.value
    assert_allclose(found, 1.0 / excess, rtol=1e-9)
    assert sqrt(found) < 1.0


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ('correction = "modulus"', 'correction = "none"\ntest_c = 200.0', "does not ask for it"),
        ('correction = "modulus"', THERMAL, "nothing is brought from one temperature"),
        ('correction = "modulus"', 'correction = "elastic"', "none, modulus"),
        ("correction", "athermal_k = 500.0\ncorrection", "thermal_mpa: this key is missing"),
        ("correction", "thermal_mpa = 90.0\ncorrection", "athermal_k: this key is missing"),
        ("test_c = 26.85", "test_c = 1100.0", "above the melting point of 1356 K"),
        ("reference_c = 26.85", "reference_c = 1100.0", "above the melting point of 1356 K"),
        ("melting_point_k = 1356.0", "melting_point_k = 1083.0", ""),
    ],
)
def test_what_does_not_fit_is_refused_in_the_sheets_own_line(
    make: Make, old: str, new: str, told: str
) -> None:
    text = SHEET.replace("test_c = 26.85\n", "") if "test_c = 200" in new else SHEET
    folder = batch(make, text.replace(old, new, 1), {"a": ("", 250.0)})
    if not told:
        assert read_method(folder).laws.temperature == "modulus"
        return
    with pytest.raises(BatchRefused) as refused:
        read_method(folder)
    assert told in str(refused.value)
    assert "batch.toml, line 2" in str(refused.value)


def test_a_metal_without_a_slope_is_refused_by_name(make: Make) -> None:
    sheet = SHEET.replace("shear_modulus_slope = -0.54\n", "").replace('"copper"', '"dust"')
    sheet = sheet.replace(
        "[files]", "poisson_ratio = 0.3\nmass_density_kg_per_m3 = 8000.0\n[files]"
    )
    with pytest.raises(BatchRefused, match="shear_modulus_slope of the metal cannot be found"):
        read_method(batch(make, sheet, {"a": ("", 250.0)}))
