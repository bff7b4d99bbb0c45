"""Guards: what passes, what is refused, and what the refusal says."""

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import ColdworkError, InvalidArgument
from coldwork.guards import between, finite, not_negative, positive

Guard = Callable[[str, ArrayLike], NDArray[np.float64]]


def between_0_and_1(name: str, value: ArrayLike) -> NDArray[np.float64]:
    return between(name, value, 0.0, 1.0)


GUARDS: dict[str, tuple[Guard, list[float], list[float]]] = {
    "positive": (positive, [5e-324, 1.0, 1.7e308], [0.0, -0.0, -1.0, np.inf, -np.inf]),
    "not_negative": (not_negative, [0.0, 1.0, 1.7e308], [-5e-324, -1.0, np.inf, -np.inf]),
    "finite": (finite, [0.0, -1.0, 1.7e308], [np.inf, -np.inf]),
    "between": (between_0_and_1, [5e-324, 0.5], [0.0, 1.0, -1.0, np.inf, -np.inf]),
}


@pytest.mark.parametrize("name", GUARDS)
def test_gives_back_what_is_fine(name: str) -> None:
    guard, good, _ = GUARDS[name]
    kept = guard("x", good)
    assert kept.dtype == np.float64
    assert kept.tolist() == good


@pytest.mark.parametrize("name", GUARDS)
def test_a_missing_value_passes(name: str) -> None:
    guard, good, _ = GUARDS[name]
    assert np.isnan(guard("x", [np.nan, good[0]])).tolist() == [True, False]


@pytest.mark.parametrize("name", GUARDS)
@pytest.mark.parametrize("shape", [(), (3,), (2, 3), (0,)])
def test_keeps_the_shape(name: str, shape: tuple[int, ...]) -> None:
    guard, good, _ = GUARDS[name]
    assert guard("x", np.full(shape, good[-1])).shape == shape


@pytest.mark.parametrize(
    ("name", "bad"), [(name, bad) for name, (_, _, all_bad) in GUARDS.items() for bad in all_bad]
)
def test_names_the_argument_how_many_and_the_first(name: str, bad: float) -> None:
    guard, good, _ = GUARDS[name]
    with pytest.raises(InvalidArgument) as caught:
        guard("burgers_vector", [[good[0], np.nan], [bad, bad]])
    assert str(caught.value).startswith("burgers_vector must be ")
    assert str(caught.value).endswith(f"(2 bad of 4, the first is {bad:g})")


def test_a_whole_number_becomes_a_float() -> None:
    assert positive("x", 3).dtype == np.float64
    assert positive("x", [1, 2]).dtype == np.float64


def test_the_refusal_is_both_ours_and_a_value_error() -> None:
    assert issubclass(InvalidArgument, ValueError)
    assert issubclass(InvalidArgument, ColdworkError)


def test_between_says_its_ends() -> None:
    with pytest.raises(InvalidArgument, match=r"nu must be between -1 and 0\.5 "):
        between("nu", 0.5, -1.0, 0.5)
