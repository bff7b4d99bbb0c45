"""What ``[tensile]`` of a sheet says of curves, and what a schema cannot say about it."""

from collections.abc import Mapping
from dataclasses import asdict
from itertools import pairwise
from typing import Any, Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import schema_of
from coldwork.inputs.laws import choice
from coldwork.inputs.method import Tensile
from coldwork.inputs.numbers import Given, as_number
from coldwork.inputs.quantity import Input

__all__ = ["machine_numbers", "refuse_bad_tensile", "tensile_document", "tensile_of"]

_SECTION: Final = "tensile"
_RISING: Final = ("offsets", "reported_strains")
_PAIRS: Final = ("slope_between", "fit_between")
_MACHINE: Final = ("force_u_rel", "extension_u_rel", "area_u_rel")


def refuse_bad_tensile(causes: Causes) -> None:
    """Refuse ranges that run backwards, and curve points of curves that are not there."""
    tables = causes.sheet.tables
    section = tables.get(_SECTION)
    if isinstance(section, dict):
        for key in _PAIRS:
            _refuse_bad_pair(causes, section, key)
        for key in _RISING:
            _refuse_falling(causes, section, key)
    output, files = (tables.get(name) for name in ("output", "files"))
    asked = isinstance(output, dict) and output.get("curve_points") is True
    if asked and isinstance(files, dict) and "curves" not in files:
        causes.add(
            ("output", "curve_points"),
            "curve points are asked for and no curves are named",
            "They are the points of [files] curves.",
            "Name the curves, or take the key out.",
        )


def tensile_of(tables: Mapping[str, Any]) -> Tensile | None:
    """Read the section of a sheet that fits; None where no curves are named."""
    if "curves" not in tables["files"]:
        return None

    def said(key: str) -> Any:  # noqa: ANN401  # whatever TOML can hold
        return choice(tables, _SECTION, key)

    low, high = said("slope_between")
    between = said("fit_between")
    return Tensile(
        mode=said("mode"),
        strain_from=said("strain_from"),
        stress_is=said("stress_is"),
        slope_between=(float(low), float(high)),
        offsets=tuple(float(x) for x in said("offsets")),
        reported_strains=tuple(float(x) for x in said("reported_strains")),
        fit=tuple(said("fit")),
        fit_between=None if between is None else (float(between[0]), float(between[1])),
        bridgman=said("bridgman"),
        curve_points=choice(tables, "output", "curve_points"),
    )


def tensile_document(tensile: Tensile) -> dict[str, object]:
    """Give the section for ``method.json``; `curve_points` stands under ``output`` there."""
    return {
        key: list(value) if isinstance(value, tuple) else value
        for key, value in asdict(tensile).items()
        if key != "curve_points"
    }


def machine_numbers(causes: Causes) -> dict[str, Given]:
    """Give the machine's relative errors as inputs of value 0, none where no curves are named.

    Parameters
    ----------
    causes : Causes
        Of a sheet that fits.

    Returns
    -------
    dict of str to Given
        By name, such as ``tensile.force_u_rel``.
    """
    tables = causes.sheet.tables
    if "curves" not in tables["files"]:
        return {}
    found = {}
    for key in _MACHINE:
        path = (_SECTION, key)
        u, origin = float(choice(tables, *path)), causes.sheet.origin(path)
        source = str(schema_of(path).get("source", "")) if origin == "default" else ""
        x = Input(f"{_SECTION}.{key}", 0.0, u, "1", source=source, origin=origin)
        found[x.name] = Given(x, 0.0, u)
    return found


def _refuse_bad_pair(causes: Causes, section: Mapping[str, Any], key: str) -> None:
    pair = section.get(key)
    if not isinstance(pair, list) or causes.within((_SECTION, key)):
        return
    ends = [as_number(end) for end in pair]
    if len(pair) == 2 and None not in ends and pair[0] < pair[1]:
        return
    causes.add(
        (_SECTION, key),
        f"{pair} is not a range",
        "A range is a lower and an upper end.",
        "Write two numbers, the smaller one first.",
    )


def _refuse_falling(causes: Causes, section: Mapping[str, Any], key: str) -> None:
    strains = section.get(key)
    if not isinstance(strains, list) or causes.within((_SECTION, key)):
        return
    if any(later <= sooner for sooner, later in pairwise(strains)):
        causes.add(
            (_SECTION, key),
            "the strains do not rise",
            "They are told in the order in which the metal passes them.",
            "Write them from the smallest to the largest, each once.",
        )
