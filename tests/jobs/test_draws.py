"""Monte Carlo, as published: closed forms, first order, the baseline, and bytes."""

import json
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from math import exp, log, sqrt
from pathlib import Path
from typing import Any, Final

import numpy as np
import pandas as pd
import pytest

import coldwork
from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method
from coldwork.jobs import run as run_job
from coldwork.jobs.gather import gather
from coldwork.jobs.slices import work_slice

Make = Callable[..., Path]

SHEET: Final = """
[batch]
id = "draws"
[material]
name = "copper"
shear_modulus_gpa = {{ value = 44.0, factor = 1.03 }}
burgers_vector_nm = {{ value = 0.2556, factor = 1.01 }}
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[flow]
repeatability_rel = 1e-9
[strength]
route = "flow"
{strength}
[hardening]
taylor_factor = {{ value = 3.06, factor = 1.05 }}
coefficient = {{ value = 0.30, factor = 1.2 }}
[character]
screw = 0.5
edge = 0.5
[uncertainty]
method = "monte-carlo"
seed = 5
draws = 40000
{more}
"""
DRAWS: Final = 40_000
EXACT: Final = "baseline_mpa = 50.0"


def flow(stresses: dict[str, float]) -> dict[str, list[dict[str, object]]]:
    return {
        "coupons": [{"coupon_id": name, "condition": "rolled"} for name in stresses],
        "flow_stress": [
            {"coupon_id": name, "reading_no": 1, "plastic_strain": 0.002, "flow_stress_mpa": x}
            for name, x in stresses.items()
        ],
    }


Row = dict[str, Any]


def records(table: pd.DataFrame) -> list[Row]:
    return [{str(name): x for name, x in row.items()} for row in table.to_dict("records")]


def quantities(folder: Path) -> dict[tuple[str, str], Row]:
    table = coldwork.process(folder).frames["quantities"]
    return {(row["coupon_id"], row["quantity"]): row for row in records(table)}


def coupons_of(folder: Path) -> dict[str, Row]:
    table = coldwork.process(folder).frames["coupons"]
    return {row["coupon_id"]: row for row in records(table)}


def standard_error(density: float, share: float = 0.025) -> float:
    """Of the end that leaves `share` beyond it, from the probability density there."""
    return sqrt(share * (1.0 - share) / DRAWS) / density


def test_a_density_of_lognormal_factors_is_lognormal(make: Make) -> None:
    folder = make(SHEET.format(strength=EXACT, more=""), **flow({"a": 250.0}))
    row = quantities(folder)["a", "dislocation_density_per_m2"]
    # rho = (s / (M alpha G b))^2: ln rho is normal, its variance 4 times that of ln(M alpha G b)
    sigma = 2.0 * sqrt(sum(log(f) ** 2 for f in (1.05, 1.2, 1.03, 1.01)))
    median = (200e6 / (3.06 * 0.30 * 44e9 * 0.2556e-9)) ** 2
    assert row["value"] == pytest.approx(median, rel=1e-9)
    normal_density = 0.058445  # of the standard normal distribution at 1.959964
    for end, sign in (("lower", -1.0), ("upper", 1.0)):
        expected = median * exp(sign * 1.959964 * sigma)
        error = standard_error(normal_density / (expected * sigma))
        assert abs(row[end] - expected) < 3.0 * error, end
    coupon = coupons_of(folder)["a"]
    sd = median * exp(sigma**2 / 2.0) * sqrt(exp(sigma**2) - 1.0)
    assert coupon["sd_dislocation_density_per_m2"] == pytest.approx(sd, rel=0.05)
    assert coupon["p_below_baseline"] == 0.0


