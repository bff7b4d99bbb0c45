"""Walls and interiors, and lines in a given arrangement: published columns, refusals."""

from collections.abc import Callable
from math import log, pi, sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose

import coldwork
from coldwork.errors import BatchRefused, UsageError
from coldwork.inputs.sheet import read_method
from coldwork.jobs.estimate import Estimate
from coldwork.jobs.trace import trace

Make = Callable[..., Path]
M, ALPHA, G, NU, B = 3.06, 0.3, 44e9, 0.34, 0.2556e-9
SHEET: Final = """
[batch]
id = "cells"
[material]
name = "copper"
shear_modulus_gpa = 44.0
poisson_ratio = 0.34
burgers_vector_nm = 0.2556
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "flow"
baseline_mpa = 50.0
[hardening]
taylor_factor = 3.06
coefficient = 0.3
[character]
screw = 0.5
edge = 0.5
[line_energy]
outer_radius_factor = 1.0
core_radius_b = 1.0
[structure]
kind = "cells"
wall_fraction = 0.2
density_ratio = 16.0
"""
UNIFORM: Final = SHEET[: SHEET.index("[structure]")]
DENSITY, LINE, STORED = (
    "dislocation_density_per_m2",
    "line_energy_j_per_m",
    "stored_energy_j_per_m3",
)


def batch(make: Make, sheet: str, stress: float = 250.0, name: str = "b") -> Path:
    points = [
        {"coupon_id": "a", "reading_no": i, "plastic_strain": 0.002, "flow_stress_mpa": stress}
        for i in (1, 2, 3)
    ]
    return make(sheet, name=name, coupons=[{"coupon_id": "a"}], flow_stress=points)


def of(folder: Path, stress: float = 250.0) -> dict[str, float]:
    """What a flow stress comes to by the folder's sheet: one chain, without the files."""
    told = coldwork.estimate(sheet=folder, stress_mpa=stress)
    return {name: getattr(told, name).value for name in (DENSITY, LINE, STORED, "mean_spacing_nm")}


def per_line(density: float, radius: float | None = None) -> float:
    """Relation 7 by hand, isotropic, half screws and half edges."""
    k = G * (1.0 - NU / 2.0) / (1.0 - NU)
    return k * B**2 / (4.0 * pi) * log((radius or density**-0.5) / B)


def test_walls_and_interiors_by_hand(make: Make) -> None:
    # Mughrabi 1983: 0.2 s_w + 0.8 s_c = 200 MPa with s_w = 4 s_c, so 500 and 125 MPa.
    found = of(batch(make, SHEET))
    wall, inside = ((mpa * 1e6 / (M * ALPHA * G * B)) ** 2 for mpa in (500.0, 125.0))
    density = 0.2 * wall + 0.8 * inside
    stored = 0.2 * wall * per_line(wall) + 0.8 * inside * per_line(inside)
    assert_allclose(found[DENSITY], density, rtol=1e-12)
    assert_allclose(found[STORED], stored, rtol=1e-12)
    assert_allclose(found[LINE], stored / density, rtol=1e-12)
    assert_allclose(found["mean_spacing_nm"], 1e9 / sqrt(density), rtol=1e-12)


def test_a_ratio_of_stresses_says_the_same(make: Make) -> None:
    by_stress = SHEET.replace("density_ratio = 16.0", "stress_ratio = 4.0")
    a, b = of(batch(make, SHEET)), of(batch(make, by_stress, name="s"))
    assert_allclose([a[n] for n in (DENSITY, STORED)], [b[n] for n in (DENSITY, STORED)])


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("density_ratio = 16.0", "density_ratio = 1.0"),
        ("wall_fraction = 0.2", "wall_fraction = 0.0"),
        ("wall_fraction = 0.2", "wall_fraction = 1.0"),
    ],
)
def test_without_contrast_or_without_one_region_it_is_uniform(
    make: Make, old: str, new: str
) -> None:
    plain = of(batch(make, UNIFORM))
    cells = of(batch(make, SHEET.replace(old, new), name="c"))
    for name in (DENSITY, LINE, STORED):
        assert_allclose(cells[name], plain[name], rtol=1e-12)


def test_cells_hold_more_than_a_uniform_metal_of_the_same_strength(make: Make) -> None:
    # A mean of squares is above the square of the mean.
    assert of(batch(make, SHEET))[DENSITY] > of(batch(make, UNIFORM, name="u"))[DENSITY]


def test_a_logarithmic_law_gives_each_region_a_coefficient_of_its_own(make: Make) -> None:
    law = '[hardening]\nlaw = "logarithmic"\nreference_density_per_m2 = 1e14'
    sheet = SHEET.replace("[hardening]", law).replace("density_ratio = 16.0", "stress_ratio = 4.0")
    cells = of(batch(make, sheet))
    plain = UNIFORM.replace("[hardening]", law)
    wall, inside = (
        of(batch(make, plain, name=name), mpa + 50.0)[DENSITY]
        for name, mpa in (("w", 500.0), ("i", 125.0))
    )
    assert_allclose(cells[DENSITY], 0.2 * wall + 0.8 * inside, rtol=1e-12)


