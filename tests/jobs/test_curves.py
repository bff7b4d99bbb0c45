"""Batches of curves through the whole pipeline, against Voce's law in closed form."""

import csv
import json
import tomllib
from collections.abc import Callable
from math import exp, log, pi, sqrt
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pyarrow.parquet as pq
import pytest
from numpy.testing import assert_allclose
from tests.jobs.pulled import AREA, SHEET, Strip, coupon, rows, several

import coldwork
from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method
from coldwork.jobs.run import record_again, run
from coldwork.jobs.trace import trace

Make = Callable[..., Path]
Rows = list[dict[str, object]]
STARTS = (20.0, 100.0, 180.0)
INDENT = SHEET.replace('route = "flow"', 'route = "indent"').replace(
    "[files]", '[files]\nindents = "indents.csv"'
)


def frames(folder: Path) -> dict[str, Any]:
    return dict(coldwork.process(folder).frames)


def energy(density: float) -> float:
    """Half screw, half edge, from a Burgers vector to the mean spacing (Hirth and Lothe). J/m3."""
    factor = 44e9 * (1.0 - 0.343 * 0.5) / (1.0 - 0.343)
    per_metre = factor * 0.2556e-9**2 / (4.0 * pi) * log(1.0 / sqrt(density) / 0.2556e-9)
    return density * per_metre


def density_of(stress: float) -> float:
    return float(((stress - 50.0) * 1e6 / (3.06 * 0.30 * 44e9 * 0.2556e-9)) ** 2)


def test_the_flow_stress_comes_from_the_curve(make: Make) -> None:
    coupons, curves = several(*STARTS)
    found = frames(make(SHEET, coupons=coupons, curves=curves))["coupons"]
    true = np.array([Strip(start).stress(0.002) for start in STARTS])
    assert_allclose(found["flow_stress_mpa"], true, rtol=2e-5)
    densities = [density_of(x) for x in true]
    assert_allclose(found["dislocation_density_per_m2"], densities, rtol=2e-4)
    assert found["test_strain"].tolist() == [0.002] * 3
    assert found["readings_used"].tolist() == [600] * 3
    assert found["flags"].fillna("").str.contains("no-repeatability").sum() == 0


def test_the_machine_enters_every_u_and_budgets_add_up(make: Make) -> None:
    coupons, curves = several(*STARTS, noise=0.4)
    made = frames(make(SHEET, coupons=coupons, curves=curves))
    budget, quantities = made["budget"], made["quantities"]
    squares = (budget["contribution"] ** 2).groupby([budget["coupon_id"], budget["quantity"]]).sum()
    u = quantities.set_index(["coupon_id", "quantity"])["u"]
    assert_allclose(np.sqrt(squares), u.loc[squares.index], rtol=1e-9)
    stress = budget[budget["quantity"] == "flow_stress_mpa"].set_index(["coupon_id", "input"])
    for name, start in zip(("c0", "c1", "c2"), STARTS, strict=True):
        # the force scales the stress as it is, and so does one over the section
        true = Strip(start).stress(0.002)
        force, area = (stress.loc[(name, f"tensile.{k}_u_rel")] for k in ("force", "area"))
        assert_allclose(force["contribution"], 0.005 * true, rtol=0.02)
        assert_allclose(abs(area["contribution"]), 0.004 * true, rtol=0.02)
        assert force["own_or_shared"] == "shared"
        assert force["contribution"] * area["contribution"] < 0.0
        own = stress.loc[(name, "repeatability")]
        assert own["own_or_shared"] == "own"
        assert 0.0 < own["contribution"] < 0.1  # 0.4 N are 0.02 MPa in one point
    energies = budget[budget["quantity"] == "stored_energy_j_per_g"]
    assert {"tensile.force_u_rel", "tensile.area_u_rel"} <= set(energies["input"])


def test_the_interval_of_the_density_is_that_of_its_stress(make: Make) -> None:
    # u of the dislocation stress: baseline 5 MPa, machine 0.5 and 0.4 % of the flow stress
    coupons, curves = several(*STARTS)
    found = frames(make(SHEET, coupons=coupons, curves=curves))["coupons"]
    for i, start in enumerate(STARTS):
        true = Strip(start).stress(0.002)
        u = sqrt(5.0**2 + (0.005 * true) ** 2 + (0.004 * true) ** 2)
        row = found.iloc[i]
        assert_allclose(row["u_dislocation_stress_mpa"], u, rtol=0.01)
        upper = density_of(true + 1.96 * u)
        assert_allclose(row["upper_dislocation_density_per_m2"], upper, rtol=0.01)


