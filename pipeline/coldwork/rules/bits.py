"""Which rules fired, in one 64-bit word: bit i stands for ``RULES[i]``.

A word belongs to a coupon or to a reading. Everything here looks at arrays of
words, since a million coupons may each have one.
"""

from collections.abc import Iterable, Mapping
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.rules import RULES
from coldwork.rules.rule import Level, Rule

__all__ = ["bit_of", "emptied", "place_of", "rule_ids", "with_error"]

_PLACE: Final[Mapping[str, int]] = {rule.id: i for i, rule in enumerate(RULES)}


def place_of(rule: Rule) -> int:
    """Give the place of a rule in `RULES`."""
    return _PLACE[rule.id]


def bit_of(rule: Rule) -> np.uint64:
    """Give the word in which this rule alone fired."""
    return np.uint64(1 << _PLACE[rule.id])


def rule_ids(bits: NDArray[np.uint64]) -> pa.StringArray:
    """Join the ids of the rules in each word with ``;``, in the order of `RULES`.

    Parameters
    ----------
    bits : ndarray of uint64, shape (n,)
        The words.

    Returns
    -------
    pyarrow.StringArray of n
        Empty where no rule fired.
    """
    words = pa.array(bits, pa.uint64()).dictionary_encode()
    texts = pa.array([_ids(int(word)) for word in words.dictionary.to_numpy()], pa.string())
    return texts.take(words.indices)


def with_error(bits: NDArray[np.uint64]) -> NDArray[np.bool_]:
    """Say in which words a rule of level error fired; shape (n,)."""
    return np.asarray((bits & _ERRORS) != 0)


def emptied(column: str, bits: NDArray[np.uint64], *, ends: bool = False) -> NDArray[np.bool_]:
    """Say which coupons lose their value, or their interval, in a column of out/coupons.

    Parameters
    ----------
    column : str
        The column.
    bits : ndarray of uint64, shape (n,)
        Findings of the coupons.
    ends : bool, optional
        Ask about the interval instead: some errors leave its ends, which still are
        what the uncertainty allows.

    Returns
    -------
    ndarray of bool, shape (n,)
        True where a rule that fired empties it.
    """
    words = _EMPTIES_ENDS if ends else _EMPTIES
    return np.asarray((bits & words.get(column, np.uint64(0))) != 0)


def _ids(word: int) -> str:
    return ";".join(rule.id for i, rule in enumerate(RULES) if word >> i & 1)


def _emptying(rules: Iterable[Rule]) -> Mapping[str, np.uint64]:
    """Give for each column the word of the rules that empty it."""
    words: dict[str, np.uint64] = {}
    for rule in rules:
        for column in rule.empties:
            words[column] = words.get(column, np.uint64(0)) | bit_of(rule)
    return words


_ERRORS: Final = np.uint64(sum(int(bit_of(rule)) for rule in RULES if rule.level is Level.ERROR))
_EMPTIES: Final = _emptying(RULES)
_EMPTIES_ENDS: Final = _emptying(rule for rule in RULES if not rule.ends_stay)
