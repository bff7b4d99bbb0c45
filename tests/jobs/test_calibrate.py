"""`calibrate`: lines and radii found again, what the file says, and every refusal."""

import tomllib
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from odrpack import odr_fit
from typer.testing import CliRunner

import coldwork
from coldwork.cli import app
from coldwork.errors import BatchRefused, ResultsNotWritten, UsageError
from coldwork.inputs.calibration import read_calibration
from coldwork.jobs.calibrate import calibrate
from coldwork.jobs.calibrated import Options
from coldwork.jobs.calibrated_plot import picture_of
from coldwork.plots.calibration import draw

SAMPLE = Path(__file__).parents[2] / "sample_data"
PAIRS = SAMPLE / "copper-calibration" / "pairs.csv"
STRIP = SAMPLE / "copper-strip"
Table = Callable[[str], Path]


@pytest.fixture
def table(tmp_path: Path) -> Table:
    def written(text: str) -> Path:
        path = tmp_path / "pairs.csv"
        path.write_text(text, encoding="utf-8")
        return path

    return written


def test_the_strip_of_the_sample_is_found_again(tmp_path: Path) -> None:
    # The truth of the scenario: baseline 50 MPa, M alpha G b = 3.06 * 0.30 * 44e9 * 0.2556e-9.
    found = calibrate(PAIRS, Options("strip", "taylor"), tmp_path / "c.toml")
    truth = np.array([50.0, 3.06 * 0.30 * 44e9 * 0.2556e-9])
    off = np.array([c.value for c in found.constants]) - truth
    assert off @ np.linalg.solve(found.covariance, off) < 9.21  # 99 % of honest fits
    assert (found.low, found.high) == (84.9, 367.0)


def test_against_a_library_of_orthogonal_distances(tmp_path: Path) -> None:
    found = calibrate(PAIRS, Options("strip", "taylor"), tmp_path / "c.toml")
    rho, u_rho, stress, u = np.loadtxt(PAIRS, delimiter=",", skiprows=1, usecols=(1, 2, 3, 4)).T
    root = np.sqrt(rho) / 1e6
    theirs = odr_fit(
        lambda x, beta: beta[0] + beta[1] * x,
        root,
        stress,
        beta0=np.array([40.0, 11.0]),
        weight_x=(0.5 * u_rho / rho * root) ** -2,
        weight_y=u**-2,
        diff_scheme="central",
        sstol=1e-14,
        partol=1e-14,
    )
    assert_allclose([c.value for c in found.constants], theirs.beta, rtol=1e-6)
    assert_allclose(found.fit.chi_squared, theirs.sum_square, rtol=1e-8)


def test_the_file_says_what_was_found(tmp_path: Path) -> None:
    into = tmp_path / "c.toml"
    options = Options("strip", "taylor", material="copper")
    found = calibrate(PAIRS, options, into)
    read = read_calibration("c.toml", tmp_path)
    assert [p.key for p in read.parameters] == ["strength.baseline_mpa", "hardening.slope_n_per_m"]
    assert_allclose(read.covariance, found.covariance, rtol=0)
    assert read.conditions == {"material.name": "copper"}
    assert (into.parent / read.data).resolve() == PAIRS.resolve()
    again = tmp_path / "again.toml"
    calibrate(PAIRS, options, again)
    assert again.read_bytes() == into.read_bytes()


def test_hall_petch_and_relative_uncertainties(tmp_path: Path, table: Table) -> None:
    # sigma = 25 + 0.11 / sqrt(D): exact points give the constants back.
    grains = [4.0, 10.0, 25.0, 64.0]
    rows = [f"G{d:g},{25 + 0.11 / (d * 1e-6) ** 0.5:.17g},{d}" for d in grains]
    data = table("\n".join(["coupon_id,flow_stress_mpa,grain_size_um", *rows]))
    relative = {"flow_stress_mpa": 0.02, "grain_size_um": 0.05}
    options = Options("hp", "hall-petch", relative)
    found = calibrate(data, options, tmp_path / "c.toml")
    assert_allclose([c.value for c in found.constants], [25.0, 0.11], rtol=1e-9)
    assert found.fit.verdict == "too good"
    assert "share an error" in found.text()