@pytest.mark.parametrize(
    ("last", "half", "density"),
    [
        # JCGM 101, 9.2.3 and 9.2.4, in MPa: +-3.88 and +-17.0, here from the distribution of a sum
        # of rectangles: at 3.8794 the density is 4 x 0.025 / (4 sqrt(3) - 3.8794)
        (1.0, 2.0 * sqrt(3.0) * (2.0 - (3.0 / 5.0) ** 0.25), 0.0328),
        (10.0, None, None),
    ],
)
def test_a_sum_of_rectangles(
    make: Make, last: float, half: float | None, density: float | None
) -> None:
    us = dict(zip("abc", [1.0, 1.0, last], strict=True))
    terms = ", ".join(
        f'{name} = {{ value = 10.0, u = {u}, shape = "uniform" }}' for name, u in us.items()
    )
    strength = (
        f'friction_mpa = {{ value = 20.0, u = 1.0, shape = "uniform" }}\nterms_mpa = {{ {terms} }}'
    )
    folder = make(SHEET.format(strength=strength, more=""), **flow({"a": 250.0}))
    found = quantities(folder)["a", "baseline_stress_mpa"]
    if half is None or density is None:
        assert found["upper"] - found["lower"] == pytest.approx(2 * 17.0, abs=0.15)  # 9.2.4
        return
    for end, sign in (("lower", -1.0), ("upper", 1.0)):
        assert abs(found[end] - (50.0 + sign * half)) < 3.0 * standard_error(density), end


NEAR: Final = "baseline_mpa = { value = 50.0, u = 15.0 }"


def test_draws_below_the_baseline_stay_and_are_counted(make: Make) -> None:
    stresses = {"far": 250.0, "near": 65.0, "on": 50.0, "under": 35.0, "contradicted": 15.0}
    folder = make(SHEET.format(strength=NEAR, more=""), **flow(stresses))
    coupons = coupons_of(folder)
    # the stress is normal with u = 15 MPa: shares from tables of the normal distribution
    expected = {"far": 0.0, "near": 0.1587, "on": 0.5, "under": 0.8413, "contradicted": 0.9902}
    for name, share in expected.items():
        error = sqrt(share * (1 - share) / DRAWS)
        assert abs(coupons[name]["p_below_baseline"] - share) <= 3.0 * error + 1e-4, name
    lower, upper = (f"{end}_stored_energy_j_per_g" for end in ("lower", "upper"))
    for name in ("near", "on", "under"):
        assert coupons[name][lower] == 0.0 < coupons[name][upper]
    assert np.isnan(coupons["contradicted"][upper])  # from a share of 0.975 on
    assert "baseline-contradicted" in str(coupons["contradicted"]["flags"])
    assert np.isnan(coupons["near"]["upper_line_energy_j_per_m"])  # grows without bound there


def rows(names: list[str], n: int = 5) -> dict[str, list[dict[str, object]]]:
    noise = [0.99, 1.012, 1.0, 0.985, 1.015, 1.003, 0.996]
    return {
        "coupons": [
            {"coupon_id": x, "condition": x, "grain_size_um": 20, "u_grain_size_um": 1}
            for x in names
        ],
        "indents": [
            {
                "coupon_id": x,
                "indent_no": i,
                "force_n": 98.07,
                "hardness": (70 + 7 * k) * noise[(i + k) % 7],
                "tester": "T1",
            }
            for k, x in enumerate(names)
            for i in range(1, n + 1)
        ],
    }


INDENTS: Final = """
[batch]
id = "draws"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
friction_mpa = { value = 20.0, u = 3.0, shared = false }
hall_petch_mpa_m05 = { value = 0.11, u = 0.01 }
[indentation]
initial_hardening_mpa = { value = 1700.0, u = 60.0 }
saturation_stress_mpa = { value = 320.0, u = 10.0 }
[character]
screw = 0.5
edge = 0.5
[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
[[limits]]
id = "total"
quantity = "stored_energy_j_per_g"
lower = 0.01
[[limits]]
id = "own"
quantity = "stored_energy_j_per_g"
upper = 0.06
basis = "own"
[uncertainty]
method = "monte-carlo"
seed = 5
draws = 12000
repeatability = "own"
"""
MANY: Final = [f"c{i}" for i in range(7)]


def written(folder: Path, into: Path, name: str) -> dict[str, str]:
    """Give the text of each coupon's results, by its id."""
    out = run_job.run(folder, into, plots=False).path / name
    lines = out.read_text(encoding="utf-8").splitlines()
    place = lines[0].split(",").index("coupon_id")
    digest = lines[0].split(",").index("record_sha256") if "record_sha256" in lines[0] else None
    found: dict[str, list[str]] = {}
    for line in lines[1:]:
        cells = line.split(",")
        if digest is not None:
            cells[digest] = ""  # it names the files' lines
        found.setdefault(cells[place], []).append(",".join(cells))
    return {key: "\n".join(each) for key, each in found.items()}


