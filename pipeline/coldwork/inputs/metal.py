"""The metal of a batch: an entry of the library, or one of the same form beside the sheet."""

from dataclasses import dataclass
from pathlib import Path

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.causes import Causes
from coldwork.inputs.source import path_fault, read_toml
from coldwork.inputs.words import shown
from coldwork.materials import Material, faults_of_file, load, load_file, names

__all__ = ["Metal", "metal_of"]

_KEY = ("material", "file")


@dataclass(frozen=True)
class Metal:
    """What is known of the metal, or why its own file cannot be used.

    Attributes
    ----------
    material : Material or None
        Its entry; none where every constant has to come from the sheet.
    digests : tuple of (str, str)
        Path and SHA-256 of its own file.
    causes : tuple of Cause
        What is wrong within that file.
    """

    material: Material | None = None
    digests: tuple[tuple[str, str], ...] = ()
    causes: tuple[Cause, ...] = ()


def metal_of(causes: Causes, folder: Path) -> Metal:
    """Find the entry of the sheet's metal.

    Parameters
    ----------
    causes : Causes
        Takes what is wrong with the keys that name it.
    folder : Path
        The batch folder.

    Returns
    -------
    Metal
        From its own file where ``[material] file`` names one, else from the library.
    """
    section = causes.sheet.tables.get("material")
    section = section if isinstance(section, dict) else {}
    name, file = section.get("name"), section.get("file")
    if isinstance(file, str):
        return _own(causes, folder, file, name)
    return Metal(load(name) if isinstance(name, str) and name in names() else None)


def _own(causes: Causes, folder: Path, file: str, name: object) -> Metal:
    fault = path_fault(file)
    if fault:
        why = "A metal of one's own is a .toml file, named from the batch folder."
        causes.add(_KEY, f"{shown(file)} {fault}", why, "Name it like 'our-bronze.toml'.")
        return Metal()
    try:
        read = read_toml(folder, file, "metal")
    except BatchRefused as refused:
        return Metal(causes=refused.causes)
    faults = faults_of_file(folder / file)
    if faults:
        within = str(folder / file)
        named = [
            Cause(fault.where.replace(within, file, 1), fault.what, fault.why, fault.mend)
            for fault in faults
        ]
        return Metal(causes=tuple(named))
    material = load_file(folder / file)
    if material.name != name:
        what = f"the file describes {shown(material.name)}, the sheet says {shown(name)}"
        why = "Results carry one name of the metal."
        causes.add(_KEY, what, why, "Give both the same name.")
    return Metal(material, ((file, read.digest),))
