"""What stands over a laid-out table: labels with their values, the header, the units line."""

from collections import Counter
from collections.abc import Mapping, Sequence
from typing import Final, NamedTuple

from coldwork.contracts import Contract
from coldwork.errors import Cause
from coldwork.inputs.layout import Filled, Layout
from coldwork.inputs.layout_units import UNITS, WrittenUnit, spelled
from coldwork.inputs.words import listed, nearest, shown

__all__ = ["AboveLine", "AboveValue", "Found", "above_values", "find_columns", "unit_causes"]

_MOST_LABELS: Final = 400  # that a message looks through for the nearest


class AboveLine(NamedTuple):
    """A line over the table.

    Attributes
    ----------
    where : str
        File and line, for messages.
    cells : tuple of str
        Its cells.
    """

    where: str
    cells: tuple[str, ...]


class AboveValue(NamedTuple):
    """A value over the table.

    Attributes
    ----------
    where : str
        File and line.
    raw : str
        As written.
    text : str
        The same without its unit, where it names the one that the layout says.
    """

    where: str
    raw: str
    text: str


class Found(NamedTuple):
    """Where the columns of a layout stand in a header.

    Attributes
    ----------
    places : mapping of str to int
        By the contract's column: index of the cell, from 0.
    unused : tuple of str
        Columns that the layout passes over.
    causes : list of Cause
        Why the header does not fit; empty where it does.
    """

    places: Mapping[str, int]
    unused: tuple[str, ...]
    causes: list[Cause]


def find_columns(header: Sequence[str], layout: Layout, where: str) -> Found:
    """Find the columns that a layout names.

    Parameters
    ----------
    header : sequence of str
        Cells of the header, as written.
    layout : Layout
        What is looked for.
    where : str
        File and line of the header.

    Returns
    -------
    Found
    """
    count = Counter(header)
    causes, places = [], {}
    for filled in layout.columns:
        name = filled.source
        if count[name] == 1:
            places[filled.name] = list(header).index(name)
        elif count[name]:
            at = [str(place) for place, each in enumerate(header, 1) if each == name]
            what = f"column {shown(name)} stands {count[name]} times, as cells {listed(at)}"
            why = f"Layout {layout.id} fills {filled.name} from one of them and cannot tell which."
            causes.append(Cause(where, what, why, "Rename the others where the file is made."))
        else:
            what = f"there is no column {shown(name)}"
            why = f"Layout {layout.id} fills {filled.name} from it."
            known = [each for each in header if each]
            causes.append(Cause(where, what, why, nearest(name, known)))
    used = set(places.values())
    unused = [name for place, name in enumerate(header) if place not in used and name]
    return Found(places, tuple(unused), causes)


def unit_causes(
    units: Sequence[str], places: Mapping[str, int], layout: Layout, contract: Contract, where: str
) -> list[Cause]:
    """Hold the line of units against what the layout says of each column that it names.

    Parameters
    ----------
    units : sequence of str
        Cells of the units line.
    places : mapping of str to int
        From `find_columns`.
    layout : Layout
        What is said.
    contract : Contract
        The table's contract.
    where : str
        File and line.

    Returns
    -------
    list of Cause
        Where the two contradict each other, both spelled out.
    """
    causes = []
    for filled in layout.columns:
        said = _unit_of(filled, contract)
        if said is None or not contract.field(filled.name).numeric:
            continue
        place = places[filled.name]
        cell = units[place] if place < len(units) else ""
        named = spelled(cell)
        silent = filled.unit is None and cell.strip(" \t") in ("", "-")  # as of hardness numbers
        if silent or (named is not None and named.same(said)):
            continue
        here = f"{where}, column {filled.source}"
        what = f"the units line says {shown(cell)} and the layout {said.name}"
        mend = "Say units_line = false, if this is no line of units."
        if named is not None and cell.strip(" \t"):
            mend = f"Say unit = {named.name!r} in the layout, if the file is right."
        causes.append(Cause(here, what, "A number has one unit.", mend))
    return causes


def above_values(
    lines: Sequence[AboveLine], layout: Layout, contract: Contract, name: str
) -> tuple[Mapping[str, AboveValue], list[Cause]]:
    """Find the values that stand over the table.

    A label is a whole cell, and its value the next one; or it begins a cell, and its
    value is the rest of that.

    Parameters
    ----------
    lines : sequence of AboveLine
        The lines over the table.
    layout : Layout
        Which labels are looked for.
    contract : Contract
        The table's contract.
    name : str
        What messages call the file.

    Returns
    -------
    mapping of str to AboveValue
        By the contract's column.
    list of Cause
        Labels that are missing or stand twice, and units that contradict the layout.
    """
    values, causes = {}, []
    for filled in layout.above:
        hits = [(line, *hit) for line in lines if (hit := _labelled(line.cells, filled.source))]
        if len(hits) == 1:
            line, raw, after = hits[0]
            text, cause = _without_unit(raw, after, filled, contract, line.where)
            values[filled.name] = AboveValue(line.where, raw, text)
            causes += cause
            if text in layout.absent and contract.field(filled.name).required:
                what = f"no value stands after {shown(filled.source)}"
                why = f"Every row of the file takes its {filled.name} from there."
                causes.append(Cause(line.where, what, why, "Write it there."))
        elif hits:
            first, second = hits[0][0].where, hits[1][0].where
            what = f"the label {shown(filled.source)} stands twice, first in {first}"
            why = f"Layout {layout.id} fills {filled.name} from one place."
            causes.append(Cause(second, what, why, "Split the file, one table to each."))
        else:
            labels = [cell for line in lines for cell in line.cells[:1] if cell][:_MOST_LABELS]
            what = f"the label {shown(filled.source)} does not stand over the table"
            why = f"Layout {layout.id} fills {filled.name} from it."
            causes.append(Cause(name, what, why, nearest(filled.source, labels)))
    return values, causes


def _labelled(cells: Sequence[str], label: str) -> tuple[str, str] | None:
    """Give the value that a line has for a label, and the cell after it."""
    for place, cell in enumerate(cells):
        rest = [*cells[place + 1 :], "", ""]
        if cell == label:
            return rest[0], rest[1]
        if cell.startswith(label) and (cell[len(label)] in " \t" or not label[-1].isalnum()):
            return cell[len(label) :].strip(" \t"), rest[0]
    return None


def _without_unit(
    raw: str, after: str, filled: Filled, contract: Contract, where: str
) -> tuple[str, list[Cause]]:
    """Take the unit off that a value names, if it is the one that the layout says."""
    said = _unit_of(filled, contract)
    if said is None or not contract.field(filled.name).numeric:
        return raw, []
    number, _, tail = raw.rpartition(" ")
    word = tail if number and spelled(tail) else after.strip(" \t")
    named = spelled(word) if word else None
    if named is not None and not named.same(said):
        what = f"the line says {shown(word)} and the layout {said.name}"
        mend = f"Say unit = {named.name!r} in the layout, if the file is right."
        return raw, [Cause(where, what, "A number has one unit.", mend)]
    return (number.rstrip(" \t") if number and spelled(tail) else raw), []


def _unit_of(filled: Filled, contract: Contract) -> WrittenUnit | None:
    if filled.unit is not None:
        return UNITS[filled.unit]
    return spelled(contract.field(filled.name).unit or "1")