@pytest.mark.parametrize(
    ("scale", "area", "factor"),
    # Pressure over the area that counts, over the hardness number in kgf/mm^2 (ISO 6507-1).
    [("HV", "contact", 9.80665), ("HV", "projected", 9.80665 / np.sin(np.deg2rad(68.0)))],
)
def test_constraint_factor_and_intercept(
    tmp_path: Path, table: Table, scale: str, area: str, factor: float
) -> None:
    stresses = [120.0, 180.0, 240.0, 330.0]
    rows = [f"H{s:g},{s},1,{(2.9 * s + 12.0) / factor:.17g},0.5" for s in stresses]
    head = "coupon_id,flow_stress_mpa,u_flow_stress_mpa,hardness,u_hardness"
    options = Options("c", "hardness", scale=scale, area=area, strain=0.08)
    found = calibrate(table("\n".join([head, *rows])), options, tmp_path / "c.toml")
    assert [c.key for c in found.constants] == [
        "indentation.intercept_mpa",
        "indentation.constraint_factor",
    ]
    assert_allclose([c.value for c in found.constants], [12.0, 2.9], rtol=1e-8)
    conditions = tomllib.loads((tmp_path / "c.toml").read_text())["conditions"]
    assert conditions == {"indentation.area": area, "indentation.representative_strain": 0.08}


def heats(radius: float) -> str:
    """Densities with heats by DESIGN relation 7 (Hirth and Lothe 1982), half screw half edge."""
    g, nu, b, mass = 44e9, 0.343, 0.2556e-9, 8960.0
    factor = g * (1.0 + 1.0 / (1.0 - nu)) / 2.0
    rows = []
    for density in (1e14, 2e14, 4e14, 8e14):
        reach = np.log(density**-0.5 / (radius * b))
        heat = density * factor * b**2 / (4.0 * np.pi) * reach / mass / 1e3
        rows.append(f"R{density:.0e},{density:.17g},{heat:.17g}")
    return "\n".join(["coupon_id,dislocation_density_per_m2,heat_j_per_g", *rows])


RELATIVE = {"dislocation_density_per_m2": 0.05, "heat_j_per_g": 0.03}


def test_the_core_radius_is_found_again(tmp_path: Path, table: Table) -> None:
    options = Options("r", "core-radius", RELATIVE, sheet=STRIP)
    found = calibrate(table(heats(0.7)), options, tmp_path / "c.toml")
    (radius,) = found.constants
    assert_allclose(radius.value, 0.7, rtol=1e-9)
    # ln r0 = ln R - q / (rho A): by hand for one point, four points of nearly equal weight.
    reach = np.log(4e14**-0.5 / (0.7 * 0.2556e-9))
    one = np.hypot(0.03 * reach, 0.05 * (reach - 0.5))
    assert_allclose(radius.u, 0.7 * one / 2.0, rtol=0.15)


@pytest.mark.parametrize("radius", [0.05, 2.5])
def test_a_radius_beyond_belief_is_refused(tmp_path: Path, table: Table, radius: float) -> None:
    options = Options("r", "core-radius", RELATIVE, sheet=STRIP)
    with pytest.raises(BatchRefused, match=r"A core is 0\.1 to 2"):
        calibrate(table(heats(radius)), options, tmp_path / "c.toml")
    assert not (tmp_path / "c.toml").exists()


def test_a_bad_point_is_named_and_kept(tmp_path: Path, table: Table) -> None:
    lines = PAIRS.read_text().splitlines()
    lines[6] = "TF06,1.79e+14,1.8e+13,290.1,2.3"
    found = calibrate(table("\n".join(lines)), Options("b", "taylor"), tmp_path / "c.toml")
    assert found.bad == "TF06"
    assert found.fit.verdict == "too bad"
    assert found.fit.enlargement > 1.0
    assert "coupon TF06 lies too far off" in found.text()
    assert len(found.points.ids) == 12
    assert len(draw(picture_of(found)).axes) == 3


