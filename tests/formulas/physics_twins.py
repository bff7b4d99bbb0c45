"""Twins of the laws beyond the simple chain: crystals' lines apart, all that a sheet may name."""

import mpmath  # type: ignore[import-untyped]
from mpmath import mpf
from tests.formulas.twins import (
    DENSITY,
    KELVIN,
    LENGTH,
    LINE,
    ONE,
    PER_LENGTH,
    RATE,
    STRESS,
    TIME,
    Case,
)

__all__ = ["PHYSICS"]

BOLTZMANN, GAS = mpf("1.380649e-23"), mpf("8.31446261815324")  # SI brochure 2019, exact
# With k and R held fixed, an energy over either counts as a temperature.
ENERGY = KELVIN

LOGARITHMIC = {
    "taylor_factor": ONE,
    "coefficient": ONE,
    "shear_modulus": STRESS,
    "burgers_vector": LENGTH,
    "reference_density": DENSITY,
}
COPPER = (3.06, 0.35, 42.1e9, 0.256e-9, 1e12)
IRON = (2.75, 0.25, 82e9, 0.2482e-9, 3e13)


def half_log(length: mpf, density: mpf) -> mpf:
    return -mpmath.log(length) - mpmath.log(density) / 2


def rising(length: mpf, ratio: mpf) -> mpf:
    """Density at which y ln(1/y) is a ratio, y = length sqrt(density): by Lambert's W_-1."""
    y = mpmath.exp(mpmath.lambertw(-ratio, -1).real)
    return (y / length) ** 2


def taylor_density_logarithmic(
    stress: mpf,
    taylor_factor: mpf,
    coefficient: mpf,
    shear_modulus: mpf,
    burgers_vector: mpf,
    reference_density: mpf,
) -> mpf:
    ratio = stress / (taylor_factor * coefficient * shear_modulus)
    return rising(burgers_vector, ratio * half_log(burgers_vector, reference_density))


def taylor_density_logarithmic_inner(
    stress: mpf,
    taylor_factor: mpf,
    coefficient: mpf,
    shear_modulus: mpf,
    burgers_vector: mpf,
    reference_density: mpf,
) -> mpf:
    length = coefficient * burgers_vector
    ratio = stress / (taylor_factor * shear_modulus)
    return rising(length, ratio * half_log(length, reference_density))


def taylor_stress_logarithmic(
    density: mpf,
    taylor_factor: mpf,
    coefficient: mpf,
    shear_modulus: mpf,
    burgers_vector: mpf,
    reference_density: mpf,
) -> mpf:
    alpha = coefficient * half_log(burgers_vector, density)
    alpha = alpha / half_log(burgers_vector, reference_density)
    return taylor_factor * alpha * shear_modulus * burgers_vector * mpmath.sqrt(density)


def taylor_stress_logarithmic_inner(
    density: mpf,
    taylor_factor: mpf,
    coefficient: mpf,
    shear_modulus: mpf,
    burgers_vector: mpf,
    reference_density: mpf,
) -> mpf:
    # As published, with the interaction coefficient a = alpha^2.
    a = coefficient**2
    at = -mpmath.log(burgers_vector * mpmath.sqrt(a * density))
    reference = -mpmath.log(burgers_vector * mpmath.sqrt(a * reference_density))
    alpha = mpmath.sqrt(a) * at / reference
    return taylor_factor * alpha * shear_modulus * burgers_vector * mpmath.sqrt(density)


def greatest_stress_logarithmic(
    taylor_factor: mpf,
    coefficient: mpf,
    shear_modulus: mpf,
    burgers_vector: mpf,
    reference_density: mpf,
) -> mpf:
    top = (mpmath.e * burgers_vector) ** -2
    return taylor_stress_logarithmic(
        top, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )


def greatest_stress_logarithmic_inner(
    taylor_factor: mpf,
    coefficient: mpf,
    shear_modulus: mpf,
    burgers_vector: mpf,
    reference_density: mpf,
) -> mpf:
    top = (mpmath.e * coefficient * burgers_vector) ** -2
    return taylor_stress_logarithmic_inner(
        top, taylor_factor, coefficient, shear_modulus, burgers_vector, reference_density
    )


