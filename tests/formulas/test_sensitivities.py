"""What every formula must do, held against an independent twin at 50 digits.

The walk over the package finds every `Formula`; one without a case here fails.
A twin is written in multi-precision arithmetic from the definition, where there
is one by another way than the formula goes.
"""

import importlib
import inspect
import pkgutil

import mpmath  # type: ignore[import-untyped]
import numpy as np
import pytest
from mpmath import mpf
from numpy.testing import assert_allclose
from tests.formulas.physics_twins import PHYSICS
from tests.formulas.tensile_twins import TENSILE
from tests.formulas.twins import (
    DENSITY,
    FORCE,
    HEAT,
    KELVIN,
    LENGTH,
    LINE,
    MASS_DENSITY,
    MOLAR,
    MOLAR_MASS,
    ONE,
    PER_LENGTH,
    SPECIFIC,
    STRESS,
    Case,
    Dimensions,
)

import coldwork.formulas
from coldwork.errors import InvalidArgument
from coldwork.formulas.formula import Formula

NEW_UNITS = (2.0, 3.0, 5.0, 7.0, 11.0)  # how much smaller each base unit becomes


def degrees(angle: float) -> mpf:
    return mpf(angle) * mpmath.pi / 180


def pyramid_contact_area(diagonal: mpf) -> mpf:
    side = diagonal / mpmath.sqrt(2)
    slant = side / 2 / mpmath.sin(degrees(68))  # height of a face, 136 deg between faces
    return 4 * side * slant / 2


def knoop_area(long_diagonal: mpf) -> mpf:
    depth = long_diagonal / 2 / mpmath.tan(degrees(86.25))
    return long_diagonal * 2 * depth * mpmath.tan(degrees(65)) / 2


def cap_diameter(force: mpf, hardness: mpf, ball: mpf) -> mpf:
    depth = force / (mpmath.pi * ball * hardness)
    radius = ball / 2
    return 2 * mpmath.sqrt(radius**2 - (radius - depth) ** 2)


def vickers_hardness(force: mpf, diagonal_1: mpf, diagonal_2: mpf) -> mpf:
    return force / pyramid_contact_area((diagonal_1 + diagonal_2) / 2)


def brinell_hardness(force: mpf, diameter_1: mpf, diameter_2: mpf, ball: mpf) -> mpf:
    d = (diameter_1 + diameter_2) / 2
    return 2 * force / (mpmath.pi * ball * (ball - mpmath.sqrt(ball**2 - d**2)))


def line_energy(
    energy_factor: mpf,
    burgers_vector: mpf,
    outer_radius: mpf,
    core_radius: mpf,
    shear_modulus: mpf,
    core_energy: mpf,
) -> mpf:
    # Shear strain energy of cylindrical shells: K b^2 / (8 pi^2 r^2) over 2 pi r dr.
    shells = mpmath.log(outer_radius) - mpmath.log(core_radius)
    return burgers_vector**2 * (
        energy_factor / (8 * mpmath.pi**2) * 2 * mpmath.pi * shells + core_energy * shear_modulus
    )


TAYLOR = {
    "taylor_factor": ONE,
    "coefficient": ONE,
    "shear_modulus": STRESS,
    "burgers_vector": LENGTH,
}
TAYLOR_POINT = (3.06, 0.3, 44e9, 0.2556e-9)
UNWINDING = {
    "stress": STRESS,
    "initial_hardening": STRESS,
    "saturation_stress": STRESS,
    "strain": ONE,
}
BALL = {"hardness": STRESS, "force": FORCE, "ball": LENGTH}
BALL_POINTS = ((2.29e9, 29420.0, 10e-3), (4.2e8, 612.9, 2.5e-3), (1.1e8, 306.5, 2.5e-3))

