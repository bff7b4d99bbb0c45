"""``lots.csv`` read beside ``coupons.csv`` and ``budget.csv`` of the same batch."""

from collections.abc import Callable
from math import sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pandas as pd
import pytest

import coldwork
from coldwork.jobs.process import Processed

Make = Callable[..., Path]
STRIP: Final = Path(__file__).parents[2] / "sample_data" / "copper-strip"
NAMES: Final = (
    "hardness",
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "line_energy_j_per_m",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_mol",
    "stored_energy_j_per_g",
)
LATE: Final = NAMES[3:]


@pytest.fixture(scope="module")
def strip() -> Processed:
    return coldwork.process(STRIP)


def from_budget(budget: pd.DataFrame, coupons: list[str], quantity: str) -> tuple[float, float]:
    """Own and shared u of a mean: sum u_own^2 / n^2, and sum (mean c)^2 u^2."""
    mine = budget[budget["coupon_id"].isin(coupons) & (budget["quantity"] == quantity)]
    n = len(coupons)
    own = mine[mine["own_or_shared"] == "own"]["contribution"]
    shared = mine[mine["own_or_shared"] == "shared"].groupby("input")["contribution"].sum() / n
    return sqrt(float((own**2).sum())) / n, sqrt(float((shared**2).sum()))


def test_every_lot_is_the_mean_of_its_coupons(strip: Processed) -> None:
    coupons, lots = strip.frames["coupons"], strip.frames["lots"]
    budget = strip.frames["budget"]
    assert len(lots) == 14  # two coils in seven conditions
    assert lots["coupons"].sum() == len(coupons)
    for _, lot in lots.iterrows():
        mine = coupons[
            (coupons["lot_id"] == lot["lot_id"]) & (coupons["condition"] == lot["condition"])
        ]
        below = bool((mine["dislocation_stress_mpa"] <= 0).any())
        for name in NAMES:
            if below and name in LATE:
                assert np.isnan(lot[f"mean_{name}"]), (lot["lot_id"], name)
                assert np.isnan(lot[f"u_{name}"])
                continue
            own, shared = from_budget(budget, mine["coupon_id"].tolist(), name)
            expected = {
                "mean": mine[name].mean(),
                "u_own": own,
                "u_shared": shared,
                "u": sqrt(own**2 + shared**2),
            }
            for prefix, value in expected.items():
                assert lot[f"{prefix}_{name}"] == pytest.approx(value, rel=1e-11), (prefix, name)
            ends = lot[f"lower_{name}"], lot[f"upper_{name}"]
            assert ends[0] < lot[f"mean_{name}"]
            assert np.isnan(ends[1]) or lot[f"mean_{name}"] < ends[1]


def test_decisions_are_counted_and_the_worst_is_the_lots(strip: Processed) -> None:
    coupons, lots = strip.frames["coupons"], strip.frames["lots"]
    worst = ["conforming", "undecided", "non-conforming"]
    for _, lot in lots.iterrows():
        mine = coupons[
            (coupons["lot_id"] == lot["lot_id"]) & (coupons["condition"] == lot["condition"])
        ]["decision"]
        counted = {word: int((mine == word).sum()) for word in worst}
        assert lot["conforming"] == counted["conforming"]
        assert lot["non_conforming"] == counted["non-conforming"]
        assert lot["undecided"] == counted["undecided"]
        assert lot["decision"] == max(mine, key=worst.index)


SHEET: Final = (STRIP / "batch.toml").read_text(encoding="utf-8")


def indents(hardness: dict[str, float]) -> list[dict[str, object]]:
    return [
        {
            "coupon_id": name,
            "indent_no": i,
            "force_n": 98.07,
            "hardness": round(hv * error, 3),
            "tester": "T1",
        }
        for name, hv in hardness.items()
        for i, error in enumerate((0.99, 1.0, 1.008, 0.995, 1.004), 1)
    ]


def test_a_coupon_below_its_baseline_takes_the_lots_mean_density(make: Make) -> None:
    # annealed copper under a baseline of 50 MPa: half of such coupons come out below it
    folder = make(
        SHEET,
        coupons=[{"coupon_id": n, "lot_id": "coil", "condition": "soft"} for n in ("a", "b", "c")],
        indents=indents({"a": 52.0, "b": 49.0, "c": 53.0}),
    )
    frames = coldwork.process(folder).frames
    coupons, lot = frames["coupons"].set_index("coupon_id"), frames["lots"].iloc[0]
    assert "below-baseline" in str(coupons["flags"]["b"])
    assert coupons["dislocation_density_per_m2"].isna().tolist() == [False, True, False]
    assert lot["coupons"] == 3
    for name in LATE:
        for prefix in ("mean", "u_own", "u_shared", "u", "lower", "upper"):
            assert np.isnan(lot[f"{prefix}_{name}"]), (prefix, name)
    mean = coupons["dislocation_stress_mpa"].mean()
    assert lot["mean_dislocation_stress_mpa"] == pytest.approx(mean, rel=1e-12)
    assert lot["coupons_averaged"] == 3


def test_coupons_of_no_lot_are_a_group_of_their_own(make: Make) -> None:
    folder = make(
        SHEET,
        coupons=[{"coupon_id": "a", "lot_id": "coil"}, {"coupon_id": "b"}, {"coupon_id": "c"}],
        indents=indents({"a": 90.0, "b": 95.0, "c": 97.0}),
    )
    lots = coldwork.process(folder).frames["lots"]
    assert lots["lot_id"].tolist() == ["coil", ""]
    assert lots["coupons"].tolist() == [1, 2]


def test_a_coupon_that_cannot_be_told_from_its_baseline_takes_the_density_too(make: Make) -> None:
    # A density under 1e10 per m2 is emptied like one below the baseline: the mean of the others
    # alone would be too high here as well.
    folder = make(
        (STRIP.parent / "steel-wire" / "batch.toml").read_text(encoding="utf-8"),
        coupons=[{"coupon_id": name, "lot_id": "rod"} for name in ("a", "b")],
        flow_stress=[
            {
                "coupon_id": name,
                "reading_no": i,
                "plastic_strain": 0.002,
                "flow_stress_mpa": mpa + 0.01 * i,
            }
            for name, mpa in (("a", 150.05), ("b", 230.0))
            for i in range(3)
        ],
    )
    frames = coldwork.process(folder).frames
    assert "density-too-low" in str(frames["coupons"]["flags"][0])
    lot = frames["lots"].iloc[0]
    assert lot["coupons_averaged"] == 2
    assert np.isnan(lot["mean_dislocation_density_per_m2"])
