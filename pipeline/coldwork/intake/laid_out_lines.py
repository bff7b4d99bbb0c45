"""Lines of a laid-out text file: which are the table's, and which stand over, in or under it."""

import re
from collections.abc import Iterator, Mapping, Sequence
from functools import cached_property
from typing import Final, NamedTuple

from coldwork.errors import Cause
from coldwork.inputs.layout import Closing, Layout
from coldwork.inputs.words import shown
from coldwork.intake.files import Lines
from coldwork.intake.laid_out_head import AboveLine
from coldwork.intake.quotes import split_cells

__all__ = ["Begin", "LineForm", "WrittenClosing", "find_begin"]

_ONE_TABLE: Final = "A file holds one table; what stands over it belongs to every row."
_SPLIT: Final = "Split the file, one table to each, or export it without the repeated header."
_BLANK: Final = b" \t"
_SPACES: Final = re.compile(rb"[ \t]+")
_OUTER: Final = re.compile(rb"(?m)^\t|\t$")
_ONLY_SPACES: Final = re.compile(rb"(?m)^ +$")


class Begin(NamedTuple):
    """Where the rows of a file begin, and what stands before them.

    Attributes
    ----------
    above : list of AboveLine
        The lines over the header, those that are blank left out.
    header : tuple of str
        Its cells.
    line : int
        Its line.
    text : bytes
        The whole line.
    units : tuple of str or None
        Cells of the units line, where the layout says that there is one.
    units_line : int
        Its line.
    rest : Lines
        What follows.
    """

    above: list[AboveLine]
    header: tuple[str, ...]
    line: int
    text: bytes
    units: tuple[str, ...] | None
    units_line: int
    rest: Lines


class WrittenClosing(NamedTuple):
    """A line that closes the table, as written: its cells by the contract's column."""

    line: int
    text: str
    closing: Closing
    cells: Mapping[str, str]


class LineForm:
    """What a layout says of the lines of a text file.

    Parameters
    ----------
    layout : Layout
        Of a text file.

    Attributes
    ----------
    spaces : bool
        Whether any number of spaces and tabs stands between two cells.
    delimiter : str
        What stands between two cells of `plain` lines.
    """

    def __init__(self, layout: Layout) -> None:
        if layout.text is None:
            message = "the layout is not one of a text file"
            raise ValueError(message)
        self.text = layout.text
        self.units = layout.units_line
        self.spaces = layout.text.delimiter == " "
        self.delimiter = "\t" if self.spaces else layout.text.delimiter
        self._padded = layout.padded
        self._ends = layout.ends_before
        self._comment = (layout.text.comment or "").encode()

    def cells(self, line: str) -> tuple[str, ...]:
        """Split one line into its cells; a quote that is left open is a character."""
        if self.spaces:
            return tuple(line.split())
        cells = split_cells(line, self.delimiter) or line.split(self.delimiter)
        return tuple(cell.strip(" \t") for cell in cells) if self._padded else tuple(cells)

    def above(self, line: str) -> tuple[str, ...]:
        """Split a line over the table; words that only spaces part stay together there."""
        return (line.strip(" \t"),) if self.spaces else self.cells(line)

    def is_comment(self, line: bytes) -> bool:
        """Tell whether a line is passed over."""
        return bool(self._comment) and line.startswith(self._comment)

    def is_marker(self, line: str) -> bool:
        """Tell whether a line is the one after which the header comes."""
        mark = self.text.table_starts_after
        first, *others = self.above(line)
        whole = first.strip(" \t") == mark and not any(each.strip(" \t") for each in others)
        return whole or line.strip(" \t") == mark

    def plain(self, data: bytes) -> bytes:
        """Blank comments and lines of spaces; write one tab where any number of spaces parts cells.

        No line goes, so that the numbers of the others stay.
        """
        if self._comment and self._comment in data:
            data = self._comments.sub(b"", data)
        if self.spaces:
            return _OUTER.sub(b"", _SPACES.sub(b"\t", data))
        if b" " in data and b" \n" in data:
            return _ONLY_SPACES.sub(b"", data)
        return data

    def split(self, lines: Lines) -> tuple[Lines, Lines | None]:
        """Part lines where the table is closed; None where it goes on."""
        match = None
        if any(closing.label.encode() in lines.data for closing in self._ends):
            match = self._closings.search(lines.data)
        if match is None:
            return lines, None
        table = lines.data[: match.start()]
        count = table.count(b"\n")
        rest = Lines(lines.data[match.start() :], lines.first + count, lines.lines - count)
        return Lines(table, lines.first, count), rest

    def repeats(self, lines: Lines, begin: Begin | None, name: str) -> list[Cause]:
        """Find the header, or the line before it, standing again among the rows."""
        mark = self.text.table_starts_after
        texts = [begin.text.strip(_BLANK) if begin else b"", mark.encode() if mark else b""]
        for text, what in zip(texts, ("header", "line before the header"), strict=True):
            if text and text in lines.data:
                tail = re.escape(self.delimiter.encode()) + rb"*" if text == texts[1] else b""
                pattern = rb"(?m)^[ \t]*" + re.escape(text) + tail + rb"[ \t]*$"
                found = re.search(pattern, lines.data)
                if found:
                    line = lines.first + lines.data.count(b"\n", 0, found.start())
                    where = f"{name}, line {line}"
                    return [Cause(where, f"the {what} stands again", _ONE_TABLE, _SPLIT)]
        return []

    def closing(
        self, lines: Lines, places: Mapping[str, int], columns: Sequence[str], name: str
    ) -> tuple[list[WrittenClosing], list[Cause]]:
        """Read the lines under a table; each must be one of those that close it."""
        found: list[WrittenClosing] = []
        for number, data in enumerate(lines.data.split(b"\n"), lines.first):
            line = data.decode("utf-8")
            cells = self.cells(line)
            if not any(cell.strip(" \t") for cell in cells) or self.is_comment(data):
                continue
            closing = self._closing_of(line, cells)
            if closing is None:
                what = f"a line follows that closes no table: {shown(line)}"
                mend = "Name its first cell under ends_before, or split the file."
                why = "After a line that ends the table there are no rows."
                return found, [Cause(f"{name}, line {number}", what, why, mend)]
            if self.spaces:
                cells = (closing.label, *line.strip(" \t").removeprefix(closing.label).split())
            found.append(WrittenClosing(number, line, closing, _placed(cells, places, columns)))
        return found, []

    def no_header(self, name: str, *, empty: bool) -> Cause:
        """Say that a file came to its end before its header, or that it is empty."""
        mark, line = self.text.table_starts_after, self.text.header_line
        why, mend = "A table has a header.", "Check the layout and the file."
        if empty:
            what = "is empty"
        elif mark is not None:
            what = f"no header stands after a line {shown(mark)}"
        elif line is not None:
            what = f"has no line {line} for its header"
        else:
            what = "has no header"
        if self.units and not empty:
            what += ", with a line of units under it"
        return Cause(name, what, why, mend)

    def _closing_of(self, line: str, cells: Sequence[str]) -> Closing | None:
        bare = line.strip(" \t")
        for closing in self._ends:
            ends = (f"{closing.label} ", f"{closing.label}\t")
            whole = self.spaces and f"{bare} ".startswith(ends)
            if whole or cells[0].strip(" \t") == closing.label:
                return closing
        return None

    @cached_property
    def _comments(self) -> re.Pattern[bytes]:
        return re.compile(rb"(?m)^" + re.escape(self._comment) + rb"[^\n]*")

    @cached_property
    def _closings(self) -> re.Pattern[bytes]:
        labels = b"|".join(re.escape(closing.label.encode()) for closing in self._ends)
        end = rb"[ \t]" if self.spaces else rb"[ \t]*" + re.escape(self.delimiter.encode())
        label = rb'(?:"(?:' + labels + rb')"|(?:' + labels + rb"))"
        return re.compile(rb"(?m)^[ \t]*" + label + rb"(?:" + end + rb"|[ \t]*$)")


