"""Small indents through a whole batch: published copper, fitted lines, what they leave unknown."""

from collections.abc import Callable
from math import sin, sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

import coldwork
from coldwork.errors import UsageError
from coldwork.jobs.compare import compare
from coldwork.jobs.estimate import estimate
from coldwork.jobs.trace import trace
from coldwork.reduce.size_lines import SIZE_EFFECT

Make = Callable[..., Path]
Floats = NDArray[np.float64]
FACE: Final = np.radians(68.0)
KGF: Final = 9.80665e6  # Pa
SHEET: Final = """
[batch]
id = "small"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = 20.0
[character]
screw = 0.5
edge = 0.5
[indentation]
area = "projected"
constraint_factor = 3.0
"""
FITTED: Final = SHEET + 'size_effect = "fitted"\n'


def newton(hardness: float, depth: float) -> float:
    """Force of an indent of a hardness over the projected area, at a depth: H A, A = 24.5 h^2."""
    return float(hardness * (2.0 * np.tan(FACE) * depth) ** 2)


def indent(coupon: str, no: int, hardness: float, depth: float) -> dict[str, object]:
    return {
        "coupon_id": coupon,
        "indent_no": no,
        "force_n": newton(hardness, depth),
        "hardness": hardness * sin(FACE) / KGF,
    }


# Copper of McElhaney, Vlassak and Nix 1998 as fitted in Nix and Gao 1998 (from memory):
# H_0 [GPa], h* [um] and H at a depth of 1 um [GPa] in the digits of the relation.
@pytest.mark.parametrize(
    ("bulk", "length", "at_1_um"), [(0.581, 1.60, 0.9368), (0.834, 0.464, 1.0091)]
)
@pytest.mark.parametrize("area", ["projected", "contact"])
def test_copper_at_one_micrometre_has_the_strength_of_a_large_indent(
    make: Make, area: str, bulk: float, length: float, at_1_um: float
) -> None:
    rows = [indent("a", no, at_1_um * 1e9, 1e-6) for no in (1, 2, 3)]
    sheet = SHEET.replace("projected", area)
    for name, key, number in (
        ("length", "characteristic_depth_um", length),
        ("strength", "size_strength_gpa2_um", bulk**2 * length),
    ):
        said = f'size_effect = "{name}"\n{key} = {number}\n'
        folder = make(sheet + said, name=name, coupons=[{"coupon_id": "a"}], indents=rows)
        row = coldwork.process(folder).frames["coupons"].iloc[0]
        over = 1.0 if area == "projected" else sin(FACE)
        assert_allclose(row["flow_stress_mpa"], bulk * 1e3 * over / 3.0, rtol=1e-4)
        assert_allclose(row["hardness"], at_1_um * 1e9 * sin(FACE) / KGF)  # as it was read


def hardnesses(bulk: float, strength: float, forces: Floats) -> Floats:
    """H over the projected area at forces: F = H A(h) and H^2 = H_0^2 + S / h, by bisection."""
    low, high = np.full(len(forces), 1e-8), np.full(len(forces), 1e-2)
    for _ in range(200):
        middle = np.sqrt(low * high)
        over = newton(1.0, 1.0) * middle**2 * np.sqrt(bulk**2 + strength / middle) > forces
        low, high = np.where(over, low, middle), np.where(over, middle, high)
    return np.sqrt(bulk**2 + strength / low)


FORCES: Final = np.array([0.0980665, 0.245166, 0.980665, 9.80665])


def several(
    coupon: str, bulk: float, strength: float = 0.4e12, noise: Floats | None = None, n: int = 4
) -> list[dict[str, object]]:
    forces = np.repeat(FORCES, n)
    read = hardnesses(bulk, strength, forces) * (1.0 + (0.0 if noise is None else noise))
    return [
        {"coupon_id": coupon, "indent_no": i, "force_n": f, "hardness": h * sin(FACE) / KGF}
        for i, (f, h) in enumerate(zip(forces, read, strict=True), 1)
    ]


