"""What the work of a prior deformation needs of a sheet, where a Voce curve gives it."""

from typing import Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.words import listed

__all__ = ["refuse_bad_prior_work"]

_CURVE: Final = ("initial_hardening_mpa", "saturation_stress_mpa")


def refuse_bad_prior_work(causes: Causes) -> None:
    """Refuse a curve without its constants, constants without a curve, and those given twice.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong; the sheet fits its schema but for what it holds.
    """
    tables = causes.sheet.tables
    sections = [tables.get(name, {}) for name in ("prior_work", "strength", "indentation")]
    if not all(isinstance(section, dict) for section in sections):
        return
    own, strength, indentation = sections
    if own.get("from", "stated") != "voce":
        for key in _CURVE:
            if key in own:
                causes.add(
                    ("prior_work", key),
                    "no curve is asked for that it could belong to",
                    "It is a constant of the Voce curve.",
                    'Say from = "voce", or take it out.',
                )
        return
    if "obstacle_mpa" in strength:
        causes.add(
            ("prior_work", "from"),
            "the curve is that of dislocations and baseline alone, and obstacle_mpa is given",
            "How obstacles share in the work over a strain is not built yet.",
            "State the work in coupons.csv.",
        )
    indent = strength.get("route") == "indent"
    said = indentation if indent else own
    missing = [key for key in _CURVE if key not in said]
    if missing:
        section = "[indentation]" if indent else "[prior_work]"
        causes.add(
            ("prior_work", "from"),
            f"{section} does not give {listed(missing)}",
            "A Voce curve has both (relation 6).",
            f"Give them in {section}, or state the work in coupons.csv.",
        )
    for key in _CURVE if indent else ():
        if key in own:
            causes.add(
                ("prior_work", key),
                "by the indent route it is that of [indentation]",
                "The strain before the indent and that of the indent lie on one curve.",
                "Take it out.",
            )