def find_begin(lines: Lines, form: LineForm, name: str) -> Begin | None:
    """Find the header of a file; None if it, or its units line, has not come yet.

    Parameters
    ----------
    lines : Lines
        The file from its begin on.
    form : LineForm
        What its layout says.
    name : str
        What messages call it.

    Returns
    -------
    Begin or None
    """
    above: list[AboveLine] = []
    header: tuple[int, bytes] | None = None
    ready = form.text.table_starts_after is None
    for number, data, end in _each(lines):
        if header is not None:  # this is the units line
            if not data.strip(_BLANK):
                continue
            units = form.cells(data.decode("utf-8"))
            return _begun(above, header, form, (number, units), _after(lines, number, end))
        if form.text.header_line is not None:
            here = number == form.text.header_line
        else:
            here = ready and bool(data.strip(_BLANK)) and not form.is_comment(data)
        if here:
            header = number, data
            if not form.units:
                return _begun(above, header, form, None, _after(lines, number, end))
        elif data.strip(_BLANK) and not form.is_comment(data):
            text = data.decode("utf-8")
            if not ready and form.is_marker(text):
                ready = True
            else:
                above.append(AboveLine(f"{name}, line {number}", form.above(text)))
    return None


def _begun(
    above: list[AboveLine],
    header: tuple[int, bytes],
    form: LineForm,
    units: tuple[int, tuple[str, ...]] | None,
    rest: Lines,
) -> Begin:
    line, text = header
    cells = form.cells(text.decode("utf-8"))
    number, names = units or (0, None)
    return Begin(above, cells, line, text, names, number, rest)


def _each(lines: Lines) -> Iterator[tuple[int, bytes, int]]:
    """Give number and text of each line, and where the next one begins."""
    start, number = 0, lines.first
    while start < len(lines.data):
        end = lines.data.find(b"\n", start)
        end = len(lines.data) if end < 0 else end
        yield number, lines.data[start:end], end + 1
        start, number = end + 1, number + 1


def _after(lines: Lines, number: int, start: int) -> Lines:
    return Lines(lines.data[start:], number + 1, lines.first + lines.lines - number - 1)


def _placed(
    cells: Sequence[str], places: Mapping[str, int], columns: Sequence[str]
) -> Mapping[str, str]:
    """Give the cells of a closing line by the contract's column; none where they do not line up."""
    if any(cell.strip(" \t") for cell in cells[len(columns) :]):
        return {}
    return {name: cells[place] for name, place in places.items() if 0 < place < len(cells)}
