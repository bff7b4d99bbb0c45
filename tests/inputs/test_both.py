"""Both routes in a sheet: what it needs, and what does not go with it."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.inputs.both import flow_of
from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]

UNWOUND = "[indentation]\ninitial_hardening_mpa = 1700.0\nsaturation_stress_mpa = 320.0\n"


@pytest.fixture
def both(sheet: str) -> str:
    """The usual sheet by both routes, without its section on indents."""
    text = sheet.replace('route = "indent"', 'route = "both"')
    assert "[indentation]" not in text
    return text.replace('indents.csv"', 'indents.csv"\nflow_stress = "flow_stress.csv"', 1)


@pytest.fixture
def refused(write: Write, refusals: Refusals) -> Refusals:
    """Tell what is wrong with a sheet whose flow curves are there."""

    def told(text: str) -> list[str]:
        (write(text) / "flow_stress.csv").write_text("coupon_id\n", encoding="utf-8")
        return refusals(text)

    return told


@pytest.mark.parametrize(
    ("more", "words"),
    [
        ("", "two strains"),
        ("[indentation]\nrepresentative_strain = 0.08\n", "two strains"),
        ("[flow]\nplastic_strain = 0.08\n", "0.08, has u 0.005"),
        (UNWOUND + "[uncertainty]\nmethod = 'monte-carlo'\nseed = 1\n", "'monte-carlo'"),
    ],
)
def test_what_does_not_go_with_both_is_refused_by_name(
    refused: Refusals, both: str, more: str, words: str
) -> None:
    (cause,) = refused(f"{both}\n{more}")
    assert words in cause


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("[files]", '[files]\nexclusions = "exclusions.csv"', "exclusions"),
        ("[files]", '[files]\ncurves = "curves.csv"', "curves do not go"),
        ("[strength]", "[strength]\nobstacle_mpa = 20.0", "obstacle"),
        ('flow_stress = "flow_stress.csv"\n', "", "needs the files"),
    ],
)
def test_a_table_or_key_that_both_cannot_take(
    refused: Refusals, both: str, old: str, new: str, words: str
) -> None:
    assert old in both
    causes = refused(both.replace(old, new, 1) + "\n" + UNWOUND)
    assert any(words in cause for cause in causes), causes


@pytest.mark.parametrize(
    ("more", "unwound"),
    [
        (UNWOUND, True),
        ("[indentation]\nrepresentative_strain = 0.08\n[flow]\nplastic_strain = 0.08\n", False),
    ],
)
def test_what_brings_them_to_one_strain(write: Write, both: str, more: str, unwound: bool) -> None:
    folder = write(f"{both}\n{more}")
    (folder / "flow_stress.csv").write_text("coupon_id\n", encoding="utf-8")
    method = read_method(folder)
    assert (method.route, method.laws.route, flow_of(method).laws.route) == (
        "both",
        "indent",
        "flow",
    )
    assert method.laws.unwinding is flow_of(method).laws.unwinding is unwound
    assert method.document["laws"]["route"] == "both"  # type: ignore[index]
