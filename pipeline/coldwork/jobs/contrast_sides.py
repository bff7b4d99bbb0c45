"""From results on disk to the sides of a contrast: values and their signed contributions."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cached_property
from hashlib import sha256
from math import inf, isnan
from pathlib import Path
from typing import Any, Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument, UsageError
from coldwork.interval.contrast import Part, Side
from coldwork.results.read import document, read_table
from coldwork.statistics.one_way import OneWay, one_way

__all__ = ["BY", "Group", "Store"]

BY: Final = {"coupon": "coupon_id", "lot": "lot_id", "condition": "condition"}
_LATE: Final = ("hardening.", "material.", "line_energy.")
_UNSEEN: Final = frozenset({"library", "default", "calibration"})  # origins that are one everywhere


@dataclass(frozen=True)
class Group:
    """Some coupons of one batch: one of them, a lot's or a condition's.

    Attributes
    ----------
    name : str
        As it was asked for.
    batch : str
        Id of the batch.
    coupons : tuple of str
        Those that have a value.
    without : tuple of str
        Those that have none.
    test_strain : float
        Strain that the test put into the state that is told. [1]
    """

    name: str
    batch: str
    coupons: tuple[str, ...]
    without: tuple[str, ...]
    test_strain: float


class Store:
    """The results of one batch, opened for contrasts.

    Parameters
    ----------
    folder : Path
        The results.
    """

    def __init__(self, folder: Path) -> None:
        self._folder = Path(folder)
        self.method = document(self._folder, "method")
        self._coupons = read_table(self._folder, "coupons")
        if self.method["output"]["detail"] != "full":
            message = (
                f"{self.batch_id}: these results are a summary, and a contrast needs budget.csv:"
                ' process the batch with detail = "full"'
            )
            raise UsageError(message)

    @property
    def batch_id(self) -> str:
        """Id of the batch."""
        return str(self.method["batch_id"])

    @property
    def coverage(self) -> float:
        """Of its intervals [1]."""
        return float(self.method["uncertainty"]["coverage"])

    @property
    def late(self) -> frozenset[str]:
        """Identities of the inputs that enter after the dislocation stress."""
        names = (name for name in self.method["inputs"] if name.startswith(_LATE))
        return frozenset(self.identity(name) for name in names)

    @property
    def late_own(self) -> bool:
        """Whether any of them is a coupon's own."""
        inputs = self.method["inputs"].items()
        own = any(not x["shared"] for name, x in inputs if name.startswith(_LATE))
        return own or self.method["laws"]["outer_radius"] == "grain"

    @cached_property
    def _budget(self) -> pa.Table:
        return read_table(self._folder, "budget")

    @cached_property
    def _places(self) -> dict[str, int]:
        return {name: i for i, name in enumerate(self._texts("coupon_id"))}

    def _texts(self, column: str) -> list[str]:
        return [str(x) for x in self._coupons.column(column).to_pylist()]

    def _numbers(self, column: str) -> NDArray[np.float64]:
        values = self._coupons.column(column).to_numpy(zero_copy_only=False)
        return np.asarray(values, dtype=np.float64)

    def group(self, name: str, by: str, quantity: str) -> Group:
        """Find what is asked for.

        Parameters
        ----------
        name : str
            A coupon, a lot or a condition.
        by : str
            Which of these: a key of `BY`.
        quantity : str
            Column that must have a value.

        Returns
        -------
        Group
            With one coupon or more.

        Raises
        ------
        UsageError
            If there is none of that name, none of its coupons has a value, or they describe
            states at different test strains.
        """
        names = self._texts(BY[by])
        chosen = [i for i, one in enumerate(names) if one == name]
        if not chosen:
            near = get_close_matches(name, sorted(set(names)), n=1)
            hint = f"; the nearest is {near[0]!r}" if near else ""
            message = f"{self.batch_id}: no {by} is called {name!r}{hint}"
            raise UsageError(message)
        ids, values = self._texts("coupon_id"), self._numbers(quantity)
        have = [i for i in chosen if not isnan(values[i])]
        without = tuple(ids[i] for i in chosen if isnan(values[i]))
        if not have:
            flags = self._texts("flags")[chosen[0]]
            message = f"{self.batch_id}: {by} {name!r} has no {quantity} ({flags or 'no flag'})"
            raise UsageError(message)
        strains = {float(x) for x in self._numbers("test_strain")[have]}
        if len(strains) > 1:
            message = (
                f"{self.batch_id}: the coupons of {by} {name!r} describe states at different test"
                " strains; compare coupon by coupon"
            )
            raise UsageError(message)
        coupons = tuple(ids[i] for i in have)
        return Group(name, self.batch_id, coupons, without, strains.pop())

    def side(self, group: Group, quantity: str, *, between: bool) -> tuple[Side, float]:
        """Give one side of a contrast.

        Parameters
        ----------
        group : Group
            Of this batch.
        quantity : str
            Column of ``coupons.csv``.
        between : bool
            Whether the group stands for coupons that were not tested: how they differ beyond
            their own uncertainty then counts too.

        Returns
        -------
        Side
            Mean and contributions. [the column's unit]
        float
            Standard deviation between the coupons beyond their own u; NaN for one. [unit]
        """
        n = len(group.coupons)
        values = self._numbers(quantity)[[self._places[name] for name in group.coupons]]
        own, shared = self._parts(group.coupons, quantity)
        variances = [sum(part.size**2 for part in parts) for parts in own]
        parts = [Part(part.size / n, part.degrees_of_freedom) for each in own for part in each]
        if self.method["uncertainty"]["repeatability"] == "pooled":
            parts = [_pooled(parts)]
        beyond = float("nan")
        if n > 1:
            spread = float(values.var(ddof=1)) - float(np.mean(variances))
            beyond = float(np.sqrt(max(0.0, spread)))
            if between:
                parts.append(Part(beyond / n**0.5, n - 1.0))
        mean = {name: Part(part.size / n, part.degrees_of_freedom) for name, part in shared.items()}
        return Side(group.name, float(values.mean()), tuple(parts), mean), beyond

    def budget_rows(self, coupons: Sequence[str], quantity: str) -> list[dict[str, Any]]:
        """Give the rows of the budget that are about some coupons and one quantity."""
        budget = self._budget
        wanted = pc.and_(
            pc.is_in(budget.column("quantity"), pa.array([quantity], pa.string())),
            pc.is_in(budget.column("coupon_id"), pa.array(coupons, pa.string())),
        )
        return list(budget.filter(wanted).to_pylist())

    def readings_of(self, group: Group) -> pa.Table:
        """Give the used readings of a group's coupons."""
        readings = read_table(self._folder, "readings")
        wanted = pc.is_in(readings.column("coupon_id"), pa.array(group.coupons, pa.string()))
        return readings.filter(wanted)

    def _parts(
        self, coupons: Sequence[str], quantity: str
    ) -> tuple[list[list[Part]], dict[str, Part]]:
        """Give own contributions coupon by coupon, and sums of the shared ones by identity."""
        own: dict[str, list[Part]] = {name: [] for name in coupons}
        shared: dict[str, Part] = {}
        for row in self.budget_rows(coupons, quantity):
            size, freedom = row["contribution"], row["degrees_of_freedom"]
            part = Part(float("nan") if size is None else size, inf if freedom is None else freedom)
            if row["own_or_shared"] == "own":
                own[row["coupon_id"]].append(part)
            else:
                name = self.identity(row["input"])
                before = shared.get(name, Part(0.0)).size
                shared[name] = Part(before + part.size, part.degrees_of_freedom)
        return list(own.values()), shared

    def identity(self, name: str) -> str:
        """Give what makes an input one and the same: name, value, u and digest of its source.

        An input whose sheet names no source is that of its sheet's file, or of the file that
        the sheet builds on, and of no other.
        """
        found: Mapping[str, Any] = self.method["inputs"][name]
        source = found["source"]
        if not source and found["origin"] not in _UNSEEN:
            sheets = self.method["sheets"]
            place = 1 if found["origin"] == "builds_on" and len(sheets) > 1 else 0
            source = sheets[place]["sha256"]
        digest = sha256(str(source).encode()).hexdigest()
        return f"{name} {found['value']!r} {found['u']!r} {digest}"

    def scatter(self, group: Group) -> OneWay | None:
        """Take the readings of a group apart: between coupons and within; None where it cannot be.

        Points of a flow curve are no repeats, so this is for hardness readings alone.
        """
        table = self.readings_of(group)
        values = np.asarray(
            table.column("hardness").to_numpy(zero_copy_only=False), dtype=np.float64
        )
        names = np.array(table.column("coupon_id").to_pylist(), dtype=object)
        known = np.isfinite(values)
        try:
            return one_way(values[known], names[known].astype(str))
        except InvalidArgument:
            return None


def _pooled(parts: Sequence[Part]) -> Part:
    """Join own contributions whose u come from one pool: its freedom counts once."""
    total = sum(part.size**2 for part in parts)
    below = sum(part.size**2 / part.degrees_of_freedom for part in parts)
    return Part(float(total**0.5), total / below if below > 0.0 else inf)