CASES: dict[str, Case] = (
    {
        "vickers_hardness": Case(
            vickers_hardness,
            {"force": FORCE, "diagonal_1": LENGTH, "diagonal_2": LENGTH},
            STRESS,
            ((9.807, 100e-6, 104e-6), (98.07, 0.31e-3, 0.29e-3), (0.0981, 7.5e-6, 8e-6)),
        ),
        "vickers_diagonal": Case(
            lambda force, hardness: mpmath.sqrt(force / hardness / pyramid_contact_area(1)),
            {"force": FORCE, "hardness": STRESS},
            LENGTH,
            ((9.807, 1.2e9), (294.2, 8e9)),
        ),
        "knoop_hardness": Case(
            lambda force, long_diagonal: force / knoop_area(long_diagonal),
            {"force": FORCE, "long_diagonal": LENGTH},
            STRESS,
            ((0.9807, 80e-6), (4.903, 210e-6)),
        ),
        "knoop_diagonal": Case(
            lambda force, hardness: mpmath.sqrt(force / hardness / knoop_area(1)),
            {"force": FORCE, "hardness": STRESS},
            LENGTH,
            ((0.9807, 1.2e9), (4.903, 8e9)),
        ),
        "brinell_hardness": Case(
            brinell_hardness,
            {"force": FORCE, "diameter_1": LENGTH, "diameter_2": LENGTH, "ball": LENGTH},
            STRESS,
            ((29420.0, 4e-3, 4.1e-3, 10e-3), (306.5, 0.71e-3, 0.7e-3, 2.5e-3)),
        ),
        "brinell_diameter": Case(
            lambda force, hardness, ball: cap_diameter(force, hardness, ball),
            {"force": FORCE, "hardness": STRESS, "ball": LENGTH},
            LENGTH,
            ((29420.0, 2.29e9, 10e-3), (306.5, 1.1e8, 2.5e-3)),
        ),
        "projected_pressure": Case(
            lambda hardness: hardness * pyramid_contact_area(1) / (mpf(1) / 2),
            {"hardness": STRESS},
            STRESS,
            ((1.2e9,), (8e9,)),
        ),
        "brinell_projected_pressure": Case(
            lambda hardness, force, ball: (
                4 * force / (mpmath.pi * cap_diameter(force, hardness, ball) ** 2)
            ),
            BALL,
            STRESS,
            BALL_POINTS,
        ),
        "brinell_strain": Case(
            lambda hardness, force, ball, strain_ratio: (
                strain_ratio * cap_diameter(force, hardness, ball) / ball
            ),
            BALL | {"strain_ratio": ONE},
            ONE,
            tuple((*point, 0.2) for point in BALL_POINTS),
        ),
        "tabor_flow_stress": Case(
            lambda pressure, intercept, constraint_factor: (
                pressure / constraint_factor - intercept / constraint_factor
            ),
            {"pressure": STRESS, "intercept": STRESS, "constraint_factor": ONE},
            STRESS,
            ((1.2e9, 3e7, 3.0), (5e8, -2e8, 2.8), (9e8, 0.0, 2.5)),
            sign_is_free=frozenset({"intercept"}),
        ),
        "hall_petch_stress": Case(
            lambda grain_size, coefficient: coefficient * grain_size ** (-mpf(1) / 2),
            {"grain_size": LENGTH, "coefficient": (1, -0.5, -2, 0, 0)},
            STRESS,
            ((25e-6, 0.74e6), (3e-6, 0.11e6)),
            zero_is_fine=frozenset({"coefficient"}),
        ),
        "taylor_density": Case(
            lambda stress, taylor_factor, coefficient, shear_modulus, burgers_vector: (
                stress**2 / (taylor_factor * coefficient * shear_modulus * burgers_vector) ** 2
            ),
            {"stress": STRESS} | TAYLOR,
            DENSITY,
            ((250e6, *TAYLOR_POINT), (12e6, 2.75, 0.25, 82e9, 0.2482e-9)),
        ),
        "taylor_density_from_slope": Case(
            lambda stress, slope: stress**2 / slope**2,
            {"stress": STRESS, "slope": PER_LENGTH},
            DENSITY,
            ((180e6, 18.0), (7e8, 9.5)),
        ),
        "taylor_stress": Case(
            lambda density, taylor_factor, coefficient, shear_modulus, burgers_vector: (
                taylor_factor * coefficient * shear_modulus * burgers_vector * mpmath.sqrt(density)
            ),
            {"density": DENSITY} | TAYLOR,
            STRESS,
            ((1e15, *TAYLOR_POINT), (3e12, 2.75, 0.25, 82e9, 0.2482e-9)),
        ),
        "taylor_stress_from_slope": Case(
            lambda density, slope: slope * mpmath.sqrt(density),
            {"density": DENSITY, "slope": PER_LENGTH},
            STRESS,
            ((1e14, 18.0), (4e15, 9.5)),
        ),
        "mean_spacing": Case(
            lambda density: density ** (-mpf(1) / 2),
            {"density": DENSITY},
            LENGTH,
            ((1e14,), (3e10,), (9e16,)),
        ),
        "unwound_stress": Case(
            lambda stress, initial_hardening, saturation_stress, strain: (
                saturation_stress
                + (stress - saturation_stress)
                * mpmath.exp(initial_hardening * strain / saturation_stress)
            ),
            UNWINDING,
            STRESS,
            (
                (180e6, 1.7e9, 320e6, 0.08),
                (-40e6, 1.7e9, 320e6, 0.08),
                (319e6, 2.5e9, 320e6, 0.02),
                (90e6, 1.2e9, 1e12, 0.08),
            ),
            zero_is_fine=frozenset({"strain"}),
            sign_is_free=frozenset({"stress"}),
        ),
        "energy_factor": Case(
            lambda shear_modulus, poisson_ratio, mean_cos2: (
                mean_cos2 * shear_modulus + (1 - mean_cos2) * shear_modulus / (1 - poisson_ratio)
            ),
            {"shear_modulus": STRESS, "poisson_ratio": ONE, "mean_cos2": ONE},
            STRESS,
            ((42.1e9, 0.343, 0.5), (82e9, 0.29, 0.1), (27e9, 0.44, 0.97)),
            zero_is_fine=frozenset({"mean_cos2", "poisson_ratio"}),
            sign_is_free=frozenset({"poisson_ratio"}),
        ),
        "core_radius": Case(
            lambda multiple, burgers_vector: multiple * burgers_vector,
            {"multiple": ONE, "burgers_vector": LENGTH},
            LENGTH,
            ((1.0, 0.256e-9), (0.25, 0.286e-9)),
        ),
        "outer_radius": Case(
            lambda length, factor: length * factor,
            {"length": LENGTH, "factor": ONE},
            LENGTH,
            ((1e-7, 1.0), (25e-6, 0.5)),
        ),
        "line_energy": Case(
            line_energy,
            {
                "energy_factor": STRESS,
                "burgers_vector": LENGTH,
                "outer_radius": LENGTH,
                "core_radius": LENGTH,
                "shear_modulus": STRESS,
                "core_energy": ONE,
            },
            LINE,
            (
                (53e9, 0.256e-9, 1e-7, 0.256e-9, 42e9, 0.05),
                (53e9, 0.256e-9, 1e-6, 0.6e-9, 42e9, 0.0),
                (80e9, 0.248e-9, 2e-9, 0.5e-9, 82e9, -0.02),
            ),
            sign_is_free=frozenset({"core_energy"}),
        ),
        "line_energy_rule_of_thumb": Case(
            lambda shear_modulus, burgers_vector: shear_modulus * burgers_vector**2 / 2,
            {"shear_modulus": STRESS, "burgers_vector": LENGTH},
            LINE,
            ((42.1e9, 0.256e-9), (82e9, 0.248e-9)),
        ),
        "stored_energy": Case(
            lambda density, line_energy: density * line_energy,
            {"density": DENSITY, "line_energy": LINE},
            STRESS,
            ((1e15, 1.4e-9), (2e12, 3e-9)),
            zero_is_fine=frozenset({"density"}),
        ),
        "stored_energy_molar": Case(
            lambda stored_energy, molar_mass, mass_density: (
                stored_energy * (molar_mass / mass_density)
            ),
            {"stored_energy": STRESS, "molar_mass": MOLAR_MASS, "mass_density": MASS_DENSITY},
            MOLAR,
            ((1.4e6, 63.546e-3, 8960.0), (3e4, 26.98e-3, 2699.0)),
            zero_is_fine=frozenset({"stored_energy"}),
        ),
        "stored_energy_specific": Case(
            lambda stored_energy, mass_density: stored_energy / mass_density,
            {"stored_energy": STRESS, "mass_density": MASS_DENSITY},
            SPECIFIC,
            ((1.4e6, 8960.0), (3e4, 2699.0)),
            zero_is_fine=frozenset({"stored_energy"}),
        ),
        "temperature_rise": Case(
            lambda stored_energy, mass_density, heat_capacity: (
                stored_energy / mass_density / heat_capacity
            ),
            {"stored_energy": STRESS, "mass_density": MASS_DENSITY, "heat_capacity": HEAT},
            KELVIN,
            ((1.4e6, 8960.0, 385.0), (3e4, 2699.0, 897.0)),
            zero_is_fine=frozenset({"stored_energy"}),
        ),
        "stored_fraction": Case(
            lambda stored_energy, plastic_work: stored_energy / plastic_work,
            {"stored_energy": STRESS, "plastic_work": STRESS},
            ONE,
            ((1.4e6, 3e7), (6e6, 1.6e8)),
            zero_is_fine=frozenset({"stored_energy"}),
        ),
    }
    | PHYSICS
    | TENSILE
)


