"""Numbers that a law takes in a range alone: their spread, and what they need beside them."""

from collections.abc import Mapping
from math import sqrt
from typing import Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import KeyName, spec_of
from coldwork.inputs.numbers import Given
from coldwork.inputs.quantity import Input

__all__ = ["refuse_bad_ranges"]

_BOUNDED: Final = (("strength", "superposition_exponent"), ("structure", "wall_fraction"))
_REACH: Final = {"normal": 3.0, "uniform": sqrt(3.0), "triangular": sqrt(6.0)}  # in u


def refuse_bad_ranges(causes: Causes, given: Mapping[KeyName, Given]) -> None:
    """Refuse numbers whose spread leaves the range of their law, and an exponent of nothing.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong.
    given : mapping of tuple to Given
        What the sheet gives.
    """
    for key in _BOUNDED:
        if key in given:
            _refuse_wide(causes, key, given[key].input)
    _refuse_ratio_of_densities(causes, given)
    exponent = given.get(("strength", "superposition_exponent"))
    alone = ("strength", "obstacle_mpa") not in given
    if alone and exponent is not None and (exponent.value != 1.0 or exponent.u > 0.0):
        causes.add(
            ("strength", "superposition_exponent"),
            "there is no obstacle stress that it could join",
            "The exponent says how obstacle_mpa and the dislocation stress add up.",
            "Give obstacle_mpa, or leave the exponent out.",
        )


def _refuse_ratio_of_densities(causes: Causes, given: Mapping[KeyName, Given]) -> None:
    hardening = causes.sheet.tables.get("hardening", {})
    law = hardening.get("law", "constant") if isinstance(hardening, dict) else "constant"
    if ("structure", "density_ratio") in given and str(law).startswith("logarithmic"):
        causes.add(
            ("structure", "density_ratio"),
            "a ratio of densities is given with a logarithmic law",
            "Walls and interiors then have a coefficient each, and stresses another ratio.",
            "Give stress_ratio in its place.",
        )


def _refuse_wide(causes: Causes, key: KeyName, number: Input) -> None:
    """Refuse a spread that reaches beyond the range; ranges are those of numbers without unit."""
    spec = spec_of(key)
    if spec is None or number.u == 0.0:
        return
    if number.factor is None:
        reach = _REACH[number.shape] * number.u
        low, high = number.value - reach, number.value + reach
    else:
        low, high = number.value / number.factor**3, number.value * number.factor**3
    if low < spec.low or high > spec.high:
        causes.add(
            (*key, "u" if number.factor is None else "factor"),
            f"{number.value:g} may well be {low:g} or {high:g} by its uncertainty",
            f"The law holds from {spec.low:g} to {spec.high:g}.",
            'Give a smaller uncertainty, or shape = "uniform" with half the width over sqrt(3).',
        )
