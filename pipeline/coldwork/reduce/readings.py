"""Readings in columns, and the stream of blocks turned into whole coupons.

Blocks of a file end anywhere. What follows needs every reading of a coupon at
once, in the order of its reading numbers: the last coupon of a block is
carried over to the next one, a coupon that comes back later stops the stream
(the caller then regroups), and a number that a coupon already has is set aside.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.intake.readings import ReadingBlock

__all__ = ["Readings", "ScatteredCoupons", "regrouped", "whole_coupons"]

_SLICE_ROWS: Final = 1 << 18  # readings that are handed on at once when regrouped


class ScatteredCoupons(Exception):  # noqa: N818 - a signal between two stages, not a fault
    """A coupon came back after its run of readings had ended."""


@dataclass(frozen=True)
class Readings:
    """A stretch of readings, whole coupons only, ordered within each by number.

    Attributes
    ----------
    coupon : ndarray of int32, shape (n,)
        Row of the coupon in ``coupons.csv``.
    number : ndarray of int64, shape (n,)
        Number of the reading in its coupon.
    file, lines : ndarray of int64, shape (n,)
        Where it was read.
    floats : mapping of str to ndarray of float64, shape (n,)
        By contract column, in the contract's unit; NaN where absent.
    texts : mapping of str to pyarrow.StringArray of n
        By contract column; empty where absent.
    times : ndarray of int64, shape (n,)
        When it was measured, in microseconds UTC; the least integer where absent. [us]
    raw : pyarrow.Table of n rows
        The cells as written.
    """

    coupon: NDArray[np.int32]
    number: NDArray[np.int64]
    file: NDArray[np.int64]
    lines: NDArray[np.int64]
    floats: Mapping[str, NDArray[np.float64]]
    texts: Mapping[str, pa.StringArray]
    times: NDArray[np.int64]
    raw: pa.Table

    def __len__(self) -> int:
        return int(self.coupon.shape[0])

    @property
    def starts(self) -> NDArray[np.intp]:
        """Where each coupon begins, shape (coupons,)."""
        return np.flatnonzero(_changes(self.coupon))

    def column(self, name: str) -> NDArray[np.float64]:
        """Give a column of numbers in the contract's unit, all NaN if no file had it."""
        found = self.floats.get(name)
        return np.full(len(self), np.nan) if found is None else found

    def take(self, rows: NDArray[np.intp]) -> "Readings":
        """Pick rows, in the order given."""
        index = pa.array(rows, pa.int64())
        return Readings(
            self.coupon[rows],
            self.number[rows],
            self.file[rows],
            self.lines[rows],
            {k: x[rows] for k, x in self.floats.items()},
            {k: x.take(index) for k, x in self.texts.items()},
            self.times[rows],
            self.raw.take(index),
        )

    def part(self, begin: int, end: int) -> "Readings":
        """Cut out rows `begin` to `end` without copying."""
        cut = slice(begin, end)
        return Readings(
            self.coupon[cut],
            self.number[cut],
            self.file[cut],
            self.lines[cut],
            {k: x[cut] for k, x in self.floats.items()},
            {k: x[cut] for k, x in self.texts.items()},
            self.times[cut],
            self.raw[cut],
        )


def whole_coupons(
    blocks: Iterator[ReadingBlock], coupons: int
) -> Iterator[tuple[Readings, Readings]]:
    """Cut the stream where coupons end.

    Parameters
    ----------
    blocks : iterator of ReadingBlock
        In file order.
    coupons : int
        Number of coupons of the batch.

    Yields
    ------
    tuple of Readings
        The readings of whole coupons; and those which repeat a number that
        their coupon already had.

    Raises
    ------
    ScatteredCoupons
        If a coupon returns after another one began.
    """
    closed = np.zeros(coupons, dtype=bool)
    rest: Readings | None = None
    for block in blocks:
        if not block.coupon.size:
            continue
        here = _of_block(block) if rest is None else _joined([rest, _of_block(block)])
        last = int(here.starts[-1])
        rest = here.part(last, len(here))
        if last:
            yield _finished(_close(here.part(0, last), closed))
    if rest is not None:
        yield _finished(_close(rest, closed))


def regrouped(blocks: Iterator[ReadingBlock]) -> Iterator[tuple[Readings, Readings]]:
    """Do the same for scattered coupons: all blocks at once, sorted by coupon.

    Parameters
    ----------
    blocks : iterator of ReadingBlock
        In file order.

    Yields
    ------
    tuple of Readings
        As `whole_coupons` does.
    """
    held = [_of_block(block) for block in blocks if block.coupon.size]
    if not held:
        return
    whole = _joined(held)
    whole = whole.take(np.argsort(whole.coupon, kind="stable"))
    begin = 0
    for start in [*whole.starts[1:], len(whole)]:
        if start - begin >= _SLICE_ROWS or start == len(whole):
            yield _finished(whole.part(begin, int(start)))
            begin = int(start)


def _close(here: Readings, closed: NDArray[np.bool_]) -> Readings:
    begun = here.coupon[here.starts]
    if closed[begun].any() or np.unique(begun).size != begun.size:
        raise ScatteredCoupons
    closed[begun] = True
    return here


def _finished(here: Readings) -> tuple[Readings, Readings]:
    """Order each coupon's readings by number; split off those that repeat one."""
    same = here.coupon[1:] == here.coupon[:-1]
    if (same & (here.number[1:] <= here.number[:-1])).any():
        here = here.take(np.lexsort((here.number, np.cumsum(_changes(here.coupon)))))
        same = here.coupon[1:] == here.coupon[:-1]
    repeats = np.concatenate([[False], same & (here.number[1:] == here.number[:-1])])
    if not repeats.any():
        return here, here.part(0, 0)
    return here.take(np.flatnonzero(~repeats)), here.take(np.flatnonzero(repeats))


def _of_block(block: ReadingBlock) -> Readings:
    n = block.coupon.size
    times = block.times
    return Readings(
        block.coupon,
        block.number,
        np.full(n, block.file, dtype=np.int64),
        block.lines,
        block.floats,
        block.texts,
        np.full(n, np.iinfo(np.int64).min) if times is None else times,
        pa.Table.from_batches([block.raw]),
    )


def _joined(parts: Sequence[Readings]) -> Readings:
    names = list(dict.fromkeys(k for p in parts for k in p.floats))
    texts = list(dict.fromkeys(k for p in parts for k in p.texts))
    return Readings(
        np.concatenate([p.coupon for p in parts]),
        np.concatenate([p.number for p in parts]),
        np.concatenate([p.file for p in parts]),
        np.concatenate([p.lines for p in parts]),
        {k: np.concatenate([p.column(k) for p in parts]) for k in names},
        {k: pa.concat_arrays([_text(p, k) for p in parts]) for k in texts},
        np.concatenate([p.times for p in parts]),
        pa.concat_tables([p.raw for p in parts], promote_options="default"),
    )


def _text(part: Readings, name: str) -> pa.StringArray:
    found = part.texts.get(name)
    return pa.array([""] * len(part), pa.string()) if found is None else found


def _changes(x: NDArray[np.generic]) -> NDArray[np.bool_]:
    if not x.size:
        return np.zeros(0, dtype=bool)
    return np.concatenate([[True], x[1:] != x[:-1]])
