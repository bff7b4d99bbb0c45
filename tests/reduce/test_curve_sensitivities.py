"""What the machine's errors do to every result: held against curves that really have them."""

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose
from tests.reduce.made_curves import GEOMETRY, METALS, NOISY, Plan, recorded

from coldwork.reduce.curve import (
    AREA,
    EXTENSION,
    FORCE,
    SLOPE,
    Curve,
    CurveResult,
    CurveSettings,
    Fit,
    Valued,
)
from coldwork.reduce.curve_reduction import reduce_curve

SETTINGS = CurveSettings(
    reported_strains=(0.002, 0.03),
    fit=("voce",),
    force_u_rel=0.005,
    extension_u_rel=0.01,
    area_u_rel=0.003,
)
STATED = replace(SETTINGS, slope=110e9, slope_u=3e9)
STEP = 1e-4


def results(result: CurveResult) -> Iterator[tuple[str, Valued]]:
    """Every single result, by name."""
    for name in (
        "slope",
        "toe_strain",
        "tensile_strength",
        "uniform_elongation",
        "total_elongation_at_max",
        "uniform_plastic_strain",
        "work_to_uniform",
    ):
        yield name, getattr(result, name)
    yield "proof", result.proof[0.002]
    for point in result.at_strains:
        yield f"flow {point.strain}", point.flow_stress
        yield f"work {point.strain}", point.work
        yield f"rate {point.strain}", point.rate


def laws(result: CurveResult) -> Iterator[Fit]:
    yield result.fits["voce"]
    assert result.kocks_mecking is not None
    yield result.kocks_mecking


def changed(curve: Curve, name: str, by: float) -> tuple[Curve, float]:
    """The curve as a machine would have written it that errs by a relative amount."""
    assert curve.force is not None
    assert curve.length is not None
    if name == FORCE:
        return replace(curve, force=curve.force * (1.0 + by)), GEOMETRY.area
    if name == EXTENSION:
        return replace(curve, length=curve.length * (1.0 + by)), GEOMETRY.area
    return curve, GEOMETRY.area * (1.0 + by)


@pytest.mark.parametrize("settings", [SETTINGS, STATED], ids=["fitted slope", "stated slope"])
@pytest.mark.parametrize("name", [FORCE, EXTENSION, AREA])
def test_sensitivities_are_those_of_a_machine_that_errs(name: str, settings: CurveSettings) -> None:
    # Without noise every window is the same few points, so that the whole reduction, its
    # decisions included, is a smooth function of the curve.
    curve = recorded(METALS["copper"], Plan(toe=5e-5, toe_stress=0.5e6))
    ends = []
    for by in (STEP, -STEP):
        erring, area = changed(curve, name, by)
        ends.append(reduce_curve(erring, replace(GEOMETRY, area=area), settings))
    plain = reduce_curve(curve, GEOMETRY, settings)
    pairs = zip(results(plain), results(ends[0]), results(ends[1]), strict=True)
    for (label, valued), (_, high), (_, low) in pairs:
        expected = (high.value - low.value) / (2.0 * STEP)
        scale = 1e-3 * abs(valued.value)
        assert_allclose(valued.sensitivities[name], expected, rtol=2e-3, atol=scale, err_msg=label)
        u = {FORCE: 0.005, EXTENSION: 0.01, AREA: 0.003}[name]
        assert_allclose(valued.u_shared[name], u * valued.sensitivities[name], rtol=1e-12)
    fits = zip(laws(plain), laws(ends[0]), laws(ends[1]), strict=True)
    for fit, high_fit, low_fit in fits:
        moved = (high_fit.parameters - low_fit.parameters) / (2.0 * STEP)
        u = {FORCE: 0.005, EXTENSION: 0.01, AREA: 0.003}[name]
        assert_allclose(
            fit.u_shared[name],
            u * moved,
            rtol=5e-3,
            atol=u * 2e-3 * np.abs(fit.parameters).max(),
            err_msg=fit.law,
        )


def test_with_a_fitted_slope_stresses_go_with_the_force_and_strains_stay() -> None:
    # Without a stated slope the reduction has no stress of its own: all scales with force.
    curve = recorded(METALS["steel"], NOISY, np.random.default_rng(1))
    result = reduce_curve(curve, GEOMETRY, SETTINGS)
    for label, valued in results(result):
        is_strain = label in {
            "toe_strain",
            "uniform_elongation",
            "total_elongation_at_max",
            "uniform_plastic_strain",
        }
        expected = 0.0 if is_strain else valued.value
        scale = 1e-6 * abs(valued.value)
        assert_allclose(valued.sensitivities[FORCE], expected, rtol=1e-6, atol=scale)
        assert_allclose(valued.sensitivities[AREA], -expected, rtol=1e-6, atol=scale)
        assert SLOPE not in valued.sensitivities


def test_a_stated_slope_brings_its_own_uncertainty() -> None:
    curve = recorded(METALS["copper"], Plan())
    plain = reduce_curve(curve, GEOMETRY, STATED)
    steps = [reduce_curve(curve, GEOMETRY, replace(STATED, slope=110e9 + by)) for by in (1e7, -1e7)]
    pairs = zip(results(plain), results(steps[0]), results(steps[1]), strict=True)
    for (label, valued), (_, high), (_, low) in pairs:
        expected = (high.value - low.value) / 2e7
        assert_allclose(
            valued.sensitivities[SLOPE],
            expected,
            rtol=5e-3,
            atol=1e-3 * abs(valued.value) / 110e9,
            err_msg=label,
        )
        assert_allclose(valued.u_shared[SLOPE], 3e9 * valued.sensitivities[SLOPE])
    assert plain.slope is not None
    assert (plain.slope.value, plain.slope.u_own) == (110e9, 0.0)
    assert plain.slope_range == (0, 0)


def test_u_is_the_root_of_own_and_shared_squares() -> None:
    valued = Valued(10.0, 3.0, {}, {"a": -4.0, "b": 12.0})
    assert valued.u == 13.0


def test_a_parameter_of_a_fit_is_a_result_too() -> None:
    curve = recorded(METALS["steel"], NOISY, np.random.default_rng(2))
    line = reduce_curve(curve, GEOMETRY, SETTINGS).kocks_mecking
    assert line is not None
    valued = line.valued("saturation_stress")
    assert valued.value == line.parameters[1]
    assert valued.u_own == pytest.approx(np.sqrt(line.covariance[1, 1]))
    assert valued.u_shared[FORCE] == line.u_shared[FORCE][1]
