"""The cells of a workbook's table: what its layout makes of them, and what it refuses.

A stored number is a number whatever signs the layout declares; those are for text. So
the cells of a column go two ways, each in its own: text as it was typed, and numbers
and times as they are stored.
"""

from collections.abc import Iterator, Mapping
from dataclasses import replace
from typing import Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.contracts import Contract, Field
from coldwork.errors import Cause
from coldwork.inputs.layout import Filled, Layout
from coldwork.intake.cells import column_of, replaced
from coldwork.intake.closing import ClosingLine
from coldwork.intake.column import Fault
from coldwork.intake.laid_out_cells import ConvertedBlock, LaidOutCells
from coldwork.intake.laid_out_head import AboveValue
from coldwork.intake.laid_out_lines import WrittenClosing
from coldwork.intake.text import REFUSED
from coldwork.intake.workbooks.book import BookSheet, SheetRows
from coldwork.intake.workbooks.faults import column_letters
from coldwork.intake.workbooks.grid import Mark
from coldwork.rules import reasons
from coldwork.rules.rule import Reason

__all__ = ["WorkbookCells"]

_RATIO: Final = "1"


class WorkbookCells:
    """Turns the cells of one sheet.

    Parameters
    ----------
    contract : Contract
        The table's contract.
    layout : Layout
        How the sheet is written.
    """

    def __init__(self, contract: Contract, layout: Layout) -> None:
        as_stored = replace(
            layout, decimal=".", thousands=None, times=None, padded=False, absent=("",)
        )
        self._contract = contract
        self._layout = layout
        self._typed = LaidOutCells(contract, layout)
        self._stored = LaidOutCells(contract, as_stored)

    def missing(self, where: str) -> list[Cause]:
        """Say which columns the table cannot do without and the layout does not fill."""
        return self._typed.missing(where)

    def take_above(self, values: Mapping[str, AboveValue], stored: set[str]) -> list[Cause]:
        """Take the values over the table; those of `stored` are numbers or times, not text."""
        typed = {name: value for name, value in values.items() if name not in stored}
        numbers = {name: value for name, value in values.items() if name in stored}
        return [*self._typed.take_above(typed), *self._stored.take_above(numbers)]

    def ambiguity(self, column: str, raw: str) -> tuple[str, str]:
        """Spell out both readings of a cell, and say what to declare."""
        return self._typed.ambiguity(column, raw)

    def closed(self, line: WrittenClosing, stored: set[str]) -> ClosingLine:
        """Turn the numbers of a row that closes the table; those of `stored` are numbers."""
        typed, numbers = (
            cells.closed(
                line._replace(
                    cells={
                        name: cell for name, cell in line.cells.items() if (name in stored) == way
                    }
                )
            )
            for way, cells in ((False, self._typed), (True, self._stored))
        )
        return typed._replace(
            cells={**typed.cells, **numbers.cells}, written={**typed.written, **numbers.written}
        )

    def block(
        self, sheet: BookSheet, rows: SheetRows, kept: NDArray[np.bool_], places: Mapping[str, int]
    ) -> ConvertedBlock:
        """Turn the cells of some rows.

        Parameters
        ----------
        sheet : BookSheet
            The sheet.
        rows : SheetRows, n rows
            Some of its rows.
        kept : ndarray of bool, shape (n,)
            Those that belong to the table, m of them.
        places : mapping of str to int
            By the contract's column: place of the column, from 0.

        Returns
        -------
        ConvertedBlock
            Of m rows.
        """
        chosen = np.flatnonzero(kept)
        written = {name: _taken(rows.columns[place], chosen) for name, place in places.items()}
        is_stored = {
            name: (rows.numbers[place] | rows.dates[place])[kept] for name, place in places.items()
        }
        typed = {
            name: replaced(written[name], rows_of, "")
            for name, rows_of in is_stored.items()
            if not rows_of.all()
        }
        stored = {
            name: replaced(written[name], ~rows_of, "")
            for name, rows_of in is_stored.items()
            if rows_of.any()
        }
        turned = (self._typed.block(typed, len(chosen)), self._stored.block(stored, len(chosen)))
        odd = list(self._odd(sheet, rows, kept, places))
        return ConvertedBlock(
            self._cells(turned, is_stored, odd),
            self._raw(turned, written),
            (*odd, *_others(turned, is_stored, odd)),
            turned[0].ambiguous,
        )

    def _cells(
        self,
        turned: tuple[ConvertedBlock, ConvertedBlock],
        is_stored: Mapping[str, NDArray[np.bool_]],
        odd: list[Fault],
    ) -> pa.RecordBatch:
        """Put the two ways together, and `REFUSED` where a cell is odd."""
        typed, stored = (set(block.cells.schema.names) for block in turned)
        columns = {}
        for name in self._names:
            one = column_of(turned[0 if name in typed else 1].cells, name)
            if name in is_stored and name in typed and name in stored:
                other = column_of(turned[1].cells, name)
                mixed = pc.if_else(pa.array(is_stored[name]), other, one)
                one = cast("pa.StringArray", mixed)
            for fault in odd:
                if fault.column == name and fault.reason is not reasons.HIDDEN_ROW:
                    one = replaced(one, fault.rows, REFUSED)
            columns[name] = one
        return _batch(columns)

    def _raw(
        self, turned: tuple[ConvertedBlock, ConvertedBlock], written: Mapping[str, pa.StringArray]
    ) -> pa.RecordBatch:
        own = self._layout.raw_columns
        columns = {}
        for name in self._names:
            if name in written:
                columns[own[name]] = written[name]
                continue
            block = next(each for each in turned if own[name] in each.raw.schema.names)
            columns[own[name]] = column_of(block.raw, own[name])
        return _batch(columns)

    @property
    def _names(self) -> list[str]:
        return [filled.name for filled in self._layout.filled]

    def _odd(
        self, sheet: BookSheet, rows: SheetRows, kept: NDArray[np.bool_], places: Mapping[str, int]
    ) -> Iterator[Fault]:
        """Find what a stored value must not be taken for, column by column."""
        numbers = rows.rows[kept]
        hidden = sheet.grid.rows_hidden(numbers)
        if hidden.any():
            first = next(iter(places))
            yield Fault(reasons.HIDDEN_ROW, first, hidden)
        for filled in self._layout.columns:
            place = places[filled.name]
            taken = np.zeros(len(numbers), dtype=np.bool_)
            field = self._contract.field(filled.name)
            for reason, found in _oddities(sheet, rows, kept, place, filled, field):
                new = found & ~taken
                taken |= found
                if new.any():
                    yield Fault(reason, filled.name, new, _hint(reason, sheet, place), of_raw=True)


