"""Choices that do not work yet: each is refused by its own name, never as a misspelling."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]

NOT_YET = "not built yet"


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("{ value = 50.0, u = 15.0 }", '{ from_coupon = "A0" }', "taken from a coupon"),
        (
            "shear_modulus_gpa",
            "boundary_energy_j_per_m2 = 0.6\nshear_modulus_gpa",
            "recrystallisation",
        ),
        (
            "shear_modulus_gpa",
            "stacking_fault_energy_j_per_m2 = 0.06\nshear_modulus_gpa",
            "recovery",
        ),
    ],
)
def test_a_key_asks_for_what_is_not_there_yet(
    refusals: Refusals, sheet: str, old: str, new: str, words: str
) -> None:
    causes = refusals(sheet.replace(old, new, 1))
    assert any(words in cause and NOT_YET in cause for cause in causes), causes


@pytest.mark.parametrize(
    "more",
    [
        "[temperature]\ntest_c = 20\nreference_c = 20.0",
        "[temperature]\ntest_c = 23.0",
        "[indentation]\nsize_effect = 'none'",
        "[indentation.HBW]\nsize_effect = 'none'",
        "[hardening]\nlaw = 'constant'",
        "[line_energy]\nelasticity = 'isotropic'",
        "[uncertainty]\nmethod = 'first-order'",
    ],
)
def test_saying_what_holds_anyway_is_fine(write: Write, sheet: str, more: str) -> None:
    assert read_method(write(f"{sheet}\n{more}\n")).batch_id == "CS-2026-31"


def test_an_exponent_of_one_is_fine(write: Write, sheet: str) -> None:
    text = sheet.replace("baseline_mpa", "superposition_exponent = 1.0\nbaseline_mpa")
    assert read_method(write(text)).batch_id == "CS-2026-31"
