"""Do two coupons, lots or conditions differ? Differences with what their errors share."""

from collections.abc import Iterator, Sequence
from dataclasses import asdict, dataclass
from math import isfinite, isinf
from pathlib import Path
from typing import Any, Final

import numpy as np

from coldwork.errors import InvalidArgument, UsageError
from coldwork.interval.contrast import Contrast, Side, contrast
from coldwork.jobs.contrast_sides import BY, Group, Store
from coldwork.jobs.tables import unit_of
from coldwork.statistics.one_way import OneWay
from coldwork.statistics.rounding import interval_ends, rounded, with_uncertainty
from coldwork.statistics.several import CORRECTIONS, corrected

__all__ = ["QUANTITIES", "STRESS", "Compared", "Contrasts", "contrasts"]

STRESS: Final = "dislocation_stress_mpa"
QUANTITIES: Final = (STRESS, "dislocation_density_per_m2", "stored_energy_j_per_g")
_SMALLEST: Final = 1e-6  # chance that is told in digits [1]
_ROUGH: Final = 0.5  # u of ln ratio from which first order says nothing of a ratio [1]
_WORDS: Final = {
    STRESS: "dislocation stress",
    "dislocation_density_per_m2": "dislocation density",
    "stored_energy_j_per_g": "stored energy",
}


@dataclass(frozen=True)
class Compared:
    """One quantity of two groups.

    Attributes
    ----------
    quantity : str
        Column of ``coupons.csv``.
    found : Contrast
        Difference and ratio. [the column's unit]
    beyond : tuple of float
        Standard deviation between the coupons of each beyond their own u; NaN for one. [unit]
    interval, ratio_interval : tuple of float
        Of difference and ratio, at the coverage that holds for all comparisons together.
    probability_a_above : float
        Probability that A is above B. [1]
    p, p_corrected : float
        Chance of such a difference where the two are equal, alone and corrected. [1]
    p_apart, p_apart_corrected : float or None
        Chance of the ratio where they differ by the margin; None without one. [1]
    verdict : str
        ``different``, ``equivalent``, both, or ``not told apart``.
    not_shared : tuple of str
        Inputs of one name on both sides that do not count as the same.
    """

    quantity: str
    found: Contrast
    beyond: tuple[float, float]
    interval: tuple[float, float]
    ratio_interval: tuple[float, float]
    probability_a_above: float
    p: float
    p_corrected: float
    p_apart: float | None
    p_apart_corrected: float | None
    verdict: str
    not_shared: tuple[str, ...]


