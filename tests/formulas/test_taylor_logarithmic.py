"""The logarithmic law, both forms: a published table, root finding at 50 digits, the branch."""

import tomllib
from collections.abc import Callable
from pathlib import Path
from types import ModuleType

import mpmath  # type: ignore[import-untyped]
import numpy as np
import pytest
from mpmath import mpf
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas import taylor_logarithmic, taylor_logarithmic_inner
from coldwork.formulas.logarithmic_branch import solved_logarithm
from coldwork.formulas.taylor import taylor_density
from coldwork.formulas.taylor_logarithmic import (
    coefficient_logarithmic,
    greatest_stress_logarithmic,
    taylor_density_logarithmic,
    taylor_density_logarithmic_sensitivities,
    taylor_stress_logarithmic,
)
from coldwork.formulas.taylor_logarithmic_inner import (
    coefficient_logarithmic_inner,
    greatest_stress_logarithmic_inner,
    taylor_density_logarithmic_inner,
    taylor_stress_logarithmic_inner,
)

TABLE = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "taylor_coefficient.toml").read_text("utf-8")
)
B = TABLE["burgers_vector_nm"] * 1e-9
ALPHA, REFERENCE = TABLE["coefficient"], TABLE["reference_density_per_m2"]
COPPER = (3.06, ALPHA, 42.1e9, B, REFERENCE)

Function = Callable[..., NDArray[np.float64]]
FORMS = [
    pytest.param(taylor_logarithmic, "", 1.0, id="short"),
    pytest.param(taylor_logarithmic_inner, "_inner", ALPHA, id="inner"),
]


def of(module: ModuleType, name: str, tail: str) -> Function:
    function: Function = getattr(module, f"{name}_logarithmic{tail}")
    return function


@pytest.mark.parametrize(("density", "short", "inner"), TABLE["rows"])
def test_the_coefficient_in_printed_digits(density: float, short: float, inner: float) -> None:
    at = (density, ALPHA, B, REFERENCE)
    assert_allclose(coefficient_logarithmic(*at), short, atol=0.5e-4)
    assert_allclose(coefficient_logarithmic_inner(*at), inner, atol=0.5e-4)


@pytest.mark.parametrize("alpha", [0.35, 0.3, 1.0 / 3.0, 0.5])
@pytest.mark.parametrize("reference", [1e12, 3.7e13, 1e10])
def test_at_the_reference_it_is_the_given_coefficient_exactly(
    alpha: float, reference: float
) -> None:
    assert coefficient_logarithmic(reference, alpha, B, reference) == alpha
    assert coefficient_logarithmic_inner(reference, alpha, B, reference) == alpha


@pytest.mark.parametrize(("module", "tail", "share"), FORMS)
def test_it_falls_with_density(module: ModuleType, tail: str, share: float) -> None:
    # The invariants of the law: the coefficient falls all along, the stress rises up to the branch.
    density = np.geomspace(1e8, 0.999 / (np.e * share * B) ** 2, 400)
    assert np.all(np.diff(of(module, "coefficient", tail)(density, ALPHA, B, REFERENCE)) < 0.0)
    assert np.all(np.diff(of(module, "taylor_stress", tail)(density, *COPPER)) > 0.0)


def test_the_branch_ends_at_2e18_for_copper() -> None:
    # 1/(e b)^2 = 2.07e18 per m2 for b 0.256 nm, worked out apart from this package.
    top = (np.e * B) ** -2
    assert_allclose(top, TABLE["branch_point_per_m2"], atol=0.005e18)
    greatest = greatest_stress_logarithmic(*COPPER)
    assert_allclose(taylor_stress_logarithmic(top * (1.0 - 1e-12), *COPPER), greatest, rtol=1e-12)
    assert_allclose(taylor_density_logarithmic(greatest * (1 - 1e-13), *COPPER), top, rtol=2e-6)


@pytest.mark.parametrize(("module", "tail", "share"), FORMS)
def test_past_the_branch_there_is_nothing(module: ModuleType, tail: str, share: float) -> None:
    greatest = of(module, "greatest_stress", tail)(*COPPER)
    top = (np.e * share * B) ** -2
    inverse, forward = of(module, "taylor_density", tail), of(module, "taylor_stress", tail)
    found = inverse(greatest * np.array([1.0 - 1e-9, 1.0 + 1e-9, 2.0]), *COPPER)
    assert np.isnan(found).tolist() == [False, True, True]
    assert found[0] < top
    assert np.isnan(forward([0.999 * top, 1.001 * top, 1e3 * top], *COPPER)).tolist() == [
        False,
        True,
        True,
    ]
    slopes = getattr(module, f"taylor_density_logarithmic{tail}_sensitivities")
    for slope in slopes(greatest * np.array([0.5, 1.01]), *COPPER).values():
        assert np.isnan(slope).tolist() == [False, True]


