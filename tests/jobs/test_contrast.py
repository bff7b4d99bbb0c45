"""`contrast` on results: coupons, conditions, two batches, and refusals."""

import csv
import shutil
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from typer.testing import CliRunner

import coldwork
from coldwork.cli import app
from coldwork.errors import UsageError
from coldwork.jobs.contrast import STRESS, Compared, Contrasts, contrasts

SAMPLE = Path(__file__).parents[2] / "sample_data"
STRIP = SAMPLE / "copper-strip"
DENSITY = "dislocation_density_per_m2"


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Path:
    into = tmp_path_factory.mktemp("results")
    coldwork.process(STRIP, into, plots=False)
    return into / "CS-2026-31"


@pytest.fixture(scope="module")
def later(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The same batch under a sheet of its own: only what names its source is the same error."""
    folder = tmp_path_factory.mktemp("later")
    shutil.copytree(STRIP, folder / "batch")
    sheet = folder / "batch" / "batch.toml"
    text = sheet.read_text(encoding="utf-8").replace("CS-2026-31", "CS-2026-40")
    sheet.write_text(text, encoding="utf-8")
    coldwork.process(folder / "batch", folder, plots=False)
    return folder / "CS-2026-40"


def of(found: Contrasts, quantity: str, place: int = 0) -> Compared:
    return [each for each in found.compared if each.quantity == quantity][place]


def test_two_coupons_after_the_budget(results: Path) -> None:
    found = of(contrasts(results, ["CS20-1", "CS15-3"]), DENSITY).found
    # JCGM 100, 5.2, from budget.csv alone: own in squares, shared as differences.
    rows: dict[tuple[str, str], float] = {}
    own = 0.0
    with (results / "budget.csv").open(encoding="utf-8") as stream:
        for row in csv.DictReader(stream):
            if row["quantity"] == DENSITY and row["coupon_id"] in ("CS20-1", "CS15-3"):
                size = float(row["contribution"])
                if row["own_or_shared"] == "own":
                    own += size**2
                else:
                    rows[row["coupon_id"], row["input"]] = size
    names = {name for _, name in rows}
    shared = sum((rows["CS20-1", n] - rows["CS15-3", n]) ** 2 for n in names)
    assert_allclose(found.u_difference, np.sqrt(own + shared), rtol=1e-12)
    assert found.u_difference < 0.25 * found.u_if_independent


def test_a_coupon_at_its_baseline_is_told_apart_by_the_stress(results: Path) -> None:
    found = contrasts(results, ["CS20-1", "CS00-1"])
    energy = of(found, "stored_energy_j_per_g")
    assert energy.verdict == "different"
    assert energy.p == of(found, STRESS).p
    assert "too near its baseline" in found.text()


def test_several_at_once(results: Path) -> None:
    names = ["CS20-1", "CS20-2", "CS20-3", "CS15-3"]
    found = contrasts(results, names, margin=0.1)
    alone = [of(found, DENSITY, i).p for i in range(3)]
    together = [of(found, DENSITY, i).p_corrected for i in range(3)]
    assert all(b >= a for a, b in zip(alone, together, strict=True))
    assert_allclose(together[2], 3.0 * alone[2])  # the smallest of three, after Holm
    assert of(found, DENSITY, 2).verdict == "different"
    assert of(found, DENSITY, 0).verdict == "equivalent within the margin"
    assert "corrected after Holm, intervals after Bonferroni" in found.text()
    plain = contrasts(results, names, correction="none")
    assert of(plain, DENSITY).interval[1] < of(found, DENSITY).interval[1]


def test_conditions_and_what_varies_between_their_coupons(results: Path) -> None:
    found = contrasts(results, ["rolled 20 %", "rolled 15 %"], by="condition")
    each = of(found, DENSITY)
    with (results / "coupons.csv").open(encoding="utf-8") as stream:
        coupons = list(csv.DictReader(stream))
    values = [float(c[DENSITY]) for c in coupons if c["condition"] == "rolled 20 %"]
    assert_allclose(each.found.a.value, np.mean(values), rtol=1e-12)
    own = [float(c[f"u_own_{DENSITY}"]) for c in coupons if c["condition"] == "rolled 20 %"]
    beyond = float(np.var(values, ddof=1) - np.mean(np.square(own)))
    assert_allclose(each.beyond[0], np.sqrt(max(0.0, beyond)), rtol=1e-9)
    assert each.verdict == "different"
    # Made with a scatter of 1 % within a coupon and none between (sample_data/scenario).
    scatter = found.scatter[0]
    assert scatter is not None
    assert scatter.between_share < 0.2
    assert 0.7 < scatter.residual_sd / 0.974 < 1.3
    assert "of the variance lies between" in found.text()


def test_across_batches_only_what_is_the_same_cancels(results: Path, later: Path) -> None:
    within = of(contrasts(results, ["CS20-1", "CS15-3"]), DENSITY)
    across = of(contrasts(results, ["CS20-1", "CS15-3"], other=later), DENSITY)
    assert within.not_shared == ()
    # The sheet names a source for the modulus and for the baseline, and for nothing else.
    assert "hardening.coefficient" in across.not_shared
    assert "material.shear_modulus_gpa" not in across.not_shared
    assert "strength.baseline_mpa" not in across.not_shared
    assert across.found.difference == within.found.difference
    assert within.found.u_difference < across.found.u_difference
    assert across.found.u_difference < across.found.u_if_independent


def test_the_same_coupon_in_the_same_batch_twice_differs_by_its_readings_alone(
    results: Path, tmp_path: Path
) -> None:
    copy = tmp_path / "copy"
    shutil.copytree(results, copy)
    found = of(contrasts(results, ["CS20-1", "CS20-1"], other=copy), DENSITY).found
    assert found.difference == 0.0
    assert_allclose(found.u_shared, 0.0, atol=1e-9 * found.u_own)


@pytest.mark.parametrize(
    ("names", "more", "said"),
    [
        (["CS20-1"], {}, "two names or more"),
        (["CS20-1", "CS20-1"], {}, "stands twice"),
        (["CS20-1", "CS20-9"], {}, "no coupon is called 'CS20-9'; the nearest is"),
        (["CS20-1", "CS15-3"], {"by": "coil"}, "nothing is compared by"),
        (["CS20-1", "CS15-3"], {"margin": -0.1}, "a margin is relative"),
        (["CS20-1", "CS15-3"], {"correction": "tukey"}, "no correction is called"),
    ],
)
def test_what_does_not_fit(
    results: Path, names: list[str], more: dict[str, object], said: str
) -> None:
    with pytest.raises(UsageError, match=said):
        contrasts(results, names, **more)  # type: ignore[arg-type]


def test_a_summary_has_no_budget(tmp_path: Path) -> None:
    shutil.copytree(STRIP, tmp_path / "batch")
    sheet = tmp_path / "batch" / "batch.toml"
    sheet.write_text(sheet.read_text() + '\n[output]\ndetail = "summary"\n')
    coldwork.process(tmp_path / "batch", tmp_path, plots=False)
    with pytest.raises(UsageError, match="these results are a summary"):
        contrasts(tmp_path / "CS-2026-31", ["CS20-1", "CS15-3"])


def test_two_states_do_not_compare(results: Path, tmp_path: Path) -> None:
    shutil.copytree(STRIP, tmp_path / "batch")
    sheet = tmp_path / "batch" / "batch.toml"
    lines = sheet.read_text().splitlines()
    kept = [line for line in lines if not line.startswith(("initial_hard", "saturation"))]
    sheet.write_text("\n".join(kept))
    coldwork.process(tmp_path / "batch", tmp_path, plots=False)
    with pytest.raises(UsageError, match="different test strains"):
        contrasts(results, ["CS20-1", "CS15-3"], other=tmp_path / "CS-2026-31")


def test_the_command_for_a_program(results: Path) -> None:
    done = CliRunner().invoke(app, ["contrast", str(results), "CS20-1", "CS15-3", "--json"])
    assert done.exit_code == 0, done.output
    assert '"verdict": "different"' in done.output
