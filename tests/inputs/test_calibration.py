"""Numbers from a calibration: components, conditions, seals, and every refusal."""

from collections.abc import Callable
from hashlib import sha256
from math import inf
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.inputs.sheet import read_method
from coldwork.jobs.evaluate import inputs_of
from coldwork.measured import Measured

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]

BODY = """\
# Written by hand.

[calibration]
schema_version = "1.0.0"
id = "cu-1"
kind = "taylor"
version = "0.1.0"

[data]
path = "pairs.csv"
sha256 = "{data}"
points = 12

[fit]
chi_squared = 9.3
degrees_of_freedom = 10
probability = 0.5
verdict = "as stated"
enlargement = 1.0

[[parameters]]
key = "strength.baseline_mpa"
value = 50.0
u = 2.0
unit = "MPa"
covariance = [4.0, -0.48]

[[parameters]]
key = "hardening.slope_n_per_m"
value = 10.3
u = 0.3
unit = "N/m"
covariance = [-0.48, 0.09]

[range]
quantity = "flow_stress_mpa"
low = 120.0
high = 420.0
"""
TAKEN = '{ from = "../cal.toml" }'


def sealed(body: str = BODY, data: str = "0" * 64) -> str:
    body = body.replace("{data}", data)
    return f'{body}\n[seal]\nsha256 = "{sha256(body.encode()).hexdigest()}"\n'


@pytest.fixture
def taking(sheet: str) -> str:
    return (
        sheet.replace("{ value = 50.0, u = 15.0 }", TAKEN)
        + f"\n[hardening]\nslope_n_per_m = {TAKEN}\n"
    )


def test_both_constants_share_their_components(write: Write, taking: str) -> None:
    method = read_method(write(taking, **{"cal.toml": sealed()}))
    values, spreads = inputs_of(method)
    baseline, slope = values["strength.baseline_mpa"], values["hardening.slope_n_per_m"]
    assert isinstance(baseline, Measured)
    assert isinstance(slope, Measured)
    names = ["calibration:cu-1:1", "calibration:cu-1:2"]
    assert set(baseline.sensitivities) | set(slope.sensitivities) == set(names)
    rows = [[float(x.sensitivities.get(n, 0.0)) for n in names] for x in (baseline, slope)]
    # Sums over the components give back the covariance that the file states, in SI.
    assert_allclose(
        np.array(rows) @ np.array(rows).T, [[4e12, -0.48e6], [-0.48e6, 0.09]], rtol=1e-12
    )
    assert rows[0][1] == 0.0  # Cholesky, in the file's order
    for name in names:
        assert (spreads[name].u, spreads[name].shared) == (1.0, True)
        assert spreads[name].degrees_of_freedom == inf
        assert name not in values
    assert method.inputs["strength.baseline_mpa"].u == 2e6
    assert method.document["inputs"]["hardening.slope_n_per_m"]["origin"] == "calibration"  # type: ignore[index]
    assert dict(method.sheets)["../cal.toml"] == method.calibrations[0].digest


def test_one_of_the_two_alone_keeps_its_own_uncertainty(write: Write, sheet: str) -> None:
    text = sheet + f"\n[hardening]\nslope_n_per_m = {TAKEN}\n"
    values, _ = inputs_of(read_method(write(text, **{"cal.toml": sealed()})))
    slope = values["hardening.slope_n_per_m"]
    assert isinstance(slope, Measured)
    total = sum(float(c) ** 2 for c in slope.sensitivities.values())
    assert_allclose(total, 0.09, rtol=1e-12)


def test_where_the_fit_was_too_bad_the_freedom_is_that_of_the_fit(
    write: Write, taking: str
) -> None:
    body = BODY.replace("enlargement = 1.0", "enlargement = 1.5")
    method = read_method(write(taking, **{"cal.toml": sealed(body)}))
    assert method.inputs["calibration:cu-1:1"].degrees_of_freedom == 10.0


