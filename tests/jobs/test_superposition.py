"""An obstacle stress beside the dislocations: published columns, ends, refusals."""

from collections.abc import Callable
from math import sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.special import ndtr

import coldwork
from coldwork.errors import BatchRefused
from coldwork.formulas.superposition import combined_stress, superposed_stress
from coldwork.inputs.sheet import read_method

Make = Callable[..., Path]
SHEET: Final = """
[batch]
id = "obstacles"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[flow]
repeatability_rel = 0.005
[strength]
route = "flow"
baseline_mpa = { value = 50.0, u = 3.0 }
OBSTACLE
[character]
screw = 0.5
edge = 0.5
[[limits]]
id = "stress"
quantity = "dislocation_stress_mpa"
lower = 40.0
"""
QUADRATIC: Final = "obstacle_mpa = { value = 60.0, u = 2.0 }\nsuperposition_exponent = 2"
STRESSES: Final = {"far": 350.0, "near": 125.0, "at": 111.0, "on": 108.0, "far below": 60.0}


def batch(make: Make, obstacle: str, sheet: str = SHEET, name: str = "batch") -> Path:
    points = [
        {"coupon_id": name, "reading_no": 1, "plastic_strain": 0.002, "flow_stress_mpa": mpa}
        for name, mpa in STRESSES.items()
    ]
    names = [{"coupon_id": name} for name in STRESSES]
    text = sheet.replace("OBSTACLE", obstacle)
    return make(text, name=name, coupons=names, flow_stress=points)


def test_squares_add_for_an_exponent_of_two(make: Make) -> None:
    coupons = coldwork.process(batch(make, QUADRATIC)).frames["coupons"].set_index("coupon_id")
    stress = coupons["dislocation_stress_mpa"]
    assert_allclose(stress["far"], sqrt(300.0**2 - 60.0**2), rtol=1e-12)
    assert_allclose(stress["near"], 45.0, rtol=1e-12)  # 3, 4, 5
    # At or below the obstacle stress nothing is left: how far below stands there.
    assert_allclose([stress["on"], stress["far below"]], [-2.0, -50.0], rtol=1e-12)
    assert coupons["dislocation_density_per_m2"].notna().tolist() == [
        True,
        True,
        True,
        False,
        False,
    ]
    flags = coupons["flags"].str.split(";")
    assert "weak-signal" in flags["at"]
    assert "below-baseline" in flags["on"]
    assert "baseline-contradicted" not in flags["on"]
    assert {"below-baseline", "baseline-contradicted"} <= set(flags["far below"])


def test_ends_are_taken_in_the_excess_and_mapped(make: Make) -> None:
    # x = 61 MPa; u(x) of baseline, scatter and obstacle, the last by (p/x)^(q - 1) = 60/61.
    coupons = coldwork.process(batch(make, QUADRATIC)).frames["coupons"].set_index("coupon_id")
    scatter = 0.005 * 111.0
    u = sqrt(3.0**2 + scatter**2 + (2.0 * 60.0 / 61.0) ** 2)
    top = sqrt((61.0 + 1.95996 * u) ** 2 - 60.0**2)
    row = coupons.loc["at"]
    assert_allclose(row["upper_dislocation_stress_mpa"], top, rtol=1e-5)
    assert_allclose(row["lower_dislocation_stress_mpa"], 61.0 - 1.95996 * u - 60.0, rtol=1e-5)
    slope = 61.0 / sqrt(61.0**2 - 60.0**2)  # ds/dx, five and a half
    assert_allclose(row["u_dislocation_stress_mpa"], u * slope, rtol=1e-5)
    assert row["lower_dislocation_density_per_m2"] == 0.0
    assert np.isfinite(coupons["upper_dislocation_density_per_m2"]["on"])
    assert np.isnan(coupons["upper_dislocation_density_per_m2"]["far below"])


