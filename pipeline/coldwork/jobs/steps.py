"""The chain told step by step, for records and `trace`.

What is said of each step stands in `chain_words`; here the steps of the method's laws
are picked, and what depends on the sheet is filled in.
"""

from collections.abc import Mapping
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.chain import Start, core_alone
from coldwork.formulas.crystal_factor import HEXAGONAL_CONSTANTS
from coldwork.inputs.core import core_words
from coldwork.inputs.method import Laws, Method
from coldwork.jobs.chain_words import (
    AS_INDENTED,
    AT_REFERENCE,
    BULK,
    DENSITY,
    ENERGY,
    FLOW,
    FLOW_OF_CURVE,
    INDENT,
    JOINED,
    MEAN_DENSITY,
    OVER_BASELINE,
    PRIOR_WORK,
    REGIONS,
    REPORTED,
    TEMPERATURE,
    UNWOUND,
    Line,
)
from coldwork.jobs.evaluate import FLOW_REPEATABILITY, REPEATABILITY, Evaluated
from coldwork.jobs.tables import unit_of
from coldwork.measured import Value, value_of
from coldwork.results.records import Step
from coldwork.rules.forces import SECTIONS
from coldwork.scatter import BASES, Repeatability

__all__ = ["repeatability_of", "steps_of"]


_BASELINES: Final = {
    "given": "as the sheet states it",
    "parts": "friction, Hall-Petch and other terms, added",
}
_RADII: Final = {
    "spacing": "the mean spacing of the dislocations",
    "half-spacing": "half the mean spacing of the dislocations",
    "grain": "the grain size of the coupon",
    "fixed": "the length that the sheet states",
    "arrangement": "the effective outer radius, M* over the root of the density (Wilkens 1970)",
}
_BASELINE_INPUTS: Final = (
    "strength.baseline_mpa",
    "strength.friction_mpa",
    "strength.hall_petch_mpa_m05",
)
_OBSTACLE_INPUTS: Final = ("strength.obstacle_mpa", "strength.superposition_exponent")
_ELASTICITY: Final = (
    "material.poisson_ratio",
    *(f"material.{name}_gpa" for name in HEXAGONAL_CONSTANTS),
)
_WITHOUT_COLUMN: Final = {
    "pressure_mpa": "MPa",
    "indented_stress_mpa": "MPa",
    "reference_stress_mpa": "MPa",
    "bulk_hardness": "kgf/mm2",
    "excess_mpa": "MPa",
    "prior_plastic_work_j_per_m3": "J/m3",
    "tested_stress_mpa": "MPa",
    "test_temperature_c": "Cel",
    "indent_dislocation_stress_mpa": "MPa",
    "curve_stress_mpa": "MPa",
    "curve_dislocation_stress_mpa": "MPa",
    "difference_mpa": "MPa",
    "normalised_error": "1",
    "weight_indent": "1",
    "wall_density_per_m2": "m-2",
    "interior_density_per_m2": "m-2",
}
_THERMAL: Final = {
    "modulus": "in proportion to the shear modulus",
    "modulus-and-thermal": "the thermal part taken off, the rest in proportion to the shear "
    "modulus, the thermal part that is left at the reference put back",
}
_SIZES: Final = {
    "none": "",
    "fitted": "by the line of H^2 over 1/h that was fitted to the indents of its condition",
    "length": "by the characteristic depth that the sheet states",
    "strength": "by the size strength that the sheet states",
}
_SIZE_INPUTS: Final = (
    "indentation.characteristic_depth_um",
    "indentation.size_strength_gpa2_um",
)
_TEMPERATURE_INPUTS: Final = (
    "material.melting_point_k",
    "material.shear_modulus_slope",
    "temperature.thermal_mpa",
    "temperature.athermal_k",
)
_FOR_ALL_SCALES: Final = ("initial_hardening_mpa", "saturation_stress_mpa")


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
    laws, scale = method.laws, evaluated.start.scale
    words = {
        "strain": f"{method.plastic_strain:g}",
        "baseline": _BASELINES[laws.baseline],
        "radius": _RADII[laws.outer_radius],
        "elasticity": _elasticity(laws),
        "core": core_words(method.inputs, core_alone(laws, _plain(method))),
        "reference": f"{units.from_si(method.reference_temperature, 'Cel'):.6g}",
        "size": _SIZES[laws.size_effect],
        "thermal": _THERMAL.get(laws.temperature, ""),
        "joined": "and its own strain unwound" if laws.unwinding else "at the strain of the indent",
    }
    groups = _groups(method)
    values = _values(evaluated)
    steps = []
    for line in _joined(_lines(laws)) if method.both else _lines(laws):
        inputs = tuple(name for entry in line.inputs for name in groups.get(entry, (entry,)))
        unit = _unit(line.quantity)
        value = np.broadcast_to(value_of(values[line.quantity]), scale.shape)
        steps.append(
            Step(
                line.step,
                line.relation,
                line.quantity,
                unit,
                units.from_si(value, unit),
                line.explanation.format_map(words),
                inputs,
                _coupons_of(inputs, evaluated.start),
            )
        )
    return steps


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