@pytest.mark.parametrize(("module", "tail", "share"), FORMS)
def test_against_root_finding_over_eight_decades(
    module: ModuleType, tail: str, share: float
) -> None:
    # The law written out, its root found by mpmath at 50 digits from a bracket below the branch;
    # stresses from 1e-9 of the greatest to a tenth of it, and nearer to it to the conditioning:
    # an error of 4e-16 in the stress becomes 2 L/(L - 1) times that in the density.
    factor, alpha, modulus, b, reference = (mpf(x) for x in COPPER)
    length = b * mpf(share)
    greatest = float(of(module, "greatest_stress", tail)(*COPPER))
    shares = np.concatenate([np.geomspace(1e-9, 0.1, 25), [0.3, 0.7, 0.9, 0.99, 0.9999, 1 - 1e-7]])
    stress = greatest * shares
    found = of(module, "taylor_density", tail)(stress, *COPPER)
    with mpmath.workdps(50):
        scale = factor * alpha * modulus * b / mpmath.log(1 / (length * mpmath.sqrt(reference)))
        for s, rho in zip(stress, found, strict=True):

            def excess(log: mpf, s: float = s) -> mpf:
                root = mpmath.exp(-log) / length
                return mpmath.log(scale * root * log) - mpmath.log(mpf(float(s)))

            log = mpmath.findroot(excess, (mpf(1), mpf(60)), solver="anderson", tol=1e-40)
            exact = (mpmath.exp(-log) / length) ** 2
            off = abs(float(rho / exact - 1))
            if s <= 0.1 * greatest * (1.0 + 1e-12):
                assert off < 1e-12
            assert off < 4e-16 * (4.0 + 2.0 * float(log / (log - 1))), s


def test_the_logarithm_itself_over_the_whole_range() -> None:
    # Lambert's W_-1 of mpmath, from next to the branch point to where doubles end.
    ratio = np.concatenate(
        [np.exp(-1.0) * (1.0 - np.geomspace(1e-14, 0.5, 60)), 10.0 ** -np.arange(1, 308, 7.0)]
    )
    with mpmath.workdps(40):
        exact = [float(-mpmath.lambertw(-mpf(float(r)), -1).real) for r in ratio]
    found = solved_logarithm(ratio)
    apart = 3e-16 * (1.0 + np.array(exact) / (np.array(exact) - 1.0))
    assert np.all(np.abs(found / exact - 1.0) < apart)
    assert np.isnan(solved_logarithm(np.array([np.exp(-1.0) * 1.0000001, 1.0, 1e9, np.nan]))).all()


@pytest.mark.parametrize(("module", "tail", "share"), FORMS)
def test_there_and_back(module: ModuleType, tail: str, share: float) -> None:
    del share
    density = np.logspace(9, 17, 33)
    stress = of(module, "taylor_stress", tail)(density, *COPPER)
    assert_allclose(of(module, "taylor_density", tail)(stress, *COPPER), density, rtol=1e-13)


def test_a_coefficient_that_hardly_falls_is_a_constant_one() -> None:
    # Limit b -> 0 at a given M alpha G b: the logarithm's change is lost against itself.
    thin = 1e-200
    modulus = 42.1e9 * B / thin
    found = taylor_density_logarithmic(200e6, 3.06, ALPHA, modulus, thin, REFERENCE)
    constant = taylor_density(200e6, 3.06, ALPHA, 42.1e9, B)
    assert_allclose(found, constant, rtol=0.02)
    assert found > constant


def test_the_two_forms_meet_at_the_reference_alone() -> None:
    stress = taylor_stress_logarithmic(REFERENCE, *COPPER)
    assert_allclose(taylor_stress_logarithmic_inner(REFERENCE, *COPPER), stress, rtol=1e-15)
    assert taylor_density_logarithmic(200e6, *COPPER) > taylor_density_logarithmic_inner(
        200e6, *COPPER
    )
    assert greatest_stress_logarithmic_inner(*COPPER) > greatest_stress_logarithmic(*COPPER)


def test_a_relative_change_of_stress_counts_2_l_over_l_less_1() -> None:
    # At 1e14 per m2 and b 0.256 nm, L = ln(1/2.56e-3) = 5.967748: 2.402597 (by hand).
    stress = taylor_stress_logarithmic(1e14, *COPPER)
    slopes = taylor_density_logarithmic_sensitivities(stress, *COPPER)
    assert_allclose(slopes["stress"] * stress / 1e14, 2.402597, rtol=1e-6)


@pytest.mark.parametrize("function", [taylor_density_logarithmic, taylor_stress_logarithmic])
def test_refuses_a_reference_off_the_branch_by_name(function: Function) -> None:
    off = np.array([1e12, 3e18])
    with pytest.raises(InvalidArgument, match=r"^reference_density must be below .*\(1 bad of 2"):
        function(1e8, 3.06, ALPHA, 42.1e9, B, off)


@pytest.mark.parametrize("stress", [0.0, -1e6])
def test_a_stress_at_or_below_zero_has_no_density(stress: float) -> None:
    with pytest.raises(InvalidArgument, match=r"^stress must be positive"):
        taylor_density_logarithmic([1e8, stress], *COPPER)