def test_the_state_is_followed_along_the_strain(make: Make) -> None:
    coupons, curves = several(*STARTS)
    found = frames(make(SHEET, coupons=coupons, curves=curves))["evolution"]
    assert len(found) == 3 * 4
    for (name, strain), row in found.set_index(["coupon_id", "test_strain"]).iterrows():
        strip = Strip(STARTS[int(str(name)[1:])])
        if strain > strip.uniform:
            assert row["reason"] == "beyond uniform strain"
            assert row.filter(like="_mpa").isna().all()
            continue
        stress, work = strip.stress(strain), strip.work(strain)
        stored = energy(density_of(stress))
        assert_allclose(row["flow_stress_mpa"], stress, rtol=2e-5)
        assert_allclose(row["dislocation_density_per_m2"], density_of(stress), rtol=2e-4)
        assert_allclose(row["stored_energy_j_per_m3"], stored, rtol=2e-4)
        assert_allclose(row["stored_energy_j_per_g"], stored / 8960.0 / 1e3, rtol=2e-4)
        assert_allclose(row["plastic_work_j_per_m3"], work, rtol=2e-3)
        # of the work before the test and of the test's own
        assert_allclose(row["stored_fraction_of_work"], stored / (2e7 + work), rtol=1e-3)
        assert row["reason"] == ""
        for column in ("flow_stress_mpa", "stored_energy_j_per_g", "stored_fraction_of_work"):
            assert row[f"lower_{column}"] < row[column] < row[f"upper_{column}"]
            assert row[f"u_{column}"] > 0.0
    assert set(found["reason"]) == {"", "beyond uniform strain"}


@pytest.mark.parametrize(
    ("prior", "work", "expected"),
    [(0.1, 2e7, 2e7), (0.0, "", 0.0), (0.1, "", None), ("", "", None), (0.0, 1e6, 1e6)],
)
def test_what_the_energy_is_held_against(
    make: Make, prior: object, work: object, expected: float | None
) -> None:
    cells = {"prior_true_strain": prior, "prior_plastic_work_j_per_m3": work}
    folder = make(SHEET, coupons=[coupon("c0", **cells)], curves=rows("c0", Strip()))
    found = frames(folder)["evolution"].set_index("test_strain")
    fraction = found.loc[0.1, "stored_fraction_of_work"]
    if expected is None:
        assert pd.isna(fraction)
        return
    stored = found.loc[0.1, "stored_energy_j_per_m3"]
    assert_allclose(fraction, stored / (expected + Strip().work(0.1)), rtol=2e-3)


def test_what_relation_6_needs_is_offered_to_other_batches(make: Make) -> None:
    folder = make(SHEET, coupons=[coupon("c0")], curves=rows("c0", Strip(), noise=0.1))
    row = frames(folder)["tensile"].iloc[0]
    # the line of the whole stress, and with the baseline of 50 MPa taken off
    assert_allclose(row["hardening_at_zero_stress_mpa"], 1700.0 * (1 + 50 / 320), rtol=2e-3)
    assert_allclose(row["stress_at_zero_hardening_mpa"], 370.0, rtol=2e-3)
    assert_allclose(row["initial_hardening_mpa"], 1700.0, rtol=2e-3)
    assert_allclose(row["saturation_stress_mpa"], 320.0, rtol=2e-3)
    # sigma_s: the baseline's 5 MPa, and force over section to 0.5 and 0.4 % of 370 MPa
    u = sqrt(5.0**2 + (0.005 * 370.0) ** 2 + (0.004 * 370.0) ** 2)
    assert_allclose(row["u_saturation_stress_mpa"], u, rtol=0.02)
    assert -1.0 <= row["correlation_hardening_saturation"] <= 1.0
    lines = record_again(folder, "c0")["curve"]["for_another_sheet"]
    offered = tomllib.loads(lines)["indentation"]
    assert_allclose(
        offered["initial_hardening_mpa"]["value"], row["initial_hardening_mpa"], rtol=0.01
    )
    assert_allclose(offered["saturation_stress_mpa"]["u"], u, rtol=0.05)
    assert "curves.csv, lines 2 to 601" in offered["saturation_stress_mpa"]["source"]
    other = make(
        f"{INDENT.replace('PULL-1', 'OTHER')}\n{lines}\n".replace('curves = "curves.csv"', ""),
        name="other",
        coupons=[{"coupon_id": "a"}],
        indents=[{"coupon_id": "a", "indent_no": 1, "force_n": 98.07, "hardness": 80}],
    )
    assert read_method(other).laws.unwinding


