"""The main job, stage by stage: a batch folder in, its results out, whole or not at all."""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from hashlib import sha256
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any, Final

import pyarrow as pa

from coldwork.inputs.method import Method
from coldwork.inputs.sheet import read_method
from coldwork.jobs.curve_points import CurvePoints
from coldwork.jobs.drawing import Drawing
from coldwork.jobs.expected_heat import HEAT_TABLE, has_heat
from coldwork.jobs.gather import Gathered, gather
from coldwork.jobs.kept import KeptReadings
from coldwork.jobs.lots import Lots
from coldwork.jobs.manifest import manifest_of
from coldwork.jobs.routes import ROUTES_TABLE
from coldwork.jobs.slices import Sliced, work_slice
from coldwork.results.documents import dump
from coldwork.results.lines import LineWriter
from coldwork.results.records import Common, Slice, build, seal
from coldwork.results.tables import TableWriter
from coldwork.results.target import open_target

__all__ = ["Outcome", "record_again", "run"]

Progress = Callable[[str], None]

_SLICE: Final = 1 << 14  # coupons that are worked at once
_FULL_SLICE: Final = 1 << 10  # the same where records are written, which are large
_ALWAYS: Final = ("coupons", "decisions", "flags", "lots", "set_aside")
_FULL: Final = ("quantities", "budget", "readings")


@dataclass(frozen=True)
class Outcome:
    """What a run came to.

    Attributes
    ----------
    path : Path
        Where the results stand.
    batch_id : str
        The batch.
    coupons, readings_read, readings_used, readings_set_aside : int
        Counts; used and set aside together are those read.
    decisions : mapping of str to int
        Coupons by decision.
    errors : int
        Coupons with a finding that empties something.
    incomplete : int
        Coupons that leave without a density or without its interval, errors aside.
    flags : mapping of str to mapping of str to int
        Findings by level and rule.
    plots : str
        What was drawn, or why nothing was.
    """

    path: Path
    batch_id: str
    coupons: int
    readings_read: int
    readings_used: int
    readings_set_aside: int
    decisions: Mapping[str, int]
    errors: int
    incomplete: int
    flags: Mapping[str, Mapping[str, int]]
    plots: str

    @property
    def attention(self) -> dict[str, int]:
        """What asks for a person, by the word that `--accept` takes, with its count."""
        asking = {
            "set-aside": self.readings_set_aside,
            "undecided": self.decisions["undecided"],
            "non-conforming": self.decisions["non-conforming"],
            "errors": self.errors,
            "incomplete": self.incomplete,
        }
        return {word: count for word, count in asking.items() if count}


def run(
    folder: Path,
    into: Path,
    *,
    replace: bool = False,
    reason: str | None = None,
    plots: bool = True,
    progress: Progress | None = None,
) -> Outcome:
    """Process a batch.

    Parameters
    ----------
    folder : Path
        The batch folder.
    into : Path
        Where results go, in a folder of the batch's id.
    replace : bool, optional
        Whether an existing result may move to ``replaced/``.
    reason : str, optional
        Why; required with `replace`.
    plots : bool, optional
        Whether to draw.
    progress : callable, optional
        Is told what is being done.

    Returns
    -------
    Outcome
        Counts, and where the results stand.

    Raises
    ------
    BatchRefused
        If the batch cannot be trusted as a whole; nothing is written.
    ResultsNotWritten
        If the results cannot be put there; nothing is left behind.
    """
    tell = progress or _silent
    started = datetime.now(UTC)
    method = read_method(folder)
    with open_target(into, method.batch_id, replace=replace, reason=reason) as target:
        full = method.detail == "full"
        tell("reading")
        points = _points_wanted(method, target.scratch)
        keep = target.scratch / "readings.arrow" if full else None
        batch, kept = gather(method, keep=keep, pictures=plots, points=points)
        drawing = Drawing(batch, wanted=plots)
        lots = Lots(batch)
        heat = (HEAT_TABLE,) if has_heat(method) else ()
        both = (ROUTES_TABLE,) if method.both else ()
        names = (*_ALWAYS, *heat, *both, *_of_curves(batch), *(_FULL if full else ()))
        tables = _Tables({name: target.table(name, method.tables) for name in names}, drawing)
        target.write("method.json", dump("method", batch.method.document))
        records = target.lines("records.jsonl") if full else None
        _work(batch, kept, lots, tables, records, tell)
        decisions = lots.write(tables.writers["lots"])
        for writer in tables.writers.values():
            writer.close()
        if points is not None:
            points.write(target.table("curve_points", ("parquet",)))
        tell("drawing" if drawing.wanted else "writing")
        for name, data in drawing.files():
            target.write(name, data)
        path = target.commit(manifest_of(batch, started))
    return Outcome(
        path=path,
        batch_id=method.batch_id,
        coupons=len(batch.coupons),
        readings_read=batch.readings_read,
        readings_used=batch.readings_used,
        readings_set_aside=batch.readings_set_aside,
        decisions=decisions,
        errors=batch.errors,
        incomplete=lots.incomplete,
        flags=batch.flag_counts,
        plots=drawing.said,
    )


