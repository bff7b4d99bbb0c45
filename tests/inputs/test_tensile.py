"""What a sheet says of curves: read whole, and refused by name where it cannot be."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]

TENSILE = """
[tensile]
mode = "tension"
strain_from = "extension"
"""


@pytest.fixture
def flow(sheet: str) -> str:
    """A sheet whose flow stresses come from curves; any file stands in for them."""
    files = sheet.replace('indents = "indents.csv"', 'curves = "flow_stress.csv"')
    return files.replace('route = "indent"', 'route = "flow"')


def test_the_section_is_read_with_its_defaults(write: Write, flow: str) -> None:
    method = read_method(write(flow + TENSILE))
    tensile = method.tensile
    assert tensile is not None
    assert (tensile.mode, tensile.strain_from, tensile.stress_is) == ("tension", "extension", None)
    assert tensile.slope_between == (0.1, 0.4)
    assert tensile.offsets == (0.002,)
    assert tensile.reported_strains == (0.002, 0.01, 0.02, 0.05, 0.1, 0.15, 0.2)
    assert tensile.fit == ("voce", "hollomon")
    assert tensile.fit_between is None
    assert not tensile.bridgman
    assert not tensile.curve_points
    assert method.laws.flow_from == "curves"
    assert [path.name for path in method.curves] == ["flow_stress.csv"]


def test_every_key_of_the_section_is_taken(write: Write, flow: str) -> None:
    keys = """
slope_between = [0.2, 0.5]
slope_gpa = { value = 118.0, u = 2.0 }
offsets = [0.001, 0.002, 0.01]
reported_strains = [0.01, 0.1]
fit = ["hollomon"]
fit_between = [0.01, 0.1]
force_u_rel = 0.003
extension_u_rel = 0
area_u_rel = 0.01
bridgman = true
[output]
curve_points = true
"""
    method = read_method(write(flow + TENSILE + keys))
    tensile = method.tensile
    assert tensile is not None
    assert tensile.slope_between == (0.2, 0.5)
    assert tensile.offsets == (0.001, 0.002, 0.01)
    assert tensile.fit_between == (0.01, 0.1)
    assert tensile.bridgman
    assert tensile.curve_points
    slope = method.inputs["tensile.slope_gpa"]
    assert (slope.value, slope.u, slope.unit) == (118e9, 2e9, "GPa")
    assert method.inputs["tensile.force_u_rel"].u == 0.003
    assert method.document["tensile"] == {
        "mode": "tension",
        "strain_from": "extension",
        "stress_is": None,
        "slope_between": [0.2, 0.5],
        "offsets": [0.001, 0.002, 0.01],
        "reported_strains": [0.01, 0.1],
        "fit": ["hollomon"],
        "fit_between": [0.01, 0.1],
        "bridgman": True,
    }


def test_the_machine_enters_as_inputs_that_every_coupon_shares(write: Write, flow: str) -> None:
    inputs = read_method(write(f"{flow}{TENSILE}force_u_rel = 0.003\n")).inputs
    force, area = inputs["tensile.force_u_rel"], inputs["tensile.area_u_rel"]
    assert (force.value, force.u, force.unit, force.shared) == (0.0, 0.003, "1", True)
    assert (force.origin, area.origin) == ("sheet", "default")
    assert area.u == 0.0058  # 1 % over the root of 3
    assert area.source


def test_defaults_are_told_once(write: Write, flow: str) -> None:
    defaults = read_method(write(flow + TENSILE)).document["defaults"]
    assert isinstance(defaults, list)
    assert defaults.count("tensile.force_u_rel") == 1
    assert "tensile.reported_strains" in defaults


def test_without_curves_nothing_of_them_is_in_the_method(write: Write, sheet: str) -> None:
    method = read_method(write(f"{sheet}{TENSILE}slope_gpa = 118.0\n"))
    assert method.tensile is None
    assert not [name for name in method.inputs if name.startswith("tensile.")]
    assert "tensile" not in method.document
    assert method.laws.flow_from == ""


def test_curves_may_stand_beside_indents_and_points(write: Write, sheet: str, flow: str) -> None:
    beside = sheet.replace("[files]", '[files]\ncurves = "flow_stress.csv"') + TENSILE
    assert read_method(write(beside)).laws.flow_from == ""
    both = flow.replace("[files]", '[files]\nflow_stress = "indents.csv"') + TENSILE
    assert read_method(write(both)).laws.flow_from == "points"


@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ('mode = "torsion"\nstrain_from = "extension"', "cannot be chosen"),
        ('strain_from = "extension"', "[tensile] mode: this key is missing"),
        ('mode = "tension"', "none of strain_from, stress_is is given"),
        (f"{TENSILE[11:]}slope_between = [0.4, 0.1]", "[0.4, 0.1] is not a range"),
        (f"{TENSILE[11:]}slope_between = [0.1, 0.2, 0.3]", "is not a range"),
        (f"{TENSILE[11:]}slope_between = [0.1]", "[tensile] slope_between"),
        (f"{TENSILE[11:]}slope_between = [0.1, 40]", "out of range"),
        (f"{TENSILE[11:]}fit_between = [0.1, 0.1]", "is not a range"),
        (f"{TENSILE[11:]}reported_strains = [0.1, 0.05]", "the strains do not rise"),
        (f"{TENSILE[11:]}reported_strains = [0.0]", "out of range"),
        (f"{TENSILE[11:]}reported_strains = []", "[tensile] reported_strains"),
        (f"{TENSILE[11:]}offsets = [0.01, 0.002]", "the strains do not rise"),
        (f'{TENSILE[11:]}fit = ["linear"]', "cannot be chosen"),
        (f"{TENSILE[11:]}slope_gpa = 118000", "impossible here"),
        (f"{TENSILE[11:]}force_u_rel = -0.01", "out of range"),
        (f"{TENSILE[11:]}force_rel = 0.01", "The nearest known name is 'force_u_rel'"),
        (
            'mode = "compression"\nstrain_from = "crosshead"\nbridgman = true',
            "true cannot be chosen",
        ),
    ],
)
def test_what_cannot_be_is_refused_by_name(
    refusals: Refusals, flow: str, keys: str, words: str
) -> None:
    causes = refusals(f"{flow}\n[tensile]\n{keys}\n")
    assert any(words in cause for cause in causes), causes
    assert all("[tensile]" in cause for cause in causes)


def test_curves_need_their_section(refusals: Refusals, flow: str) -> None:
    (cause,) = refusals(flow)
    assert "[tensile]" in cause
    assert "this section is missing" in cause
    assert "Curves are read as [tensile] says" in cause


def test_a_flow_route_needs_points_or_curves(refusals: Refusals, sheet: str) -> None:
    text = sheet.replace('route = "indent"', 'route = "flow"')
    causes = refusals(text.replace('indents = "indents.csv"\n', ""))
    assert any("none of flow_stress, curves is given" in cause for cause in causes), causes


def test_points_of_curves_that_are_not_there_are_refused(refusals: Refusals, sheet: str) -> None:
    (cause,) = refusals(f"{sheet}\n[output]\ncurve_points = true\n")
    assert "no curves are named" in cause
