"""From a batch folder to one row per coupon: everything before the chain."""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons, read_coupons
from coldwork.intake.exclusions import no_exclusions, read_exclusions
from coldwork.intake.files import BLOCK_BYTES, SourceFile, TableFiles
from coldwork.intake.readings import read_readings
from coldwork.intake.set_aside import SetAside
from coldwork.intake.text import check_headers
from coldwork.jobs.kept import KeptReadings
from coldwork.judge.batch_rules import judge_inputs
from coldwork.judge.coupon_rules import judge_coupon_cells, judge_scales
from coldwork.reduce.reduced import Reduced
from coldwork.reduce.stream import Byproducts, reduce_batch
from coldwork.rules.coupon import SCATTER
from coldwork.rules.findings import Findings
from coldwork.scatter import Repeatability, repeatability

__all__ = ["Gathered", "gather"]


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
    """

    method: Method
    coupons: Coupons
    reduced: Reduced
    scatter: Repeatability
    findings: Findings
    set_aside: SetAside
    files: tuple[str, ...]
    sources: tuple[SourceFile, ...]

    @property
    def readings_read(self) -> int:
        """Rows of readings, used and set aside."""
        return sum(s.rows_read for s in self.sources if s.table in {"indents", "flow_stress"})


def gather(
    method: Method,
    *,
    keep: Path | None = None,
    block_bytes: int = BLOCK_BYTES,
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
    table = "flow_stress" if method.laws.route == "flow" else "indents"
    files = _files(method, table, method.flow_stress if table == "flow_stress" else method.indents)
    paths = () if method.exclusions is None else (method.exclusions,)
    excluding = _files(method, "exclusions", paths)
    coupons = _coupons(method, (files, excluding), block_bytes)
    zone = method.timezone
    exclusions = read_exclusions(excluding, coupons, zone) if paths else no_exclusions()
    findings, set_aside = Findings(len(coupons)), SetAside(len(coupons))
    kept = None if keep is None else KeptReadings(keep, f"in/{table}")
    stream = read_readings(files, coupons, exclusions, set_aside, zone, block_bytes=block_bytes)
    reduced = reduce_batch(stream, files, method, coupons, Byproducts(findings, set_aside, kept))
    if kept is not None:
        kept.close(len(coupons))
    causes = [*stream.unmatched(), *_nothing_left(reduced.used)]
    if causes:
        raise BatchRefused(str(method.folder), causes)
    scatter = repeatability(method, reduced, coupons.conditions)
    _note_scatter(findings, scatter)
    judge_coupon_cells(findings, method, coupons)
    judge_scales(findings, method, reduced.scale)
    judge_inputs(findings, method)
    sources = (*coupons.sources, *exclusions.sources, *stream.sources)
    gathered = Gathered(
        method, coupons, reduced, scatter, findings, set_aside, files.names, sources
    )
    return gathered, kept


def _files(method: Method, table: str, paths: tuple[Path, ...]) -> TableFiles:
    return TableFiles(contracts.load(f"in/{table}"), method.folder, paths)


def _coupons(method: Method, others: Sequence[TableFiles], block_bytes: int) -> Coupons:
    """Read the list; tell its faults together with those of the other tables' headers."""
    causes = [cause for files in others for cause in check_headers(files)]
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


def _note_scatter(findings: Findings, scatter: Repeatability) -> None:
    left = np.flatnonzero(scatter.left)
    findings.add(SCATTER, left, value=scatter.ratio[left], limit=scatter.ratio_limit[left])
