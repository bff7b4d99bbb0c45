"""What is said of each step of the chain, for records and `trace`: tables, hardly any code."""

from typing import Final, NamedTuple

__all__ = [
    "AS_INDENTED",
    "AT_REFERENCE",
    "BULK",
    "DENSITY",
    "ENERGY",
    "FLOW",
    "FLOW_OF_CURVE",
    "INDENT",
    "JOINED",
    "MEAN_DENSITY",
    "OVER_BASELINE",
    "PRIOR_WORK",
    "REGIONS",
    "REPORTED",
    "TEMPERATURE",
    "UNWOUND",
    "Line",
]


class Line(NamedTuple):
    """One step as it is told.

    Attributes
    ----------
    step, relation, quantity
        As `Step` has them.
    explanation : str
        With ``{strain}``, ``{baseline}`` and ``{radius}`` where the sheet decides the words.
    inputs : tuple of str
        Names of inputs and quantities; ``<...>`` stands for a group of inputs.
    """

    step: str
    relation: str
    quantity: str
    explanation: str
    inputs: tuple[str, ...]


_BASELINE: Final = Line(
    "baseline stress",
    "relation 4",
    "baseline_stress_mpa",
    "the part of the flow stress that dislocations do not carry: {baseline}",
    ("<baseline>",),
)
FLOW: Final = (
    Line(
        "flow stress",
        "mean of the readings",
        "flow_stress_mpa",
        "at a plastic strain of {strain}: the mean of the repeats there, or interpolated between "
        "the neighbours; corrected for the tester",
        ("<mean>",),
    ),
    _BASELINE,
)
FLOW_OF_CURVE: Final = (
    Line(
        "flow stress",
        "ISO 6892-1; true stress at a true plastic strain",
        "flow_stress_mpa",
        "true stress of the coupon's curve at a true plastic strain of {strain}: where the curve "
        "stands and what else it gave is told above",
        ("<curve>",),
    ),
    *FLOW[1:],
)
INDENT: Final = (
    Line(
        "mean hardness",
        "relation 1",
        "hardness",
        "mean of the readings, each divided by 1 + bias of its tester",
        ("<mean>",),
    ),
    Line(
        "indentation pressure",
        "relation 1",
        "pressure_mpa",
        "force over the area that the sheet names for this scale",
        ("hardness",),
    ),
    Line(
        "flow stress under the indent",
        "relation 2, Tabor 1951",
        "indented_stress_mpa",
        "pressure less intercept, over the constraint factor: the stress at the coupon's strain "
        "plus the strain of the indent",
        ("pressure_mpa", "<constraint>"),
    ),
    _BASELINE,
)


def _over(what: str, stress: str) -> tuple[Line, Line]:
    """Tell of the excess over the baseline, and of it as the dislocation stress."""
    inputs = (stress, "baseline_stress_mpa")
    told = f"{what} less the baseline"
    return (
        Line("excess over the baseline", "relation 4", "excess_mpa", told, inputs),
        Line("dislocation stress", "relation 4", "dislocation_stress_mpa", told, inputs),
    )


def _beside(step: str, quantity: str) -> Line:
    return Line(
        step,
        "relation 4; Kocks, Argon and Ashby 1975; Ardell 1985 (from memory)",
        quantity,
        "what the obstacle stress leaves of the excess: (excess^q - obstacle^q)^(1/q); at or below "
        "the obstacle stress nothing is left, and the difference stands here",
        ("excess_mpa", "<obstacle>"),
    )


def _unwound(stress: str) -> Line:
    return Line(
        "dislocation stress",
        "relation 6, Voce 1948; Kocks and Mecking 2003",
        "dislocation_stress_mpa",
        "without the hardening that the indent's own strain added; at or above saturation nothing "
        "is taken out",
        (stress, "<unwinding>"),
    )


_OF_FLOW = _over("flow stress", "flow_stress_mpa")
_OF_INDENT = _over("flow stress under the indent", "indented_stress_mpa")
_ALONE: Final = _beside("dislocation stress", "dislocation_stress_mpa")
_TESTED: Final = _beside("dislocation stress under the indent", "tested_stress_mpa")

