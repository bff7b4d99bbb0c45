"""Turn one value of a sheet, bare or with its uncertainty, into an input."""

from dataclasses import dataclass
from math import exp, inf, isfinite, log
from typing import Any, Final

import numpy as np

from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import Spec
from coldwork.inputs.positions import KeyPath
from coldwork.inputs.quantity import SHAPES, Input, lognormal_u
from coldwork.inputs.words import nearest, shown
from coldwork.units import to_si

__all__ = ["Given", "as_number", "refuse_unreal_numbers", "to_given"]

_PARTS: Final = ("value", "u", "factor", "shape", "shared", "degrees_of_freedom", "source")
_LARGEST_FACTOR: Final = 1000.0


def as_number(value: object) -> float | None:
    """Give a TOML integer or float as a finite float, None for anything else."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return None
    try:
        number = float(value)
    except OverflowError:
        return None
    return number if isfinite(number) else None


def refuse_unreal_numbers(causes: Causes) -> None:
    """Refuse ``inf``, ``nan`` and integers beyond a double, wherever they stand.

    Each is then replaced by 1, so that later checks have a number to look at.
    """
    open_values: list[tuple[KeyPath, Any]] = [((), causes.sheet.tables)]
    while open_values:
        path, around = open_values.pop()
        items = list(around.items() if isinstance(around, dict) else enumerate(around))
        for key, value in items:
            if isinstance(value, dict | list):
                open_values.append(((*path, key), value))
            elif _is_unreal(value):
                causes.add(
                    (*path, key),
                    f"{shown(value)} is not a number that can be computed with",
                    "Numbers are finite, and TOML's inf and nan are none.",
                    "Write a finite number, or leave the key out.",
                )
                around[key] = 1.0


def _is_unreal(value: object) -> bool:
    a_number = isinstance(value, int | float) and not isinstance(value, bool)
    return a_number and as_number(value) is None


@dataclass(frozen=True)
class Given:
    """An input beside its numbers as they were written.

    Attributes
    ----------
    input : Input
        The input. [SI]
    value, u : float
        Value and standard uncertainty, without the rounding of a conversion.
        [`input.unit`]
    """

    input: Input
    value: float
    u: float


@dataclass(frozen=True)
class _Spread:
    """Standard uncertainty in the key's unit, with the distribution that it belongs to."""

    u: float
    shape: str
    factor: float | None


def to_given(causes: Causes, path: KeyPath, raw: object, spec: Spec, origin: str) -> Given | None:
    """Turn a value of the sheet into an input.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong.
    path : tuple
        The key, for messages and for the name.
    raw : object
        What TOML has: a number, or a table with `value` and more.
    spec : Spec
        Unit and window.
    origin : str
        Who gave it.

    Returns
    -------
    Given or None
        None if there is a cause.
    """
    table = raw if isinstance(raw, dict) else {"value": raw}
    at = (*path, "value") if isinstance(raw, dict) else path
    _refuse_unknown_parts(causes, path, table)
    value = _value(causes, at, table.get("value"), spec)
    spread = _spread(causes, path, table, spec, value)
    shared = _shared(causes, path, table)
    freedom = _freedom(causes, path, table)
    source = _source(causes, path, table)
    if causes.within(path) or value is None or spread is None:
        return None
    si = to_si(np.array([value, spread.u]), spec.unit)
    found = Input(
        name=".".join(str(part) for part in path),
        value=float(si[0]),
        u=float(si[1]),
        unit=spec.unit,
        shape=spread.shape,
        factor=spread.factor,
        shared=shared,
        degrees_of_freedom=freedom,
        source=source,
        origin=origin,
    )
    return Given(found, value, spread.u)


def _refuse_unknown_parts(causes: Causes, path: KeyPath, table: dict[str, Any]) -> None:
    for part in table:
        if part not in _PARTS:
            causes.add(
                (*path, part),
                f"a number has no part '{part}'" if part.isprintable() else "unknown part",
                "Unknown keys are errors.",
                nearest(part, _PARTS),
            )


def _value(causes: Causes, path: KeyPath, value: object, spec: Spec) -> float | None:
    number = as_number(value)
    if number is None:
        missing = value is None
        causes.add(
            path,
            "it has no value" if missing else f"{shown(value)} is not a number",
            "A number is written bare, or as { value = 3.06, u = 0.05 }.",
            "Say the value." if missing else "Write it without quotes, with a point.",
        )
        return None
    fault = spec.fault(number)
    if fault:
        unit = "" if spec.unit == "1" else f" {spec.unit}"
        what = f"{number:g}{unit} is impossible here"
        causes.add(path, what, fault, "Check the number and its unit.")
    return number


