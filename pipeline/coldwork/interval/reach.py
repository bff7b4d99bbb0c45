"""The two-part interval of density and energies.

A density grows with the square of the dislocation stress s, so a symmetric
interval fails where s is small. The ends are taken in s, by running the second
half of the chain at s -+ k u(s), and the inputs that enter only after s widen
them on a logarithmic scale:

    lower = y exp(-sqrt(A^2 + (k m)^2 + 2 r A k m)),  A = ln(y / y_L)
    upper = y exp(+sqrt(A^2 + (k m)^2 + 2 r A k m)),  A = ln(y_U / y)

with m the joint relative uncertainty of the late inputs and r the correlation
of s with their joint effect on ln y. Beside obstacles s -+ k u(s) gives way to the
ends of `before`.
"""

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import Start, energy, energy_per_volume
from coldwork.inputs.method import Laws
from coldwork.interval.before import Before
from coldwork.interval.combine import Ends, Spread, combine
from coldwork.measured import Measured, Value, value_of
from coldwork.statistics.student import student_probability, student_quantile

__all__ = ["BELOW_ZERO", "LATE", "REGIONS", "Reach"]

PIVOT: Final = "dislocation stress"  # the name under which s enters the second half as an input
BELOW_ZERO: Final = (  # goes to 0 with s: has a lower end of 0 where s - k u(s) <= 0
    "dislocation_density_per_m2",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_mol",
    "stored_energy_j_per_g",
    "temperature_rise_k",
    "stored_fraction_of_work",
)
REGIONS: Final = ("wall_density_per_m2", "interior_density_per_m2")
LATE: Final = (*BELOW_ZERO[:1], "mean_spacing_nm", "line_energy_j_per_m", *BELOW_ZERO[1:])

_FARTHEST_K: Final = 1e4  # beyond it a Student probability is 0 or 1 for all that is printed
_ROOT_STEPS: Final = 60


