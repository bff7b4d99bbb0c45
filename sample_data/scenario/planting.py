"""A batch with faults in the making: rows as a laboratory writes them, and where each one stands.

Readings scatter by a fixed pattern instead of a random one, so that nothing fires by
chance: what the list of faults does not name, is not there.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Final

from scenario.metal import brinell_diameter, knoop_diagonal, vickers_diagonal
from scenario.tables import YARD_TIME, Table, clock

__all__ = ["HBW", "HK1", "HV5", "HV10", "HV_LIGHT", "Batch", "Fault", "Kind", "five"]

_PATTERN: Final = (-0.010, 0.004, 0.011, -0.006, 0.001)  # relative, of five readings; sums to 0
_POINTS: Final = (-0.004, 0.001, 0.003)  # and of three points of a flow curve
_NEAR: Final = (0.0018, 0.0020, 0.0022)  # plastic strains that are repeats at 0.002
_STEP: Final = 4.0  # between indents [mm]
_COUPON_COLUMNS: Final = (
    *("coupon_id", "lot_id", "condition", "prior_true_strain", "prior_plastic_work_j_per_m3"),
    *("thickness_mm", "grain_size_um", "sampled_at"),
)
_INDENT_COLUMNS: Final = (
    *("coupon_id", "indent_no", "scale", "force_n", "d1_um", "d2_um", "hardness", "ball_mm"),
    *("x_mm", "y_mm", "edge_mm", "dwell_s", "temperature_c", "measured_at", "operator", "tester"),
)
_POINT_COLUMNS: Final = (
    *("coupon_id", "reading_no", "plastic_strain", "flow_stress_mpa", "temperature_c"),
    *("measured_at", "operator"),
)


@dataclass(frozen=True)
class Kind:
    """A kind of indent.

    Attributes
    ----------
    scale : str
        ``HV``, ``HBW`` or ``HK``.
    force : str
        Test force as it is written. [N]
    ball : str
        Ball diameter as it is written, empty where there is none. [mm]
    """

    scale: str
    force: str
    ball: str = ""

    def cells(self, number: float, askew: float = 0.001) -> dict[str, str]:
        """Give the cells of an indent of a hardness number; `askew` is half the difference."""
        force = float(self.force)
        cells = {"scale": self.scale, "force_n": self.force, "ball_mm": self.ball}
        if self.scale == "HK":
            return cells | {"d1_um": f"{knoop_diagonal(force, number):.1f}"}
        if self.scale == "HBW":
            mean = brinell_diameter(force, number, float(self.ball) / 1e3)
        else:
            mean = vickers_diagonal(force, number)
        first, second = mean * (1.0 + askew), mean * (1.0 - askew)
        return cells | {"d1_um": f"{first:.1f}", "d2_um": f"{second:.1f}"}


HV10: Final = Kind("HV", "98.07")
HV5: Final = Kind("HV", "49.03")
HV_LIGHT: Final = Kind("HV", "0.09807")
HK1: Final = Kind("HK", "9.807")
HBW: Final = Kind("HBW", "612.9", "2.5")  # HBW 2.5/62.5


@dataclass(frozen=True)
class Fault:
    """One line of the list of faults; texts as the list holds them."""

    batch: str
    coupon_id: str
    reading_no: str
    rule_or_reason: str
    file: str
    line: int
    planted: str


def five(number: float, *, turn: int = 0, spread: float = 1.0) -> list[float]:
    """Scatter five readings about a number by the pattern, begun at place `turn` of it."""
    return [number * (1.0 + spread * _PATTERN[(i + turn) % 5]) for i in range(5)]


class Batch:
    """One batch with faults in the making.

    Parameters
    ----------
    folder : str
        Its folder below ``planted-faults``.
    sheet : str
        Its batch sheet.
    readings : sequence of str
        Tidy files of readings, indents or points; the first one is written to first.
    flow : bool
        Whether the readings are points of flow curves.
    more : sequence of str, optional
        Further columns of its coupons.
    points : sequence of str
        Tidy files of points that stand beside indents.
    """

    def __init__(
        self,
        folder: str,
        sheet: str,
        readings: Sequence[str],
        *,
        flow: bool = False,
        more: Sequence[str] = (),
        points: Sequence[str] = (),
    ) -> None:
        self.folder = folder
        self.faults: list[Fault] = []
        self._sheet = sheet
        self._coupons = Table((*_COUPON_COLUMNS, *more))
        columns = _POINT_COLUMNS if flow else _INDENT_COLUMNS
        self._readings = {name: Table(columns) for name in readings}
        self._readings |= {name: Table(_POINT_COLUMNS) for name in points}
        self._file = readings[0] if readings else ""
        self._extra: dict[str, Table] = {}
        self._whole: dict[str, str | bytes] = {}
        self._clock = datetime(2026, 7, 30, 8, 0, tzinfo=YARD_TIME)
        self._count: dict[str, int] = {}
        self._places: dict[tuple[str, str], tuple[str, int]] = {}

    def files(self) -> dict[str, str | bytes]:
        """Give path and content of every file of the batch."""
        tables = {"coupons.csv": self._coupons, **self._readings, **self._extra}
        texts = {name: table.text() for name, table in tables.items()}
        files = {"batch.toml": self._sheet, **texts, **self._whole}
        return {f"planted-faults/{self.folder}/{name}": content for name, content in files.items()}

    def turn_to(self, file: str) -> None:
        """Write what follows to another file of readings."""
        self._file = file

    def table(self, file: str, columns: Sequence[str]) -> Table:
        """Start a further table."""
        return self._extra.setdefault(file, Table(columns))

    def whole(self, file: str, content: str | bytes) -> None:
        """Add a file as an instrument left it, or its layout."""
        self._whole[file] = content

    def coupon(self, name: str, condition: str, cells: Mapping[str, str] | None = None) -> None:
        """Add a coupon."""
        usual = {
            "coupon_id": name,
            "lot_id": "shelf",
            "condition": condition,
            "thickness_mm": "2.0",
            "grain_size_um": "20",
            "sampled_at": "2026-07-29",
        }
        line = self._coupons.add(usual | dict(cells or {}))
        self._places[name, ""] = ("coupons.csv", line)

    def indents(
        self,
        name: str,
        kind: Kind,
        numbers: Sequence[float],
        changes: Mapping[int, Mapping[str, str]] | None = None,
    ) -> None:
        """Add indents of these hardness numbers, some with changed cells, by indent number."""
        for number in numbers:
            no = self._count.get(name, 0) + 1
            changed = (changes or {}).get(no, {})
            self.reading(name, no, kind.cells(number) | dict(changed))

    def reading(self, name: str, no: int, cells: Mapping[str, str]) -> int:
        """Add one indent at its usual place, with cells changed; tell its line."""
        x = 5.0 + _STEP * (no - 1)
        usual = {
            "coupon_id": name,
            "indent_no": str(no),
            "x_mm": f"{x:.2f}",
            "y_mm": "6.00",
            "edge_mm": f"{min(x, 6.0):.2f}",
            "dwell_s": "12",
            "temperature_c": "23.0",
            "measured_at": self._tick(),
            "operator": "operator-1",
            "tester": "T1",
        }
        line = self._readings[self._file].add(usual | dict(cells))
        self._count[name] = max(no, self._count.get(name, 0))
        self._places.setdefault((name, str(no)), (self._file, line))
        return line

    def points(
        self,
        name: str,
        stress: float,
        strains: Sequence[float] = _NEAR,
        *,
        temperature: str = "23.0",
        last_temperature: str | None = None,
    ) -> None:
        """Add points of a flow curve, scattered by the pattern about one stress [MPa]."""
        table = self._readings[self._file]
        temperatures = [temperature] * len(strains)
        temperatures[-1] = last_temperature or temperature
        for no, (strain, spread) in enumerate(zip(strains, _POINTS, strict=False), start=1):
            line = table.add(
                {
                    "coupon_id": name,
                    "reading_no": str(no),
                    "plastic_strain": f"{strain:.4f}",
                    "flow_stress_mpa": f"{stress * (1.0 + spread):.2f}",
                    "temperature_c": temperatures[no - 1],
                    "measured_at": self._tick(),
                    "operator": "operator-3",
                }
            )
            self._places[name, str(no)] = (self._file, line)

    def line(self, text: str) -> int:
        """Add a line of readings as it is; tell its number."""
        return self._readings[self._file].add_line(text)

    def fault(self, rule: str, name: str, no: int | None, planted: str) -> None:
        """List a fault of a reading, or of a coupon, where it was added."""
        number = "" if no is None else str(no)
        self.fault_at(rule, self._places[name, number], planted, name, number)

    def fault_at(
        self, rule: str, place: tuple[str, int], planted: str, name: str = "", number: str = ""
    ) -> None:
        """List a fault at a file and line."""
        self.faults.append(Fault(self.folder, name, number, rule, *place, planted))

    def fault_of_sheet(self, rule: str, key: str, planted: str) -> None:
        """List a fault of the batch sheet, at the line of a key."""
        lines = [line.split(" ")[0] for line in self._sheet.splitlines()]
        self.fault_at(rule, ("batch.toml", lines.index(key) + 1), planted)

    @property
    def file(self) -> str:
        """The file of readings that is being written."""
        return self._file

    def _tick(self) -> str:
        self._clock += timedelta(seconds=90)
        return clock(self._clock)
