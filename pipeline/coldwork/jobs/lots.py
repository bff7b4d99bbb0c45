"""Lots of a batch: means, and the decision of the worst coupon."""

from collections.abc import Mapping
from typing import Any, Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.intake.cells import texts
from coldwork.interval.lots import STRESS, LotSums
from coldwork.jobs.evaluate import inputs_of
from coldwork.jobs.gather import Gathered
from coldwork.jobs.slices import Sliced
from coldwork.jobs.tables import WITH_UNCERTAINTY, lots_table
from coldwork.judge.decisions import DECISIONS, NONE, decision_texts
from coldwork.judge.lots import lot_decision
from coldwork.results.tables import TableWriter
from coldwork.rules.bits import emptied

__all__ = ["Lots"]

_DENSITY: Final = "dislocation_density_per_m2"
_BETWEEN: Final = "\x1f"  # a control character, which no cell of coupons.csv may hold


class Lots:
    """Gathers a batch's coupons by lot and condition, slice by slice.

    Parameters
    ----------
    batch : Gathered
        The batch.

    Attributes
    ----------
    incomplete : int
        Coupons so far that leave without a density or without its interval, errors aside.
    """

    def __init__(self, batch: Gathered) -> None:
        self._batch = batch
        self._keys, self._lot = _grouped(batch.coupons.lot_ids, batch.coupons.conditions)
        pooled = batch.method.repeatability == "pooled"
        self._sums = LotSums(self._lot, len(self._keys), pooled=pooled)
        self._code = np.full(len(batch.coupons), NONE, dtype=np.int8)
        self.incomplete = 0
        self._names: tuple[str, ...] = ()

    def add(self, part: Sliced) -> None:
        """Take in a slice."""
        self._names = tuple(name for name in WITH_UNCERTAINTY if name in part.figures)
        wanted = {name: part.figures[name].result for name in self._names}
        self._sums.add(part.rows, wanted, part.spreads, part.evaluated.start.grain_size)
        self._code[part.rows] = part.worst.code
        self.incomplete += int(np.count_nonzero(_incomplete(part)))

    def write(self, writer: TableWriter) -> dict[str, int]:
        """Write ``lots.csv`` and count the coupons by decision.

        Parameters
        ----------
        writer : TableWriter
            Of the table.

        Returns
        -------
        dict of str to int
            Coupons of the batch by decision.
        """
        method = self._batch.method
        inputs, spreads = inputs_of(method)
        probability = (1.0 + method.coverage) / 2.0
        means = self._sums.means(self._names, method.laws, inputs, spreads, probability)
        decided = lot_decision(self._lot, len(self._keys), self._code)
        counts: Mapping[str, NDArray[np.int64]] = {
            "coupons": np.bincount(self._lot, minlength=len(self._keys)).astype(np.int64),
            "coupons_averaged": self._sums.coupons_averaged(STRESS),
            "conforming": decided.conforming,
            "non_conforming": decided.non_conforming,
            "undecided": decided.undecided,
        }
        texts = decision_texts(decided.code).to_pylist()
        writer.write(lots_table(self._keys, counts, [t or "" for t in texts], means))
        return {
            word: int(np.count_nonzero(self._code == code)) for code, word in enumerate(DECISIONS)
        }


def _incomplete(part: Sliced) -> NDArray[np.bool_]:
    """Say which coupons lack a density or its interval, though no error took it away."""
    density = part.figures[_DENSITY]
    ends = density.ends
    lacking = np.isnan(density.result.value) | np.isnan(ends.lower) | np.isnan(ends.upper)
    return lacking & ~emptied(_DENSITY, part.batch.findings.bits[part.rows])


def _grouped(
    lots: pa.StringArray, conditions: pa.StringArray
) -> tuple[list[tuple[str, str]], NDArray[np.int64]]:
    """Name the groups in the order in which they first come, and number the coupons."""
    join: Any = pc.binary_join_element_wise  # typed for columns alone, without a separator
    joined: pa.StringArray = join(lots, conditions, _BETWEEN)
    both = joined.dictionary_encode()
    keys = [key.partition(_BETWEEN) for key in texts(cast("pa.StringArray", both.dictionary))]
    numbers = both.indices.to_numpy(zero_copy_only=False).astype(np.int64)
    return [(lot, condition) for lot, _, condition in keys], numbers
