"""Batches of both routes, by hand and against their own tables."""

from collections.abc import Callable
from math import exp, expm1, isnan, sqrt
from pathlib import Path
from typing import Any, Final

import pandas as pd
import pytest
from numpy.testing import assert_allclose
from scipy.stats import t as student

import coldwork
from coldwork.errors import UsageError
from coldwork.jobs.compare import compare
from coldwork.jobs.run import record_again
from coldwork.jobs.trace import trace

Make = Callable[..., Path]
Rows = dict[str, Any]
STRESS: Final = "dislocation_stress_mpa"
NAMES: Final = ("joined", "apart", "indents", "curve", "short", "coarse")
SCATTER: Final = (-0.010, 0.004, 0.011, -0.006, 0.001)
POINTS: Final = ((0.0018, -0.004), (0.0020, 0.001), (0.0022, 0.003))

SHEET: Final = """
[batch]
id = "TWO-1"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "both"
baseline_mpa = { value = 50.0, u = 15.0 }
[hardening]
taylor_factor = 3.06
coefficient = { value = 0.30, factor = 1.2 }
[character]
screw = 0.5
edge = 0.5
[uncertainty]
repeatability = "own"
"""
UNWOUND: Final = """
[indentation]
constraint_factor = { value = 3.0, u = 0.15 }
representative_strain = { value = 0.08, u = 0.005 }
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
"""
AT_ONE: Final = """
[indentation]
constraint_factor = { value = 3.0, u = 0.15 }
representative_strain = 0.08
[flow]
plastic_strain = 0.08
"""


def tables(shift: float = 0.0) -> dict[str, list[dict[str, object]]]:
    hardness = {"joined": 97.0, "apart": 97.0, "indents": 98.0, "short": 97.0}
    stresses = {"joined": 290.0, "apart": 370.0, "curve": 288.0, "coarse": 289.0}
    indents: list[dict[str, object]] = [
        {"coupon_id": name, "indent_no": i + 1, "force_n": 98.07, "hardness": h * (1.0 + x)}
        for name, h in hardness.items()
        for i, x in enumerate(SCATTER)
    ]
    indents.append({"coupon_id": "coarse", "indent_no": 1, "force_n": 98.07, "hardness": 97.0})
    points: list[dict[str, object]] = [
        {
            "coupon_id": name,
            "reading_no": i + 1,
            "plastic_strain": f"{strain + shift:.4f}",
            "flow_stress_mpa": stress * (1.0 + x),
        }
        for name, stress in stresses.items()
        for i, (strain, x) in enumerate(POINTS)
    ]
    points.append(
        {
            "coupon_id": "short",
            "reading_no": 1,
            "plastic_strain": "0.2000",
            "flow_stress_mpa": 300.0,
        }
    )
    coupons: list[dict[str, object]] = [
        {"coupon_id": name, "prior_plastic_work_j_per_m3": 5e7} for name in NAMES
    ]
    return {"coupons": coupons, "indents": indents, "flow_stress": points}


@pytest.fixture(scope="module")
def folder(make_once: Make) -> Path:
    return make_once(SHEET + UNWOUND, **tables())


