"""Cells as a machine writes them, turned into cells of the contract by exact steps on the text.

A power of ten moves the decimal point, so 0.1821 mm is 182.1 um to the last bit; any
other factor is applied to the decimal number as a fraction and rounded once, to the
nearest double. Equal cells are turned once. What the layout does not allow becomes
`REFUSED`, never another number.
"""

from dataclasses import dataclass
from typing import Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.contracts import Field
from coldwork.inputs.layout import Filled, Layout
from coldwork.inputs.time_form import TimeForm, time_form
from coldwork.intake import written_numbers, written_times
from coldwork.intake.cells import as_mask, byte_lengths, content, decoded, encoded, replaced, texts
from coldwork.intake.column import Fault
from coldwork.intake.text import REFUSED
from coldwork.intake.written_numbers import AMBIGUOUS, Signs
from coldwork.rules import reasons

__all__ = ["Converted", "Converter"]

_DIGITS: Final = b"0123456789"
_MOST_KNOWN: Final = 1 << 17  # distinct cells that are remembered
_LONGEST_KNOWN: Final = 64  # characters of a cell that is remembered
_MANY: Final = 4096  # distinct cells of a block from which turning each is the slower way
_ROOM: Final = 8  # characters that an exponent may take


@dataclass(frozen=True)
class Converted:
    """One column of a block, turned.

    Attributes
    ----------
    cells : pyarrow.StringArray, n cells
        In the contract's form and unit, `REFUSED` where the layout refuses the cell;
        numbers possibly encoded in a dictionary.
    faults : tuple of Fault
        The refused ones; empty where all is well.
    ambiguous : int or None
        First row whose cell can be read in two ways; it refuses the file.
    """

    cells: pa.StringArray
    faults: tuple[Fault, ...] = ()
    ambiguous: int | None = None