def superposed_stress(excess: mpf, obstacle: mpf, exponent: mpf) -> mpf:
    if excess <= obstacle:
        return mpf("nan")
    return (excess**exponent - obstacle**exponent) ** (1 / exponent)


def interior_density(density: mpf, wall_fraction: mpf, density_ratio: mpf) -> mpf:
    # sqrt(rho_h) is the mean of the roots by volume, in units of sqrt(rho_c).
    mean = wall_fraction * mpmath.sqrt(density_ratio) + (1 - wall_fraction)
    return (mpmath.sqrt(density) / mean) ** 2


def shear_modulus_at(
    modulus: mpf,
    temperature: mpf,
    reference_temperature: mpf,
    slope: mpf,
    melting_point: mpf,
) -> mpf:
    # By way of the modulus at 300 K, as the book writes the law.
    at_300 = modulus / (1 + (reference_temperature - 300) / melting_point * slope)
    return at_300 + (temperature - 300) * slope * at_300 / melting_point


def thermal_stress(stress_at_zero: mpf, temperature: mpf, athermal_temperature: mpf) -> mpf:
    # The share of the barrier that heat supplies is T/T_0: (1 - s^(1/2))^(3/2) = T/T_0.
    share = temperature / athermal_temperature
    if share >= 1:
        return mpf(0)
    return stress_at_zero * (1 - mpmath.exp(2 * mpmath.log(share) / 3)) ** 2


def prior_work(
    strain: mpf,
    baseline: mpf,
    initial_stress: mpf,
    initial_hardening: mpf,
    saturation_stress: mpf,
) -> mpf:
    # The curve solves ds/de = theta_0 (1 - s/s_s); the work is the area below it.
    def stress(e: mpf) -> mpf:
        gone = mpmath.exp(-initial_hardening * e / saturation_stress)
        return baseline + initial_stress * gone + saturation_stress * (1 - gone)

    return mpmath.quad(stress, [0, strain], method="gauss-legendre")


def critical_bulge_radius(boundary_energy: mpf, net_pressure: mpf) -> mpf:
    return 2 * boundary_energy / net_pressure if net_pressure > 0 else mpf("nan")


def temperature_for_fraction(
    fraction: mpf, time: mpf, prefactor: mpf, activation_energy: mpf, exponent: mpf
) -> mpf:
    rate = (-mpmath.log(1 - fraction)) ** (1 / exponent) / time
    return activation_energy / (GAS * mpmath.log(prefactor / rate))


LINE_OF_DEPTH = {"depth": LENGTH, "characteristic_depth": LENGTH}
SQUARE_STRESS_LENGTH = (2, -1, -4, 0, 0)
REGIONS = {"wall_fraction": ONE, "stress_ratio": ONE}
REGIONS_BY_DENSITY = {"density": DENSITY, "wall_fraction": ONE, "density_ratio": ONE}

LAWS_OF_TAYLOR: dict[str, Case] = {
    "taylor_density_logarithmic": Case(
        taylor_density_logarithmic,
        {"stress": STRESS} | LOGARITHMIC,
        DENSITY,
        ((200e6, *COPPER), (5e6, *IRON), (1.5e9, *COPPER)),
    ),
    "taylor_density_logarithmic_inner": Case(
        taylor_density_logarithmic_inner,
        {"stress": STRESS} | LOGARITHMIC,
        DENSITY,
        ((200e6, *COPPER), (5e6, *IRON), (3.5e9, *COPPER)),
    ),
    "taylor_stress_logarithmic": Case(
        taylor_stress_logarithmic,
        {"density": DENSITY} | LOGARITHMIC,
        STRESS,
        ((1e15, *COPPER), (3e12, *IRON), (1e18, *COPPER)),
    ),
    "taylor_stress_logarithmic_inner": Case(
        taylor_stress_logarithmic_inner,
        {"density": DENSITY} | LOGARITHMIC,
        STRESS,
        ((1e15, *COPPER), (3e12, *IRON), (1e19, *COPPER)),
    ),
    "greatest_stress_logarithmic": Case(
        greatest_stress_logarithmic, LOGARITHMIC, STRESS, (COPPER, IRON)
    ),
    "greatest_stress_logarithmic_inner": Case(
        greatest_stress_logarithmic_inner, LOGARITHMIC, STRESS, (COPPER, IRON)
    ),
}

