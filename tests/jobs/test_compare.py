"""Other choices: closed forms, the same numbers as a run under each, refusals by name."""

import json
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import BatchRefused, ResultsNotWritten, UsageError
from coldwork.jobs.compare import Compared, compare
from coldwork.jobs.gather import gather
from coldwork.jobs.run import run
from coldwork.results.read import read_table

Make = Callable[..., Path]
DENSITY, ENERGY = "dislocation_density_per_m2", "stored_energy_j_per_g"
LAW = "law = 'constant'"
SHEET = f"""\
[batch]
id = "choices"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = {{ value = 50.0, u = 5.0 }}
[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
[hardening]
{LAW}
coefficient = {{ value = 0.3, factor = 1.1 }}
[line_energy]
outer_radius = "spacing"
[character]
screw = 0.5
edge = 0.5
[output]
tables = ["csv"]
"""
HARDNESS = {"A": 90.0, "B": 104.0, "C": 118.0, "under": 20.0}
INDENTS = [
    {"coupon_id": name, "indent_no": i, "force_n": 98.07, "hardness": hv + 0.4 * i}
    for name, hv in HARDNESS.items()
    for i in range(1, 6)
]
COUPONS = [{"coupon_id": name} for name in HARDNESS]


@pytest.fixture(scope="module")
def batch(make_once: Make) -> Path:
    return make_once(SHEET, coupons=COUPONS, indents=INDENTS)


def row_of(found: Compared, choice: int, quantity: str) -> dict[str, Any]:
    rows = found.summary.to_pylist()
    (row,) = (r for r in rows if (r["choice_no"], r["quantity"]) == (choice, quantity))
    return row


def test_density_goes_with_the_square_of_alpha(batch: Path) -> None:
    # Taylor 1934: rho = (s / M alpha G b)^2, so 0.30 to 0.25 is a factor of 1.44 on every coupon.
    found = compare(batch, ["hardening.coefficient=0.25,0.60"])
    for choice, ratio in ((1, 1.44), (2, 0.25)):
        row = row_of(found, choice, DENSITY)
        assert_allclose([row[f"{x}_ratio"] for x in ("median", "least", "greatest")], ratio)
        assert row["coupons"] == 3  # the one under the baseline has no density


def test_half_the_outer_radius_takes_ln_2_off(batch: Path, tmp_path: Path) -> None:
    # E ~ ln(R / r0): the ratio is 1 - ln 2 / ln(1 / (b sqrt rho)), by hand from each density.
    into = tmp_path / "half"
    compare(batch, ["line_energy.outer_radius=half-spacing"], into, plots=False)
    rows = read_table(into, "compare").to_pylist()
    assert [row["choice_no"] for row in rows] == [0, 1] * len(HARDNESS)
    for row in rows[1:6:2]:
        spacing = 1.0 / (0.2556e-9 * math.sqrt(row[DENSITY]))
        expected = 1.0 - math.log(2.0) / math.log(spacing)
        assert_allclose(row[f"ratio_{ENERGY}"], expected, rtol=1e-12)
        assert_allclose(row[f"ratio_{DENSITY}"], 1.0, rtol=1e-14)


@pytest.mark.parametrize(
    ("said", "old", "new"),
    [
        ("line_energy.outer_radius=half-spacing", '"spacing"', '"half-spacing"'),
        ("strength.baseline_mpa={ value = 80.0, u = 8.0 }", "50.0, u = 5.0", "80.0, u = 8.0"),
        (
            'hardening={law="logarithmic",reference_density_per_m2=1e14}',
            LAW,
            "law = 'logarithmic'\nreference_density_per_m2 = 1e14",
        ),
        ('character={mix="uniform"}', "screw = 0.5\nedge = 0.5", 'mix = "uniform"'),
        (
            'line_energy={elasticity="anisotropic",slip_system="{111}<110>"}',
            'outer_radius = "spacing"',
            'elasticity = "anisotropic"\nslip_system = "{111}<110>"',
        ),
        (
            'temperature={reference_c=100.0,correction="modulus"}',
            "[line_energy]",
            "[temperature]\nreference_c = 100.0\ncorrection = 'modulus'\n[line_energy]",
        ),
        ("indentation.area=projected", "[indentation]", '[indentation]\narea = "projected"'),
    ],
)
def test_a_choice_is_what_a_run_under_it_gives(
    batch: Path, make: Make, tmp_path: Path, said: str, old: str, new: str
) -> None:
    into = tmp_path / "choice"
    compare(batch, [said], into, plots=False)
    ours = [r for r in read_table(into, "compare").to_pylist() if r["choice_no"] == 1]
    assert SHEET.count(old) == 1
    folder = make(SHEET.replace(old, new), coupons=COUPONS, indents=INDENTS)
    theirs = read_table(run(folder, tmp_path / "out", plots=False).path, "coupons").to_pylist()
    for a, b in zip(ours, theirs, strict=True):
        for name in (DENSITY, f"u_{DENSITY}", ENERGY, f"u_{ENERGY}"):
            assert a[name] == b[name], (a["coupon_id"], name)


def test_several_keys_give_the_full_grid(batch: Path) -> None:
    found = compare(batch, ["hardening.coefficient=0.25,0.35", "character={screw=1.0},{edge=1.0}"])
    assert [choice.label for choice in found.choices] == [
        "as the sheet says",
        "hardening.coefficient = 0.25, character = {screw=1.0}",
        "hardening.coefficient = 0.25, character = {edge=1.0}",
        "hardening.coefficient = 0.35, character = {screw=1.0}",
        "hardening.coefficient = 0.35, character = {edge=1.0}",
    ]
    ratio = row_of(found, 2, ENERGY)["median_ratio"] / row_of(found, 1, ENERGY)["median_ratio"]
    assert_allclose(ratio, 1.0 / (1.0 - 0.343), rtol=1e-12)  # edge over screw, Hirth and Lothe 1982


