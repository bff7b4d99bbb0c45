"""The last stage that streams: blocks of readings to one row per coupon."""

from collections.abc import Iterable, Sequence
from typing import Final, Protocol

import pyarrow as pa

from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.intake.readings import ReadingStream
from coldwork.intake.set_aside import SetAside
from coldwork.reduce.flow import reduce_flow
from coldwork.reduce.indents import reduce_indents
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings, ScatteredCoupons, regrouped, whole_coupons
from coldwork.reduce.reduced import ReadingResults, Reduced
from coldwork.rules.findings import Findings
from coldwork.rules.reasons import REPEATED_READING

__all__ = ["Keep", "reduce_batch"]

_NUMBER: Final = {"indents": "indent_no", "flow_stress": "reading_no"}


class Keep(Protocol):
    """Where used readings wait for their coupons' records."""

    def restart(self) -> None:
        """Forget what was kept."""

    def add(self, readings: Readings, results: ReadingResults) -> None:
        """Keep a stretch of readings."""


def reduce_batch(
    stream: ReadingStream,
    table: str,
    files: Sequence[str],
    method: Method,
    coupons: Coupons,
    findings: Findings,
    set_aside: SetAside,
    keep: Keep | None = None,
) -> Reduced:
    """Reduce all readings of a batch.

    Parameters
    ----------
    stream : ReadingStream
        The readings; read twice where coupons are scattered over it.
    table : str
        ``indents`` or ``flow_stress``.
    files : sequence of str
        Names of the stream's files.
    method, coupons
        The batch.
    findings : Findings
        Still empty; what is found on readings goes there.
    set_aside : SetAside
        Still empty; repeats of a reading's number go there.
    keep : Keep, optional
        Where used readings are kept, if they are.

    Returns
    -------
    Reduced
        One row per coupon.
    """

    def run(stretches: Iterable[tuple[Readings, Readings]]) -> Reduced:
        reduced = Reduced.empty(len(coupons), tuple(t.id for t in method.testers))
        reduce = reduce_flow if method.laws.route == "flow" else reduce_indents
        for readings, repeats in stretches:
            _put_repeats_aside(repeats, table, files, coupons, set_aside)
            results = reduce(readings, method, reduced, Marks(readings, findings, files))
            if keep is not None:
                keep.add(readings, results)
        return reduced

    try:
        return run(whole_coupons(iter(stream), len(coupons)))
    except ScatteredCoupons:
        findings.restart()
        set_aside.restart()
        if keep is not None:
            keep.restart()
        return run(regrouped(iter(stream)))


def _put_repeats_aside(
    repeats: Readings, table: str, files: Sequence[str], coupons: Coupons, set_aside: SetAside
) -> None:
    column = _NUMBER[table]
    for file in dict.fromkeys(repeats.file.tolist()):
        here = (repeats.file == file).nonzero()[0]
        index = pa.array(here)
        set_aside.add(
            REPEATED_READING,
            table=table,
            file=files[file],
            lines=repeats.lines[here],
            column=column,
            raw=repeats.raw[column].combine_chunks().take(index),
            coupon=repeats.coupon[here],
            coupon_ids=coupons.ids.take(pa.array(repeats.coupon[here])),
            reading_no=repeats.number[here],
        )
