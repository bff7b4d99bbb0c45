"""A slice of a table as lines of CSV, and text cells that no spreadsheet runs.

Numbers stand in the shortest form that reads back to the same number; a cell is
quoted only where it holds a comma or a quote. Three rules for text:

- Text that begins with ``= + - @``, a tab, a return or an apostrophe is written
  behind one apostrophe; readers strip one (`unguarded`).
- A line break inside a text is written as the visible symbol of the character,
  ``␊`` or ``␍``, so that one row is always one line. This is the one thing that does
  not read back; Parquet and the records keep the text as it is.
- No text and an absent value are both an empty cell.
"""

from collections.abc import Sequence
from typing import Any, Final, TypeAlias, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

__all__ = ["csv_header", "csv_lines", "guarded", "unguarded"]

_Column: TypeAlias = "pa.Array[Any]"
_GUARDED_STARTS: Final = "=+-@\t\r'"
_GUARDED: Final = r"^[=+\-@\t\r']"
_BREAKS: Final = {"\n": "␊", "\r": "␍"}
_TEXT: Final = pa.large_string()  # a slice of long texts may pass 2 GiB
_NOTHING: Final = pa.scalar("", _TEXT)
_COMMA: Final = pa.scalar(",", _TEXT)
_LINE_END: Final = pa.scalar("\n", _TEXT)
_QUOTE: Final = pa.scalar('"', _TEXT)

_is_guarded_start: Final = np.zeros(256, dtype=np.bool_)
_is_guarded_start[[ord(c) for c in _GUARDED_STARTS]] = True


def csv_header(columns: Sequence[str]) -> bytes:
    """Give the header line; column names are plain words."""
    return (",".join(columns) + "\n").encode()


def csv_lines(table: pa.Table) -> memoryview:
    """Give the rows of a table as lines of CSV, each with its line end.

    Parameters
    ----------
    table : pyarrow.Table, n rows
        Columns of text, floats without NaN, integers or booleans.

    Returns
    -------
    memoryview
        The lines in UTF-8.
    """
    if not len(table):
        return memoryview(b"")
    cells = [_cells(column.combine_chunks()) for column in table.columns]
    cells[-1] = _joined([cells[-1], _NOTHING], _LINE_END)
    lines = cells[0] if len(cells) == 1 else _joined(cells, _COMMA)
    offsets, data = _parts(lines)
    return data[offsets[0] : offsets[-1]]


def guarded(texts: _Column) -> _Column:
    """Put an apostrophe before each text that a spreadsheet would run or swallow."""
    if not _any_guarded_start(texts):
        return texts
    risky = pc.match_substring_regex(texts, _GUARDED)
    nothing = pa.scalar("", texts.type)
    behind = _joined([pa.scalar("'", texts.type), texts], nothing)
    return cast("_Column", pc.if_else(risky, behind, texts))


def unguarded(texts: _Column) -> _Column:
    """Take one leading apostrophe away where there is one: the inverse of `guarded`."""
    stripped = pc.utf8_slice_codeunits(texts, 1)
    return cast("_Column", pc.if_else(pc.starts_with(texts, "'"), stripped, texts))


def _cells(column: _Column) -> _Column:
    if not pa.types.is_string(column.type) and not pa.types.is_large_string(column.type):
        return column.cast(_TEXT)
    texts = guarded(column.cast(_TEXT))
    offsets, data = _parts(texts)
    present = bytes(data[offsets[0] : offsets[-1]])
    for char, symbol in _BREAKS.items():
        if char.encode() in present:
            texts = pc.replace_substring(texts, char, symbol)
    if b'"' in present or b"," in present:
        quoted = pc.replace_substring(texts, '"', '""')
        quoted = _joined([_QUOTE, quoted, _QUOTE], _NOTHING)
        texts = pc.if_else(pc.match_substring_regex(texts, '[",]'), quoted, texts)
    return texts


def _joined(cells: Sequence["_Column | pa.Scalar[Any]"], between: "pa.Scalar[Any]") -> _Column:
    join: Any = pc.binary_join_element_wise  # typed for fewer arguments than it takes
    return cast("_Column", join(*cells, between, null_handling="replace", null_replacement=""))


def _any_guarded_start(texts: _Column) -> bool:
    offsets, data = _parts(texts)
    starts = offsets[:-1][offsets[:-1] < offsets[1:]]
    return bool(_is_guarded_start[np.frombuffer(data, dtype=np.uint8)[starts]].any())


def _parts(texts: _Column) -> tuple[NDArray[np.int64], memoryview]:
    """Offsets of a text array's values and the bytes that they point into."""
    wide = pa.types.is_large_string(texts.type)
    _, places, data = texts.buffers()
    if places is None or not len(texts):
        return np.zeros(1, dtype=np.int64), memoryview(b"")
    offsets = np.frombuffer(memoryview(places), dtype="i8" if wide else "i4")
    kept = offsets[texts.offset : texts.offset + len(texts) + 1].astype(np.int64, copy=False)
    return kept, memoryview(b"" if data is None else data).cast("B")