def in_condition(**coupons: str) -> list[dict[str, object]]:
    return [{"coupon_id": name, "condition": held} for name, held in coupons.items()]


def test_a_line_without_scatter_gives_its_own_constants_back(make: Make, tmp_path: Path) -> None:
    # Two coupons of one slope, and one that was read with a single force.
    alone = hardnesses(0.9e9, 0.4e12, FORCES[:1])[0]
    single = {"force_n": FORCES[0], "hardness": alone * sin(FACE) / KGF}
    rows = several("a", 0.8e9) + several("b", 0.95e9)
    rows += [{"coupon_id": "c", "indent_no": no, **single} for no in (1, 2, 3)]
    coupons = in_condition(a="rolled", b="rolled", c="rolled")
    folder = make(FITTED, coupons=coupons, indents=rows)
    done = coldwork.process(folder, into=tmp_path / "out")
    (line,) = done.method["indentation"]["size_lines"]
    assert_allclose(line["size_strength_gpa2_um"], 0.4, rtol=1e-10)
    assert (line["coupons"], line["forces"]) == (2, 4)
    assert line["indents"] == 32
    assert_allclose(
        line["bulk_hardness_gpa"] ** 2 * line["characteristic_depth_um"], 0.4, rtol=1e-10
    )
    stress = done.frames["coupons"]["flow_stress_mpa"]
    assert_allclose(stress, np.array([800.0, 950.0, 900.0]) / 3.0, rtol=1e-9)
    assert done.frames["coupons"]["hardness_scale"].tolist() == ["", "", "HV0.01"]
    told = trace(tmp_path / "out" / "small", "a").text()
    assert "hardness of a large indent" in told
    assert "size_effect:rolled: 0.39999999" in told


def test_the_line_against_least_squares_with_a_column_for_each_coupon(make: Make) -> None:
    rng = np.random.default_rng(11)
    noise = 0.01 * rng.standard_normal((2, 16))
    rows = several("a", 0.8e9, noise=noise[0]) + several("b", 0.95e9, noise=noise[1])
    folder = make(FITTED, coupons=in_condition(a="", b=""), indents=rows)
    done = coldwork.process(folder)
    (line,) = done.method["indentation"]["size_lines"]
    table = pd.DataFrame(rows)
    cells = table.groupby(["coupon_id", "force_n"], sort=True)["hardness"].mean().reset_index()
    h = cells["hardness"].to_numpy() * KGF / sin(FACE)
    depth = np.sqrt(cells["force_n"].to_numpy() / h / newton(1.0, 1.0))
    first = (cells["coupon_id"] == "a").to_numpy(dtype=float)
    columns = np.stack([first, 1.0 - first, 1.0 / depth / 1e6], axis=1)
    weight = 1.0 / h**2  # of the residual: the square root of that of its square
    found = np.linalg.lstsq(columns * weight[:, None], h**2 * weight, rcond=None)[0]
    assert_allclose(line["size_strength_gpa2_um"], found[2] / 1e18, rtol=1e-9)
    stress = done.frames["coupons"]["flow_stress_mpa"]
    assert_allclose(stress, np.sqrt(found[:2]) / 1e6 / 3.0, rtol=1e-9)
    budget = done.frames["budget"]
    assert SIZE_EFFECT in set(budget["input"])  # of the condition without a name
    assert line["degrees_of_freedom"] == 32 - 2 - 1


