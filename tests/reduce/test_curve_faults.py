"""Faults of a test: each planted one is found, told apart, and nothing else is."""

from dataclasses import replace

import numpy as np
import pytest
from tests.reduce.made_curves import COPPER, GEOMETRY, NOISY, STEEL, recorded
from tests.reduce.made_faults import (
    CLEAN,
    PLANTED,
    clean_to_the_break,
    extensometer_off,
    grip_slip,
    lueders,
    saturation,
    time_standing,
    unloading_loop,
)

from coldwork.reduce.curve import CurveSettings, FaultKind, Geometry
from coldwork.reduce.curve_machine_faults import (
    GREATEST_STRESS,
    LEAST_STRESS,
    OFF_POINTS,
    SATURATED_POINTS,
    STANDING_POINTS,
)
from coldwork.reduce.curve_reduction import LEAST_POINTS, reduce_curve
from coldwork.reduce.curve_test_faults import SLIP_DROP

SEEDS = 4
STRAINS = (0.002, 0.01, 0.03, 0.1)


@pytest.mark.parametrize("name", PLANTED)
def test_a_planted_fault_is_found_and_nothing_else(name: str) -> None:
    for seed in range(SEEDS):
        made = PLANTED[name](np.random.default_rng([1, seed]))
        result = reduce_curve(made.curve, GEOMETRY, made.settings)
        assert made.kind is not None
        assert result.found(made.kind), seed
        assert {fault.kind for fault in result.faults} <= {made.kind} | made.may


@pytest.mark.parametrize("name", CLEAN)
def test_nothing_is_found_on_a_clean_curve(name: str) -> None:
    for seed in range(SEEDS):
        made = CLEAN[name](np.random.default_rng([2, seed]))
        assert reduce_curve(made.curve, GEOMETRY, made.settings).faults == ()


@pytest.mark.parametrize("seed", [0, 1, 7, 10])
def test_the_tail_of_a_neck_is_no_break_and_a_toe_is_no_slip(seed: int) -> None:
    made = clean_to_the_break(np.random.default_rng([3, seed]))
    assert reduce_curve(made.curve, GEOMETRY, made.settings).faults == ()


def test_a_finding_says_where_by_points_of_the_file() -> None:
    made = time_standing(np.random.default_rng(3))
    assert made.curve.time is not None
    (fault,) = reduce_curve(made.curve, GEOMETRY, made.settings).faults
    stands = np.flatnonzero(np.diff(made.curve.time) == 0.0)
    assert (fault.start, fault.stop) == (stands[0], stands[-1] + 2)
    assert fault.value == fault.stop - fault.start
    assert fault.limit == STANDING_POINTS


def test_missing_points_do_not_shift_where() -> None:
    made = time_standing(np.random.default_rng(3))
    assert made.curve.force is not None
    (plain,) = reduce_curve(made.curve, GEOMETRY, made.settings).faults
    force = made.curve.force.copy()
    force[[5, 6, 40]] = np.nan
    holed = reduce_curve(replace(made.curve, force=force), GEOMETRY, made.settings)
    (fault,) = (f for f in holed.faults if f.kind == FaultKind.TIME_STANDING)
    assert (fault.start, fault.stop) == (plain.start, plain.stop)
    assert np.isnan(holed.engineering_stress[[5, 6, 40]]).all()
    assert holed.engineering_stress.size == force.size


def test_a_loop_is_cut_out_and_changes_no_result() -> None:
    seed = 4
    made = unloading_loop(np.random.default_rng(seed))
    clean = recorded(STEEL, NOISY, np.random.default_rng(seed))
    found = reduce_curve(made.curve, GEOMETRY, made.settings)
    plain = reduce_curve(clean, GEOMETRY, made.settings)
    for name in ("slope", "uniform_elongation", "work_to_uniform"):
        one, other = getattr(found, name), getattr(plain, name)
        assert abs(one.value - other.value) < 4.0 * np.hypot(one.u_own, other.u_own), name


def test_slip_is_told_from_unloading_by_its_suddenness() -> None:
    slip = grip_slip(np.random.default_rng(5))
    loop = unloading_loop(np.random.default_rng(5))
    assert not reduce_curve(slip.curve, GEOMETRY, slip.settings).found(FaultKind.UNLOADING_LOOP)
    assert not reduce_curve(loop.curve, GEOMETRY, loop.settings).found(FaultKind.GRIP_SLIP)
    (fault,) = reduce_curve(slip.curve, GEOMETRY, slip.settings).faults
    assert fault.value > fault.limit
    assert fault.limit == pytest.approx(SLIP_DROP * STEEL.strength, rel=0.01)


def test_a_knife_edge_that_jumps_past_yield_makes_no_plateau() -> None:
    curve = recorded(COPPER, NOISY, np.random.default_rng(5))
    assert curve.length is not None
    past = np.arange(curve.length.size) > 775
    jumped = replace(curve, length=curve.length + 0.0028 * GEOMETRY.gauge_length * past)
    (fault,) = reduce_curve(jumped, GEOMETRY, CurveSettings()).faults
    assert fault.kind == FaultKind.EXTENSOMETER_SLIP
    assert fault.value == pytest.approx(0.0028, rel=0.02)


def test_past_an_extensometer_that_was_taken_off_no_strain_is_used() -> None:
    made = extensometer_off(np.random.default_rng(6))
    result = reduce_curve(made.curve, GEOMETRY, made.settings)
    (fault,) = result.faults
    assert fault.value >= fault.limit >= OFF_POINTS
    assert result.uniform_elongation is None
    assert result.work_to_uniform is None
    assert result.tensile_strength is not None  # the force is still good
    assert abs(result.tensile_strength.value / STEEL.strength - 1.0) < 0.01
    assert result.proof[0.002].value == pytest.approx(STEEL.proof(0.002), rel=1e-3)


