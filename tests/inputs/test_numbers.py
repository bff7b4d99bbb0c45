"""Numbers of a sheet, bare and with their uncertainty."""

from collections.abc import Callable
from math import exp, inf, log
from pathlib import Path

import pytest

from coldwork.inputs.keys import WINDOWS, number_specs
from coldwork.inputs.quantity import Input, lognormal_u
from coldwork.inputs.sheet import read_method
from coldwork.units import UNITS

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]
BASELINE = "{ value = 50.0, u = 15.0 }"


@pytest.fixture
def baseline(write: Write, sheet: str) -> Callable[[str], Input]:
    def read(written: str) -> Input:
        method = read_method(write(sheet.replace(BASELINE, written)))
        return method.inputs["strength.baseline_mpa"]

    return read


Baseline = Callable[[str], Input]


def test_a_bare_number_is_exact(baseline: Baseline) -> None:
    for written in ("50", "50.0", "5e1"):
        found = baseline(written)
        assert (found.value, found.u, found.unit) == (50e6, 0.0, "MPa")  # 1 MPa = 1e6 Pa
        assert (found.shape, found.factor, found.shared) == ("normal", None, True)
        assert found.degrees_of_freedom == inf
        assert found.origin == "sheet"
        assert found.name == "strength.baseline_mpa"
        assert found.relative_u == 0.0


def test_a_number_with_everything(baseline: Baseline) -> None:
    found = baseline(
        '{ value = 50, u = 15, shape = "uniform", shared = false,'
        ' degrees_of_freedom = 4, source = "annealed, 12 coupons" }'
    )
    assert found == Input(
        name="strength.baseline_mpa",
        value=50e6,
        u=15e6,
        unit="MPa",
        shape="uniform",
        factor=None,
        shared=False,
        degrees_of_freedom=4.0,
        source="annealed, 12 coupons",
        origin="sheet",
    )
    assert found.relative_u == pytest.approx(0.3)


def test_a_factor_makes_a_number_lognormal(baseline: Baseline) -> None:
    # u = value ln factor: design page, batch sheet; 50 MPa * ln 1.2 = 9.116 MPa.
    found = baseline("{ value = 50.0, factor = 1.2 }")
    assert found.shape == "lognormal"
    assert found.factor == 1.2
    assert found.u == pytest.approx(9.11607784e6, rel=1e-8)
    assert lognormal_u(50e6, 1.2) == pytest.approx(50e6 * log(1.2), rel=1e-14)
    assert baseline('{ value = 50.0, factor = 1.2, shape = "lognormal" }') == found


def test_a_lognormal_number_may_give_u_instead(baseline: Baseline) -> None:
    found = baseline('{ value = 50.0, u = 10.0, shape = "lognormal" }')
    assert found.factor == pytest.approx(exp(0.2), rel=1e-14)
    assert found.u == 10e6


@pytest.mark.parametrize(
    ("written", "words"),
    [
        ('"50"', "'50' is not a number"),
        ("true", "true is not a number"),
        ("[50]", "[50] is not a number"),
        ("2027-01-01", "is not a number"),
        ("inf", "not a number that can be computed with"),
        ("nan", "not a number that can be computed with"),
        ("1e999", "not a number that can be computed with"),
        (f"1{'0' * 400}", "not a number that can be computed with"),
        (f"0x{'F' * 5000}", "not a number that can be computed with"),
        ("-1", "must not be negative"),
        ("1e6", "must lie between 0 and 100000 MPa"),
        ("{ u = 15.0 }", "it has no value"),
        ("{}", "it has no value"),
        ("{ value = true }", "true is not a number"),
        ("{ value = 50, u = -1 }", "is not a standard uncertainty"),
        ('{ value = 50, u = "5" }', "is not a standard uncertainty"),
        ("{ value = 50, u = 1e300 }", "is not a standard uncertainty"),
        ("{ value = 50, u = inf }", "not a number that can be computed with"),
        ("{ value = 50, u = 5, factor = 1.1 }", "u and factor are both given"),
        ("{ value = 50, factor = 1 }", "is not a factor above 1"),
        ("{ value = 50, factor = 0.9 }", "is not a factor above 1"),
        ("{ value = 50, factor = 1e9 }", "is not a factor above 1"),
        ("{ value = 0, factor = 1.2 }", "0 cannot be lognormal"),
        ('{ value = 0, u = 1, shape = "lognormal" }', "0 cannot be lognormal"),
        ('{ value = 50, shape = "lognormal" }', "has a shape and nothing that is spread"),
        ('{ value = 50, u = 0, shape = "lognormal" }', "needs its spread"),
        ('{ value = 1, u = 90000, shape = "lognormal" }', "needs its spread"),
        ('{ value = 50, shape = "uniform" }', "has a shape and nothing that is spread"),
        ('{ value = 50, factor = 1.2, shape = "normal" }', "with a factor cannot be normal"),
        ('{ value = 50, u = 5, shape = "norml" }', "nearest known name is 'normal'"),
        ("{ value = 50, u = 5, shape = 3 }", "3 is not a shape"),
        ("{ value = 50, u = 5, shared = 1 }", "1 is neither true nor false"),
        ("{ value = 50, u = 5, degrees_of_freedom = 0.5 }", "degrees of freedom"),
        ("{ value = 50, u = 5, degrees_of_freedom = inf }", "can be computed with"),
        ("{ value = 50, u = 5, source = 7 }", "7 is not text"),
        ("{ value = 50, uu = 5 }", "a number has no part 'uu'"),
        ("{ vale = 50 }", "nearest known name is 'value'"),
    ],
)
def test_refuses_a_bad_number(refusals: Refusals, sheet: str, written: str, words: str) -> None:
    causes = refusals(sheet.replace(BASELINE, written))
    assert any(words in cause for cause in causes), causes
    assert all(c.startswith("batch.toml, line 14, key [strength] baseline_mpa") for c in causes)


def test_every_number_of_the_schema_has_a_window_and_a_known_unit() -> None:
    for key, spec in number_specs().items():
        assert key[-1] in WINDOWS
        assert spec.unit in UNITS
        assert spec.low < spec.high


@pytest.mark.parametrize(
    ("line", "words"),
    [
        ("shear_modulus_gpa = 44000.0", "must lie between 0.1 and 2000 GPa"),
        ("shear_modulus_gpa = -44.0", "must be greater than zero"),
        ("shear_modulus_gpa = 0", "must be greater than zero"),
        ("poisson_ratio = 0.5", "must lie between -0.99 and 0.499"),
        ("burgers_vector_nm = 2.5e-10", "must lie between 0.05 and 5 nm"),
        ("mass_density_kg_per_m3 = 8.96", "must lie between 100 and 50000 kg/m3"),
        ("molar_mass_g_per_mol = 0.0635", "must lie between 1 and 500 g/mol"),
    ],
)
def test_a_number_in_the_wrong_unit_is_noticed(
    refusals: Refusals, sheet: str, line: str, words: str
) -> None:
    text = sheet.replace("shear_modulus_gpa = { value = 44.0, u = 2.5 }", line)
    assert any(words in cause for cause in refusals(text))