@dataclass(frozen=True)
class Contrasts:
    """All comparisons that were asked for.

    Attributes
    ----------
    by : str
        ``coupon``, ``lot`` or ``condition``.
    groups : tuple of Group
        The first is the one that the others are held against.
    scatter : tuple of (OneWay or None)
        Of each group's readings, between its coupons and within.
    coverage : float
        Of all intervals together. [1]
    correction : str
        Of the probabilities.
    margin : float or None
        Relative, for equivalence. [1]
    by_stress : tuple of bool
        By group after the first: whether both are worked by the same laws with the same inputs
        after the dislocation stress. Density and energy then rise with it, so that what is probable
        of the stress is so of them, near the baseline too.
    compared : tuple of Compared
        Quantity by quantity, in the order of the groups.
    """

    by: str
    groups: tuple[Group, ...]
    scatter: tuple[OneWay | None, ...]
    coverage: float
    correction: str
    margin: float | None
    by_stress: tuple[bool, ...]
    compared: tuple[Compared, ...]

    @property
    def _count(self) -> int:
        return len(self.groups) - 1

    def as_json(self) -> dict[str, Any]:
        """Give it for a program to read."""
        return {
            "by": self.by,
            "coverage": self.coverage,
            "correction": self.correction if self._count > 1 else "none",
            "margin": self.margin,
            "groups": [
                _finite(asdict(group) | {"readings": _scatter_json(scatter)})
                for group, scatter in zip(self.groups, self.scatter, strict=True)
            ],
            "compared": [_finite(_compared_json(each)) for each in self.compared],
        }

    def text(self) -> str:
        """Tell it to a person."""
        lines = [*self._heads(), ""]
        for each in self.compared:
            lines += [*self._lines(each), ""]
        return "\n".join([*lines, *self._notes()])

    def _heads(self) -> Iterator[str]:
        for group, scatter in zip(self.groups, self.scatter, strict=True):
            count = f", {len(group.coupons)} coupons" if self.by != "coupon" else ""
            yield f"{self.by} {group.name}, batch {group.batch}{count}"
            if group.without:
                yield f"  left out, without a value: {', '.join(group.without)}"
            if scatter is not None:
                between, within = scatter.between_variance**0.5, scatter.residual_sd
                yield (
                    f"  readings scatter by {between:.3g} between coupons and {within:.3g} within"
                    f" one (kgf/mm2); {100 * scatter.between_share:.0f} % of the variance lies"
                    " between"
                )

    def _lines(self, each: Compared) -> Iterator[str]:
        found, unit = each.found, unit_of(each.quantity)
        a, b = found.a, found.b
        percent = f"{100 * self.coverage:g} %"
        yield f"{_WORDS[each.quantity]}: {a.name} against {b.name}"
        for side in (a, b):
            yield f"  {side.name}: {with_uncertainty(side.value, _u(side), unit)}"
        told = with_uncertainty(found.difference, found.u_difference, unit)
        low, high = interval_ends(*each.interval, None)
        yield f"  difference: {told}; {percent} interval {low} to {high}"
        alone = rounded(found.difference, found.u_if_independent)[1]
        yield f"    (if nothing were shared, u would come out as {alone})"
        yield self._ratio(each, percent)
        yield f"  probability that {a.name} is above {b.name}: {each.probability_a_above:.4f}"
        yield f"  chance of this where the two are equal: {self._p(each.p, each.p_corrected)}"
        if each.p_apart is not None and each.p_apart_corrected is not None:
            told = self._p(each.p_apart, each.p_apart_corrected)
            yield f"  chance of this where they are {self.margin:g} apart, relative: {told}"
        yield f"  {each.verdict}"
        if each.not_shared:
            yield (
                "  not taken as the same on both sides, since value, u or source differ: "
                + ", ".join(each.not_shared)
            )

    def _ratio(self, each: Compared, percent: str) -> str:
        found = each.found
        if not found.u_log_ratio < _ROUGH:
            return "  ratio: not told, since one of them is too near its baseline"
        u = found.ratio * found.u_log_ratio
        low, high = (_rounded(x, u) for x in each.ratio_interval)
        return f"  ratio: {_rounded(found.ratio, u)}; {percent} interval {low} to {high}"

    def _p(self, alone: float, together: float) -> str:
        if self._count == 1 or self.correction == "none":
            return _chance(alone)
        return f"{_chance(alone)} alone, {_chance(together)} corrected"

    def _notes(self) -> Iterator[str]:
        if all(self.by_stress):
            yield (
                "Probabilities are those of the dislocation stress: what comes after it is the same"
                " for both, and rises with it."
            )
        if self._count > 1 and self.correction != "none":
            yield (
                f"{self._count} comparisons at once: probabilities corrected after"
                f" {self.correction.capitalize()}, intervals after Bonferroni."
            )
        if self.by != "coupon":
            yield (
                "How coupons of one group differ is in u: the words are about the whole"
                f" {self.by}, not about the coupons that happened to be tested."
            )


