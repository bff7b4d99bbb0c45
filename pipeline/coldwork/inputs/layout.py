"""A layout: how one kind of file is written, and which of our columns its columns fill.

It is declared, never sniffed. `read_layout` reads a layout's TOML file into a frozen
`Layout` and refuses it by name like a batch sheet; files are read through it in `intake`.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any, Final

from coldwork.contracts import Contract
from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.causes import Causes
from coldwork.inputs.layout_checks import refuse_contradictions
from coldwork.inputs.layout_units import Step, step_between
from coldwork.inputs.source import Sheet, SheetFile, Table, path_fault, read_toml
from coldwork.inputs.structure import refuse_misfits
from coldwork.inputs.words import shown

__all__ = [
    "Closing",
    "Filled",
    "Layout",
    "TextForm",
    "WorkbookForm",
    "layout_of",
    "read_layout",
    "running_number",
]

_DEFAULTS: Final[Mapping[str, Any]] = {
    "decimal": None,
    "thousands": None,
    "units_line": False,
    "ends_before": [],
    "absent": [""],
    "times": None,
    "padded": False,
}
_MEAN: Final = ("mean",)
_SCATTER: Final = ("standard-deviation", "range")
_MEANINGS: Final[Mapping[str, tuple[str, ...]]] = {
    "average": _MEAN,
    "mean": _MEAN,
    "spread": _SCATTER,
    "scatter": _SCATTER,
    "standard deviation": _SCATTER[:1],
    "range": _SCATTER[1:],
}
_DELIMITERS: Final[Mapping[str, str]] = {"tab": "\t", "spaces": " "}


@dataclass(frozen=True)
class TextForm:
    """How a text file is written, beyond what workbooks share.

    Attributes
    ----------
    encoding : str
        As Python's codecs name it.
    delimiter : str
        One character; a space stands for any number of spaces and tabs.
    comment : str or None
        Begin of a line that is passed over.
    table_starts_after : str or None
        The line before the header.
    header_line : int or None
        Number of the header's line, from 1. Without either, the header is the first
        line that is not blank.
    last_line_open : bool
        Whether a whole file has no line end after its last line.
    """

    encoding: str
    delimiter: str
    comment: str | None
    table_starts_after: str | None
    header_line: int | None
    last_line_open: bool


@dataclass(frozen=True)
class WorkbookForm:
    """Which part of a workbook holds the table.

    Attributes
    ----------
    sheet : str
        Name of the sheet.
    first_row : int
        Number of the row that holds the header, from 1.
    """

    sheet: str
    first_row: int


@dataclass(frozen=True)
class Closing:
    """A line that closes the table.

    Attributes
    ----------
    label : str
        What stands in its first cell.
    holds : tuple of str
        What its numbers may be: ``mean``, ``standard-deviation``, ``range``; they agree
        with ours if one of these does. Empty where they are kept and not compared.
    """

    label: str
    holds: tuple[str, ...]


@dataclass(frozen=True)
class Filled:
    """One of our columns and what fills it.

    Attributes
    ----------
    name : str
        The contract's column.
    source : str
        Name in the file's header, label above the table, or the constant as text.
    unit : str or None
        Name in `layout_units.UNITS` of the unit that it is written in; None where the
        layout names none, and it is the contract's.
    step : Step
        From that unit to the contract's.
    """

    name: str
    source: str
    unit: str | None
    step: Step


@dataclass(frozen=True)
class Layout:
    """How one kind of file is written.

    Attributes
    ----------
    path : str
        Path from the batch folder, as the sheet names it.
    digest : str
        SHA-256 of the layout's file.
    id : str
        Its name.
    fills : str
        The table that its files hold, such as ``indents``.
    text : TextForm or None
        For a text file.
    workbook : WorkbookForm or None
        For a workbook; one of the two is there.
    decimal : str or None
        ``.`` or ``,``. With None the point is meant, unless a cell could hold a thousands
        mark as well: that is refused.
    thousands : str or None
        Mark between groups of three digits; None where there is none.
    units_line : bool
        Whether units stand below the header.
    ends_before : tuple of Closing
        The lines that close the table; empty where nothing does.
    absent : tuple of str
        Cells that stand for no value.
    times : str or None
        Form of times as `time_form.TimeForm` takes it; None for ISO 8601.
    padded : bool
        Whether spaces around a cell are taken off.
    above, columns, constants : tuple of Filled
        What fills our columns, from above the table, from a column of it, and as one value.
    """

    path: str
    digest: str
    id: str
    fills: str
    text: TextForm | None
    workbook: WorkbookForm | None
    decimal: str | None
    thousands: str | None
    units_line: bool
    ends_before: tuple[Closing, ...]
    absent: tuple[str, ...]
    times: str | None
    padded: bool
    above: tuple[Filled, ...]
    columns: tuple[Filled, ...]
    constants: tuple[Filled, ...]

    @cached_property
    def raw_columns(self) -> Mapping[str, str]:
        """What a cell of each of our columns is called where it was written.

        The file's own column, ``above: label`` or ``constant: column``.
        """
        return (
            {each.name: each.source for each in self.columns}
            | {each.name: f"above: {each.source}" for each in self.above}
            | {each.name: f"constant: {each.name}" for each in self.constants}
        )

    @cached_property
    def filled(self) -> tuple[Filled, ...]:
        """All of `columns`, `above` and `constants`, in this order."""
        return (*self.columns, *self.above, *self.constants)


def read_layout(path: str, folder: Path) -> Layout:
    """Read a layout's file.

    Parameters
    ----------
    path : str
        Path from the batch folder; it may lead to a folder above, as ``builds_on`` does.
    folder : Path
        The batch folder.

    Returns
    -------
    Layout
        Checked and complete.

    Raises
    ------
    BatchRefused
        With everything that is wrong with it: where it stands, the rule that it breaks,
        the nearest known name, and how to mend it.
    """
    fault = path_fault(path)
    if fault:
        why = "A layout is a .toml file, named from the batch folder."
        cause = Cause(path, f"{shown(path)} {fault}", why, "Name it like 'layouts/bench.toml'.")
        raise BatchRefused(str(folder), [cause])
    return layout_of(read_toml(folder, path, "layout"), folder)


def layout_of(file: SheetFile, folder: Path) -> Layout:
    """Check the content of a layout's file and make the layout.

    Parameters
    ----------
    file : SheetFile
        From `read_toml`, or made of text.
    folder : Path
        The batch folder, for messages.

    Returns
    -------
    Layout
        Checked and complete.

    Raises
    ------
    BatchRefused
        As `read_layout`.
    """
    causes = Causes(Sheet(file.tables, (file,)))
    refuse_misfits(causes, "layout")
    contract = None
    if not causes.found:
        contract = refuse_contradictions(causes)
    if causes.found or contract is None:
        raise BatchRefused(str(folder), causes.all())
    return _layout(file, contract)


def running_number(contract: Contract) -> str | None:
    """Give the column that numbers the rows of a coupon, and is counted where a file has none."""
    for name in contract.primary_key[1:]:
        if contract.field(name).type == "integer":
            return name
    return None


def _layout(file: SheetFile, contract: Contract) -> Layout:
    tables: Table = file.tables
    form: Table = {**_DEFAULTS, **(tables.get("text") or tables.get("workbook") or {})}
    return Layout(
        path=file.name,
        digest=file.digest,
        id=tables["layout"]["id"],
        fills=contract.table,
        text=_text(form) if "text" in tables else None,
        workbook=_workbook(form) if "workbook" in tables else None,
        decimal=form["decimal"],
        thousands=form["thousands"],
        units_line=form["units_line"],
        ends_before=tuple(_closing(entry) for entry in form["ends_before"]),
        absent=tuple(form["absent"]),
        times=form["times"],
        padded=form["padded"],
        above=tuple(_filled(tables.get("above", {}), contract)),
        columns=tuple(_filled(tables.get("columns", {}), contract)),
        constants=tuple(_filled(tables.get("constants", {}), contract)),
    )


def _text(form: Table) -> TextForm:
    return TextForm(
        encoding=form["encoding"],
        delimiter=_DELIMITERS.get(form["delimiter"], form["delimiter"]),
        comment=form.get("comment"),
        table_starts_after=form.get("table_starts_after"),
        header_line=form.get("header_line"),
        last_line_open=form.get("last_line_open", False),
    )


def _workbook(form: Table) -> WorkbookForm:
    return WorkbookForm(form["sheet"], form.get("first_row", 1))


def _closing(entry: str | Table) -> Closing:
    if isinstance(entry, str):
        bare = entry.strip(" \t:.=").lower()
        return Closing(entry, _MEANINGS.get(bare, ()))
    holds = entry["is"]
    return Closing(entry["line"], () if holds == "other" else (holds,))


def _filled(section: Table, contract: Contract) -> Iterator[Filled]:
    for name, entry in section.items():
        table = entry if isinstance(entry, dict) else {"from": entry}
        source = table.get("from", table.get("value"))
        unit = table.get("unit")
        wanted = contract.field(name).unit or "1"
        step = step_between(unit, wanted) if unit else None
        yield Filled(name, _as_text(source), unit, step or Step())


def _as_text(source: object) -> str:
    return repr(source) if isinstance(source, (int, float)) else str(source)
