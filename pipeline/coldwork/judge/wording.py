"""Sentences with numbers in them, for whole columns at once.

Numbers read as `coldwork.statistics.rounding` writes them, but a million of them
are written by Arrow from integers rather than one by one.
"""

from collections.abc import Sequence
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

__all__ = ["number_texts", "or_else", "plain_number", "scattered", "sentence"]

FloatArray = NDArray[np.float64]
Texts: TypeAlias = "str | pa.Array[Any]"
"""A text or a column of texts; what Arrow's functions give is not typed more closely."""

_FIXED: Final = (1e-3, 1e5)  # sizes that are written without an exponent
_MOST_DIGITS: Final = 15  # that a double holds for certain
_DIGITS_OF_U: Final = 2
_LEAST: Final = -308  # exponents of a double
_TENS: Final = np.array([float(f"1e{k}") for k in range(_LEAST, 309)])
_DIGITS_ALONE: Final = 4  # of a value whose uncertainty is not known


def plain_number(x: float) -> str:
    """Write a number of the batch sheet, such as a limit, as a person would."""
    return f"{x:.12g}"


def number_texts(
    value: FloatArray, u: FloatArray, apart_from: Sequence[float] = ()
) -> pa.StringArray:
    """Write numbers to the last place of the two significant digits of their uncertainty.

    Parameters
    ----------
    value : ndarray of float64, shape (n,)
        The numbers. [any unit]
    u : ndarray of float64, shape (n,)
        Standard uncertainties; where one is missing or zero, the number is written to
        four significant digits. [unit of `value`]
    apart_from : sequence of float, optional
        Numbers, such as limits, that a value may round to only where it equals them:
        else it is written with as many more digits as tell it from them. [unit of `value`]

    Returns
    -------
    pyarrow.StringArray, length n
        Null where the value is NaN.
    """
    known = np.flatnonzero(np.isfinite(value))
    x = value[known]
    place = _place(x, u[known])
    for _ in range(_MOST_DIGITS):
        close = _rounds_to(x, place, apart_from)
        if not close.any():
            break
        place = np.where(close, place - 1, place)
    size = np.abs(_at_place(x, place) * _ten(place))
    scientific = (size != 0.0) & ((size < _FIXED[0]) | (size >= _FIXED[1]))
    key = place * 2 + scientific
    groups = [np.flatnonzero(key == k) for k in np.unique(key)]
    parts = [
        (known[rows], _written(x[rows], int(place[rows[0]]), scientific=bool(scientific[rows[0]])))
        for rows in groups
    ]
    return scattered(len(value), parts)


def sentence(*parts: Texts) -> pa.StringArray:
    """Join texts and columns of texts to one column; null where a part is. Needs a column."""
    columns = [pa.scalar(part) if isinstance(part, str) else part for part in (*parts, "")]
    joined: pa.StringArray = pc.call_function("binary_join_element_wise", columns)
    return joined


def or_else(texts: pa.StringArray, missing: str) -> pa.StringArray:
    """Put a word where there is no text."""
    filled: pa.StringArray = pc.call_function("coalesce", [texts, pa.scalar(missing)])
    return filled


def scattered(n: int, parts: Sequence[tuple[NDArray[np.intp], pa.StringArray]]) -> pa.StringArray:
    """Put texts at their rows.

    Parameters
    ----------
    n : int
        How many rows there are.
    parts : sequence of (ndarray of int, pyarrow.StringArray)
        Rows, each at most once in all, and the text of each.

    Returns
    -------
    pyarrow.StringArray, length n
        Null at rows that no part names.
    """
    place = np.full(n, -1, dtype=np.int64)
    done = 0
    for rows, _ in parts:
        place[rows] = np.arange(done, done + len(rows))
        done += len(rows)
    texts = pa.concat_arrays([pa.array([], pa.string()), *(text for _, text in parts)])
    return texts.take(pa.array(place, pa.int64(), mask=place < 0))


def _ten(power: NDArray[np.int64]) -> FloatArray:
    """Give powers of ten, from a table: ten times faster than raising each."""
    return _TENS[np.clip(power, _LEAST, -_LEAST) - _LEAST]


def _place(x: FloatArray, u: FloatArray) -> NDArray[np.int64]:
    """Give the power of ten of the last digit that is written."""
    stated = np.isfinite(u) & (u > 0.0)
    leading = np.where(stated, u, np.abs(x))
    digits = np.where(stated, _DIGITS_OF_U, _DIGITS_ALONE)
    top = _exponent(leading)
    # 0.0996 has two digits as 0.10: rounding may carry into the next place
    carried = np.rint(leading * _ten(digits - 1 - top)) >= _ten(digits)
    place = np.maximum(top + carried - digits + 1, _exponent(x) - _MOST_DIGITS + 1)
    return np.where((x == 0.0) & ~stated, 0, place)


def _exponent(x: FloatArray) -> NDArray[np.int64]:
    """Give the power of ten of the first digit; 0 for zero."""
    size = np.where(x == 0.0, 1.0, np.abs(x))
    return np.asarray(np.floor(np.log10(size))).astype(np.int64)


def _at_place(x: FloatArray | float, place: NDArray[np.int64]) -> FloatArray:
    """Give the value in units of the last place, rounded to a whole number."""
    # a division where the power is whole and exact, a product where its inverse is
    return np.asarray(np.rint(np.where(place > 0, x / _ten(place), x * _ten(-place))))


def _rounds_to(
    x: FloatArray, place: NDArray[np.int64], others: Sequence[float]
) -> NDArray[np.bool_]:
    close = np.zeros(x.shape, dtype=np.bool_)
    rounded = _at_place(x, place)
    for other in others:
        close |= (rounded == _at_place(other, place)) & (x != other) & (x != 0.0)
    return close & (_exponent(x) - place < _MOST_DIGITS)


def _written(x: FloatArray, place: int, *, scientific: bool) -> pa.StringArray:
    whole = _at_place(x, np.full(x.shape, place)).astype(np.int64)
    sign = pa.array(np.where(whole < 0, "-", ""), pa.string())
    digits = _counted(np.abs(whole))
    if scientific:
        return sentence(sign, _with_exponent(digits, place))
    if place >= 0:
        zeros = pa.array(np.where(whole == 0, "", "0" * place), pa.string())
        return sentence(sign, digits, zeros)
    padded = pc.utf8_lpad(digits, 1 - place, "0")
    before = pc.utf8_slice_codeunits(padded, 0, place)
    after = pc.utf8_slice_codeunits(padded, place)
    return sentence(sign, before, ".", after)


def _with_exponent(digits: pa.StringArray, place: int) -> pa.StringArray:
    length = pc.utf8_length(digits).to_numpy()
    exponent = _counted(length - 1 + place)
    first = pc.utf8_slice_codeunits(digits, 0, 1)
    rest = pc.utf8_slice_codeunits(digits, 1)
    point = pa.array(np.where(length > 1, ".", ""), pa.string())
    return sentence(first, point, rest, "e", exponent)


def _counted(whole: NDArray[np.int64]) -> pa.StringArray:
    texts: pa.StringArray = pc.call_function(
        "cast", [pa.array(whole, pa.int64())], pc.CastOptions(pa.string())
    )
    return texts
