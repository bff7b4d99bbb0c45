"""The chain told step by step, for records and `trace`."""

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.inputs.method import Method
from coldwork.jobs.evaluate import Evaluated
from coldwork.measured import Value, value_of
from coldwork.results.records import Step
from coldwork.rules.forces import SCALES
from coldwork.scatter import BASES, Repeatability

__all__ = ["repeatability_of", "steps_of"]

_BASELINE = (
    "strength.baseline_mpa",
    "strength.friction_mpa",
    "strength.hall_petch_mpa_m05",
)
_FOR_ALL_SCALES = ("initial_hardening_mpa", "saturation_stress_mpa")
_RADII = {
    "spacing": "the mean spacing of the dislocations",
    "half-spacing": "half the mean spacing of the dislocations",
    "grain": "the grain size of the coupon",
    "fixed": "the length that the sheet states",
}


def steps_of(method: Method, evaluated: Evaluated) -> list[Step]:
    """Tell how the mean of the readings became stored energy.

    Parameters
    ----------
    method : Method
        The laws.
    evaluated : Evaluated
        A slice of n coupons.

    Returns
    -------
    list of Step
        In order; values of shape (n,) in published units.
    """
    return [*_strength_steps(method, evaluated), *_energy_steps(method, evaluated)]


def repeatability_of(scatter: Repeatability, rows: slice, unit: str) -> list[dict[str, object]]:
    """Tell what the repeatability of each coupon of a slice was judged by.

    Parameters
    ----------
    scatter : Repeatability
        The batch's.
    rows : slice
        The coupons, n of them.
    unit : str
        UCUM unit of the mean reading.

    Returns
    -------
    list of dict
        n of them; numbers may be NaN or infinite where there is nothing.
    """
    u = units.from_si(scatter.u[rows], unit)
    return [
        {
            "basis": BASES[basis],
            "u": u_mean,
            "unit": unit,
            "degrees_of_freedom": nu,
            "relative_standard_deviation": own,
            "pooled_relative_standard_deviation": pooled,
            "pooled_degrees_of_freedom": pooled_nu,
            "left_the_pool": bool(left),
        }
        for basis, u_mean, nu, own, pooled, pooled_nu, left in zip(
            scatter.basis[rows].tolist(),
            u.tolist(),
            scatter.degrees_of_freedom[rows].tolist(),
            scatter.relative_s[rows].tolist(),
            scatter.pooled[rows].tolist(),
            scatter.pooled_freedom[rows].tolist(),
            scatter.left[rows].tolist(),
            strict=True,
        )
    ]


def _step(
    step: str,
    relation: str,
    quantity: str,
    unit: str,
    value: Value,
    scale: NDArray[np.int8],
    explanation: str,
    inputs: tuple[str, ...],
) -> Step:
    values = units.from_si(np.broadcast_to(value_of(value), scale.shape), unit)
    only = _scales_of(inputs, scale)
    return Step(step, relation, quantity, unit, values, explanation, inputs, only)


def _strength_steps(method: Method, evaluated: Evaluated) -> list[Step]:
    half, start, laws = evaluated.strength, evaluated.start, method.laws
    scale = start.scale
    given = tuple(
        name
        for name in method.inputs
        if name in _BASELINE or name.startswith("strength.terms_mpa.")
    )
    parts = (
        "friction, Hall-Petch and other terms, added"
        if laws.baseline == "parts"
        else "as the sheet states it"
    )
    baseline = _step(
        "baseline stress",
        "relation 4",
        "baseline_stress_mpa",
        "MPa",
        half.baseline_stress,
        scale,
        f"the part of the flow stress that dislocations do not carry: {parts}",
        given,
    )
    mean_inputs = ("repeatability", *(t.bias.name for t in method.testers))
    if laws.route == "flow":
        return [
            _step(
                "flow stress",
                "mean of the readings",
                "flow_stress_mpa",
                "MPa",
                half.flow_stress,
                scale,
                f"at a plastic strain of {method.plastic_strain:g}: the mean of the repeats there, "
                "or interpolated between the neighbours; corrected for the tester",
                mean_inputs,
            ),
            baseline,
            _step(
                "dislocation stress",
                "relation 4",
                "dislocation_stress_mpa",
                "MPa",
                half.dislocation_stress,
                scale,
                "flow stress less the baseline",
                ("flow_stress_mpa", "baseline_stress_mpa"),
            ),
        ]
    steps = [
        _step(
            "mean hardness",
            "relation 1",
            "hardness",
            "kgf/mm2",
            start.mean,
            scale,
            "mean of the readings, each divided by 1 + bias of its tester",
            mean_inputs,
        ),
        _step(
            "indentation pressure",
            "relation 1",
            "pressure_mpa",
            "MPa",
            np.nan if half.pressure is None else half.pressure,
            scale,
            "force over the area that the sheet names for this scale",
            ("hardness",),
        ),
        _step(
            "flow stress under the indent",
            "relation 2, Tabor 1951",
            "indented_stress_mpa",
            "MPa",
            half.indented_stress,
            scale,
            "pressure less intercept, over the constraint factor: the stress at the coupon's "
            "strain plus the strain of the indent",
            ("pressure_mpa", *_of_indentation(method, "intercept_mpa", "constraint_factor")),
        ),
        baseline,
    ]
    if laws.unwinding:
        steps.append(
            _step(
                "excess over the baseline",
                "relation 4",
                "excess_mpa",
                "MPa",
                half.excess,
                scale,
                "flow stress under the indent less the baseline",
                ("indented_stress_mpa", "baseline_stress_mpa"),
            )
        )
    return [*steps, *_dislocation_steps(method, evaluated, scale)]


