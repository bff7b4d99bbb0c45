"""Columns of text as Arrow holds them: their bytes, their lengths, their apostrophes."""

from typing import Any, Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

__all__ = [
    "as_mask",
    "byte_lengths",
    "content",
    "decoded",
    "distinct",
    "encoded",
    "only",
    "places_of",
    "take",
    "texts",
    "without_apostrophe",
]

_APOSTROPHE: Final = "^'"


def content(cells: pa.StringArray) -> bytes:
    """Give the bytes of all cells, one after the other, as one copy."""
    offsets, data = _buffers(cells)
    return bytes(data[offsets[0] : offsets[-1]]) if len(cells) else b""


def last_bytes(cells: pa.StringArray) -> NDArray[np.uint8]:
    """Give the last byte of each cell; for an empty cell another one, of a cell before it."""
    offsets, data = _buffers(cells)
    if not data.nbytes:
        return np.zeros(len(cells), dtype=np.uint8)
    return np.frombuffer(data, dtype=np.uint8)[offsets[1:] - 1]


def byte_lengths(cells: pa.StringArray) -> NDArray[np.int32]:
    """Give the length of each cell [byte], shape (n,)."""
    return np.diff(_buffers(cells)[0]) if len(cells) else np.empty(0, np.int32)


def only(cells: pa.StringArray, kept: NDArray[np.bool_]) -> pa.StringArray:
    """Give the same cells, without a copy, as null wherever `kept` is false.

    Parameters
    ----------
    cells : pyarrow.StringArray, n cells
        Cells without nulls.
    kept : ndarray of bool, shape (n,)
        Which of them stay.

    Returns
    -------
    pyarrow.StringArray, n cells
    """
    if kept.all():
        return cells
    _, offsets, data = cells.buffers()
    bits = np.zeros(cells.offset + len(cells), dtype=np.bool_)
    bits[cells.offset :] = kept
    valid = pa.py_buffer(np.packbits(bits, bitorder="little").tobytes())
    if offsets is None or data is None:  # no text at all
        return cells
    return pa.StringArray.from_buffers(len(cells), offsets, data, valid, -1, cells.offset)


def encoded(words: pa.StringArray, places: NDArray[np.int32]) -> pa.StringArray:
    """Give n cells as their distinct words and the place of each among them.

    A dictionary in Arrow's sense; to the type checker, and to whoever takes rows of it or
    asks for its texts, it is like any other column of text.
    """
    made = pa.DictionaryArray.from_arrays(pa.array(places, pa.int32()), words)
    return cast("pa.StringArray", made)


def distinct(cells: pa.StringArray) -> pa.StringArray:
    """Give the distinct words of cells that are encoded in a dictionary."""
    return cast("pa.StringArray", cast("Any", cells).dictionary)


def places_of(cells: pa.StringArray) -> NDArray[np.int32]:
    """Give the place of each cell among the distinct words, shape (n,)."""
    return np.asarray(cast("Any", cells).indices.to_numpy(zero_copy_only=False))


def decoded(cells: pa.StringArray) -> pa.StringArray:
    """Give cells as plain text, whether they are encoded in a dictionary or not."""
    if pa.types.is_dictionary(cells.type):
        return distinct(cells).take(cast("Any", cells).indices)
    return cells


def column_of(cells: pa.RecordBatch, name: str) -> pa.StringArray:
    """Give one column of a batch of text."""
    return cast("pa.StringArray", cells.column(name))


def take_or_null(cells: pa.StringArray, rows: NDArray[np.intp]) -> pa.StringArray:
    """Give the cells of some rows, null where the row is negative."""
    return cells.take(pa.array(rows, pa.int64(), mask=rows < 0))


def same_as(cells: pa.StringArray, text: str) -> NDArray[np.bool_]:
    """Tell which cells are that text, shape (n,)."""
    return as_mask(pc.equal(cells, pa.scalar(text)))


def replaced(cells: pa.StringArray, rows: NDArray[np.bool_], text: str) -> pa.StringArray:
    """Give the same cells with `text` where `rows` is true."""
    if not rows.any():
        return cells
    return cast("pa.StringArray", pc.if_else(pa.array(rows), text, cells))


def without_apostrophe(cells: pa.StringArray) -> pa.StringArray:
    """Take one leading apostrophe from each cell that has one.

    Text that a spreadsheet would run as a formula is written behind an
    apostrophe, and so is text that begins with one; readers strip one.
    """
    if b"'" not in content(cells):
        return cells
    return pc.replace_substring_regex(cells, pattern=_APOSTROPHE, replacement="")


def as_mask(values: pa.BooleanArray) -> NDArray[np.bool_]:
    """Give a boolean Arrow array without nulls as numpy's, shape (n,)."""
    return np.asarray(values.to_numpy(zero_copy_only=False), dtype=np.bool_)


def texts(cells: pa.StringArray) -> list[str]:
    """Give all cells as Python text; they hold no nulls."""
    return cast("list[str]", cells.to_pylist())


def take(cells: pa.StringArray, rows: NDArray[np.intp]) -> list[str]:
    """Give the cells of some rows as Python text, in the order of `rows`."""
    return texts(cells.take(rows))


def _buffers(cells: pa.StringArray) -> tuple[NDArray[np.int32], memoryview]:
    _, offsets, data = cells.buffers()
    numbers = np.frombuffer(memoryview(offsets or b""), dtype=np.int32)
    numbers = numbers[cells.offset : cells.offset + len(cells) + 1]
    return numbers, memoryview(data) if data is not None else memoryview(b"")
