"""Daily checks: a tester's bias from verification.csv in the results, and every refusal."""

import shutil
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

import coldwork
from coldwork.errors import BatchRefused

CHECKED = Path(__file__).parents[2] / "sample_data" / "planted-faults" / "checked"
Changed = Callable[..., Path]


@pytest.fixture
def changed(tmp_path: Path) -> Changed:
    """Copy the shelf's batch, with lines of its sheet or its checks replaced."""

    def made(file: str = "", old: str = "", new: str = "") -> Path:
        shutil.copytree(CHECKED.parent, tmp_path / "shelf", ignore=shutil.ignore_patterns("*/**"))
        folder = tmp_path / "shelf" / "checked"
        if file:
            path = folder / file
            text = path.read_text(encoding="utf-8")
            assert old in text
            path.write_text(text.replace(old, new), encoding="utf-8")
        return folder

    return made


def test_bias_and_u_are_those_of_the_checks() -> None:
    found = coldwork.process(CHECKED)
    said = found.method["inputs"]["tester:T1"]
    rows = np.loadtxt(CHECKED / "verification.csv", delimiter=",", skiprows=1, usecols=(2, 3, 4))
    daily = (rows[:, 2] / rows[:, 0]).reshape(4, 5).mean(axis=1) - 1.0
    assert_allclose(said["value"], daily.mean(), rtol=1e-12)
    # The block's 0.5 of 100.4, and the scatter from day to day, in squares.
    assert_allclose(said["u"], np.hypot(0.5 / 100.4, daily.std(ddof=1)), rtol=1e-9)
    assert said["source"] == "daily checks, 4 of them"
    assert found.method["testers"][0]["bias_rel"] == said["value"]
    coupons, readings = found.frames["coupons"], found.frames["readings"]
    plain = readings.loc[readings["coupon_id"] == "PFV-01", "hardness"].mean()
    mean = coupons.set_index("coupon_id").loc["PFV-01", "hardness"]
    assert mean == pytest.approx(plain, rel=1e-9)
    assert [entry["table"] for entry in found.manifest["inputs"]].count("verification") == 1


@pytest.mark.parametrize(
    ("file", "old", "new", "said"),
    [
        ("verification.csv", "T1,", "T2,", "tester T1: there must be a check"),
        ("verification.csv", "100.4,0.5,10", "100.4,,10", "the cell is empty"),
        ("verification.csv", "certified_hardness,u", "certified,u", "certified"),
        ("batch.toml", 'verification = "verification.csv"', "", "no checks to take it from"),
        ("batch.toml", 'bias_from = "verification"', "bias_rel = 0.0\nu_rel = 0.01", "no tester"),
        ("batch.toml", "bias_from =", "bias_rel = 0.0\nbias_from =", "bias_from takes the bias"),
        ("batch.toml", 'bias_from = "verification"', "", "bias"),
    ],
)
def test_refusals(changed: Changed, file: str, old: str, new: str, said: str) -> None:
    with pytest.raises(BatchRefused, match=said):
        coldwork.check(changed(file, old, new))


def test_one_block_has_one_certified_value(changed: Changed) -> None:
    folder = changed()
    path = folder / "verification.csv"
    lines = path.read_text(encoding="utf-8").splitlines()
    lines[1] = lines[1].replace("100.4,0.5", "100.9,0.5", 1)
    path.write_text("\n".join(lines), encoding="utf-8")
    with pytest.raises(BatchRefused, match="two certified values on one day"):
        coldwork.check(folder)
