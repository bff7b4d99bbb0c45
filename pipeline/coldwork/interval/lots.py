"""Means over the coupons of a lot, with what their errors have in common.

A mean of n coupons has u^2 = sum u_own^2 / n^2 + sum (mean c)^2 u^2: own errors
average out, shared ones do not. Sums are gathered slice by slice; the interval
is that of a coupon which is the mean of the lot, put about the lot's mean.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import Start, with_obstacle
from coldwork.inputs.method import Laws
from coldwork.interval.before import before_superposition
from coldwork.interval.combine import Combined, Ends, Spread, acting, combine, strength_ends
from coldwork.interval.reach import LATE, Reach
from coldwork.measured import Measured, Value, value_of

__all__ = ["STRESS", "LotMean", "LotSums"]

STRESS: Final = "dislocation_stress_mpa"
DENSITY: Final = "dislocation_density_per_m2"


@dataclass(frozen=True)
class LotMean:
    """The mean of one quantity in every lot; arrays of shape (lots,), NaN where there is none.

    Attributes
    ----------
    value : ndarray
        Mean over the lot's coupons. [SI]
    combined : Combined
        Its uncertainty. [SI]
    ends : Ends
        Its interval. [SI]
    """

    value: NDArray[np.float64]
    combined: Combined
    ends: Ends


@dataclass
class _Sums:
    count: NDArray[np.float64]
    value: NDArray[np.float64]
    slopes: dict[str, NDArray[np.float64]] = field(default_factory=dict)
    squares: dict[str, NDArray[np.float64]] = field(default_factory=dict)
    per_freedom: dict[str, NDArray[np.float64]] = field(default_factory=dict)


class LotSums:
    """Sums over lots, gathered slice by slice.

    Parameters
    ----------
    lot : ndarray of int64, shape (n,)
        Which lot each coupon of the batch belongs to.
    lots : int
        How many lots there are.
    pooled : bool
        Whether coupons share one pooled repeatability: its degrees of freedom
        then count once, however many coupons are averaged.
    """

    def __init__(self, lot: NDArray[np.int64], lots: int, *, pooled: bool) -> None:
        self._lot = lot
        self._lots = lots
        self._pooled = pooled
        self._sums: dict[str, _Sums] = {}
        self._grain = np.zeros(lots)
        self.without_density = np.zeros(lots, dtype=bool)

    def add(
        self,
        rows: slice,
        results: Mapping[str, Measured],
        spreads: Mapping[str, Spread],
        grain_size: Value,
    ) -> None:
        """Take in a slice of coupons.

        Parameters
        ----------
        rows : slice
            Its place in the batch.
        results : mapping of str to Measured
            Quantities by column name, NaN where a coupon has none. [SI]
        spreads : mapping of str to Spread
            Of every input.
        grain_size : Value
            Of the coupons. [m]
        """
        lot = self._lot[rows]
        stress = results[STRESS].value
        without = np.isfinite(stress) & ~np.isfinite(results[DENSITY].value)
        self.without_density |= self._sum(lot, without.astype(float)) > 0
        known = np.isfinite(stress)
        self._grain += self._sum(lot, np.where(known, value_of(grain_size), 0.0))
        for name, result in results.items():
            self._add(name, lot, result, spreads)

    def _add(
        self, name: str, lot: NDArray[np.int64], y: Measured, spreads: Mapping[str, Spread]
    ) -> None:
        if name not in self._sums:
            self._sums[name] = _Sums(np.zeros(self._lots), np.zeros(self._lots))
        sums = self._sums[name]
        known = np.isfinite(y.value)
        sums.count += self._sum(lot, known.astype(float))
        sums.value += self._sum(lot, np.where(known, y.value, 0.0))
        for source, c in y.sensitivities.items():
            slope = np.where(known, c, 0.0)
            _gather(sums.slopes, source, self._sum(lot, slope))
            if not spreads[source].shared:
                spread = acting(c, spreads[source])
                part = np.where(known, (c * spread.u) ** 2, 0.0)
                freedom = np.broadcast_to(spread.degrees_of_freedom, part.shape)
                over = np.where(np.isfinite(freedom) & (part > 0), part**2 / freedom, 0.0)
                if self._pooled:
                    over = np.where(np.isfinite(freedom) & (part > 0), part / freedom, 0.0)
                _gather(sums.squares, source, self._sum(lot, part))
                _gather(sums.per_freedom, source, self._sum(lot, over))

    def _sum(self, lot: NDArray[np.int64], weights: NDArray[np.float64]) -> NDArray[np.float64]:
        total = np.bincount(lot, weights=weights, minlength=self._lots)
        return np.asarray(total, dtype=np.float64)

    def coupons_averaged(self, name: str) -> NDArray[np.int64]:
        """Count the coupons that a mean is taken over; shape (lots,)."""
        return self._sums[name].count.astype(np.int64)

    def means(
        self,
        names: tuple[str, ...],
        laws: Laws,
        inputs: Mapping[str, Value],
        spreads: Mapping[str, Spread],
        probability: float,
    ) -> dict[str, LotMean]:
        """Finish the means.

        A mean of densities or energies is given only where every coupon with a strength
        has a density: over those above the baseline alone it would be too high.

        Parameters
        ----------
        names : tuple of str
            Column names of the quantities wanted.
        laws, inputs, spreads
            As for the coupons; the spreads of shared inputs are used.
        probability : float
            (1 + coverage) / 2. [1]

        Returns
        -------
        dict of str to LotMean
            By column name. [SI]
        """
        averages = {name: self._average(name) for name in dict.fromkeys((*names, STRESS))}
        stress, of_stress = averages[STRESS]
        by_stress = self._reach(laws, inputs, {**spreads, **of_stress}, stress)
        means: dict[str, LotMean] = {}
        for name in names:
            y, own = averages[name]
            combined = combine(y, {**spreads, **own})
            if name not in LATE:
                means[name] = LotMean(
                    y.value, combined, strength_ends(y.value, combined, probability)
                )
                continue
            reach = by_stress
            if own.keys() - of_stress.keys():  # enters late, as a grain size that sets the radius
                reach = self._reach(laws, inputs, {**spreads, **own, **of_stress}, stress)
            middle = reach.results[name].value
            ends = reach.interval(name, probability)
            with np.errstate(invalid="ignore", divide="ignore"):
                low, high = y.value * ends.lower / middle, y.value * ends.upper / middle
            means[name] = LotMean(y.value, combined, Ends(low, high))
        return {name: self._blanked(name, mean) for name, mean in means.items()}

    def _average(self, name: str) -> tuple[Measured, dict[str, Spread]]:
        """Give the mean of a quantity, and the spread that own inputs have in it."""
        sums = self._sums[name]
        own: dict[str, Spread] = {}
        with np.errstate(invalid="ignore", divide="ignore"):
            slopes = {source: total / sums.count for source, total in sums.slopes.items()}
            for source, squares in sums.squares.items():
                slope = np.abs(slopes[source])
                u = np.where(slope > 0, np.sqrt(squares) / (sums.count * slope), 0.0)
                over = sums.per_freedom[source]
                top = squares if self._pooled else squares**2
                nu = np.where(over > 0, top / over, np.inf)
                own[source] = Spread(u, shared=False, degrees_of_freedom=nu)
            return Measured(sums.value / sums.count, slopes), own

    def _reach(
        self,
        laws: Laws,
        inputs: Mapping[str, Value],
        spreads: Mapping[str, Spread],
        stress: Measured,
    ) -> Reach:
        n = self._lots
        blank = np.full(n, np.nan)
        with np.errstate(invalid="ignore", divide="ignore"):
            grain = self._grain / self._sums[STRESS].count
        size: Value = grain
        if "grain_size_um" in spreads:
            size = Measured.of_input("grain_size_um", grain)
        start = Start(blank, np.full(n, -1, dtype=np.int8), blank, blank, size, blank, 0.0)
        if laws.unwinding:  # the obstacle's steep end is unwound to nothing
            return Reach(laws, inputs, spreads, start, stress)
        plain = {name: value_of(x) for name, x in inputs.items()}
        excess = value_of(with_obstacle(laws, plain, stress.value))
        before = before_superposition(laws, inputs, excess, np.zeros(n))
        return Reach(laws, inputs, spreads, start, stress, before=before)

    def _blanked(self, name: str, mean: LotMean) -> LotMean:
        if name not in LATE:
            return mean
        keep = ~self.without_density

        def cut(x: NDArray[np.float64]) -> NDArray[np.float64]:
            return np.where(keep, x, np.nan)

        c = mean.combined
        combined = replace(c, u_own=cut(c.u_own), u_shared=cut(c.u_shared), u=cut(c.u))
        ends = Ends(cut(mean.ends.lower), cut(mean.ends.upper))
        return LotMean(cut(mean.value), combined, ends)


def _gather(into: dict[str, NDArray[np.float64]], name: str, amount: NDArray[np.float64]) -> None:
    into[name] = into[name] + amount if name in into else amount