@pytest.mark.parametrize("draws", ["12000", '"adaptive"'])
def test_a_coupon_is_drawn_the_same_alone_and_among_many(
    make: Make, tmp_path: Path, draws: str
) -> None:
    sheet = INDENTS.replace("12000", draws)
    data = rows(MANY)
    together = written(make(sheet, name="all", **data), tmp_path / "1", "coupons.csv")
    turned = {name: list(reversed(table)) for name, table in data.items()}
    turned["indents"].sort(key=lambda row: MANY.index(str(row["coupon_id"])), reverse=True)
    backwards = written(make(sheet, name="turned", **turned), tmp_path / "2", "coupons.csv")
    assert backwards == together
    for name in ("c0", "c6"):
        mine = {
            table: [row for row in content if row["coupon_id"] == name]
            for table, content in data.items()
        }
        alone = written(make(sheet, name=name, **mine), tmp_path / f"alone {name}", "coupons.csv")
        assert alone[name] == together[name]


def test_seed_and_draws_alone_decide_every_byte(make: Make, tmp_path: Path) -> None:
    data = rows(MANY[:3])

    def bytes_of(sheet: str, name: str) -> str:
        folder = make(sheet, name=name, **data)
        return "\n".join(written(folder, tmp_path / f"of {name}", "coupons.csv").values())

    first = bytes_of(INDENTS, "one")
    assert bytes_of(INDENTS, "again") == first
    assert bytes_of(INDENTS.replace("seed = 5", "seed = 6"), "seed") != first
    assert bytes_of(INDENTS.replace("12000", "12001"), "draws") != first


def test_slices_and_workers_do_not_show(make: Make) -> None:
    method = read_method(make(INDENTS, **rows(MANY)))

    def worked(rows_: slice) -> list[float]:
        batch, _ = gather(method)
        ends = work_slice(batch, rows_).evaluated.ends["stored_energy_j_per_g"]
        return [*ends.lower.tolist(), *ends.upper.tolist()]

    whole = worked(slice(0, 7))
    parts = [slice(i, i + 1) for i in range(7)]
    with ThreadPoolExecutor(4) as workers:
        singles = list(workers.map(worked, reversed(parts)))[::-1]
    assert [x[0] for x in singles] + [x[1] for x in singles] == whole


def test_first_order_is_judged_in_the_record(make: Make, tmp_path: Path) -> None:
    folder = make(INDENTS, **rows(MANY[:2]))
    out = run_job.run(folder, tmp_path / "out", plots=False).path
    record = json.loads((out / "records.jsonl").read_text(encoding="utf-8").splitlines()[0])
    sampling = record["sampling"]
    assert (sampling["draws"], sampling["seed"]) == (12000, 5)
    stress = sampling["quantities"]["dislocation_stress_mpa"]
    # JCGM 101, 8.1: both ends within half of the last digit of u that counts
    worst = max(
        abs(stress["lower"] - stress["lower_first_order"]),
        abs(stress["upper"] - stress["upper_first_order"]),
    )
    assert stress["d_low"] <= worst >= stress["d_high"]
    assert stress["first_order_holds"] is (worst <= stress["tolerance"])
    quantity = record["quantities"]["dislocation_stress_mpa"]
    assert quantity["lower"] == stress["lower"]
    assert quantity["u"] == stress["u_first_order"]


def test_probabilities_are_shares_of_draws(make: Make) -> None:
    limit = '[[limits]]\nid = "a"\nquantity = "dislocation_stress_mpa"\nlower = 0.001\n'
    limit += 'rule = "probability"\nat_least = 0.84\n'
    folder = make(SHEET.format(strength=NEAR, more=limit), **flow({"near": 65.0, "on": 50.0}))
    coupons = coupons_of(folder)
    for row in coupons.values():
        share = 1.0 - row["p_below_baseline"]
        assert row["conformance_probability"] == pytest.approx(share, abs=2e-4)
    assert [row["decision"] for row in coupons.values()] == ["conforming", "undecided"]


