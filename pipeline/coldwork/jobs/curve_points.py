"""Points of curves on their way to ``curve_points.parquet``."""

from pathlib import Path
from typing import Final

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.contracts.arrays import arrow_type
from coldwork.reduce.curve import CurveResult
from coldwork.reduce.readings import Readings
from coldwork.results.disk import writing
from coldwork.results.tables import TableWriter

__all__ = ["CurvePoints"]

FloatArray = NDArray[np.float64]

_ROWS: Final = 1 << 16  # that are given at once


class CurvePoints:
    """Every used point of a batch's curves, in a temporary Arrow file.

    They wait there since curves that lie scattered over their files are read twice, and
    what was written of them must be forgotten.

    Parameters
    ----------
    path : Path
        The file; it need not exist.
    """

    def __init__(self, path: Path) -> None:
        fields = contracts.load("out/curve_points").fields
        self._path = path
        self._schema = pa.schema([(field.name, arrow_type(field)) for field in fields])
        self._writer: pa.ipc.RecordBatchFileWriter | None = None
        self.restart()

    def restart(self) -> None:
        """Forget what was written."""
        with writing(self._path):
            if self._writer is not None:
                self._writer.close()
            self._writer = pa.ipc.new_file(str(self._path), self._schema)

    def add(self, coupon_id: str, file: str, points: Readings, result: CurveResult) -> None:
        """Write the points of one curve.

        Parameters
        ----------
        coupon_id : str
            Name of the coupon.
        file : str
            Name of its file.
        points : Readings
            They, n.
        result : CurveResult
            What came of them.
        """
        if self._writer is None:
            message = "points are closed"
            raise RuntimeError(message)
        n = len(points)
        true = slice(result.true_start, result.true_start + result.true_stress.size)
        values = {
            "time_s": points.column("time_s"),
            "engineering_stress_mpa": units.from_si(result.engineering_stress, "MPa"),
            "engineering_strain": result.engineering_strain,
            "true_stress_mpa": units.from_si(_within(n, true, result.true_stress), "MPa"),
            "true_plastic_strain": _within(n, true, result.true_plastic_strain),
        }
        columns = {
            "coupon_id": pa.repeat(coupon_id, n),
            "point_no": pa.array(points.number),
            **{name: pa.array(x) for name, x in values.items()},
            "file": pa.repeat(file, n),
            "line": pa.array(points.lines),
        }
        table = pa.table([columns[name] for name in self._schema.names], schema=self._schema)
        with writing(self._path):
            self._writer.write_table(table)

    def write(self, target: TableWriter) -> None:
        """End the writing here, and write all points to their table, which is closed."""
        if self._writer is not None:
            with writing(self._path):
                self._writer.close()
            self._writer = None
        table = pa.ipc.open_file(pa.memory_map(str(self._path))).read_all()
        for start in range(0, len(table), _ROWS):
            target.write(table.slice(start, _ROWS))
        target.close()


def _within(n: int, place: slice, values: FloatArray) -> FloatArray:
    """Give `values` their place among n points, NaN elsewhere."""
    whole = np.full(n, np.nan)
    whole[place] = values
    return whole
