"""From a batch folder to one row per coupon: everything before the chain."""

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.both import flow_of
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons, read_coupons
from coldwork.intake.exclusions import Exclusions, no_exclusions, read_exclusions
from coldwork.intake.files import BLOCK_BYTES, SourceFile, TableFiles
from coldwork.intake.printed import Printed
from coldwork.intake.readings import read_readings
from coldwork.intake.set_aside import SetAside
from coldwork.intake.sources import check_headers
from coldwork.jobs.curves import CurveReading, check_curves, read_curves
from coldwork.jobs.drawn import Pools
from coldwork.jobs.kept import KeptReadings
from coldwork.jobs.prior import prior_of, with_prior
from coldwork.jobs.verification import verified
from coldwork.judge.batch_rules import judge_inputs
from coldwork.judge.coupon_rules import judge_coupon_cells, judge_scales
from coldwork.judge.printed import judge_printed
from coldwork.judge.prior import judge_prior
from coldwork.reduce.reduced import Reduced
from coldwork.reduce.size_lines import with_size_lines
from coldwork.reduce.stream import Byproducts, reduce_batch
from coldwork.reduce.tensile import CurveKeep, Curves, flow_of_curves
from coldwork.rules import RULES, Level
from coldwork.rules.bits import rule_ids, with_error
from coldwork.rules.coupon import SCATTER
from coldwork.rules.findings import Findings
from coldwork.scatter import Repeatability, repeatability

__all__ = ["FlowSide", "Gathered", "gather"]

_READINGS: Final = frozenset({"indents", "flow_stress", "curves"})


@dataclass(frozen=True)
class FlowSide:
    """Flow curves beside the indents of a batch of both routes.

    Attributes
    ----------
    method : Method
        By the flow route.
    reduced : Reduced
        One row per coupon of the batch.
    scatter : Repeatability
        How well each mean is known.
    told : Byproducts
        What was found on them and set aside.
    files : tuple of str
        Names of the files that hold them.
    kept : KeptReadings or None
        Their points, where those are kept.
    """

    method: Method
    reduced: Reduced
    scatter: Repeatability
    told: Byproducts
    files: tuple[str, ...]
    kept: KeptReadings | None


@dataclass(frozen=True)
class Gathered:
    """A batch before the chain.

    Attributes
    ----------
    method : Method
        How it is worked.
    coupons : Coupons
        The list, n coupons.
    reduced : Reduced
        One row per coupon.
    scatter : Repeatability
        How well each mean is known.
    findings : Findings
        What was found so far.
    set_aside : SetAside
        Readings that could not be used.
    files : tuple of str
        Names of the files that hold readings.
    sources : tuple of SourceFile
        Every table that was read, with digest and counts.
    curves : Curves or None
        What its curves came to; they give the flow stresses, or stand beside the readings.
    flow : FlowSide or None
        Its flow curves, where they are joined with indents.
    """

    method: Method
    coupons: Coupons
    reduced: Reduced
    scatter: Repeatability
    findings: Findings
    set_aside: SetAside
    files: tuple[str, ...]
    sources: tuple[SourceFile, ...]
    curves: Curves | None = None
    flow: FlowSide | None = None

    @property
    def readings_read(self) -> int:
        """Rows of readings, points of curves among them, used and set aside."""
        return sum(s.rows_read for s in self.sources if s.table in _READINGS)

    @property
    def readings_used(self) -> int:
        """Those that were used."""
        return int(self.used_per_coupon.sum()) + self._points_beside

    @property
    def used_per_coupon(self) -> NDArray[np.int64]:
        """Readings of each coupon that were used."""
        used = self.reduced.used
        return used if self.flow is None else used + self.flow.reduced.used

    @property
    def set_aside_per_coupon(self) -> NDArray[np.int64]:
        """Readings of each coupon that were not."""
        aside = self.set_aside.per_coupon
        return aside if self.flow is None else aside + self.flow.told.set_aside.per_coupon

    def rules_on(self, rows: slice) -> pa.StringArray:
        """Give the ids of the rules that fired on each coupon of a slice, or on its readings."""
        if self.flow is None:
            return self.findings.text(rows)
        return rule_ids(self.findings.bits[rows] | self.flow.told.findings.bits[rows])

    @property
    def readings_set_aside(self) -> int:
        """Those that were not."""
        beside = 0 if self._beside is None else self._beside.set_aside.count
        return self.set_aside.count + beside

    @cached_property
    def pools(self) -> Pools | None:
        """The draws of the inputs that its coupons share, None by first order."""
        return None if self.method.draws is None else Pools(self.method)

    @property
    def repeatability(self) -> NDArray[np.float64]:
        """Standard uncertainty of each mean; NaN where none is known, 0 where there is no mean."""
        return np.where(np.isfinite(self.reduced.mean), self.scatter.u, 0.0)

    @property
    def errors(self) -> int:
        """Coupons on which, or on whose curve, an error was found."""
        found = with_error(self.findings.bits)
        if self._beside is not None:
            found = found | with_error(self._beside.findings.bits)
        return int(np.count_nonzero(found))

    @property
    def flag_counts(self) -> dict[str, dict[str, int]]:
        """How many findings each rule has: by level, and of these the most findings first."""
        counts = Counter(self.findings.counts)
        if self._beside is not None:
            counts.update(self._beside.findings.counts)
        told: dict[Level, dict[str, int]] = {level: {} for level in Level}
        levels = {rule.id: rule.level for rule in RULES}
        for rule, n in counts.most_common():
            told[levels[rule]][rule] = n
        return {level.value: rules for level, rules in told.items() if rules}

    def set_aside_table(self) -> pa.Table:
        """Give all that was set aside, in the columns of out/set_aside."""
        own = self.set_aside.table()
        if self._beside is None:
            return own
        return pa.concat_tables([self._beside.set_aside.table(), own])  # curves sort first

    def flags(self) -> Iterator[pa.Table]:
        """Give all findings in pieces, those on curves beside the readings last."""
        ids, lots = self.coupons.ids, self.coupons.lot_ids
        yield from self.findings.slices(ids, lots)
        if self._beside is not None:
            yield from map(_emptying_nothing, self._beside.findings.slices(ids, lots))

    def flags_of(self, rows: slice) -> pa.Table:
        """Give the findings on a slice of coupons."""
        ids, lots = self.coupons.ids, self.coupons.lot_ids
        own = self.findings.of(rows, ids, lots)
        if self._beside is None:
            return own
        beside = _emptying_nothing(self._beside.findings.of(rows, ids, lots))
        return pa.concat_tables([own, beside])

    @property
    def _points_beside(self) -> int:
        apart = self.curves is not None and self.curves.beside.findings is not self.findings
        return self.curves.points if self.curves is not None and apart else 0

    @property
    def _beside(self) -> Byproducts | None:
        """What was found on curves that stand beside the readings."""
        if self.flow is not None:
            return self.flow.told
        if self.curves is None or self.curves.beside.findings is self.findings:
            return None
        return self.curves.beside


