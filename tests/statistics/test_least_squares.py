"""Non-linear least squares: NIST's certified values, straight line, scaling, refusals."""

import tomllib
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas.hardening_laws import (
    hollomon_stress,
    hollomon_stress_sensitivities,
)
from coldwork.statistics.least_squares import LeastSquares, fit_least_squares

FloatArray = NDArray[np.float64]
Model = Callable[[FloatArray], FloatArray]
CERTIFIED = tomllib.loads(
    (Path(__file__).parents[1] / "reference" / "nist_nonlinear.toml").read_text("utf-8")
)
SETS = [(name, k) for name in ("Misra1a", "DanWood", "Rat43") for k in range(2)]


def saturating(x: FloatArray) -> tuple[Model, Model]:
    """Misra1a, written out here: on the way b1 passes through values no stress may have."""

    def model(b: FloatArray) -> FloatArray:
        return np.asarray(-b[0] * np.expm1(-b[1] * x))

    def jacobian(b: FloatArray) -> FloatArray:
        return np.column_stack([-np.expm1(-b[1] * x), b[0] * x * np.exp(-b[1] * x)])

    return model, jacobian


def power(x: FloatArray) -> tuple[Model, Model]:
    """DanWood by the law of Hollomon."""

    def model(b: FloatArray) -> FloatArray:
        return hollomon_stress(x, b[0], b[1])

    def jacobian(b: FloatArray) -> FloatArray:
        c = hollomon_stress_sensitivities(x, b[0], b[1])
        return np.column_stack([c["coefficient"], c["exponent"]])

    return model, jacobian


def sigmoid(x: FloatArray) -> tuple[Model, Model]:
    """Rat43, written out here."""

    def model(b: FloatArray) -> FloatArray:
        return np.asarray(b[0] * (1.0 + np.exp(b[1] - b[2] * x)) ** (-1.0 / b[3]))

    def jacobian(b: FloatArray) -> FloatArray:
        grown = np.exp(b[1] - b[2] * x)
        shape = (1.0 + grown) ** (-1.0 / b[3])
        inner = -b[0] / b[3] * shape / (1.0 + grown) * grown
        last = b[0] * shape * np.log1p(grown) / b[3] ** 2
        return np.column_stack([shape, inner, -x * inner, last])

    return model, jacobian


MODELS = {"Misra1a": saturating, "DanWood": power, "Rat43": sigmoid}


def fitted(name: str, start: int) -> LeastSquares:
    data = CERTIFIED[name]
    model, jacobian = MODELS[name](np.array(data["x"]))
    return fit_least_squares(
        model, jacobian, data["y"], data["starts"][start], np.abs(data["starts"][start])
    )


@pytest.mark.parametrize(("name", "start"), SETS)
def test_agrees_with_the_certified_values(name: str, start: int) -> None:
    # NIST StRD, from both of its starting points: see tests/reference/nist_nonlinear.toml.
    found, data = fitted(name, start), CERTIFIED[name]
    assert found.converged
    assert_allclose(found.parameters, data["parameters"], rtol=1e-6)
    assert_allclose(found.u, data["standard_deviations"], rtol=1e-6)
    assert_allclose(found.residual_sum_of_squares, data["residual_sum_of_squares"], rtol=1e-6)
    assert_allclose(found.residual_sd, data["residual_sd"], rtol=1e-6)


def test_a_straight_line_has_the_covariance_of_linear_regression() -> None:
    # Against numpy's polynomial fit.
    rng = np.random.default_rng(3)
    x = np.linspace(0.0, 2.0, 40)
    y = 3.0 - 1.5 * x + 0.1 * rng.standard_normal(x.size)
    columns = np.column_stack([x, np.ones_like(x)])
    found = fit_least_squares(lambda p: columns @ p, lambda _: columns, y, [0.0, 0.0], [1.0, 1.0])
    values, covariance = np.polyfit(x, y, 1, cov="unscaled")
    assert_allclose(found.parameters, values, rtol=1e-10)
    assert_allclose(found.covariance, covariance * found.residual_sd**2, rtol=1e-9)
    assert found.degrees_of_freedom == 38


def test_another_unit_of_y_scales_the_fit() -> None:
    data = CERTIFIED["DanWood"]
    model, jacobian = power(np.array(data["x"]))
    plain = fitted("DanWood", 0)
    start = np.array(data["starts"][0]) * [1e6, 1.0]
    scaled = fit_least_squares(model, jacobian, 1e6 * np.array(data["y"]), start, start)
    assert_allclose(scaled.parameters, plain.parameters * [1e6, 1.0], rtol=1e-7)
    assert_allclose(scaled.u, plain.u * [1e6, 1.0], rtol=1e-6)


def test_refuses_too_few_points_and_what_is_not_finite() -> None:
    model, jacobian = power(np.array([1.0, 2.0]))
    with pytest.raises(InvalidArgument, match="y must have more points than parameters"):
        fit_least_squares(model, jacobian, [1.0, 2.0], [1.0, 1.0], [1.0, 1.0])
    with pytest.raises(InvalidArgument, match="y must be finite"):
        fit_least_squares(model, jacobian, [1.0, np.inf, 2.0], [1.0, 1.0], [1.0, 1.0])
    with pytest.raises(InvalidArgument, match="scale must be positive"):
        fit_least_squares(model, jacobian, [1.0, 1.0, 2.0], [1.0, 1.0], [1.0, 0.0])
