"""What relation 3 needs of a sheet: its number, the pyramid, and nothing that contradicts."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]


@pytest.mark.parametrize(
    ("section", "lines", "words"),
    [
        ("indentation", 'size_effect = "length"', "characteristic_depth_um is not given"),
        ("indentation", 'size_effect = "strength"', "size_strength_gpa2_um is not given"),
        ("indentation", "characteristic_depth_um = 1", "size_effect is 'none'"),
        (
            "indentation",
            'size_effect = "fitted"\nsize_strength_gpa2_um = 1',
            "size_effect is 'fitted'",
        ),
        (
            "indentation",
            'size_effect = "strength"\nsize_strength_gpa2_um = -1',
            "must not be negative",
        ),
        ("indentation", 'size_effect = "fit"', "size_effect"),
        ("indentation.HBW", 'size_effect = "fitted"', "cannot be used for HBW"),
        ("indentation.HK", "characteristic_depth_um = 1", "cannot be used for HK"),
    ],
)
def test_is_refused_by_name(
    refusals: Refusals, sheet: str, section: str, lines: str, words: str
) -> None:
    causes = refusals(f"{sheet}\n[{section}]\n{lines}\n")
    assert any(words in cause and "batch.toml, line 2" in cause for cause in causes), causes
    assert len(causes) == 1 or section == "indentation.HK"  # which lacks its constants too


@pytest.mark.parametrize(
    ("lines", "number"),
    [
        ('size_effect = "fitted"', None),
        (
            'size_effect = "length"\ncharacteristic_depth_um = { value = 1.6, factor = 1.2 }',
            "characteristic_depth_um",
        ),
        (
            'size_effect = "strength"\nsize_strength_gpa2_um = { value = 0.54, u = 0.05 }',
            "size_strength_gpa2_um",
        ),
    ],
)
def test_is_carried_by_the_method(write: Write, sheet: str, lines: str, number: str | None) -> None:
    method = read_method(write(f"{sheet}\n[indentation]\n{lines}\n"))
    assert f'"{method.laws.size_effect}"' in lines
    told = {name for name in method.inputs if "depth" in name or "size" in name}
    assert told == (set() if number is None else {f"indentation.{number}"})