def _dislocation_steps(method: Method, evaluated: Evaluated, scale: NDArray[np.int8]) -> list[Step]:
    half = evaluated.strength
    told, relation = "flow stress under the indent less the baseline", "relation 4"
    inputs: tuple[str, ...] = ("indented_stress_mpa", "baseline_stress_mpa")
    if method.laws.unwinding:
        told, relation = (
            "without the hardening that the indent's own strain added; at or above saturation "
            "nothing is taken out",
            "relation 6, Voce 1948; Kocks and Mecking 2003",
        )
        inputs = (
            "excess_mpa",
            *_of_indentation(
                method, "initial_hardening_mpa", "saturation_stress_mpa", "representative_strain",
                "strain_ratio",
            ),
        )
    return [
        _step(
            "dislocation stress", relation, "dislocation_stress_mpa", "MPa",
            half.dislocation_stress, scale, told, inputs,
        ),
        _step(
            "flow stress of the state reported", "relation 4", "flow_stress_mpa", "MPa",
            half.flow_stress, scale, "dislocation stress plus baseline",
            ("dislocation_stress_mpa", "baseline_stress_mpa"),
        ),
    ]


def _energy_steps(method: Method, evaluated: Evaluated) -> list[Step]:
    results, laws = evaluated.results, method.laws
    scale = evaluated.start.scale
    taylor = ("hardening.slope_n_per_m",)
    told = "(dislocation stress over the slope M alpha G b) squared"
    if laws.taylor == "constant":
        taylor = (
            "hardening.taylor_factor",
            "hardening.coefficient",
            "material.shear_modulus_gpa",
            "material.burgers_vector_nm",
        )
        told = "(dislocation stress over M alpha G b) squared"
    line = (
        "line_energy.outer_radius_factor",
        *(("line_energy.outer_radius_nm",) if laws.outer_radius == "fixed" else ()),
        "line_energy.core_radius_b",
        "line_energy.core_energy",
        "material.shear_modulus_gpa",
        "material.poisson_ratio",
        "material.burgers_vector_nm",
    )
    mass = "material.mass_density_kg_per_m3"
    rows: list[tuple[str, str, str, str, str, tuple[str, ...]]] = [
        (
            "dislocation density", "relation 5, Taylor 1934", "dislocation_density_per_m2", "m-2",
            told, ("dislocation_stress_mpa", *taylor),
        ),
        (
            "mean spacing", "definition", "mean_spacing_nm", "nm",
            "one over the root of the density", ("dislocation_density_per_m2",),
        ),
        (
            "line energy", "relation 7, Hirth and Lothe 1982", "line_energy_j_per_m", "J/m",
            f"averaged over the character mix; the field reaches to {_RADII[laws.outer_radius]}",
            ("mean_spacing_nm", *line),
        ),
        (
            "stored energy in dislocations", "relation 8", "stored_energy_j_per_m3", "J/m3",
            "density times line energy; also the driving pressure for recrystallisation in Pa",
            ("dislocation_density_per_m2", "line_energy_j_per_m"),
        ),
        (
            "stored energy per mole", "relation 8", "stored_energy_j_per_mol", "J/mol",
            "times the molar volume",
            ("stored_energy_j_per_m3", mass, "material.molar_mass_g_per_mol"),
        ),
        (
            "stored energy per gram", "relation 8", "stored_energy_j_per_g", "J/g",
            "over the mass density", ("stored_energy_j_per_m3", mass),
        ),
        (
            "temperature rise", "relation 8", "temperature_rise_k", "K",
            "if all of it were released as heat in the coupon",
            ("stored_energy_j_per_m3", mass, "material.heat_capacity_j_per_kg_k"),
        ),
        (
            "stored fraction of the work", "relation 9", "stored_fraction_of_work", "1",
            "over the plastic work that coupons.csv states",
            ("stored_energy_j_per_m3", "prior_plastic_work_j_per_m3"),
        ),
    ]
    return [
        _step(name, relation, quantity, unit, results[quantity], scale, words, tuple(inputs))
        for name, relation, quantity, unit, words, inputs in rows
    ]


def _of_indentation(method: Method, *keys: str) -> tuple[str, ...]:
    return tuple(
        name
        for name in method.inputs
        if name.startswith("indentation.") and name.rpartition(".")[2] in keys
    )


def _scales_of(
    inputs: tuple[str, ...], scale: NDArray[np.int8]
) -> dict[str, NDArray[np.bool_]]:
    """For each input of one scale, the coupons that were read on it."""
    only = {}
    for name in inputs:
        section, _, key = name.rpartition(".")
        if section.startswith("indentation") and key not in _FOR_ALL_SCALES:
            code = SCALES.index(section.removeprefix("indentation").removeprefix(".") or "HV")
            only[name] = scale == code
    return only