def _oddities(
    sheet: BookSheet,
    rows: SheetRows,
    kept: NDArray[np.bool_],
    place: int,
    filled: Filled,
    field: Field,
) -> Iterator[tuple[Reason, NDArray[np.bool_]]]:
    numbers, column = rows.rows[kept], place + 1
    yield reasons.MERGED_CELL, sheet.grid.rows_merged(numbers, column)
    yield reasons.FORMULA_WITHOUT_VALUE, sheet.marked(Mark.UNVALUED, column, numbers)
    yield reasons.CELL_ERROR, sheet.marked(Mark.ERROR, column, numbers)
    if field.type != "datetime":
        yield reasons.DATE_IN_CELL, rows.dates[place][kept]
    shown: tuple[Mark, ...] = ()
    if field.numeric:
        shown = (
            (Mark.SCALED,)
            if filled.unit == _RATIO or field.unit == _RATIO
            else (
                Mark.SCALED,
                Mark.PERCENT,
            )
        )
        if filled.unit == "%":
            shown = (Mark.SCALED, Mark.PERCENT)
    elif field.type == "string":
        shown = (Mark.SCALED, Mark.PERCENT, Mark.FORMATTED)
    for mark in shown:
        both = sheet.marked(mark, column, numbers) & rows.numbers[place][kept]
        yield reasons.SHOWN_OTHERWISE, both


def _others(
    turned: tuple[ConvertedBlock, ConvertedBlock],
    is_stored: Mapping[str, NDArray[np.bool_]],
    odd: list[Fault],
) -> Iterator[Fault]:
    """Give what the layout refuses, each way in its own cells; an odd cell has its reason."""
    for stored, block in zip((False, True), turned, strict=True):
        for fault in block.faults:
            here = fault.rows & (is_stored[fault.column] == stored)
            for other in odd:
                if other.column == fault.column and other.reason is not reasons.HIDDEN_ROW:
                    here &= ~other.rows
            if here.any():
                yield replace(fault, rows=here)


def _hint(reason: Reason, sheet: BookSheet, place: int) -> "_Hint":
    return _Hint(f"column {column_letters(place + 1)} of sheet {sheet.name!r}: {reason.hint}")


class _Hint:
    """A hint that is the same for every cell of a column."""

    def __init__(self, words: str) -> None:
        self._words = words

    def __call__(self, _raw: str) -> str:
        return self._words


def _taken(cells: list[str], rows: NDArray[np.intp]) -> pa.StringArray:
    whole = pa.array(cells, pa.string())
    return whole if len(rows) == len(cells) else whole.take(rows)


def _batch(columns: Mapping[str, pa.StringArray]) -> pa.RecordBatch:
    return pa.RecordBatch.from_arrays(list(columns.values()), names=list(columns))