def gather(
    method: Method,
    *,
    keep: Path | None = None,
    block_bytes: int = BLOCK_BYTES,
    pictures: bool = False,
    points: CurveKeep | None = None,
) -> tuple[Gathered, KeptReadings | None]:
    """Read a batch, reduce its readings and judge their scatter.

    Parameters
    ----------
    method : Method
        From `read_method`.
    keep : Path, optional
        A file in which used readings wait until records are written.
    block_bytes : int, optional
        How much is read at once. [byte]
    pictures : bool, optional
        Whether thinned curves are kept for plots.
    points : CurveKeep, optional
        Where all points of curves are kept, if they are.

    Returns
    -------
    Gathered
        The batch.
    KeptReadings or None
        Its readings, if they were to be kept.

    Raises
    ------
    BatchRefused
        With everything that is wrong with its files as wholes.
    """
    method, checked = verified(method)
    files = _reading_files(method)
    excluding = _files(method, "exclusions", method.exclusions)
    apart = (files, excluding, *((_reading_files(flow_of(method)),) if method.both else ()))
    curves = _how_curves(method, block_bytes, pictures=pictures, keep=points)
    coupons = _coupons(method, apart, curves, block_bytes)
    prior = prior_of(method, coupons)
    coupons = with_prior(coupons, prior)
    exclusions = (
        read_exclusions(excluding, coupons, method.timezone) if excluding.paths else no_exclusions()
    )
    beside = Byproducts(Findings(len(coupons)), SetAside(len(coupons)))
    kept = None if keep is None else KeptReadings(keep, files.raw_names())
    if curves is not None and method.laws.flow_from == "curves":
        found = _read_of_curves(curves, method, coupons, exclusions, beside)
    else:
        with_keep = Byproducts(beside.findings, beside.set_aside, kept)
        found = _read(files, method, coupons, exclusions, with_keep, block_bytes)
        if curves is not None:
            found = _with_curves(found, curves, method, coupons)
    if kept is not None:
        kept.close(len(coupons))
    flow, more = _flow_side(method, coupons, keep, block_bytes) if method.both else (None, ())
    used = found.reduced.used if flow is None else found.reduced.used + flow.reduced.used
    causes = [*found.causes, *_nothing_left(used)]
    if causes:
        raise BatchRefused(str(method.folder), causes)
    method = with_size_lines(method, found.reduced, coupons.conditions)
    of_points = None if method.both else method.repeatability_rel  # which is of flow curves
    scatter = repeatability(
        replace(method, repeatability_rel=of_points), found.reduced, coupons.conditions
    )
    _note_scatter(beside.findings, scatter)
    judge_coupon_cells(beside.findings, method, coupons)
    stated, found_of = (prior.stated_strain, prior.stated_work), (prior.strain, prior.work)
    judge_prior(beside.findings, coupons, stated, found_of, prior.impossible)
    judge_scales(beside.findings, method, found.reduced.scale)
    judge_inputs(beside.findings, method)
    judge_printed(beside.findings, found.printed, files.names)
    gathered = Gathered(
        method,
        coupons,
        found.reduced,
        scatter,
        beside.findings,
        beside.set_aside,
        files.names,
        (*coupons.sources, *exclusions.sources, *checked, *found.sources, *more),
        found.curves,
        flow,
    )
    return gathered, kept


