"""Readings that wait on the disk until their coupons' records are written."""

from collections.abc import Sequence
from pathlib import Path
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.intake.coupons import Coupons
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import ReadingResults
from coldwork.results.disk import writing
from coldwork.rules.bits import rule_ids
from coldwork.rules.forces import SCALES

__all__ = ["KeptReadings"]

RAW: Final = "raw:"  # before the name of a column, its cell as written
_TEXTS: Final = ("measured_at", "operator", "tester")
_PLACES: Final = ("x_mm", "y_mm")
_NUMBERS: Final = ("force", "mean_diagonal", "strength", "plastic_strain", "weight", *_PLACES)

_Column: TypeAlias = "pa.Array[Any] | pa.ChunkedArray[Any]"


class KeptReadings:
    """Readings of a batch in a temporary Arrow file, read back coupon by coupon.

    Parameters
    ----------
    path : Path
        The file; it need not exist.
    columns : sequence of str
        Every name that a cell as written may stand under.
    """

    def __init__(self, path: Path, columns: Sequence[str]) -> None:
        self._path = path
        self._columns = tuple(columns)
        self._schema = pa.schema(
            [("coupon", pa.int32()), ("file", pa.int64()), ("line", pa.int64())]
            + [("reading_no", pa.int64()), ("scale", pa.int8())]
            + [(name, pa.float64()) for name in _NUMBERS]
            + [(name, pa.string()) for name in ("flags", *_TEXTS)]
            + [(RAW + name, pa.string()) for name in self._columns]
        )
        self._writer: pa.ipc.RecordBatchFileWriter | None = None
        self._table: pa.Table | None = None
        self._order: NDArray[np.intp] = np.zeros(0, dtype=np.intp)
        self._starts: NDArray[np.intp] = np.zeros(1, dtype=np.intp)
        self.restart()

    def restart(self) -> None:
        """Forget what was written."""
        with writing(self._path):
            if self._writer is not None:
                self._writer.close()
            self._writer = pa.ipc.new_file(str(self._path), self._schema)

    def add(self, readings: Readings, results: ReadingResults) -> None:
        """Write a stretch of readings with what each came to."""
        n = len(readings)
        blank = pa.nulls(n, pa.string())
        raw = readings.raw.combine_chunks()
        numbers: dict[str, NDArray[Any]] = {
            "coupon": readings.coupon,
            "file": readings.file,
            "line": readings.lines,
            "reading_no": readings.number,
            "scale": results.scale,
            "force": results.force,
            "mean_diagonal": results.mean_diagonal,
            "strength": results.strength,
            "plastic_strain": results.plastic_strain,
            "weight": results.weight,
            **{name: readings.column(name) for name in _PLACES},
        }
        columns: dict[str, _Column] = {
            **{name: pa.array(x, self._schema.field(name).type) for name, x in numbers.items()},
            "flags": rule_ids(results.marks),
            **{name: readings.texts.get(name, blank) for name in _TEXTS},
            **{
                RAW + name: raw[name] if name in raw.column_names else blank
                for name in self._columns
            },
        }
        if self._writer is None:
            message = "readings are closed"
            raise RuntimeError(message)
        table = pa.table([columns[name] for name in self._schema.names], schema=self._schema)
        with writing(self._path):
            self._writer.write_table(table)

    def close(self, coupons: int) -> None:
        """End the writing and index the file by coupon."""
        if self._writer is not None:
            with writing(self._path):
                self._writer.close()
            self._writer = None
        self._table = pa.ipc.open_file(pa.memory_map(str(self._path))).read_all()
        coupon = self._table["coupon"].to_numpy()
        self._order = np.lexsort(
            (self._table["line"].to_numpy(), self._table["file"].to_numpy(), coupon)
        )
        self._starts = np.searchsorted(coupon[self._order], np.arange(coupons + 1))

    def of(self, rows: slice) -> pa.Table:
        """Give the readings of a slice of coupons, by coupon, in file order within each."""
        if self._table is None:
            message = "readings are still being written"
            raise RuntimeError(message)
        order = self._order[self._starts[rows.start] : self._starts[rows.stop]]
        return self._table.take(pa.array(order, pa.int64())).combine_chunks()

    @staticmethod
    def published(kept: pa.Table, coupons: Coupons, route: str, files: list[str]) -> pa.Table:
        """Bring readings into the columns and units of ``readings.csv``.

        Parameters
        ----------
        kept : pyarrow.Table
            From `of`.
        coupons : Coupons
            For their names.
        route : str
            ``indent`` or ``flow``.
        files : list of str
            Names of the source files.

        Returns
        -------
        pyarrow.Table
            Row for row.
        """
        contract = contracts.load("out/readings")
        strength = kept["strength"].to_numpy()
        missing = np.full(len(kept), np.nan)
        indent = route == "indent"
        numbers = {
            "force_n": kept["force"].to_numpy(),
            "mean_diagonal_um": kept["mean_diagonal"].to_numpy(),
            "hardness": strength if indent else missing,
            "flow_stress_mpa": missing if indent else strength,
            "plastic_strain": kept["plastic_strain"].to_numpy(),
            "weight": kept["weight"].to_numpy(),
        }
        scale = kept["scale"].to_numpy()
        columns: dict[str, _Column] = {
            "coupon_id": coupons.ids.take(pa.array(kept["coupon"].to_numpy(), pa.int32())),
            "reading_no": kept["reading_no"],
            "route": pa.repeat(route, len(kept)),
            "scale": pa.array(SCALES).take(pa.array(scale, mask=scale < 0)),
            **{
                name: pa.array(units.from_si(x, contract.field(name).unit or "1"))
                for name, x in numbers.items()
            },
            **{name: kept[name] for name in (*_PLACES, *_TEXTS)},
            "flags": kept["flags"],
            "file": pa.array(files, pa.string()).take(
                pa.array(kept["file"].to_numpy(), pa.int64())
            ),
            "line": kept["line"],
        }
        return pa.table([columns[name] for name in contract.columns], list(contract.columns))

    @staticmethod
    def raw(kept: pa.Table) -> pa.Table:
        """Give the cells as written, one column for each that the file had."""
        names = [name for name in kept.column_names if name.startswith(RAW)]
        return kept.select(names).rename_columns([name.removeprefix(RAW) for name in names])
