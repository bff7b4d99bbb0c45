"""First-order uncertainty, as published, against plain random draws of every input.

The draws go through the chain as plain arrays: no sensitivity takes part. Every
relative standard uncertainty of an input is under 2 %, so that first order holds; of
200,000 draws a standard deviation is known to 0.16 %.
"""

from collections.abc import Callable, Mapping
from math import log, sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pandas as pd
import pytest
from numpy.typing import NDArray

import coldwork
from coldwork import contracts, units
from coldwork.chain import Start, energy, strength
from coldwork.inputs.method import Method
from coldwork.inputs.quantity import Input
from coldwork.inputs.sheet import read_method
from coldwork.measured import Value, value_of
from coldwork.rules.forces import SCALES

Make = Callable[..., Path]
Floats = NDArray[np.float64]
DRAWS: Final = 200_000
# Cases by the flow route.
POINTS: Final = {"flow", "slope", "temperature", "cells", "cells, logarithmic"}

HEAD: Final = """
[batch]
id = "draws"
[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 0.7 }
poisson_ratio = { value = 0.343, u = 0.006 }
burgers_vector_nm = { value = 0.2556, u = 0.002 }
mass_density_kg_per_m3 = { value = 8960.0, u = 90.0 }
molar_mass_g_per_mol = { value = 63.546, u = 0.5 }
heat_capacity_j_per_kg_k = { value = 385.0, u = 5.0, shape = "uniform" }
[character]
mix = [ { angle_deg = 0, fraction = 0.4 }, { angle_deg = 60, fraction = 0.6 } ]
[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.006
[[testers]]
id = "T2"
bias_rel = -0.003
u_rel = 0.004
"""
INDENT: Final = """
[files]
coupons = "coupons.csv"
indents = "indents.csv"
"""
FLOW: Final = """
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[flow]
plastic_strain = 0.002
"""
GIVEN: Final = "[strength]\nroute = {route}\nbaseline_mpa = {{ value = 50.0, u = 0.9 }}\n"
CONSTANT: Final = """
[hardening]
taylor_factor = { value = 3.06, u = 0.04 }
coefficient = { value = 0.30, factor = 1.018 }
"""
SPACING: Final = """
[line_energy]
outer_radius = "spacing"
outer_radius_factor = { value = 1.0, factor = 1.019 }
core_radius_b = { value = 1.0, u = 0.015, shape = "triangular" }
core_energy = { value = 0.1, u = 0.0015 }
"""
HALF: Final = SPACING.replace('"spacing"', '"half-spacing"')
GRAIN: Final = SPACING.replace('"spacing"', '"grain"')
VICKERS: Final = """
[indentation]
constraint_factor = { value = 3.0, u = 0.03 }
intercept_mpa = { value = 30.0, u = 0.5 }
representative_strain = { value = 0.08, u = 0.001 }
"""
UNWOUND: Final = VICKERS + (
    "initial_hardening_mpa = { value = 1700.0, u = 15.0 }\n"
    "saturation_stress_mpa = { value = 320.0, u = 3.0 }\n"
)
LENGTH: Final = UNWOUND + (
    'size_effect = "length"\ncharacteristic_depth_um = { value = 20.0, u = 0.3 }\n'
)
STRENGTH: Final = UNWOUND.replace("[indentation]", '[indentation]\narea = "projected"') + (
    'size_effect = "strength"\nsize_strength_gpa2_um = { value = 20.0, u = 0.3 }\n'
)
OTHERS: Final = """
[indentation.HBW]
constraint_factor = { value = 2.8, u = 0.03, shape = "uniform" }
strain_ratio = { value = 0.2, u = 0.003 }
[indentation.HK]
constraint_factor = { value = 3.1, u = 0.04 }
representative_strain = { value = 0.07, u = 0.001 }
"""
PARTS: Final = """
[strength]
route = "indent"
friction_mpa = { value = 25.5, u = 0.4 }
hall_petch_mpa_m05 = { value = 0.11, u = 0.002 }
terms_mpa = { solutes = { value = 12.0, u = 0.2 } }
"""
MELTING: Final = (
    "melting_point_k = { value = 1358.0, u = 10.0 }\n"
    "shear_modulus_slope = { value = -0.54, u = 0.01 }\n"
)
CELLS: Final = """
[structure]
kind = "cells"
wall_fraction = { value = 0.2, u = 0.003 }
density_ratio = { value = 10.0, factor = 1.018 }
"""
ARRANGED: Final = """
[line_energy]
outer_radius = "arrangement"
arrangement = { value = 0.6, factor = 1.019 }
core_radius_b = { value = 1.0, u = 0.015 }
"""
LOGARITHMIC: Final = (
    '[hardening]\nlaw = "logarithmic"\nreference_density_per_m2 = { value = 1e14, u = 1e12 }'
)
OBSTACLE: Final = (
    "obstacle_mpa = { value = 60.0, u = 1.0 }\nsuperposition_exponent = { value = 1.6, u = 0.03 }\n"
)
WARM: Final = """
[temperature]
test_c = 200.0
correction = "modulus"
thermal_mpa = { value = 90.0, u = 1.5 }
athermal_k = { value = 900.0, u = 12.0 }
"""
ROUTE_INDENT: Final = GIVEN.format(route='"indent"')
ROUTE_FLOW: Final = GIVEN.format(route='"flow"')

