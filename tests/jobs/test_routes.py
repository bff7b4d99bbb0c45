"""Batches through the whole pipeline, against lines and arithmetic from outside it."""

import tomllib
from collections.abc import Callable
from math import exp, log, pi, radians, sin, sqrt, tan
from pathlib import Path
from typing import Final

import pytest
from numpy.testing import assert_allclose

import coldwork

Make = Callable[..., Path]

FERRITE: Final = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "ferrite_line.toml").read_text("utf-8")
)
STEEL: Final = """
[batch]
id = "S1"
[material]
name = "alpha-iron"
shear_modulus_gpa = 80.0
poisson_ratio = 0.29
burgers_vector_nm = 0.248
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "flow"
baseline_mpa = 50.0
[flow]
repeatability_rel = 0.01
[hardening]
slope_n_per_m = 18.0
[character]
screw = 0.5
edge = 0.5
"""


def test_the_ferrite_line_there_and_back(make: Make) -> None:
    # Tetsu-to-Hagane 104 (2018) 683: yield stress = 50 MPa + 18 N/m sqrt(density).
    densities = [row[0] for row in FERRITE["rows"]]
    folder = make(
        STEEL,
        coupons=[{"coupon_id": f"c{i}"} for i in range(len(densities))],
        flow_stress=[
            {
                "coupon_id": f"c{i}",
                "reading_no": 1,
                "plastic_strain": 0.002,
                "flow_stress_mpa": repr(50.0 + 18.0 * sqrt(rho) / 1e6),
            }
            for i, rho in enumerate(densities)
        ],
    )
    found = coldwork.process(folder).frames["coupons"]
    assert_allclose(found["dislocation_density_per_m2"], densities, rtol=1e-12)
    assert_allclose(found["mean_spacing_nm"], [1e9 / sqrt(rho) for rho in densities], rtol=1e-12)


def test_a_flow_stress_of_230_mpa_is_one_e_14(make: Make) -> None:
    # The same line; and its stresses at the densities of a rolled carbon steel, 7e13 and 2e15
    # per m2 before and after 40 % (ISIJ Int. 54 (2014) 206): 201 and 855 MPa.
    stresses = {"a": 230.0, "b": 200.6, "c": 855.0}
    folder = make(
        STEEL,
        coupons=[{"coupon_id": name} for name in stresses],
        flow_stress=[
            {"coupon_id": k, "reading_no": 1, "plastic_strain": 0.002, "flow_stress_mpa": x}
            for k, x in stresses.items()
        ],
    )
    density = coldwork.process(folder).frames["coupons"]["dislocation_density_per_m2"]
    assert_allclose(density[0], 1e14, rtol=1e-12)
    assert_allclose(density[1:], [7e13, 2e15], rtol=1e-3)
    assert [round(50 + 18e-6 * sqrt(rho)) for rho in density[1:]] == [201, 855]


SCALES: Final = """
[batch]
id = "three-scales"
[material]
name = "copper"
shear_modulus_gpa = 44.0
poisson_ratio = 0.343
burgers_vector_nm = 0.2556
mass_density_kg_per_m3 = 8960.0
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = 50.0
[indentation]
constraint_factor = 3.0
representative_strain = 0.08
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
[indentation.HBW]
constraint_factor = 2.8
strain_ratio = 0.2
[indentation.HK]
constraint_factor = 3.1
representative_strain = 0.07
[hardening]
taylor_factor = 3.06
coefficient = 0.30
[line_energy]
outer_radius_factor = 1.0
core_radius_b = 1.0
[character]
screw = 0.5
edge = 0.5
"""
GRAVITY: Final = 9.80665


def unwound(mpa: float, strain: float) -> float:
    """Voce 1948, theta0 1700 and s_s 320 MPa, the strain taken out again. [MPa]"""
    grow = exp(1700.0 * strain / 320.0)
    return 320.0 - (320.0 - mpa) * grow


def joule_per_gram(mpa: float) -> float:
    """From the dislocation stress to the energy, by slide rule."""
    density = (mpa * 1e6 / (3.06 * 0.30 * 44e9 * 0.2556e-9)) ** 2
    factor = 44e9 * (1.0 - 0.343 * 0.5) / (1.0 - 0.343)
    per_metre = factor * 0.2556e-9**2 / (4.0 * pi) * log(1.0 / sqrt(density) / 0.2556e-9)
    return density * per_metre / 8960.0 / 1000.0


