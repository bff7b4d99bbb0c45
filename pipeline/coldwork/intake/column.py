"""One column of cells held against its field of the contract."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.contracts import Field
from coldwork.contracts.arrays import violations
from coldwork.intake import numbers
from coldwork.intake.cells import (
    as_mask,
    byte_lengths,
    distinct,
    places_of,
    without_apostrophe,
)
from coldwork.intake.numbers import Parsed
from coldwork.intake.times import parse_times, time_hint
from coldwork.rules import reasons
from coldwork.rules.rule import Reason

__all__ = ["LARGEST", "SMALLEST", "Column", "Fault", "read_column", "with_layout_faults"]

LARGEST: Final = 1e30  # of any number, in any unit of a contract: its powers stay finite
SMALLEST: Final = 1e-30  # of any number but zero
_CONTROL: Final = "remove what cannot be printed (control characters, line separators)"


@dataclass(frozen=True)
class Fault:
    """One kind of fault in one column of a block.

    Attributes
    ----------
    reason : Reason
        The rule that is broken.
    column : str
        Name of the column.
    rows : ndarray of bool, shape (n,)
        Where.
    hint : callable from str to str, or None
        From the cell to a hint of its own; None stands for the reason's.
    of_raw : bool
        Whether `hint` takes the cell as the machine wrote it, before its layout.
    """

    reason: Reason
    column: str
    rows: NDArray[np.bool_]
    hint: Callable[[str], str] | None = None
    of_raw: bool = False


@dataclass(frozen=True)
class Column:
    """One column, typed.

    Attributes
    ----------
    field : Field
        What the contract says of it.
    text : pyarrow.StringArray, n cells
        The cells, without the apostrophe that keeps text from being run as a formula;
        of numbers possibly encoded in a dictionary.
    values : ndarray, shape (n,), or None
        float64 for numbers, NaN where there is none [the field's unit]; int64 for
        integers, -1 where there is none [1], and for times, `times.ABSENT` where there
        is none [us]; None for text.
    absent : ndarray of bool, shape (n,)
        Where the cell is empty.
    faults : tuple of Fault
        What is wrong; empty where all is well. A row has at most one.
    """

    field: Field
    text: pa.StringArray
    values: NDArray[np.float64] | NDArray[np.int64] | None
    absent: NDArray[np.bool_]
    faults: tuple[Fault, ...]

    @property
    def faulty(self) -> NDArray[np.bool_]:
        """Where something is wrong, shape (n,)."""
        bad = np.zeros(len(self.text), dtype=np.bool_)
        for fault in self.faults:
            bad |= fault.rows
        return bad


def read_column(field: Field, cells: pa.StringArray, zone: str) -> Column:
    """Parse a column and hold it against its field.

    Parameters
    ----------
    field : Field
        The contract's field of that name.
    cells : pyarrow.StringArray, n cells
        The cells as written, without nulls. Numbers may come encoded in a dictionary:
        each distinct cell is then parsed once.
    zone : str
        IANA name of the zone in which a time without one is meant.

    Returns
    -------
    Column
        With a fault for each cell that is not of the field's type, is outside
        what it allows, or is empty though required.
    """
    if pa.types.is_dictionary(cells.type):
        return _spread(read_column(field, distinct(cells), zone), cells)
    if field.type == "number":
        return _number(field, cells, numbers.parse_floats(cells))
    if field.type == "integer":
        return _number(field, cells, numbers.parse_counts(cells))
    if field.type == "datetime":
        return _time(field, cells, zone)
    return _text(field, cells)


def with_layout_faults(column: Column, faults: tuple[Fault, ...]) -> Column:
    """Give a column the faults that its layout found; they stand in for its own in those rows.

    Parameters
    ----------
    column : Column
        From `read_column`.
    faults : tuple of Fault
        Of a whole block; those of other columns are passed over.

    Returns
    -------
    Column
        A row of it has at most one fault still.
    """
    first = [fault for fault in faults if fault.column == column.field.name and fault.rows.any()]
    if not first:
        return column
    taken = np.zeros(len(column.text), dtype=np.bool_)
    kept = []
    for fault in (*first, *column.faults):
        rows = fault.rows & ~taken
        taken |= rows
        if rows.any():
            kept.append(replace(fault, rows=rows))
    return replace(column, faults=tuple(kept))


def _spread(column: Column, cells: pa.StringArray) -> Column:
    """Give every row what its distinct cell came to."""
    places = places_of(cells)
    values = None if column.values is None else column.values[places]
    faults = tuple(replace(fault, rows=fault.rows[places]) for fault in column.faults)
    return Column(column.field, cells, values, column.absent[places], faults)


def _number(field: Field, cells: pa.StringArray, parsed: Parsed) -> Column:
    values = parsed.values
    if values.dtype.kind == "f":
        outside = violations(field, values)
        size = np.abs(values)
        absurd = (size > LARGEST) | ((size < SMALLEST) & (size > 0.0))
        outside |= absurd
    else:
        outside = violations(field, values) & ~parsed.absent & ~parsed.bad
    faults = [
        Fault(reasons.NOT_A_NUMBER, field.name, parsed.bad, numbers.hint),
        Fault(reasons.OUT_OF_RANGE, field.name, outside, _range_hint(field)),
    ]
    return _column(field, cells, parsed, faults)


def _time(field: Field, cells: pa.StringArray, zone: str) -> Column:
    text = without_apostrophe(cells)
    parsed = parse_times(text, zone)
    hint = _of_stripped(lambda raw: time_hint(raw, zone))
    return _column(field, text, parsed, [Fault(reasons.BAD_TIME, field.name, parsed.bad, hint)])


def _text(field: Field, cells: pa.StringArray) -> Column:
    text = without_apostrophe(cells)
    absent = byte_lengths(text) == 0
    faults = []
    if field.enum:
        unknown = ~absent & ~as_mask(pc.is_in(text, value_set=pa.array(field.enum, pa.string())))
        faults.append(Fault(reasons.UNKNOWN_SCALE, field.name, unknown))
    if field.max_length or field.pattern:
        faults.append(_unfit(field, text, absent))
    return _column(field, text, Parsed(np.empty(0), absent, absent), faults)


def _unfit(field: Field, text: pa.StringArray, absent: NDArray[np.bool_]) -> Fault:
    """Text too long or of another form; each distinct one is looked at once."""
    coded = text.dictionary_encode()
    words = cast("pa.StringArray", coded.dictionary)
    unfit = np.zeros(len(words), dtype=np.bool_)
    if field.max_length:
        lengths = pc.utf8_length(words).to_numpy(zero_copy_only=False)
        unfit |= lengths > field.max_length
    if field.pattern:
        whole = rf"\A(?:{field.pattern})\z"
        unfit |= ~as_mask(pc.match_substring_regex(words, pattern=whole))
    rows = np.zeros(len(text), dtype=np.bool_)
    if unfit.any():
        rows = unfit[coded.indices.to_numpy(zero_copy_only=False)] & ~absent
    return Fault(reasons.OUT_OF_RANGE, field.name, rows, _text_hint(field))


def _column(field: Field, text: pa.StringArray, parsed: Parsed, faults: list[Fault]) -> Column:
    if field.required:
        faults.append(Fault(reasons.REQUIRED_EMPTY, field.name, parsed.absent))
    values = None if field.type in ("string", "boolean") else parsed.values
    found = tuple(fault for fault in faults if fault.rows.any())
    return Column(field, text, values, parsed.absent, found)


def _range_hint(field: Field) -> Callable[[str], str]:
    unit = "" if field.unit in (None, "1") else f" (the unit is {field.unit})"
    words = f"it must be {field.range_text}{unit}" if field.range_text else ""

    def hint(raw: str) -> str:
        size = abs(float(raw))
        if size > LARGEST or 0.0 < size < SMALLEST:
            return "no measured quantity has such a size: check the exponent"
        return words

    return hint


def _text_hint(field: Field) -> Callable[[str], str]:
    longest = field.max_length

    def hint(raw: str) -> str:
        if longest and len(raw.removeprefix("'")) > longest:
            return f"shorten it to {longest} characters"
        return _CONTROL

    return hint


def _of_stripped(hint: Callable[[str], str]) -> Callable[[str], str]:
    return lambda raw: hint(raw.removeprefix("'"))
