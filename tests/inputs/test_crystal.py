"""Anisotropic elasticity and the logarithmic laws in a sheet: taken, or refused by name."""

import shutil
from pathlib import Path
from typing import Final

import pytest
from numpy.testing import assert_allclose

import coldwork
from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method

STRIP: Final = Path(__file__).parents[2] / "sample_data" / "copper-strip"
ANISOTROPIC: Final = 'elasticity = "anisotropic"\nslip_system = "{111}<110>"\n'


def edited(folder: Path, **sections: str) -> Path:
    """Copy the strip; put lines under the headings of its sheet, over the keys that are there."""
    batch = folder / "batch"
    shutil.copytree(STRIP, batch)
    sheet = (batch / "batch.toml").read_text(encoding="utf-8")
    for section, lines in sections.items():
        for key in (line.split(" =")[0] for line in lines.splitlines()):
            rows = sheet.splitlines()
            sheet = "\n".join(row for row in rows if not row.startswith(f"{key} ="))
        sheet = sheet.replace(f"[{section}]", f"[{section}]\n{lines}")
    (batch / "batch.toml").write_text(sheet, encoding="utf-8")
    return batch


def refusal(folder: Path) -> str:
    with pytest.raises(BatchRefused) as refused:
        read_method(folder)
    return str(refused.value)


def test_the_line_energy_takes_the_crystals_factor(tmp_path: Path) -> None:
    # K screw 42.09 and edge 74.02 GPa of copper (tests/reference/crystal_energy_factors.toml);
    # isotropic: G (1 - nu/2)/(1 - nu) with the sheet's 44 GPa and 0.343. The rest cancels.
    plain = coldwork.process(STRIP).frames["coupons"]
    crystal = coldwork.process(edited(tmp_path, line_energy=ANISOTROPIC)).frames["coupons"]
    ratio = crystal["line_energy_j_per_m"] / plain["line_energy_j_per_m"]
    isotropic = 44.0 * (1 - 0.343 / 2) / (1 - 0.343)
    assert_allclose(ratio.dropna(), (42.09 + 74.02) / 2 / isotropic, rtol=2e-4)
    columns = ["dislocation_density_per_m2", "mean_spacing_nm"]
    assert plain[columns].equals(crystal[columns])


def test_the_uncertainty_of_the_constants_goes_through(tmp_path: Path) -> None:
    budget = coldwork.process(edited(tmp_path, line_energy=ANISOTROPIC)).frames["budget"]
    of_line = budget[budget["quantity"] == "line_energy_j_per_m"]
    used = set(of_line["input"])
    assert {"material.c11_gpa", "material.c12_gpa", "material.c44_gpa"} <= used
    assert "material.poisson_ratio" not in used


@pytest.mark.parametrize("law", ["logarithmic", "logarithmic-inner"])
def test_a_logarithmic_law_agrees_with_the_constant_one_at_its_reference(
    tmp_path: Path, law: str
) -> None:
    # alpha(rho_ref) = alpha_ref: the density of a coupon, as reference, stays that density.
    plain = coldwork.process(STRIP).frames["coupons"].set_index("coupon_id")
    density = float(plain["dislocation_density_per_m2"]["CS30-1"])
    lines = f'law = "{law}"\nreference_density_per_m2 = {density!r}\n'
    coupons = coldwork.process(edited(tmp_path, hardening=lines)).frames["coupons"]
    found = coupons.set_index("coupon_id")["dislocation_density_per_m2"]
    assert_allclose(found["CS30-1"], density, rtol=1e-12)
    # alpha falls with density: denser coupons hold more than the constant law says, others less.
    assert found["CS40-1"] > plain["dislocation_density_per_m2"]["CS40-1"]
    assert found["CS10-1"] < plain["dislocation_density_per_m2"]["CS10-1"]


@pytest.mark.parametrize(
    ("section", "lines", "told"),
    [
        ("line_energy", 'elasticity = "anisotropic"\n', "slip_system: this key is missing"),
        ("line_energy", 'slip_system = "{111}<110>"\n', "slip_system: it cannot stand here"),
        (
            "line_energy",
            'elasticity = "anisotropic"\nslip_system = "{111}<111>"\n',
            "the direction does not lie in the plane",
        ),
        (
            "line_energy",
            'elasticity = "anisotropic"\nslip_system = "{0001}<11-20>"\n',
            "Miller indices, three each",
        ),
        ("hardening", 'law = "logarithmic"\n', "reference_density_per_m2: this key is missing"),
        (
            "hardening",
            "reference_density_per_m2 = 1e14\n",
            "reference_density_per_m2: it cannot stand here",
        ),
        ("hardening", 'law = "power"\n', "[hardening] law"),
    ],
)
def test_what_does_not_fit_is_refused_in_the_sheets_own_line(
    tmp_path: Path, section: str, lines: str, told: str
) -> None:
    message = refusal(edited(tmp_path, **{section: lines}))
    assert told in message
    assert "batch.toml, line " in message


def test_a_hexagonal_metal_with_cubic_constants_is_refused(tmp_path: Path) -> None:
    crystal = 'elasticity = "anisotropic"\nslip_system = "{0001}<11-20>"\n'
    message = refusal(edited(tmp_path, material='lattice = "hcp"\n', line_energy=crystal))
    assert "c13_gpa" in message
    assert "hcp" in message


def test_a_crystal_that_would_not_hold_together_is_refused(tmp_path: Path) -> None:
    message = refusal(edited(tmp_path, material="c12_gpa = 170.0\n", line_energy=ANISOTROPIC))
    assert "not stable" in message


def test_a_constant_of_the_other_lattice_is_refused(tmp_path: Path) -> None:
    message = refusal(edited(tmp_path, material="c33_gpa = 170.0\n", line_energy=ANISOTROPIC))
    assert "c33_gpa is given for a metal that is fcc" in message