class Reach:
    """How far density and energies of a slice of coupons may lie from their values.

    Holds the second half of the chain, differentiated once, and evaluates it
    anew wherever an end is asked for.

    Parameters
    ----------
    laws : Laws
        The choices that the sheet names.
    inputs : mapping of str to Value
        Inputs as `Measured` where they are uncertain. [SI]
    spreads : mapping of str to Spread
        Uncertainty of every input, the coupons' own ones included.
    start : Start
        The slice of coupons.
    stress : Measured, shape (n,)
        Dislocation stress, of the unwound state where it is unwound. [Pa]
    own_only : bool, optional
        Take shared inputs as exact (`basis = "own"`).
    before : Before or None, optional
        The stress before superposition, where ends are taken in that.
    """

    def __init__(
        self,
        laws: Laws,
        inputs: Mapping[str, Value],
        spreads: Mapping[str, Spread],
        start: Start,
        stress: Measured,
        *,
        own_only: bool = False,
        before: Before | None = None,
    ) -> None:
        self._laws = laws
        self._before = before
        self._inputs = inputs
        self._plain = {name: value_of(x) for name, x in inputs.items()}
        self._spreads = spreads
        self._start = start
        self._bare_start = _bare(start)
        self._own_only = own_only
        self.stress = stress
        self.u_stress = combine(stress, spreads, own_only=own_only)
        self.present = stress.value > 0.0
        pivot = np.where(self.present, stress.value, np.nan)
        self._late = energy(laws, inputs, Measured.of_input(PIVOT, pivot), start)
        self.results = {name: self._through_pivot(self._late[name]) for name in LATE}
        self.combined = {
            name: combine(result, spreads, own_only=own_only)
            for name, result in self.results.items()
        }
        self.radius_ratio = value_of(self._late["radius_ratio"])
        self.regions: dict[str, Value] = {
            n: value_of(self._late[n]) for n in REGIONS if n in self._late
        }

    def with_shared_exact(self) -> "Reach":
        """Give the same with shared inputs taken as exact (`basis = "own"`)."""
        return Reach(
            self._laws,
            self._inputs,
            self._spreads,
            self._start,
            self.stress,
            own_only=True,
            before=self._before,
        )

    @property
    def densest(self) -> NDArray[np.float64]:
        """Density of the densest region: of walls, or of all of it. [1/m^2]."""
        whole = self._late["dislocation_density_per_m2"]
        return value_of(self.regions.get("wall_density_per_m2", whole))

    @property
    def mapped(self) -> bool:
        """Whether ends of the stress are taken before superposition."""
        return self._before is not None

    def stress_at(self, k: NDArray[np.float64]) -> NDArray[np.float64]:
        """Give the dislocation stress at k standard uncertainties from its value, in Pa."""
        with np.errstate(invalid="ignore", over="ignore"):
            steps = k * self.u_stress.u
        return self.stress.value + steps if self._before is None else self._before.moved(steps)

    def stress_interval(self, probability: float) -> Ends:
        """Give the dislocation stress's interval whose ends each have P(t <= k), in Pa."""
        k = student_quantile(probability, self.u_stress.degrees_of_freedom)
        return Ends(self.stress_at(-k), self.stress_at(k))

    def stress_above(self, limit: float) -> NDArray[np.float64]:
        """Give the probability that the dislocation stress is above a limit. [Pa]."""
        below = limit < self.stress.value

        def met(k: NDArray[np.float64]) -> NDArray[np.bool_]:
            return np.where(below, self.stress_at(-k) <= limit, self.stress_at(k) >= limit)

        k = _first_true(met, self.stress.value.shape)
        p = student_probability(k, self.u_stress.degrees_of_freedom)
        return np.where(np.isfinite(self.u_stress.u), np.where(below, p, 1.0 - p), np.nan)

    def degrees_of_freedom(self, name: str) -> NDArray[np.float64]:
        """Give effective degrees of freedom of a quantity; where s <= 0, those of s."""
        return np.where(
            self.present,
            self.combined[name].degrees_of_freedom,
            self.u_stress.degrees_of_freedom,
        )

    def interval(self, name: str, probability: float) -> Ends:
        """Give the two-part interval whose ends each have P(t <= k) = `probability`, in SI."""
        return self.ends(name, student_quantile(probability, self.degrees_of_freedom(name)))

    def ends(self, name: str, k: NDArray[np.float64]) -> Ends:
        """Give lower and upper end of a quantity at coverage factor k >= 0.

        Parameters
        ----------
        name : str
            Column name of the quantity, one of `LATE`.
        k : ndarray, shape (n,)
            Coverage factor. [1]

        Returns
        -------
        Ends
            Shape (n,). [SI]
        """
        above = self._ends_above(name, k)
        if name not in BELOW_ZERO:
            return above
        return _merge(self.present, above, self._ends_on_baseline(name, k))

    def probability_above(self, name: str, limit: float) -> NDArray[np.float64]:
        """Give the probability that a quantity lies above a limit.

        Student's P(t <= k) for the k at which the interval's end meets the
        limit, found by bisection in ln(1 + k).

        Parameters
        ----------
        name : str
            Column name of the quantity, one of `LATE`.
        limit : float
            The limit. [SI]

        Returns
        -------
        ndarray, shape (n,)
            NaN where the uncertainty is not known. [1]
        """
        y = value_of(self._late[name])
        below = self.present & (limit < y)  # the limit is met by the lower end

        def inside(k: NDArray[np.float64]) -> NDArray[np.bool_]:
            ends = self.ends(name, k)
            lower = np.where(np.isnan(ends.lower), -np.inf, ends.lower)
            upper = np.where(np.isnan(ends.upper), np.inf, ends.upper)
            if name in BELOW_ZERO:  # on the baseline there is no upper end yet: it is still 0
                blank = ~self.present & np.isnan(ends.upper)
                upper = np.where(blank, 0.0, upper)
            return np.where(below, lower <= limit, upper >= limit)

        k = _first_true(inside, y.shape)
        p = student_probability(k, self.degrees_of_freedom(name))
        p = np.where(below, p, 1.0 - p)
        known = np.isfinite(self.u_stress.u) & (~self.present | np.isfinite(y))
        return np.where(known, p, np.nan)

    def _ends_above(self, name: str, k: NDArray[np.float64]) -> Ends:
        """Give the ends where s > 0."""
        y = value_of(self._late[name])
        s_down, s_up = self.stress_at(-k), self.stress_at(k)
        with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
            y_down = self._at(np.where(s_down > 0.0, s_down, np.nan), name)
            y_up = self._at(np.where(self.present, s_up, np.nan), name)
            at_zero = 0.0 if name in BELOW_ZERO else np.inf
            y_down = np.where(self.present & (s_down <= 0.0), at_zero, y_down)
            y_low, y_high = np.minimum(y_down, y_up), np.maximum(y_down, y_up)
            m, r = self._late_part(name)
            down, up = np.log(y / y_low), np.log(y_high / y)
            km = k * m
            lower = y * np.exp(-np.sqrt(np.maximum(0.0, down**2 + km**2 + 2.0 * r * down * km)))
            upper = y * np.exp(np.sqrt(np.maximum(0.0, up**2 + km**2 + 2.0 * r * up * km)))
        lower = np.where(self.present & (y_low == 0.0), 0.0, lower)
        upper = np.where(np.isinf(upper), np.nan, upper)
        unknown = np.isnan(self.combined[name].u)
        return Ends(np.where(unknown, np.nan, lower), np.where(unknown, np.nan, upper))

    def _ends_on_baseline(self, name: str, k: NDArray[np.float64]) -> Ends:
        """Give the ends where s <= 0: from nothing up to what the uncertainty allows."""
        here = ~self.present & np.isfinite(self.u_stress.u)
        lower = np.where(here, 0.0, np.nan)
        upper = np.full(here.shape, np.nan)
        top = self.stress_at(k)
        rows = np.flatnonzero(here & (top > 0.0))
        if rows.size:
            inputs = {n: _take_value(x, rows) for n, x in self._inputs.items()}
            pivot = Measured.of_input(PIVOT, top[rows])
            late = energy(self._laws, inputs, pivot, _take(self._start, rows))[name]
            spreads = {n: _spread_at(x, rows) for n, x in self._spreads.items()}
            y = value_of(late)
            m = _relative(late, spreads, own_only=self._own_only)
            upper[rows] = y * np.exp(k[rows] * m)
        return Ends(lower, np.where(np.isinf(upper), np.nan, upper))

    def _late_part(self, name: str) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Give m, and r with its sign turned where the quantity falls with s."""
        late = self._late[name]
        m = _relative(late, self._spreads, own_only=self._own_only)
        if not isinstance(late, Measured):
            return m, np.zeros_like(m)
        covariance = np.zeros(np.shape(late.value))
        slope = late.sensitivities.get(PIVOT, np.asarray(0.0))
        for name_, c in late.sensitivities.items():
            if name_ == PIVOT or name_ not in self.stress.sensitivities:
                continue
            spread = self._spreads[name_]
            if not (self._own_only and spread.shared):
                covariance = covariance + c * self.stress.sensitivities[name_] * spread.u**2
        with np.errstate(invalid="ignore", divide="ignore"):
            r = covariance / (late.value * m * self.u_stress.u)
        r = np.where(np.isfinite(r), r, 0.0) * np.sign(slope)
        return m, np.clip(r, -1.0, 1.0)

    def _at(self, stress: NDArray[np.float64], name: str) -> NDArray[np.float64]:
        found = energy_per_volume(self._laws, self._plain, stress, self._bare_start)
        if name in found:
            return value_of(found[name])
        stored = "stored_energy_j_per_m3"  # the rest goes with it in proportion
        share = value_of(self._late[name]) / value_of(self._late[stored])
        return value_of(found[stored]) * share

    def _through_pivot(self, late: Value) -> Measured:
        """Replace the sensitivity to s by those to what s came from."""
        if not isinstance(late, Measured):
            return Measured(value_of(late))
        slope = late.sensitivities.get(PIVOT, np.asarray(0.0))
        total = {name: c for name, c in late.sensitivities.items() if name != PIVOT}
        for name, c in self.stress.sensitivities.items():
            step = slope * c
            total[name] = total[name] + step if name in total else step
        return Measured(late.value, total)


def _relative(late: Value, spreads: Mapping[str, Spread], *, own_only: bool) -> NDArray[np.float64]:
    """Give the joint relative standard uncertainty of the late inputs in a quantity."""
    if not isinstance(late, Measured):
        return np.zeros(np.shape(late))
    total = np.zeros(np.shape(late.value))
    for name, c in late.sensitivities.items():
        if name != PIVOT and not (own_only and spreads[name].shared):
            total = total + (c * spreads[name].u) ** 2
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(np.sqrt(total) / late.value)


def _first_true(
    test: Callable[[NDArray[np.float64]], NDArray[np.bool_]], shape: tuple[int, ...]
) -> NDArray[np.float64]:
    """Find the smallest k >= 0 from which a monotone test holds, by bisection in ln(1 + k)."""
    low, high = np.zeros(shape), np.full(shape, np.log1p(_FARTHEST_K))
    for _ in range(_ROOT_STEPS):
        middle = (low + high) / 2.0
        true = test(np.expm1(middle))
        low, high = np.where(true, low, middle), np.where(true, middle, high)
    return np.asarray(np.expm1(high))


def _merge(first: NDArray[np.bool_], a: Ends, b: Ends) -> Ends:
    return Ends(np.where(first, a.lower, b.lower), np.where(first, a.upper, b.upper))


def _bare(start: Start) -> Start:
    """Give the slice without sensitivities."""
    return replace(
        start,
        mean=value_of(start.mean),
        grain_size=value_of(start.grain_size),
        plastic_work=value_of(start.plastic_work),
    )


def _take(start: Start, rows: NDArray[np.intp]) -> Start:
    return Start(
        value_of(start.mean)[rows],
        start.scale[rows],
        start.force[rows],
        start.ball[rows],
        _take_value(start.grain_size, rows),
        _take_value(start.plastic_work, rows),
        start.plastic_strain,
    )


def _take_value(x: Value, rows: NDArray[np.intp]) -> Value:
    if not isinstance(x, Measured):
        plain = np.asarray(x)
        return plain[rows] if plain.ndim else plain
    if not x.value.ndim:
        return x
    picked = {n: c[rows] if np.ndim(c) else c for n, c in x.sensitivities.items()}
    return Measured(x.value[rows], picked)


def _spread_at(spread: Spread, rows: NDArray[np.intp]) -> Spread:
    def at(x: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
        return x[rows] if isinstance(x, np.ndarray) and x.ndim else x

    return Spread(at(spread.u), spread.shared, at(spread.degrees_of_freedom))
