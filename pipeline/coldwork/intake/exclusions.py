"""exclusions.csv: readings that a named person takes out, and the check that they exist."""

from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.words import shown
from coldwork.intake.cells import take
from coldwork.intake.column import Column
from coldwork.intake.coupons import Coupons
from coldwork.intake.files import BLOCK_BYTES, SourceFile, TableFiles
from coldwork.intake.numbers import LARGEST_COUNT
from coldwork.intake.whole import WholeTable, capped, read_whole

__all__ = ["Exclusions", "no_exclusions", "read_exclusions"]

_WHY: Final = "An exclusion names its reading, its person, its time and its reason."


@dataclass(frozen=True)
class Exclusions:
    """Readings that are taken out, m of them, ordered by coupon and number.

    Attributes
    ----------
    keys : ndarray of int64, shape (m,)
        Coupon and reading number in one, ascending.
    coupon_ids, numbers : pyarrow.StringArray, m texts
        The reading, as written.
    by, at, because : pyarrow.StringArray, m texts
        Who took it out, when (as written) and why.
    where : tuple of str, m
        File and line.
    sources : tuple of SourceFile
        What was read.
    """

    keys: NDArray[np.int64]
    coupon_ids: pa.StringArray
    numbers: pa.StringArray
    by: pa.StringArray
    at: pa.StringArray
    because: pa.StringArray
    where: tuple[str, ...]
    sources: tuple[SourceFile, ...]

    def __len__(self) -> int:
        """Give the number of exclusions."""
        return len(self.keys)

    def find(self, coupon: NDArray[np.int32], number: NDArray[np.int64]) -> NDArray[np.intp]:
        """Give the exclusion of each reading, -1 where it has none.

        Parameters
        ----------
        coupon : ndarray of int32, shape (n,)
            Place in coupons.csv, negative where it is not listed.
        number : ndarray of int64, shape (n,)
            Number of the reading, negative where it could not be read.

        Returns
        -------
        ndarray of int, shape (n,)
        """
        if not len(self):
            return np.full(len(coupon), -1, dtype=np.intp)
        sought = _keys(coupon, number)
        place = np.minimum(np.searchsorted(self.keys, sought), len(self) - 1)
        hit = (self.keys[place] == sought) & (coupon >= 0) & (number >= 0)
        return np.where(hit, place, -1)

    def unmatched(self, seen: NDArray[np.bool_]) -> list[Cause]:
        """Say which exclusions match no reading; each refuses the batch.

        Parameters
        ----------
        seen : ndarray of bool, shape (m,)
            Which exclusions met a reading.

        Returns
        -------
        list of Cause
        """
        causes = []
        for row in map(int, np.flatnonzero(~seen)):
            coupon, number = self.coupon_ids[row].as_py(), self.numbers[row].as_py()
            what = f"coupon {shown(coupon)} has no reading {number}"
            mend = "Correct the coupon or the number, or delete the row."
            causes.append(Cause(self.where[row], what, "An exclusion matches a reading.", mend))
        return capped(causes)


def no_exclusions(sources: tuple[SourceFile, ...] = ()) -> Exclusions:
    """Give the exclusions of a batch that has none, in no files or in empty ones."""
    none = pa.array([], pa.string())
    return Exclusions(np.empty(0, np.int64), none, none, none, none, none, (), sources)


def read_exclusions(
    files: TableFiles, coupons: Coupons, zone: str, *, block_bytes: int = BLOCK_BYTES
) -> Exclusions:
    """Read the files that list exclusions.

    Parameters
    ----------
    files : TableFiles
        They and their contract, ``in/exclusions``.
    coupons : Coupons
        The batch's coupons.
    zone : str
        IANA name of the zone in which a time without one is meant.
    block_bytes : int, optional
        How much is read at once. [byte]

    Returns
    -------
    Exclusions
        Every row.

    Raises
    ------
    BatchRefused
        If a file as a whole cannot be trusted, a row is torn, a cell is empty or
        cannot be read, a coupon is not listed, or a reading is taken out twice.
    """
    table = read_whole(files, block_bytes)
    if not table.raw.num_rows:
        return no_exclusions(table.sources)
    columns = table.columns(zone)
    causes = [cause for column in columns.values() for cause in _cell_causes(column, table)]
    coupon = coupons.index(columns["coupon_id"].text)
    causes += _unlisted(columns["coupon_id"], coupon, table)
    keys = _keys(coupon, np.asarray(columns["reading_no"].values, dtype=np.int64))
    order = np.argsort(keys, kind="stable")
    if not causes:
        causes = _repeats(keys[order], order, table)
    if causes:
        raise BatchRefused(str(files.folder), causes)
    text = {name: column.text.take(order) for name, column in columns.items()}
    return Exclusions(
        keys=keys[order],
        coupon_ids=text["coupon_id"],
        numbers=text["reading_no"],
        by=text["excluded_by"],
        at=text["excluded_at"],
        because=text["reason"],
        where=tuple(_place(table, int(row)) for row in order),
        sources=table.sources,
    )


def _keys(coupon: NDArray[np.int32], number: NDArray[np.int64]) -> NDArray[np.int64]:
    return coupon.astype(np.int64) * (LARGEST_COUNT + 1) + number


def _place(table: WholeTable, row: int) -> str:
    return f"{table.files.names[table.file[row]]}, line {table.line[row]}"


def _cell_causes(column: Column, table: WholeTable) -> list[Cause]:
    causes = []
    for fault in column.faults:
        for row, raw, words in table.hinted(fault):
            what = f"{fault.reason.statement}: {shown(raw)}" if raw else "the cell is empty"
            mend = f"{words[0].upper()}{words[1:]}." if raw else "Fill it."
            causes.append(Cause(table.where(row, fault.column), what, _WHY, mend))
    return capped(causes)


def _unlisted(column: Column, coupon: NDArray[np.int32], table: WholeTable) -> list[Cause]:
    rows = np.flatnonzero((coupon < 0) & ~column.absent)
    causes = []
    for row, name in zip(rows, take(column.text, rows), strict=True):
        what = f"coupon {shown(name)} is not listed in coupons.csv"
        mend = "Correct the name, or delete the row."
        causes.append(Cause(_place(table, int(row)), what, "An exclusion matches a reading.", mend))
    return capped(causes)


def _repeats(keys: NDArray[np.int64], order: NDArray[np.intp], table: WholeTable) -> list[Cause]:
    causes = []
    for row in order[1:][keys[1:] == keys[:-1]]:
        what = "this reading is taken out twice"
        mend = "Keep the row that holds."
        causes.append(Cause(_place(table, int(row)), what, "A reading is taken out once.", mend))
    return capped(causes)