def contrasts(
    results: Path,
    names: Sequence[str],
    *,
    by: str = "coupon",
    other: Path | None = None,
    margin: float | None = None,
    correction: str = "holm",
) -> Contrasts:
    """Hold the first of some coupons, lots or conditions against each of the others.

    Parameters
    ----------
    results : Path
        A batch's results, in full detail.
    names : sequence of str
        Two or more.
    by : str, optional
        ``coupon``, ``lot`` or ``condition``.
    other : Path, optional
        Results that all but the first are looked up in; `results` itself without it.
    margin : float, optional
        Relative difference below which two count as equivalent. [1]
    correction : str, optional
        ``holm``, ``bonferroni`` or ``none``; of several comparisons.

    Returns
    -------
    Contrasts
        Dislocation stress, density and stored energy.

    Raises
    ------
    UsageError
        If the names, options or results do not fit together.
    """
    _refuse_odd(names, by, margin, correction, other)
    store = Store(results)
    second = store if other is None else Store(other)
    stores = [store, *[second] * (len(names) - 1)]
    groups = {
        quantity: [s.group(name, by, quantity) for s, name in zip(stores, names, strict=True)]
        for quantity in QUANTITIES
    }
    strains = {group.test_strain for group in groups[QUANTITIES[0]]}
    if len(strains) > 1:
        told = " and ".join(f"{strain:g}" for strain in sorted(strains))
        message = f"these describe states at different test strains ({told}): they do not compare"
        raise UsageError(message)
    first = groups[STRESS]
    by_stress = tuple(_alike(stores[0], each) for each in stores[1:])
    asked = _Asked(by, store.coverage, margin, correction, by_stress)
    compared: list[Compared] = []
    for quantity in QUANTITIES:
        of_stress = compared[: len(names) - 1]
        compared += _of_quantity(stores, groups[quantity], quantity, asked, of_stress)
    scatter: list[OneWay | None] = [None] * len(first)
    if by != "coupon":
        scatter = [s.scatter(group) for s, group in zip(stores, first, strict=True)]
    return Contrasts(
        by,
        tuple(first),
        tuple(scatter),
        store.coverage,
        correction,
        margin,
        by_stress,
        tuple(compared),
    )


@dataclass(frozen=True)
class _Asked:
    by: str
    coverage: float
    margin: float | None
    correction: str
    by_stress: tuple[bool, ...]


def _alike(first: Store, second: Store) -> bool:
    """Tell whether what comes after the dislocation stress is one and the same for both."""
    if first is second:
        return not first.late_own
    same = first.method["laws"] == second.method["laws"] and first.late == second.late
    return same and not first.late_own


def _refuse_odd(
    names: Sequence[str], by: str, margin: float | None, correction: str, other: Path | None
) -> None:
    message = ""
    if len(names) < 2:
        message = "a contrast needs two names or more"
    elif by not in BY:
        message = f"nothing is compared by {by!r}; there are {', '.join(BY)}"
    elif other is None and len(set(names)) < len(names):
        message = "a name stands twice, and nothing differs from itself"
    elif margin is not None and not 0.0 < margin < 10.0:
        message = f"a margin is relative and above 0, such as 0.05, not {margin:g}"
    elif correction not in CORRECTIONS:
        message = f"no correction is called {correction!r}; there are {', '.join(CORRECTIONS)}"
    if message:
        raise UsageError(message)