def _flow_side(
    method: Method, coupons: Coupons, keep: Path | None, block_bytes: int
) -> tuple[FlowSide, tuple[SourceFile, ...]]:
    """Read and reduce the flow curves of a batch of both routes, apart from its indents."""
    by_flow = flow_of(method)
    files = _reading_files(by_flow)
    kept = None if keep is None else KeptReadings(keep.with_stem("flow"), files.raw_names())
    told = Byproducts(Findings(len(coupons)), SetAside(len(coupons)), kept)
    found = _read(files, by_flow, coupons, no_exclusions(), told, block_bytes)
    if kept is not None:
        kept.close(len(coupons))
    scatter = repeatability(by_flow, found.reduced, coupons.conditions)
    _note_scatter(told.findings, scatter)
    judge_printed(told.findings, found.printed, files.names)
    return FlowSide(by_flow, found.reduced, scatter, told, files.names, kept), found.sources


@dataclass(frozen=True)
class _Found:
    """What the readings of a batch came to, and why it may have to be refused."""

    reduced: Reduced
    sources: tuple[SourceFile, ...]
    causes: tuple[Cause, ...] = ()
    printed: Sequence[Printed] = ()
    curves: Curves | None = None


def _read(
    files: TableFiles,
    method: Method,
    coupons: Coupons,
    exclusions: Exclusions,
    beside: Byproducts,
    block_bytes: int,
) -> _Found:
    """Read and reduce indents or points of flow stress."""
    stream = read_readings(
        files,
        coupons,
        exclusions,
        beside.set_aside,
        method.timezone,
        block_bytes=block_bytes,
    )
    reduced = reduce_batch(stream, files, method, coupons, beside)
    causes = tuple(stream.unmatched())
    return _Found(reduced, tuple(stream.sources), causes, stream.printed)


def _read_of_curves(
    how: CurveReading,
    method: Method,
    coupons: Coupons,
    exclusions: Exclusions,
    beside: Byproducts,
) -> _Found:
    """Read and reduce curves, and take the flow stresses from them."""
    curves, sources = read_curves(how, method, coupons, exclusions, beside)
    reduced = flow_of_curves(curves, method, len(coupons))
    return _Found(reduced, tuple(sources), curves=curves)


def _with_curves(found: _Found, how: CurveReading, method: Method, coupons: Coupons) -> _Found:
    """Read and reduce curves that stand beside the readings, and touch nothing of those."""
    apart = Byproducts(Findings(len(coupons)), SetAside(len(coupons)))
    curves, sources = read_curves(how, method, coupons, no_exclusions(), apart)
    return replace(found, sources=(*found.sources, *sources), curves=curves)


def _how_curves(
    method: Method, block_bytes: int, *, pictures: bool, keep: CurveKeep | None
) -> CurveReading | None:
    if not method.curves:
        return None
    files = _files(method, "curves", method.curves)
    return CurveReading(files, block_bytes, pictures, keep)


def _reading_files(method: Method) -> TableFiles:
    """Give the files that the strength of the coupons comes from."""
    if method.laws.route == "indent":
        return _files(method, "indents", method.indents)
    if method.laws.flow_from == "curves":
        return _files(method, "curves", method.curves)
    return _files(method, "flow_stress", method.flow_stress)


def _files(method: Method, table: str, paths: tuple[Path, ...]) -> TableFiles:
    layouts = method.layouts.get(table, ())
    return TableFiles(contracts.load(f"in/{table}"), method.folder, paths, layouts)


def _coupons(
    method: Method,
    others: Sequence[TableFiles],
    curves: CurveReading | None,
    block_bytes: int,
) -> Coupons:
    """Read the list; tell its faults together with those of the other tables' headers."""
    apart = [files for files in others if files.contract.table != "curves"]
    causes = [cause for files in apart for cause in check_headers(files)]
    if curves is not None and method.tensile is not None:
        causes += check_curves(curves.files, method.tensile)
    try:
        coupons = read_coupons(
            _files(method, "coupons", method.coupons), method.timezone, block_bytes=block_bytes
        )
    except BatchRefused as refused:
        raise BatchRefused(str(method.folder), [*refused.causes, *causes]) from refused
    if causes:
        raise BatchRefused(str(method.folder), causes)
    return coupons


def _nothing_left(used: NDArray[np.int64]) -> list[Cause]:
    if used.any():
        return []
    return [
        Cause(
            "the batch",
            "no reading of any coupon is left to process",
            "A batch without a used reading has no result.",
            "Run `coldwork check` on it to see why each reading was set aside.",
        )
    ]


def _emptying_nothing(flags: pa.Table) -> pa.Table:
    """Take out which columns of the coupon an error empties, where it empties none of it."""
    place = flags.column_names.index("empties")
    return flags.set_column(place, "empties", pa.nulls(len(flags), pa.string()))


def _note_scatter(findings: Findings, scatter: Repeatability) -> None:
    left = np.flatnonzero(scatter.left)
    findings.add(SCATTER, left, value=scatter.ratio[left], limit=scatter.ratio_limit[left])