def test_trace_says_which_curve_and_which_lines(make: Make, tmp_path: Path) -> None:
    coupons, curves = several(*STARTS)
    folder = make(SHEET, coupons=coupons, curves=curves)
    outcome = run(folder, tmp_path / "results", plots=False)
    found = trace(outcome.path, "c1")
    told = found.text()
    assert "curves.csv, lines 602 to 1201" in told
    assert "for the sheet of another batch" in told
    assert "initial_hardening_mpa = { value = 1" in told
    curve = found.record["curve"]
    at = curve["read_at"]
    line = (folder / "curves.csv").read_text(encoding="utf-8").splitlines()[at["line"] - 1]
    assert sorted(at["raw"].values()) == sorted(next(csv.reader([line])))
    # the point stands at or next above the strain that is reported
    strain = float(at["raw"]["extension_mm"]) / 50.0
    assert 0.002 <= strain - Strip(100.0).stress(0.002) / 118e3 <= 0.0022
    assert found.record["repeatability"]["basis"] == "curve"
    assert found.record["readings"] == []
    assert "points used 600" in told
    assert "Readings used" not in told  # the curve's points are told with the curve
    assert {"tensile.force_u_rel"} <= set(found.record["steps"][0]["from"])


def test_a_summary_is_traced_back_to_the_same_curve(make: Make, tmp_path: Path) -> None:
    coupons, curves = several(*STARTS)
    folder = make(f'{SHEET}\n[output]\ndetail = "summary"\n', coupons=coupons, curves=curves)
    outcome = run(folder, tmp_path / "results", plots=False)
    assert (outcome.path / "tensile.csv").is_file()
    found = trace(outcome.path, "c2", batch=folder, retrace=record_again)
    assert found.recomputed
    assert found.record["curve"]["first_line"] == 1202


def test_beside_indents_curves_touch_nothing(make: Make) -> None:
    coupons, curves = several(*STARTS)
    indents = [
        {"coupon_id": f"c{i}", "indent_no": j, "force_n": 98.07, "hardness": 80 + 5 * i + j}
        for i in range(3)
        for j in range(5)
    ]
    curves[700]["force_n"] = "12,5"  # set aside, and not on the coupons' account
    more = [*curves, *rows("c9", Strip())[:50]]
    with_curves = make(INDENT, name="with", coupons=coupons, indents=indents, curves=more)
    alone = make(
        INDENT.replace('curves = "curves.csv"', ""), name="alone", coupons=coupons, indents=indents
    )
    one, other = frames(with_curves), frames(alone)
    for table in ("coupons", "quantities", "budget", "readings", "lots"):
        drop = [c for c in ("record_sha256",) if c in one[table]]
        pd.testing.assert_frame_equal(
            one[table].drop(columns=drop), other[table].drop(columns=drop)
        )
    assert "evolution" not in one
    assert "tensile" not in other
    tensile = one["tensile"].set_index("coupon_id")
    assert tensile["points_used"].tolist() == [600, 599, 600]
    assert tensile["points_set_aside"].tolist() == [0, 1, 0]
    assert set(one["set_aside"]["table"]) == {"curves"}
    manifest = coldwork.process(with_curves).manifest["reconciled"]
    assert manifest["readings_read"] == 1800 + 50 + 15
    assert manifest["readings_used"] + manifest["readings_set_aside"] == manifest["readings_read"]
    assert manifest["readings_set_aside"] == 51