# Each by whether an obstacle stress joins.
OVER_BASELINE: Final = {False: _OF_FLOW[1:], True: (_OF_FLOW[0], _ALONE)}
AS_INDENTED: Final = {False: _OF_INDENT[1:], True: (_OF_INDENT[0], _ALONE)}
UNWOUND: Final = {
    False: (_OF_INDENT[0], _unwound("excess_mpa")),
    True: (_OF_INDENT[0], _TESTED, _unwound("tested_stress_mpa")),
}
_SUM: Final = Line(
    "flow stress of the state reported",
    "relation 4",
    "flow_stress_mpa",
    "dislocation stress plus baseline",
    ("dislocation_stress_mpa", "baseline_stress_mpa"),
)
BULK: Final = Line(
    "hardness of a large indent",
    "relation 3, Nix and Gao 1998",
    "bulk_hardness",
    "the mean hardness without the effect of size, {size}",
    ("hardness", "<size>"),
)
PRIOR_WORK: Final = Line(
    "plastic work before the test",
    "relation 9; Voce 1948",
    "prior_plastic_work_j_per_m3",
    "as coupons.csv states it, or along the Voce curve over the prior strain where it states none",
    ("baseline_stress_mpa", "<prior>"),
)
TEMPERATURE: Final = Line(
    "temperature of the test",
    "mean of the readings",
    "test_temperature_c",
    "test_c of the sheet where a reading does not say",
    (),
)
AT_REFERENCE: Final = Line(
    "flow stress at the reference temperature",
    "relation 10; Frost and Ashby 1982; Kocks, Argon and Ashby 1975 (from memory)",
    "reference_stress_mpa",
    "brought from the temperature of the test to {reference} C, {thermal}",
    ("indented_stress_mpa", "test_temperature_c", "<temperature>"),
)
REPORTED: Final = {
    False: (_SUM,),
    True: (
        _SUM._replace(
            explanation="dislocation and obstacle stress joined as they were parted, plus baseline",
            inputs=(*_SUM.inputs, "<obstacle>"),
        ),
    ),
}
_BY_INDENTS: Final = "indent_dislocation_stress_mpa"
_BY_FLOW: Final = "curve_dislocation_stress_mpa"
JOINED: Final = (  # after the dislocation stress by the indents, of a batch of both routes
    Line(
        "flow stress of the flow curve",
        "mean of the readings",
        "curve_stress_mpa",
        "at a plastic strain of {strain}: the mean of the repeats there, or interpolated between "
        "the neighbours; corrected for the tester",
        ("<points>",),
    ),
    Line(
        "dislocation stress by the flow curve",
        "relations 4, 6 and 10",
        _BY_FLOW,
        "brought to the reference temperature where the sheet asks for it, less the baseline, "
        "{joined}",
        ("curve_stress_mpa", "baseline_stress_mpa", "<temperature>", "<hardening>"),
    ),
    Line(
        "difference of the two routes",
        "JCGM 100:2008, 5.2",
        "difference_mpa",
        "by the indents less by the flow curve; inputs that both share are counted once",
        (_BY_INDENTS, _BY_FLOW),
    ),
    Line(
        "normalised error",
        "E_n of ISO 13528 (from memory)",
        "normalised_error",
        "the difference over its expanded uncertainty; above 1 the routes disagree",
        ("difference_mpa",),
    ),
    Line(
        "weight of the indents",
        "Aitken 1936",
        "weight_indent",
        "by generalised least squares; 1 or 0 where one route alone is taken",
        (_BY_INDENTS, _BY_FLOW),
    ),
    Line(
        "dislocation stress",
        "Aitken 1936",
        "dislocation_stress_mpa",
        "weighted mean of the two routes, or the one that there is",
        (_BY_INDENTS, _BY_FLOW, "weight_indent"),
    ),
)
_PARTS: Final = (
    "dislocation_stress_mpa",
    "hardening.taylor_factor",
    "hardening.coefficient",
    "material.shear_modulus_gpa",
    "material.burgers_vector_nm",
)
_LOGARITHMIC: Final = (*_PARTS, "hardening.reference_density_per_m2")
DENSITY: Final = {  # by the hardening law that the sheet names
    "constant": Line(
        "dislocation density",
        "relation 5, Taylor 1934",
        "dislocation_density_per_m2",
        "(dislocation stress over M alpha G b) squared",
        _PARTS,
    ),
    "logarithmic": Line(
        "dislocation density",
        "relation 5, Devincre, Kubin and Hoc 2006",
        "dislocation_density_per_m2",
        "alpha falls with ln(1/(b sqrt(rho))); inverted on the branch of real densities",
        _LOGARITHMIC,
    ),
    "logarithmic-inner": Line(
        "dislocation density",
        "relation 5, Kubin, Devincre and Hoc 2008",
        "dislocation_density_per_m2",
        "alpha falls with ln(1/(alpha b sqrt(rho))), the coefficient inside the logarithm too; "
        "inverted on the branch of real densities",
        _LOGARITHMIC,
    ),
    "slope": Line(
        "dislocation density",
        "relation 5, Taylor 1934",
        "dislocation_density_per_m2",
        "(dislocation stress over the slope M alpha G b) squared",
        ("dislocation_stress_mpa", "hardening.slope_n_per_m"),
    ),
}
_MUGHRABI: Final = "relation 5; Mughrabi 1983 (from memory)"
REGIONS: Final = tuple(
    Line(
        f"density in the {where}",
        _MUGHRABI,
        f"{quantity}_density_per_m2",
        f"walls and interiors strain alike and their stresses add by volume; in the {where}",
        (),
    )
    for where, quantity in (("walls", "wall"), ("interiors", "interior"))
)
MEAN_DENSITY: Final = Line(
    "dislocation density",
    "definition",
    "dislocation_density_per_m2",
    "mean over the volume; below, the line energy is of each region with its own outer radius, and "
    "told as the mean over the length of line",
    ("wall_density_per_m2", "interior_density_per_m2", "structure.wall_fraction"),
)
ENERGY: Final = (
    Line(
        "mean spacing",
        "definition",
        "mean_spacing_nm",
        "one over the root of the density",
        ("dislocation_density_per_m2",),
    ),
    Line(
        "line energy",
        "relation 7, Hirth and Lothe 1982",
        "line_energy_j_per_m",
        "{elasticity}; averaged over the character mix; the field reaches to {radius}; {core}",
        (
            "mean_spacing_nm",
            "<radius>",
            "line_energy.core_radius_b",
            "line_energy.core_energy",
            "material.shear_modulus_gpa",
            "<elasticity>",
            "material.burgers_vector_nm",
        ),
    ),
    Line(
        "stored energy in dislocations",
        "relation 8",
        "stored_energy_j_per_m3",
        "density times line energy; also the driving pressure for recrystallisation in Pa",
        ("dislocation_density_per_m2", "line_energy_j_per_m"),
    ),
    Line(
        "stored energy per mole",
        "relation 8",
        "stored_energy_j_per_mol",
        "times the molar volume",
        (
            "stored_energy_j_per_m3",
            "material.mass_density_kg_per_m3",
            "material.molar_mass_g_per_mol",
        ),
    ),
    Line(
        "stored energy per gram",
        "relation 8",
        "stored_energy_j_per_g",
        "over the mass density",
        ("stored_energy_j_per_m3", "material.mass_density_kg_per_m3"),
    ),
    Line(
        "temperature rise",
        "relation 8",
        "temperature_rise_k",
        "if all of it were released as heat in the coupon",
        (
            "stored_energy_j_per_m3",
            "material.mass_density_kg_per_m3",
            "material.heat_capacity_j_per_kg_k",
        ),
    ),
    Line(
        "stored fraction of the work",
        "relation 9",
        "stored_fraction_of_work",
        "over the plastic work that coupons.csv states",
        ("stored_energy_j_per_m3", "prior_plastic_work_j_per_m3"),
    ),
)
