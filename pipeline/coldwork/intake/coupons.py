"""coupons.csv: the list that everything is reported for. A fault in a name refuses the batch."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Final, NamedTuple

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.words import shown
from coldwork.intake.cells import replaced, texts
from coldwork.intake.column import Column, Fault
from coldwork.intake.files import BLOCK_BYTES, SourceFile, TableFiles
from coldwork.intake.lookup import Lookup
from coldwork.intake.text import REFUSED
from coldwork.intake.whole import WholeTable, capped, read_whole
from coldwork.rules.reasons import OUT_OF_RANGE, REQUIRED_EMPTY
from coldwork.units import to_si

__all__ = ["BadCell", "Coupons", "read_coupons"]

_ID: Final = "coupon_id"
_NAME: Final = "A coupon's name is any printable text of up to 120 characters."
_NO_ROW_LOST: Final = "No row of this table may be lost, and no name is guessed."
_GRAIN: Final = "grain_size_um"
_U_GRAIN: Final = "u_grain_size_um"
_DIMENSIONS: Final = (
    "thickness_mm",
    "gauge_length_mm",
    "initial_diameter_mm",
    "width_mm",
    "final_diameter_mm",
    "neck_radius_mm",
    "rolled_from_mm",
    "rolled_to_mm",
    "drawn_from_mm",
    "drawn_to_mm",
    "upset_from_mm",
    "upset_to_mm",
)
_U_WITHOUT_VALUE: Final = "give the grain size that this is the uncertainty of"


class BadCell(NamedTuple):
    """An optional cell of coupons.csv that could not be used and counts as absent.

    Attributes
    ----------
    coupon : int
        Place of the coupon.
    column : str
        Column of the cell.
    raw : str
        What stands there.
    rule : str
        Id of the reason, such as ``not-a-number``.
    hint : str
        How to mend it.
    """

    coupon: int
    column: str
    raw: str
    rule: str
    hint: str


@dataclass(frozen=True)
class Coupons:
    """The coupons of a batch, n of them, in the order of the input.

    Attributes
    ----------
    ids, lot_ids, conditions, sampled_at : pyarrow.StringArray, n texts
        Empty where absent.
    prior_true_strain : ndarray of float64, shape (n,)
        NaN where absent, like the other numbers. [1]
    prior_plastic_work : ndarray of float64, shape (n,)
        [J/m3]
    thickness, grain_size, u_grain_size : ndarray of float64, shape (n,)
        [m]
    file : ndarray of int32, shape (n,)
        Which of `sources` the coupon stands in.
    line : ndarray of int64, shape (n,)
        In which line of it.
    raw : pyarrow.Table, n rows
        The cells as written, in the contract's order; columns that no file has are
        left out.
    bad_cells : tuple of BadCell
        Optional cells that could not be used.
    sources : tuple of SourceFile
        What was read.
    dimensions : mapping of str to ndarray of float64, shape (n,)
        By column what a tensile or compression test needs of the coupon's shape, and what
        the metal was rolled, drawn or upset from and to; columns that no file has are left
        out. [m]
    work_stated : ndarray of bool, shape (n,), or None
        Where `prior_plastic_work` is that of the table and was not computed; None before
        anything was.
    """

    ids: pa.StringArray
    lot_ids: pa.StringArray
    conditions: pa.StringArray
    sampled_at: pa.StringArray
    prior_true_strain: NDArray[np.float64]
    prior_plastic_work: NDArray[np.float64]
    thickness: NDArray[np.float64]
    grain_size: NDArray[np.float64]
    u_grain_size: NDArray[np.float64]
    file: NDArray[np.int32]
    line: NDArray[np.int64]
    raw: pa.Table
    bad_cells: tuple[BadCell, ...]
    sources: tuple[SourceFile, ...]
    lookup: Lookup = field(repr=False, compare=False)
    dimensions: Mapping[str, NDArray[np.float64]] = field(default_factory=dict)
    work_stated: NDArray[np.bool_] | None = None

    def __len__(self) -> int:
        """Give the number of coupons."""
        return len(self.ids)

    def index(self, names: pa.StringArray) -> NDArray[np.int32]:
        """Give the place of each name in this list, -1 where it is not listed.

        Parameters
        ----------
        names : pyarrow.StringArray, m names

        Returns
        -------
        ndarray of int32, shape (m,)
        """
        return self.lookup.find(names)


def read_coupons(files: TableFiles, zone: str, *, block_bytes: int = BLOCK_BYTES) -> Coupons:
    """Read the files that list the coupons.

    Parameters
    ----------
    files : TableFiles
        They and their contract, ``in/coupons``.
    zone : str
        IANA name of the zone in which a time without one is meant.
    block_bytes : int, optional
        How much is read at once. [byte]

    Returns
    -------
    Coupons
        Every row of every file.

    Raises
    ------
    BatchRefused
        If a file as a whole cannot be trusted, a row is torn, there is no coupon,
        or a name is empty, repeated, too long or not printable.
    """
    table = read_whole(files, block_bytes)
    if not table.raw.num_rows:
        what, mend = "lists no coupon", "List the coupons that were tested."
        cause = Cause(", ".join(files.names), what, "A batch has at least one.", mend)
        raise BatchRefused(str(files.folder), [cause])
    columns = table.columns(zone)
    causes = _id_causes(columns[_ID], table)
    if causes:
        raise BatchRefused(str(files.folder), causes)
    return _coupons(columns, table)


def _id_causes(column: Column, table: WholeTable) -> list[Cause]:
    causes = []
    for fault in column.faults:
        empty = fault.reason is REQUIRED_EMPTY
        what, why = "the name is empty" if empty else "the name cannot be used", _NAME
        if not empty and fault.reason is not OUT_OF_RANGE:  # the layout, or a workbook's cell
            what, why = fault.reason.statement, _NO_ROW_LOST
        found = []
        for row, _, hint in table.hinted(fault):
            words = "give the coupon a name" if empty else hint
            found.append(Cause(table.where(row, _ID), what, why, f"{words[0].upper()}{words[1:]}."))
        causes += capped(found)
    if len(column.text.unique()) < len(column.text):
        causes += capped(_repeats(column, table))
    return causes


def _repeats(column: Column, table: WholeTable) -> list[Cause]:
    first: dict[str, int] = {}
    causes = []
    for row, name in enumerate(texts(column.text)):
        if name not in ("", REFUSED) and first.setdefault(name, row) != row:
            before = table.where(first[name], _ID)
            what = f"coupon {shown(name)} is listed again; first in {before}"
            mend = "Delete one of the two, or give the other coupon its own name."
            causes.append(Cause(table.where(row, _ID), what, "A coupon stands once.", mend))
    return causes


def _bad_cells(columns: Mapping[str, Column], table: WholeTable) -> Iterator[BadCell]:
    for name, column in columns.items():
        for fault in column.faults:
            for row, raw, hint in table.hinted(fault):
                yield BadCell(row, name, raw, fault.reason.id, hint)
    if _U_GRAIN in columns:
        given = columns[_U_GRAIN]
        alone = ~given.absent & ~given.faulty
        if _GRAIN in columns:
            alone &= columns[_GRAIN].absent
        for row, raw, _ in table.hinted(Fault(REQUIRED_EMPTY, _U_GRAIN, alone)):
            yield BadCell(row, _U_GRAIN, raw, REQUIRED_EMPTY.id, _U_WITHOUT_VALUE)


def _coupons(columns: Mapping[str, Column], table: WholeTable) -> Coupons:
    count = table.raw.num_rows

    def number(name: str) -> NDArray[np.float64]:
        column = columns.get(name)
        if column is None or column.values is None:
            return np.full(count, np.nan)
        values = np.where(column.faulty, np.nan, column.values)
        return to_si(values, column.field.unit or "1")

    def text(name: str) -> pa.StringArray:
        column = columns.get(name)
        if column is None:
            return pa.repeat("", count)
        return replaced(column.text, column.faulty, "")

    grain = number(_GRAIN)
    return Coupons(
        ids=columns[_ID].text,
        lot_ids=text("lot_id"),
        conditions=text("condition"),
        sampled_at=text("sampled_at"),
        prior_true_strain=number("prior_true_strain"),
        prior_plastic_work=number("prior_plastic_work_j_per_m3"),
        thickness=number("thickness_mm"),
        grain_size=grain,
        u_grain_size=np.where(np.isnan(grain), np.nan, number(_U_GRAIN)),
        file=table.file,
        line=table.line,
        raw=table.raw,
        bad_cells=tuple(_bad_cells(columns, table)),
        sources=table.sources,
        lookup=Lookup(columns[_ID].text),
        dimensions={name: number(name) for name in _DIMENSIONS if name in columns},
    )
