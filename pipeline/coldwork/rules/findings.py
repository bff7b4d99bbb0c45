"""What the rules found: collected column by column, published as out/flags.

A million coupons may each carry findings, so nothing here loops over rows: findings
wait as arrays, and which rules fired on a coupon is one row of bits.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.rules import RULES
from coldwork.rules.bits import bit_of, blank, fired, place_of, rule_ids
from coldwork.rules.rule import Rule

__all__ = ["Findings", "Numbers", "Texts"]

FloatArray = NDArray[np.float64]
Numbers = float | NDArray[np.float64] | NDArray[np.int64] | NDArray[np.int32]
Texts = str | pa.StringArray

_NONE: Final = -1  # no coupon, no reading, no line
_ALL: Final = slice(None)
_SLICE: Final = 1 << 16


@dataclass(frozen=True)
class _Chunk:
    """Findings of one rule; what is the same for all of them stands once."""

    rule: int
    coupon: NDArray[np.int32]
    reading_no: Numbers | None
    value: Numbers | None
    limit: Numbers | None
    file: Texts | None
    line: Numbers | None
    detail: Texts | None


@dataclass(frozen=True)
class _Columns:
    """All findings in the order in which they were added; -1 and NaN are empty cells."""

    rule: NDArray[np.int64]
    coupon: NDArray[np.int64]
    reading_no: NDArray[np.int64]
    value: FloatArray
    limit: FloatArray
    file: pa.StringArray
    line: NDArray[np.int64]
    detail: pa.StringArray


class Findings:
    """The findings of a batch.

    Parameters
    ----------
    n_coupons : int
        How many coupons the batch has.
    """

    def __init__(self, n_coupons: int) -> None:
        self._n_coupons = n_coupons
        self.restart()

    def restart(self) -> None:
        """Forget everything that was found."""
        self._chunks: list[_Chunk] = []
        self._bits = blank(self._n_coupons)
        self._counts = np.zeros(len(RULES), dtype=np.int64)

    def copied(self) -> "Findings":
        """Give a collection of the same findings; what is added to one is not in the other."""
        copy = Findings(self._n_coupons)
        copy._chunks = list(self._chunks)
        copy._bits = self._bits.copy()
        copy._counts = self._counts.copy()
        return copy

    def add(
        self,
        rule: Rule,
        coupon: NDArray[np.int64] | NDArray[np.int32],
        *,
        reading_no: Numbers | None = None,
        value: Numbers | None = None,
        limit: Numbers | None = None,
        file: Texts | None = None,
        line: Numbers | None = None,
        detail: Texts | None = None,
    ) -> None:
        """Note that a rule fired on coupons or on their readings.

        Parameters
        ----------
        rule : Rule
            One of `RULES`.
        coupon : ndarray of int, shape (n,)
            Index of the coupon of each finding; none is added where n is 0.
        reading_no : int or ndarray of int, shape (n,), optional
            Number of the reading, where the rule looks at readings.
        value, limit : float or ndarray of float64, shape (n,), optional
            What was found, and the limit if it is not the rule's own. Of a range
            the end that the value passed is reported. NaN and infinity are empty
            cells. [rule's unit]
        file : str or pyarrow.StringArray of length n, optional
            Source file, relative to the batch.
        line : int or ndarray of int, shape (n,), optional
            Line in `file`.
        detail : str or pyarrow.StringArray of length n, optional
            What else a person should know, as a sentence without a stop.
        """
        if len(coupon) == 0:
            return
        place = place_of(rule)
        where = np.asarray(coupon, dtype=np.int32)
        if limit is None:
            limit = _limit_passed(rule, value)
        self._chunks.append(_Chunk(place, where, reading_no, value, limit, file, line, detail))
        self._bits[where] |= bit_of(rule)
        self._counts[place] += len(where)

    def add_batch(
        self,
        rule: Rule,
        detail: str,
        value: float | None = None,
        limit: float | None = None,
    ) -> None:
        """Note that a rule fired on the batch itself.

        Parameters
        ----------
        rule : Rule
            One of `RULES`.
        detail : str
            What it fired on, as a sentence without a stop.
        value, limit : float, optional
            What was found, and the limit if it is not the rule's own. [rule's unit]
        """
        place = place_of(rule)
        where = np.array([_NONE], dtype=np.int32)
        if limit is None:
            limit = rule.limit
        self._chunks.append(_Chunk(place, where, None, value, limit, None, None, detail))
        self._counts[place] += 1

    def has(self, rule: Rule) -> NDArray[np.bool_]:
        """Say on which coupons, or on whose readings, a rule fired. Shape (coupons,)."""
        return fired(bit_of(rule), self._bits)

    @property
    def bits(self) -> NDArray[np.uint64]:
        """A row for each coupon: bit i is set where ``RULES[i]`` fired. Shape (coupons, words)."""
        return self._bits

    @property
    def counts(self) -> dict[str, int]:
        """How many findings each rule has, by its id, in the order of `RULES`."""
        return {rule.id: int(n) for rule, n in zip(RULES, self._counts, strict=True) if n}

    def text(self, rows: slice = _ALL) -> pa.StringArray:
        """Join the ids of the rules that fired on each coupon with ``;``. Length (coupons,).

        A coupon without findings has an empty text. Ids stand in the order of `RULES`.

        Parameters
        ----------
        rows : slice, optional
            Which coupons; all of them where it is not said.
        """
        return rule_ids(self._bits[rows])

    def table(self, coupon_ids: pa.StringArray, lot_ids: pa.StringArray) -> pa.Table:
        """Give all findings in the columns of out/flags.

        Parameters
        ----------
        coupon_ids, lot_ids : pyarrow.StringArray, length (coupons,)
            Names of the coupons and of their lots.

        Returns
        -------
        pyarrow.Table
            Those of the batch first, then by coupon in input order, then in the order
            of `RULES`, then by number of the reading.
        """
        parts = list(self.slices(coupon_ids, lot_ids))
        return pa.concat_tables(parts)

    def of(self, rows: slice, coupon_ids: pa.StringArray, lot_ids: pa.StringArray) -> pa.Table:
        """Give the findings on a slice of coupons and their readings, as `table` does.

        Parameters
        ----------
        rows : slice
            Which coupons.
        coupon_ids, lot_ids : pyarrow.StringArray, length (coupons,)
            Names of all coupons of the batch and of their lots.
        """
        columns = _joined(self._chunks)
        here = np.flatnonzero((columns.coupon >= rows.start) & (columns.coupon < rows.stop))
        key = columns.coupon[here] * len(RULES) + columns.rule[here]
        order = here[np.lexsort((columns.reading_no[here], key))]
        return _published(columns, order, coupon_ids, lot_ids)

    def slices(
        self, coupon_ids: pa.StringArray, lot_ids: pa.StringArray, rows: int = _SLICE
    ) -> Iterator[pa.Table]:
        """Give what `table` gives in pieces of at most `rows` rows; one at least.

        Parameters
        ----------
        coupon_ids, lot_ids : pyarrow.StringArray, length (coupons,)
            Names of the coupons and of their lots.
        rows : int
            Most rows of a piece.

        Yields
        ------
        pyarrow.Table
        """
        columns = _joined(self._chunks)
        key = columns.coupon * len(RULES) + columns.rule
        order = np.lexsort((columns.reading_no, key))
        for start in range(0, max(len(order), 1), rows):
            yield _published(columns, order[start : start + rows], coupon_ids, lot_ids)


def _limit_passed(rule: Rule, value: Numbers | None) -> Numbers | None:
    if rule.upper is None or rule.limit is None or value is None:
        return rule.limit
    return np.where(np.asarray(value) > rule.upper, rule.upper, rule.limit)


def _joined(chunks: Sequence[_Chunk]) -> _Columns:
    """Write the chunks out in full, one below the other."""
    lengths = [len(chunk.coupon) for chunk in chunks]
    pairs = list(zip(chunks, lengths, strict=True))
    return _Columns(
        np.repeat(np.array([chunk.rule for chunk in chunks], dtype=np.int64), lengths),
        np.concatenate([np.empty(0, dtype=np.int64), *(chunk.coupon for chunk in chunks)]),
        _counted([_filled(chunk.reading_no, n, _NONE) for chunk, n in pairs]),
        _measured([_filled(chunk.value, n, np.nan) for chunk, n in pairs]),
        _measured([_filled(chunk.limit, n, np.nan) for chunk, n in pairs]),
        _texts([_written(chunk.file, n) for chunk, n in pairs]),
        _counted([_filled(chunk.line, n, _NONE) for chunk, n in pairs]),
        _texts([_written(chunk.detail, n) for chunk, n in pairs]),
    )


def _filled(x: Numbers | None, n: int, missing: float) -> NDArray[np.generic]:
    return np.broadcast_to(np.asarray(missing if x is None else x), (n,))


def _counted(parts: Sequence[NDArray[np.generic]]) -> NDArray[np.int64]:
    return np.concatenate([np.empty(0, dtype=np.int64), *parts]).astype(np.int64)


def _measured(parts: Sequence[NDArray[np.generic]]) -> FloatArray:
    return np.concatenate([np.empty(0), *parts]).astype(np.float64)


def _written(x: Texts | None, n: int) -> pa.StringArray:
    if isinstance(x, pa.StringArray):
        return x
    return pa.array([x], pa.string()).take(np.zeros(n, dtype=np.int32))


def _texts(parts: Sequence[pa.StringArray]) -> pa.StringArray:
    return pa.concat_arrays([pa.array([], pa.string()), *parts])


def _published(
    columns: _Columns,
    rows: NDArray[np.intp],
    coupon_ids: pa.StringArray,
    lot_ids: pa.StringArray,
) -> pa.Table:
    coupon, rule = columns.coupon[rows], columns.rule[rows]
    place = pa.array(coupon, pa.int64(), mask=coupon == _NONE)

    def of_rule(texts: Sequence[str | None]) -> pa.StringArray:
        return pa.array(texts, pa.string()).take(rule)

    def count(x: NDArray[np.int64]) -> pa.Int64Array:
        return pa.array(x[rows], pa.int64(), mask=x[rows] == _NONE)

    def number(x: FloatArray) -> pa.DoubleArray:
        return pa.array(x[rows], pa.float64(), mask=~np.isfinite(x[rows]))

    return pa.table(
        {
            "level": of_rule([r.level.value for r in RULES]),
            "coupon_id": coupon_ids.take(place),
            "lot_id": lot_ids.take(place),
            "reading_no": count(columns.reading_no),
            "rule": of_rule([r.id for r in RULES]),
            "statement": of_rule([r.statement for r in RULES]),
            "value": number(columns.value),
            "limit": number(columns.limit),
            "unit": of_rule([r.unit for r in RULES]),
            "empties": of_rule([";".join(r.empties) or None for r in RULES]),
            "source": of_rule([r.source for r in RULES]),
            "file": columns.file.take(rows),
            "line": count(columns.line),
            "detail": columns.detail.take(rows),
        }
    )
