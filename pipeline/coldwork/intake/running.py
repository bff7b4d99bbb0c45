"""Running numbers of rows whose file has none: counted within each coupon, file after file."""

from dataclasses import replace

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.contracts import Contract
from coldwork.inputs.layout import Layout, running_number
from coldwork.intake.cells import column_of, texts
from coldwork.intake.text import TextBlock

__all__ = ["RunningNumbers"]


class RunningNumbers:
    """Counts through the rows of one table, in the order of its files.

    A row of another width counts too where its file belongs to one coupon, so that the
    numbers after it stay when the row is mended.

    Parameters
    ----------
    contract : Contract
        The table's contract.
    """

    def __init__(self, contract: Contract) -> None:
        self._column = running_number(contract)
        self._key = contract.primary_key[0] if contract.primary_key else ""
        self._counts: dict[str, int] = {}
        self._waiting: tuple[int, int] = (-1, 0)  # a file, and rows of it that belong to none yet

    def filled(self, block: TextBlock, layout: Layout | None) -> TextBlock:
        """Give a block its running numbers, where its layout fills none.

        Parameters
        ----------
        block : TextBlock
            The next block.
        layout : Layout or None
            How its file is written; a tidy table has its numbers.

        Returns
        -------
        TextBlock
            The same with one column more, or the same.
        """
        if layout is None or self._column is None or self._column in layout.raw_columns:
            return block
        names = column_of(block.cells, self._key)
        one = all(filled.name != self._key for filled in layout.columns)
        numbers = self._in_file(block, names) if one else self._by_name(names)
        column = pa.array(numbers).cast(pa.string())
        return replace(block, cells=block.cells.append_column(self._column, column))

    def _in_file(self, block: TextBlock, names: pa.StringArray) -> NDArray[np.int64]:
        """Count on through the rows of a block that all belong to one coupon."""
        torn = np.array([row.line for row in block.torn], dtype=np.int64)
        file, waiting = self._waiting
        waiting *= file == block.file
        if not len(names):
            self._waiting = block.file, waiting + len(torn)
            return np.empty(0, dtype=np.int64)
        self._waiting = block.file, 0
        name = str(names[0].as_py())
        before = self._counts.get(name, 0) + waiting
        self._counts[name] = before + len(names) + len(torn)
        place = np.arange(1, len(names) + 1, dtype=np.int64)
        skipped = np.searchsorted(torn, block.lines).astype(np.int64)
        return np.asarray(before + place + skipped, dtype=np.int64)

    def _by_name(self, names: pa.StringArray) -> NDArray[np.int64]:
        coded = names.dictionary_encode()
        codes = coded.indices.to_numpy(zero_copy_only=False)
        known = texts(pa.array(coded.dictionary, pa.string()))
        before = np.array([self._counts.get(name, 0) for name in known], dtype=np.int64)
        totals = np.bincount(codes, minlength=len(known)).astype(np.int64)
        self._counts.update(zip(known, (before + totals).tolist(), strict=True))
        order = np.argsort(codes, kind="stable")
        starts = np.concatenate(([0], np.cumsum(totals)))[codes[order]]
        numbers = np.empty(len(codes), dtype=np.int64)
        numbers[order] = np.arange(1, len(codes) + 1) - starts
        return np.asarray(numbers + before[codes], dtype=np.int64)
