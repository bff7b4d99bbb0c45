"""What a layout must not say beyond its schema: contradictions, misfits with the contract."""

from collections.abc import Iterator
from typing import Any, Final

from coldwork import contracts
from coldwork.contracts import Contract, Field
from coldwork.errors import InvalidArgument
from coldwork.inputs.causes import Causes
from coldwork.inputs.layout_units import UNITS, WrittenUnit, spelled, step_between
from coldwork.inputs.time_form import time_form
from coldwork.inputs.words import listed, nearest, shown

__all__ = ["refuse_contradictions"]

_SECTIONS: Final = ("columns", "above", "constants")
_LARGEST: Final = 1e30  # of a constant, as of any number of a table


def refuse_contradictions(causes: Causes) -> Contract | None:
    """Refuse a layout that its schema allows and that cannot be followed.

    Parameters
    ----------
    causes : Causes
        Without any: the layout fits its schema.

    Returns
    -------
    Contract or None
        That of the table that it fills; None if there is none yet.
    """
    tables = causes.sheet.tables
    _refuse_other_kinds(causes)
    for section in ("text", "workbook"):
        if section in tables:
            _refuse_marks(causes, section, tables[section])
            _refuse_times(causes, section, tables[section])
    _refuse_places(causes)
    name = f"in/{tables['layout']['fills']}"
    if name not in contracts.names():
        what = f"{shown(tables['layout']['fills'])} cannot be chosen"
        causes.add(("layout", "fills"), what, "This table is not built yet.", "Choose another.")
        return None
    contract = contracts.load(name)
    _refuse_columns(causes, contract)
    _refuse_gaps(causes, contract)
    return contract


def _refuse_other_kinds(causes: Causes) -> None:
    tables = causes.sheet.tables
    why = "A layout says how a text file is written, or where a workbook holds its table."
    if "text" in tables and "workbook" in tables:
        causes.add(("workbook",), "text is there too", why, "Keep one of the two.")
    elif "text" not in tables and "workbook" not in tables:
        causes.add(("text",), "this section is missing", why, "Add text or workbook.")


def _refuse_marks(causes: Causes, section: str, form: dict[str, Any]) -> None:
    decimal, thousands = form.get("decimal"), form.get("thousands")
    delimiter = form.get("delimiter")
    if thousands is not None and decimal is None:
        why = "Which sign marks thousands can only be said beside the decimal sign."
        causes.add((section, "thousands"), "decimal is missing", why, "Add decimal.")
    if decimal is not None and decimal == thousands:
        why = "One sign cannot mark decimals and thousands."
        causes.add((section, "thousands"), "it is the decimal sign too", why, "Mend one of them.")
    for key, mark in (("decimal", decimal), ("thousands", thousands)):
        if mark is not None and (mark == delimiter or (delimiter == "spaces" and mark == " ")):
            why = "A number would end at its own sign."
            causes.add((section, key), "it is the delimiter too", why, "Mend one of them.")
    for place, word in enumerate(form.get("absent", ())):
        if spelled_number(word):
            what = f"{shown(word)} is a number"
            why = "What stands for no value must not be a value."
            causes.add((section, "absent", place), what, why, "Take it out.")


def spelled_number(word: str) -> bool:
    """Tell whether a cell could be a number, of whatever signs."""
    return any(c.isdigit() for c in word) and all(c.isdigit() or c in "+-.,' " for c in word)


def _refuse_times(causes: Causes, section: str, form: dict[str, Any]) -> None:
    if "times" not in form:
        return
    try:
        time_form(form["times"])
    except InvalidArgument as error:
        why = "It must say the day, and of the clock as much as the file does."
        causes.add((section, "times"), str(error), why, "Write it like '%d.%m.%Y %H:%M'.")


def _refuse_places(causes: Causes) -> None:
    tables = causes.sheet.tables
    form = tables.get("text")
    if form is None:
        return
    both = "header_line" in form and "table_starts_after" in form
    if both:
        why = "The header is found in one way."
        causes.add(("text", "header_line"), "table_starts_after is there too", why, "Keep one.")
    if tables.get("above") and "header_line" not in form and "table_starts_after" not in form:
        what = "no line stands above the table"
        why = "Without header_line and table_starts_after the header is the first line."
        causes.add(("above",), what, why, "Say where the table starts.")