def test_stated_uncertainty_is_that_of_repeated_batches(make: Make) -> None:
    # 150 coupons in 50 conditions of three, 1 % scatter: each condition is a batch of its own.
    rng = np.random.default_rng(20261201)
    names = [f"{k:02d}-{i}" for k in range(50) for i in range(3)]
    rows = [r for x in names for r in several(x, 0.8e9, noise=0.01 * rng.standard_normal(16))]
    folder = make(FITTED, coupons=in_condition(**{x: x[:2] for x in names}), indents=rows)
    done = coldwork.process(folder)
    lines = pd.DataFrame(done.method["indentation"]["size_lines"])
    assert len(lines) == 50
    for name, truth in (
        ("size_strength_gpa2_um", 0.4),
        ("bulk_hardness_gpa", 0.8),
        ("characteristic_depth_um", 0.625),
    ):
        off = (lines[name] - truth) / lines[f"u_{name}"]
        assert 0.8 < sqrt((off**2).mean()) < 1.2  # of 50: 10 % standard error
    both = np.corrcoef(lines["bulk_hardness_gpa"], lines["characteristic_depth_um"])[0, 1]
    assert_allclose(lines["correlation"].mean(), both, atol=0.06)
    coupons = done.frames["coupons"]
    off = (coupons["flow_stress_mpa"] - 800.0 / 3.0) / coupons["u_flow_stress_mpa"]
    assert 0.85 < sqrt((off**2).mean()) < 1.15
    apart = coupons["flow_stress_mpa"].to_numpy().reshape(50, 3)
    inside = np.sqrt(apart.var(axis=1, ddof=1).mean())  # what the coupons of one line differ by
    assert_allclose(inside, sqrt((coupons["u_own_flow_stress_mpa"] ** 2).mean()), rtol=0.15)


def test_draws_take_the_fitted_line_as_first_order_does(make: Make) -> None:
    rng = np.random.default_rng(5)
    rows = several("a", 0.8e9, noise=0.01 * rng.standard_normal(16))
    coupons = in_condition(a="rolled")
    drawn = '[uncertainty]\nmethod = "monte-carlo"\ndraws = 20000\nseed = 3\n'
    plain = coldwork.process(make(FITTED, name="p", coupons=coupons, indents=rows))
    sampled = coldwork.process(make(FITTED + drawn, name="d", coupons=coupons, indents=rows))
    u = plain.frames["coupons"]["u_flow_stress_mpa"][0]
    assert_allclose(sampled.frames["coupons"]["sd_flow_stress_mpa"][0], u, rtol=0.1)


def test_a_condition_of_single_forces_is_not_fitted(make: Make) -> None:
    # Coupons differ in themselves: a force for each would pass that off as an effect of size.
    rows = several("a", 0.8e9)[:4] + several("b", 0.8e9)[12:]
    folder = make(FITTED, coupons=in_condition(a="rolled", b="rolled"), indents=rows)
    frames = coldwork.process(folder).frames
    assert set(frames["flags"].query("level == 'error'")["rule"]) == {"size-effect-unfitted"}
    assert frames["coupons"]["flow_stress_mpa"].isna().all()


def test_other_choices_keep_the_fitted_line(make: Make) -> None:
    rng = np.random.default_rng(5)
    rows = several("a", 0.8e9, noise=0.01 * rng.standard_normal(16))
    folder = make(FITTED, coupons=in_condition(a="rolled"), indents=rows)
    rows_of = coldwork.process(folder).frames["coupons"]
    found = compare(folder, ["line_energy.outer_radius=half-spacing"]).summary.to_pandas()
    own = found[found["quantity"] == "stored_energy_j_per_g"].iloc[0]
    value, u = rows_of["stored_energy_j_per_g"][0], rows_of["u_stored_energy_j_per_g"][0]
    assert_allclose(own["relative_u"], u / value, rtol=1e-9)


def test_one_number_has_no_line_and_needs_a_force() -> None:
    def ask(more: list[str], force: float | None = None) -> None:
        more = ["strength.baseline_mpa = 50.0", *more]
        estimate("copper", hardness=95.0, force_n=force, settings=more)

    with pytest.raises(UsageError, match="cannot be fitted to one number"):
        ask(["indentation.size_effect = 'fitted'"])
    length = ["indentation.size_effect = 'length'", "indentation.characteristic_depth_um = 1.0"]
    with pytest.raises(UsageError, match="give the force"):
        ask(length)
    ask(length, 0.98)
