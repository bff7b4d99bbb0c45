"""Testers through the whole pipeline: what they did to a coupon, and to no other."""

from collections.abc import Callable
from math import sqrt
from pathlib import Path
from typing import Final

import pandas as pd
import pytest

import coldwork

Make = Callable[..., Path]

SHEET: Final = """
[batch]
id = "testers"
timezone = "Europe/Berlin"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = 50.0
[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
[character]
screw = 0.5
edge = 0.5
[[testers]]
id = "T1"
bias_rel = 0.02
u_rel = 0.008
valid_until = 2026-07-31
[[testers]]
id = "T2"
bias_rel = -0.01
u_rel = 0.005
"""
PLAN: Final = {  # tester and what it read, two coupons on one tester and one on both
    "one": [("T1", 91.8), ("T1", 92.82), ("T1", 90.78)],
    "two": [("T2", 89.1), ("T2", 90.09), ("T2", 88.11)],
    "both": [("T1", 91.8), ("T2", 89.1), ("T2", 90.09)],
    "other": [("T3", 90.0), ("", 91.0), ("T2", 89.1)],
}


@pytest.fixture(scope="module")
def frames(make_once: Make) -> dict[str, pd.DataFrame]:
    folder = make_once(
        SHEET,
        coupons=[{"coupon_id": name, "condition": "rolled"} for name in PLAN],
        indents=[
            {
                "coupon_id": name,
                "indent_no": i,
                "force_n": 98.07,
                "hardness": hv,
                "tester": tester,
                # the last second of the last day there, and the first one after it
                "measured_at": "2026-08-01T00:00:00" if i == 2 else "2026-07-31T23:59:59",
            }
            for name, readings in PLAN.items()
            for i, (tester, hv) in enumerate(readings)
        ],
    )
    return dict(coldwork.process(folder).frames)


def test_readings_lose_their_testers_bias(frames: dict[str, pd.DataFrame]) -> None:
    hardness = frames["coupons"].set_index("coupon_id")["hardness"]
    assert hardness["one"] == pytest.approx(90.0, rel=1e-12)  # 91.8 / 1.02
    assert hardness["two"] == pytest.approx(90.0, rel=1e-12)  # 89.1 / 0.99
    assert hardness["both"] == pytest.approx((90.0 + 90.0 + 91.0) / 3, rel=1e-12)
    assert hardness["other"] == pytest.approx((90.0 + 91.0 + 90.0) / 3, rel=1e-12)


def contributions(frames: dict[str, pd.DataFrame], coupon: str, quantity: str) -> dict[str, float]:
    budget = frames["budget"]
    mine = budget[(budget["coupon_id"] == coupon) & (budget["quantity"] == quantity)]
    return {str(k): float(x) for k, x in zip(mine["input"], mine["contribution"], strict=True)}


def test_a_tester_touches_only_what_it_read(frames: dict[str, pd.DataFrame]) -> None:
    # d mean / d bias = -(its share of the mean) / (1 + bias), times u_rel; 0 for the others
    u1, u2 = 90.0 * 0.008 / 1.02, 90.0 * 0.005 / 0.99
    expected = {
        "one": {"tester:T1": -u1},
        "two": {"tester:T2": -u2},
        "both": {"tester:T1": -u1 / 3, "tester:T2": -u2 * (90 + 91) / 90 / 3},
        "other": {"tester:T2": -u2 / 3},
    }
    for coupon, parts in expected.items():
        found = contributions(frames, coupon, "hardness")
        for tester in ("tester:T1", "tester:T2"):
            wanted = pytest.approx(parts.get(tester, 0.0), rel=1e-12, abs=0.0)
            assert found.get(tester, 0.0) == wanted, (coupon, tester)
        assert "tester:T3" not in found


def test_shared_between_coupons_of_one_tester_alone(frames: dict[str, pd.DataFrame]) -> None:
    own_or_shared = frames["budget"].query("input in ['tester:T1', 'tester:T2']")["own_or_shared"]
    assert set(own_or_shared) == {"shared"}
    row = frames["coupons"].set_index("coupon_id").loc["both"]
    parts = contributions(frames, "both", "hardness")
    shared = sqrt(parts["tester:T1"] ** 2 + parts["tester:T2"] ** 2)
    assert row["u_shared_hardness"] == pytest.approx(shared, rel=1e-12)


def test_its_contribution_goes_down_the_chain(frames: dict[str, pd.DataFrame]) -> None:
    # over C = 3, the HV number in MPa, and unwound: exp(1700 x 0.08 / 320) = 1.5296
    found = contributions(frames, "one", "dislocation_stress_mpa")["tester:T1"]
    through = contributions(frames, "one", "hardness")["tester:T1"]
    assert found == pytest.approx(through * 9.80665 / 3.0 * 1.5295904196633787, rel=1e-11)


def test_out_of_date_and_unknown_testers_are_flagged(frames: dict[str, pd.DataFrame]) -> None:
    flags = frames["flags"]

    def where(rule: str) -> set[tuple[str, int]]:
        hit = flags[flags["rule"] == rule]
        return {(str(c), int(k)) for c, k in zip(hit["coupon_id"], hit["reading_no"], strict=True)}

    assert where("tester-out-of-date") == {("one", 2)}
    assert where("tester-unknown") == {("other", 0), ("other", 1)}