CASES: Final[Mapping[str, str]] = {
    "indent": HEAD + INDENT + ROUTE_INDENT + VICKERS + OTHERS + CONSTANT + SPACING,
    "unwound": HEAD + INDENT + ROUTE_INDENT + UNWOUND + OTHERS + CONSTANT + HALF,
    "projected": HEAD
    + INDENT
    + ROUTE_INDENT
    + UNWOUND.replace("[indentation]", '[indentation]\narea = "projected"')
    + OTHERS
    + CONSTANT
    + SPACING,
    "flow": HEAD + FLOW + ROUTE_FLOW + CONSTANT + SPACING,
    "slope": HEAD
    + FLOW
    + ROUTE_FLOW
    + "[hardening]\nslope_n_per_m = { value = 10.3, u = 0.15 }\n"
    + SPACING,
    "parts": HEAD + INDENT + PARTS + UNWOUND + OTHERS + CONSTANT + GRAIN,
    "temperature": HEAD.replace("[material]", "[material]\n" + MELTING)
    + FLOW
    + ROUTE_FLOW
    + WARM
    + CONSTANT
    + SPACING,
    "cells": HEAD + FLOW + ROUTE_FLOW + CONSTANT + ARRANGED + CELLS,
    "cells, logarithmic": HEAD
    + FLOW
    + ROUTE_FLOW
    + CONSTANT.replace("[hardening]", LOGARITHMIC)
    + SPACING
    + CELLS.replace("density_ratio = { value = 10.0", "stress_ratio = { value = 3.0"),
    "length": HEAD + INDENT + ROUTE_INDENT + LENGTH + OTHERS + CONSTANT + SPACING,
    "strength": HEAD + INDENT + ROUTE_INDENT + STRENGTH + OTHERS + CONSTANT + SPACING,
    "obstacle": HEAD + INDENT + ROUTE_INDENT + OBSTACLE + UNWOUND + OTHERS + CONSTANT + SPACING,
}


def rows(case: str) -> dict[str, list[dict[str, object]]]:
    """Two coupons, far enough from the baseline for first order, read on two testers."""
    names = {"a": 1.0, "b": 1.08}
    coupons: list[dict[str, object]] = [
        {
            "coupon_id": name,
            "condition": "rolled",
            "prior_plastic_work_j_per_m3": 5.2e7,
            "grain_size_um": 20,
            "u_grain_size_um": 0.35,
        }
        for name in names
    ]
    testers, noise = ["T1", "T1", "T2", "T1", "T2"], [0.99, 1.01, 1.0, 0.985, 1.012]
    readings: list[dict[str, object]] = []
    for name, times in names.items():
        for i, (tester, error) in enumerate(zip(testers, noise, strict=True), 1):
            where = {"coupon_id": name, "tester": tester if name == "a" else "T2"}
            if case in POINTS:
                strength_ = {"plastic_strain": 0.002, "flow_stress_mpa": 280.0 * times * error}
                readings.append({**where, "reading_no": i, **strength_})
            else:
                hardness = {"force_n": 98.07, "hardness": 90.0 * times * error}
                readings.append({**where, "indent_no": i, **hardness})
    if case in POINTS:
        return {"coupons": coupons, "flow_stress": readings}
    for name, scale, force, number, ball in (
        ("ball", "HBW", 1226.0, 85.0, 5.0),
        ("knoop", "HK", 9.807, 95.0, ""),
    ):
        coupons.append({**coupons[0], "coupon_id": name})
        readings += [
            {
                "coupon_id": name,
                "indent_no": i,
                "scale": scale,
                "force_n": force,
                "hardness": number * error,
                "ball_mm": ball,
                "tester": "T1",
            }
            for i, error in enumerate(noise, 1)
        ]
    return {"coupons": coupons, "indents": readings}


def drawn(x: Input, rng: np.random.Generator) -> Floats:
    """Draw an input in the shape that the sheet gives it, its u a standard deviation."""
    if x.shape == "lognormal":
        return x.value * np.exp(log(x.factor or 1.0) * rng.standard_normal(DRAWS))
    if x.shape == "uniform":
        return x.value + x.u * sqrt(3.0) * rng.uniform(-1.0, 1.0, DRAWS)
    if x.shape == "triangular":
        return x.value + x.u * sqrt(6.0) * rng.triangular(-1.0, 0.0, 1.0, DRAWS)
    return x.value + x.u * rng.standard_normal(DRAWS)


