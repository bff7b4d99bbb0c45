"""Coupons on and below their baseline, through the whole pipeline."""

from collections.abc import Callable
from math import exp, log, pi, sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pandas as pd
import pytest
from scipy.special import stdtr, stdtrit

import coldwork

Make = Callable[..., Path]

SHEET: Final = """
[batch]
id = "annealed"
[material]
name = "copper"
shear_modulus_gpa = 44.0
poisson_ratio = 0.343
burgers_vector_nm = 0.2556
mass_density_kg_per_m3 = 8960.0
[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"
[strength]
route = "flow"
baseline_mpa = { value = 50.0, u = 4.0, degrees_of_freedom = 10 }
[hardening]
taylor_factor = { value = 3.06, u = 0.15 }
coefficient = { value = 0.30, factor = 1.2 }
[line_energy]
outer_radius_factor = 1.0
core_radius_b = 1.0
[character]
screw = 0.5
edge = 0.5
[uncertainty]
repeatability = "own"
[[limits]]
id = "soft-enough"
quantity = "dislocation_density_per_m2"
upper = 1e14
"""
POINTS: Final = (0.0, 1.0, -1.0, 0.6, -0.6)  # about a mean, in MPa
SLOPE: Final = 3.06 * 0.30 * 44e9 * 0.2556e-9  # M alpha G b [N/m]


@pytest.fixture(scope="module")
def annealed(make_once: Make) -> dict[str, pd.DataFrame]:
    means = {"above": 90.0, "on": 50.0, "below": 47.0, "far below": 20.0, "one": 90.0}
    folder = make_once(
        SHEET,
        coupons=[{"coupon_id": name} for name in means],
        flow_stress=[
            {
                "coupon_id": name,
                "reading_no": i,
                "plastic_strain": 0.002,
                "flow_stress_mpa": round(mean + point, 3),
            }
            for name, mean in means.items()
            for i, point in enumerate(POINTS)
            if name != "one" or i == 0
        ],
    )
    frames = coldwork.process(folder).frames
    return {name: frames[name].set_index("coupon_id") for name in ("coupons", "decisions")}


S_OWN: Final = sqrt(sum(x * x for x in POINTS) / 4.0 / 5.0)  # s / sqrt(n) of any coupon [MPa]
U: Final = sqrt(S_OWN**2 + 4.0**2)
NU: Final = U**4 / (S_OWN**4 / 4.0 + 4.0**4 / 10.0)  # JCGM 100, G.4
M: Final = sqrt((2 * 0.15 / 3.06) ** 2 + (2 * log(1.2)) ** 2)  # of the density


@pytest.mark.parametrize(("name", "s"), [("on", 0.0), ("below", -3.0)])
def test_upper_ends_are_what_the_uncertainty_allows(
    annealed: dict[str, pd.DataFrame], name: str, s: float
) -> None:
    # DESIGN section 5: where s <= 0, lower 0, upper y(s + k u(s)) exp(k m), k of s.
    row = annealed["coupons"].loc[name]
    assert row["dislocation_stress_mpa"] == pytest.approx(s, abs=1e-9)
    k = float(stdtrit(NU, 0.975))
    top = ((s + k * U) * 1e6 / SLOPE) ** 2
    expected = {
        "lower_dislocation_density_per_m2": 0.0,
        "upper_dislocation_density_per_m2": top * exp(k * M),
        "lower_stored_energy_j_per_g": 0.0,
    }
    for column, value in expected.items():
        assert row[column] == pytest.approx(value, rel=1e-9), column
    ratio = log(1.0 / sqrt(top) / 0.2556e-9)
    factor = 44e9 * (1 - 0.343 / 2) / (1 - 0.343)
    energy = top * factor * 0.2556e-9**2 / (4 * pi) * ratio / 8960.0 / 1e3
    late = M * (1 - 0.5 / ratio)  # d ln u / d ln alpha = -(2 - 1/L)
    upper = row["upper_stored_energy_j_per_g"]
    assert upper == pytest.approx(energy * exp(k * late), rel=1e-9)
    for column in ("dislocation_density_per_m2", "mean_spacing_nm", "line_energy_j_per_m"):
        assert np.isnan(row[column]), column
    for column in ("u_dislocation_density_per_m2", "u_stored_energy_j_per_g"):
        assert np.isnan(row[column]), column
    assert "below-baseline" in row["flags"].split(";")


def test_a_contradicted_baseline_has_no_upper_end(annealed: dict[str, pd.DataFrame]) -> None:
    row = annealed["coupons"].loc["far below"]
    assert {"below-baseline", "baseline-contradicted"} <= set(row["flags"].split(";"))
    assert row["lower_dislocation_density_per_m2"] == 0.0
    assert np.isnan(row["upper_dislocation_density_per_m2"])
    assert np.isnan(row["upper_stored_energy_j_per_g"])
    assert row["upper_dislocation_stress_mpa"] < 0.0


def test_strengths_keep_their_plain_interval(annealed: dict[str, pd.DataFrame]) -> None:
    row = annealed["coupons"].loc["below"]
    k = float(stdtrit(NU, 0.975))
    assert row["u_dislocation_stress_mpa"] == pytest.approx(U, rel=1e-9)
    assert row["u_own_dislocation_stress_mpa"] == pytest.approx(S_OWN, rel=1e-9)
    assert row["lower_dislocation_stress_mpa"] == pytest.approx(-3.0 - k * U, rel=1e-9)


def test_decisions_without_a_value(annealed: dict[str, pd.DataFrame]) -> None:
    # undecided unless the upper bound settles it: at most 1e14 per m2, one-sided at 95 %
    decisions = annealed["decisions"]
    k = float(stdtrit(NU, 0.95))
    for name, s in (("on", 0.0), ("below", -3.0)):
        bound = ((s + k * U) * 1e6 / SLOPE) ** 2 * exp(k * M)
        assert bound < 1e14
        assert decisions["bound"][name] == pytest.approx(bound, rel=1e-9)
        assert decisions["decision"][name] == "conforming"
        assert np.isnan(decisions["value"][name])


def test_the_probability_of_the_limit_is_that_of_the_end(
    annealed: dict[str, pd.DataFrame],
) -> None:
    # the k at which y(s + k u) exp(k m) meets 1e14, by bisection here
    low, high = 0.0, 100.0
    for _ in range(200):
        k = (low + high) / 2.0
        low, high = (k, high) if ((k * U) * 1e6 / SLOPE) ** 2 * exp(k * M) < 1e14 else (low, k)
    p = annealed["decisions"]["probability"]["on"]
    assert p == pytest.approx(float(stdtr(NU, k)), rel=1e-6)


def test_a_single_reading_is_not_known_rather_than_exact(
    annealed: dict[str, pd.DataFrame],
) -> None:
    row = annealed["coupons"].loc["one"]
    assert row["flow_stress_mpa"] == 90.0
    assert row["dislocation_density_per_m2"] == pytest.approx((40e6 / SLOPE) ** 2, rel=1e-12)
    for name in ("flow_stress_mpa", "dislocation_stress_mpa", "stored_energy_j_per_g"):
        for prefix in ("u_own", "u", "lower", "upper"):
            assert np.isnan(row[f"{prefix}_{name}"]), (prefix, name)
        shared = row[f"u_shared_{name}"]
        assert shared == 0.0 if name == "flow_stress_mpa" else shared > 0.0
    assert "no-repeatability" in row["flags"].split(";")
    assert annealed["decisions"]["decision"]["one"] == "undecided"
