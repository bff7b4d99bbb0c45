"""Which rules fired, in one row of bits: bit i stands for ``RULES[i]``.

A row belongs to a coupon or to a reading. It is as many 64-bit words as the rules need,
the lowest first. Everything here looks at arrays of rows, since a million coupons may
each have one. Most questions touch a single word, so only words that hold a rule in
question are looked at.
"""

from collections.abc import Iterable, Mapping
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.rules import RULES
from coldwork.rules.rule import Level, Rule

__all__ = ["bit_of", "blank", "emptied", "fired", "place_of", "rule_ids", "with_error"]

_WORD: Final = 64
_WORDS: Final = -(-len(RULES) // _WORD)
_PLACE: Final[Mapping[str, int]] = {rule.id: i for i, rule in enumerate(RULES)}


def place_of(rule: Rule) -> int:
    """Give the place of a rule in `RULES`."""
    return _PLACE[rule.id]


def blank(n: int) -> NDArray[np.uint64]:
    """Give `n` rows in which no rule fired; shape (n, words)."""
    return np.zeros((n, _WORDS), dtype=np.uint64)


def bit_of(rule: Rule) -> NDArray[np.uint64]:
    """Give the row in which this rule alone fired; shape (words,)."""
    row = np.zeros(_WORDS, dtype=np.uint64)
    word, bit = divmod(_PLACE[rule.id], _WORD)
    row[word] = 1 << bit
    return row


def fired(row: NDArray[np.uint64], bits: NDArray[np.uint64]) -> NDArray[np.bool_]:
    """Say where any rule of a row fired.

    Parameters
    ----------
    row : ndarray of uint64, shape (words,)
        From `bit_of`, or several of those joined by ``|``.
    bits : ndarray of uint64, shape (n, words)
        Findings.

    Returns
    -------
    ndarray of bool, shape (n,)
    """
    found = np.zeros(len(bits), dtype=np.bool_)
    for word in np.flatnonzero(row):
        found |= (bits[:, word] & row[word]) != 0
    return found


def rule_ids(bits: NDArray[np.uint64]) -> pa.StringArray:
    """Join the ids of the rules in each row with ``;``, in the order of `RULES`.

    Parameters
    ----------
    bits : ndarray of uint64, shape (n, words)
        Findings.

    Returns
    -------
    pyarrow.StringArray of n
        Empty where no rule fired.
    """
    stored = pa.py_buffer(np.ascontiguousarray(bits, dtype="<u8").data)
    kind = pa.binary(_WORDS * _WORD // 8)
    rows = pa.FixedSizeBinaryArray.from_buffers(kind, len(bits), [None, stored])
    kinds = rows.dictionary_encode()
    told = kinds.dictionary.to_numpy(zero_copy_only=False)
    texts = [_ids(int.from_bytes(row, "little")) for row in told]
    return pa.array(texts, pa.string()).take(kinds.indices)


def with_error(bits: NDArray[np.uint64]) -> NDArray[np.bool_]:
    """Say in which rows a rule of level error fired; shape (n,)."""
    return fired(_ERRORS, bits)


def emptied(column: str, bits: NDArray[np.uint64], *, ends: bool = False) -> NDArray[np.bool_]:
    """Say which coupons lose their value, or their interval, in a column of out/coupons.

    Parameters
    ----------
    column : str
        The column.
    bits : ndarray of uint64, shape (n, words)
        Findings of the coupons.
    ends : bool, optional
        Ask about the interval instead: some errors leave its ends, which still are
        what the uncertainty allows.

    Returns
    -------
    ndarray of bool, shape (n,)
        True where a rule that fired empties it.
    """
    emptying = _EMPTIES_ENDS if ends else _EMPTIES
    return fired(emptying.get(column, _NOTHING), bits)


def _ids(row: int) -> str:
    return ";".join(rule.id for i, rule in enumerate(RULES) if row >> i & 1)


def _emptying(rules: Iterable[Rule]) -> Mapping[str, NDArray[np.uint64]]:
    """Give for each column the row of the rules that empty it."""
    rows: dict[str, NDArray[np.uint64]] = {}
    for rule in rules:
        for column in rule.empties:
            rows[column] = rows.get(column, _NOTHING) | bit_of(rule)
    return rows


_NOTHING: Final = np.zeros(_WORDS, dtype=np.uint64)
_ERRORS: Final = np.bitwise_or.reduce(
    [bit_of(rule) for rule in RULES if rule.level is Level.ERROR], axis=0
)
_EMPTIES: Final = _emptying(RULES)
_EMPTIES_ENDS: Final = _emptying(rule for rule in RULES if not rule.ends_stay)
