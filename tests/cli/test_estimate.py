"""What `estimate` tells where a batch would flag, and the options that it does not take."""

import json
from collections.abc import Callable

import pytest
from typer.testing import Result

Cw = Callable[..., Result]

GRAIN = ("--set", 'line_energy.outer_radius = "grain"')
PETCH = ("--set", "strength.friction_mpa = 20", "--set", "strength.hall_petch_mpa_m05 = 0.1")
NO_RADIUS = "the outer radius is not larger than the core radius"


@pytest.mark.parametrize(
    ("words", "reasons"),
    [
        (("--density", "1e14"), []),
        (("--density", "1e25"), ["above what a crystal can hold", NO_RADIUS]),
        (("--density", "1e18"), ["above what a crystal can hold", "less than five core radii"]),
        (("--density", "1e9"), ["below what a metal holds"]),
        (("--density", "1e14", *GRAIN), ["the outer radius is the grain size"]),
        (("--stress", "100", *PETCH), ["There is no baseline"]),
        (
            ("--stress", "110", "--baseline", "75", "--u-baseline", "10"),
            ["a quarter of it or more"],
        ),
        (("--stress", "75", "--baseline", "80", "--u", "9"), ["the upper ends are what"]),
        (("--stress", "75", "--baseline", "800"), ["neither a density nor an upper end"]),
        (("--hardness", "90", "--baseline", "50"), ["the strain that the indent itself put in"]),
    ],
)
def test_what_a_batch_would_flag_is_told(
    cw: Cw, words: tuple[str, ...], reasons: list[str]
) -> None:
    told = cw("estimate", "copper", *words)
    assert told.exit_code == 0
    remark = json.loads(cw("estimate", "copper", *words, "--json").stdout)["remark"]
    lines = remark.splitlines()
    assert len(lines) == len(reasons)
    for line, reason in zip(lines, reasons, strict=True):
        assert reason in line
        assert line in told.stdout


@pytest.mark.parametrize(
    ("words", "why"),
    [
        (("--density", "1e14", "--baseline", "50"), "--baseline belongs to a stress"),
        (("--stress", "90", "--baseline", "50", "--force", "98"), "belong to a hardness"),
        (("--density", "1e14", "--scale", "HK"), "belong to a hardness"),
        (("--hardness", "90", "--baseline", "50", "--ball", "5"), "ball belongs to HBW"),
        (("--hardness", "90", "--baseline", "50", "--force", "5"), "or to a size effect"),
        (("--hardness", "90", "--u-baseline", "5"), "goes with --baseline"),
        (("--density", "1,5e14"), "write the decimal comma as a point: 1.5e14"),
        (("--density", "1 e14"), "is not a number"),
    ],
)
def test_an_option_that_cannot_act_is_refused(cw: Cw, words: tuple[str, ...], why: str) -> None:
    result = cw("estimate", "copper", *words)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert why in " ".join(result.stderr.replace("│", " ").split())
