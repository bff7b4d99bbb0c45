"""The indents of *copper-strip* as a workbook that somebody keeps by hand.

The same cells and the same force, in the units and the order that the keeper likes:
diagonals in millimetre, times as the clock on the wall showed them, a title and a
tester over the table, a units row, a column that is worked out, remarks, and a second
sheet that is nobody's business.
"""

import csv
from datetime import datetime
from decimal import Decimal
from typing import Final

from scenario import copper_strip
from scenario.workbook_file import Cell, Formula, workbook

__all__ = ["files"]

LAYOUTS: Final = "copper-benches/layouts"
FOLDER: Final = "copper-benches/workbook"
_HEADER: Final = (
    *("Coupon", "Indent", "Force", "Diagonal 1", "Diagonal 2", "Mean", "x", "y", "Edge"),
    *("Dwell", "Temp.", "Time", "By", "Remark"),
)
_UNITS: Final = ("", "", "N", "mm", "mm", "mm", "mm", "mm", "mm", "s", "°C", "", "", "")
_FIRST: Final = 6  # row of the first indent

_LAYOUT: Final = """\
# The workbook of the laboratory beside the strip mill: one sheet, one indent a row.

[layout]
id = "strip-book"
fills = "indents"

[workbook]
sheet = "Indents"
first_row = 4                        # the header's row
units_line = true                    # row 5

[above]
tester = "Tester:"

[columns]                            # Mean and Remark are passed over
coupon_id = "Coupon"
indent_no = "Indent"
force_n = { from = "Force", unit = "N" }
d1_um = { from = "Diagonal 1", unit = "mm" }
d2_um = { from = "Diagonal 2", unit = "mm" }
x_mm = { from = "x", unit = "mm" }
y_mm = { from = "y", unit = "mm" }
edge_mm = { from = "Edge", unit = "mm" }
dwell_s = { from = "Dwell", unit = "s" }
temperature_c = { from = "Temp.", unit = "C" }
measured_at = "Time"                 # cells that hold a time: the sheet of the batch names the zone
operator = "By"

[constants]
scale = "HV"
"""


def files() -> dict[str, str | bytes]:
    """Make the batch: path and content of every file."""
    tidy = copper_strip.files()
    return {
        f"{FOLDER}/batch.toml": _sheet(tidy[f"{copper_strip.FOLDER}/batch.toml"]),
        f"{FOLDER}/coupons.csv": tidy[f"{copper_strip.FOLDER}/coupons.csv"],
        f"{FOLDER}/indents.xlsx": _book(tidy[f"{copper_strip.FOLDER}/indents.csv"]),
        f"{LAYOUTS}/strip-book.toml": _LAYOUT,
    }


def _sheet(text: str) -> str:
    zone = 'timezone = "Etc/GMT-2"               # of the clock by the bench: two hours ahead'
    for old, new in (
        ('timezone = "UTC"                     # every time in the tables says its own zone', zone),
        (
            'indents = "indents.csv"',
            'indents = { path = "indents.xlsx", layout = "../layouts/strip-book.toml" }',
        ),
        (
            "# The truth behind the batch is in truth.csv; generate.py made it.",
            "# The same readings as in copper-strip, from the workbook that the laboratory keeps.",
        ),
    ):
        if old not in text:
            message = f"not in the sheet: {old}"
            raise ValueError(message)
        text = text.replace(old, new)
    return text


def _book(indents: str) -> bytes:
    rows: list[list[Cell]] = [
        ["Copper strip, indents after each pass"],
        ["Tester:", "T1", None, "HV10, the block near 100 HV10 read before each round"],
        [],
        list(_HEADER),
        [unit or None for unit in _UNITS],
    ]
    for number, row in enumerate(csv.DictReader(indents.splitlines()), _FIRST):
        rows.append(_indent(row, number))
    notes: list[list[Cell]] = [["To do"], ["order a new lamp"], ["ask for the rods of coil 419"]]
    return workbook({"Indents": rows, "Notes": notes})


def _indent(row: dict[str, str], number: int) -> list[Cell]:
    d1, d2 = (float(Decimal(row[name]).scaleb(-3)) for name in ("d1_um", "d2_um"))
    wall = datetime.fromisoformat(row["measured_at"]).replace(tzinfo=None)
    return [
        row["coupon_id"],
        float(row["indent_no"]),
        float(row["force_n"]),
        d1,
        d2,
        Formula(f"AVERAGE(D{number}:E{number})", (d1 + d2) / 2.0),
        float(row["x_mm"]),
        float(row["y_mm"]),
        float(row["edge_mm"]),
        float(row["dwell_s"]),
        float(row["temperature_c"]),
        wall,
        row["operator"],
        "lamp flickers" if number == _FIRST + 11 else None,
    ]
