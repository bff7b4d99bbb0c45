"""Indents and flow curve of one coupon together: the flow's own method, and what is refused."""

from dataclasses import replace
from typing import Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.laws import choice
from coldwork.inputs.method import Method
from coldwork.inputs.positions import KeyPath

__all__ = ["SAME_STRAIN", "flow_of", "refuse_bad_both", "refuse_two_strains"]

SAME_STRAIN: Final = 0.0005 * (1.0 + 1e-9)  # strains this near are one, as for repeats [1]
_ROUTE: Final = ("strength", "route")
_OTHER: Final = "Take it out, or choose one route."


def flow_of(method: Method) -> Method:
    """Give the method of the flow curves out of that of both routes.

    Parameters
    ----------
    method : Method
        Of both routes; its laws are those of the indents.

    Returns
    -------
    Method
        With the laws of the flow route. The flow stress is unwound where the indents are.
    """
    return replace(method, laws=replace(method.laws, route="flow", flow_from="points"))


def refuse_bad_both(causes: Causes) -> None:
    """Refuse what does not go with both routes."""
    tables = causes.sheet.tables
    if choice(tables, *_ROUTE) != "both":
        return
    refused: tuple[tuple[KeyPath, bool, str, str], ...] = (
        (
            ("files", "exclusions"),
            choice(tables, "files", "exclusions") is not None,
            "exclusions cannot be told to one of the two routes",
            "An exclusion names a reading by coupon and number, and a coupon of both routes may "
            "have an indent and a point of one number.",
        ),
        (
            ("files", "curves"),
            choice(tables, "files", "curves") is not None,
            "curves do not go with both routes",
            "Both routes take points of flow stress; those of curves beside indents are not built "
            "yet.",
        ),
        (
            ("strength", "obstacle_mpa"),
            choice(tables, "strength", "obstacle_mpa") is not None,
            "an obstacle stress does not go with both routes",
            "Intervals beside obstacles are taken in the stress before superposition, and two "
            "routes have two of them; that is not built yet.",
        ),
        (
            ("uncertainty", "method"),
            choice(tables, "uncertainty", "method") == "monte-carlo",
            "'monte-carlo' does not go with both routes",
            "Drawing both routes of a coupon is not built yet.",
        ),
    )
    for path, there, what, why in refused:
        if there and not causes.within(path):
            causes.add(path, what, why, _OTHER)


def refuse_two_strains(causes: Causes, method: Method) -> None:
    """Refuse routes that stand at two strains where nothing brings them together."""
    if not method.both or method.laws.unwinding:
        return
    target = method.plastic_strain
    near = [
        x
        for name, x in method.inputs.items()
        if name.endswith(".representative_strain") and abs(x.value - target) <= SAME_STRAIN
    ]
    if any(x.u == 0.0 for x in near):
        return
    what = f"the flow curve is read at a strain of {target:g}, the indents add another one"
    why = "Two strengths can be compared at one strain."
    if near:
        what = f"the representative strain of the indents, {near[0].value:g}, has u {near[0].u:g}"
        why = "Nothing says how much stress that is: the flow curve is read at one strain."
    causes.add(
        _ROUTE,
        f"the routes stand at two strains: {what}",
        why,
        "Give initial_hardening_mpa and saturation_stress_mpa in [indentation], and both are "
        "unwound; or set plastic_strain in [flow] to a representative_strain without u.",
    )