def test_an_error_beside_indents_empties_nothing_of_them(make: Make) -> None:
    coupons, curves = several(100.0)
    for row in curves:
        row["force_n"] = repr(float(str(row["force_n"])) / 1000.0)  # kN under the name of N
    indents = [
        {"coupon_id": "c0", "indent_no": j, "force_n": 98.07, "hardness": 80 + j} for j in range(5)
    ]
    made = coldwork.process(make(INDENT, coupons=coupons, indents=indents, curves=curves))
    tables: dict[str, Any] = dict(made.frames)
    assert pd.notna(tables["coupons"]["stored_energy_j_per_g"][0])
    flag = tables["flags"].set_index("rule").loc["stress-impossible"]
    assert flag["level"] == "error"
    assert pd.isna(flag["empties"]) or flag["empties"] == ""
    row = tables["tensile"].iloc[0]
    assert "stress-impossible" in row["flags"]
    assert pd.isna(row["tensile_strength_mpa"])
    assert made.outcome.errors == 1


def test_an_error_on_a_curve_that_gives_the_strength_empties_it(make: Make) -> None:
    coupons, curves = several(100.0, 150.0)
    for row in curves[600:]:
        row["force_n"] = repr(float(str(row["force_n"])) / 1000.0)
    made = frames(make(SHEET, coupons=coupons, curves=curves))
    assert made["coupons"]["flow_stress_mpa"].notna().tolist() == [True, False]
    assert "stress-impossible" in made["coupons"]["flags"][1]
    assert set(made["evolution"]["reason"][4:]) == {"curve not trusted"}
    emptied = made["flags"].set_index("rule").loc["stress-impossible", "empties"]
    assert "flow_stress_mpa" in emptied


def test_points_of_flow_stress_come_before_curves(make: Make) -> None:
    coupons, curves = several(100.0)
    points = [
        {"coupon_id": "c0", "reading_no": i, "plastic_strain": 0.002, "flow_stress_mpa": 200.0 + i}
        for i in range(3)
    ]
    sheet = SHEET.replace("[files]", '[files]\nflow_stress = "flow_stress.csv"')
    made = frames(make(sheet, coupons=coupons, curves=curves, flow_stress=points))
    assert_allclose(made["coupons"]["flow_stress_mpa"], 201.0)
    assert_allclose(made["evolution"]["flow_stress_mpa"][0], Strip().stress(0.002), rtol=2e-5)
    assert made["coupons"]["readings_used"].tolist() == [3]


def test_no_point_is_lost(make: Make) -> None:
    coupons, curves = several(100.0, 150.0)
    curves[10]["extension_mm"] = "1,5"
    curves[20]["force_n"] = ""
    curves[30]["coupon_id"] = "nobody"
    made = coldwork.process(make(SHEET, coupons=coupons, curves=curves))
    tables: dict[str, Any] = dict(made.frames)
    aside = tables["set_aside"].set_index("line")
    assert aside["rule"].to_dict() == {
        12: "not-a-number",
        22: "required-empty",
        32: "unlisted-coupon",
    }
    assert aside["reading_no"][12] == 11  # counted in the coupon
    source = next(x for x in made.manifest["inputs"] if x["table"] == "curves")
    assert (source["rows_read"], source["rows_used"], source["rows_set_aside"]) == (1200, 1197, 3)
    assert tables["coupons"]["readings_set_aside"].tolist() == [2, 0]
    assert tables["tensile"]["points_used"].tolist() == [597, 600]


def test_numbered_points_may_stand_in_any_order(make: Make) -> None:
    curves = [{"point_no": i, **row} for i, row in enumerate(rows("c0", Strip()))]
    straight = frames(make(SHEET, name="a", coupons=[coupon("c0")], curves=curves))
    again = [*curves[::-1], curves[5] | {"force_n": "1"}]
    turned = frames(make(SHEET, name="b", coupons=[coupon("c0")], curves=again))
    column = "flow_stress_mpa"
    assert turned["coupons"][column].tolist() == straight["coupons"][column].tolist()
    assert turned["set_aside"]["rule"].tolist() == ["repeated-reading"]


