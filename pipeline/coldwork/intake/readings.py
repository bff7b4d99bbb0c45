"""Tables of readings as a stream of blocks that hold usable rows alone.

Every other row goes to `SetAside` on the way, with the first of its faults in the
contract's order of columns and a word on the others.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.contracts import Field
from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.method import Tensile
from coldwork.intake.cells import column_of, replaced, same_as, take, take_or_null
from coldwork.intake.column import Column, Fault, read_column, with_layout_faults
from coldwork.intake.coupons import Coupons
from coldwork.intake.curve_columns import RunningCount, needed_columns
from coldwork.intake.exclusions import Exclusions
from coldwork.intake.files import BLOCK_BYTES, KeptLine, SourceFile, TableFiles
from coldwork.intake.printed import FileTally, Printed
from coldwork.intake.row_checks import curve_faults, filled_scale, indent_faults
from coldwork.intake.set_aside import SetAside
from coldwork.intake.sources import TableSource, table_text
from coldwork.intake.text import REFUSED, TextBlock
from coldwork.rules import reasons

__all__ = ["ReadingBlock", "ReadingStream", "read_readings"]

_ID: Final = "coupon_id"
_NUMBERS: Final = {"indents": "indent_no", "flow_stress": "reading_no", "curves": "point_no"}


@dataclass(frozen=True)
class ReadingBlock:
    """Usable readings of one file, n of them, in the file's order.

    Attributes
    ----------
    file : int
        Which of the stream's files.
    lines : ndarray of int64, shape (n,)
        Line of each.
    coupon : ndarray of int32, shape (n,)
        Place of its coupon in coupons.csv.
    number : ndarray of int64, shape (n,)
        ``indent_no``, ``reading_no`` or ``point_no``, which is counted where there is none.
    floats : mapping of str to ndarray of float64, shape (n,)
        The number columns that the file has, by name; NaN where absent. [contract's unit]
    texts : mapping of str to pyarrow.StringArray, n texts
        The text and time columns that the file has, by name, empty where absent; for
        indents always ``scale``, ``HV`` where absent.
    times : ndarray of int64, shape (n,), or None
        ``measured_at`` since 1970-01-01T00:00Z, `times.ABSENT` where absent; None if
        the file has no such column. [us]
    raw : pyarrow.RecordBatch, n rows
        The cells as written, under the file's own names.
    """

    file: int
    lines: NDArray[np.int64]
    coupon: NDArray[np.int32]
    number: NDArray[np.int64]
    floats: Mapping[str, NDArray[np.float64]]
    texts: Mapping[str, pa.StringArray]
    times: NDArray[np.int64] | None
    raw: pa.RecordBatch


@dataclass(frozen=True)
class _Typed:
    """A block after its cells were read and its faults were found."""

    text: TextBlock
    columns: Mapping[str, Column]
    scale: pa.StringArray | None
    coupon: NDArray[np.int32]
    number: NDArray[np.int64]
    exclusion: NDArray[np.intp]
    faults: list[Fault]

    @property
    def faulty(self) -> NDArray[np.bool_]:
        bad = np.zeros(len(self.text.lines), dtype=np.bool_)
        for fault in self.faults:
            bad |= fault.rows
        return bad


class ReadingStream:
    """The readings of a batch, block by block; see `read_readings`.

    Iterating anew reads the files anew. Whoever does so restarts the `SetAside` first.

    Attributes
    ----------
    seen : ndarray of bool, shape (exclusions,)
        Which exclusions met a reading, once the end was reached.
    printed : list of Printed
        Means and scatters that a file prints and that its rows do not give, once the end
        was reached.
    """

    def __init__(
        self,
        files: TableFiles,
        coupons: Coupons,
        exclusions: Exclusions,
        set_aside: SetAside,
        zone: str,
        *,
        block_bytes: int = BLOCK_BYTES,
        tensile: Tensile | None = None,
    ) -> None:
        self._files = files
        self._coupons = coupons
        self._exclusions = exclusions
        self._set_aside = set_aside
        self._zone = zone
        self._block_bytes = block_bytes
        self._tensile = tensile
        self._counted = RunningCount(len(coupons))
        self._table = files.contract.table
        self._number = _NUMBERS[self._table]
        self._fields = [_loosened(field) for field in files.contract.fields]
        self._digests: dict[int, str] = {}
        self._texts: dict[int, TableSource] = {}
        self._rows: dict[int, int] = {}
        self.printed: list[Printed] = []
        self.seen = np.zeros(len(exclusions), dtype=np.bool_)

    def __iter__(self) -> Iterator[ReadingBlock]:
        """Read all files from front to back.

        Raises
        ------
        BatchRefused
            At the end, with all that is wrong with the files as wholes.
        """
        self.seen[:] = False
        self._counted.restart()
        self.printed.clear()
        causes: list[Cause] = []
        for file in range(len(self._files.paths)):
            self._rows[file] = 0
            tally = FileTally(self._files.layout(file))
            text = table_text(self._files, file, self._block_bytes)
            try:
                for block in text:
                    self._rows[file] += len(block.lines) + len(block.torn)
                    if not causes:
                        yield self._usable(block, tally)
            except BatchRefused as refused:
                causes += refused.causes
            else:
                causes += self._compared(file, text)
                self.printed += tally.printed(file, text.closing)
        if causes:
            raise BatchRefused(str(self._files.folder), causes)

    @property
    def sources(self) -> list[SourceFile]:
        """What was read so far; rows that were set aside later on are counted as such."""
        found = []
        for file, sha256 in self._digests.items():
            rows, text = self._rows[file], self._texts[file]
            aside = self._set_aside.count_in(self._table, self._files.names[file])
            source = self._files.source(file, sha256, text.size, rows, aside)
            kept = tuple(KeptLine(line.line, line.text) for line in text.closing)
            found.append(replace(source, unused_columns=text.unused_columns, kept_lines=kept))
        return found

    def unmatched(self) -> list[Cause]:
        """Say which exclusions matched no reading, once the end was reached."""
        return self._exclusions.unmatched(self.seen)

    def _compared(self, file: int, text: TableSource) -> list[Cause]:
        """Note what a file was; refuse one that was something else the last time."""
        before = self._digests.setdefault(file, text.sha256)
        self._texts[file] = text
        if before == text.sha256:
            return []
        what, why = "changed between two passes", "What was read would be neither."
        mend = "Wait until whatever writes it has finished, then run the batch again."
        return [Cause(self._files.names[file], what, why, mend)]

    def _usable(self, block: TextBlock, tally: FileTally) -> ReadingBlock:
        typed = self._typed(block)
        tally.add(typed.columns, typed.coupon)
        self._put_torn_aside(block)
        if not typed.faults:
            return self._block(typed)
        bad = typed.faulty
        self._put_aside(typed, np.flatnonzero(bad))
        return _kept(self._block(typed), ~bad)

    def _typed(self, block: TextBlock) -> _Typed:
        columns = {
            field.name: with_layout_faults(
                read_column(field, column_of(block.cells, field.name), self._zone), block.faults
            )
            for field in self._fields
            if field.name in block.cells.schema.names
        }
        coupon = self._coupons.index(columns[_ID].text)
        number = (
            _integers(columns[self._number])
            if self._number in columns
            else self._counted.of(coupon, block.lines, self._torn_lines(block))
        )
        exclusion = self._exclusions.find(coupon, number)
        self.seen[exclusion[exclusion >= 0]] = True
        scale = None
        refused = same_as(columns[_ID].text, REFUSED)  # whatever its name is, it has its reason
        unlisted = (coupon < 0) & ~columns[_ID].absent & ~refused
        faults = [
            Fault(reasons.UNLISTED_COUPON, _ID, unlisted, self._unlisted_hint),
            Fault(reasons.EXCLUDED, self._number, exclusion >= 0),
        ]
        if self._table == "indents":
            scale = filled_scale(columns, len(block.lines))
            faults += indent_faults(columns, scale)
        elif self._tensile is not None:
            faults += curve_faults(columns, needed_columns(self._tensile, tuple(columns)))
        faults += [fault for column in columns.values() for fault in column.faults]
        found = [fault for fault in faults if fault.rows.any()]
        places = {name: place for place, name in enumerate(columns)}
        found.sort(key=lambda fault: places.get(fault.column, -1))
        return _Typed(block, columns, scale, coupon, number, exclusion, found)

    def _block(self, typed: _Typed) -> ReadingBlock:
        columns = typed.columns
        floats, texts = {}, {}
        for name, column in columns.items():
            if column.field.type == "number":
                floats[name] = np.asarray(column.values, dtype=np.float64)
            elif column.field.text and name != _ID:
                texts[name] = column.text
        if typed.scale is not None:
            texts["scale"] = typed.scale
        times = _integers(columns["measured_at"]) if "measured_at" in columns else None
        return ReadingBlock(
            file=typed.text.file,
            lines=typed.text.lines,
            coupon=typed.coupon,
            number=typed.number,
            floats=floats,
            texts=texts,
            times=times,
            raw=typed.text.cells if typed.text.raw is None else typed.text.raw,
        )

    def _torn_lines(self, block: TextBlock) -> list[int]:
        """Give the lines that count too: those of a file that belongs to one coupon as a whole."""
        layout = self._files.layout(block.file)
        one = layout is not None and all(each.name != _ID for each in layout.columns)
        return [row.line for row in block.torn] if one else []

    def _put_torn_aside(self, block: TextBlock) -> None:
        if not block.torn:
            return
        self._set_aside.add(
            reasons.ROW_WIDTH,
            table=self._table,
            file=self._files.names[block.file],
            lines=[row.line for row in block.torn],
            column="",
            raw=[row.text for row in block.torn],
            hint=[
                _width_hint(row.found, row.expected, tidy=block.raw is None) for row in block.torn
            ],
        )

    def _put_aside(self, typed: _Typed, rows: NDArray[np.intp]) -> None:
        """Set rows aside, each for the first of its faults."""
        left = rows
        for place, fault in enumerate(typed.faults):
            hit = fault.rows[left]
            here, left = left[hit], left[~hit]
            if not here.size:
                continue
            later = typed.faults[place + 1 :]
            exclusion = typed.exclusion[here]
            self._set_aside.add(
                fault.reason,
                table=self._table,
                file=self._files.names[typed.text.file],
                lines=typed.text.lines[here],
                column=typed.text.raw_columns.get(fault.column, fault.column),
                raw=typed.text.written(fault.column, here),
                coupon=typed.coupon[here],
                coupon_ids=_known_names(typed).take(here),
                reading_no=typed.number[here],
                hint=_hints(fault, typed, here),
                also=_also(typed, later, here),
                excluded_by=take_or_null(self._exclusions.by, exclusion),
                excluded_at=take_or_null(self._exclusions.at, exclusion),
                excluded_because=take_or_null(self._exclusions.because, exclusion),
            )

    def _unlisted_hint(self, raw: str) -> str:
        alike = self._coupons.lookup.alike(raw.removeprefix("'"))
        if alike is None:
            return ""
        return f"coupons.csv lists {alike!r}: spaces, capitals and leading zeros count"


def read_readings(
    files: TableFiles,
    coupons: Coupons,
    exclusions: Exclusions,
    set_aside: SetAside,
    zone: str,
    *,
    block_bytes: int = BLOCK_BYTES,
    tensile: Tensile | None = None,
) -> ReadingStream:
    """Read the files that hold readings, as a stream.

    Parameters
    ----------
    files : TableFiles
        They and their contract, ``in/indents``, ``in/flow_stress`` or ``in/curves``.
    coupons : Coupons
        The batch's coupons.
    exclusions : Exclusions
        The readings that were taken out.
    set_aside : SetAside
        Where rows go that cannot be used.
    zone : str
        IANA name of the zone in which a time without one is meant.
    block_bytes : int, optional
        How much is read at once. [byte]
    tensile : Tensile, optional
        What the sheet says of curves, for ``in/curves``.

    Returns
    -------
    ReadingStream
        Blocks in the order of the files and their lines, as many as were read, some of
        them without a row. Memory does not grow with the files, but for what is set aside.
    """
    return ReadingStream(
        files, coupons, exclusions, set_aside, zone, block_bytes=block_bytes, tensile=tensile
    )


def _loosened(field: Field) -> Field:
    """Leave the form of coupons' names to coupons.csv: a name that is listed there has it."""
    return replace(field, pattern=None, max_length=None) if field.name == _ID else field


def _integers(column: Column) -> NDArray[np.int64]:
    return np.asarray(column.values, dtype=np.int64)


def _known_names(typed: _Typed) -> pa.StringArray:
    """Give the coupon of each row, empty where its layout refuses the cell."""
    names = typed.columns[_ID].text
    return replaced(names, same_as(names, REFUSED), "")


def _hints(fault: Fault, typed: _Typed, rows: NDArray[np.intp]) -> list[str | None] | None:
    if fault.hint is None:
        return None
    if fault.of_raw or fault.column not in typed.text.cells.schema.names:
        cells = typed.text.written(fault.column, rows)
    else:
        cells = take(column_of(typed.text.cells, fault.column), rows)
    each = {cell: fault.hint(cell) or None for cell in set(cells)}
    return [each[cell] for cell in cells]


def _also(typed: _Typed, faults: list[Fault], rows: NDArray[np.intp]) -> list[str | None] | None:
    """Name the further faults of each row: column, rule and raw cell."""
    if not any(fault.rows[rows].any() for fault in faults):
        return None
    words: list[list[str]] = [[] for _ in rows]
    for fault in faults:
        places = np.flatnonzero(fault.rows[rows])
        column = typed.text.raw_columns.get(fault.column, fault.column)
        cells = typed.text.written(fault.column, rows[places])
        for place, cell in zip(places, cells, strict=True):
            words[place].append(f"{column}: {fault.reason.id} ({cell!r})")
    return ["; ".join(each) or None for each in words]


def _width_hint(found: int, expected: int, *, tidy: bool) -> str:
    if tidy:
        more = "an unquoted comma or a decimal comma" if found > expected else "a missing comma"
    else:
        more = "a delimiter inside a cell" if found > expected else "a missing cell"
    return f"{found} cells where the header has {expected}: look for {more}"


def _kept(block: ReadingBlock, rows: NDArray[np.bool_]) -> ReadingBlock:
    mask = pa.array(rows)
    return ReadingBlock(
        file=block.file,
        lines=block.lines[rows],
        coupon=block.coupon[rows],
        number=block.number[rows],
        floats={name: values[rows] for name, values in block.floats.items()},
        texts={name: texts.filter(mask) for name, texts in block.texts.items()},
        times=None if block.times is None else block.times[rows],
        raw=block.raw.filter(mask),
    )