SMALL_INDENTS: dict[str, Case] = {
    "indentation_depth": Case(
        # The diagonal of a square is sqrt(2) its side; the faces stand 68 deg off the axis.
        lambda diagonal: diagonal / mpmath.sqrt(2) / 2 / mpmath.tan(68 * mpmath.pi / 180),
        {"diagonal": LENGTH},
        LENGTH,
        ((7e-6,), (3.1e-4,)),
    ),
    "size_effect_hardness": Case(
        lambda bulk_hardness, depth, characteristic_depth: mpmath.sqrt(
            bulk_hardness**2 + bulk_hardness**2 * characteristic_depth / depth
        ),
        {"bulk_hardness": STRESS} | LINE_OF_DEPTH,
        STRESS,
        ((0.581e9, 1e-6, 1.6e-6), (0.834e9, 2e-5, 0.464e-6)),
        zero_is_fine=frozenset({"characteristic_depth"}),
    ),
    "bulk_hardness_from_length": Case(
        lambda hardness, depth, characteristic_depth: mpmath.sqrt(
            hardness**2 * depth / (depth + characteristic_depth)
        ),
        {"hardness": STRESS} | LINE_OF_DEPTH,
        STRESS,
        ((0.9368e9, 1e-6, 1.6e-6), (0.85e9, 2e-5, 0.464e-6)),
        zero_is_fine=frozenset({"characteristic_depth"}),
    ),
    "bulk_hardness_from_strength": Case(
        lambda hardness, depth, strength: mpmath.sqrt((hardness**2 * depth - strength) / depth),
        {"hardness": STRESS, "depth": LENGTH, "strength": SQUARE_STRESS_LENGTH},
        STRESS,
        ((0.9368e9, 1e-6, 5.4e11), (0.85e9, 2e-5, 3.2e11)),
        sign_is_free=frozenset({"strength"}),
    ),
}

SUMS: dict[str, Case] = {
    "superposed_stress": Case(
        superposed_stress,
        {"excess": STRESS, "obstacle": STRESS, "exponent": ONE},
        STRESS,
        ((250e6, 90e6, 1.5), (91e6, 90e6, 1.97), (120e6, 40e6, 1.001), (3e8, 1e3, 1.2)),
        zero_is_fine=frozenset({"obstacle"}),
        sign_is_free=frozenset({"excess"}),
    ),
    "combined_stress": Case(
        lambda stress, obstacle, exponent: (
            (stress**exponent + obstacle**exponent) ** (1 / exponent)
        ),
        {"stress": STRESS, "obstacle": STRESS, "exponent": ONE},
        STRESS,
        ((250e6, 90e6, 1.5), (10e6, 90e6, 1.97), (120e6, 40e6, 1.001)),
        zero_is_fine=frozenset({"obstacle"}),
    ),
}

CELLS: dict[str, Case] = {
    "interior_stress": Case(
        lambda stress, wall_fraction, stress_ratio: (
            stress / (wall_fraction * stress_ratio + (1 - wall_fraction))
        ),
        {"stress": STRESS} | REGIONS,
        STRESS,
        ((200e6, 0.2, 3.0), (50e6, 0.45, 1.2)),
        zero_is_fine=frozenset({"wall_fraction"}),
    ),
    "wall_stress": Case(
        lambda stress, wall_fraction, stress_ratio: (
            stress / (wall_fraction + (1 - wall_fraction) / stress_ratio)
        ),
        {"stress": STRESS} | REGIONS,
        STRESS,
        ((200e6, 0.2, 3.0), (50e6, 0.45, 1.2)),
        zero_is_fine=frozenset({"wall_fraction"}),
    ),
    "stress_ratio": Case(
        lambda density_ratio: density_ratio ** (mpf(1) / 2),
        {"density_ratio": ONE},
        ONE,
        ((9.0,), (1.3,)),
    ),
    "interior_density": Case(
        interior_density,
        REGIONS_BY_DENSITY,
        DENSITY,
        ((1e15, 0.2, 9.0), (2e13, 0.45, 1.3)),
        zero_is_fine=frozenset({"wall_fraction"}),
    ),
    "wall_density": Case(
        lambda density, wall_fraction, density_ratio: (
            density_ratio * interior_density(density, wall_fraction, density_ratio)
        ),
        REGIONS_BY_DENSITY,
        DENSITY,
        ((1e15, 0.2, 9.0), (2e13, 0.45, 1.3)),
        zero_is_fine=frozenset({"wall_fraction"}),
    ),
    "mean_over_regions": Case(
        lambda wall, interior, wall_fraction: interior + wall_fraction * (wall - interior),
        {"wall": DENSITY, "interior": DENSITY, "wall_fraction": ONE},
        DENSITY,
        ((5e15, 6e14, 0.2), (2e13, 1e13, 0.45)),
        zero_is_fine=frozenset({"wall", "interior", "wall_fraction"}),
    ),
    "mean_line_energy": Case(
        lambda stored_energy, density: stored_energy / density,
        {"stored_energy": STRESS, "density": DENSITY},
        LINE,
        ((1.2e6, 6e14), (4e4, 3e13)),
    ),
    "effective_outer_radius": Case(
        lambda arrangement, density: arrangement * density ** (-mpf(1) / 2),
        {"arrangement": ONE, "density": DENSITY},
        LENGTH,
        ((0.7, 1e15), (3.0, 1e13)),
    ),
}