def test_a_lognormal_constant_that_stands_alone_is_an_input_itself(
    write: Write, sheet: str
) -> None:
    start, rest = BODY.index("[[parameters]]"), BODY.index("[range]")
    alone = (
        '[[parameters]]\nkey = "line_energy.core_radius_b"\nvalue = 0.8\nu = 0.08\n'
        'factor = 1.1\nunit = "1"\ncovariance = [0.0064]\n\n'
    )
    text = sheet + f"\n[line_energy]\ncore_radius_b = {TAKEN}\n"
    body = BODY[:start] + alone + BODY[rest:]
    found = read_method(write(text, **{"cal.toml": sealed(body)})).inputs
    assert found["line_energy.core_radius_b"].shape == "lognormal"
    assert found["line_energy.core_radius_b"].factor == 1.1
    assert not any(name.startswith("calibration:") for name in found)


def test_line_ends_do_not_break_the_seal(write: Write, taking: str, tmp_path: Path) -> None:
    folder = write(taking)
    (tmp_path / "cal.toml").write_bytes(sealed().replace("\n", "\r\n").encode())
    assert read_method(folder).calibrations[0].id == "cu-1"


def test_data_beside_it_must_be_those_that_it_was_found_from(
    write: Write, refusals: Refusals, taking: str
) -> None:
    data = "coupon_id\n"
    good = sealed(data=sha256(data.encode()).hexdigest())
    assert read_method(write(taking, **{"cal.toml": good, "pairs.csv": data})).calibrations
    (cause,) = refusals(taking, **{"cal.toml": good, "pairs.csv": data + "C1\n"})
    assert "the digest does not match: pairs.csv has been changed" in cause


def test_a_changed_digit_breaks_the_seal(refusals: Refusals, taking: str) -> None:
    (cause,) = refusals(taking, **{"cal.toml": sealed().replace("10.3\n", "10.4\n")})
    assert "the digest does not match: the file has been changed" in cause
    assert "calibrate again" in cause


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("covariance = [-0.48, 0.09]", "covariance = [-0.48]", "rows of another length"),
        ("covariance = [-0.48, 0.09]", "covariance = [0.48, 0.09]", "no covariance"),
        ("-0.48", "-0.61", "no covariance"),
        ('kind = "taylor"', 'kind = "tailor"', "'tailor' cannot be chosen"),
        ("value = 10.3", "value = -10.3", "impossible here"),
        ('unit = "N/m"', 'unit = "1"', "impossible here"),
        ("hardening.slope_n_per_m", "hardening.coefficient", "does not give hardening.slope"),
    ],
)
def test_a_file_that_does_not_fit(
    refusals: Refusals, taking: str, old: str, new: str, said: str
) -> None:
    causes = refusals(taking, **{"cal.toml": sealed(BODY.replace(old, new))})
    assert any(said in cause for cause in causes), causes


@pytest.mark.parametrize(
    ("taken", "said"),
    [
        ('{ from = "../cal.toml", u = 3.0 }', "u stands beside from"),
        ("{ from = 3 }", "from names no file"),
        ('{ from = "../none.toml" }', "there is no such file"),
        ('{ from = "/cal.toml" }', "absolute path"),
    ],
)
def test_a_sheet_that_takes_it_wrongly(
    refusals: Refusals, sheet: str, taken: str, said: str
) -> None:
    text = sheet.replace("{ value = 50.0, u = 15.0 }", taken)
    causes = refusals(text, **{"cal.toml": sealed()})
    assert any(said in cause for cause in causes), causes


def test_conditions_must_hold(refusals: Refusals, taking: str) -> None:
    body = BODY + '\n[conditions]\n"material.name" = "nickel"\n'
    causes = refusals(taking, **{"cal.toml": sealed(body)})
    assert any("holds for material.name = 'nickel', not 'copper'" in cause for cause in causes)


def test_ranges_that_do_not_overlap(refusals: Refusals, taking: str) -> None:
    text = taking.replace("../cal.toml", "../other.toml", 1)
    other = BODY.replace("cu-1", "cu-2").replace("low = 120.0", "low = 430.0")
    other = other.replace("high = 420.0", "high = 500.0")
    causes = refusals(text, **{"cal.toml": sealed(), "other.toml": sealed(other)})
    assert any("The ranges do not overlap" in cause for cause in causes), causes


def test_two_files_of_one_name(refusals: Refusals, taking: str) -> None:
    text = taking.replace("../cal.toml", "../other.toml", 1)
    causes = refusals(text, **{"cal.toml": sealed(), "other.toml": sealed()})
    assert any("are both calibration cu-1" in cause for cause in causes)
