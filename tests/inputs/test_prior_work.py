"""What the work along a Voce curve needs of a sheet; each refusal by name and line."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]
CURVE = "initial_hardening_mpa = 1700.0\nsaturation_stress_mpa = 320.0\n"
VOCE = '[prior_work]\nfrom = "voce"\n'


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        (VOCE, "[indentation] does not give initial_hardening_mpa, saturation_stress_mpa"),
        (f"[indentation]\n{CURVE}{VOCE}saturation_stress_mpa = 320.0", "that of [indentation]"),
        ("[prior_work]\nsaturation_stress_mpa = 320", "no curve is asked for"),
        ('[prior_work]\nfrom = "vocal"', "vocal"),
    ],
)
def test_is_refused_by_name(refusals: Refusals, sheet: str, lines: str, words: str) -> None:
    (cause,) = refusals(f"{sheet}\n{lines}\n")
    assert words in cause
    assert "prior_work" in cause


def test_obstacles_share_in_the_work(refusals: Refusals, sheet: str) -> None:
    text = sheet.replace("baseline_mpa", "obstacle_mpa = 40.0\nbaseline_mpa", 1)
    (cause,) = refusals(f"{text}\n[indentation]\n{CURVE}{VOCE}")
    assert "obstacle_mpa is given" in cause


def test_the_indents_own_curve_serves(write: Write, sheet: str) -> None:
    method = read_method(write(f"{sheet}\n[indentation]\n{CURVE}{VOCE}"))
    assert method.laws.prior_work == "voce"
    assert method.inputs["prior_work.initial_stress_mpa"].value == 0.0
    plain = read_method(write(f"{sheet}\n[prior_work]\nfrom = 'stated'\n"))
    assert not [name for name in plain.inputs if name.startswith("prior_work.")]