class Drawn:
    """Shared inputs drawn once; a coupon's quantities by column name, in its units.

    Parameters
    ----------
    method : Method
        The batch's.
    readings, budget : pandas.DataFrame
        As published.
    """

    def __init__(self, method: Method, readings: pd.DataFrame, budget: pd.DataFrame) -> None:
        self.method, self.readings, self.budget = method, readings, budget
        self.rng = np.random.default_rng(20260731)
        self.shared: dict[str, Floats] = {}
        for name, x in method.inputs.items():
            assert x.u <= 0.02 * abs(x.value) or name.startswith("tester:")
            self.shared[name] = drawn(x, self.rng) if x.u > 0 else np.asarray(x.value)

    def quantities(self, coupon: str) -> dict[str, Floats]:
        mine = self.readings[self.readings["coupon_id"] == coupon]
        flow = self.method.laws.route == "flow"
        column, unit = ("flow_stress_mpa", "MPa") if flow else ("hardness", "kgf/mm2")
        spread = self.budget.query("coupon_id == @coupon and input == 'repeatability'")["u"]
        mean = units.from_si(0.0, unit) + np.zeros(DRAWS)
        for value, tester, weight in zip(mine[column], mine["tester"], mine["weight"], strict=True):
            bias = self.method.inputs[f"tester:{tester}"].value
            mean += value * weight * (1.0 + bias) / (1.0 + self.shared[f"tester:{tester}"])
        mean += float(spread.iloc[0]) * self.rng.standard_normal(DRAWS)
        grain = 20e-6 + 0.35e-6 * self.rng.standard_normal(DRAWS)
        scale = -1 if flow else SCALES.index(mine["scale"].iloc[0])
        ball = {"HBW": 5e-3}.get(mine["scale"].iloc[0], np.nan)
        force = {"HBW": 125 * 9.80665, "HV": 98.07}.get(mine["scale"].iloc[0], np.nan)
        start = Start(
            mean=units.to_si(mean, unit),
            scale=np.full(DRAWS, scale, dtype=np.int8),
            force=np.full(DRAWS, force),
            ball=np.full(DRAWS, ball),
            grain_size=grain,
            plastic_work=np.full(DRAWS, 5.2e7),
            plastic_strain=0.002,
            temperature=self.method.test_temperature,
            reference_temperature=self.method.reference_temperature,
        )
        inputs: dict[str, Value] = {
            name: x for name, x in self.shared.items() if not name.startswith("tester:")
        }
        half = strength(self.method.laws, inputs, start)
        late = energy(self.method.laws, inputs, half.dislocation_stress, start)
        found = {
            "hardness" if not flow else "flow_stress_mpa": start.mean,
            "flow_stress_mpa": half.flow_stress,
            "baseline_stress_mpa": half.baseline_stress,
            "dislocation_stress_mpa": half.dislocation_stress,
            **late,
        }
        table = contracts.load("out/coupons")
        return {
            name: units.from_si(value_of(x), table.field(name).unit or "1")
            for name, x in found.items()
            if name in table.columns
        }


@pytest.fixture(params=CASES)
def case(request: pytest.FixtureRequest) -> str:
    return str(request.param)


def test_first_order_is_what_random_draws_give(make: Make, case: str) -> None:
    folder = make(CASES[case], **rows(case))
    frames = coldwork.process(folder).frames
    draws = Drawn(read_method(folder), frames["readings"], frames["budget"])
    quantities = frames["quantities"].set_index(["coupon_id", "quantity"])
    assert not frames["flags"]["rule"].eq("above-saturation").any()
    told, clones = {}, {}
    for coupon in frames["coupons"]["coupon_id"]:
        clones[coupon] = draws.quantities(coupon)
        for name, u in quantities["u"][coupon].items():
            if np.isnan(u):
                assert name == "stored_fraction_of_work"  # none while the indent's strain is in it
                assert case == "indent"
                continue
            told[coupon, name] = u / clones[coupon][str(name)].std()
    wrong = {key: ratio for key, ratio in told.items() if not 0.98 < ratio < 1.02}
    assert wrong == {}
    assert len(told) >= len(clones) * 11
    differ(frames["budget"], clones)


def differ(budget: pd.DataFrame, clones: Mapping[str, Mapping[str, Floats]]) -> None:
    """Two coupons differ by what DESIGN section 5 reads off budget.csv.

    u^2 = sum over own inputs of both + sum over shared inputs of (c_1 - c_2)^2 u^2.
    """
    for name in ("dislocation_density_per_m2", "stored_energy_j_per_g"):
        one = budget[budget["quantity"] == name].set_index(["coupon_id", "input"])
        a, b = one.loc["a"], one.loc["b"]
        own = pd.concat([x["contribution"][x["own_or_shared"] == "own"] for x in (a, b)])
        shared_a, shared_b = (x["contribution"][x["own_or_shared"] == "shared"] for x in (a, b))
        apart = shared_a.sub(shared_b, fill_value=0.0)  # (c_1 - c_2) u
        u = sqrt(float((own**2).sum() + (apart**2).sum()))
        drawn_u = float((clones["a"][name] - clones["b"][name]).std())
        assert 0.97 < u / drawn_u < 1.03, name
        apart_as_if_independent = sqrt(float((a["contribution"] ** 2).sum() * 2.0))
        assert u < 0.8 * apart_as_if_independent