def test_below_the_baseline_there_is_neither(make: Make) -> None:
    row = coldwork.process(batch(make, SHEET, 40.0)).frames["coupons"].iloc[0]
    assert np.isnan(row[DENSITY])
    assert "below-baseline" in row["flags"]


def test_walls_beyond_what_a_crystal_holds_are_an_error(make: Make) -> None:
    sheet = SHEET.replace("wall_fraction = 0.2", "wall_fraction = 0.001")
    sheet = sheet.replace("density_ratio = 16.0", "density_ratio = 900.0")
    frames = coldwork.process(batch(make, sheet)).frames
    row = frames["flags"].set_index("rule").loc["density-impossible"]
    stress = 200e6 / (0.999 + 0.001 * 30.0) * 30.0
    assert_allclose(row["value"], (stress / (M * ALPHA * G * B)) ** 2, rtol=1e-12)
    assert np.isnan(frames["coupons"].iloc[0][DENSITY])


def test_the_trace_tells_both_densities(make: Make, tmp_path: Path) -> None:
    coldwork.process(batch(make, SHEET), into=tmp_path / "out")
    told = " ".join(trace(tmp_path / "out" / "cells", "a").text().split())
    assert "density in the walls: 2.345e15 m-2" in told
    assert "density in the interiors: 1.466e14 m-2" in told
    assert "from structure.wall_fraction: 0.2000, exact" in told
    assert "each region with its own outer radius" in told


def test_an_arrangement_sets_the_outer_radius(make: Make) -> None:
    # Wilkens 1970: R_e = M* / sqrt(rho).
    lines = '[line_energy]\nouter_radius = "arrangement"\narrangement = 0.5'
    sheet = UNIFORM.replace("[line_energy]\nouter_radius_factor = 1.0", lines)
    found = of(batch(make, sheet))
    density = found[DENSITY]
    assert_allclose(found[LINE], per_line(density, 0.5 / sqrt(density)), rtol=1e-12)
    inputs = read_method(batch(make, sheet, name="again")).inputs
    assert "line_energy.outer_radius_factor" not in inputs


def test_an_estimate_from_a_density_parts_it_between_the_regions() -> None:
    def estimate(stress: float | None = None, density: float | None = None) -> Estimate:
        settings = ["strength.baseline_mpa = 50.0"]
        settings += ['structure.kind = "cells"', "structure.wall_fraction = 0.2"]
        settings += ["structure.density_ratio = 16.0"]
        return coldwork.estimate(
            "copper", stress_mpa=stress, density_per_m2=density, settings=settings
        )

    forth = estimate(stress=250.0)
    back = estimate(density=forth.dislocation_density_per_m2.value)
    for name in (LINE, STORED):
        assert_allclose(getattr(back, name).value, getattr(forth, name).value, rtol=1e-12)


def test_a_density_with_a_logarithmic_law_and_cells_is_refused() -> None:
    settings = ['structure.kind = "cells"', "structure.wall_fraction = 0.2"]
    settings += ["structure.stress_ratio = 4.0", 'hardening.law = "logarithmic"']
    settings += ["hardening.reference_density_per_m2 = 1e14"]
    with pytest.raises(UsageError, match="cannot be parted between walls and interiors"):
        coldwork.estimate("copper", density_per_m2=1e14, settings=settings)


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ("wall_fraction = 0.2\n", "", "wall_fraction: this key is missing"),
        ("density_ratio = 16.0\n", "", "none of density_ratio, stress_ratio is given"),
        ("density_ratio = 16.0", "density_ratio = 16.0\nstress_ratio = 4.0", "keep one of them"),
        ('kind = "cells"\n', "", "Walls belong to kind"),
        ("wall_fraction = 0.2", "wall_fraction = 1.2", "It must lie between 0 and 1."),
        (
            "wall_fraction = 0.2",
            "wall_fraction = { value = 0.2, u = 0.1 }",
            "0.2 may well be -0.1 or 0.5 by its uncertainty",
        ),
        ("density_ratio = 16.0", "density_ratio = 0.5", "It must lie between 1 and 10000."),
        ('kind = "cells"', 'kind = "subgrains"', "one of uniform, cells"),
        (
            "[hardening]",
            '[hardening]\nlaw = "logarithmic"\nreference_density_per_m2 = 1e14',
            "a ratio of densities is given with a logarithmic law",
        ),
        ("[line_energy]", "[line_energy]\narrangement = 0.5", 'goes with outer_radius = "arr'),
        (
            "[line_energy]",
            '[line_energy]\nouter_radius = "arrangement"\narrangement = 0.5',
            "no factor can stand beside it",
        ),
        (
            "[line_energy]\nouter_radius_factor = 1.0",
            '[line_energy]\nouter_radius = "arrangement"',
            "arrangement: this key is missing",
        ),
    ],
)
def test_what_does_not_fit_is_refused_in_the_sheets_own_line(
    make: Make, old: str, new: str, told: str
) -> None:
    assert old in SHEET
    with pytest.raises(BatchRefused) as refused:
        read_method(batch(make, SHEET.replace(old, new, 1)))
    assert told in str(refused.value)
    assert "batch.toml, line " in str(refused.value)