def test_past_a_force_that_stood_at_its_end_nothing_is_told() -> None:
    made = saturation(np.random.default_rng(6))
    result = reduce_curve(made.curve, GEOMETRY, replace(made.settings, reported_strains=STRAINS))
    (fault,) = result.faults
    assert fault.kind == FaultKind.SATURATION
    assert result.tensile_strength is None
    assert result.uniform_elongation is None
    assert np.isnan(result.tensile_strength_bias)
    assert 0 < len(result.at_strains) < len(STRAINS)
    for point in result.at_strains:
        truth = float(STEEL.law.stress(point.strain))
        assert abs(point.flow_stress.value - truth) < 4.0 * point.flow_stress.u_own
    line = result.kocks_mecking
    assert line is not None
    assert line.misfit < 1.5  # nothing of the stretch at one force is in it
    assert (
        abs(line.valued("saturation_stress").value - 650e6)
        < 4.0 * line.valued("saturation_stress").u_own
    )


def test_an_extensometer_at_the_end_of_its_range_leaves_the_force_good() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(6))
    assert curve.length is not None
    at_end = replace(curve, length=np.minimum(curve.length, 0.05 * GEOMETRY.gauge_length))
    result = reduce_curve(at_end, GEOMETRY, CurveSettings())
    assert result.found(FaultKind.SATURATION)
    assert result.uniform_elongation is None
    assert result.tensile_strength is not None
    assert abs(result.tensile_strength.value / STEEL.strength - 1.0) < 0.01


def test_a_yield_point_gives_its_three_results() -> None:
    seed = 7
    rng = np.random.default_rng(seed)
    length, peak = rng.uniform(0.008, 0.03), rng.uniform(0.02, 0.12)  # as `lueders` draws
    made = lueders(np.random.default_rng(seed))
    result = reduce_curve(made.curve, GEOMETRY, made.settings)
    s, e = STEEL.engineering(np.linspace(0.0, 0.05, 100_001))
    level = float(np.interp(STEEL.limit + length, e, s))
    assert result.upper_yield is not None
    assert result.lower_yield is not None
    assert result.yield_elongation is not None
    assert result.upper_yield.value == pytest.approx(level * (1.0 + peak), rel=3e-3)
    assert result.lower_yield.value == pytest.approx(level, rel=3e-3)
    assert result.yield_elongation.value == pytest.approx(length, abs=0.006)
    assert result.tensile_strength is not None
    assert result.tensile_strength.value == pytest.approx(STEEL.strength, rel=3e-3)


def test_a_metal_that_hardens_steadily_has_no_yield_point() -> None:
    result = reduce_curve(
        recorded(STEEL, NOISY, np.random.default_rng(8)), GEOMETRY, CurveSettings()
    )
    assert result.upper_yield is None
    assert result.lower_yield is None
    assert result.yield_elongation is None


def test_too_few_points_are_not_reduced() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(9))
    assert curve.force is not None
    assert curve.length is not None
    few = replace(curve, time=None, force=curve.force[:19], length=curve.length[:19])
    result = reduce_curve(few, GEOMETRY, CurveSettings())
    (fault,) = result.faults
    assert fault.kind == FaultKind.TOO_FEW_POINTS
    assert (fault.value, fault.limit) == (19.0, LEAST_POINTS)
    assert result.slope is None
    assert result.proof == {}


def test_a_dead_channel_gives_a_finding_and_no_result() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(10))
    assert curve.length is not None
    dead = replace(curve, length=np.zeros_like(curve.length))
    result = reduce_curve(dead, GEOMETRY, CurveSettings())
    assert result.found(FaultKind.FEW_ELASTIC_POINTS)
    assert result.slope is None


def test_a_clock_of_whole_seconds_does_not_stand_still() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(11))
    assert curve.time is not None
    coarse = replace(curve, time=np.floor(curve.time))  # 20 points a second
    assert reduce_curve(coarse, GEOMETRY, CurveSettings()).faults == ()


def test_coarse_digits_are_not_saturation() -> None:
    # Force in steps of 2 N, 0.1 MPa: runs of one reading lie on the flat top.
    curve = recorded(STEEL, NOISY, np.random.default_rng(12))
    assert curve.force is not None
    stepped = replace(curve, force=np.round(curve.force / 2.0) * 2.0)
    assert reduce_curve(stepped, GEOMETRY, CurveSettings()).faults == ()


def test_the_limits_are_the_named_ones() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(13))
    for area, limit in ((GEOMETRY.area * 1e4, LEAST_STRESS), (2e-7, GREATEST_STRESS)):
        result = reduce_curve(curve, replace(GEOMETRY, area=area), CurveSettings())
        (fault,) = (f for f in result.faults if f.kind == FaultKind.STRESS_IMPOSSIBLE)
        assert fault.limit == limit
        assert fault.unit == "Pa"
    assert SATURATED_POINTS == 10


def test_findings_stand_in_the_order_of_their_kinds() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(14))
    assert curve.force is not None
    assert curve.time is not None
    time = curve.time.copy()
    time[2000:] -= 3.0
    bad = replace(curve, force=curve.force + 0.1 * curve.force.max(), time=time)
    kinds = [f.kind for f in reduce_curve(bad, GEOMETRY, CurveSettings()).faults]
    assert kinds == [FaultKind.ZERO_OFFSET, FaultKind.TIME_BACKWARD]


def test_geometry_is_needed_for_force_and_length() -> None:
    curve = recorded(STEEL, NOISY, np.random.default_rng(15))
    with pytest.raises(ValueError, match="gauge_length must be given"):
        reduce_curve(curve, Geometry(), CurveSettings())
