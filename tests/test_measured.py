"""Sensitivities carried through arithmetic and formulas, against plain differentiation."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.formulas.formula import Formula
from coldwork.measured import Measured, apply, select, value_of


def product(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    return np.asarray(a * b)


def product_sensitivities(a: np.ndarray, b: np.ndarray) -> dict[str, np.ndarray]:
    return {"a": np.asarray(b), "b": np.asarray(a)}


PRODUCT = Formula(product, product_sensitivities)


def x(value: float) -> Measured:
    return Measured.of_input("x", np.array([value, 2 * value]))


def y(value: float) -> Measured:
    return Measured.of_input("y", value)


def test_arithmetic_follows_the_rules_of_differentiation() -> None:
    # f = x y - 3 x + 7 at (x, y) = (2, 5) and (4, 5): f_x = y - 3, f_y = x.
    f = x(2.0) * y(5.0) - 3.0 * x(2.0) + np.array([7.0, 7.0])
    assert_allclose(f.value, [2 * 5 - 6 + 7, 4 * 5 - 12 + 7])
    assert_allclose(f.sensitivities["x"], [2.0, 2.0])
    assert_allclose(f.sensitivities["y"], [2.0, 4.0])


def test_an_array_in_front_leaves_it_to_the_measured_value() -> None:
    f = np.array([1.0, 2.0]) - x(2.0)
    assert isinstance(f, Measured)
    assert_allclose(f.value, [-1.0, -2.0])
    assert_allclose(f.sensitivities["x"], -1.0)


def test_what_cancels_leaves_no_sensitivity() -> None:
    f = x(2.0) - x(2.0)
    assert_allclose(f.sensitivities["x"], 0.0)


def test_apply_follows_the_chain_rule() -> None:
    # a = 2 x, b = x + y: (a b)' by x is 2 b + a, by y is a.
    a, b = 2.0 * x(3.0), x(3.0) + y(1.0)
    f = apply(PRODUCT, a=a, b=b)
    assert isinstance(f, Measured)
    assert_allclose(f.sensitivities["x"], 2 * b.value + a.value)
    assert_allclose(f.sensitivities["y"], a.value)


def test_apply_to_plain_arrays_computes_only() -> None:
    f = apply(PRODUCT, a=np.array([2.0]), b=3.0)
    assert isinstance(f, np.ndarray)
    assert_allclose(f, [6.0])


def test_a_scalar_sensitivity_stays_a_scalar() -> None:
    f = Measured.of_input("c", 3.0) + x(1.0)
    assert np.ndim(f.sensitivities["c"]) == 0


def test_select_takes_each_element_from_its_choice() -> None:
    which = np.array([0, 1, 1, -1], dtype=np.int8)
    f = select(which, {0: Measured.of_input("c", 3.0), 1: Measured.of_input("d", 5.0)})
    assert isinstance(f, Measured)
    assert_allclose(f.value, [3.0, 5.0, 5.0, np.nan])
    assert_allclose(f.sensitivities["c"], [1.0, 0.0, 0.0, 0.0])
    assert_allclose(f.sensitivities["d"], [0.0, 1.0, 1.0, 0.0])


def test_select_of_one_choice_is_that_choice() -> None:
    only = Measured.of_input("c", 3.0)
    assert select(np.zeros(4, dtype=np.int8), {0: only, 1: 7.0}) is only


def test_where_blanks_value_and_sensitivities() -> None:
    f = x(2.0).where(np.array([True, False]))
    assert_allclose(f.value, [2.0, np.nan])
    assert_allclose(f.sensitivities["x"], [1.0, np.nan])


@pytest.mark.parametrize("plain", [2.0, np.array([2.0, 3.0])])
def test_value_of_a_plain_value_is_itself(plain: float | np.ndarray) -> None:
    assert_allclose(value_of(plain), plain)
