"""The chain of formulas against the logarithmic sensitivities that its algebra gives.

With the constant law, an isotropic line, R = f / sqrt(rho), r0 = m b, no core term and
L = ln(R / r0), u = rho E is (sigma / (M alpha G b))^2 K b^2 / (4 pi) L, and so
d ln u = (2 - 1/L) d ln sigma and so on: derived by hand, no number from the code.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.formulas.line_energy import (
    CORE_RADIUS,
    ENERGY_FACTOR,
    LINE_ENERGY,
    OUTER_RADIUS,
)
from coldwork.formulas.stored_energy import STORED_ENERGY, STORED_ENERGY_SPECIFIC
from coldwork.formulas.taylor import MEAN_SPACING, TAYLOR_DENSITY, TAYLOR_DENSITY_FROM_SLOPE
from coldwork.measured import Measured, Value, apply, value_of

VALUES: dict[str, float | NDArray[np.float64]] = {
    "stress": np.array([30e6, 120e6, 320e6, 800e6]),
    "M": 3.06,
    "alpha": 0.30,
    "G": 44e9,
    "b": 0.2556e-9,
    "multiple": 1.3,
    "factor": 0.8,
    "slope": 10.3,
}


def stored(density: Value, measured: dict[str, Measured]) -> tuple[Measured, NDArray[np.float64]]:
    """Stored energy, and ln(R / r0), from a density and the inputs that enter after it."""
    spacing = apply(MEAN_SPACING, density=density)
    outer = apply(OUTER_RADIUS, length=spacing, factor=measured["factor"])
    core = apply(CORE_RADIUS, multiple=measured["multiple"], burgers_vector=measured["b"])
    k = apply(ENERGY_FACTOR, shear_modulus=measured["G"], poisson_ratio=0.34, mean_cos2=0.5)
    line = apply(
        LINE_ENERGY,
        energy_factor=k,
        burgers_vector=measured["b"],
        outer_radius=outer,
        core_radius=core,
        shear_modulus=measured["G"],
        core_energy=0.0,
    )
    energy = apply(STORED_ENERGY, density=density, line_energy=line)
    energy = apply(STORED_ENERGY_SPECIFIC, stored_energy=energy, mass_density=8960.0)
    assert isinstance(energy, Measured)
    return energy, np.log(value_of(outer) / value_of(core))


def logarithmic(energy: Measured, name: str) -> NDArray[np.float64]:
    return np.asarray(energy.sensitivities[name] * VALUES[name] / energy.value)


@pytest.fixture
def measured() -> dict[str, Measured]:
    return {name: Measured.of_input(name, value) for name, value in VALUES.items()}


def test_from_coefficient_modulus_and_burgers_vector(measured: dict[str, Measured]) -> None:
    density = apply(
        TAYLOR_DENSITY,
        stress=measured["stress"],
        taylor_factor=measured["M"],
        coefficient=measured["alpha"],
        shear_modulus=measured["G"],
        burgers_vector=measured["b"],
    )
    energy, log_ratio = stored(density, measured)
    by_log = 1.0 / log_ratio
    expected = {
        "stress": 2.0 - by_log,
        "M": by_log - 2.0,
        "alpha": by_log - 2.0,
        "G": by_log - 1.0,
        "b": 0.0 * by_log,
        "multiple": -by_log,
        "factor": by_log,
    }
    assert set(energy.sensitivities) == set(expected)
    for name, value in expected.items():
        assert_allclose(logarithmic(energy, name), value, rtol=1e-12, atol=1e-12, err_msg=name)


def test_from_a_slope_measured_as_one(measured: dict[str, Measured]) -> None:
    density = apply(TAYLOR_DENSITY_FROM_SLOPE, stress=measured["stress"], slope=measured["slope"])
    energy, log_ratio = stored(density, measured)
    by_log = 1.0 / log_ratio
    expected = {
        "stress": 2.0 - by_log,
        "slope": by_log - 2.0,
        "G": 1.0 + 0.0 * by_log,
        "b": 2.0 - by_log,
        "multiple": -by_log,
        "factor": by_log,
    }
    assert set(energy.sensitivities) == set(expected)
    for name, value in expected.items():
        assert_allclose(logarithmic(energy, name), value, rtol=1e-12, atol=1e-12, err_msg=name)


def test_what_is_the_same_for_all_coupons_is_kept_once(measured: dict[str, Measured]) -> None:
    core = apply(CORE_RADIUS, multiple=measured["multiple"], burgers_vector=measured["b"])
    assert isinstance(core, Measured)
    assert all(np.ndim(c) == 0 for c in core.sensitivities.values())
