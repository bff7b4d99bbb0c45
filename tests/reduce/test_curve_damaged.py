"""Curves damaged at random: each is reduced or refused by a finding, and nothing is infinite."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray
from tests.reduce.made_curves import GEOMETRY, METALS, NOISY, Plan, recorded

from coldwork.reduce.curve import Curve, CurveResult, CurveSettings, Valued
from coldwork.reduce.curve_reduction import reduce_curve

FloatArray = NDArray[np.float64]
SEEDS = 120
BLOCKS = 6  # tests that the seeds are divided into


def plan_of(rng: np.random.Generator) -> Plan:
    """Few or many points, no noise or a lot, with or without toe and break."""

    def count(most: int) -> int:
        return int(np.exp(rng.uniform(np.log(3), np.log(most))))

    return replace(
        NOISY,
        elastic=count(300),
        knee=count(500),
        rest=count(800),
        end=rng.uniform(0.2, 1.6),
        noise_stress=float(rng.choice([0.0, 0.02e6, 0.2e6, 2e6, 10e6])),
        noise_strain=float(rng.choice([0.0, 1e-7, 3e-6, 3e-5, 3e-4])),
        toe=float(rng.choice([0.0, 1e-4, 2e-3])),
        toe_stress=float(rng.choice([0.5e6, 5e6, 30e6])),
        fracture=int(rng.integers(0, 30)),
        still=int(rng.integers(0, 60)),
    )


def gap(points: FloatArray, some: slice, _: np.random.Generator) -> FloatArray:
    points[FORCE, some] = np.nan
    return points


def dead(points: FloatArray, some: slice, rng: np.random.Generator) -> FloatArray:
    row = int(rng.integers(FORCE, LENGTH + 1))
    points[row, some] = points[row, some.start]
    return points


def stepped(points: FloatArray, _: slice, rng: np.random.Generator) -> FloatArray:
    row, step = (FORCE, 50.0) if rng.random() < 0.5 else (LENGTH, 1e-5)
    points[row] = np.round(points[row] / step) * step
    return points


def spike(points: FloatArray, some: slice, _: np.random.Generator) -> FloatArray:
    points[FORCE, some.start] *= 10.0
    return points


def wrong_sign(points: FloatArray, _: slice, rng: np.random.Generator) -> FloatArray:
    points[int(rng.integers(FORCE, LENGTH + 1))] *= -1.0
    return points


def wrong_unit(points: FloatArray, _: slice, rng: np.random.Generator) -> FloatArray:
    points[int(rng.integers(FORCE, LENGTH + 1))] *= 10.0 ** int(rng.integers(-6, 7))
    return points


def cut(points: FloatArray, some: slice, rng: np.random.Generator) -> FloatArray:
    return points[:, some.start :] if rng.random() < 0.5 else points[:, : some.stop]


def backwards(points: FloatArray, _: slice, __: np.random.Generator) -> FloatArray:
    points[FORCE:] = points[FORCE:, ::-1].copy()
    return points


def jump(points: FloatArray, some: slice, rng: np.random.Generator) -> FloatArray:
    points[LENGTH, some.start :] += rng.uniform(-1e-3, 1e-3)
    return points


FORCE, LENGTH = 1, 2  # rows, below the time
DAMAGES = (gap, dead, stepped, spike, wrong_sign, wrong_unit, cut, backwards, jump)


def damaged(curve: Curve, rng: np.random.Generator) -> Curve:
    """Up to three damages, one on the other."""
    assert curve.time is not None
    assert curve.force is not None
    assert curve.length is not None
    points = np.array([curve.time, curve.force, curve.length])
    for kind in rng.integers(0, len(DAMAGES), rng.integers(0, 4)):
        first = int(rng.integers(0, points.shape[1]))
        some = slice(first, int(rng.integers(first, points.shape[1])) + 1)
        points = DAMAGES[kind](points.copy(), some, rng)
    return Curve(points[0] if rng.random() < 0.8 else None, points[FORCE], points[LENGTH])


def settings_of(rng: np.random.Generator) -> CurveSettings:
    return CurveSettings(
        mode="compression" if rng.random() < 0.2 else "tension",
        strain_from="crosshead" if rng.random() < 0.2 else "extension",
        slope=115e9 if rng.random() < 0.1 else None,
        slope_u=1e9,
        offsets=(0.0005, 0.01),
        reported_strains=(0.002, 0.01, 0.1),
        fit=("voce", "hollomon"),
    )


def results(result: CurveResult) -> list[Valued]:
    single = (
        result.slope,
        result.toe_strain,
        result.upper_yield,
        result.lower_yield,
        result.tensile_strength,
        result.uniform_elongation,
        result.uniform_plastic_strain,
        result.work_to_uniform,
    )
    at = [v for p in result.at_strains for v in (p.flow_stress, p.work, p.rate)]
    return [v for v in (*single, *result.proof.values(), *at) if v is not None]


@pytest.mark.parametrize("block", range(BLOCKS))
def test_any_curve_gives_finite_results_or_a_finding(block: int) -> None:
    for seed in range(block, SEEDS, BLOCKS):
        rng = np.random.default_rng([30, seed])
        metal = list(METALS.values())[int(rng.integers(len(METALS)))]
        curve = damaged(recorded(metal, plan_of(rng), rng), rng)
        result = reduce_curve(curve, GEOMETRY, settings_of(rng))
        for valued in results(result):
            assert np.isfinite([valued.value, valued.u]).all(), seed
            assert valued.u_own >= 0.0, seed
        for fit in (*result.fits.values(), result.kocks_mecking):
            if fit is not None:
                assert np.isfinite(fit.parameters).all(), seed
                assert np.isfinite(fit.covariance).all(), seed
        if not result.proof:
            assert result.faults, seed
        assert curve.force is not None
        assert result.engineering_stress.shape == curve.force.shape
        for fault in result.faults:
            assert 0 <= fault.start <= fault.stop <= curve.force.size, seed