class Converter:
    """Turns the cells of one of our columns.

    Parameters
    ----------
    field : Field
        The contract's field.
    filled : Filled
        What fills it.
    layout : Layout
        How the file is written.
    """

    def __init__(self, field: Field, filled: Filled, layout: Layout) -> None:
        self._field = field
        self._step = filled.step
        self._layout = layout
        self._signs = Signs(layout.decimal, layout.thousands)
        self._form: TimeForm | None = time_form(layout.times) if layout.times else None
        self._absent = frozenset(layout.absent)
        self._words = tuple(word.encode() for word in layout.absent if word)
        self._known: dict[str, str] = {}
        self._many = False

    def convert(self, cells: pa.StringArray) -> Converted:
        """Turn a column of a block.

        Parameters
        ----------
        cells : pyarrow.StringArray, n cells
            As written, without nulls.

        Returns
        -------
        Converted
        """
        if self._field.numeric:
            quick = self._quick_numbers(cells)
        elif self._field.type == "datetime":
            quick = self._quick_times(cells)
        else:
            return Converted(self._texts(cells))
        return self._one_by_one(cells) if quick is None else Converted(quick)

    def one(self, raw: str) -> str:
        """Turn one cell; `REFUSED` where the layout refuses it or it reads in two ways."""
        if self._field.text and self._field.type != "datetime":
            return texts(self._texts(pa.array([raw], pa.string())))[0]
        text = self._turned(raw)
        return REFUSED if text == AMBIGUOUS else text

    def ambiguity(self, raw: str) -> tuple[str, str] | None:
        """Spell out both readings of a cell that has two, and say what to declare."""
        if self._field.numeric:
            return self._signs.ambiguity(self._bare(raw))
        if self._field.type == "datetime" and self._form is None:
            return written_times.ambiguity(self._bare(raw))
        return None

    def hint(self, raw: str) -> str:
        """Say why a cell is refused and what to declare or mend."""
        if raw != raw.strip(" \t") and not self._layout.padded:
            return "say padded = true in the layout if the machine fills cells up with spaces"
        bare = self._bare(raw)
        if not bare:
            return "list the empty cell under absent in the layout if it stands for no value"
        if self._field.type == "datetime":
            return written_times.hint(self._form)
        return self._signs.hint(bare)

    def _texts(self, cells: pa.StringArray) -> pa.StringArray:
        """Text stays; readers take one apostrophe off, so one that is meant gets another."""
        if self._layout.padded:
            cells = pc.ascii_trim(cells, " \t")
        if self._holds_a_word(content(cells)):
            absent = pa.array(list(self._absent), pa.string())
            cells = replaced(cells, as_mask(pc.is_in(cells, value_set=absent)), "")
        if b"'" not in content(cells):
            return cells
        return pc.replace_substring_regex(cells, pattern="^'", replacement="''")

    def _quick_numbers(self, cells: pa.StringArray) -> pa.StringArray | None:
        """Turn whole columns at once where their bytes show that nothing else is needed.

        What is no number stays none: a decimal comma becomes a point and an exponent is
        hung on, nothing more, and the grammar of numbers judges what comes out.
        """
        sign, shift = self._layout.decimal, self._step.shift
        if sign is None or shift is None or not self._is_plain(cells, sign):
            return None
        if shift and not self._many:
            return None
        lengths = byte_lengths(cells)
        if shift and len(lengths) and lengths.max() > written_numbers.LONGEST - _ROOM:
            return None
        if self._field.type == "integer":
            return cells
        pointed = _with_points(cells) if sign == "," else cells
        if not shift:
            return pointed
        exponents = pa.repeat(f"e{shift}", len(cells))
        moved = pc.binary_join_element_wise(pointed, exponents, pa.repeat("", len(cells)))
        return replaced(moved, lengths == 0, "")

    def _is_plain(self, cells: pa.StringArray, sign: str) -> bool:
        """Whether all cells are empty, or made of digits, minus and the decimal sign."""
        data = content(cells)
        allowed = _DIGITS
        if self._field.type == "number":
            allowed += b"-" + sign.encode()
        if data.translate(None, allowed) or self._holds_a_word(data):
            return False
        return "" in self._absent or not len(cells) or bool(byte_lengths(cells).min() > 0)

    def _holds_a_word(self, data: bytes) -> bool:
        return any(word in data for word in self._words)

    def _quick_times(self, cells: pa.StringArray) -> pa.StringArray | None:
        data = content(cells)
        if self._layout.padded or self._holds_a_word(data) or b"'" in data:
            return None
        if self._form is None:
            return None if b"/" in data or written_times.may_be_ambiguous(cells) else cells
        return written_times.rewritten(cells, self._form)

    def _one_by_one(self, cells: pa.StringArray) -> Converted:
        """Turn each distinct cell once."""
        coded = cells.dictionary_encode()
        if len(coded.dictionary) > max(_MANY, len(cells) // 4) and not self._many:
            self._many = True
            return self.convert(cells)
        known, words = self._known, texts(cast("pa.StringArray", coded.dictionary))
        turned = [known[raw] if raw in known else self._remembered(raw) for raw in words]
        places = np.asarray(coded.indices.to_numpy(zero_copy_only=False))
        new = encoded(pa.array(turned, pa.string()), places)
        if not self._field.numeric:
            new = decoded(new)
        if {REFUSED, AMBIGUOUS}.isdisjoint(turned):
            return Converted(new)
        bad = np.array([text.startswith(REFUSED) for text in turned], dtype=np.bool_)[places]
        two = np.array([text == AMBIGUOUS for text in turned], dtype=np.bool_)[places]
        ambiguous = int(np.argmax(two)) if two.any() else None
        return Converted(new, (self._fault(bad),), ambiguous)

    def _fault(self, rows: NDArray[np.bool_]) -> Fault:
        time = self._field.type == "datetime"
        reason = reasons.BAD_TIME if time else reasons.NOT_A_NUMBER
        return Fault(reason, self._field.name, rows, self.hint, of_raw=True)

    def _remembered(self, raw: str) -> str:
        text = self._turned(raw)
        if len(raw) <= _LONGEST_KNOWN and len(self._known) < _MOST_KNOWN:
            self._known[raw] = text
        return text

    def _turned(self, raw: str) -> str:
        bare = self._bare(raw)
        if raw in self._absent or bare in self._absent:
            return ""
        if self._field.type == "datetime":
            return written_times.turned(bare, self._form)
        if self._field.type == "integer":
            return self._signs.count(bare)
        return self._signs.number(bare, self._step)

    def _bare(self, raw: str) -> str:
        return raw.strip(" \t") if self._layout.padded else raw


def _with_points(cells: pa.StringArray) -> pa.StringArray:
    """Give the same cells with each comma as a point."""
    _, offsets, data = cells.buffers()
    if offsets is None or data is None:
        return cells
    pointed = pa.py_buffer(data.to_pybytes().replace(b",", b"."))
    return pa.StringArray.from_buffers(len(cells), offsets, pointed, None, 0, cells.offset)
