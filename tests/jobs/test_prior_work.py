"""Strain and work of the prior deformation in a batch: dimensions, curve, what is stated."""

from collections.abc import Callable
from math import exp, log, sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

import coldwork
from coldwork.inputs.sheet import read_method
from coldwork.jobs.gather import gather
from coldwork.jobs.trace import trace

Make = Callable[..., Path]
HEAD: Final = """
[batch]
id = "worked"
[material]
name = "copper"
[character]
screw = 0.5
edge = 0.5
"""
INDENT: Final = (
    HEAD
    + """
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 5.0 }
[indentation]
initial_hardening_mpa = { value = 1700.0, u = 60.0 }
saturation_stress_mpa = { value = 320.0, u = 6.0 }
"""
)
FLOW: Final = (
    HEAD
    + """
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "flow"
friction_mpa = { value = 25.0, u = 2.0 }
hall_petch_mpa_m05 = { value = 0.11, u = 0.01 }
"""
)
VOCE: Final = '[prior_work]\nfrom = "voce"\n'
CURVE: Final = (
    "initial_hardening_mpa = { value = 1700.0, u = 60.0 }\n"
    "saturation_stress_mpa = { value = 320.0, u = 6.0 }\n"
    "initial_stress_mpa = { value = 20.0, u = 2.0 }\n"
)


def indents(*names: str, hv: float = 100.0) -> list[dict[str, object]]:
    return [
        {"coupon_id": name, "indent_no": no, "force_n": 98.07, "hardness": hv * error}
        for name in names
        for no, error in enumerate((0.99, 1.01, 1.0), 1)
    ]


def voce_work(strain: float, base: float, start: float) -> float:
    """Integrate the curve by a general library. [J/m^3]."""
    return float(
        quad(lambda e: base + 320e6 - (320e6 - start) * exp(-1700.0 * e / 320.0), 0.0, strain)[0]
    )


@pytest.mark.parametrize(
    ("cells", "strain"),
    [
        ({"rolled_from_mm": 2.0, "rolled_to_mm": 1.0}, 2.0 / sqrt(3.0) * log(2.0)),
        ({"drawn_from_mm": 8.0, "drawn_to_mm": 4.0}, log(4.0)),  # ln of the ratio of sections
        ({"upset_from_mm": 30.0, "upset_to_mm": 20.0}, log(1.5)),
        (
            {"drawn_from_mm": 8.0, "drawn_to_mm": 4.0, "upset_from_mm": 3.0, "upset_to_mm": 2.0},
            log(6.0),
        ),
        ({"rolled_from_mm": 2.0, "rolled_to_mm": 1.0, "prior_true_strain": 0.79}, 0.79),
        ({"rolled_from_mm": 1.0, "rolled_to_mm": 2.0}, np.nan),
        ({"rolled_from_mm": 2.0}, np.nan),
        ({}, np.nan),
    ],
)
def test_strain_comes_from_dimensions_where_none_is_stated(
    make: Make, cells: dict[str, object], strain: float
) -> None:
    folder = make(INDENT, coupons=[{"coupon_id": "a", **cells}], indents=indents("a"))
    batch, _ = gather(read_method(folder))
    assert_allclose(batch.coupons.prior_true_strain, [strain], rtol=1e-12)
    assert np.isnan(batch.coupons.prior_plastic_work).all()  # no curve is asked for


def test_work_along_the_curve_makes_the_stored_fraction(make: Make, tmp_path: Path) -> None:
    rolled = {"rolled_from_mm": 2.5, "rolled_to_mm": 2.0}
    coupons = [
        {"coupon_id": "a", **rolled},
        {"coupon_id": "b", **rolled, "prior_plastic_work_j_per_m3": 6e7},
        {"coupon_id": "c", "prior_true_strain": 0},
    ]
    folder = make(INDENT + VOCE, coupons=coupons, indents=indents("a", "b", "c"))
    rows = coldwork.process(folder, into=tmp_path / "out").frames["coupons"]
    work = voce_work(2.0 / sqrt(3.0) * log(1.25), 50e6, 0.0)
    stored = rows["stored_energy_j_per_m3"]
    fraction = rows["stored_fraction_of_work"].tolist()
    assert_allclose(fraction, [stored[0] / work, stored[1] / 6e7, np.nan], rtol=1e-9)
    told = " ".join(trace(tmp_path / "out" / "worked", "a").text().split())
    assert "plastic work before the test" in told
    assert "over the plastic work before the test" in told