TEMPERATURE: dict[str, Case] = {
    "shear_modulus_at": Case(
        shear_modulus_at,
        {
            "modulus": STRESS,
            "temperature": ONE,  # not in a smaller kelvin: 300 K stand in the law
            "reference_temperature": ONE,
            "slope": ONE,
            "melting_point": ONE,
        },
        STRESS,
        ((48.3e9, 473.15, 293.15, -0.54, 1356.0), (82e9, 77.0, 295.0, -1.09, 1810.0)),
        sign_is_free=frozenset({"slope"}),
    ),
    "thermal_stress": Case(
        thermal_stress,
        {"stress_at_zero": STRESS, "temperature": KELVIN, "athermal_temperature": KELVIN},
        STRESS,
        ((400e6, 77.0, 340.0), (60e6, 293.15, 700.0)),
        zero_is_fine=frozenset({"stress_at_zero"}),
    ),
    "athermal_temperature": Case(
        lambda activation_energy, reference_rate, strain_rate: (
            activation_energy / BOLTZMANN / (mpmath.log(reference_rate) - mpmath.log(strain_rate))
        ),
        {"activation_energy": ENERGY, "reference_rate": RATE, "strain_rate": RATE},
        KELVIN,
        ((1.4e-19, 1e7, 1e-3), (3e-19, 1e6, 2.5e-4)),
    ),
}

WORK: dict[str, Case] = {
    "rolling_strain": Case(
        lambda initial_thickness, final_thickness: (
            (mpmath.log(initial_thickness) - mpmath.log(final_thickness)) / mpmath.sqrt(0.75)
        ),
        {"initial_thickness": LENGTH, "final_thickness": LENGTH},
        ONE,
        ((2e-3, 1e-3), (10e-3, 9.7e-3)),
    ),
    "drawing_strain": Case(
        lambda initial_diameter, final_diameter: mpmath.log(
            initial_diameter**2 / final_diameter**2
        ),
        {"initial_diameter": LENGTH, "final_diameter": LENGTH},
        ONE,
        ((8e-3, 5e-3), (2e-3, 1.98e-3)),
    ),
    "upsetting_strain": Case(
        lambda initial_height, final_height: mpmath.log(initial_height) - mpmath.log(final_height),
        {"initial_height": LENGTH, "final_height": LENGTH},
        ONE,
        ((15e-3, 9e-3), (12e-3, 11.9e-3)),
    ),
    "prior_work": Case(
        prior_work,
        {
            "strain": ONE,
            "baseline": STRESS,
            "initial_stress": STRESS,
            "initial_hardening": STRESS,
            "saturation_stress": STRESS,
        },
        STRESS,
        ((0.65, 25e6, 10e6, 1.7e9, 320e6), (0.1, 70e6, 250e6, 2.5e9, 600e6)),
        zero_is_fine=frozenset({"strain", "baseline", "initial_stress"}),
    ),
}