HEAD = "coupon_id,dislocation_density_per_m2,u_dislocation_density_per_m2,flow_stress_mpa"
ROWS = "\nA,1e14,1e13,150,2\nB,2e14,2e13,200,2\nC,3e14,3e13,230,2\n"


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (HEAD + ",u_flow_stress_mpa\nA,1e14,1e13,150,2\nB,2e14,2e13,200,2\n", "there are 2 points"),
        (HEAD + "\nA,1e14,1e13,150\nB,2e14,2e13,200\nC,3e14,3e13,230\n", "no scatter is given"),
        (HEAD + ",u_flow_stress_mpa" + ROWS.replace("200,2", "200,"), "no scatter is given"),
        (HEAD + ",u_flow_stress_mpa" + ROWS.replace("200,2", ",2"), "the cell is empty"),
        (HEAD + ",u_flow_stress_mpa" + ROWS.replace("200,2", "2OO,2"), "not a number"),
        (HEAD + ",u_flow_stress_mpa" + ROWS.replace("B,", "A,"), "listed again"),
        (HEAD + ",u_flow_stress_mpa" + ROWS.replace("2e14,", "1e14,").replace("3e14,", "1e14,"),
         "x must not be the same"),
        (HEAD + ",u_flow_stress_mpa" + ROWS.replace("230,", "330,"), "baseline_mpa comes out as"),
        ("coupon_id,flow_stress_mpa\nA,1\nB,2\nC,3\n", "_per_m2 is missing"),
        ("coupon_id,stress\nA,1\n", "stress"),
    ],
)  # fmt: skip
def test_tables_that_are_refused(tmp_path: Path, table: Table, text: str, said: str) -> None:
    with pytest.raises(BatchRefused, match=said):
        calibrate(table(text), Options("c", "taylor"), tmp_path / "c.toml")
    assert not (tmp_path / "c.toml").exists()


@pytest.mark.parametrize(
    ("options", "into", "said"),
    [
        (Options("a b", "taylor"), "c.toml", "is no name"),
        (Options("c", "tailor"), "c.toml", "no calibration is called"),
        (Options("c", "taylor"), "c.csv", "is a .toml file"),
        (Options("c", "hardness"), "c.toml", "say --strain"),
        (Options("c", "hardness", scale="HRB", strain=0.08), "c.toml", "no hardness scale"),
        (Options("c", "hardness", scale="HK", strain=0.08), "c.toml", "not taken over the area"),
        (Options("c", "core-radius"), "c.toml", "say --sheet"),
        (Options("c", "taylor", {"flow_stress_mpa": 2.0}), "c.toml", "from 0 to below 1"),
        (Options("c", "taylor", {"hardness": 0.1}), "c.toml", "--relative-u names hardness"),
    ],
)
def test_options_that_do_not_fit(tmp_path: Path, options: Options, into: str, said: str) -> None:
    with pytest.raises(UsageError, match=said):
        calibrate(PAIRS, options, tmp_path / into)


def test_a_file_that_is_there_stays(tmp_path: Path) -> None:
    into = tmp_path / "c.toml"
    into.write_text("mine")
    with pytest.raises(ResultsNotWritten, match="is there already"):
        calibrate(PAIRS, Options("c", "taylor"), into)
    assert into.read_text() == "mine"


def test_from_the_command_line_to_a_batch(tmp_path: Path) -> None:
    into = tmp_path / "strip.toml"
    words = ["calibrate", str(PAIRS), "--kind", "taylor", "--into", str(into), "--json"]
    done = CliRunner().invoke(app, words)
    assert done.exit_code == 0, done.output
    assert into.with_suffix(".png").read_bytes().startswith(b"\x89PNG")
    assert into.with_suffix(".svg").exists()
    settings = [
        f'strength.baseline_mpa = {{ from = "{into.name}" }}',
        f'hardening.slope_n_per_m = {{ from = "{into.name}" }}',
    ]
    with pytest.MonkeyPatch.context() as here:
        here.chdir(tmp_path)
        found = coldwork.estimate("copper", stress_mpa=250.0, u=1.0, settings=settings)
    # rho = ((s - s0) / S)^2 by hand, with the covariance of s0 and S of the file.
    read = read_calibration(into.name, tmp_path)
    (s0, slope), c = (p.value for p in read.parameters), read.covariance
    rho = ((250.0 - s0) * 1e6 / slope) ** 2
    assert_allclose(found.dislocation_density_per_m2.value, rho, rtol=1e-12)
    by = np.array([-2.0 / (250.0 - s0), -2.0 / slope])
    u = rho * np.sqrt(by @ c @ by + (by[0] * 1.0) ** 2)
    assert_allclose(found.dislocation_density_per_m2.u, u, rtol=1e-12)