def test_an_exclusion_takes_a_point_out(make: Make) -> None:
    curves = [{"point_no": i, **row} for i, row in enumerate(rows("c0", Strip()))]
    excluded = [
        {
            "coupon_id": "c0",
            "reading_no": 7,
            "excluded_by": "operator-1",
            "excluded_at": "2026-03-01",
            "reason": "spike of the amplifier",
        }
    ]
    sheet = SHEET.replace("[files]", '[files]\nexclusions = "exclusions.csv"')
    made = frames(make(sheet, coupons=[coupon("c0")], curves=curves, exclusions=excluded))
    assert made["set_aside"]["rule"].tolist() == ["excluded"]
    assert made["tensile"]["points_used"].tolist() == [599]


def points_of(path: Path) -> pd.DataFrame:
    return pq.read_table(path / "curve_points.parquet").to_pandas()


def test_points_on_request_and_scattered_curves_give_the_same(make: Make, tmp_path: Path) -> None:
    coupons, curves = several(*STARTS, noise=0.2)
    sheet = f"{SHEET}\n[output]\ncurve_points = true\n"
    mixed = [row for i in range(600) for row in (curves[i], curves[600 + i], curves[1200 + i])]
    found = []
    for name, table in (("straight", curves), ("mixed", mixed)):
        folder = make(sheet, name=name, coupons=coupons, curves=table)
        outcome = run(folder, tmp_path / "results" / name, plots=False)
        points = points_of(outcome.path).sort_values(["coupon_id", "point_no"])
        table_out = pd.read_csv(outcome.path / "tensile.csv")
        drop = ["file", "first_line", "last_line", "line"]
        found.append((points.drop(columns=["line"]), table_out.drop(columns=drop[:3])))
        assert json.loads((outcome.path / "manifest.json").read_text())["reconciled"] == {
            "readings_read": 1800,
            "readings_used": 1800,
            "readings_set_aside": 0,
            "coupons": 3,
        }
    pd.testing.assert_frame_equal(
        found[0][0].reset_index(drop=True), found[1][0].reset_index(drop=True)
    )
    pd.testing.assert_frame_equal(found[0][1], found[1][1])
    points = found[0][0]
    assert len(points) == 1800
    force = np.array([float(str(row["force_n"])) for row in curves])
    assert_allclose(points["engineering_stress_mpa"], force / AREA, rtol=1e-12, atol=1e-9)
    true = points.dropna(subset=["true_stress_mpa"])
    assert 1000 < len(true) < 1800  # past uniform strain there is no true stress
    strain = true["engineering_strain"]
    assert_allclose(
        true["true_stress_mpa"], true["engineering_stress_mpa"] * (1 + strain), rtol=1e-9, atol=1e-6
    )


def test_without_a_request_there_are_no_points(make: Make, tmp_path: Path) -> None:
    folder = make(SHEET, coupons=[coupon("c0")], curves=rows("c0", Strip()))
    outcome = run(folder, tmp_path / "results", plots=False)
    assert not (outcome.path / "curve_points.parquet").exists()


def test_stress_and_strain_may_come_instead(make: Make) -> None:
    _, force, length = Strip().curve()
    curves = [
        {"coupon_id": "c0", "stress_mpa": repr(f / AREA), "strain": repr(x / 50.0)}
        for f, x in zip(force.tolist(), length.tolist(), strict=True)
    ]
    sheet = SHEET.replace('strain_from = "extension"', 'stress_is = "engineering"')
    made = frames(make(sheet, coupons=[{"coupon_id": "c0"}], curves=curves))
    assert_allclose(made["coupons"]["flow_stress_mpa"], Strip().stress(0.002), rtol=2e-5)
    assert made["tensile"]["strain_from"].tolist() == ["given"]
    moved = made["budget"].loc[made["budget"]["contribution"].abs() > 0.0, "input"]
    assert "tensile.force_u_rel" in set(moved)  # a given stress was a force once


def test_a_flat_coupon_has_width_times_thickness(make: Make) -> None:
    flat = coupon("c0", initial_diameter_mm="", width_mm=10.0, thickness_mm=AREA / 10.0)
    made = frames(make(SHEET, coupons=[flat], curves=rows("c0", Strip())))
    assert_allclose(made["coupons"]["flow_stress_mpa"], Strip().stress(0.002), rtol=2e-5)


