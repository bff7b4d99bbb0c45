"""A metal's TOML text held against what an entry must be: every fault, with its line."""

import re
import tomllib
from collections.abc import Iterable, Mapping
from difflib import get_close_matches
from math import isfinite
from typing import Any, Final

from coldwork.errors import Cause, InvalidArgument
from coldwork.formulas.crystals import cubic_stiffness, hexagonal_stiffness
from coldwork.formulas.slip_systems import slip_system
from coldwork.materials.entry import CRYSTAL, KEYS, LATTICES, NEEDED, LibraryValue, Material
from coldwork.materials.lines import Path as KeyPath
from coldwork.materials.lines import line_of, lines_of

__all__ = ["Examined", "examine"]

_TEXTS: Final = ("name", "title", "lattice", "slip_system", "note")
_NEEDED_TEXTS: Final = ("name", "title", "lattice")
_FIELDS: Final = ("value", "u", "unit", "source", "seen")
_A_LINE: Final = "It is text in quotes, on one line."
_LONGEST: Final = 60  # characters of a value that a message repeats


class Examined:
    """An entry on its way in: what was read of it so far, and what is wrong with it.

    Parameters
    ----------
    text : str
        The TOML text.
    where : str
        What messages call the file.

    Attributes
    ----------
    faults : list of Cause
        What was found, one for each key; empty for a sound entry.
    """

    def __init__(self, text: str, where: str) -> None:
        self.faults: list[Cause] = []
        self._where, self._lines = where, lines_of(text)
        self._entry: dict[str, Any] = {}
        try:
            self._entry = tomllib.loads(text)
        except (ValueError, RecursionError) as error:
            self.faults.append(_syntax(where, error))

    @property
    def material(self) -> Material:
        """The metal; only of an entry without faults."""
        texts = {name: self._entry.get(name, "") for name in _TEXTS}
        texts["slip_system"] = texts["slip_system"] or LATTICES[texts["lattice"]]
        said = self._entry["values"]
        values = {
            key: LibraryValue(
                float(said[key]["value"]),
                float(said[key]["u"]),
                *(said[key][field] for field in _FIELDS[2:]),
            )
            for key in said
        }
        return Material(**texts, values=values)

    def check(self) -> None:
        """Look for everything that can be wrong, what leans on sound values last."""
        if self.faults:
            return
        self._check_names(self._entry, (*_TEXTS, "values"), (*_NEEDED_TEXTS, "values"), ())
        for name in _TEXTS:
            if name in self._entry and not _is_text(self._entry[name], empty=name == "note"):
                self._add((name,), "it is not a line of text", _A_LINE, "Write it so.")
        self._check_lattice()
        values = self._entry.get("values")
        if isinstance(values, dict):
            self._check_names(values, KEYS, NEEDED, ("values",))
            for key in values:
                if key in KEYS:
                    self._check_value(key, values[key])
        elif "values" in self._entry:
            what, why = "it is not a table", "It holds a table for each constant."
            self._add(("values",), what, why, "Give each as [values.NAME].")
        if not self.faults:
            self._check_crystal()

    def _add(self, path: KeyPath, what: str, why: str, mend: str) -> None:
        line = line_of(self._lines, path)
        at = "" if line is None else f", line {line}"
        self.faults.append(Cause(f"{self._where}{at}, key {_key(path)}", what, why, mend))

    def _check_names(
        self, table: Mapping[str, Any], known: Iterable[str], needed: Iterable[str], path: KeyPath
    ) -> None:
        for name in table:
            if name not in known:
                why = "Unknown keys are errors."
                self._add((*path, name), "unknown key", why, _nearest(name, known))
        for name in needed:
            if name not in table:
                why = "Every entry has it." if len(path) < 2 else "Every constant has it."
                self._add((*path, name), "this key is missing", why, "Add it.")

    def _check_lattice(self) -> None:
        lattice = self._entry.get("lattice")
        if _is_text(lattice, empty=False) and lattice not in LATTICES:
            what = f"{_shown(lattice)} is no lattice of the library"
            why = f"It is one of {', '.join(LATTICES)}."
            self._add(("lattice",), what, why, "Write one of them.")

    def _check_value(self, key: str, said: object) -> None:
        path, spec = ("values", key), KEYS[key]
        if not isinstance(said, dict):
            why = f"A constant is a table with {', '.join(_FIELDS)}."
            self._add(path, "it is not a table", why, f"Give it as [values.{key}].")
            return
        self._check_names(said, _FIELDS, _FIELDS, path)
        for name, low, high in (("value", spec.low, spec.high), ("u", 0.0, spec.high - spec.low)):
            if name in said:
                self._check_number((*path, name), said[name], (low, high), spec.unit)
        if "unit" in said and said["unit"] != spec.unit:
            what = f"the unit is {_shown(said['unit'])}, not {spec.unit!r}"
            self._add((*path, "unit"), what, "The key's name says the unit.", "Convert the value.")
        if "source" in said and not _is_text(said["source"], empty=False):
            mend = "Say where the value was found, or 'from memory'."
            self._add((*path, "source"), "it is not a line of text", _A_LINE, mend)
        if "seen" in said and not isinstance(said["seen"], bool):
            what = f"{_shown(said['seen'])} is not true or false"
            why = "It says whether the number itself was read."
            self._add((*path, "seen"), what, why, "Write true or false.")

    def _check_number(
        self, path: KeyPath, number: object, window: tuple[float, float], unit: str
    ) -> None:
        value = _number(number)
        if value is None:
            what, why = f"{_shown(number)} is not a number", "It must be a finite number."
            self._add(path, what, why, "Write it so.")
        elif not window[0] <= value <= window[1]:
            need = f"It must lie between {window[0]:g} and {window[1]:g}"
            what = f"{_shown(number)} is out of range"
            why = f"{need}{'' if unit == '1' else f' {unit}'}."
            self._add(path, what, why, "Check the number.")

    def _check_crystal(self) -> None:
        metal = self.material
        hexagonal = metal.lattice == "hcp"
        wanted = CRYSTAL[metal.lattice]
        for key in ("c13_gpa", "c33_gpa", "c_over_a"):
            if key in metal.values and not hexagonal:
                what = f"a cubic metal ({metal.lattice}) has no {key}"
                why = "It belongs to hexagonal crystals."
                self._add(("values", key), what, why, "Take it out, or mend the lattice.")
        given = [key for key in wanted if key in metal.values]
        missing = [key for key in wanted if key not in metal.values]
        if given and missing:
            why = f"The elastic constants of {metal.lattice} are {', '.join(wanted)}."
            self._add(("values", given[0]), f"{', '.join(missing)} missing", why, "Give all.")
        elif given and not self.faults:
            self._check_stable([metal.values[key].value for key in wanted])
        self._check_slip(metal, hexagonal=hexagonal)

    def _check_stable(self, constants: list[float]) -> None:
        try:
            (cubic_stiffness if len(constants) == len(CRYSTAL["fcc"]) else hexagonal_stiffness)(
                *constants
            )
        except InvalidArgument as error:
            why = "No crystal has such constants."
            self._add(("values", "c11_gpa"), str(error), why, "Check the elastic constants.")

    def _check_slip(self, metal: Material, *, hexagonal: bool) -> None:
        ratio = metal.values.get("c_over_a")
        axes = ratio.value if ratio is not None else None
        try:
            slip_system(metal.slip_system, hexagonal=hexagonal, c_over_a=axes)
        except InvalidArgument as error:
            why = "It must fit the lattice."
            mend = f"For {metal.lattice}, write it like {LATTICES[metal.lattice]}."
            self._add(("slip_system",), str(error), why, mend)


