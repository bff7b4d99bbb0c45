"""The next batch: how many coupons and indents, at what force and cost, and what to improve."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from importlib.metadata import version
from math import inf, isfinite
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any, Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

import coldwork
from coldwork import contracts
from coldwork.errors import UsageError
from coldwork.jobs.contrast_sides import Store
from coldwork.jobs.plan_parts import Found, found_of
from coldwork.jobs.run import run
from coldwork.jobs.tables import unit_of
from coldwork.results.apart import open_apart
from coldwork.results.read import sha256_of
from coldwork.rules.forces import HV, SCALES
from coldwork.statistics.planning import (
    MOST_GROUPS,
    Variances,
    best_in_each,
    fewest,
    half_width,
    specific_risk,
)
from coldwork.statistics.rounding import with_uncertainty

__all__ = ["MOST_FORCES", "MOST_INDENTS", "Planned", "Wanted", "plan"]

MOST_INDENTS: Final = 20  # in one coupon that are looked at [1]
MOST_FORCES: Final = 4  # that a picture tells apart [1]
_SHEET: Final = "batch.toml"
_COMPUTING: Final = ("numpy", "scipy", "pyarrow")
_SAID: Final = (
    "First order about the group's mean: near the baseline an interval is wider upwards than this.",
    "Scatter between and within coupons is taken to be next time what it was in this group.",
    "At another force only the rounding of the diagonals is told to change; a size effect, and the"
    " scatter of a smaller volume, are not.",
)


@dataclass(frozen=True)
class Wanted:
    """What is asked of the next mean, and what it may cost.

    Attributes
    ----------
    quantity : str or None
        Column of ``coupons.csv``; stored energy per gram, or that of the limit, without one.
    relative_u, half_width, risk : float or None
        Exactly one: standard uncertainty over the value, half of the interval at the sheet's
        coverage, or the chance that the truth is outside the limit. [1], [unit], [1]
    limit : str or None
        Id of the sheet's limit, for `risk`.
    basis : str or None
        ``total``, or ``own`` for shared inputs as exact; the limit's without it, or ``total``.
    coupon_cost, indent_cost : float
        In any one unit.
    forces_n : sequence of float
        Of the indents; that of the batch where there is none. [N]
    """

    quantity: str | None
    relative_u: float | None
    half_width: float | None
    risk: float | None
    limit: str | None
    basis: str | None
    coupon_cost: float
    indent_cost: float
    forces_n: Sequence[float] = ()


@dataclass(frozen=True)
class Planned:
    """Plans for each force and number of indents.

    Attributes
    ----------
    method : mapping
        ``method.json`` of the results.
    read : str
        SHA-256 of their manifest.
    found : Found
        What the group says.
    quantity, basis, target : str
        What was planned for, and what was wanted, in words.
    table : pyarrow.Table
        After the contract ``out/plan``.
    improve : tuple of (str, float, float)
        What the cheapest plan's mean is uncertain by: name, its share of u squared, and the
        relative u if it were halved; the greatest first. [1]
    """

    method: dict[str, Any]
    read: str
    found: Found
    quantity: str
    basis: str
    target: str
    wanted: Wanted
    table: pa.Table
    improve: tuple[tuple[str, float, float], ...]

    @property
    def cheapest(self) -> dict[str, Any]:
        """Row of the table that costs least."""
        return next(row for row in self.table.to_pylist() if row["cheapest"])

    def text(self) -> str:
        """Tell it to a person."""
        found, best, unit = self.found, self.cheapest, unit_of(self.quantity)
        at = found.at(best["force_n"])
        ideal = best_in_each(at, self.wanted.coupon_cost, self.wanted.indent_cost)
        u = float(at.u(best["coupons"], best["indents_per_coupon"]))
        own = "; shared inputs taken as exact" if self.basis == "own" else ""
        lines = [
            f"Plan for {self.quantity} after {found.group.name}, batch {found.group.batch}",
            f"  wanted: {self.target}{own}",
            f"  from {len(found.group.coupons)} coupons: {_scatter_words(found, at)}",
            "",
            f"  cheapest: {_count(best['coupons'], 'coupon')} with"
            f" {_count(best['indents_per_coupon'], 'indent')} each at {best['force_n']:g} N, cost"
            f" {best['cost']:g}",
            f"  the mean would be known as {with_uncertainty(found.value, u, unit)}",
        ]
        if isfinite(ideal):
            lines.append(f"  indents beyond about {max(ideal, 1.0):.0f} a coupon no longer pay")
        lines += ["", "  force/N  indents  coupons  relative u      cost"]
        before = (0.0, 0)
        for row in self.table.to_pylist():
            this = (row["force_n"], row["coupons"])
            if row["coupons"] is not None and (this != before or row["cheapest"]):
                mark = "  cheapest" if row["cheapest"] else ""
                lines.append(
                    f"  {row['force_n']:7.4g}  {row['indents_per_coupon']:7d}"
                    f"  {row['coupons']:7d}  {row['relative_u']:10.4f}  {row['cost']:8g}{mark}"
                )
            before = this
        lines += ["", "  improve first (share of u^2; relative u if this part were halved)"]
        lines += [f"    {name}: {100 * s:.0f} %; {h:.4f}" for name, s, h in self.improve[:5]]
        return "\n".join([*lines, "", *(f"- {said}" for said in _SAID)])

    def account(self) -> dict[str, Any]:
        """Give what the table leans on, but for the files that are written."""
        return {
            "schema_version": contracts.document("account")["version"],
            "command": "plan",
            "batch_id": self.found.group.batch,
            "material": self.method["material"]["name"],
            "coverage": self.method["uncertainty"]["coverage"],
            "read": [{"path": "manifest.json", "sha256": self.read}],
            "inputs": {},
            "choices": [
                {"group": self.found.group.name, "basis": self.basis, "wanted": self.target}
            ],
            "said": list(_SAID),
            "versions": {"coldwork": coldwork.__version__}
            | {name: version(name) for name in _COMPUTING},
        }

    def as_json(self) -> dict[str, Any]:
        """Give account, table and what to improve for a program to read."""
        improve = [
            {"part": name, "share_of_u2": share, "relative_u_if_halved": halved}
            for name, share, halved in self.improve
        ]
        return self.account() | {"rows": self.table.to_pylist(), "improve": improve}

    def write(self, folder: Path, *, plots: bool = True) -> Path:
        """Write table, account and plot into a new folder, whole or not at all.

        Raises
        ------
        ResultsNotWritten
            If it is there already or cannot be written.
        """
        with open_apart(folder) as apart:
            apart.add("plan", self.table)
            if plots:
                from coldwork.jobs.plan_drawing import drawn  # here: it takes half a second

                for name, data in drawn(self):
                    apart.write(name, data)
            return apart.commit(self.account())


def _scatter_words(found: Found, at: Variances) -> str:
    """Say how coupons and indents scatter, relative to the mean."""
    between, within = (100.0 * v**0.5 / abs(found.value) for v in (at.between, at.within))
    shared = 100.0 * found.shared_variance**0.5 / abs(found.value)
    words = f"{between:.2g} % between coupons, {within:.2g} % for one indent"
    return f"{words}, {shared:.2g} % shared by all" if found.shared else words


def plan(folder: Path, name: str, by: str, wanted: Wanted) -> Planned:
    """Plan the next batch after a lot or a condition of this one.

    Parameters
    ----------
    folder : Path
        Results in full detail, or a batch folder, which is then processed and not kept.
    name, by : str
        The group: its name, and ``lot`` or ``condition``.
    wanted : Wanted
        The target and the costs.

    Returns
    -------
    Planned

    Raises
    ------
    UsageError
        If the options do not fit, or no number of coupons meets what is wanted; the message
        then says what stands in the way.
    """
    _refuse_odd(by, wanted)
    if (folder / _SHEET).is_file():
        with TemporaryDirectory(prefix="coldwork-") as scratch:
            return _planned(run(folder, Path(scratch), plots=False).path, name, by, wanted)
    return _planned(folder, name, by, wanted)


def _refuse_odd(by: str, wanted: Wanted) -> None:
    asked = [x for x in (wanted.relative_u, wanted.half_width, wanted.risk) if x is not None]
    costs = (wanted.coupon_cost, wanted.indent_cost)
    message = ""
    if by not in ("lot", "condition"):
        message = f"nothing is planned by {by!r}; there are lot, condition"
    elif len(asked) != 1:
        message = "say one target: --relative-u, --half-width, or --risk with --limit"
    elif not 0.0 < asked[0] < inf or (wanted.risk is not None and wanted.risk >= 0.5):
        message = f"a target is above 0, and a risk below 0.5, not {asked[0]:g}"
    elif (wanted.risk is None) != (wanted.limit is None):
        message = "--risk and --limit go together: a risk is that of a limit of the sheet"
    elif not all(0.0 < cost < inf for cost in costs):
        message = f"costs are above 0, not {costs[0]:g} and {costs[1]:g}"
    elif not all(0.0 < force < inf for force in wanted.forces_n):
        message = "a force is above 0 N"
    elif len(set(wanted.forces_n)) < len(wanted.forces_n) or len(wanted.forces_n) > MOST_FORCES:
        message = f"--force: {MOST_FORCES} forces at most, each once"
    elif wanted.basis not in (None, "total", "own"):
        message = f"there is no basis {wanted.basis!r}; there are total, own"
    if message:
        raise UsageError(message)


def _planned(folder: Path, name: str, by: str, wanted: Wanted) -> Planned:
    store = Store(folder)
    if store.method["laws"]["route"] != "indent":
        message = f"{store.batch_id}: a plan counts indents, and this batch is of flow stresses"
        raise UsageError(message)
    limit = _limit_of(store, wanted)
    quantity = wanted.quantity or (limit or {}).get("quantity") or "stored_energy_j_per_g"
    if quantity not in contracts.load("out/coupons").columns or f"u_{quantity}" not in (
        contracts.load("out/coupons").columns
    ):
        message = f"{quantity!r} is no quantity with an uncertainty in coupons.csv"
        raise UsageError(message)
    if limit is not None and limit["quantity"] != quantity:
        message = f"limit {limit['id']!r} is on {limit['quantity']}, not on {quantity}"
        raise UsageError(message)
    basis = wanted.basis or (limit or {}).get("basis") or "total"
    found = found_of(store, store.group(name, by, quantity), quantity, basis)
    if wanted.forces_n and found.scale != SCALES[HV]:
        message = f"--force: another force is planned for HV alone, and these are {found.scale}"
        raise UsageError(message)
    target = _Target(wanted, limit, found.value, store.coverage, quantity)
    rows = [row for f in wanted.forces_n or (found.force_n,) for row in _rows(found, f, target)]
    if all(row["coupons"] is None for row in rows):
        raise UsageError(_why_not(found, target))
    best = min((row for row in rows if row["coupons"] is not None), key=lambda row: row["cost"])
    best["cheapest"] = True
    return Planned(
        store.method,
        sha256_of(folder / "manifest.json"),
        found,
        quantity,
        basis,
        target.words(),
        wanted,
        pa.Table.from_pylist(rows, schema=_schema()),
        _improve(found, best),
    )


def _schema() -> pa.Schema:
    kinds: dict[str, pa.DataType] = {
        "string": pa.string(),
        "number": pa.float64(),
        "integer": pa.int64(),
        "boolean": pa.bool_(),
    }
    fields = contracts.load("out/plan").fields
    return pa.schema([(each.name, kinds[each.type]) for each in fields])


def _limit_of(store: Store, wanted: Wanted) -> dict[str, Any] | None:
    if wanted.limit is None:
        return None
    for limit in store.method["limits"]:
        if limit["id"] == wanted.limit:
            return dict(limit)
    known = ", ".join(limit["id"] for limit in store.method["limits"]) or "none"
    message = f"{store.batch_id}: the sheet has no limit {wanted.limit!r}; there are: {known}"
    raise UsageError(message)


@dataclass(frozen=True)
class _Target:
    wanted: Wanted
    limit: dict[str, Any] | None
    value: float
    coverage: float
    quantity: str

    def words(self) -> str:
        wanted, unit = self.wanted, unit_of(self.quantity)
        if wanted.relative_u is not None:
            return f"relative u of the mean at most {wanted.relative_u:g}"
        if wanted.half_width is not None:
            return f"{100 * self.coverage:g} % interval within {wanted.half_width:g} {unit}"
        return f"risk of being outside limit {wanted.limit} at most {wanted.risk:g}"

    def rooms(self) -> tuple[float, float]:
        """Give how far the mean lies inside the limits; infinite where there is none."""
        limit = self.limit or {"lower": None, "upper": None}
        low, high = limit["lower"], limit["upper"]
        below = inf if low is None else self.value - low
        return below, inf if high is None else high - self.value

    def risk(self, parts: Variances, n: Any, m: Any) -> NDArray[np.float64]:  # noqa: ANN401
        return specific_risk(parts, n, m, *self.rooms())

    def met(self, parts: Variances, n: Any, m: Any) -> NDArray[np.bool_]:  # noqa: ANN401
        wanted = self.wanted
        if wanted.relative_u is not None:
            return np.asarray(parts.u(n, m) <= wanted.relative_u * abs(self.value))
        if wanted.half_width is not None:
            return half_width(parts, n, m, self.coverage) <= wanted.half_width
        return self.risk(parts, n, m) <= (wanted.risk or 0.0)


def _rows(found: Found, force: float, target: _Target) -> list[dict[str, Any]]:
    parts = found.at(force)
    n, m = np.arange(1, MOST_GROUPS + 1), np.arange(1, MOST_INDENTS + 1)
    coupons = fewest(target.met(parts, n[:, None], m))
    rows = []
    for each, count in zip(m.tolist(), coupons.tolist(), strict=True):
        row: dict[str, Any] = dict.fromkeys(contracts.load("out/plan").columns)
        row |= {"quantity": target.quantity, "force_n": float(force)}
        row |= {"indents_per_coupon": each, "cheapest": False}
        if count:
            wide = float(half_width(parts, count, each, target.coverage))
            row["coupons"] = count
            row["relative_u"] = float(parts.u(count, each)) / abs(target.value)
            row["half_width"] = wide if isfinite(wide) else None
            row["risk"] = float(target.risk(parts, count, each)) if target.limit else None
            row["cost"] = count * (target.wanted.coupon_cost + each * target.wanted.indent_cost)
        rows.append(row)
    return rows


def _why_not(found: Found, target: _Target) -> str:
    """Say why no number of coupons meets the target."""
    head = f"no number of coupons meets this: {target.words()}. "
    if min(target.rooms()) <= 0.0:
        return head + "The group's mean lies outside the limit, and more coupons only confirm it."
    alone = Variances(0.0, 0.0, 0.0, found.shared_variance, found.at(found.force_n).shared_freedom)
    if bool(target.met(alone, 1, 1)):
        return head + f"More than {MOST_GROUPS} coupons would be needed."
    name, part = max(found.shared.items(), key=lambda each: abs(each[1].size))
    relative = found.shared_variance**0.5 / abs(found.value)
    share = part.size**2 / found.shared_variance
    rest = replace(alone, shared=found.shared_variance - part.size**2)
    words = "would be enough" if bool(target.met(rest, 1, 1)) else "alone would not be enough"
    return (
        head + f"What all coupons share is {relative:.2g} of the value by itself; improve {name}"
        f" first ({100 * share:.0f} % of its square). To know it exactly {words}."
    )


def _improve(found: Found, best: dict[str, Any]) -> tuple[tuple[str, float, float], ...]:
    """Rank what the mean of a plan is uncertain by."""
    parts, n, m = found.at(best["force_n"]), best["coupons"], best["indents_per_coupon"]
    squares = {name: part.size**2 for name, part in found.shared.items()}
    squares["between coupons"] = parts.between / n
    squares["scatter of indents"] = max(parts.within / m, parts.least) / n
    total = sum(squares.values())
    ranked = sorted(squares.items(), key=lambda each: -each[1])
    value = abs(found.value)
    return tuple(
        (name, square / total, (total - 0.75 * square) ** 0.5 / value)
        for name, square in ranked
        if square > 0.0
    )


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"
