"""Readings that could not be used: kept column by column, with why and from where."""

from collections import Counter
from collections.abc import Sequence
from functools import cache
from typing import Any, Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import ArrayLike, NDArray

from coldwork import contracts
from coldwork.rules.rule import Reason

__all__ = ["SetAside", "Text"]

Text = str | Sequence[str | None] | pa.StringArray | None
"""One text for all rows, or one a row; None where there is none."""

_WORDS: Final = pa.dictionary(pa.int32(), pa.string())
_ORDER: Final[dict[str, pa.DataType]] = {
    "table": pa.string(),
    "file": pa.string(),
    "line": pa.int64(),
}
_REPEATED: Final = ("table", "file", "column", "rule", "statement", "hint", "excluded_by")


class SetAside:
    """All readings of a batch that were set aside, in any order until `table` sorts them.

    Parameters
    ----------
    n_coupons : int
        How many coupons the batch has.
    """

    def __init__(self, n_coupons: int) -> None:
        self._n_coupons = n_coupons
        self.restart()

    def restart(self) -> None:
        """Forget everything, for another pass over the same readings."""
        self._per_coupon = np.zeros(self._n_coupons, dtype=np.int64)
        self._per_file: Counter[tuple[str, str]] = Counter()
        self._blocks: list[pa.RecordBatch] = []

    @property
    def per_coupon(self) -> NDArray[np.int64]:
        """How many readings of each coupon were set aside, shape (n_coupons,).

        Rows whose coupon is not listed or could not be read belong to none.
        """
        return self._per_coupon

    @property
    def count(self) -> int:
        """How many readings were set aside."""
        return self._per_file.total()

    def count_in(self, table: str, file: str) -> int:
        """How many readings of one file were set aside."""
        return self._per_file[table, file]

    def add(
        self,
        reason: Reason,
        *,
        table: str,
        file: str,
        lines: ArrayLike,
        column: Text,
        raw: Text,
        coupon: ArrayLike | None = None,
        coupon_ids: Text = None,
        reading_no: ArrayLike | None = None,
        hint: Text = None,
        also: Text = None,
        excluded_by: Text = None,
        excluded_at: Text = None,
        excluded_because: Text = None,
    ) -> None:
        """Set readings aside, n rows of one file for one reason.

        Parameters
        ----------
        reason : Reason
            Why.
        table, file : str
            ``indents`` or ``flow_stress``, and the file's path inside the batch.
        lines : array_like of int, shape (n,) or ()
            Number of each row's line.
        column, raw : Text
            The column of the fault, empty where the whole row is at fault, and what
            stood there.
        coupon : array_like of int, shape (n,) or (), optional
            Place in coupons.csv; -1 where there is none.
        coupon_ids : Text, optional
            The coupon as the row names it.
        reading_no : array_like of int, shape (n,) or (), optional
            Number of the reading; negative where there is none.
        hint : Text, optional
            How to mend it; the reason's hint where there is none.
        also : Text, optional
            Further faults of the row.
        excluded_by, excluded_at, excluded_because : Text, optional
            Who took it out, when and why.
        """
        numbers = np.atleast_1d(np.asarray(lines, dtype=np.int64))
        size = len(numbers)
        if not size:
            return
        hints = cast("pa.StringArray", _texts(hint, size).fill_null(reason.hint))
        texts: dict[str, pa.StringArray] = {
            "table": _texts(table, size),
            "file": _texts(file, size),
            "column": _texts(column, size),
            "raw": _texts(raw, size),
            "rule": _texts(reason.id, size),
            "statement": _texts(reason.statement, size),
            "hint": hints,
            "also": _texts(also, size),
            "coupon_id": _texts(coupon_ids, size),
            "excluded_by": _texts(excluded_by, size),
            "excluded_at": _texts(excluded_at, size),
            "reason": _texts(excluded_because, size),
        }
        columns: dict[str, Any] = {
            name: cells.dictionary_encode() if name in _REPEATED else cells
            for name, cells in texts.items()
        }
        columns["line"] = pa.array(numbers)
        columns["reading_no"] = _counts(reading_no, size)
        self._blocks.append(pa.RecordBatch.from_pydict(columns, schema=_kept()))
        self._count(table, file, size, coupon)

    def table(self) -> pa.Table:
        """Give one row a reading, as out/set_aside has them: by table, file and line.

        Returns
        -------
        pyarrow.Table
            Text and int64 columns; null where there is nothing to say.
        """
        kept = pa.Table.from_batches(self._blocks, schema=_kept()).unify_dictionaries()
        columns = [kept.column(name).cast(kind) for name, kind in _ORDER.items()]
        keys = pa.Table.from_arrays(columns, names=list(_ORDER))
        order = pc.sort_indices(keys, [(name, "ascending") for name in _ORDER]).to_numpy()
        if (np.diff(order.astype(np.int64)) != 1).any():  # mostly they are in order already
            kept = kept.take(order)
        return kept.cast(_published())

    def _count(self, table: str, file: str, size: int, coupon: ArrayLike | None) -> None:
        self._per_file[table, file] += size
        if coupon is not None:
            places = np.broadcast_to(np.asarray(coupon, dtype=np.int64), (size,))
            np.add.at(self._per_coupon, places[places >= 0], 1)


@cache
def _published() -> pa.Schema:
    """Give the columns of out/set_aside in order."""
    fields = contracts.load("out/set_aside").fields
    return pa.schema(
        [(each.name, pa.int64() if each.type == "integer" else pa.string()) for each in fields]
    )


@cache
def _kept() -> pa.Schema:
    """Give the same with the texts that repeat kept once."""
    return pa.schema(
        [(each.name, _WORDS if each.name in _REPEATED else each.type) for each in _published()]
    )


def _texts(value: Text, size: int) -> pa.StringArray:
    """Give `size` texts, null where there is none or it is empty."""
    if not isinstance(value, (str, type(None))):
        return value if isinstance(value, pa.StringArray) else pa.array(value, pa.string())
    return pa.repeat(value, size) if value else pa.nulls(size, pa.string())


def _counts(value: ArrayLike | None, size: int) -> pa.Int64Array:
    if value is None:
        return pa.nulls(size, pa.int64())
    numbers = np.broadcast_to(np.asarray(value, dtype=np.int64), (size,))
    return pa.array(numbers, pa.int64(), mask=numbers < 0)