def examine(text: str, where: str) -> Examined:
    """Read an entry and hold it against what an entry must be.

    Parameters
    ----------
    text : str
        The TOML text.
    where : str
        What messages call the file.

    Returns
    -------
    Examined
        With its faults, or with the metal where there are none.
    """
    examined = Examined(text, where)
    examined.check()
    return examined


def _syntax(where: str, error: Exception) -> Cause:
    if isinstance(error, RecursionError):
        why = "No key of an entry is deeper than three tables."
        return Cause(where, "its values are nested too deeply", why, "Undo that.")
    reason = str(error) if isinstance(error, tomllib.TOMLDecodeError) else "a number is too long"
    at = re.search(r" \(at line (\d+), column (\d+)\)$", reason)
    place = f"{where}, line {at[1]}, column {at[2]}" if at else where
    text = reason[: at.start()] if at else reason
    plain = "".join(c if c.isprintable() else "�" for c in text)[:200]
    return Cause(place, plain, "A metal's file is TOML 1.0.", "Mend the syntax there.")


def _is_text(value: object, *, empty: bool) -> bool:
    return isinstance(value, str) and value.isprintable() and (empty or bool(value.strip()))


def _number(value: object) -> float | None:
    """Give a finite number, None for anything else."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return None
    try:
        number = float(value)
    except OverflowError:
        return None
    return number if isfinite(number) else None


def _shown(value: object) -> str:
    try:
        text = str(value).lower() if isinstance(value, bool) else repr(value)
    except ValueError:
        text = "a number of too many digits"  # beyond what Python turns into text
    return text if len(text) <= _LONGEST else f"{text[: _LONGEST - 1]}…"


def _key(path: KeyPath) -> str:
    names = [name if name.isprintable() and name else _shown(name) for name in path]
    if names[0] != "values" or len(names) == 1:
        return names[0]
    return f"[{'.'.join(names[:2])}]{''.join(f' {name}' for name in names[2:])}"


def _nearest(name: str, known: Iterable[str]) -> str:
    choice = list(known)
    close = get_close_matches(name.lower(), choice, n=1)
    return f"The nearest known name is '{close[0]}'." if close else f"Known: {', '.join(choice)}."