def test_a_coupon_without_its_dimensions_is_told_by_name(make: Make) -> None:
    coupons, curves = several(100.0, 150.0)
    bad = [coupons[0], dict(coupons[1]) | {"gauge_length_mm": "about 50"}]
    made = frames(make(SHEET, coupons=bad, curves=curves))
    flags = made["flags"].set_index(["coupon_id", "rule"])
    assert flags.loc[("c1", "curve-without-geometry"), "level"] == "error"
    assert flags.loc[("c1", "bad-coupon-cell"), "level"] == "warning"
    assert made["coupons"]["flow_stress_mpa"].notna().tolist() == [True, False]


def test_coupons_without_a_curve_stay(make: Make) -> None:
    made = frames(make(SHEET, coupons=[coupon("c0"), coupon("c1")], curves=rows("c0", Strip())))
    assert made["tensile"]["points_used"].tolist() == [600, 0]
    assert "no-readings" in made["coupons"]["flags"][1]
    assert set(made["evolution"]["reason"][4:]) == {"no curve"}


def test_a_strain_beyond_the_curve_gives_no_flow_stress(make: Make) -> None:
    sheet = f"{SHEET}\n[flow]\nplastic_strain = 0.5\n"
    made = frames(make(sheet, coupons=[coupon("c0")], curves=rows("c0", Strip())))
    assert "no-flow-stress-at-strain" in made["coupons"]["flags"][0]
    assert pd.isna(made["coupons"]["flow_stress_mpa"][0])
    assert pd.notna(made["tensile"]["proof_stress_0_2_mpa"][0])


def test_a_stated_slope_is_an_input_like_any_other(make: Make) -> None:
    slope = "slope_gpa = { value = 118.0, u = 2.0 }\noffsets = [0.002, 0.01]\n"
    sheet = SHEET.replace("[tensile]\n", f"[tensile]\n{slope}")
    folder = make(sheet, coupons=[coupon("c0")], curves=rows("c0", Strip(), noise=0.2))
    made = frames(folder)
    row = made["tensile"].iloc[0]
    assert_allclose(row["slope_gpa"], 118.0, rtol=1e-12)
    assert_allclose(row["u_shared_slope_gpa"], 2.0, rtol=1e-9)
    inputs = set(made["budget"]["input"])
    assert "tensile.slope_gpa" in inputs
    told = record_again(folder, "c0")["curve"]["proof_stresses_mpa"]
    assert [x["offset"] for x in told] == [0.002, 0.01]
    assert told[0]["value"] == pytest.approx(row["proof_stress_0_2_mpa"])
    assert told[1]["value"] > told[0]["value"]


def test_a_piece_that_is_pressed(make: Make) -> None:
    # the section grows: force over S0 is sigma exp(strain); both may be written below zero
    strip, height, wide = Strip(), 15.0, 10.0
    area = pi * wide**2 / 4.0
    elastic = [i * strip.stress(0.0) / 118e3 / 100 for i in range(100)]
    plastic = [i * 0.25 / 400 for i in range(401)]
    points = [(118e3 * e, e) for e in elastic]
    for p in plastic:
        total = p + strip.stress(p) / 118e3
        points.append((strip.stress(p) * exp(total), 1.0 - exp(-total)))
    curves = [
        {"coupon_id": "c0", "force_n": repr(-s * area), "extension_mm": repr(-e * height)}
        for s, e in points
    ]
    cells = {"gauge_length_mm": height, "initial_diameter_mm": wide}
    sheet = SHEET.replace('mode = "tension"', 'mode = "compression"')
    made = frames(make(sheet, coupons=[coupon("c0", **cells)], curves=curves))
    states = made["evolution"].set_index("test_strain")
    for strain in (0.05, 0.1):
        assert_allclose(states.loc[strain, "flow_stress_mpa"], strip.stress(strain), rtol=1e-3)
        assert_allclose(states.loc[strain, "plastic_work_j_per_m3"], strip.work(strain), rtol=0.01)
    assert pd.isna(made["tensile"]["uniform_elongation"][0])
    assert "no-maximum" not in made["tensile"]["flags"][0]


