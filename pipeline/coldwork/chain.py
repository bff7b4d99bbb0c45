"""The one chain: mean hardness, flow stress, dislocation stress, density, energy.

Written once, over values that are either plain arrays or `Measured`. First
order, interval ends, Monte Carlo, `estimate` and calibration all run it. It
has two halves that meet at the dislocation stress, because the interval of a
density is taken in that stress (`interval`). SI throughout; a quantity is
called by the column that it will be published in.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import reduce
from operator import add
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.formulas.baseline import HALL_PETCH_STRESS
from coldwork.formulas.composite import (
    EFFECTIVE_OUTER_RADIUS,
    INTERIOR_STRESS,
    MEAN_LINE_ENERGY,
    MEAN_OVER_REGIONS,
    STRESS_RATIO,
    WALL_STRESS,
)
from coldwork.formulas.crystal_factor import (
    CUBIC_CONSTANTS,
    HEXAGONAL_CONSTANTS,
    crystal_energy_factor,
)
from coldwork.formulas.hardness import VICKERS_DIAGONAL
from coldwork.formulas.line_energy import (
    CORE_RADIUS,
    ENERGY_FACTOR,
    LINE_ENERGY,
    OUTER_RADIUS,
    UNIFORM_MEAN_COS2,
    core_radius_alone,
    mean_cos2,
)
from coldwork.formulas.pressure import (
    BRINELL_PROJECTED_PRESSURE,
    BRINELL_STRAIN,
    PROJECTED_OVER_CONTACT,
    PROJECTED_PRESSURE,
)
from coldwork.formulas.size_effect import (
    BULK_HARDNESS_FROM_LENGTH,
    BULK_HARDNESS_FROM_STRENGTH,
    INDENTATION_DEPTH,
)
from coldwork.formulas.stored_energy import (
    STORED_ENERGY,
    STORED_ENERGY_MOLAR,
    STORED_ENERGY_SPECIFIC,
    STORED_FRACTION,
    TEMPERATURE_RISE,
)
from coldwork.formulas.superposition import COMBINED_STRESS, SUPERPOSED_STRESS
from coldwork.formulas.tabor import TABOR_FLOW_STRESS
from coldwork.formulas.taylor import MEAN_SPACING, TAYLOR_DENSITY, TAYLOR_DENSITY_FROM_SLOPE
from coldwork.formulas.taylor_logarithmic import TAYLOR_DENSITY_LOGARITHMIC
from coldwork.formulas.taylor_logarithmic_inner import TAYLOR_DENSITY_LOGARITHMIC_INNER
from coldwork.formulas.temperature import SHEAR_MODULUS_AT, THERMAL_STRESS
from coldwork.formulas.unwinding import UNWOUND_STRESS
from coldwork.inputs.method import Laws
from coldwork.measured import Value, apply, broadcast, kept_where, select, value_of
from coldwork.rules.forces import HBW, HV, SCALES, SECTIONS
from coldwork.units import to_si

__all__ = [
    "Start",
    "Strength",
    "baseline_stress",
    "core_alone",
    "dislocation_stress",
    "energy",
    "energy_per_volume",
    "line",
    "strength",
    "with_obstacle",
]

_TAYLOR: Final = {
    "constant": TAYLOR_DENSITY,
    "logarithmic": TAYLOR_DENSITY_LOGARITHMIC,
    "logarithmic-inner": TAYLOR_DENSITY_LOGARITHMIC_INNER,
}
_MISSING: Final = np.float64(np.nan)


@dataclass(frozen=True)
class Start:
    """What a slice of n coupons brings to the chain.

    With draws, `mean` has the shape (n, draws) and the other arrays (n, 1); inputs that all
    coupons share have (draws,). A law is written so that these broadcast.

    Attributes
    ----------
    mean : Value, shape (n,)
        Mean hardness (force over the area that its scale is defined by), or
        mean flow stress, corrected for the tester. [Pa]
    scale : ndarray of int8, shape (n,)
        `HV`, `HBW` or `HK`; -1 where there is none.
    force : ndarray, shape (n,)
        Test force. [N]
    ball : ndarray, shape (n,)
        Ball diameter, NaN but for HBW. [m]
    grain_size : Value, shape (n,)
        Prior grain size, NaN where it is not known. [m]
    plastic_work : Value, shape (n,)
        Work of the prior deformation, for a state along a curve with the test's own, NaN
        where it is not known. [J/m^3]
    plastic_strain : float
        The strain whose stress the flow route reports. [1]
    temperature : float or ndarray, shape (n,)
        Of the tests; NaN where nothing is brought to another one. [K]
    reference_temperature : float
        That all but the reading holds at. [K]
    size_line : ndarray of int64, shape (n,)
        Which fitted size effect is the coupon's, counted over the inputs ``size_effect:...``;
        -1 where there is none.
    """

    mean: Value
    scale: NDArray[np.int8]
    force: NDArray[np.float64]
    ball: NDArray[np.float64]
    grain_size: Value
    plastic_work: Value
    plastic_strain: float
    temperature: float | NDArray[np.float64] = np.nan
    reference_temperature: float = np.nan
    size_line: NDArray[np.int64] = field(default_factory=lambda: np.asarray(-1, dtype=np.int64))


@dataclass(frozen=True)
class Strength:
    """The first half's outcome, all in the state at `test_strain` but for the first six.

    Attributes
    ----------
    bulk_hardness : Value or None
        Mean hardness without the effect of size; None by the flow route. [Pa]
    pressure : Value or None
        Mean indentation pressure; None by the flow route. [Pa]
    indented_stress : Value
        Flow stress as tested, the indent's own strain included. [Pa]
    reference_stress : Value
        That, at the reference temperature. [Pa]
    excess : Value
        That less the baseline. [Pa]
    tested_stress : Value
        What dislocations carry of the excess, before unwinding. [Pa]
    flow_stress, baseline_stress, dislocation_stress : Value
        As their columns say. [Pa]
    strain : Value
        What the test itself added and unwinding takes out: the indent's representative
        strain, or the reported strain of a flow curve that is unwound beside it. [1]
    test_strain : ndarray, shape (n,)
        Plastic strain of the test in the state that the row describes. [1]
    unwound : ndarray of bool, shape (n,)
        Where the indent's own hardening was taken out.
    """

    bulk_hardness: Value | None
    pressure: Value | None
    indented_stress: Value
    reference_stress: Value
    excess: Value
    tested_stress: Value
    flow_stress: Value
    baseline_stress: Value
    dislocation_stress: Value
    strain: Value
    test_strain: NDArray[np.float64]
    unwound: NDArray[np.bool_]


def strength(laws: Laws, inputs: Mapping[str, Value], start: Start) -> Strength:
    """Go from the mean of the readings to the dislocation stress (relations 1, 3, 2, 10, 4, 6).

    Parameters
    ----------
    laws : Laws
        The choices that the sheet names.
    inputs : mapping of str to Value
        Inputs by their name in the sheet. [SI]
    start : Start
        The slice of coupons.

    Returns
    -------
    Strength
        Arrays of shape (n,).
    """
    n = np.shape(value_of(start.mean))
    bulk, pressure, strain, tested = _tested(laws, inputs, start)
    baseline = baseline_stress(laws, inputs, start.grain_size)
    at_reference = _at_reference(laws, inputs, tested, start)
    excess = at_reference - baseline
    as_tested, stress = dislocation_stress(laws, inputs, excess, strain)
    flow, unwound = at_reference, np.zeros(n, dtype=bool)
    if laws.unwinding:
        flow = with_obstacle(laws, inputs, stress) + baseline
        saturation = inputs["indentation.saturation_stress_mpa"]
        unwound = value_of(as_tested) < value_of(saturation)
    added = np.full(n, start.plastic_strain) if laws.route == "flow" else value_of(strain)
    held = np.where(unwound, 0.0, added)
    return Strength(
        bulk,
        pressure,
        tested,
        at_reference,
        excess,
        as_tested,
        flow,
        baseline,
        stress,
        strain,
        held,
        unwound,
    )


def baseline_stress(laws: Laws, inputs: Mapping[str, Value], grain_size: Value) -> Value:
    """Give what dislocations do not carry of a flow stress (relation 4).

    Parameters
    ----------
    laws, inputs
        As for `strength`.
    grain_size : Value, shape (n,)
        Prior grain. [m]

    Returns
    -------
    Value
        The baseline, obstacles aside. [Pa]
    """
    if laws.baseline == "given":
        return inputs["strength.baseline_mpa"]
    parts = [v for name, v in inputs.items() if name.startswith("strength.terms_mpa.")]
    if "strength.friction_mpa" in inputs:
        parts.append(inputs["strength.friction_mpa"])
    if "strength.hall_petch_mpa_m05" in inputs:
        coefficient = inputs["strength.hall_petch_mpa_m05"]
        parts.append(apply(HALL_PETCH_STRESS, grain_size=grain_size, coefficient=coefficient))
    return reduce(add, parts)


def dislocation_stress(
    laws: Laws, inputs: Mapping[str, Value], excess: Value, strain: Value
) -> tuple[Value, Value]:
    """Go from the excess over the baseline to the dislocation stress (relations 4, 6).

    Parameters
    ----------
    laws, inputs
        As for `strength`.
    excess : Value, shape (n,)
        Flow stress as tested less the baseline. [Pa]
    strain : Value
        Strain of the indent itself; not used where nothing is unwound. [1]

    Returns
    -------
    tuple of Value
        As tested, and in the state that is reported. Where the excess is below the
        obstacle stress nothing is left for dislocations: there it is the difference of
        the two, zero or less, as it is for an exponent of 1. [Pa]
    """
    tested = excess
    if laws.superposed:
        obstacle = inputs["strength.obstacle_mpa"]
        left = apply(
            SUPERPOSED_STRESS,
            excess=excess,
            obstacle=obstacle,
            exponent=inputs["strength.superposition_exponent"],
        )
        above = value_of(excess) > value_of(obstacle)
        tested = select(above.astype(np.int8), {1: left, 0: excess - obstacle})
    if not laws.unwinding:
        return tested, tested
    stress = apply(
        UNWOUND_STRESS,
        stress=tested,
        initial_hardening=inputs["indentation.initial_hardening_mpa"],
        saturation_stress=inputs["indentation.saturation_stress_mpa"],
        strain=strain,
    )
    return tested, stress


def with_obstacle(laws: Laws, inputs: Mapping[str, Value], stress: Value) -> Value:
    """Give what dislocations and obstacles carry together (relation 4).

    Parameters
    ----------
    laws, inputs
        As for `strength`.
    stress : Value, shape (n,)
        Dislocation stress. [Pa]

    Returns
    -------
    Value, shape (n,)
        The excess over the baseline that goes with it. [Pa]
    """
    if not laws.superposed:
        return stress
    obstacle = inputs["strength.obstacle_mpa"]
    positive = value_of(stress) > 0.0
    both = apply(
        COMBINED_STRESS,
        stress=kept_where(stress, positive),
        obstacle=obstacle,
        exponent=inputs["strength.superposition_exponent"],
    )
    return select(positive.astype(np.int8), {1: both, 0: stress + obstacle})


def energy(
    laws: Laws, inputs: Mapping[str, Value], stress: Value, start: Start
) -> dict[str, Value]:
    """Go from a dislocation stress to density and stored energy (relations 5, 7, 8, 9).

    Parameters
    ----------
    laws : Laws
        The choices that the sheet names.
    inputs : mapping of str to Value
        Inputs by their name in the sheet. [SI]
    stress : Value, shape (n,)
        Dislocation stress; NaN where there is none to speak of. [Pa]
    start : Start
        The slice of coupons.

    Returns
    -------
    dict of str to Value
        By column name: density, spacing, line energy, stored energies,
        temperature rise, stored fraction, and `radius_ratio` (R / r0, the smaller one of
        cells); of cells also `wall_density_per_m2` and `interior_density_per_m2`. What a
        missing constant forbids is NaN. [SI]
    """
    return _with_energies(inputs, energy_per_volume(laws, inputs, stress, start), start)


def line(laws: Laws, inputs: Mapping[str, Value], density: Value, start: Start) -> dict[str, Value]:
    """Go from a dislocation density to stored energy (relations 7, 8, 9).

    The part of `energy` below relation 5, for where a density is given.

    Parameters
    ----------
    laws, inputs, start
        As for `energy`.
    density : Value, shape (n,)
        Dislocation density. [1/m^2]

    Returns
    -------
    dict of str to Value
        As `energy` gives. [SI]
    """
    regions = (density,) if laws.structure == "uniform" else _parted(inputs, density)
    return _with_energies(inputs, _per_volume(laws, inputs, regions, start), start)


def _with_energies(
    inputs: Mapping[str, Value], found: dict[str, Value], start: Start
) -> dict[str, Value]:
    """Add what the stored energy per volume makes in other units (relations 8, 9)."""
    stored = found["stored_energy_j_per_m3"]
    mass = inputs["material.mass_density_kg_per_m3"]
    return found | {
        "stored_energy_j_per_mol": apply(
            STORED_ENERGY_MOLAR,
            stored_energy=stored,
            molar_mass=inputs.get("material.molar_mass_g_per_mol", _MISSING),
            mass_density=mass,
        ),
        "stored_energy_j_per_g": apply(
            STORED_ENERGY_SPECIFIC, stored_energy=stored, mass_density=mass
        ),
        "temperature_rise_k": apply(
            TEMPERATURE_RISE,
            stored_energy=stored,
            mass_density=mass,
            heat_capacity=inputs.get("material.heat_capacity_j_per_kg_k", _MISSING),
        ),
        "stored_fraction_of_work": apply(
            STORED_FRACTION, stored_energy=stored, plastic_work=start.plastic_work
        ),
    }


def energy_per_volume(
    laws: Laws, inputs: Mapping[str, Value], stress: Value, start: Start
) -> dict[str, Value]:
    """Do what `energy` does, up to the stored energy per volume.

    All that `energy` gives beyond it goes with it in proportion.

    Parameters
    ----------
    laws, inputs, stress, start
        As for `energy`.

    Returns
    -------
    dict of str to Value
        Density, spacing, line energy, stored energy per volume, `radius_ratio`. [SI]
    """
    if laws.structure == "uniform":
        return _per_volume(laws, inputs, (_density(laws, inputs, stress),), start)
    stress = kept_where(stress, value_of(stress) > 0.0)
    ratio = inputs.get("structure.stress_ratio")
    if ratio is None:
        ratio = apply(STRESS_RATIO, density_ratio=inputs["structure.density_ratio"])
    parts = _shared_out(inputs, stress, ratio)
    regions = tuple(_density(laws, inputs, part) for part in parts)
    return _per_volume(laws, inputs, regions, start)


def _parted(inputs: Mapping[str, Value], density: Value) -> tuple[Value, ...]:
    """Part a mean density between walls and interiors, with one coefficient for both."""
    ratio = inputs.get("structure.density_ratio")
    if ratio is None:
        by_stress = inputs["structure.stress_ratio"]
        ratio = by_stress * by_stress
    return _shared_out(inputs, density, ratio)


def _shared_out(inputs: Mapping[str, Value], mean: Value, ratio: Value) -> tuple[Value, Value]:
    """Share a mean over the volume out to walls and interiors that differ by a ratio.

    It is written for stresses, and holds for whatever adds by volume.
    """
    fraction = inputs["structure.wall_fraction"]
    wall, inside = (
        apply(formula, stress=mean, wall_fraction=fraction, stress_ratio=ratio)
        for formula in (WALL_STRESS, INTERIOR_STRESS)
    )
    return wall, inside


def _per_volume(
    laws: Laws, inputs: Mapping[str, Value], regions: tuple[Value, ...], start: Start
) -> dict[str, Value]:
    """Go from densities to stored energy: of one region, or of walls and interiors."""
    held = [_of_region(laws, inputs, density, start) for density in regions]
    if len(held) == 1:
        return held[0]
    stored, density = (
        apply(
            MEAN_OVER_REGIONS,
            wall=held[0][name],
            interior=held[1][name],
            wall_fraction=inputs["structure.wall_fraction"],
        )
        for name in ("stored_energy_j_per_m3", "dislocation_density_per_m2")
    )
    ratios = [value_of(region["radius_ratio"]) for region in held]
    return {
        "dislocation_density_per_m2": density,
        "mean_spacing_nm": apply(MEAN_SPACING, density=density),
        "line_energy_j_per_m": apply(MEAN_LINE_ENERGY, stored_energy=stored, density=density),
        "stored_energy_j_per_m3": stored,
        "radius_ratio": np.minimum(*ratios),
        "wall_density_per_m2": regions[0],
        "interior_density_per_m2": regions[1],
    }


def _of_region(
    laws: Laws, inputs: Mapping[str, Value], density: Value, start: Start
) -> dict[str, Value]:
    spacing = apply(MEAN_SPACING, density=density)
    burgers = inputs["material.burgers_vector_nm"]
    shear = inputs["material.shear_modulus_gpa"]
    outer = _outer_radius(laws, inputs, density, spacing, start)
    core = apply(CORE_RADIUS, multiple=inputs["line_energy.core_radius_b"], burgers_vector=burgers)
    per_line = apply(
        LINE_ENERGY,
        energy_factor=_energy_factor(laws, inputs),
        burgers_vector=burgers,
        outer_radius=outer,
        core_radius=core,
        shear_modulus=shear,
        core_energy=inputs["line_energy.core_energy"],
    )
    if laws.outer_radius in {"grain", "fixed"}:  # which a coupon without a density has as well
        per_line = kept_where(per_line, np.isfinite(value_of(density)))
    return {
        "dislocation_density_per_m2": density,
        "mean_spacing_nm": spacing,
        "line_energy_j_per_m": per_line,
        "stored_energy_j_per_m3": apply(STORED_ENERGY, density=density, line_energy=per_line),
        "radius_ratio": value_of(outer) / value_of(core),
    }


def core_alone(laws: Laws, inputs: Mapping[str, Value]) -> float:
    """Give the core radius that says the same without a core energy.

    Parameters
    ----------
    laws, inputs
        As for `energy`.

    Returns
    -------
    float
        In Burgers vectors. [1]
    """
    plain = {name: value_of(x) for name, x in inputs.items()}
    return float(
        core_radius_alone(
            plain["line_energy.core_radius_b"],
            plain["line_energy.core_energy"],
            plain["material.shear_modulus_gpa"],
            value_of(_energy_factor(laws, plain)),
        )
    )


def _by_scale(inputs: Mapping[str, Value], scale: NDArray[np.int8], key: str) -> Value:
    by_code = {k: inputs.get(f"{s}.{key}", _MISSING) for k, s in enumerate(SECTIONS)}
    return select(scale, by_code)


def _at_reference(laws: Laws, inputs: Mapping[str, Value], stress: Value, start: Start) -> Value:
    """Bring a flow stress from the temperature of its test to the reference (relation 10).

    The thermal part comes off, the rest goes with the shear modulus, the thermal part at
    the reference comes on. Baseline and modulus at the temperature of the test would give
    the same density, since the baseline less its thermal part goes with the modulus too.
    """
    if laws.temperature == "none":
        return stress
    back = apply(
        SHEAR_MODULUS_AT,
        modulus=1.0,
        temperature=start.reference_temperature,
        reference_temperature=start.temperature,
        slope=inputs["material.shear_modulus_slope"],
        melting_point=inputs["material.melting_point_k"],
    )
    if laws.temperature == "modulus":
        return stress * back
    here, there = (
        apply(
            THERMAL_STRESS,
            stress_at_zero=inputs["temperature.thermal_mpa"],
            temperature=kelvin,
            athermal_temperature=inputs["temperature.athermal_k"],
        )
        for kelvin in (start.temperature, start.reference_temperature)
    )
    return (stress - here) * back + there


def _tested(
    laws: Laws, inputs: Mapping[str, Value], start: Start
) -> tuple[Value | None, Value | None, Value, Value]:
    """Give hardness without the effect of size, pressure, strain and flow stress as tested."""
    if laws.route == "flow":
        return None, None, start.plastic_strain if laws.unwinding else 0.0, start.mean
    present = [k for k in range(len(SCALES)) if bool((start.scale == k).any())]
    bulk = select(start.scale, {k: _bulk_hardness(laws, inputs, k, start) for k in present})
    sized = replace(start, mean=bulk)
    pressure = select(start.scale, {k: _pressure(laws, k, sized) for k in present})
    tested = apply(
        TABOR_FLOW_STRESS,
        pressure=pressure,
        intercept=_by_scale(inputs, start.scale, "intercept_mpa"),
        constraint_factor=_by_scale(inputs, start.scale, "constraint_factor"),
    )
    strain = select(start.scale, {k: _strain(inputs, k, start) for k in present})
    return bulk, pressure, strain, tested


def _bulk_hardness(laws: Laws, inputs: Mapping[str, Value], code: int, start: Start) -> Value:
    """Take the effect of size out of Vickers indents (relation 3); constants are of pressures."""
    if laws.size_effect == "none" or code != HV:
        return start.mean
    here = start.scale == HV
    mean = kept_where(start.mean, here)
    diagonal = apply(VICKERS_DIAGONAL, force=start.force, hardness=mean)
    depth = apply(INDENTATION_DEPTH, diagonal=diagonal)
    if laws.size_effect == "length":
        length = inputs["indentation.characteristic_depth_um"]
        return apply(
            BULK_HARDNESS_FROM_LENGTH, hardness=mean, depth=depth, characteristic_depth=length
        )
    pressure = apply(
        BULK_HARDNESS_FROM_STRENGTH,
        hardness=apply(PROJECTED_PRESSURE, hardness=mean),
        depth=depth,
        strength=_size_strength(laws, inputs, start),
    )
    return PROJECTED_OVER_CONTACT * pressure


def _size_strength(laws: Laws, inputs: Mapping[str, Value], start: Start) -> Value:
    if laws.size_effect == "strength":
        return inputs["indentation.size_strength_gpa2_um"]
    lines = [x for name, x in inputs.items() if name.startswith("size_effect:")]
    return select(start.size_line, dict(enumerate(lines)))


def _pressure(laws: Laws, code: int, start: Start) -> Value:
    projected = laws.area[SCALES[code]] == "projected"
    if code == HBW and projected:
        return apply(
            BRINELL_PROJECTED_PRESSURE, hardness=start.mean, force=start.force, ball=start.ball
        )
    if code == HV and projected:
        return apply(PROJECTED_PRESSURE, hardness=start.mean)
    return start.mean


def _strain(inputs: Mapping[str, Value], code: int, start: Start) -> Value:
    ratio = f"{SECTIONS[code]}.strain_ratio"
    if code == HBW and ratio in inputs:
        return apply(
            BRINELL_STRAIN,
            hardness=start.mean,
            force=start.force,
            ball=start.ball,
            strain_ratio=inputs[ratio],
        )
    return inputs.get(f"{SECTIONS[code]}.representative_strain", _MISSING)


def _density(laws: Laws, inputs: Mapping[str, Value], stress: Value) -> Value:
    if laws.taylor == "slope":
        slope = inputs["hardening.slope_n_per_m"]
        return apply(TAYLOR_DENSITY_FROM_SLOPE, stress=stress, slope=slope)
    law = _TAYLOR[laws.taylor]
    reference = "hardening.reference_density_per_m2"
    more = {"reference_density": inputs[reference]} if reference in inputs else {}
    return apply(
        law,
        **more,
        stress=stress,
        taylor_factor=inputs["hardening.taylor_factor"],
        coefficient=inputs["hardening.coefficient"],
        shear_modulus=inputs["material.shear_modulus_gpa"],
        burgers_vector=inputs["material.burgers_vector_nm"],
    )


def _outer_radius(
    laws: Laws, inputs: Mapping[str, Value], density: Value, spacing: Value, start: Start
) -> Value:
    if laws.outer_radius == "arrangement":
        arrangement = inputs["line_energy.arrangement"]
        return apply(EFFECTIVE_OUTER_RADIUS, arrangement=arrangement, density=density)
    return apply(
        OUTER_RADIUS,
        length=_outer_length(laws, inputs, spacing, start),
        factor=inputs["line_energy.outer_radius_factor"],
    )


def _outer_length(laws: Laws, inputs: Mapping[str, Value], spacing: Value, start: Start) -> Value:
    if laws.outer_radius == "spacing":
        return spacing
    if laws.outer_radius == "half-spacing":
        return 0.5 * spacing
    if laws.outer_radius == "grain":
        return start.grain_size
    return broadcast(inputs["line_energy.outer_radius_nm"], value_of(spacing).shape)


def _energy_factor(laws: Laws, inputs: Mapping[str, Value]) -> Value:
    """Mean of K over the character mix; one number for all coupons."""
    angles = tuple(to_si(laws.angles_deg, "deg").tolist())
    if laws.slip is None:
        mean = UNIFORM_MEAN_COS2 if laws.uniform_mix else mean_cos2(angles, laws.fractions)
        return apply(
            ENERGY_FACTOR,
            shear_modulus=inputs["material.shear_modulus_gpa"],
            poisson_ratio=inputs["material.poisson_ratio"],
            mean_cos2=mean,
        )
    names = HEXAGONAL_CONSTANTS if laws.hexagonal else CUBIC_CONSTANTS
    constants = {name: inputs[f"material.{name}_gpa"] for name in names}
    mix = crystal_energy_factor(laws.slip, angles, laws.fractions, hexagonal=laws.hexagonal)
    return apply(mix, **constants)
