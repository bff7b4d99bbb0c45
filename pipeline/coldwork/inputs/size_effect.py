"""What relation 3 needs of a sheet, and for which scale it holds."""

from typing import Any, Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.words import shown

__all__ = ["refuse_bad_size_effect"]

_KEYS: Final = {"length": "characteristic_depth_um", "strength": "size_strength_gpa2_um"}
_OTHER_SCALES: Final = ("HBW", "HK")


def refuse_bad_size_effect(causes: Causes) -> None:
    """Refuse a size effect without its number, a number without its effect, and other scales.

    It comes before the sheet is held against its schema, so that each is told in its own
    words; what is refused is cut out.

    Parameters
    ----------
    causes : Causes
        Where to say what is wrong.
    """
    section = causes.sheet.tables.get("indentation")
    if not isinstance(section, dict):
        return
    for scale in _OTHER_SCALES:
        _refuse_scale(causes, section.get(scale), scale)
    choice = section.get("size_effect", "none")
    if choice not in ("none", "fitted", *_KEYS):
        return  # the schema has words for that
    for law, key in _KEYS.items():
        if choice == law and key not in section:
            causes.add(
                ("indentation", "size_effect"),
                f"{key} is not given",
                f"A size effect by its {law} is taken out with that number (relation 3).",
                f"Give {key}, or say another size_effect.",
            )
        if choice != law and key in section:
            causes.add(
                ("indentation", key),
                f"it is given, and size_effect is {shown(choice)}",
                f"It belongs to size_effect = {shown(law)} alone.",
                "Take one of the two out.",
            )


def _refuse_scale(causes: Causes, section: Any, scale: str) -> None:  # noqa: ANN401  # whatever TOML can hold
    for key in ("size_effect", *_KEYS.values()) if isinstance(section, dict) else ():
        said = section.pop(key, "none")
        if said != "none":
            causes.add(
                ("indentation", scale, key),
                f"{key} cannot be used for {scale}",
                "Relation 3 goes by the depth of the Vickers pyramid.",
                "Take it out; [indentation] has it for HV.",
            )