def formulas() -> dict[str, tuple[str, Formula]]:
    found: dict[str, tuple[str, Formula]] = {}
    for module in pkgutil.walk_packages(coldwork.formulas.__path__, "coldwork.formulas."):
        members = vars(importlib.import_module(module.name)).items()
        found |= {x.name: (name, x) for name, x in members if isinstance(x, Formula)}
    return found


FORMULAS = formulas()
POINTS = [(name, place) for name, case in CASES.items() for place in range(len(case.points))]
ARGUMENTS = [(name, argument) for name, case in CASES.items() for argument in case.arguments]


def test_every_formula_has_a_twin_and_every_twin_a_formula() -> None:
    assert set(FORMULAS) == set(CASES)


@pytest.mark.parametrize("name", CASES)
def test_the_two_functions_and_the_twin_take_the_same_names(name: str) -> None:
    constant, formula = FORMULAS[name]
    names = list(CASES[name].arguments)
    assert constant == name.upper()
    for function in (formula.value, formula.sensitivities, CASES[name].twin):
        assert list(inspect.signature(function).parameters) == names
    assert list(formula.sensitivities(**CASES[name].at(0))) == names


@pytest.mark.parametrize(("name", "place"), POINTS)
def test_value_and_sensitivities_agree_with_multi_precision(name: str, place: int) -> None:
    _, formula = FORMULAS[name]
    case = CASES[name]
    at = case.at(place)
    slopes = formula.sensitivities(**at)
    with mpmath.workdps(50):
        exact = {k: mpf(x) for k, x in at.items()}
        assert_allclose(formula.value(**at), float(case.twin(**exact)), rtol=1e-9)
        for argument, x in exact.items():
            expected = mpmath.diff(
                lambda v, argument=argument, exact=exact: case.twin(**(exact | {argument: v})),
                x,
                relative=bool(x),
            )
            assert_allclose(slopes[argument], float(expected), rtol=1e-9, err_msg=argument)


