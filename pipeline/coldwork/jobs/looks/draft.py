"""A layout to start from, as TOML: what is known is said, what a person must decide is marked."""

import json
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

from coldwork import contracts
from coldwork.contracts import Contract
from coldwork.inputs.layout import running_number
from coldwork.inputs.layout_units import spelled
from coldwork.inputs.words import shown
from coldwork.jobs.looks.columns import TABLES, guess_columns, guess_table, unit_in
from coldwork.jobs.looks.seen import Entry, Seen, SeenColumn

__all__ = ["DECIDE", "Draft", "draft_of"]

DECIDE: Final = "DECIDE"
_AT: Final = 40  # column of comments
_UNSAID: Final = "?"
_WANTED: Final = ("scale", "tester")
_SAMPLES: Final = 3
_LONGEST: Final = 30  # characters of a sample


@dataclass(frozen=True)
class Draft:
    """A draft and what is to be decided in it.

    Attributes
    ----------
    text : str
        The layout as TOML.
    decisions : tuple of (str, str)
        Key and question of each mark, in order.
    """

    text: str
    decisions: tuple[tuple[str, str], ...]


class _Pen:
    """Writes the lines of a draft and counts its marks."""

    def __init__(self) -> None:
        self.lines: list[str] = []
        self.decisions: list[tuple[str, str]] = []

    def section(self, name: str, note: str = "") -> None:
        self.lines += ["", _with_note(f"[{name}]", note)]

    def entry(self, entry: Entry, value: str | None = None) -> None:
        note = entry.note
        if entry.decide:
            self.decisions.append((entry.key, note))
            note = f"{DECIDE} {len(self.decisions)}: {note}"
        text = _toml(entry.value) if value is None else value
        self.lines.append(_with_note(f"{entry.key} = {text}", note))

    def open_question(self, column: SeenColumn) -> None:
        """Ask about a column that fills nothing yet; it is passed over until somebody does."""
        source = _toml(column.name)
        unit = unit_in(column.name, column.unit) if column.numbers else None
        if unit:
            source = f"{{ from = {source}, unit = {_toml(unit)} }}"
        if not column.samples:
            self.lines.append(f"# passed over, empty: {shown(column.name)}")
            return
        question = f"{_samples(column)}: which of our columns is it, or none?"
        self.decisions.append((column.name, question))
        text = f"# ... = {source}"
        self.lines.append(_with_note(text, f"{DECIDE} {len(self.decisions)}: {question}"))


def draft_of(seen: Seen) -> Draft | None:
    """Write a layout to start from.

    Parameters
    ----------
    seen : Seen
        What was seen.

    Returns
    -------
    Draft or None
        None where no table was found.
    """
    if not seen.columns:
        return None
    names = [column.name for column in seen.columns]
    labels = [label for label, _ in seen.above]
    table = guess_table([*names, *labels])
    contract = contracts.load(f"in/{table}")
    exact = sum(name in contract.columns for name in names)
    pen = _Pen()
    pen.lines.append("[layout]")
    pen.entry(Entry("id", _id_of(seen.name)))
    choice = [name for name in TABLES if f"in/{name}" in contracts.names()]
    ours = 2 * exact >= len(names)
    note = "" if ours else f"which table is it: {', '.join(choice)}?"
    pen.entry(Entry("fills", table, note, decide=not ours))
    pen.section(seen.kind)
    for entry in seen.form:
        pen.entry(entry)
    in_columns = guess_columns(names, table)
    over = {c: p for c, p in guess_columns(labels, table).items() if c not in in_columns}
    filled = {*in_columns, *over}
    _write_above(pen, seen, over, contract)
    _write_columns(pen, seen, in_columns, contract)
    _write_constants(pen, filled, contract)
    _write_gap(pen, filled, contract)
    return Draft("\n".join(pen.lines) + "\n", tuple(pen.decisions))