def test_a_measured_neck_gives_one_state_more(make: Make) -> None:
    # Bridgman (1952): mean stress over (1 + 2R/a) ln(1 + a/2R), a the radius of the neck
    neck = {"final_diameter_mm": 3.6, "neck_radius_mm": 2.0}
    sheet = SHEET.replace("[tensile]\n", "[tensile]\nbridgman = true\n")
    curves = rows("c0", Strip())
    row = frames(make(sheet, coupons=[coupon("c0", **neck)], curves=curves))["tensile"].iloc[0]
    last = float(str(curves[-1]["force_n"])) / (pi * 1.8**2)
    factor = 1.0 / ((1.0 + 2.0 * 2.0 / 1.8) * log(1.0 + 1.8 / 4.0))
    assert_allclose(row["neck_stress_mpa"], last * factor, rtol=5e-3)
    assert_allclose(row["neck_strain"], 2.0 * log(5.0 / 3.6), rtol=1e-9)
    plain = frames(make(SHEET, name="plain", coupons=[coupon("c0", **neck)], curves=curves))
    assert pd.isna(plain["tensile"]["neck_stress_mpa"][0])  # only where it is asked for


def refused(folder: Path) -> str:
    with pytest.raises(BatchRefused) as refusal:
        coldwork.process(folder)
    return " / ".join(map(str, refusal.value.causes))


STRAIN_ONLY = {"coupon_id": "c0", "strain": "0.1", "time_s": "1"}


@pytest.mark.parametrize(
    ("sheet", "coupons", "curves", "words"),
    [
        (
            SHEET,
            [{"coupon_id": "c0", "gauge_length_mm": 50}],
            None,
            "no column initial_diameter_mm, or width_mm with thickness_mm",
        ),
        (SHEET, [{"coupon_id": "c0", "initial_diameter_mm": 5}], None, "no column gauge_length_mm"),
        (SHEET, None, [STRAIN_ONLY], "neither a force with a length nor a stress with a strain"),
        (SHEET.replace('"extension"', '"crosshead"'), None, None, "it has no crosshead_mm"),
        (
            SHEET.replace('strain_from = "extension"', 'stress_is = "true"'),
            None,
            None,
            "Say strain_from in [tensile]",
        ),
        (
            SHEET,
            None,
            [{"coupon_id": "c0", "stress_mpa": "1", "strain": "0.1"}],
            "Say stress_is in [tensile]",
        ),
        (
            SHEET.replace('"extension"', '"extension"\nstress_is = "true"'),
            None,
            [row | {"stress_mpa": "1", "strain": "0.1"} for row in rows("c0", Strip())],
            "Take one of the two keys out",
        ),
    ],
)
def test_what_cannot_be_read_is_refused_by_name(
    make: Make, sheet: str, coupons: Rows | None, curves: Rows | None, words: str
) -> None:
    folder = make(
        sheet,
        coupons=coupons or [coupon("c0")],
        curves=curves or rows("c0", Strip()),
    )
    assert words in refused(folder)


def test_a_curve_in_two_files_is_refused(make: Make) -> None:
    sheet = SHEET.replace('"curves.csv"', '["one.csv", "two.csv"]')
    table = rows("c0", Strip())
    folder = make(sheet, coupons=[coupon("c0")], one=table[:300], two=table[300:])
    assert "coupon 'c0' has points here and in one.csv" in refused(folder)


def test_one_coupon_to_a_file_or_many(make: Make) -> None:
    coupons, curves = several(*STARTS)
    whole = frames(make(SHEET, name="whole", coupons=coupons, curves=curves))
    sheet = SHEET.replace('"curves.csv"', '"c?.csv"')
    parts = {f"c{i}": curves[600 * i : 600 * (i + 1)] for i in range(3)}
    each = frames(make(sheet, name="each", coupons=coupons, **parts))
    names = ["flow_stress_mpa", "stored_energy_j_per_g", "u_stored_energy_j_per_g"]
    pd.testing.assert_frame_equal(whole["coupons"][names], each["coupons"][names])
    assert each["tensile"]["file"].tolist() == ["c0.csv", "c1.csv", "c2.csv"]
    assert each["tensile"]["first_line"].tolist() == [2, 2, 2]


def test_plots_are_drawn_of_curves(make: Make, tmp_path: Path) -> None:
    coupons, curves = several(*STARTS)
    outcome = run(make(SHEET, coupons=coupons, curves=curves), tmp_path / "results")
    drawn = {path.stem for path in (outcome.path / "plots").glob("*.svg")}
    assert {"curves", "hardening-rate", "density-along-strain", "energy-along-strain"} <= drawn
