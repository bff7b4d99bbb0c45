"""Curves of other kinds: compression, crosshead, true stress, stated slope, the neck, holes."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from numpy.testing import assert_allclose
from tests.reduce.made_curves import (
    COPPER,
    GEOMETRY,
    NOISY,
    STEEL,
    Metal,
    Plan,
    Voce,
    points,
    recorded,
)
from tests.reduce.made_faults import BY_CROSSHEAD, MACHINE

from coldwork.errors import InvalidArgument
from coldwork.formulas.tensile import true_strain, true_stress
from coldwork.reduce.curve import Curve, CurveSettings, FaultKind, Geometry
from coldwork.reduce.curve_compression import GREATEST_BARREL
from coldwork.reduce.curve_reduction import reduce_curve

PRESSED = Geometry(gauge_length=12e-3, area=np.pi / 4 * 8e-3**2)  # 1.5 diameters high
COMPRESSION = CurveSettings(mode="compression", reported_strains=(0.002, 0.05, 0.2))


def pressed(sign: float, noise: float = 0.0) -> Curve:
    """Steel in compression: the same law of true stress against true strain, as magnitudes."""
    law, slope = STEEL.law, STEEL.slope
    limit = 0.0017  # near enough to where the law begins; the gap is far below the noise
    elastic = np.linspace(0.0, limit, 500, endpoint=False)
    start = -np.log1p(-limit) - limit * (1.0 - limit)
    plastic = np.linspace(start, 0.4, 4000)
    sigma = law.stress(plastic)
    total = plastic + sigma / slope
    e = np.concatenate([elastic, -np.expm1(-total)])
    s = np.concatenate([slope * elastic, sigma * np.exp(total)])
    rng = np.random.default_rng(21)
    s = s + noise * rng.standard_normal(s.size)
    return Curve(force=sign * s * PRESSED.area, length=sign * e * PRESSED.gauge_length)


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_compression_gives_the_same_law_either_sign(sign: float) -> None:
    # The law that the curve was made from; the elastic line and the limit are not quite one.
    result = reduce_curve(pressed(sign), PRESSED, COMPRESSION)
    assert result.faults == ()
    for point in result.at_strains:
        truth = float(STEEL.law.stress(point.strain))
        assert_allclose(point.flow_stress.value, truth, rtol=1e-4)
        assert_allclose(point.rate.value, STEEL.law.rate(point.strain), rtol=1e-4)
    assert [p.strain for p in result.at_strains] == [0.002, 0.05, 0.2]
    assert result.slope is not None
    assert_allclose(result.slope.value, STEEL.slope, rtol=1e-9)


def test_compression_has_no_greatest_force() -> None:
    result = reduce_curve(pressed(1.0, 0.2e6), PRESSED, COMPRESSION)
    assert result.tensile_strength is None
    assert result.uniform_elongation is None
    assert result.work_to_uniform is None
    assert result.true_plastic_strain[-1] > 0.39  # to the end
    assert result.kocks_mecking is not None
    theta, limit = result.kocks_mecking.parameters
    assert_allclose([theta, limit], [650e6 * 11.0, 650e6], rtol=2e-3)


def test_barrelling_and_friction_are_told_from_the_dimensions() -> None:
    height = 1.0 - 0.33  # of the first height, the smallest here
    even = PRESSED.area / height
    fine = replace(PRESSED, final_area=1.05 * even)
    assert reduce_curve(pressed(1.0), fine, COMPRESSION).faults == ()
    barrel = replace(PRESSED, final_area=1.3 * even)
    (fault,) = reduce_curve(pressed(1.0), barrel, COMPRESSION).faults
    assert fault.kind == FaultKind.BARRELLING
    assert fault.limit == GREATEST_BARREL
    assert fault.value == pytest.approx(1.3, rel=0.02)
    curve = pressed(1.0)
    assert curve.length is not None
    for ratio in (0.5, 3.0):
        length = ratio * 8e-3
        squat = replace(PRESSED, gauge_length=length)
        scaled = replace(curve, length=curve.length * length / PRESSED.gauge_length)
        (fault,) = reduce_curve(scaled, squat, COMPRESSION).faults
        assert fault.kind == FaultKind.FRICTION
        assert fault.value == pytest.approx(ratio)


def test_a_crossheads_slope_is_the_machines_and_only_taken_off() -> None:
    # Coupon and machine in series: 1 / slope is the sum. The plastic side does not change.
    s, e = points(STEEL, Plan())
    travel = (e + MACHINE * s) * GEOMETRY.gauge_length
    curve = Curve(force=s * GEOMETRY.area, length=travel)
    settings = replace(BY_CROSSHEAD, reported_strains=(0.03,))
    result = reduce_curve(curve, GEOMETRY, settings)
    assert result.faults == ()
    assert not result.slope_is_modulus
    assert result.slope is not None
    assert_allclose(1.0 / result.slope.value, 1.0 / STEEL.slope + MACHINE, rtol=1e-9)
    # What is neglected is the coupon's own elastic strain, 0.2 % of the true stress here.
    assert result.at_strains[0].flow_stress.value == pytest.approx(
        float(STEEL.law.stress(0.03)), rel=0.003
    )
    assert result.uniform_elongation is not None
    assert_allclose(result.uniform_elongation.value, STEEL.elongation, rtol=0.01)


def test_true_stress_and_strain_give_what_force_and_length_give() -> None:
    s, e = points(COPPER, Plan())
    settings = CurveSettings(strain_from=None, reported_strains=(0.01,))
    engineering = reduce_curve(
        Curve(stress=s, strain=e), Geometry(), replace(settings, stress_is="engineering")
    )
    true = reduce_curve(
        Curve(stress=true_stress(s, e), strain=true_strain(e)),
        Geometry(),
        replace(settings, stress_is="true"),
    )
    by_force = reduce_curve(
        recorded(COPPER, Plan()), GEOMETRY, replace(settings, strain_from="extension")
    )
    for other in (engineering, true):
        assert other.proof[0.002].value == pytest.approx(by_force.proof[0.002].value, rel=1e-10)
        assert other.at_strains[0].work.value == pytest.approx(
            by_force.at_strains[0].work.value, rel=1e-9
        )
        assert other.uniform_elongation is not None
        assert by_force.uniform_elongation is not None
        assert other.uniform_elongation.value == pytest.approx(
            by_force.uniform_elongation.value, rel=1e-9
        )


def test_the_neck_gives_one_more_point() -> None:
    # Mean stress F / A, strain ln(A0 / A), Bridgman's factor 1 / (2 ln 2) at a / R = 2.
    area = 8e-6
    radius = float(np.sqrt(area / np.pi))
    geometry = replace(GEOMETRY, final_area=area, neck_profile_radius=radius / 2.0)
    plan = replace(NOISY, noise_stress=0.0, noise_strain=0.0)
    curve = recorded(STEEL, plan)
    result = reduce_curve(curve, geometry, CurveSettings(bridgman=True, force_u_rel=0.01))
    assert result.neck is not None
    last = float(points(STEEL, plan)[0][-1]) * GEOMETRY.area
    assert_allclose(result.neck.strain, np.log(20.0 / 8.0), rtol=1e-12)
    assert_allclose(result.neck.mean_stress.value, last / area, rtol=1e-9)
    assert_allclose(result.neck.factor, 0.7213475, rtol=1e-6)
    flow = result.neck.flow_stress
    assert_allclose(flow.value, 0.7213475 * last / area, rtol=1e-6)
    assert_allclose(flow.u, 0.01 * flow.value, rtol=1e-3)


def test_nothing_past_uniform_strain_is_reported_without_it() -> None:
    settings = CurveSettings(reported_strains=(0.1, 0.15, 0.16, 0.2))
    result = reduce_curve(recorded(STEEL, NOISY, np.random.default_rng(22)), GEOMETRY, settings)
    assert result.uniform_plastic_strain is not None
    assert 0.15 < result.uniform_plastic_strain.value < 0.16
    assert [p.strain for p in result.at_strains] == [0.1, 0.15]
    assert result.neck is None


def test_a_greatest_force_before_the_proof_stress_is_no_end_before_yield() -> None:
    # Drawn wire again, without noise: A_g below the offset, R_p0.2 past the greatest force.
    metal = Metal(118e9, Voce(390e6, 400e6, 3000.0))
    settings = CurveSettings(reported_strains=(0.001, 0.002))
    result = reduce_curve(recorded(metal, Plan(end=4.0)), GEOMETRY, settings)
    assert result.faults == ()
    assert result.uniform_elongation is not None
    assert_allclose(result.uniform_elongation.value, metal.elongation, rtol=1e-6)
    assert_allclose(result.proof[0.002].value, metal.proof(0.002), rtol=1e-9)
    assert [p.strain for p in result.at_strains] == [0.001]


def test_a_stated_range_of_the_fits_is_kept() -> None:
    settings = CurveSettings(fit=("voce", "hollomon"), fit_between=(0.02, 0.1))
    result = reduce_curve(recorded(STEEL, NOISY, np.random.default_rng(23)), GEOMETRY, settings)
    for fit in result.fits.values():
        assert fit.between == pytest.approx((0.02, 0.1), abs=2e-4)


def test_a_law_that_does_not_fit_says_so() -> None:
    # Hollomon on a Voce metal: its points lie off the law by far more than their noise.
    settings = CurveSettings(fit=("voce", "hollomon"))
    result = reduce_curve(recorded(STEEL, NOISY, np.random.default_rng(24)), GEOMETRY, settings)
    assert result.fits["voce"].misfit == pytest.approx(1.0, abs=0.15)
    assert result.fits["hollomon"].misfit > 5.0


def test_hollomon_is_found_where_it_is_the_law() -> None:
    # sigma = K eps^n above an elastic slope that is stated, since such a metal has no
    # straight part to fit.
    plastic = 0.3 * np.linspace(1e-3, 1.0, 6000) ** 3  # dense where it is steep
    sigma = 530e6 * plastic**0.3
    total = plastic + sigma / 115e9
    settings = CurveSettings(
        strain_from=None, stress_is="true", slope=115e9, fit=("hollomon",), fit_between=(0.02, 0.25)
    )
    result = reduce_curve(Curve(stress=sigma, strain=total), Geometry(), settings)
    # The toe is taken where 10 to 40 % of the proof stress lie: 3e-5 of plastic strain.
    assert_allclose(result.fits["hollomon"].parameters, [530e6, 0.3], rtol=2e-3)


def test_a_change_of_speed_is_told() -> None:
    curve = recorded(STEEL, Plan())
    assert curve.length is not None
    strain = curve.length / GEOMETRY.gauge_length
    fast = 0.02  # from there on four times as fast
    steps = np.diff(strain, prepend=0.0) / np.where(strain < fast, 1e-4, 4e-4)
    result = reduce_curve(replace(curve, time=np.cumsum(steps)), GEOMETRY, CurveSettings())
    rates = [change.strain_rate for change in result.rate_changes]
    assert_allclose(rates, [1e-4, 4e-4], rtol=0.02)
    turn = int(np.searchsorted(strain, fast))
    assert abs(result.rate_changes[0].stop - turn) < 0.03 * strain.size


@pytest.mark.parametrize(
    ("change", "settings", "message"),
    [
        ({"force": None}, {}, "either force and length or stress and strain"),
        ({"stress": np.zeros(5035), "strain": np.zeros(5035)}, {}, "either force and length"),
        ({"time": np.zeros(3)}, {}, "one point per row"),
        ({}, {"mode": "torsion"}, "mode must be one of tension, compression"),
        ({}, {"strain_from": None}, "strain_from must be one of extension, crosshead"),
        ({}, {"slope_between": (0.4, 0.1)}, "slope_between must rise within 0 and 1"),
        ({}, {"bridgman": True}, "final_area and neck_profile_radius must be given"),
    ],
)
def test_refuses_what_contradicts_itself(
    change: dict[str, Any], settings: dict[str, Any], message: str
) -> None:
    curve = replace(recorded(STEEL, NOISY, np.random.default_rng(25)), **change)
    with pytest.raises(InvalidArgument, match=message):
        reduce_curve(curve, GEOMETRY, replace(CurveSettings(), **settings))


def test_stress_and_strain_say_what_they_are() -> None:
    s, e = points(STEEL, Plan())
    with pytest.raises(InvalidArgument, match="stress_is must be one of engineering, true"):
        reduce_curve(Curve(stress=s, strain=e), Geometry(), CurveSettings())