def _write_above(pen: _Pen, seen: Seen, over: dict[str, int], contract: Contract) -> None:
    if not seen.above:
        return
    if not over:
        pen.lines.append("")
    else:
        pen.section("above", "values over the table, for every row of the file")
    for ours, place in over.items():
        label, value = seen.above[place]
        unit = unit_in(label, value.rpartition(" ")[2])
        note = f"{shown(value)}: is this the {ours}?"
        entry = Entry(ours, label, note, decide=True)
        pen.entry(entry, _source(label, ours, contract, unit)[0])
    for place, (label, value) in enumerate(seen.above):
        if place not in over.values():
            pen.lines.append(f"# also over the table: {shown(label)} with {shown(value)}")


def _write_columns(pen: _Pen, seen: Seen, found: dict[str, int], contract: Contract) -> None:
    pen.section("columns", "what is not named here is passed over")
    for ours, place in found.items():
        column = seen.columns[place]
        unit = unit_in(column.name, column.unit)
        source, unsaid = _source(column.name, ours, contract, unit)
        own = column.name == ours
        note = _samples(column)
        if not own:
            note += f": is this the {ours}{f', in {unsaid}' if unsaid else ''}?"
        pen.entry(Entry(ours, column.name, note, decide=not own), source)
    for place, column in enumerate(seen.columns):
        if place not in found.values() and column.name:
            pen.open_question(column)


def _samples(column: SeenColumn) -> str:
    return ", ".join(shown(sample.strip()[:_LONGEST]) for sample in column.samples[:_SAMPLES])


def _source(name: str, ours: str, contract: Contract, unit: str | None) -> tuple[str, str]:
    """Write what fills a column, and say which unit is taken for lack of a word."""
    field = contract.field(ours)
    own = spelled(field.unit or "1")
    if not field.numeric or field.type == "integer" or own is None:
        return _toml(name), ""
    if unit is None and name == ours:
        return _toml(name), ""
    said = unit or own.name
    text = f"{{ from = {_toml(name)}, unit = {_toml(said)} }}"
    return text, "" if unit else said


def _write_constants(pen: _Pen, filled: set[str], contract: Contract) -> None:
    lost = list(_lost(filled, contract))
    unsaid = [name for name in _WANTED if name in contract.columns and name not in filled]
    if not lost and not unsaid:
        return
    pen.section("constants", "one value for every row")
    for name in lost:
        note = f"nothing was found that fills {name}: name its column or label, or say its value"
        value = 0.0 if contract.field(name).numeric else _UNSAID
        pen.entry(Entry(name, value, note, decide=True))
    if "scale" in unsaid:
        pen.entry(Entry("scale", "HV", "which scale: HV, HBW or HK?", decide=True))
    if "tester" in unsaid:
        note = "which tester? nothing in the file says it, and its bias is taken off"
        pen.entry(Entry("# tester", _UNSAID, note, decide=True))


def _write_gap(pen: _Pen, filled: set[str], contract: Contract) -> None:
    """Say what an indent still needs: its size, in one of two ways."""
    if "hardness-or-diagonals" in contract.checks:
        sizes = ({"hardness"}, {"d1_um", "d2_um"})
        if not any(size <= filled for size in sizes):
            question = "an indent needs d1_um and d2_um, or hardness: name them above"
            pen.decisions.append(("d1_um", question))
            pen.lines.append(f"# {DECIDE} {len(pen.decisions)}: {question}")


def _lost(filled: set[str], contract: Contract) -> Iterator[str]:
    counted = running_number(contract)
    for name in contract.required_columns:
        if name not in filled and name != counted:
            yield name


def _id_of(name: str) -> str:
    stem = name.rpartition(".")[0] or name
    return stem[:60].strip() or "layout"


def _toml(value: object) -> str:
    """Write a value as TOML: a JSON string is a TOML string, but for one character."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, list):
        return f"[{', '.join(_toml(each) for each in value)}]"
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _with_note(text: str, note: str) -> str:
    return f"{text.ljust(_AT - 1)} # {note}" if note else text
