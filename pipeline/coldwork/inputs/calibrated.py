"""Numbers of a sheet that are taken from a calibration: { from = "calibration.toml" }."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final, TypeGuard

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.calibration import Calibration, read_calibration
from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import KeyName, Spec, default_of
from coldwork.inputs.numbers import Given
from coldwork.inputs.quantity import Input
from coldwork.inputs.words import listed, shown
from coldwork.units import to_si

__all__ = ["Calibrations", "is_taken"]

_FROM: Final = "from"


def is_taken(raw: object) -> TypeGuard[Mapping[str, Any]]:
    """Tell whether a value of the sheet is taken from a calibration."""
    return isinstance(raw, dict) and _FROM in raw


@dataclass
class Calibrations:
    """The calibrations that a sheet takes numbers from, each file read once.

    Attributes
    ----------
    folder : Path
        The batch folder.
    taken : dict of str to Calibration
        By dotted key, for every number that is taken.
    causes : list of Cause
        What is wrong inside the files.
    """

    folder: Path
    taken: dict[str, Calibration] = field(default_factory=dict)
    causes: list[Cause] = field(default_factory=list)
    _read: dict[str, Calibration | None] = field(default_factory=dict)

    def give(
        self, causes: Causes, key: KeyName, raw: Mapping[str, Any], spec: Spec
    ) -> Given | None:
        """Take one number.

        Parameters
        ----------
        causes : Causes
            Where to say what is wrong with the sheet.
        key : tuple of str
            The key.
        raw : mapping
            What the sheet says: ``{ from = PATH }``.
        spec : Spec
            Unit and window of the key.

        Returns
        -------
        Given or None
            The number with its standard uncertainty; None if there is a cause.
        """
        more = [part for part in raw if part != _FROM]
        if more or not isinstance(raw[_FROM], str):
            what = f"{listed(more)} stands beside from" if more else "from names no file"
            why = "A number from a calibration has value, uncertainty and source from there."
            causes.add(key, what, why, 'Write { from = "calibration.toml" } and nothing else.')
            return None
        found = self._file(raw[_FROM])
        if found is None:
            return None
        name = ".".join(key)
        place = found.place(name)
        if place is None:
            what = f"calibration {shown(found.id)} does not give {name}"
            why = f"It gives {listed([p.key for p in found.parameters])}."
            causes.add(key, what, why, "Name another calibration, or say the number.")
            return None
        parameter = found.parameters[place]
        fault = spec.fault(parameter.value)
        if fault or parameter.unit != spec.unit:
            what = f"{parameter.value:g} {parameter.unit} of the calibration is impossible here"
            causes.add(key, what, fault or f"The unit is {spec.unit}.", "Look at the calibration.")
            return None
        self.taken[name] = found
        value, u = (float(to_si(x, spec.unit)) for x in (parameter.value, parameter.u))
        lognormal = parameter.factor is not None
        given = Input(
            name=name,
            value=value,
            u=u,
            unit=spec.unit,
            shape="lognormal" if lognormal else "normal",
            factor=parameter.factor,
            degrees_of_freedom=found.degrees_of_freedom,
            source=found.source,
            origin="calibration",
        )
        return Given(given, parameter.value, parameter.u)

    def mixes(self) -> dict[str, dict[str, float]]:
        """Give, by key, the sensitivities of every number that has others beside it. [SI].

        A constant that stands alone in its calibration is an input by itself.
        """
        return {
            key: {name: float(to_si(c, _unit(found, key))) for name, c in found.mix(key).items()}
            for key, found in self.taken.items()
            if len(found.parameters) > 1
        }

    def components(self) -> dict[str, Given]:
        """Give the independent inputs behind those numbers."""
        used = {name for mix in self.mixes().values() for name in mix}
        inputs: dict[str, Input] = {}
        for found in self.files():
            inputs |= {name: x for name, x in found.components().items() if name in used}
        return {name: Given(x, x.value, x.u) for name, x in inputs.items()}

    def files(self) -> tuple[Calibration, ...]:
        """Give every calibration that a number was taken from, once each."""
        return tuple({found.path: found for found in self.taken.values()}.values())

    def refuse_conflicts(self, causes: Causes) -> None:
        """Refuse two of one name, ranges that do not overlap, and conditions that are not met."""
        names: dict[str, str] = {}
        for key, found in self.taken.items():
            path = tuple(key.split("."))
            if names.setdefault(found.id, found.path) != found.path:
                what = f"{names[found.id]} and {found.path} are both calibration {found.id}"
                causes.add(path, what, "Each calibration has a name of its own.", "Rename one.")
            self._refuse_apart(causes, path, found)
            for condition, wanted in found.conditions.items():
                here = _said(causes, condition)
                if here is not None and here != wanted:
                    what = (
                        f"{found.path} holds for {condition} = {shown(wanted)}, not {shown(here)}"
                    )
                    why = "A constant belongs to the conditions that it was measured under."
                    causes.add(path, what, why, "Calibrate for this sheet, or mend the sheet.")

    def _refuse_apart(self, causes: Causes, path: tuple[str, ...], found: Calibration) -> None:
        """Refuse two calibrations whose ranges of one quantity have nothing in common."""
        for other in self.files():
            apart = max(other.low, found.low) > min(other.high, found.high)
            if other.quantity == found.quantity and apart:
                what = (
                    f"{found.path} holds for {found.quantity} from {found.low:g} to {found.high:g},"
                    f" and {other.path} from {other.low:g} to {other.high:g}"
                )
                why = "The ranges do not overlap, so no coupon lies in both."
                causes.add(path, what, why, "Take both from one calibration.")

    def _file(self, path: str) -> Calibration | None:
        if path not in self._read:
            self._read[path] = None
            try:
                self._read[path] = read_calibration(path, self.folder)
            except BatchRefused as refused:
                self.causes += refused.causes
        return self._read[path]


def _unit(found: Calibration, key: str) -> str:
    return found.parameters[found.place(key) or 0].unit


def _said(causes: Causes, condition: str) -> object:
    """Give what the sheet says under a dotted key, or its default; of a number its value."""
    key = tuple(condition.split("."))
    at: object = causes.sheet.tables
    for name in key:
        at = at.get(name) if isinstance(at, Mapping) else None
    said = default_of(key) if at is None else at
    return said.get("value") if isinstance(said, Mapping) else said
