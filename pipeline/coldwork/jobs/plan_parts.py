"""From results on disk to what a plan leans on: variances of a group, and what they depend on."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import inf, isfinite, sqrt
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import UsageError
from coldwork.interval.contrast import Part
from coldwork.jobs.contrast_sides import Group, Store
from coldwork.statistics.one_way import OneWay
from coldwork.statistics.planning import Variances
from coldwork.statistics.student import welch_satterthwaite

__all__ = ["Found", "found_of"]

_REPEATABILITY: Final = "repeatability"
_ONE_FORCE: Final = 1.02  # largest over smallest that counts as one force [1]


@dataclass(frozen=True)
class Found:
    """What a group of coupons says about the next ones.

    Attributes
    ----------
    group : Group
        The coupons.
    value : float
        Mean of the quantity. [the column's unit]
    between : float
        Variance between coupons, with their own inputs but for the readings. [unit squared]
    per_relative : float
        Variance of the quantity for a unit variance of the relative hardness. [unit squared]
    scatter, rounding, coarse : float
        Of the relative hardness of one indent at `force_n`: variance without what rounding of the
        diagonals brings, that of rounding, and the least variance of a coupon's mean. [1]
    force_n : float
        Of the batch. [N]
    scale : str
        Of the hardness.
    shared : mapping of str to Part
        Mean contribution of each shared input; none for basis ``own``. [unit]
    """

    group: Group
    value: float
    between: float
    per_relative: float
    scatter: float
    rounding: float
    coarse: float
    force_n: float
    scale: str
    shared: Mapping[str, Part]

    @property
    def shared_variance(self) -> float:
        """Variance that is one and the same for all coupons [unit squared]."""
        return float(sum(part.size**2 for part in self.shared.values()))

    def at(self, force_n: float) -> Variances:
        """Give the variances for indents of another force.

        A diagonal goes with the root of the force, so what its rounding brings to the relative
        hardness goes with the inverse of the force; the rest is taken to be the metal's.
        """
        by = self.force_n / force_n
        parts = [part for part in self.shared.values() if part.size]
        freedom = inf
        if parts:
            freedom = float(
                welch_satterthwaite(
                    [part.size for part in parts], [part.degrees_of_freedom for part in parts]
                )
            )
        return Variances(
            self.between,
            self.per_relative * (self.scatter + self.rounding * by),
            self.per_relative * self.coarse * by,
            self.shared_variance,
            freedom,
        )


def found_of(store: Store, group: Group, quantity: str, basis: str) -> Found:
    """Take the variance of a group of coupons apart.

    Parameters
    ----------
    store : Store
        The results.
    group : Group
        A lot's or a condition's coupons.
    quantity : str
        Column of ``coupons.csv``.
    basis : str
        ``total``, or ``own`` for shared inputs taken as exact.

    Returns
    -------
    Found

    Raises
    ------
    UsageError
        If there are too few coupons or readings, or readings of several forces.
    """
    scatter = store.scatter(group) if len(group.coupons) > 1 else None
    if scatter is None:
        message = (
            f"{store.batch_id}: a plan needs two coupons or more with repeated indents, and"
            f" {group.name!r} has not: how coupons and indents differ cannot be told from it"
        )
        raise UsageError(message)
    side, beyond = store.side(group, quantity, between=False)
    rows = store.budget_rows(group.coupons, quantity)
    own = [row for row in rows if row["own_or_shared"] == "own"]
    readings = [row for row in own if row["input"] == _REPEATABILITY]
    others = [row["contribution"] or 0.0 for row in own if row["input"] != _REPEATABILITY]
    slopes = np.array([(r["sensitivity"] or 0.0) * (r["value"] or 0.0) for r in readings])
    n = len(group.coupons)
    shared = {name.rsplit(" ", 3)[0]: part for name, part in side.shared.items()}
    if not isfinite(beyond + sum(part.size for part in shared.values())) or len(slopes) < n:
        message = f"{store.batch_id}: coupons of {group.name!r} lack an uncertainty to plan by"
        raise UsageError(message)
    force, scale, hardness, diagonal = _indented(store, group)
    relative = _scatter_of(scatter, hardness)
    coarse = _coarse(store.method, diagonal)
    rounding = min(coarse / 2.0, relative)  # a mean of two diagonals, each rounded by itself
    return Found(
        group,
        side.value,
        beyond**2 + float(np.sum(np.square(others))) / n,
        float(np.mean(slopes**2)),
        relative - rounding,
        rounding,
        coarse,
        force,
        scale,
        {} if basis == "own" else shared,
    )


def _scatter_of(scatter: OneWay, hardness: float) -> float:
    """Give the variance of one indent within a coupon, relative [1]."""
    return scatter.within_ms / hardness**2


def _indented(store: Store, group: Group) -> tuple[float, str, float, float]:
    """Give force, scale, mean hardness and mean diagonal of the indents [N, -, kgf/mm2, um]."""
    table = store.readings_of(group)

    def numbers(name: str) -> NDArray[np.float64]:
        column = table.column(name).to_numpy(zero_copy_only=False)
        return np.asarray(column, dtype=np.float64)

    force = numbers("force_n")
    scales = {str(x) for x in table.column("scale").to_pylist()}
    if len(scales) > 1 or not float(force.max()) <= _ONE_FORCE * float(force.min()):
        message = (
            f"{store.batch_id}: the indents of {group.name!r} were made at several forces or on"
            " several scales; plan by a lot or a condition that has one"
        )
        raise UsageError(message)
    diagonal = numbers("mean_diagonal_um")
    known = diagonal[np.isfinite(diagonal)]
    middle = float(known.mean()) if len(known) else float("nan")
    return float(np.median(force)), scales.pop(), float(numbers("hardness").mean()), middle


def _coarse(method: Mapping[str, Any], diagonal: float) -> float:
    """Give the least variance of a coupon's mean for the resolution of a diagonal, relative [1]."""
    step = method["indentation"]["resolution_um"]
    if step is None or not isfinite(diagonal):
        return 0.0
    return float((2.0 * step / sqrt(12.0) / diagonal) ** 2)
