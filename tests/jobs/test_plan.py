"""`plan` on results: variances by another road, targets met and just missed, refusals."""

import csv
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import f_oneway, t
from typer.testing import CliRunner

import coldwork
from coldwork.cli import app
from coldwork.errors import UsageError
from coldwork.jobs.plan import Planned, Wanted, plan
from coldwork.results.read import read_table

SAMPLE = Path(__file__).parents[2] / "sample_data"
ENERGY = "stored_energy_j_per_g"
OWN = Wanted(None, 0.01, None, None, None, "own", 10.0, 1.0)


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Path:
    into = tmp_path_factory.mktemp("results")
    coldwork.process(SAMPLE / "copper-strip", into, plots=False)
    return into / "CS-2026-31"


def of(results: Path, wanted: Wanted) -> Planned:
    return plan(results, "rolled 20 %", "condition", wanted)


def rows_of(folder: Path, name: str) -> list[dict[str, str]]:
    with (folder / f"{name}.csv").open(encoding="utf-8") as stream:
        return list(csv.DictReader(stream))


def test_variances_by_another_road(results: Path) -> None:
    coupons = [r for r in rows_of(results, "coupons") if r["condition"] == "rolled 20 %"]
    ids = [r["coupon_id"] for r in coupons]
    readings = rows_of(results, "readings")
    groups = [
        np.array([float(r["hardness"]) for r in readings if r["coupon_id"] == each]) for each in ids
    ]
    found = of(results, OWN).found
    # Within: the mean square of the analysis of variance, through F of scipy's f_oneway.
    means = np.array([g.mean() for g in groups])
    between_ms = len(groups[0]) * means.var(ddof=1)
    within = between_ms / f_oneway(*groups).statistic / np.concatenate(groups).mean() ** 2
    assert_allclose(found.scatter + found.rounding, within, rtol=1e-9)
    # Rounding: 0.1 um in each of two diagonals, a uniform error, and H goes with 1 / d^2.
    d = np.mean([float(r["mean_diagonal_um"]) for r in readings if r["coupon_id"] in ids])
    assert_allclose(found.rounding, (2.0 / d) ** 2 * 0.1**2 / 12.0 / 2.0, rtol=1e-9)
    values = np.array([float(r[ENERGY]) for r in coupons])
    own = np.array([float(r[f"u_own_{ENERGY}"]) for r in coupons])
    beyond = max(0.0, values.var(ddof=1) - np.mean(own**2))
    assert_allclose(found.between, beyond, rtol=1e-9)
    # As many indents as were made give the u_own that was published, but for s of this group.
    assert_allclose(found.at(98.07).within / 7.0, np.mean(own**2), rtol=0.6)


def test_each_row_is_met_and_one_coupon_less_is_not(results: Path) -> None:
    planned = of(results, OWN)
    at = planned.found.at(98.07)
    rows = planned.table.to_pylist()
    limit = 0.01 * planned.found.value
    for row in rows:
        n, m = row["coupons"], row["indents_per_coupon"]
        assert at.u(n, m) <= limit
        assert n == 1 or at.u(n - 1, m) > limit
        assert row["cost"] == n * (10.0 + m)
    assert planned.cheapest["cost"] == min(row["cost"] for row in rows)
    assert_allclose(sum(share for _, share, _ in planned.improve), 1.0)


def test_half_width_and_risk(results: Path) -> None:
    wide = of(results, replace(OWN, relative_u=None, half_width=0.002))
    best = wide.cheapest
    u = best["relative_u"] * wide.found.value
    assert_allclose(best["half_width"], t.ppf(0.975, best["coupons"] - 1) * u, rtol=1e-6)
    assert best["half_width"] <= 0.002
    safe = of(results, replace(OWN, relative_u=None, risk=0.01, limit="even-anneal", basis=None))
    assert safe.basis == "own"  # the limit's
    best = safe.cheapest
    u = best["relative_u"] * safe.found.value
    outside = t.cdf((0.068 - safe.found.value) / u, best["coupons"] - 1)
    assert_allclose(best["risk"], outside, rtol=1e-6)


def test_a_small_force_takes_more_indents(results: Path) -> None:
    planned = of(results, replace(OWN, forces_n=(98.07, 0.01)))
    rows = planned.table.to_pylist()
    by_force = {f: [r["coupons"] for r in rows if r["force_n"] == f] for f in (98.07, 0.01)}
    assert by_force[0.01][4] > by_force[98.07][4]
    assert planned.found.at(0.01).least == pytest.approx(9807.0 * planned.found.at(98.07).least)


def test_shared_inputs_stand_in_the_way_and_are_named(results: Path) -> None:
    with pytest.raises(UsageError, match=r"improve hardening\.coefficient first \(5\d %"):
        of(results, replace(OWN, basis="total", relative_u=0.05))
    wide = of(results, replace(OWN, basis="total", relative_u=0.5))
    assert wide.improve[0][0] == "hardening.coefficient"
    assert wide.improve[0][2] < wide.cheapest["relative_u"]


@pytest.mark.parametrize(
    ("more", "words"),
    [
        ({"relative_u": None}, "say one target"),
        ({"half_width": 1.0}, "say one target"),
        ({"relative_u": -0.1}, "a target is above 0"),
        ({"relative_u": None, "risk": 0.01}, "--risk and --limit go together"),
        ({"relative_u": None, "risk": 0.7, "limit": "even-anneal"}, "a risk below 0.5"),
        ({"relative_u": None, "risk": 0.1, "limit": "even"}, "no limit 'even'; there are: even-an"),
        ({"indent_cost": 0.0}, "costs are above 0"),
        ({"forces_n": (-1.0,)}, "a force is above 0 N"),
        ({"forces_n": (1.0, 1.0)}, "each once"),
        ({"basis": "half"}, "no basis 'half'"),
        ({"quantity": "colour"}, "'colour' is no quantity"),
        ({"relative_u": 1e-9}, "More than 1000 coupons"),
    ],
)
def test_refuses_by_name(results: Path, more: dict[str, object], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        of(results, replace(OWN, **more))  # type: ignore[arg-type]


def test_refuses_groups_that_say_nothing(results: Path) -> None:
    wanted = replace(OWN, relative_u=None, risk=0.1, limit="even-anneal")
    with pytest.raises(UsageError, match="lies outside the limit"):
        plan(results, "annealed", "condition", wanted)
    with pytest.raises(UsageError, match="nothing is planned by 'coupon'"):
        plan(results, "CS20-1", "coupon", OWN)


def test_as_a_command_and_on_disk(results: Path, tmp_path: Path) -> None:
    asked = ["--relative-u", "0.01", "--basis", "own", "--coupon-cost", "10", "--indent-cost", "1"]
    into = tmp_path / "plan"
    words = ["plan", str(results), "rolled 20 %", *asked, "--json", "--into", str(into)]
    done = CliRunner().invoke(app, words)
    assert done.exit_code == 0
    told = json.loads(done.stdout)
    assert told["rows"] == read_table(into, "plan").to_pylist()
    names = sorted(p.relative_to(into).as_posix() for p in into.rglob("*") if p.is_file())
    assert names == ["account.json", "plan.csv", "plots/plan.png", "plots/plan.svg"]
