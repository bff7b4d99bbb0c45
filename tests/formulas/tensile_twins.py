"""Twins of the relations of tensile curves: stresses, strains, laws of hardening, the neck."""

import mpmath  # type: ignore[import-untyped]
from mpmath import mpf
from tests.formulas.twins import FORCE, LENGTH, ONE, STRESS, Case, Dimensions

__all__ = ["TENSILE"]

AREA: Dimensions = (0, 2, 0, 0, 0)


def grown(strain: mpf, start: mpf, limit: mpf, theta: mpf) -> mpf:
    """Solve d sigma / d eps = theta (1 - sigma / limit) from the start, by its time constant."""
    constant = limit / theta
    return limit + (start - limit) * mpmath.exp(-strain / constant)


TENSILE: dict[str, Case] = {
    "engineering_stress": Case(
        lambda force, area: force / area,
        {"force": FORCE, "area": AREA},
        STRESS,
        ((4.2e3, 20e-6), (-1e5, 3e-4)),
        sign_is_free=frozenset({"force"}),
    ),
    "engineering_strain": Case(
        lambda extension, gauge_length: (gauge_length + extension) / gauge_length - 1,
        {"extension": LENGTH, "gauge_length": LENGTH},
        ONE,
        ((12e-3, 50e-3), (-3e-3, 9e-3)),
        sign_is_free=frozenset({"extension"}),
    ),
    "true_stress": Case(
        lambda engineering_stress, engineering_strain: (
            engineering_stress + engineering_stress * engineering_strain
        ),
        {"engineering_stress": STRESS, "engineering_strain": ONE},
        STRESS,
        ((2.1e8, 0.3), (-4e8, -0.25), (5e7, 1e-4)),
        sign_is_free=frozenset({"engineering_stress", "engineering_strain"}),
    ),
    "true_strain": Case(
        lambda engineering_strain: mpmath.log(1 + engineering_strain),
        {"engineering_strain": ONE},
        ONE,
        ((0.3,), (-0.25,), (1e-5,)),
        sign_is_free=frozenset({"engineering_strain"}),
    ),
    "true_plastic_strain": Case(
        lambda true_strain, true_stress, slope: (slope * true_strain - true_stress) / slope,
        {"true_strain": ONE, "true_stress": STRESS, "slope": STRESS},
        ONE,
        ((0.26, 2.7e8, 115e9), (-0.1, -4e8, 70e9)),
        sign_is_free=frozenset({"true_strain", "true_stress"}),
    ),
    "voce_stress": Case(
        lambda strain, yield_stress, saturation_stress, initial_hardening: grown(
            strain, yield_stress, saturation_stress, initial_hardening
        ),
        {
            "strain": ONE,
            "yield_stress": STRESS,
            "saturation_stress": STRESS,
            "initial_hardening": STRESS,
        },
        STRESS,
        (
            (0.12, 5e7, 3.2e8, 1.7e9),
            (0.01, 3e8, 3.8e8, 2.3e10),
            (-0.002, 3.6e8, 3.2e8, 1.7e9),
        ),
        sign_is_free=frozenset({"strain", "yield_stress"}),
    ),
    "hollomon_stress": Case(
        lambda strain, coefficient, exponent: (
            coefficient * mpmath.exp(exponent * mpmath.log(strain))
        ),
        {"strain": ONE, "coefficient": STRESS, "exponent": ONE},
        STRESS,
        ((0.12, 5.3e8, 0.45), (2e-3, 8e8, 0.1), (1.3, 3e8, 0.25)),
    ),
    "bridgman_factor": Case(
        lambda neck_radius, profile_radius: (
            neck_radius
            / (neck_radius + 2 * profile_radius)
            / mpmath.log((neck_radius + 2 * profile_radius) / (2 * profile_radius))
        ),
        {"neck_radius": LENGTH, "profile_radius": LENGTH},
        ONE,
        ((2e-3, 3e-3), (1.5e-3, 40e-3), (4e-3, 1e-3)),
    ),
    "hardening_above_baseline": Case(
        lambda initial_hardening, saturation_stress, baseline: (
            initial_hardening - initial_hardening / saturation_stress * baseline
        ),
        {"initial_hardening": STRESS, "saturation_stress": STRESS, "baseline": STRESS},
        STRESS,
        ((1.7e9, 3.7e8, 5e7), (2.2e9, 4e8, -1e7)),
        sign_is_free=frozenset({"baseline"}),
    ),
    "saturation_above_baseline": Case(
        lambda saturation_stress, baseline: saturation_stress - baseline,
        {"saturation_stress": STRESS, "baseline": STRESS},
        STRESS,
        ((3.7e8, 5e7), (4e8, -1e7)),
        sign_is_free=frozenset({"baseline"}),
    ),
}
