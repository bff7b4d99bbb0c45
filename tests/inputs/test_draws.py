"""What a sheet may ask of Monte Carlo, and the refusals."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.inputs.method import Draws
from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]
ASKED = '\n[uncertainty]\nmethod = "monte-carlo"\n'


@pytest.mark.parametrize(
    ("more", "expected"),
    [
        ("seed = 1", Draws(1, 100_000, adaptive=False, digits=1)),
        ("seed = 9\ndraws = 5000\ndigits = 2", Draws(9, 5000, adaptive=False, digits=2)),
        ('seed = 0\ndraws = "adaptive"', Draws(0, 1_000_000, adaptive=True, digits=1)),
    ],
)
def test_monte_carlo_is_read(write: Write, sheet: str, more: str, expected: Draws) -> None:
    method = read_method(write(f"{sheet}{ASKED}{more}\n"))
    assert method.draws == expected
    told = method.document["uncertainty"]
    assert isinstance(told, dict)
    assert told["seed"] == expected.seed
    assert "first order" in told["first_order"] or "u_" in told["first_order"]


def test_first_order_draws_nothing(write: Write, sheet: str) -> None:
    assert read_method(write(sheet)).draws is None


@pytest.mark.parametrize(
    ("more", "key", "words"),
    [
        ("", "seed", "missing"),
        ("seed = 1.0", "seed", "not a whole number"),
        ('seed = "one"', "seed", "not a whole number"),
        ("seed = true", "seed", "not a whole number"),
        ("seed = -1", "seed", "at least 0"),
        ("seed = 1\ndraws = 500", "draws", "at least 1000"),
        ("seed = 1\ndraws = 1500", "draws", "2000 draws or more"),
        ("seed = 1\ndraws = 12000.0", "draws", "not a whole number"),
        ('seed = 1\ndraws = "many"', "draws", "does not fit"),
        ("seed = 1\ndraws = 10000000000000", "draws", "This machine holds"),
        ("seed = 1\ndigits = 3", "digits", "one of 1"),
    ],
)
def test_what_cannot_be_drawn_is_refused(
    refusals: Refusals, sheet: str, more: str, key: str, words: str
) -> None:
    (cause,) = refusals(f"{sheet}{ASKED}{more}\n")
    assert key in cause
    assert words in cause


@pytest.mark.parametrize("line", ["draws = 100000", 'draws = "adaptive"', "seed = 1", "digits = 1"])
@pytest.mark.parametrize("method", ["", 'method = "first-order"\n'])
def test_keys_of_monte_carlo_belong_to_it(
    refusals: Refusals, sheet: str, method: str, line: str
) -> None:
    (cause,) = refusals(f"{sheet}\n[uncertainty]\n{method}{line}\n")
    assert "was not chosen" in cause
