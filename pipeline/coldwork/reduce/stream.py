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
from coldwork.rules.findings import Findings
from coldwork.rules.reasons import REPEATED_READING

__all__ = ["Byproducts", "Keep", "put_repeats_aside", "reduce_batch"]

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
        for readings, repeats in stretches:
            put_repeats_aside(repeats, files, coupons, beside.set_aside)
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


def put_repeats_aside(
    repeats: Readings, files: TableFiles, coupons: Coupons, set_aside: SetAside
) -> None:
    """Set aside readings that repeat a number which their coupon already had.

    Parameters
    ----------
    repeats : Readings
        They.
    files : TableFiles
        The files that they came from.
    coupons : Coupons
        For their names.
    set_aside : SetAside
        Where they go.
    """
    table = files.contract.table
    column = _NUMBER[table]
    for file in dict.fromkeys(repeats.file.tolist()):
        here = np.flatnonzero(repeats.file == file)
        part = repeats.take(here)
        own = files.raw_name(file, column)
        raw = part.raw[own] if own in part.raw.column_names else None
        set_aside.add(
            REPEATED_READING,
            table=table,
            file=files.names[file],
            lines=part.lines,
            column=own,
            raw=None if raw is None else cast("pa.StringArray", raw.combine_chunks()),
            coupon=part.coupon,
            coupon_ids=coupons.ids.take(pa.array(part.coupon, pa.int32())),
            reading_no=part.number,
        )