def _spread(
    causes: Causes, path: KeyPath, table: dict[str, Any], spec: Spec, value: float | None
) -> _Spread | None:
    shape = table.get("shape", "lognormal" if "factor" in table else "normal")
    if shape not in SHAPES:
        causes.add(
            (*path, "shape"),
            f"{shown(shape)} is not a shape",
            "The shape of a number is one of " + ", ".join(SHAPES) + ".",
            nearest(str(shape), SHAPES),
        )
        return None
    if "factor" in table and "u" in table:
        causes.add(
            (*path, "factor"),
            "u and factor are both given",
            "Each of them says how uncertain the number is.",
            "Keep one of them.",
        )
        return None
    if "factor" in table:
        return _from_factor(causes, path, table["factor"], shape, value)
    if "shape" in table and "u" not in table:
        causes.add(
            (*path, "shape"),
            "it has a shape and nothing that is spread",
            "A shape says how an uncertainty is distributed.",
            "Give u (or factor), or take shape out.",
        )
        return None
    return _from_u(causes, path, table.get("u", 0), shape, spec, value)


def _from_factor(
    causes: Causes, path: KeyPath, raw: object, shape: str, value: float | None
) -> _Spread | None:
    factor = as_number(raw)
    if factor is None or not 1.0 < factor <= _LARGEST_FACTOR:
        causes.add(
            (*path, "factor"),
            f"{shown(raw)} is not a factor above 1 (and up to {_LARGEST_FACTOR:g})",
            "A factor of 1.2 says that the number may well be 20 % more, or as much less.",
            "Write such a factor, or give u.",
        )
        return None
    if shape != "lognormal":
        causes.add(
            (*path, "shape"),
            f"a number with a factor cannot be {shape}",
            "A factor belongs to a lognormal number.",
            "Take shape out, or give u instead of factor.",
        )
        return None
    if value is None or not _is_above_zero(causes, path, value):
        return None
    return _Spread(lognormal_u(value, factor), shape, factor)


def _from_u(
    causes: Causes, path: KeyPath, raw: object, shape: str, spec: Spec, value: float | None
) -> _Spread | None:
    u = as_number(raw)
    if u is None or u < 0.0 or u > spec.high - min(spec.low, 0.0):
        causes.add(
            (*path, "u"),
            f"{shown(raw)} is not a standard uncertainty",
            "It is a number in the unit of the value, zero or positive, and not beyond all bounds.",
            "Write one standard deviation, not an interval.",
        )
        return None
    if shape != "lognormal":
        return _Spread(u, shape, None)
    if value is None or not _is_above_zero(causes, path, value):
        return None
    if not 0.0 < u / value <= log(_LARGEST_FACTOR):
        causes.add(
            (*path, "shape"),
            "a lognormal number needs its spread",
            "It is lognormal by a factor, or by a u from which the factor follows.",
            "Give factor, such as 1.2.",
        )
        return None
    return _Spread(u, shape, exp(u / value))


def _is_above_zero(causes: Causes, path: KeyPath, value: float) -> bool:
    if value <= 0.0:
        causes.add(
            (*path, "value"),
            f"{value:g} cannot be lognormal",
            "The logarithm of a lognormal number is normal, so the number is above zero.",
            "Give u instead of factor, or another value.",
        )
    return value > 0.0


def _shared(causes: Causes, path: KeyPath, table: dict[str, Any]) -> bool:
    shared = table.get("shared", True)
    if not isinstance(shared, bool):
        causes.add(
            (*path, "shared"),
            f"{shown(shared)} is neither true nor false",
            "shared says whether the error is the same for every coupon.",
            "Write true or false, without quotes.",
        )
    return shared is not False


def _freedom(causes: Causes, path: KeyPath, table: dict[str, Any]) -> float:
    if "degrees_of_freedom" not in table:
        return inf
    number = as_number(table["degrees_of_freedom"])
    if number is None or number < 1.0:
        causes.add(
            (*path, "degrees_of_freedom"),
            f"{shown(table['degrees_of_freedom'])} is not a number of degrees of freedom",
            "They are 1 or more, and without limit when the key is left out.",
            "Write the number behind u, such as readings less one.",
        )
        return inf
    return number


def _source(causes: Causes, path: KeyPath, table: dict[str, Any]) -> str:
    source = table.get("source", "")
    if not isinstance(source, str):
        causes.add(
            (*path, "source"),
            f"{shown(source)} is not text",
            "source says where the number was found.",
            "Put it in quotes.",
        )
        return ""
    return source