ANNEALING: dict[str, Case] = {
    "zener_pressure": Case(
        # N = f / (4/3 pi r^3), 2 r N particles to an area, each holding with pi r gamma.
        lambda volume_fraction, particle_radius, boundary_energy: (
            volume_fraction
            / (mpf(4) / 3 * mpmath.pi * particle_radius**3)
            * (2 * particle_radius)
            * (mpmath.pi * particle_radius * boundary_energy)
        ),
        {"volume_fraction": ONE, "particle_radius": LENGTH, "boundary_energy": PER_LENGTH},
        STRESS,
        ((0.01, 50e-9, 0.3), (0.005, 100e-9, 0.625)),
        zero_is_fine=frozenset({"volume_fraction"}),
    ),
    "curvature_pressure": Case(
        # Work of the boundary over that of the volume: d(4 pi R^2) gamma / d(4/3 pi R^3).
        lambda boundary_energy, radius: 8 * boundary_energy * radius / (4 * radius**2),
        {"boundary_energy": PER_LENGTH, "radius": LENGTH},
        STRESS,
        ((0.625, 1e-6), (0.3, 5e-6)),
    ),
    "net_pressure": Case(
        lambda driving_pressure, zener_pressure, curvature_pressure: (
            driving_pressure - (zener_pressure + curvature_pressure)
        ),
        {"driving_pressure": STRESS, "zener_pressure": STRESS, "curvature_pressure": STRESS},
        STRESS,
        ((1.38e6, 0.09e6, 0.5e6), (0.1e6, 0.3e6, 0.2e6)),
        zero_is_fine=frozenset({"driving_pressure", "zener_pressure", "curvature_pressure"}),
    ),
    "critical_bulge_radius": Case(
        critical_bulge_radius,
        {"boundary_energy": PER_LENGTH, "net_pressure": STRESS},
        LENGTH,
        ((0.625, 1.38e6), (0.3, 10e6)),
        sign_is_free=frozenset({"net_pressure"}),
    ),
    "recrystallisation_rate": Case(
        lambda prefactor, activation_energy, temperature: mpmath.exp(
            mpmath.log(prefactor) - activation_energy / GAS / temperature
        ),
        {"prefactor": RATE, "activation_energy": ENERGY, "temperature": KELVIN},
        RATE,
        ((1e10, 120e3, 523.15), (3e13, 200e3, 700.0)),
        zero_is_fine=frozenset({"activation_energy"}),
    ),
    "recrystallised_fraction": Case(
        lambda progress, exponent: 1 - mpmath.exp(-(progress**exponent)),
        {"progress": ONE, "exponent": ONE},
        ONE,
        ((0.7, 1.2), (2.0, 3.1), (0.01, 0.8)),
        zero_is_fine=frozenset({"progress"}),
    ),
    "time_for_fraction": Case(
        lambda fraction, rate, exponent: (
            mpmath.exp(mpmath.log(-mpmath.log(1 - fraction)) / exponent) / rate
        ),
        {"fraction": ONE, "rate": RATE, "exponent": ONE},
        TIME,
        ((0.5, 1e-3, 1.2), (0.95, 3e-5, 3.0), (1e-6, 1e-3, 1.0)),
    ),
    "temperature_for_fraction": Case(
        temperature_for_fraction,
        {
            "fraction": ONE,
            "time": TIME,
            "prefactor": RATE,
            "activation_energy": ENERGY,
            "exponent": ONE,
        },
        KELVIN,
        ((0.5, 3600.0, 1e10, 120e3, 1.2), (0.95, 60.0, 3e13, 200e3, 3.0)),
    ),
    "recovered_energy": Case(
        lambda stored_energy, stress_before, stress_after: (
            stored_energy * stress_after**2 / stress_before**2
        ),
        {"stored_energy": STRESS, "stress_before": STRESS, "stress_after": STRESS},
        STRESS,
        ((1.4e6, 250e6, 180e6), (3e4, 40e6, 39e6)),
        zero_is_fine=frozenset({"stored_energy", "stress_after"}),
    ),
}

PHYSICS: dict[str, Case] = (
    LAWS_OF_TAYLOR | SMALL_INDENTS | SUMS | CELLS | TEMPERATURE | WORK | ANNEALING
)
