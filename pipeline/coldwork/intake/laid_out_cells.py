"""The cells of a laid-out file, column by column: what its layout makes of them."""

from collections.abc import Mapping
from typing import NamedTuple

import numpy as np
import pyarrow as pa

from coldwork.contracts import Contract
from coldwork.errors import Cause
from coldwork.inputs.layout import Layout, running_number
from coldwork.inputs.words import shown
from coldwork.intake.cells import encoded
from coldwork.intake.closing import ClosingLine
from coldwork.intake.column import Fault
from coldwork.intake.converting import Converter
from coldwork.intake.header import header_causes
from coldwork.intake.laid_out_head import AboveValue
from coldwork.intake.laid_out_lines import WrittenClosing
from coldwork.intake.text import REFUSED
from coldwork.intake.written_numbers import Signs

__all__ = ["ConvertedBlock", "LaidOutCells"]


class ConvertedBlock(NamedTuple):
    """Some rows of a file, n of them, as the contract has them and as they were written.

    Attributes
    ----------
    cells : pyarrow.RecordBatch, n rows
        Columns of the contract; numbers possibly encoded in a dictionary.
    raw : pyarrow.RecordBatch, n rows
        The same cells as written, under `Layout.raw_columns`.
    faults : tuple of Fault
        Cells that the layout refuses.
    ambiguous : tuple of (str, int, str) or None
        Column, row and cell of the first one that can be read in two ways.
    """

    cells: pa.RecordBatch
    raw: pa.RecordBatch
    faults: tuple[Fault, ...]
    ambiguous: tuple[str, int, str] | None


class LaidOutCells:
    """Turns the cells of one file.

    Parameters
    ----------
    contract : Contract
        The table's contract.
    layout : Layout
        How the file is written.
    """

    def __init__(self, contract: Contract, layout: Layout) -> None:
        self._contract = contract
        self._layout = layout
        self._converters = {
            filled.name: Converter(contract.field(filled.name), filled, layout)
            for filled in layout.filled
        }
        self._fixed = {filled.name: self._constant(filled.name) for filled in layout.constants}

    def missing(self, where: str) -> list[Cause]:
        """Say which columns the table cannot do without and the layout does not fill."""
        names = list(self._layout.raw_columns)
        counted = running_number(self._contract)
        if counted is not None and counted not in names:
            names.append(counted)
        return header_causes(names, self._contract, where)

    def take_above(self, values: Mapping[str, AboveValue]) -> list[Cause]:
        """Take the values over the table for every row that follows; say which cannot be."""
        causes = []
        for name, value in values.items():
            text = self._converters[name].one(value.text)
            if text == REFUSED:
                what = f"{shown(value.raw)} cannot be read as {name}"
                mend, why = self._converters[name].hint(value.text), "Every row takes it from here."
                two = self._converters[name].ambiguity(value.text)
                if two is not None:
                    (what, mend), why = two, "A cell is read in one way, the one declared."
                mend = f"{mend[0].upper()}{mend[1:].rstrip('.')}."
                causes.append(Cause(value.where, what, why, mend))
            self._fixed[name] = (text, value.raw)
        return causes

    def block(self, written: Mapping[str, pa.StringArray], rows: int) -> ConvertedBlock:
        """Turn the cells of a block.

        Parameters
        ----------
        written : mapping of str to pyarrow.StringArray, n cells each
            By the contract's column: the cells as written.
        rows : int
            n.

        Returns
        -------
        ConvertedBlock
        """
        cells: dict[str, pa.StringArray] = {}
        raw: dict[str, pa.StringArray] = {}
        faults: list[Fault] = []
        ambiguous = None
        for name, column in written.items():
            converted = self._converters[name].convert(column)
            cells[name] = converted.cells
            raw[self._layout.raw_columns[name]] = column
            faults += converted.faults
            if converted.ambiguous is not None and ambiguous is None:
                row = converted.ambiguous
                ambiguous = name, row, str(column[row].as_py())
        for name, (text, value) in self._fixed.items():
            cells[name] = pa.repeat(text, rows)
            if self._contract.field(name).numeric:  # to be parsed once
                cells[name] = encoded(pa.array([text], pa.string()), np.zeros(rows, np.int32))
            raw[self._layout.raw_columns[name]] = pa.repeat(value, rows)
        return ConvertedBlock(_batch(cells), _batch(raw), tuple(faults), ambiguous)

    def closed(self, line: WrittenClosing) -> ClosingLine:
        """Turn the numbers of a line that closes the table."""
        cells, written = {}, {}
        for name, raw in line.cells.items():
            if self._contract.field(name).type != "number":
                continue
            text = self._converters[name].one(raw)
            if text not in ("", REFUSED):
                cells[name], written[name] = text, raw
        return ClosingLine(line.line, line.text, line.closing.holds, cells, written)

    def ambiguity(self, column: str, raw: str) -> tuple[str, str]:
        """Spell out both readings of a cell, and say what to declare."""
        return self._converters[column].ambiguity(raw) or (f"{shown(raw)} has two readings", "")

    def _constant(self, name: str) -> tuple[str, str]:
        filled = next(each for each in self._layout.constants if each.name == name)
        field = self._contract.field(name)
        if field.numeric:
            return Signs(".", None).number(filled.source, filled.step), filled.source
        text = f"'{filled.source}" if filled.source.startswith("'") else filled.source
        return text, filled.source


def _batch(columns: Mapping[str, pa.StringArray]) -> pa.RecordBatch:
    return pa.RecordBatch.from_arrays(list(columns.values()), names=list(columns))