def _refuse_columns(causes: Causes, contract: Contract) -> None:
    seen: dict[str, str] = {}
    for section, name, entry in _entries(causes):
        path = (section, name)
        if name not in contract.columns:
            what = f"{contract.table} has no column {shown(name)}"
            causes.add(path, what, "A layout fills our columns.", nearest(name, contract.columns))
            continue
        if name in seen:
            what = f"{seen[name]} fills it too"
            causes.add(path, what, "A column is filled once.", "Keep one of the two.")
            continue
        seen[name] = section
        field = contract.field(name)
        if section == "constants":
            _refuse_constant(causes, name, entry, field)
        if isinstance(entry, dict) and "unit" in entry:
            _refuse_unit(causes, (section, name), entry["unit"], field)
            _refuse_named_unit(causes, (section, name), entry)
        elif section != "constants" and field.numeric:
            _refuse_named_unit(causes, (section, name), _spelled_out(entry, field))


def _entries(causes: Causes) -> Iterator[tuple[str, str, Any]]:
    for section in _SECTIONS:
        for name, entry in causes.sheet.tables.get(section, {}).items():
            yield section, name, entry


def _spelled_out(entry: str | dict[str, Any], field: Field) -> dict[str, Any]:
    own = spelled(field.unit or "1")
    table = {"from": entry} if isinstance(entry, str) else entry
    return table | {"unit": own.name if own else ""}


def _refuse_unit(causes: Causes, path: tuple[str, str], unit: str, field: Field) -> None:
    if not field.numeric:
        why = f"{field.name} holds no numbers."
        causes.add((*path, "unit"), "it has no unit", why, "Take the key out.")
    elif unit not in UNITS:
        what = f"{shown(unit)} is not known"
        meant = spelled(unit)
        mend = f"Write it {meant.name!r}." if meant else nearest(unit, list(UNITS))
        causes.add((*path, "unit"), what, f"Units are {listed(list(UNITS))}.", mend)
    elif step_between(unit, field.unit or "1") is None:
        own = spelled(field.unit or "1")
        kin = [each.name for each in UNITS.values() if own and each.kind == own.kind]
        why = f"{field.name} is a {own.kind if own else 'quantity'} and comes in {listed(kin)}."
        causes.add((*path, "unit"), f"{shown(unit)} does not fit", why, "Mend the unit.")


def _refuse_named_unit(causes: Causes, path: tuple[str, str], entry: dict[str, Any]) -> None:
    """Refuse a unit that the file's own name for the column contradicts."""
    named = _unit_in(str(entry.get("from", "")))
    said = UNITS.get(entry["unit"])
    if named is not None and said is not None and not named.same(said):
        what = f"the name {shown(entry['from'])} says {named.name} and the layout {said.name}"
        why = "A number has one unit."
        mend = f"Say unit = {named.name!r}, if the file is right."
        causes.add(path, what, why, mend)


def _unit_in(name: str) -> WrittenUnit | None:
    bare = name.rstrip(" :=")
    for mark, end in (("[", "]"), ("(", ")")):
        if bare.endswith(end) and mark in bare:
            return spelled(bare[bare.rindex(mark) :])
    return None


def _refuse_constant(causes: Causes, name: str, entry: Any, field: Field) -> None:  # noqa: ANN401
    path = ("constants", name)
    value = entry.get("value") if isinstance(entry, dict) else entry
    if field.numeric and isinstance(value, (int, float)):
        if not abs(value) <= _LARGEST:
            what, why = f"{shown(value)} cannot be used", "A constant is a finite number."
            causes.add(path, what, why, "Mend it.")
        elif field.type == "integer" and not isinstance(value, int):
            causes.add(path, f"{shown(value)} is no whole number", "It counts.", "Mend it.")
    elif field.numeric:
        why = f"{name} holds numbers."
        causes.add(path, f"{shown(value)} is not a number", why, "Write it without quotes.")
    elif not isinstance(value, str):
        why = f"{name} holds text."
        causes.add(path, f"{shown(value)} is not text", why, "Write it in quotes.")
    elif field.enum and value not in field.enum:
        why = f"{name} is one of {listed(field.enum)}."
        causes.add(path, f"{shown(value)} cannot be chosen", why, nearest(value, field.enum))


def _refuse_gaps(causes: Causes, contract: Contract) -> None:
    """Refuse a layout that leaves required columns empty; a running number is counted."""
    filled = {name for _, name, _ in _entries(causes)}
    counted = set(contract.primary_key[1:])
    lost = [
        name
        for name in contract.required_columns
        if name not in filled and not (name in counted and contract.field(name).type == "integer")
    ]
    if lost:
        noun = "column is" if len(lost) == 1 else "columns are"
        what = f"the required {noun} not filled: {listed(lost)}"
        why = f"{contract.table} needs {listed(contract.required_columns)}."
        causes.add(("columns",), what, why, "Fill them in columns, above or constants.")