def test_a_limit_on_the_stress_is_held_against_those_ends(make: Make) -> None:
    # The limit of 40 MPa is met where the excess is sqrt(60^2 + 40^2) = 72.11 MPa.
    frames = coldwork.process(batch(make, QUADRATIC)).frames
    u = sqrt(3.0**2 + (0.005 * 125.0) ** 2 + (2.0 * 60.0 / 75.0) ** 2)
    chance = frames["decisions"].set_index("coupon_id")["probability"]
    assert_allclose(chance["near"], ndtr((75.0 - sqrt(60.0**2 + 40.0**2)) / u), atol=1e-6)
    assert chance["far"] > 0.999
    assert chance["far below"] < 1e-6


def test_an_exponent_of_one_is_a_higher_baseline(make: Make) -> None:
    beside = coldwork.process(batch(make, "obstacle_mpa = 60.0")).frames["coupons"]
    sheet = SHEET.replace("50.0, u", "110.0, u")
    within = coldwork.process(batch(make, "", sheet, "within")).frames["coupons"]
    for name in ("dislocation_stress_mpa", "dislocation_density_per_m2", "stored_energy_j_per_m3"):
        for part in ("", "u_", "lower_", "upper_"):
            assert_allclose(beside[part + name], within[part + name], rtol=1e-9)


def test_unwound_the_flow_stress_holds_the_obstacles_again(make: Make) -> None:
    sheet = SHEET.replace('route = "flow"', 'route = "indent"').replace("OBSTACLE", QUADRATIC)
    sheet = sheet.replace("flow_stress", "indents").replace("repeatability_rel = 0.005", "")
    sheet += "[indentation]\ninitial_hardening_mpa = 1700\nsaturation_stress_mpa = 320\n"
    indents = [
        {"coupon_id": "a", "indent_no": i, "force_n": 98.07, "hardness": hv}
        for i, hv in enumerate((99.0, 100.0, 101.0), 1)
    ]
    result = coldwork.process(make(sheet, coupons=[{"coupon_id": "a"}], indents=indents))
    row = result.frames["coupons"].iloc[0]
    excess = 100.0 * 9.80665 / 3.0 - 50.0
    under = sqrt(excess**2 - 60.0**2)
    state = 320.0 - (320.0 - under) * np.exp(1700.0 * 0.08 / 320.0)  # Voce 1948, backwards
    assert_allclose(row["dislocation_stress_mpa"], state, rtol=1e-12)
    assert_allclose(row["flow_stress_mpa"], 50.0 + sqrt(state**2 + 60.0**2), rtol=1e-12)
    assert row["flags"] == "under-five-readings"


@pytest.mark.parametrize("exponent", [1.0, 1.3, 2.0])
def test_parting_and_joining_undo_one_another(exponent: float) -> None:
    left = superposed_stress(200e6, 60e6, exponent)
    assert_allclose(combined_stress(left, 60e6, exponent), 200e6, rtol=1e-14)


@pytest.mark.parametrize(
    ("lines", "told"),
    [
        ("superposition_exponent = 1.5", "there is no obstacle stress that it could join"),
        ("obstacle_mpa = 60\nsuperposition_exponent = 2.5", "It must lie between 1 and 2."),
        ("obstacle_mpa = 60\nsuperposition_exponent = 0.5", "It must lie between 1 and 2."),
        (
            "obstacle_mpa = 60\nsuperposition_exponent = { value = 1.1, u = 0.1 }",
            "1.1 may well be 0.8 or 1.4 by its uncertainty",
        ),
        ("obstacle_mpa = -3", "It must not be negative."),
        ('obstacle_mpa = "hard"', "'hard' is not a number"),
    ],
)
def test_what_does_not_fit_is_refused_in_the_sheets_own_line(
    make: Make, lines: str, told: str
) -> None:
    with pytest.raises(BatchRefused) as refused:
        read_method(batch(make, lines))
    message = str(refused.value)
    assert told in message
    place = 14 + lines.count("\n")  # below the baseline
    assert f"batch.toml, line {place}" in message
