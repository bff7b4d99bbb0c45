"""Noise-free curves against their closed forms: how the error falls with the spacing.

Truths come from ``made_curves``: the laws' own formulas, Considere's condition and the
parallel line solved to 15 digits, the work by integrals written out.
"""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose
from tests.reduce.made_curves import GEOMETRY, METALS, Metal, Plan, Voce, recorded

from coldwork.formulas.uniform_strain import voce_uniform_strain
from coldwork.reduce.curve import CurveResult, CurveSettings
from coldwork.reduce.curve_reduction import reduce_curve

SETTINGS = CurveSettings(
    reported_strains=(0.002, 0.01, 0.03), offsets=(0.002, 0.0001, 0.01), fit=("voce",)
)
FINEST = Plan().finer(40)  # 200,000 points
ROUNDING = 2e-10  # below this a relative error is made of rounding and no longer falls


def errors(metal: Metal, plan: Plan) -> dict[str, float]:
    """Relative error of every result that has a closed form."""
    result = reduce_curve(recorded(metal, plan), GEOMETRY, SETTINGS)
    assert result.faults == ()
    pairs = compared(result, metal)
    return {name: abs(found / truth - 1.0) for name, (found, truth) in pairs.items()}


def compared(result: CurveResult, metal: Metal) -> dict[str, tuple[float, float]]:
    """Found and true, by name."""
    assert result.slope is not None
    assert result.tensile_strength is not None
    assert result.uniform_elongation is not None
    assert result.uniform_plastic_strain is not None
    assert result.work_to_uniform is not None
    assert result.kocks_mecking is not None
    pairs = {
        "slope": (result.slope.value, metal.slope),
        "R_m": (result.tensile_strength.value, metal.strength),
        "A_g": (result.uniform_elongation.value, metal.elongation),
        "uniform strain": (result.uniform_plastic_strain.value, metal.uniform),
        "work": (result.work_to_uniform.value, metal.work(metal.uniform)),
    }
    for offset in SETTINGS.offsets:
        pairs[f"R_p {offset}"] = (result.proof[offset].value, metal.proof(offset))
    for point in result.at_strains:
        law, strain = metal.law, point.strain
        pairs[f"stress {strain}"] = (point.flow_stress.value, float(law.stress(strain)))
        pairs[f"work {strain}"] = (point.work.value, metal.work(strain))
        pairs[f"rate {strain}"] = (point.rate.value, law.rate(strain))
    if isinstance(metal.law, Voce):
        theta, limit = result.kocks_mecking.parameters
        pairs["theta_0"] = (theta, metal.law.kappa * metal.law.limit)
        pairs["sigma_s"] = (limit, metal.law.limit)
    return pairs


@pytest.mark.parametrize("name", METALS)
def test_the_error_falls_with_the_square_of_the_spacing(name: str) -> None:
    metal, plans = METALS[name], [Plan().finer(factor) for factor in (1, 2, 4)]
    coarse, finer, finest = (errors(metal, plan) for plan in plans)
    for result in coarse:
        if result == "R_m":
            continue
        assert finer[result] < max(coarse[result] / 3.5, ROUNDING), result
        assert finest[result] < max(finer[result] / 3.5, ROUNDING), result
    # The greatest recorded point lies somewhere within half a step of the top.
    for plan, found in zip(plans, (coarse, finer, finest), strict=True):
        half = 0.5 * (plan.end * metal.uniform - 0.01) / plan.rest
        beside = metal.engineering(np.array([metal.uniform - half, metal.uniform + half]))[0]
        assert found["R_m"] <= 1.0 - beside.min() / metal.strength + 1e-15


@pytest.mark.parametrize("name", METALS)
def test_two_hundred_thousand_points_are_good_to_seven_digits(name: str) -> None:
    for result, error in errors(METALS[name], FINEST).items():
        assert error < 1e-7, result


@pytest.mark.parametrize("name", ["copper", "rolled copper", "steel"])
def test_the_closed_form_of_voce_is_where_the_curve_is_greatest(name: str) -> None:
    # formulas.uniform_strain against the root found in made_curves.
    metal = METALS[name]
    assert isinstance(metal.law, Voce)
    start, limit, kappa = metal.law.start, metal.law.limit, metal.law.kappa
    found = voce_uniform_strain(start, limit, kappa * limit, 1.0 / metal.slope)
    assert_allclose(found, metal.uniform, rtol=1e-12)


def test_the_true_curve_is_the_law_itself_up_to_considere() -> None:
    metal = METALS["steel"]
    result = reduce_curve(recorded(metal, Plan()), GEOMETRY, SETTINGS)
    strain, stress = result.true_plastic_strain, result.true_stress
    plastic = strain > 1e-5
    assert_allclose(stress[plastic], metal.law.stress(strain[plastic]), rtol=1e-12)
    assert strain[-1] <= metal.uniform
    assert strain[-1] > metal.uniform - 2e-4  # one step of this curve


def test_the_rate_along_the_curve_is_the_laws() -> None:
    metal = METALS["steel"]
    assert isinstance(metal.law, Voce)
    rate = reduce_curve(recorded(metal, Plan()), GEOMETRY, SETTINGS).rate
    assert rate is not None
    line = metal.law.kappa * (metal.law.limit - rate.stress)  # the Kocks-Mecking plot
    assert_allclose(rate.rate, line, rtol=1e-7)
    assert np.all(np.diff(rate.strain) > 0.0)


def test_scales_as_it_must() -> None:
    # Force three times as large: every stress, slope and work with it, no strain; a coupon
    # twice as long with twice the extension: nothing at all.
    curve = recorded(METALS["copper"], Plan())
    assert curve.force is not None
    assert curve.length is not None
    plain = compared(reduce_curve(curve, GEOMETRY, SETTINGS), METALS["copper"])
    more = replace(curve, force=3.0 * curve.force)
    longer = replace(curve, length=2.0 * curve.length)
    tripled = compared(reduce_curve(more, GEOMETRY, SETTINGS), METALS["copper"])
    same = compared(
        reduce_curve(longer, replace(GEOMETRY, gauge_length=0.1), SETTINGS), METALS["copper"]
    )
    for name, (value, _) in plain.items():
        factor = 1.0 if name in {"A_g", "uniform strain"} else 3.0
        assert_allclose(tripled[name][0], factor * value, rtol=1e-9, err_msg=name)
        assert_allclose(same[name][0], value, rtol=1e-9, err_msg=name)
