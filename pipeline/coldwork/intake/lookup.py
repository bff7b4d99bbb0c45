"""Finding coupons by name: quickly where readings come in the order of coupons.csv."""

from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.intake.cells import as_mask, texts

__all__ = ["Lookup"]

_MOST_COMPARED: Final = 200_000  # coupons; past these no look-alike is offered


class Lookup:
    """Names to places in coupons.csv.

    Parameters
    ----------
    ids : pyarrow.StringArray, n names
        The names, each once.

    Notes
    -----
    Readings of a large batch mostly come coupon after coupon, so a run of equal names
    is compared with the coupon that is due next. The names that this does not
    find are looked up in a dictionary, which is built when it is first needed. Where
    the last search ended is remembered; that changes how fast a name is found
    and never what is found.
    """

    def __init__(self, ids: pa.StringArray) -> None:
        self._ids = ids
        self._due = 0
        self._places: dict[str, int] | None = None
        self._alike: dict[str, str] | None = None

    def find(self, names: pa.StringArray) -> NDArray[np.int32]:
        """Give the place of each name, -1 where there is no such coupon.

        Parameters
        ----------
        names : pyarrow.StringArray, n names
            Any names, any number of times.

        Returns
        -------
        ndarray of int32, shape (n,)
        """
        count = len(names)
        if not count:
            return np.empty(0, dtype=np.int32)
        changes = as_mask(pc.not_equal(names.slice(1), names.slice(0, count - 1)))
        starts = np.concatenate(([0], np.flatnonzero(changes) + 1))
        runs = names.take(starts) if len(starts) < count else names
        places = self._find_runs(runs)
        return np.repeat(places, np.diff(np.append(starts, count)))

    def alike(self, name: str) -> str | None:
        """Give a coupon whose name differs in space, capitals or leading zeros alone."""
        if self._alike is None:
            few = self._ids if len(self._ids) <= _MOST_COMPARED else self._ids.slice(0, 0)
            self._alike = {_bare(each): each for each in texts(few)}
        return self._alike.get(_bare(name))

    def _find_runs(self, runs: pa.StringArray) -> NDArray[np.int32]:
        first = self._due
        if first and runs[0] == self._ids[first - 1]:
            first -= 1  # the coupon whose readings the last block broke off
        expected = self._ids.slice(first, len(runs))
        same = as_mask(pc.equal(runs.slice(0, len(expected)), expected))
        stop = len(same) if same.all() else int(np.argmin(same))
        places = np.full(len(runs), -1, dtype=np.int32)
        places[:stop] = np.arange(first, first + stop)
        if stop < len(runs):
            places[stop:] = self._in_dictionary(runs.slice(stop))
        known = places[places >= 0]
        if known.size:
            self._due = int(known[-1]) + 1
        return places

    def _in_dictionary(self, names: pa.StringArray) -> list[int]:
        if self._places is None:
            self._places = {name: place for place, name in enumerate(texts(self._ids))}
        places = self._places
        return [places.get(name, -1) for name in texts(names)]


def _bare(name: str) -> str:
    return "".join(name.split()).casefold().lstrip("0")