def record_again(folder: Path, coupon: str) -> dict[str, Any]:
    """Compute one coupon's record from its batch folder, as a run in full detail would.

    Parameters
    ----------
    folder : Path
        The batch folder.
    coupon : str
        Its id; it must be there.

    Returns
    -------
    dict
        The record.
    """
    method = read_method(folder)
    with TemporaryDirectory(prefix="coldwork-") as scratch:
        batch, kept = gather(method, keep=Path(scratch) / "readings.arrow")
        place = int(batch.coupons.index(pa.array([coupon], pa.string()))[0])
        part = work_slice(batch, slice(place, place + 1), kept)
        return build(_common(batch), _record_slice(batch, part, batch.set_aside_table()))[0]


@dataclass(frozen=True)
class _Tables:
    """Where published tables go: to the disk, and to the plots that are drawn from them."""

    writers: Mapping[str, TableWriter]
    drawing: Drawing

    def write(self, name: str, table: pa.Table) -> None:
        """Take a slice of a table."""
        self.writers[name].write(table)
        self.drawing.add(name, table)


def _work(
    batch: Gathered,
    kept: KeptReadings | None,
    lots: Lots,
    tables: _Tables,
    records: LineWriter | None,
    tell: Progress,
) -> None:
    """Work the coupons slice by slice, and write what each slice comes to."""
    common = _common(batch)
    aside = batch.set_aside_table()
    tables.write("set_aside", aside)
    done = 0
    for rows in _slices(len(batch.coupons), _FULL_SLICE if kept else _SLICE):
        part = work_slice(batch, rows, kept)
        lots.add(part)
        shas = pa.nulls(part.n, pa.string())
        if records is not None:
            sealed = [seal(record) for record in build(common, _record_slice(batch, part, aside))]
            records.write([one.line for one in sealed])
            shas = pa.array([one.sha256 for one in sealed], pa.string())
        for name, table in part.tables(shas).items():
            tables.write(name, table)
        done += part.n
        tell(f"computing, {done} of {len(batch.coupons)} coupons")
    for piece in batch.flags():
        tables.write("flags", piece)
    if records is not None:
        records.close()


def _points_wanted(method: Method, scratch: Path) -> CurvePoints | None:
    wanted = method.tensile is not None and method.tensile.curve_points
    return CurvePoints(scratch / "points.arrow") if wanted else None


def _of_curves(batch: Gathered) -> tuple[str, ...]:
    """Name the tables that curves bring."""
    if batch.curves is None:
        return ()
    return ("tensile", "evolution") if batch.method.laws.route == "flow" else ("tensile",)


def _common(batch: Gathered) -> Common:
    method = batch.method
    inputs: Any = method.document["inputs"]
    digest = sha256(dump("method", method.document)).hexdigest()
    return Common(method.batch_id, digest, inputs)


def _record_slice(batch: Gathered, part: Sliced, aside: pa.Table) -> Slice:
    rows = part.rows
    paths = [source.name for source in batch.coupons.sources]
    tables = part.tables(pa.nulls(part.n, pa.string()))
    return Slice(
        coupons=tables["coupons"],
        files=[paths[i] for i in batch.coupons.file[rows]],
        lines=batch.coupons.line[rows].tolist(),
        raw=batch.coupons.raw[rows],
        readings=tables["readings"],
        raw_readings=part.raw_readings,
        set_aside=aside,
        quantities=tables["quantities"],
        flags=part.flags(),
        decisions=tables["decisions"],
        repeatability=part.repeatability(),
        steps=part.steps(),
        curves=part.curves(),
        sampling=part.sampling(),
    )


def _slices(n: int, size: int) -> Iterator[slice]:
    for begin in range(0, n, size):
        yield slice(begin, min(begin + size, n))


def _silent(_words: str) -> None:
    pass
