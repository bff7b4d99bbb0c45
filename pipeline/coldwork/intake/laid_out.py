"""A text file that an instrument wrote, read through its layout as blocks of our cells."""

from collections.abc import Iterator, Mapping, Sequence
from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.layout import Layout
from coldwork.inputs.words import listed, shown
from coldwork.intake.cells import as_mask, column_of
from coldwork.intake.closing import ClosingLine
from coldwork.intake.column import Fault
from coldwork.intake.decoding import Decoder
from coldwork.intake.files import BLOCK_BYTES, LineReader, Lines, TableFiles
from coldwork.intake.laid_out_cells import LaidOutCells
from coldwork.intake.laid_out_head import above_values, find_columns, unit_causes
from coldwork.intake.laid_out_lines import Begin, LineForm, find_begin
from coldwork.intake.quotes import with_clean_quotes
from coldwork.intake.rows import Rows, rows_of
from coldwork.intake.text import TextBlock
from coldwork.rules.reasons import CUT_OFF

__all__ = ["LaidOutText"]

_LONGEST_HEAD: Final = 16 << 20  # byte over a table
_OPEN: Final = "A cell must end in the line in which it begins."
_NUMERIC: Final = r"^[ \t]*[-+]?[.,]?[0-9]"


class LaidOutText:
    """One text file of a table as blocks of text, read through its layout.

    Parameters
    ----------
    files : TableFiles
        The table; this file has a layout.
    file : int
        Which of its files.
    block_bytes : int
        How much is read at once. [byte]

    Attributes
    ----------
    columns : tuple of str
        The file's own header, once it was read.
    unused_columns : tuple of str
        Those of them that the layout passes over.
    closing : list of ClosingLine
        The lines that close the table, at the end.
    """

    def __init__(self, files: TableFiles, file: int, block_bytes: int = BLOCK_BYTES) -> None:
        layout = files.layout(file)
        if layout is None or layout.text is None:
            message = f"{files.names[file]} has no layout of a text file"
            raise ValueError(message)
        self._files = files
        self._file = file
        self._name = files.names[file]
        self._layout: Layout = layout
        self._text = layout.text
        self._form = LineForm(layout)
        decoder = Decoder(layout.text.encoding, self._name)
        self._reader = LineReader(files.paths[file], self._name, block_bytes, decoder)
        self._cells = LaidOutCells(files.contract, layout)
        self._begin: Begin | None = None
        self._places: Mapping[str, int] = {}
        self._leads_with_number: bool | None = None
        self._held: list[Lines] = []
        self.columns: tuple[str, ...] = ()
        self.unused_columns: tuple[str, ...] = ()
        self.closing: list[ClosingLine] = []

    @property
    def sha256(self) -> str:
        """Digest of what was read; empty before the end."""
        return self._reader.sha256

    @property
    def size(self) -> int:
        """How much was read so far [byte]."""
        return self._reader.size

    def __iter__(self) -> Iterator[TextBlock]:
        """Read the file from front to back.

        Raises
        ------
        BatchRefused
            At the end, with all that is wrong with the file as a whole.
        """
        causes: list[Cause] = []
        for lines in self._reader:
            below = None if causes else lines
            if below is not None and self._begin is None:
                below, causes = self._take_head(below)
            if below is not None and not causes:
                block, causes = self._block(below)
                if block is not None and not causes:
                    yield block
        causes = [*self._reader.causes, *causes]
        if not causes:
            causes = self._causes_at_the_end()
        if causes:
            raise BatchRefused(str(self._files.folder), causes)

    def header_causes(self) -> list[Cause]:
        """Read up to the header and say what is wrong up to there; nothing is raised."""
        for lines in self._reader:
            _, causes = self._take_head(lines)
            if self._begin is not None or causes:
                return causes
        return self._reader.causes or self._causes_at_the_end()

    def _take_head(self, lines: Lines) -> tuple[Lines | None, list[Cause]]:
        """Split off what stands over the rows, once it is there; say what is wrong with it."""
        self._held.append(lines)
        whole = _joined(self._held)
        begin = find_begin(whole, self._form, self._name)
        if begin is None:
            if len(whole.data) > _LONGEST_HEAD:
                what = f"the header does not stand in the first {_LONGEST_HEAD >> 20} MiB"
                why = "What stands over a table is short."
                return None, [Cause(self._name, what, why, "Check the layout and the file.")]
            return None, []
        self._held = []
        self._begin = begin
        return begin.rest, self._causes_of(begin)

    def _causes_of(self, begin: Begin) -> list[Cause]:
        where = f"{self._name}, line {begin.line}"
        found = find_columns(begin.header, self._layout, where)
        self.columns = begin.header
        self.unused_columns = found.unused
        self._places = found.places
        contract = self._files.contract
        causes = found.causes
        if not causes and begin.units is not None:
            units_at = f"{self._name}, line {begin.units_line}"
            causes = unit_causes(begin.units, found.places, self._layout, contract, units_at)
        values, wrong = above_values(begin.above, self._layout, contract, self._name)
        causes = [*causes, *wrong, *self._cells.missing(where)]
        if not causes:
            causes = self._cells.take_above(values)
        return causes

    def _causes_at_the_end(self) -> list[Cause]:
        if self._begin is None:
            return [self._form.no_header(self._name, empty=not self._held)]
        if self._layout.ends_before and not self.closing:
            labels = [shown(closing.label) for closing in self._layout.ends_before]
            what = f"the table is not closed: no line begins with {listed(labels)}"
            why = "The layout says that such a line ends it; the file may be cut off."
            mend = "Export it again, or take ends_before out of the layout."
            return [Cause(self._name, what, why, mend)]
        return []

    def _block(self, lines: Lines) -> tuple[TextBlock | None, list[Cause]]:
        table, rest = self._form.split(lines) if not self.closing else (None, lines)
        causes: list[Cause] = []
        block = None
        if table is not None and table.data:
            causes = self._form.repeats(table, self._begin, self._name)
            if not causes:
                block, causes = self._rows(table)
        if rest is not None and not causes:
            closed, causes = self._form.closing(rest, self._places, self.columns, self._name)
            self.closing += [self._cells.closed(line) for line in closed]
        return block, causes

    def _rows(self, lines: Lines) -> tuple[TextBlock | None, list[Cause]]:
        data = self._form.plain(lines.data)
        quotes = not self._form.spaces
        if quotes:
            data, broken = with_clean_quotes(data, self._form.delimiter)
            if broken is not None:
                what = "a quoted cell is still open at the end of the line"
                mend = "Close the quote, or take the line break out of the cell."
                where = f"{self._name}, line {lines.first + broken}"
                return None, [Cause(where, what, _OPEN, mend)]
        rows = rows_of(
            lines,
            data,
            [str(place) for place in range(len(self.columns))],
            delimiter=self._form.delimiter,
            quotes=quotes,
            kept=[str(place) for place in sorted({0, *self._places.values()})],
        )
        causes = self._odd_leads(rows)
        cells = {name: column_of(rows.cells, str(place)) for name, place in self._places.items()}
        turned = self._cells.block(cells, rows.cells.num_rows)
        if turned.ambiguous is not None:
            causes.append(self._ambiguity(rows, *turned.ambiguous))
        faults = turned.faults
        if not lines.data.endswith(b"\n") and not self._text.last_line_open:
            faults = (*self._cut_off(rows, lines), *faults)
        block = TextBlock(
            file=self._file,
            lines=rows.lines,
            cells=turned.cells,
            torn=rows.torn,
            raw=turned.raw,
            raw_columns=self._layout.raw_columns,
            faults=faults,
        )
        return block, causes

    def _ambiguity(self, rows: Rows, column: str, row: int, raw: str) -> Cause:
        own = self._layout.raw_columns[column]
        where = f"{self._name}, line {rows.lines[row]}, column {own}"
        what, mend = self._cells.ambiguity(column, raw)
        return Cause(where, what, "A cell is read in one way, the one that is declared.", mend)

    def _odd_leads(self, rows: Rows) -> list[Cause]:
        """Find rows that begin unlike the first one, with a word instead of a number.

        A line of means in the middle of a table would otherwise pass for a reading where
        the layout passes the first column over.
        """
        if 0 in self._places.values() or not rows.cells.num_rows:
            return []
        leads = column_of(rows.cells, "0")
        if self._leads_with_number is None:
            self._leads_with_number = bool(_begin_with_numbers(leads.slice(0, 1))[0])
        if not self._leads_with_number:
            return []
        numbers = _begin_with_numbers(leads)
        if numbers.all():
            return []
        odd = int(np.argmin(numbers))
        word = str(leads[odd].as_py())
        what = f"the line begins with {shown(word)} where the first row begins with a number"
        mend = "Name it under ends_before if it closes the table; otherwise take it out."
        where = f"{self._name}, line {rows.lines[odd]}"
        return [Cause(where, what, "A line that is no reading must not pass for one.", mend)]

    def _cut_off(self, rows: Rows, lines: Lines) -> Sequence[Fault]:
        last = rows.lines == lines.first + lines.lines - 1
        if not last.any():
            return ()
        column = max(self._places, key=lambda name: self._places[name])
        return (Fault(CUT_OFF, column, last),)


def _joined(held: Sequence[Lines]) -> Lines:
    if len(held) == 1:
        return held[0]
    data = b"".join(lines.data for lines in held)
    return Lines(data, held[0].first, sum(lines.lines for lines in held))


def _begin_with_numbers(cells: pa.StringArray) -> NDArray[np.bool_]:
    return as_mask(pc.match_substring_regex(cells, pattern=_NUMERIC))