def test_three_scales_in_one_batch_by_slide_rule(make: Make) -> None:
    # ISO 6507-1, ISO 6506-1 and ISO 4545-1: force over contact area for HV and HBW, over the
    # projected area for HK; Tabor 1951: strain of a ball 0.2 d/D. Written out here, number by
    # number; the constants are those of the sheet.
    folder = make(
        SCALES,
        coupons=[{"coupon_id": name} for name in ("vickers", "brinell", "knoop")],
        indents=[
            {
                "coupon_id": "vickers",
                "indent_no": 1,
                "scale": "HV",
                "force_n": 98.07,
                "d1_um": 440.0,
                "d2_um": 444.0,
            },
            {
                "coupon_id": "brinell",
                "indent_no": 1,
                "scale": "HBW",
                "force_n": 1226.0,
                "d1_um": 1240.0,
                "d2_um": 1260.0,
                "ball_mm": 5.0,
            },
            {
                "coupon_id": "knoop",
                "indent_no": 1,
                "scale": "HK",
                "force_n": 9.807,
                "d1_um": 360.0,
            },
        ],
    )
    found = coldwork.process(folder).frames["coupons"].set_index("coupon_id")

    hv = 2.0 * sin(radians(68.0)) * 98.07 / 442.0e-6**2  # Pa
    vickers = unwound(hv / 1e6 / 3.0 - 50.0, 0.08)

    # the ball's cap: depth h = (D - sqrt(D^2 - d^2)) / 2, contact pi D h, projected pi d^2 / 4
    ball, d = 5.0e-3, 1.25e-3
    depth = (ball - sqrt(ball**2 - d**2)) / 2.0
    hbw = 1226.0 / (pi * ball * depth)
    brinell = unwound(4.0 * 1226.0 / (pi * d**2) / 1e6 / 2.8 - 50.0, 0.2 * d / ball)

    hk = 2.0 * tan(radians(86.25)) / tan(radians(65.0)) * 9.807 / 360e-6**2
    knoop = unwound(hk / 1e6 / 3.1 - 50.0, 0.07)

    numbers = [x / (GRAVITY * 1e6) for x in (hv, hbw, hk)]
    assert_allclose(found["hardness"], numbers, rtol=1e-12)
    printed = [  # with the factors that the three standards print, in N and mm
        0.1891 * 98.07 / 0.442**2,
        0.102 * 2.0 * 1226.0 / (pi * 5.0 * (5.0 - sqrt(5.0**2 - 1.25**2))),
        1.451 * 9.807 / 0.360**2,
    ]
    assert_allclose(numbers, printed, rtol=4e-4)
    assert found["hardness_scale"].tolist() == ["HV10", "HBW 5/125", "HK1"]
    assert_allclose(found["dislocation_stress_mpa"], [vickers, brinell, knoop], rtol=1e-11)
    energies = [joule_per_gram(x) for x in (vickers, brinell, knoop)]
    assert_allclose(found["stored_energy_j_per_g"], energies, rtol=1e-11)
    assert found["test_strain"].tolist() == [0.0, 0.0, 0.0]


RADII: Final = SCALES.replace('id = "three-scales"', 'id = "radii"')


@pytest.mark.parametrize(
    ("choice", "radius_nm"),
    [
        ('outer_radius = "grain"', 20e3),
        ('outer_radius = "fixed"\nouter_radius_nm = 250.0', 250.0),
    ],
)
def test_no_density_no_line_energy_whatever_the_outer_radius(
    make: Make, choice: str, radius_nm: float
) -> None:
    # DESIGN section 3: a coupon below its baseline has neither value, spacing nor line energy,
    # even where the outer radius does not need the density.
    folder = make(
        RADII.replace("[line_energy]", f"[line_energy]\n{choice}"),
        coupons=[
            {"coupon_id": name, "grain_size_um": 20, "thickness_mm": 5}
            for name in ("hard", "soft", "empty")
        ],
        indents=[
            {"coupon_id": name, "indent_no": i, "force_n": 98.07, "hardness": h + 0.1 * i}
            for name, h in (("hard", 95.0), ("soft", 40.0))
            for i in range(5)
        ],
    )
    found = coldwork.process(folder).frames["coupons"].set_index("coupon_id")
    factor = 44e9 * (1.0 - 0.343 * 0.5) / (1.0 - 0.343)
    e = factor * 0.2556e-9**2 / (4 * pi) * log(radius_nm / 0.2556)
    assert_allclose(found["line_energy_j_per_m"]["hard"], e, rtol=1e-12)
    assert "below-baseline" in str(found.loc["soft", "flags"]).split(";")
    for name in ("soft", "empty"):
        blank = [
            column
            for column in ("dislocation_density_per_m2", "mean_spacing_nm", "line_energy_j_per_m")
            if found.loc[[name], column].notna().any()
        ]
        assert blank == [], name
        ends = found.loc[[name], ["lower_line_energy_j_per_m", "upper_line_energy_j_per_m"]]
        assert ends.isna().to_numpy().all()
    soft = found.loc["soft"]
    assert soft["lower_stored_energy_j_per_g"] == 0.0