@pytest.fixture(scope="module")
def results(folder: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    into = tmp_path_factory.mktemp("results")
    return coldwork.process(folder, into).outcome.path


@pytest.fixture(scope="module")
def frames(results: Path) -> dict[str, pd.DataFrame]:
    return {
        path.stem: pd.read_csv(path).set_index("coupon_id")
        for path in results.glob("*.csv")
        if path.stem != "lots"
    }


def row_of(frame: pd.DataFrame, name: str) -> Rows:
    return {str(column): x for column, x in frame.loc[name].items()}


def test_one_coupon_on_paper(frames: dict[str, pd.DataFrame]) -> None:
    # Relations 1, 2, 4 and 6 written out; JCGM 100, 5.2 for the shared baseline.
    def unwound(stress: float, strain: float) -> tuple[float, float]:
        x = 1700.0 * strain / 320.0
        return stress * exp(x) - 320.0 * expm1(x), exp(x)

    tested = 97.0 * 9.80665 / 3.0
    by_indent, growth = unwound(tested - 50.0, 0.08)
    by_flow, small = unwound(240.0, 0.002)
    s = 97.0 * sqrt(sum(x * x for x in SCATTER) / 4.0)
    s_flow = 290.0 * sqrt(sum(x * x for _, x in POINTS) / 2.0)
    own = {
        "scatter": growth * s * 9.80665 / 3.0 / sqrt(5.0),
        "constraint": growth * tested * 0.15 / 3.0,
        "strain": 1700.0 * growth * ((tested - 50.0) / 320.0 - 1.0) * 0.005,
    }
    noise = small * s_flow / sqrt(3.0)
    both = sum(x * x for x in own.values()) + noise**2 + ((growth - small) * 15.0) ** 2
    v_indent = sum(x * x for x in own.values()) + (growth * 15.0) ** 2
    v_flow = noise**2 + (small * 15.0) ** 2
    shared = growth * small * 15.0**2
    weight = (v_flow - shared) / (v_indent + v_flow - 2.0 * shared)
    row = row_of(frames["routes"], "joined")
    assert_allclose(row["dislocation_stress_indent_mpa"], by_indent, rtol=1e-12)
    assert_allclose(row["dislocation_stress_flow_mpa"], by_flow, rtol=1e-12)
    assert_allclose(row["difference_mpa"], by_indent - by_flow, rtol=1e-9)
    assert_allclose(row["u_difference_mpa"], sqrt(both), rtol=1e-12)
    assert_allclose(row["weight_indent"], weight, rtol=1e-9)
    freedom = both**2 / (own["scatter"] ** 4 / 4.0 + noise**4 / 2.0)
    assert_allclose(row["degrees_of_freedom"], freedom, rtol=1e-9)
    error = abs(by_indent - by_flow) / (student.ppf(0.975, freedom) * sqrt(both))
    assert_allclose(row["normalised_error"], error, rtol=1e-6)
    coupon = row_of(frames["coupons"], "joined")
    assert (coupon["route"], coupon["test_strain"]) == ("both", 0.0)
    assert_allclose(coupon[STRESS], weight * by_indent + (1.0 - weight) * by_flow, rtol=1e-12)
    best = (v_indent * v_flow - shared**2) / (v_indent + v_flow - 2.0 * shared)
    assert_allclose(coupon[f"u_{STRESS}"], sqrt(best), rtol=1e-9)
    assert coupon[f"u_{STRESS}"] < min(
        row["u_dislocation_stress_indent_mpa"], row["u_dislocation_stress_flow_mpa"]
    )
    assert_allclose(coupon["flow_stress_mpa"], coupon[STRESS] + 50.0, rtol=1e-12)


def test_each_coupon_says_what_it_is_from(frames: dict[str, pd.DataFrame]) -> None:
    routes, coupons = frames["routes"], frames["coupons"]
    expected = ["both", "both", "indent", "flow", "indent", "flow"]
    assert coupons["route"].tolist() == expected
    assert routes["taken"].fillna("").tolist() == ["both", "", *expected[2:]]
    assert routes.index.tolist() == list(NAMES)
    for name, by in (("indents", "indent"), ("curve", "flow"), ("short", "indent")):
        one = row_of(routes, name)[f"dislocation_stress_{by}_mpa"]
        assert row_of(coupons, name)[STRESS] == one
        assert row_of(coupons, name)[f"u_{STRESS}"] == pytest.approx(
            row_of(routes, name)[f"u_dislocation_stress_{by}_mpa"], rel=1e-12
        )
        assert row_of(coupons, name)["lower_stored_energy_j_per_g"] > 0.0
    # One indent has no repeatability: the flow curve speaks, the hardness keeps no u.
    assert (
        row_of(coupons, "coarse")[STRESS] == row_of(routes, "coarse")["dislocation_stress_flow_mpa"]
    )
    assert row_of(coupons, "coarse")[f"u_{STRESS}"] > 0.0
    assert row_of(coupons, "coarse")["hardness"] == 97.0
    assert isnan(row_of(coupons, "coarse")["u_hardness"])
    assert coupons["readings_used"].tolist() == [8, 8, 5, 3, 6, 4]
    assert isnan(row_of(coupons, "curve")["hardness"])


def test_where_they_disagree_nothing_is_joined(frames: dict[str, pd.DataFrame]) -> None:
    row, coupon = row_of(frames["routes"], "apart"), row_of(frames["coupons"], "apart")
    assert row["normalised_error"] > 1.0
    assert coupon["flags"] == "routes-disagree"
    emptied = (STRESS, "flow_stress_mpa", "stored_energy_j_per_g")
    assert all(isnan(coupon[name]) for name in emptied)
    assert coupon["hardness"] == 97.0
    assert row["dislocation_stress_flow_mpa"] > row["dislocation_stress_indent_mpa"] > 0.0
    flags = frames["flags"]
    (flag,) = flags[flags["rule"] == "routes-disagree"].to_dict("records")
    assert flag["value"] == pytest.approx(row["normalised_error"])
    # what is wrong with a flow curve empties nothing where indents speak
    (short,) = flags[flags["rule"] == "no-flow-stress-at-strain"].to_dict("records")
    assert pd.isna(short["empties"])
    assert "no-flow-stress-at-strain" in row_of(frames["coupons"], "short")["flags"]


def test_the_budget_holds_both_repeatabilities_and_adds_up(
    frames: dict[str, pd.DataFrame],
) -> None:
    budget = frames["budget"].loc["joined"]
    part = budget[budget["quantity"] == STRESS].set_index("input")
    assert {"repeatability", "repeatability:flow", "strength.baseline_mpa"} <= set(part.index)
    total = (part["contribution"] ** 2).sum()
    assert_allclose(total, row_of(frames["coupons"], "joined")[f"u_{STRESS}"] ** 2, rtol=1e-12)
    assert part.loc["repeatability:flow", "unit"] == "MPa"
    readings = frames["readings"].loc["joined"]
    assert readings["route"].tolist() == ["indent"] * 5 + ["flow"] * 3


def test_the_record_tells_both_and_a_summary_the_same(folder: Path, results: Path) -> None:
    told = trace(results, "joined")
    for words in (
        "route both",
        "dislocation stress by the indents",
        "dislocation stress by the flow curve",
        "difference of the two routes",
        "normalised error",
        "weight of the indents",
        "from repeatability:flow: u 0.6",
        "flow_stress.csv, line 2",
    ):
        assert words in told.text()
    assert record_again(folder, "joined") == told.record


def test_at_one_strain_nothing_need_be_unwound(make: Make) -> None:
    frames = coldwork.process(make(SHEET + AT_ONE, **tables(0.078))).frames
    routes = frames["routes"].set_index("coupon_id")
    row = row_of(routes, "joined")
    assert row["test_strain_indent"] == row["test_strain_flow"] == 0.08
    assert_allclose(row["difference_mpa"], 97.0 * 9.80665 / 3.0 - 290.0, rtol=1e-9)
    # the baseline is taken off both alike: it does not act on the difference
    tested = 97.0 * 9.80665 / 3.0
    assert row["u_difference_mpa"] < tested * 0.15 / 3.0 + 3.0 < 20.0
    coupons = frames["coupons"].set_index("coupon_id")
    assert row_of(coupons, "joined")["test_strain"] == 0.08
    assert "indent-adds-strain" in row_of(coupons, "joined")["flags"]
    assert "indent-adds-strain" not in row_of(coupons, "curve")["flags"]


def test_an_error_on_the_indents_empties_the_coupon_whatever_the_curve_says(make: Make) -> None:
    content = tables()
    content["indents"][0]["force_n"] = 49.03
    frames = coldwork.process(make(SHEET + UNWOUND, **content)).frames
    row = row_of(frames["routes"].set_index("coupon_id"), "joined")
    coupon = row_of(frames["coupons"].set_index("coupon_id"), "joined")
    assert "mixed-forces" in coupon["flags"]
    assert isnan(coupon[STRESS])
    assert isnan(row["dislocation_stress_indent_mpa"])
    assert row["dislocation_stress_flow_mpa"] > 0.0
    assert not isinstance(row["taken"], str) or row["taken"] == ""


def test_comparing_choices_is_refused(folder: Path) -> None:
    with pytest.raises(UsageError, match="joins both routes"):
        compare(folder, ["hardening.coefficient=0.3,0.4"])
