"""Options of `estimate` as a batch sheet: the same keys, the same checks, the same method."""

import tomllib
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from coldwork.errors import BatchRefused, Cause, UsageError
from coldwork.inputs.method import Method
from coldwork.inputs.sheet import method_of
from coldwork.inputs.source import Sheet, SheetFile, read_sheet

__all__ = ["method_of_options", "pair_of"]


def method_of_options(
    material: str | None, kind: str, sheet: str | Path | None, settings: Sequence[str]
) -> Method:
    """Lay options over a batch's sheet, if there is one, and both over the defaults.

    Parameters
    ----------
    material : str or None
        A metal of the library; the sheet's own where it is not said.
    kind : str
        What is known: ``density``, ``stress`` or ``hardness``.
    sheet : str, Path or None
        A batch folder; its files, limits and testers do not count.
    settings : sequence of str
        Keys of a sheet as TOML; they come last.

    Returns
    -------
    Method
        Of no batch: it names no files that exist.

    Raises
    ------
    UsageError
        If the options make no method.
    BatchRefused
        If the sheet cannot be read.
    """
    base: dict[str, Any] = {"character": {"screw": 0.5, "edge": 0.5}}
    if sheet is not None:
        base = dict(read_sheet(Path(sheet)).tables)
    elif material is None:
        message = "name a metal of the library, or a batch folder with --sheet"
        raise UsageError(message)
    base["batch"] = {"id": "estimate"}
    base["files"] = {"coupons": "none.csv", "indents": "none.csv", "flow_stress": "none.csv"}
    base.pop("limits", None)
    base.pop("testers", None)
    if material is not None:
        base["material"] = {"name": material}
    strength = dict(base.get("strength", {}))
    strength["route"] = "indent" if kind == "hardness" else "flow"
    base["strength"] = strength
    for setting in settings:
        _lay_over(base, _parsed(setting))
    if kind == "density" and set(base["strength"]) <= {"route"}:
        base["strength"]["baseline_mpa"] = 0.0  # nothing hangs on it
    base["files"].pop("flow_stress" if kind == "hardness" else "indents")
    options = Sheet(base, (SheetFile("the options", "0" * 64, base, {}),))
    try:
        return method_of(options, Path(), with_files=False)
    except BatchRefused as refused:
        message = "\n".join(["these options make no method:", *map(_hinted, refused.causes)])
        raise UsageError(message) from refused


def pair_of(text: str) -> tuple[str, float]:
    """Read an option written as a name and a number.

    Parameters
    ----------
    text : str
        Such as ``hardness=0.01``.

    Returns
    -------
    tuple of str and float
        The two.

    Raises
    ------
    UsageError
        If it is written otherwise.
    """
    name, _, number = text.partition("=")
    try:
        return name.strip(), float(number)
    except ValueError as error:
        message = f"{text!r} is not a name and a number: write it like hardness=0.01"
        raise UsageError(message) from error


def _hinted(cause: Cause) -> str:
    if "friction_mpa" in cause.what:
        return (
            "  no baseline stress is given: say --baseline, or --set 'strength.baseline_mpa = ...'"
        )
    return f"  {cause}"


def _parsed(setting: str) -> dict[str, Any]:
    try:
        return tomllib.loads(setting)
    except tomllib.TOMLDecodeError as error:
        message = f"{setting!r} is not TOML: write it like 'hardening.coefficient = 0.3'"
        raise UsageError(message) from error


def _lay_over(base: dict[str, Any], over: Mapping[str, Any]) -> None:
    for key, value in over.items():
        below = base.get(key)
        if isinstance(value, dict) and isinstance(below, dict) and "value" not in value:
            copy = dict(below)
            _lay_over(copy, value)
            base[key] = copy
        else:
            base[key] = value