def _of_quantity(
    stores: Sequence[Store],
    groups: Sequence[Group],
    quantity: str,
    asked: _Asked,
    told: Sequence[Compared],
) -> Iterator[Compared]:
    """Compare one quantity; `told` is what the stress said, empty for the stress itself."""
    between = asked.by != "coupon"
    sides = [
        store.side(group, quantity, between=between)
        for store, group in zip(stores, groups, strict=True)
    ]
    try:
        found = [contrast(sides[0][0], side) for side, _ in sides[1:]]
    except InvalidArgument as error:
        message = f"{_WORDS[quantity]}: {error}"
        raise UsageError(message) from error
    leading = [
        told[i].found if told and asked.by_stress[i] else each for i, each in enumerate(found)
    ]
    p = np.array([each.probability_if_equal for each in leading])
    together = corrected(p, asked.correction)
    margin = asked.margin if told else None  # a margin is of density and energy
    apart = np.array([_apart(each, margin) for each in found])
    apart_together = corrected(apart, asked.correction)
    count = 1 if asked.correction == "none" else len(found)
    wide = 1.0 - (1.0 - asked.coverage) / count
    for i, each in enumerate(found):
        different = bool(together[i] < 1.0 - asked.coverage)
        equivalent = margin is not None and bool(apart_together[i] < 1.0 - asked.coverage)
        yield Compared(
            quantity=quantity,
            found=each,
            beyond=(sides[0][1], sides[i + 1][1]),
            interval=each.difference_interval(wide),
            ratio_interval=each.ratio_interval(wide),
            probability_a_above=leading[i].probability_a_above,
            p=float(p[i]),
            p_corrected=float(together[i]),
            p_apart=None if margin is None else float(apart[i]),
            p_apart_corrected=None if margin is None else float(apart_together[i]),
            verdict=_verdict(different=different, equivalent=equivalent),
            not_shared=_not_shared(each),
        )


def _apart(found: Contrast, margin: float | None) -> float:
    if margin is None or not isfinite(found.log_ratio):
        return 1.0
    return found.probability_if_apart(margin)


def _verdict(*, different: bool, equivalent: bool) -> str:
    if different and equivalent:
        return "different, and by less than the margin"
    if different:
        return "different"
    return "equivalent within the margin" if equivalent else "not told apart"


def _not_shared(found: Contrast) -> tuple[str, ...]:
    first, second = ({_name(key): key for key in side.shared} for side in (found.a, found.b))
    return tuple(name for name, key in first.items() if second.get(name, key) != key)


def _name(identity: str) -> str:
    return identity.rsplit(" ", 3)[0]


def _u(side: Side) -> float:
    return float(sum(p.size**2 for p in (*side.own, *side.shared.values())) ** 0.5)


def _chance(p: float) -> str:
    return f"{p:.2g}" if p >= _SMALLEST else f"below {_SMALLEST:g}"


def _rounded(value: float, u: float) -> str:
    return rounded(value, u)[0]


def _compared_json(each: Compared) -> dict[str, Any]:
    found = each.found
    freedom = found.degrees_of_freedom
    return {
        "quantity": each.quantity,
        "unit": unit_of(each.quantity),
        "a": found.a.name,
        "b": found.b.name,
        "value_a": found.a.value,
        "value_b": found.b.value,
        "sd_between_a": each.beyond[0],
        "sd_between_b": each.beyond[1],
        "difference": found.difference,
        "u_difference": found.u_difference,
        "u_own": found.u_own,
        "u_shared": found.u_shared,
        "u_if_independent": found.u_if_independent,
        "degrees_of_freedom": None if isinf(freedom) else freedom,
        "lower_difference": each.interval[0],
        "upper_difference": each.interval[1],
        "ratio": found.ratio,
        "u_log_ratio": found.u_log_ratio,
        "lower_ratio": each.ratio_interval[0],
        "upper_ratio": each.ratio_interval[1],
        "probability_a_above": each.probability_a_above,
        "p_if_equal": each.p,
        "p_if_equal_corrected": each.p_corrected,
        "p_if_apart": each.p_apart,
        "p_if_apart_corrected": each.p_apart_corrected,
        "verdict": each.verdict,
        "not_shared": list(each.not_shared),
    }


def _scatter_json(found: OneWay | None) -> dict[str, Any] | None:
    if found is None:
        return None
    return {
        "sd_between": found.between_variance**0.5,
        "sd_within": found.residual_sd,
        "between_share": found.between_share,
        "f": found.f,
        "p": found.probability,
        "unit": "kgf/mm2",
    }


def _finite(table: dict[str, Any]) -> dict[str, Any]:
    return {
        key: None if isinstance(x, float) and not isfinite(x) else x for key, x in table.items()
    }
