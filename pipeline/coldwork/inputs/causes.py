"""Collecting what is wrong with a sheet, one cause a key, in plain words."""

from dataclasses import dataclass, field

from coldwork.errors import Cause
from coldwork.inputs.positions import KeyPath
from coldwork.inputs.source import Sheet

__all__ = ["Causes"]


@dataclass
class Causes:
    """What was found so far.

    A key that already has a cause gets no second one: what a later check says
    about a value of the wrong type is noise.
    """

    sheet: Sheet
    found: dict[KeyPath, Cause] = field(default_factory=dict)

    def add(self, path: KeyPath, what: str, why: str, mend: str) -> None:
        """Add a cause unless the key, or a table around it, has one."""
        if not self.at(path):
            self.found[path] = Cause(self.sheet.where(path), what, why, mend)

    def at(self, path: KeyPath) -> bool:
        """Tell whether the key, or a table around it, has a cause."""
        return any(path[:length] in self.found for length in range(len(path) + 1))

    def within(self, path: KeyPath) -> bool:
        """Tell whether the key, what is around it or what is in it has a cause."""
        return self.at(path) or any(other[: len(path)] == path for other in self.found)

    def all(self) -> tuple[Cause, ...]:
        """Give all causes in the order of the sheet's lines."""
        ordered = sorted(self.found, key=self.sheet.order)
        return tuple(self.found[path] for path in ordered)
