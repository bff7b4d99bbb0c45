"""`to_settle` of decisions.csv: counts by hand from the published numbers, and `trace`."""

import shutil
from math import ceil
from pathlib import Path

from scipy.stats import t
from typer.testing import CliRunner

import coldwork
from coldwork.cli import app

STRIP = Path(__file__).parents[2] / "sample_data" / "copper-strip"
LIMITS = """
[[limits]]
id = "near"
quantity = "hardness"
lower = 98.0
rule = "guarded"
basis = "own"
[[limits]]
id = "total"
quantity = "stored_energy_j_per_g"
lower = 0.06
rule = "guarded"
"""


def test_counts_by_hand_and_shared_inputs_alone(tmp_path: Path) -> None:
    batch = tmp_path / "batch"
    shutil.copytree(STRIP, batch)
    with (batch / "batch.toml").open("a", encoding="utf-8") as sheet:
        sheet.write(LIMITS)
    frames = coldwork.process(batch, tmp_path / "out", plots=False).frames
    decisions = frames["decisions"].set_index(["limit_id", "coupon_id"])
    open_ones = decisions.loc["near"].query("decision == 'undecided'")
    assert len(open_ones)
    pooled = 30.0  # five coupons of seven readings
    for row in open_ones.to_dict("records"):
        k = abs(float(row["value"]) - 98.0) / float(row["u"])
        more = ceil(7.0 * (t.ppf(0.95, pooled) / k) ** 2) - 7
        told = "more than 1000 more readings" if more > 1000 else f"{more} more reading"
        assert str(row["to_settle"]).startswith(told)
    assert (decisions.loc["total"].loc["CS20-1"]["to_settle"]) == "no number of readings"
    decided = decisions[decisions["decision"] != "undecided"]
    assert (decided["to_settle"] == "").all()
    done = CliRunner().invoke(app, ["trace", str(tmp_path / "out" / "CS-2026-31"), "CS20-1"])
    assert "no number of readings would settle it" in done.stdout
