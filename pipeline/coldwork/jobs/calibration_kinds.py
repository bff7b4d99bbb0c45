"""What a calibration holds against what: columns of the table to a line, and back to constants."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.errors import UsageError
from coldwork.formulas.pressure import (
    brinell_projected_pressure,
    brinell_projected_pressure_sensitivities,
    projected_pressure,
)
from coldwork.intake.pairs import Pairs
from coldwork.rules.forces import SCALES, SECTIONS

__all__ = ["KINDS", "Kind", "Side", "hardness_kind", "unit_of_column"]

FloatArray = NDArray[np.float64]
_Turn = Callable[[FloatArray, Pairs], tuple[FloatArray, FloatArray]]

_UNITS: Final = {
    "flow_stress_mpa": "MPa",
    "dislocation_density_per_m2": "m-2",
    "hardness": "kgf/mm2",
    "grain_size_um": "um",
    "stored_energy_j_per_g": "J/g",
    "heat_j_per_g": "J/g",
}


def unit_of_column(column: str) -> str:
    """Give the UCUM unit of a column of paired measurements."""
    return _UNITS[column]


@dataclass(frozen=True)
class Side:
    """One of the two quantities that are held against each other.

    Attributes
    ----------
    column : str
        Its column; its uncertainty stands in ``u_`` and that name.
    label : str
        What the line is drawn over, with unit.
    unit : str
        That unit as coldwork writes it; the plot's. [UCUM]
    turn : callable
        From the column's values and the table to what the line takes and its derivative. [SI]
    """

    column: str
    label: str
    unit: str
    turn: _Turn


@dataclass(frozen=True)
class Kind:
    """A kind of calibration by a line.

    Attributes
    ----------
    name : str
        As the command takes it.
    x, y : Side
        What is held against what.
    intercept, slope : str
        Keys of the sheet that the two are for.
    units : tuple of str
        Their units.
    quantity : str
        Column in which the range is given.
    """

    name: str
    x: Side
    y: Side
    intercept: str
    slope: str
    units: tuple[str, str]
    quantity: str


def _as_it_is(values: FloatArray, _: Pairs) -> tuple[FloatArray, FloatArray]:
    return values, np.ones_like(values)


def _root(values: FloatArray, _: Pairs) -> tuple[FloatArray, FloatArray]:
    root = np.sqrt(values)
    return root, 0.5 / root


def _inverse_root(values: FloatArray, _: Pairs) -> tuple[FloatArray, FloatArray]:
    found = values**-0.5
    return found, -0.5 * found / values


_STRESS: Final = Side("flow_stress_mpa", "flow stress [MPa]", "MPa", _as_it_is)

KINDS: Final[Mapping[str, Kind]] = {
    kind.name: kind
    for kind in (
        Kind(
            "taylor",
            Side("dislocation_density_per_m2", "root of the density [m⁻¹]", "1", _root),
            _STRESS,
            "strength.baseline_mpa",
            "hardening.slope_n_per_m",
            ("MPa", "N/m"),
            "flow_stress_mpa",
        ),
        Kind(
            "hall-petch",
            Side("grain_size_um", "one over the root of the grain size [m^-½]", "1", _inverse_root),
            _STRESS,
            "strength.friction_mpa",
            "strength.hall_petch_mpa_m05",
            ("MPa", "MPa.m^0.5"),
            "grain_size_um",
        ),
        Kind(
            "heat",
            Side("stored_energy_j_per_g", "computed stored energy [J/g]", "J/g", _as_it_is),
            Side("heat_j_per_g", "measured heat [J/g]", "J/g", _as_it_is),
            "heat.intercept_j_per_g",
            "heat.ratio",
            ("J/g", "1"),
            "stored_energy_j_per_g",
        ),
    )
}
"""The kinds that need nothing but the table; `hardness_kind` makes another."""


def hardness_kind(scale: str, area: str) -> Kind:
    """Give the kind that holds an indentation pressure against the flow stress.

    Parameters
    ----------
    scale : str
        ``HV``, ``HBW`` or ``HK``.
    area : str
        ``contact`` or ``projected``: what the pressure is taken over.

    Returns
    -------
    Kind
        It gives the constraint factor and the intercept of that scale.

    Raises
    ------
    UsageError
        If there is no such scale or area, or the scale has no such area.
    """
    if scale not in SCALES:
        message = f"no hardness scale is called {scale!r}; there are {', '.join(SCALES)}"
        raise UsageError(message)
    if area not in ("contact", "projected") or (scale, area) == ("HK", "contact"):
        message = f"the pressure of {scale} is not taken over the area {area!r}"
        raise UsageError(message)
    section = SECTIONS[SCALES.index(scale)]
    turn = _turn_of(scale, area)
    return Kind(
        "hardness",
        _STRESS,
        Side("hardness", f"pressure over the {area} area [MPa]", "MPa", turn),
        f"{section}.intercept_mpa",
        f"{section}.constraint_factor",
        ("MPa", "1"),
        "hardness",
    )


def _turn_of(scale: str, area: str) -> _Turn:
    if scale == "HV" and area == "projected":
        return _vickers_projected
    return _brinell_projected if (scale, area) == ("HBW", "projected") else _as_it_is


def _vickers_projected(values: FloatArray, _: Pairs) -> tuple[FloatArray, FloatArray]:
    found = projected_pressure(values)
    return found, found / values


def _brinell_projected(values: FloatArray, pairs: Pairs) -> tuple[FloatArray, FloatArray]:
    force = pairs.columns["force_n"]
    ball = units.to_si(pairs.columns["ball_mm"], "mm")
    slopes = brinell_projected_pressure_sensitivities(values, force, ball)
    return brinell_projected_pressure(values, force, ball), slopes["hardness"]