def _plain(method: Method) -> Mapping[str, Value]:
    return {name: np.float64(x.value) for name, x in method.inputs.items()}


def _elasticity(laws: Laws) -> str:
    if laws.slip is None:
        return "of lines in an isotropic medium"
    return f"of {laws.slip.text} lines in the crystal (Stroh 1958)"


def _lines(laws: Laws) -> tuple[Line, ...]:
    """Pick the steps that these laws take, in order."""
    lines = _at_one_temperature(laws)
    return lines if laws.temperature == "none" else _brought_to_reference(laws, lines)


def _joined(lines: tuple[Line, ...]) -> tuple[Line, ...]:
    """Put the flow curve and the two together after the dislocation stress by the indents."""
    place = [line.quantity for line in lines].index("dislocation_stress_mpa")
    by_indents = lines[place]._replace(
        step="dislocation stress by the indents", quantity="indent_dislocation_stress_mpa"
    )
    return (*lines[:place], by_indents, *JOINED, *lines[place + 1 :])


def _brought_to_reference(laws: Laws, lines: tuple[Line, ...]) -> tuple[Line, ...]:
    """Put relation 10 before the baseline, which then is taken off what it gives."""
    place = [line.quantity for line in lines].index("baseline_stress_mpa")
    before, after = lines[:place], lines[place:]
    brought = AT_REFERENCE
    if laws.route == "flow":
        before = (before[0]._replace(quantity="indented_stress_mpa"),)
        brought = brought._replace(quantity="flow_stress_mpa")
    names = {"indented_stress_mpa": "reference_stress_mpa"}
    after = tuple(
        line._replace(inputs=tuple(names.get(name, name) for name in line.inputs)) for line in after
    )
    return (*before, TEMPERATURE, brought, *after)


def _at_one_temperature(laws: Laws) -> tuple[Line, ...]:
    energy = (*_densities(laws), *_energies(laws))
    if laws.flow_from == "curves":
        return (*FLOW_OF_CURVE, *OVER_BASELINE[laws.superposed], *energy)
    if laws.route == "flow":
        return (*FLOW, *OVER_BASELINE[laws.superposed], *energy)
    state = UNWOUND if laws.unwinding else AS_INDENTED
    return (*_indented(laws), *state[laws.superposed], *REPORTED[laws.superposed], *energy)


def _indented(laws: Laws) -> tuple[Line, ...]:
    """Put relation 3 after the mean hardness, where a size effect is taken out."""
    if laws.size_effect == "none":
        return INDENT
    mean, pressure, *rest = INDENT
    several = f"{mean.explanation}; of several forces the root of the mean square"
    mean = mean._replace(explanation=several)
    return (mean, BULK, pressure._replace(inputs=("bulk_hardness",)), *rest)


def _energies(laws: Laws) -> tuple[Line, ...]:
    """Put the work before the fraction of it, where a curve may have given it."""
    if laws.prior_work == "stated":
        return ENERGY
    *energies, fraction = ENERGY
    told = fraction._replace(explanation="over the plastic work before the test")
    return (*energies, PRIOR_WORK, told)


def _densities(laws: Laws) -> tuple[Line, ...]:
    """Tell of one density, or of walls, interiors and their mean."""
    one = DENSITY[laws.taylor]
    if laws.structure == "uniform":
        return (one,)
    regions = tuple(
        region._replace(
            explanation=f"{region.explanation}; {one.explanation}",
            inputs=(*one.inputs, "<structure>"),
        )
        for region in REGIONS
    )
    return (*regions, MEAN_DENSITY)


