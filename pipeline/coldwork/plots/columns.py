"""Columns of the published frames as plain arrays, rows in the coupons' order.

Frames may come from memory or be read back from a file, so a column's type is
not leaned on: what is no finite number is missing, what is no text is empty.
"""

from collections.abc import Mapping, Sequence
from typing import TypeAlias

import numpy as np
import pandas as pd
from numpy.typing import NDArray

__all__ = ["FloatArray", "Frames", "aligned", "booleans", "frame_of", "numbers", "runs", "texts"]

FloatArray: TypeAlias = NDArray[np.float64]
Frames: TypeAlias = Mapping[str, pd.DataFrame]


def frame_of(frames: Frames, name: str) -> pd.DataFrame:
    """Give a frame, an empty one where the batch has none of that name."""
    return frames.get(name, pd.DataFrame())


def numbers(frame: pd.DataFrame, column: str) -> FloatArray:
    """Give a column as floats in its own unit, shape (n,), NaN where missing."""
    if column not in frame:
        return np.full(len(frame), np.nan)
    series = pd.to_numeric(frame[column], errors="coerce")
    values = series.to_numpy(dtype=np.float64, na_value=np.nan)
    return np.where(np.isfinite(values), values, np.nan)


def texts(frame: pd.DataFrame, column: str) -> list[str]:
    """Give a column as text, length n, empty where missing."""
    if column not in frame:
        return [""] * len(frame)
    return ["" if _absent(x) else str(x) for x in frame[column].tolist()]


def booleans(frame: pd.DataFrame, column: str) -> NDArray[np.bool_]:
    """Give a column of yes and no, shape (n,), no where missing."""
    return np.array([x.lower() in {"true", "1"} for x in texts(frame, column)], dtype=np.bool_)


def aligned(ids: Sequence[str], wanted: Sequence[str]) -> NDArray[np.intp]:
    """Find each wanted name among `ids`.

    Parameters
    ----------
    ids : sequence of str, length n
        Names, each once.
    wanted : sequence of str, length m
        Names to look for.

    Returns
    -------
    ndarray of intp, shape (m,)
        Its place in `ids`, -1 where it is not there.
    """
    places = {name: i for i, name in enumerate(ids)}
    return np.array([places.get(name, -1) for name in wanted], dtype=np.intp)


def runs(values: Sequence[object]) -> list[tuple[int, int]]:
    """Give the stretches of equal neighbours as (first, one past the last)."""
    starts = [i for i in range(len(values)) if i == 0 or values[i] != values[i - 1]]
    stops = [*starts[1:], len(values)] if starts else []
    return list(zip(starts, stops, strict=True))


def _absent(cell: object) -> bool:
    return cell is None or cell is pd.NA or cell != cell