def test_by_the_flow_route_the_curve_is_the_sections_own(make: Make) -> None:
    points = [
        {"coupon_id": "a", "reading_no": no, "plastic_strain": 0.002, "flow_stress_mpa": mpa}
        for no, mpa in enumerate((279.0, 280.0, 281.0), 1)
    ]
    coupons = [{"coupon_id": "a", "grain_size_um": 20.0, "prior_true_strain": 0.3}]
    folder = make(FLOW + VOCE + CURVE, coupons=coupons, flow_stress=points)
    row = coldwork.process(folder).frames["coupons"].iloc[0]
    base = 25e6 + 0.11e6 / sqrt(20e-6)
    work = voce_work(0.3, base, 20e6)
    assert_allclose(row["stored_fraction_of_work"], row["stored_energy_j_per_m3"] / work, rtol=1e-9)


def test_the_fraction_knows_that_one_baseline_and_one_curve_are_in_both(make: Make) -> None:
    # First order and 40,000 draws of the whole chain; the draws move the work by its derivatives.
    coupons = [{"coupon_id": "a", "prior_true_strain": 0.3}]
    sheet = INDENT + VOCE + "[hardening]\ncoefficient = { value = 0.3, factor = 1.02 }\n"
    sheet = sheet.replace("[indentation]", "[indentation]\nconstraint_factor = 3.0")
    drawn = '[uncertainty]\nmethod = "monte-carlo"\ndraws = 40000\nseed = 8\n'
    tables = {"coupons": coupons, "indents": indents("a")}
    plain = coldwork.process(make(sheet, name="p", **tables)).frames["quantities"]
    sampled = coldwork.process(make(sheet + drawn, name="d", **tables)).frames["quantities"]
    for column in ("lower", "upper"):
        one, other = (
            x[x["quantity"] == "stored_fraction_of_work"][column].iloc[0] for x in (plain, sampled)
        )
        assert_allclose(one, other, rtol=0.03)
    budget = coldwork.process(make(sheet, name="b", **tables)).frames["budget"]
    mine = budget[budget["quantity"] == "stored_fraction_of_work"].set_index("input")
    energy = budget[budget["quantity"] == "stored_energy_j_per_m3"].set_index("input")
    key = "strength.baseline_mpa"  # a higher baseline means less energy and more work
    assert mine["share_of_u2"][key] > energy["share_of_u2"][key]


def test_a_stated_work_and_strain_are_held_against_both(make: Make) -> None:
    work = voce_work(0.3, 50e6, 0.0)
    dims = {"drawn_from_mm": 10.0, "drawn_to_mm": 10.0 * exp(-0.15)}
    coupons = [
        {"coupon_id": "near", **dims, "prior_true_strain": 0.31,
         "prior_plastic_work_j_per_m3": 1.19 * work * 0.31 / 0.3},
        {"coupon_id": "far", **dims, "prior_true_strain": 0.32,
         "prior_plastic_work_j_per_m3": 1.4 * work},
    ]  # fmt: skip
    folder = make(INDENT + VOCE, coupons=coupons, indents=indents("near", "far"))
    flags = coldwork.process(folder).frames["flags"]
    told = flags[flags["rule"].str.startswith("prior-")]
    assert told["coupon_id"].tolist() == ["far", "far"]
    assert told["rule"].tolist() == ["prior-strain-differs", "prior-work-differs"]
    assert_allclose(told["limit"].iloc[0], 0.3, rtol=1e-9)
    assert set(told["file"]) == {"coupons.csv"}
    assert set(told["line"].astype(int)) == {3}