def _values(evaluated: Evaluated) -> Mapping[str, Value]:
    """Give every quantity of the chain by name, in SI, those too that no table has."""
    half, routes = evaluated.strength, evaluated.routes
    of_both: dict[str, Value] = {}
    if routes is not None:
        of_both = {
            "indent_dislocation_stress_mpa": routes.by_indent,
            "curve_stress_mpa": routes.flow.indented_stress,
            "curve_dislocation_stress_mpa": routes.by_flow,
            "difference_mpa": routes.agreement.difference,
            "normalised_error": routes.agreement.error,
            "weight_indent": routes.agreement.weight,
        }
    return {
        "prior_plastic_work_j_per_m3": evaluated.start.plastic_work,
        "bulk_hardness": np.nan if half.bulk_hardness is None else half.bulk_hardness,
        **of_both,
        "pressure_mpa": np.nan if half.pressure is None else half.pressure,
        "test_temperature_c": evaluated.start.temperature,
        "indented_stress_mpa": half.indented_stress,
        "reference_stress_mpa": half.reference_stress,
        "excess_mpa": half.excess,
        "tested_stress_mpa": half.tested_stress,
        **evaluated.reach.regions,
        **evaluated.results,
    }


def _unit(quantity: str) -> str:
    """Give the unit of a quantity: that of its column, or of its name where it has none."""
    return _WITHOUT_COLUMN.get(quantity) or unit_of(quantity)


def _groups(method: Method) -> Mapping[str, tuple[str, ...]]:
    """Give the inputs that stand behind each ``<...>``, in the sheet's order."""
    baseline = (
        name
        for name in method.inputs
        if name in _BASELINE_INPUTS or name.startswith("strength.terms_mpa.")
    )
    radius = {
        "fixed": ("line_energy.outer_radius_nm", "line_energy.outer_radius_factor"),
        "arrangement": ("line_energy.arrangement",),
    }.get(method.laws.outer_radius, ("line_energy.outer_radius_factor",))
    structure = (n for n in method.inputs if n.startswith("structure."))
    unwinding = (*_FOR_ALL_SCALES, "representative_strain", "strain_ratio")
    return {
        "<mean>": (REPEATABILITY, *(tester.bias.name for tester in method.testers)),
        "<points>": (FLOW_REPEATABILITY, *(tester.bias.name for tester in method.testers)),
        "<curve>": (REPEATABILITY, *(n for n in method.inputs if n.startswith("tensile."))),
        "<baseline>": tuple(baseline),
        "<temperature>": tuple(name for name in method.inputs if name in _TEMPERATURE_INPUTS),
        "<obstacle>": tuple(name for name in method.inputs if name in _OBSTACLE_INPUTS),
        "<constraint>": _of_indentation(method, "intercept_mpa", "constraint_factor"),
        "<hardening>": _of_indentation(method, *_FOR_ALL_SCALES),
        "<unwinding>": _of_indentation(method, *unwinding),
        "<radius>": radius,
        "<prior>": _of_curve(method),
        "<size>": tuple(
            n for n in method.inputs if n in _SIZE_INPUTS or n.startswith("size_effect:")
        ),
        "<structure>": tuple(structure),
        "<elasticity>": tuple(name for name in method.inputs if name in _ELASTICITY),
    }


def _of_curve(method: Method) -> tuple[str, ...]:
    """Give the constants of the Voce curve of the prior work."""
    own = tuple(n for n in method.inputs if n.startswith("prior_work."))
    return (
        own if method.laws.route == "flow" else (*own, *_of_indentation(method, *_FOR_ALL_SCALES))
    )


def _of_indentation(method: Method, *keys: str) -> tuple[str, ...]:
    return tuple(
        name
        for name in method.inputs
        if name.startswith("indentation.") and name.rpartition(".")[2] in keys
    )


def _coupons_of(inputs: tuple[str, ...], start: Start) -> dict[str, NDArray[np.bool_]]:
    """Give for each input of one scale, or of one condition, the coupons that it acts on."""
    only, lines = {}, 0
    for name in inputs:
        section, _, key = name.rpartition(".")
        if name.startswith("size_effect:"):
            only[name] = start.size_line == lines
            lines += 1
        elif section in SECTIONS and key not in _FOR_ALL_SCALES:
            only[name] = start.scale == SECTIONS.index(section)
    return only