@pytest.mark.parametrize(("name", "place"), POINTS)
def test_a_change_of_units_changes_nothing_else(name: str, place: int) -> None:
    # Kilogram, metre, second, kelvin and mole each made smaller by a factor of its own:
    # a lost or extra power shows, whatever formula the code and the twin agree on.
    _, formula = FORMULAS[name]
    case = CASES[name]
    at = case.at(place)
    scaled = {k: x * scale(case.arguments[k]) for k, x in at.items()}
    assert_allclose(formula.value(**scaled), formula.value(**at) * scale(case.result), rtol=1e-12)


def scale(dimensions: Dimensions) -> float:
    return float(np.prod([f**power for f, power in zip(NEW_UNITS, dimensions, strict=True)]))


@pytest.mark.parametrize(("name", "argument"), ARGUMENTS)
@pytest.mark.parametrize("shape", [(), (4,), (2, 3), (0,)])
def test_keeps_the_broadcast_shape(name: str, argument: str, shape: tuple[int, ...]) -> None:
    _, formula = FORMULAS[name]
    at = CASES[name].at(0)
    arrays = at | {argument: np.full(shape, at[argument])}
    value = formula.value(**arrays)
    assert value.shape == shape
    assert value.dtype == np.float64
    for slope in formula.sensitivities(**arrays).values():
        assert slope.dtype == np.float64
        assert np.broadcast_shapes(slope.shape, shape) == shape


@pytest.mark.parametrize(("name", "argument"), ARGUMENTS)
def test_a_missing_argument_gives_a_missing_value(name: str, argument: str) -> None:
    _, formula = FORMULAS[name]
    at = CASES[name].at(0)
    value = formula.value(**(at | {argument: np.array([np.nan, at[argument]])}))
    assert np.isnan(value).tolist() == [True, False]


@pytest.mark.parametrize(("name", "argument"), ARGUMENTS)
def test_refuses_an_impossible_argument_by_name(name: str, argument: str) -> None:
    _, formula = FORMULAS[name]
    case = CASES[name]
    at = case.at(0)
    bad = [np.inf, -np.inf]
    if argument not in case.sign_is_free:
        bad.append(-abs(at[argument]))
        if argument not in case.zero_is_fine:
            bad.append(0.0)
    for value in bad:
        one_bad = at | {argument: np.array([value, at[argument]])}
        for function in (formula.value, formula.sensitivities):
            with pytest.raises(InvalidArgument, match=rf"^{argument} must be .*1 bad of 2"):
                function(**one_bad)


@pytest.mark.parametrize(("name", "argument"), ARGUMENTS)
def test_zero_is_taken_where_it_is_possible(name: str, argument: str) -> None:
    case = CASES[name]
    if argument in case.zero_is_fine | case.sign_is_free:
        _, formula = FORMULAS[name]
        at = case.at(0) | {argument: 0.0}
        with mpmath.workdps(50):
            expected = float(case.twin(**{k: mpf(x) for k, x in at.items()}))
        assert_allclose(formula.value(**at), expected, rtol=1e-12)