def test_it_reads_the_batch_once(batch: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    asked = []

    def counted(*given: Any, **more: Any) -> Any:  # noqa: ANN401 - passes on whatever it is
        asked.append(given)
        return gather(*given, **more)

    monkeypatch.setattr("coldwork.jobs.compare.gather", counted)
    compare(batch, ["hardening.coefficient=0.2,0.25,0.35", "line_energy.core_radius_b=0.5,2"])
    assert len(asked) == 1


def test_beyond_u_counts_against_what_the_sheet_states(batch: Path) -> None:
    found = compare(batch, ["hardening.coefficient=0.2995,0.15"])
    own = row_of(found, 0, DENSITY)
    assert (own["median_ratio"], own["beyond_u"]) == (1.0, 0)
    assert row_of(found, 1, DENSITY)["beyond_u"] == 0
    assert row_of(found, 2, DENSITY)["beyond_u"] == 3  # four times as many lines
    assert 0.15 < own["relative_u"] < 0.6
    # alpha exact: what it brought, 2 ln 1.1, is gone from u.
    left = np.sqrt(own["relative_u"] ** 2 - (2.0 * np.log(1.1)) ** 2)
    assert_allclose(row_of(found, 1, DENSITY)["relative_u_of_choice"], left, rtol=1e-9)


def test_errors_of_a_choice_empty_its_values(make: Make) -> None:
    # Past the branch of the logarithmic law there is no density (the rule is an error).
    rows = [
        {"coupon_id": "A", "indent_no": i, "force_n": 98.07, "hardness": 900} for i in (1, 2, 3)
    ]
    folder = make(SHEET, coupons=[{"coupon_id": "A"}], indents=rows)
    laid = 'hardening={law="logarithmic",reference_density_per_m2=1e14,coefficient=0.05}'
    found = compare(folder, [laid])
    assert row_of(found, 1, DENSITY)["coupons"] == 0
    assert np.isnan(row_of(found, 1, DENSITY)["median_ratio"])
    assert "none" in found.text()


def test_it_is_written_whole_with_its_account(batch: Path, tmp_path: Path) -> None:
    into = tmp_path / "choices"
    compare(batch, ["hardening.coefficient=0.25"], into)
    names = sorted(p.relative_to(into).as_posix() for p in into.rglob("*") if p.is_file())
    plots = ["plots/choices.png", "plots/choices.svg"]
    assert names == ["account.json", "compare.csv", "compare_choices.csv", *plots]
    account = json.loads((into / "account.json").read_bytes())
    assert account["choices"] == [{}, {"hardening.coefficient": "0.25"}]
    read = [each["path"] for each in account["read"]]
    assert read == ["batch.toml", "coupons.csv", "indents.csv"]
    with pytest.raises(ResultsNotWritten, match="something of that name is there"):
        compare(batch, ["hardening.coefficient=0.25"], into)


REDUCES = "acts on how readings are read, reduced or pooled"


@pytest.mark.parametrize(
    ("said", "told"),
    [
        ("strength.route=flow", f"--vary strength.route: this key {REDUCES}"),
        ("files.indents=a.csv", REDUCES),
        ("uncertainty.repeatability=own", REDUCES),
        ("indentation.resolution_um=0.2", REDUCES),
        ("indentation={resolution_um=0.2}", "--vary indentation.resolution_um"),
        ("flow.plastic_strain=0.01", REDUCES),
        ("testers=[]", REDUCES),
        ("material.name=nickel", REDUCES),
        ("hardning.law=constant", "no section [hardning]. The nearest known name is 'hardening'"),
        ("hardening.lav=constant", "The nearest known name is 'law'"),
        ("hardening.law=sideways", "'sideways' cannot be chosen"),
        ("hardening.law=logarithmic", "this choice makes no method"),
        ("hardening.coefficient=-0.3", "must be greater than zero"),
        ("hardening.coefficient=0.2,0.2", "a value stands twice"),
        ("hardening.coefficient=", "write it as KEY=V1,V2"),
        ("hardening.coefficient", "write it as KEY=V1,V2"),
        ("character={screw=1.0", "is no value of TOML"),
    ],
)
def test_what_cannot_be_varied_is_refused_by_name(batch: Path, said: str, told: str) -> None:
    with pytest.raises(UsageError) as refused:
        compare(batch, [said])
    assert told in str(refused.value)


def test_too_much_too_little_and_twice(batch: Path) -> None:
    values = ",".join(str(x / 1000) for x in range(200, 261))
    with pytest.raises(UsageError, match="61 choices; compare takes 60"):
        compare(batch, [f"hardening.coefficient={values}"])
    with pytest.raises(UsageError, match="nothing to compare"):
        compare(batch, [])
    with pytest.raises(UsageError, match="varied twice"):
        compare(batch, ["hardening.coefficient=0.2", "hardening.coefficient=0.3"])


def test_a_batch_that_cannot_be_trusted_is_refused(make: Make) -> None:
    folder = make(SHEET, coupons=COUPONS, indents="coupon_id,indent_no\nA,1\n")
    with pytest.raises(BatchRefused, match="force_n"):
        compare(folder, ["hardening.coefficient=0.2"])
