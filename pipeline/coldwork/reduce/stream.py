"""The last stage that streams: blocks of readings to one row per coupon."""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final, Protocol, cast

import numpy as np
import pyarrow as pa

from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import ReadingStream
from coldwork.intake.set_aside import SetAside
from coldwork.reduce.flow import reduce_flow
from coldwork.reduce.indents import reduce_indents
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings, ScatteredCoupons, regrouped, whole_coupons
from coldwork.reduce.reduced import ReadingResults, Reduced
from coldwork.reduce.shallow import shallow
from coldwork.rules.findings import Findings
from coldwork.rules.reasons import REPEATED_READING, SHALLOW_INDENT
from coldwork.rules.rule import Reason

__all__ = ["Byproducts", "Keep", "put_aside", "reduce_batch"]

_NUMBER: Final = {"indents": "indent_no", "flow_stress": "reading_no", "curves": "point_no"}


class Keep(Protocol):
    """Where used readings wait for their coupons' records."""

    def restart(self) -> None:
        """Forget what was kept."""

    def add(self, readings: Readings, results: ReadingResults) -> None:
        """Keep a stretch of readings."""


@dataclass(frozen=True)
class Byproducts:
    """What comes of the readings beside the coupons' rows.

    Attributes
    ----------
    findings : Findings
        What was found on readings and their coupons.
    set_aside : SetAside
        Readings that could not be used.
    keep : Keep or None
        Where used readings are kept, if they are.
    """

    findings: Findings
    set_aside: SetAside
    keep: Keep | None = None

    def restart(self) -> None:
        """Forget all of it, for another pass over the same readings."""
        self.findings.restart()
        self.set_aside.restart()
        if self.keep is not None:
            self.keep.restart()


def reduce_batch(
    stream: ReadingStream, files: TableFiles, method: Method, coupons: Coupons, beside: Byproducts
) -> Reduced:
    """Reduce all readings of a batch.

    Parameters
    ----------
    stream : ReadingStream
        The readings; read twice where coupons are scattered over it.
    files : TableFiles
        The stream's files, of ``indents`` or ``flow_stress``.
    method, coupons
        The batch.
    beside : Byproducts
        Still empty; the stream sets readings aside in the same one.

    Returns
    -------
    Reduced
        One row per coupon.
    """

    def run(stretches: Iterable[tuple[Readings, Readings]]) -> Reduced:
        reduced = Reduced.empty(len(coupons), tuple(t.id for t in method.testers))
        reduce = reduce_flow if method.laws.route == "flow" else reduce_indents
        for whole, repeats in stretches:
            put_aside(repeats, REPEATED_READING, files, coupons, beside.set_aside)
            small = shallow(whole, method)
            readings = whole
            if small.any():
                readings = whole.take(np.flatnonzero(~small))
                aside = whole.take(np.flatnonzero(small))
                put_aside(aside, SHALLOW_INDENT, files, coupons, beside.set_aside)
                if not len(readings):
                    continue
            marks = Marks(readings, beside.findings, files.names)
            results = reduce(readings, method, reduced, marks)
            if beside.keep is not None:
                beside.keep.add(readings, results)
        return reduced

    try:
        return run(whole_coupons(iter(stream), len(coupons)))
    except ScatteredCoupons:
        beside.restart()
        return run(regrouped(iter(stream)))


def put_aside(
    found: Readings, reason: Reason, files: TableFiles, coupons: Coupons, set_aside: SetAside
) -> None:
    """Set readings aside that were read well and cannot be used all the same.

    Parameters
    ----------
    found : Readings
        They.
    reason : Reason
        ``REPEATED_READING`` for a number that their coupon already had, or
        ``SHALLOW_INDENT``.
    files : TableFiles
        The files that they came from.
    coupons : Coupons
        For their names.
    set_aside : SetAside
        Where they go.
    """
    table = files.contract.table
    for file in dict.fromkeys(found.file.tolist()):
        here = np.flatnonzero(found.file == file)
        part = found.take(here)
        column = _NUMBER[table] if reason is REPEATED_READING else _size_column(part)
        own = files.raw_name(file, column)
        raw = part.raw[own] if own in part.raw.column_names else None
        set_aside.add(
            reason,
            table=table,
            file=files.names[file],
            lines=part.lines,
            column=own,
            raw=None if raw is None else cast("pa.StringArray", raw.combine_chunks()),
            coupon=part.coupon,
            coupon_ids=coupons.ids.take(pa.array(part.coupon, pa.int32())),
            reading_no=part.number,
        )


def _size_column(part: Readings) -> str:
    """Give the column that tells how large indents are."""
    return "d1_um" if np.isfinite(part.column("d1_um")).all() else "hardness"
