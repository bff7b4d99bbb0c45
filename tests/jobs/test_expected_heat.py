"""Expected heat: a line over the stored energy, its own interval, nothing else altered."""

import shutil
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

import coldwork
from coldwork.errors import BatchRefused
from coldwork.jobs.calibrate import calibrate
from coldwork.jobs.calibrated import Options

STRIP = Path(__file__).parents[2] / "sample_data" / "copper-strip"
HEAT = "expected_heat_j_per_g"
STORED = "stored_energy_j_per_g"
Heated = Callable[[str], dict[str, pd.DataFrame]]


@pytest.fixture
def heated(tmp_path: Path) -> Heated:
    def run(section: str) -> dict[str, pd.DataFrame]:
        folder = tmp_path / "batch"
        if not folder.exists():
            shutil.copytree(STRIP, folder)
        sheet = folder / "batch.toml"
        sheet.write_text((STRIP / "batch.toml").read_text() + section)
        return dict(coldwork.process(folder).frames)

    return run


def test_an_exact_line_moves_value_and_ends_alike(heated: Heated) -> None:
    frames = heated("\n[heat]\nratio = 1.5\nintercept_j_per_g = 0.01\n")
    heat, coupons = frames["expected_heat"], frames["coupons"]
    known = coupons[STORED].notna().to_numpy()
    for before in ("", "lower_", "upper_"):
        line = 0.01 + 1.5 * coupons[f"{before}{STORED}"]
        assert_allclose(heat[f"{before}{HEAT}"][known], line[known], rtol=1e-9)
    assert_allclose(heat[f"u_{HEAT}"], 1.5 * coupons[f"u_{STORED}"], rtol=1e-12)
    assert heat[HEAT][~known].isna().all()
    assert_allclose(heat[f"lower_{HEAT}"][~known], 0.01)  # of no energy up to what u allows


def test_nothing_else_is_altered(heated: Heated) -> None:
    with_heat = heated("\n[heat]\nratio = 1.5\nintercept_j_per_g = 0.01\n")["coupons"]
    without = coldwork.process(STRIP).frames["coupons"]
    same = [c for c in without.columns if c != "record_sha256"]
    pd.testing.assert_frame_equal(with_heat[same], without[same])


def test_the_line_of_a_calibration_brings_its_covariance(heated: Heated, tmp_path: Path) -> None:
    rows = [f"D{i},{e},0.004,{0.02 + 1.4 * e},0.005" for i, e in enumerate((0.02, 0.05, 0.1, 0.2))]
    head = "coupon_id,stored_energy_j_per_g,u_stored_energy_j_per_g,heat_j_per_g,u_heat_j_per_g"
    (tmp_path / "pairs.csv").write_text("\n".join([head, *rows]))
    options = Options("dsc", "heat")
    found = calibrate(tmp_path / "pairs.csv", options, tmp_path / "dsc.toml")
    taken = '{ from = "../dsc.toml" }'
    frames = heated(f"\n[heat]\nratio = {taken}\nintercept_j_per_g = {taken}\n")
    heat, coupons = frames["expected_heat"], frames["coupons"]
    # q = a + r u: variance of the line at u, plus r^2 that of u (JCGM 100, 5.2.2).
    e = coupons[STORED].to_numpy()
    c, slope = found.covariance, found.constants[1].value
    line = c[0, 0] + 2.0 * e * c[0, 1] + e**2 * c[1, 1]
    u = np.sqrt(line + (slope * coupons[f"u_{STORED}"].to_numpy()) ** 2)
    known = np.isfinite(e)
    assert_allclose(heat[f"u_{HEAT}"][known], u[known], rtol=1e-9)
    outside = frames["flags"]["rule"].eq("outside-calibration")
    assert outside.sum() == ((e < 0.02) | (e > 0.2)).sum()


def test_both_or_neither(heated: Heated) -> None:
    with pytest.raises(BatchRefused, match="intercept_j_per_g"):
        heated("\n[heat]\nratio = 1.5\n")