def test_the_mean_of_two_readings_has_quantiles_and_no_variance(make: Make) -> None:
    one = coupons_of(make(INDENTS, name="two", **rows(["c0"], n=2)))["c0"]
    four = coupons_of(make(INDENTS, name="4", **rows(["c0"], n=4)))["c0"]
    six = coupons_of(make(INDENTS, name="6", **rows(["c0"], n=6)))["c0"]
    assert np.isnan(one["sd_hardness"])  # JCGM 101, 6.4.9.4: t with 1 degree of freedom
    assert one["upper_hardness"] - one["lower_hardness"] > 0.0
    assert four["sd_hardness"] > 0.0
    assert np.isnan(four["sd_dislocation_density_per_m2"])  # the square of t with 3 has none
    assert six["sd_dislocation_density_per_m2"] > 0.0


def test_the_t_distribution_is_that_of_the_mean(make: Make) -> None:
    # Two readings, nothing else: mean +- 12.706 u (table of Student's t, 97.5 %, 1 degree)
    sheet = INDENTS.replace("u_rel = 0.008", "u_rel = 0.0")
    row = quantities(make(sheet, **rows(["c0"], n=2)))["c0", "hardness"]
    half = (row["upper"] - row["lower"]) / 2.0
    assert half == pytest.approx(12.706 * row["u"], rel=0.15)


def test_an_input_that_reaches_zero_refuses_the_batch(make: Make) -> None:
    wide = "[indentation]\nconstraint_factor = { value = 3.0, u = 1.2 }"
    folder = make(INDENTS.replace("[indentation]", wide), **rows(MANY[:1]))
    with pytest.raises(BatchRefused, match=r"indentation\.constraint_factor.*lognormal") as refused:
        coldwork.process(folder)
    assert "drawn again" in str(refused.value)


LAWS: Final = {
    "obstacles": ("[strength]", "[strength]\nobstacle_mpa = 40.0\nsuperposition_exponent = 1.5"),
    "cells": (
        "[character]",
        '[structure]\nkind = "cells"\nwall_fraction = { value = 0.2, u = 0.004 }\n'
        "density_ratio = { value = 5.0, u = 0.1 }\n[character]",
    ),
    "logarithmic": (
        "[character]",
        '[hardening]\nlaw = "logarithmic"\nreference_density_per_m2 = 1e14\n[character]',
    ),
    "grain": ("[character]", '[line_energy]\nouter_radius = "grain"\n[character]'),
    "fixed": (
        "[character]",
        '[line_energy]\nouter_radius = "fixed"\nouter_radius_nm = 1000.0\n[character]',
    ),
    "cold": (
        "[character]",
        '[temperature]\ntest_c = -100.0\ncorrection = "modulus"\n[character]',
    ),
    "anisotropic": (
        "[character]",
        '[line_energy]\nelasticity = "anisotropic"\nslip_system = "{111}<110>"\n[character]',
    ),
}
SHARP: Final = INDENTS.replace("u = 3.0,", "u = 0.5,").replace("u = 60.0", "u = 5.0")


@pytest.mark.parametrize("law", LAWS)
def test_every_law_takes_draws(make: Make, law: str) -> None:
    sheet = SHARP.replace(*LAWS[law]).replace('"own"\n"""', '"pooled"\n')
    sheet = sheet.replace("[indentation]", "[indentation]\nconstraint_factor = 3.0")
    sheet = sheet.replace("draws = 12000", "draws = 2500")
    for row in coupons_of(make(sheet, **rows(MANY[5:], n=7))).values():
        for name in ("dislocation_stress_mpa", "line_energy_j_per_m"):
            value, low, high = (row[f"{end}{name}"] for end in ("", "lower_", "upper_"))
            assert low < value < high
            # 2,500 draws give a standard deviation to 1.4 %; first order does the rest
            assert row[f"sd_{name}"] == pytest.approx(row[f"u_{name}"], rel=0.1), name
