"""The core of a line: where its energy comes from, and what the core radius then means."""

from collections.abc import Mapping
from math import isfinite
from typing import Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.collect import CORE_ENERGY
from coldwork.inputs.quantity import Input
from coldwork.materials import Material

__all__ = ["core_words", "refuse_bad_core"]

_ENERGY: Final = "line_energy.core_energy"
_RADIUS: Final = "line_energy.core_radius_b"


def refuse_bad_core(causes: Causes, material: Material | None) -> None:
    """Refuse a core energy of the library that it does not have, or beside another one.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong.
    material : Material or None
        What the library gives.
    """
    section = causes.sheet.tables.get("line_energy")
    if not isinstance(section, dict) or section.get("core_energy_from") != "library":
        return
    if material is None or CORE_ENERGY not in material.values:
        causes.add(
            ("line_energy", "core_energy_from"),
            "the library has no core energy of this metal",
            "It has one of unalloyed cubic metals.",
            "Give core_energy, or leave both out: core_radius_b then stands for the core.",
        )
    if section.get("core_radius_b", 1) != 1:
        causes.add(
            ("line_energy", "core_radius_b"),
            "another core radius is given than the library's core energy belongs to",
            "That is the energy inside exactly one Burgers vector; beyond, the field is counted.",
            "Take core_radius_b out, or give core_energy for the radius that you want.",
        )


def core_words(inputs: Mapping[str, Input], alone: float) -> str:
    """Say what the core radius means, with or without an energy of the core.

    Parameters
    ----------
    inputs : mapping of str to Input
        Of the method.
    alone : float
        The core radius that would give the same line energy without a core energy; NaN
        where it was not worked out. [b]

    Returns
    -------
    str
        A sentence without a stop.
    """
    energy, radius = inputs[_ENERGY], inputs[_RADIUS]
    if energy.value == 0.0 and energy.u == 0.0:
        return (
            f"no core energy is added: the core radius of {radius.value:.3g} b stands for the core "
            "as well, and a smaller one for a core that holds more"
        )
    same = f", the same as a core radius of {alone:.2g} b alone" if isfinite(alone) else ""
    return (
        f"the core holds {energy.value:.3g} G b^2 inside {radius.value:.3g} b, where the field "
        f"ends{same}"
    )
