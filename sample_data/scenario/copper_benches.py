"""The indents of *copper-strip* as two benches would have written them.

The same cells and the same force as in the tidy table, in files of our own invention;
no machine writes them. The first bench leaves one text file a coupon, in the code page
of its country: decimal commas, millimetres, lines above with what holds for all indents,
lines of averages below, a remark in between. The second leaves one file for all days,
in UTF-16 with tabs, kilonewtons and its own idea of a date; its coupons come as the
cutting shop's list.
"""

import csv
from collections.abc import Mapping, Sequence
from datetime import datetime
from decimal import ROUND_HALF_EVEN, Decimal
from typing import Final

from scenario import copper_strip

__all__ = ["files"]

FOLDER: Final = "copper-benches"
_ZERO_CELSIUS: Final = Decimal("273.15")  # K
_Row = Mapping[str, str]

_FIRST_LAYOUT: Final = """\
# The older bench: one text file a coupon, decimal commas, averages below the table.

[layout]
id = "bench-1"
fills = "indents"

[text]
encoding = "cp1252"
delimiter = ";"
decimal = ","
comment = "#"
table_starts_after = "READINGS FOLLOW"
units_line = true
ends_before = ["average", "spread"]  # kept, and compared with the rows
absent = ["", "---"]
times = "%d.%m.%Y %H:%M:%S %z"

[above]
coupon_id = "piece:"
operator = "by:"
tester = "machine:"
force_n = { from = "load:", unit = "N" }
dwell_s = { from = "held:", unit = "s" }

[columns]                            # the remark is passed over
indent_no = "no"
d1_um = { from = "across", unit = "mm" }
d2_um = { from = "along", unit = "mm" }
x_mm = "right"
y_mm = "up"
edge_mm = "rim"
temperature_c = { from = "air", unit = "C" }
measured_at = "when"

[constants]
scale = "HV"
"""

_SECOND_LAYOUT: Final = """\
# The newer bench: one file for all days, UTF-16, tabs, kilonewtons.

[layout]
id = "bench-2"
fills = "indents"

[text]
encoding = "utf-16"
delimiter = "tab"
decimal = "."
thousands = ","
header_line = 4
absent = ["n.m."]
times = "%m/%d/%Y %I:%M:%S %p"       # of the clock on the wall; the batch sheet names its zone

[columns]                            # Mean and HV are passed over
coupon_id = "Specimen"
indent_no = "Indent"
scale = "Method"
force_n = { from = "Load (kN)", unit = "kN" }
d1_um = "Diagonal A"
d2_um = "Diagonal B"
x_mm = { from = "X (µm)", unit = "um" }
y_mm = { from = "Y (µm)", unit = "um" }
edge_mm = "To edge (mm)"
dwell_s = { from = "Dwell", unit = "min" }
temperature_c = { from = "Room", unit = "K" }
measured_at = "Finished"
operator = "User"

[constants]
tester = "T1"
"""

_LIST_LAYOUT: Final = """\
# The list of the cutting shop: one coupon a line, filled up with spaces.

[layout]
id = "cutting-list"
fills = "coupons"

[text]
encoding = "utf-8"
delimiter = "|"
decimal = "."
comment = "*"
padded = true
times = "%d %b %Y"

[columns]                            # the shop's own number is passed over
coupon_id = "piece"
lot_id = "coil"
condition = "state"
prior_true_strain = "strain"
prior_plastic_work_j_per_m3 = "work, J/m3"
thickness_mm = { from = "thickness", unit = "mm" }
grain_size_um = { from = "grain", unit = "mm" }
u_grain_size_um = { from = "u of grain", unit = "mm" }
sampled_at = "cut"
"""


def files() -> dict[str, str | bytes]:
    """Make the batches: path and content of every file."""
    tidy = copper_strip.files()
    sheet = tidy[f"{copper_strip.FOLDER}/batch.toml"]
    coupons = tidy[f"{copper_strip.FOLDER}/coupons.csv"]
    indents = list(csv.DictReader(tidy[f"{copper_strip.FOLDER}/indents.csv"].splitlines()))
    listed = list(csv.DictReader(coupons.splitlines()))
    text, wide = f"{FOLDER}/bench-text", f"{FOLDER}/bench-utf-16"
    return {
        f"{FOLDER}/layouts/bench-1.toml": _FIRST_LAYOUT,
        f"{FOLDER}/layouts/bench-2.toml": _SECOND_LAYOUT,
        f"{FOLDER}/layouts/cutting-list.toml": _LIST_LAYOUT,
        f"{text}/batch.toml": _first_sheet(sheet),
        f"{text}/coupons.csv": coupons,
        **{
            f"{text}/raw/{row['coupon_id']}.txt": _first_bench(
                [each for each in indents if each["coupon_id"] == row["coupon_id"]]
            ).encode("cp1252")
            for row in listed
        },
        f"{wide}/batch.toml": _second_sheet(sheet),
        f"{wide}/cut.txt": _cutting_list(listed),
        f"{wide}/indents.txt": b"\xff\xfe" + _second_bench(indents).encode("utf-16-le"),
    }


def _first_sheet(sheet: str) -> str:
    return _changed(
        sheet,
        (
            "# The truth behind the batch is in truth.csv; generate.py made it.",
            "# The same readings as in copper-strip, as the older bench left them.",
        ),
        (
            'indents = "indents.csv"',
            'indents = { path = "raw/*.txt", layout = "../layouts/bench-1.toml" }',
        ),
    )


def _second_sheet(sheet: str) -> str:
    return _changed(
        sheet,
        (
            "# The truth behind the batch is in truth.csv; generate.py made it.",
            "# The same readings as in copper-strip, as the newer bench left them.",
        ),
        (
            'timezone = "UTC"                     # every time in the tables says its own zone',
            'timezone = "Etc/GMT-2"               # of the clock by the bench: two hours ahead',
        ),
        (
            'coupons = "coupons.csv"',
            'coupons = { path = "cut.txt", layout = "../layouts/cutting-list.toml" }',
        ),
        (
            'indents = "indents.csv"',
            'indents = { path = "indents.txt", layout = "../layouts/bench-2.toml" }',
        ),
    )


def _changed(sheet: str, *changes: tuple[str, str]) -> str:
    for old, new in changes:
        if old not in sheet:
            message = f"not in the sheet: {old}"
            raise ValueError(message)
        sheet = sheet.replace(old, new)
    return sheet


def _first_bench(rows: Sequence[_Row]) -> str:
    """Write one coupon's indents; every line ends with a return and a feed."""
    first = rows[0]
    lines = [
        "bench record;;form 7",
        f"piece:;{first['coupon_id']}",
        f"by:;{first['operator']}",
        f"machine:;{first['tester']};lens 20×",
        f"load:;{_comma(first['force_n'])};N",
        f"held:;{first['dwell_s']} s",
        "",
        "READINGS FOLLOW",
        "no;across;along;right;up;rim;air;when;remark",
        ";mm;mm;mm;mm;mm;°C;;",
    ]
    for row in rows:
        clock = datetime.fromisoformat(row["measured_at"])
        cells = (
            row["indent_no"],
            *(_comma(_shifted(row[name], -3)) for name in ("d1_um", "d2_um")),
            *(_comma(row[name]) for name in ("x_mm", "y_mm", "edge_mm", "temperature_c")),
            f"{clock:%d.%m.%Y %H:%M:%S} +02:00",
            "",
        )
        lines.append(";".join(cells))
        if row["indent_no"] == "4":
            lines.append("# lamp readjusted")
    diagonals = [[Decimal(_shifted(row[name], -3)) for row in rows] for name in ("d1_um", "d2_um")]
    means = [_comma(str(_rounded(sum(column) / len(column)))) for column in diagonals]
    spreads = [_comma(str(_rounded(_scatter(column)))) for column in diagonals]
    lines += [f"average;{';'.join(means)};---;---;---;---;;", f"spread;{';'.join(spreads)};;;;;;"]
    return "".join(f"{line}\r\n" for line in lines)


def _second_bench(rows: Sequence[_Row]) -> str:
    lines = [
        "Newer bench, strip laboratory",
        "Program\tHV10, two rows",
        "",
        "\t".join(
            (
                *("Specimen", "Indent", "Method", "Load (kN)", "Diagonal A", "Diagonal B", "Mean"),
                *("HV", "X (µm)", "Y (µm)", "To edge (mm)", "Dwell", "Room", "Finished", "User"),
            )
        ),
    ]
    for row in rows:
        mean = (Decimal(row["d1_um"]) + Decimal(row["d2_um"])) / 2
        number = Decimal("0.1891") * Decimal(row["force_n"]) * 1_000_000 / mean**2
        clock = datetime.fromisoformat(row["measured_at"])
        cells = (
            *(row["coupon_id"], row["indent_no"], row["scale"], _shifted(row["force_n"], -3)),
            *(row["d1_um"], row["d2_um"], f"{mean:.2f}", f"{number:.1f}"),
            *(f"{Decimal(row[name]).scaleb(3):,f}" for name in ("x_mm", "y_mm")),
            *(row["edge_mm"], str(Decimal(row["dwell_s"]) / 60)),
            str(Decimal(row["temperature_c"]) + _ZERO_CELSIUS),
            f"{clock:%m/%d/%Y %I:%M:%S %p}",
            row["operator"],
        )
        lines.append("\t".join(cells))
    return "".join(f"{line}\r\n" for line in lines)


def _cutting_list(rows: Sequence[_Row]) -> str:
    head = (
        *("no.", "piece", "coil", "state", "strain", "work, J/m3"),
        *("thickness", "grain", "u of grain", "cut"),
    )
    table = [head]
    for number, row in enumerate(rows, 1):
        day = datetime.fromisoformat(row["sampled_at"])
        table.append(
            (
                *(str(number), row["coupon_id"], row["lot_id"], row["condition"]),
                *(row["prior_true_strain"], row["prior_plastic_work_j_per_m3"]),
                row["thickness_mm"],
                *(_shifted(row[name], -3) for name in ("grain_size_um", "u_grain_size_um")),
                f"{day:%d %b %Y}",
            )
        )
    widths = [max(len(row[place]) for row in table) for place in range(len(head))]
    lines = [
        " | ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True))
        for row in table
    ]
    lines.insert(1, "* grain: linear intercept before rolling, in mm")
    return "".join(f"{line}\n" for line in lines)


def _shifted(number: str, places: int) -> str:
    """Write a decimal number with its point moved, every digit kept."""
    return f"{Decimal(number).scaleb(places):f}"


def _comma(number: str) -> str:
    return number.replace(".", ",")


def _rounded(number: Decimal) -> Decimal:
    """Give a length [mm] to a tenth of a micrometre."""
    return number.quantize(Decimal("0.0001"), ROUND_HALF_EVEN)


def _scatter(column: Sequence[Decimal]) -> Decimal:
    mean = sum(column) / len(column)
    squares = sum((each - mean) ** 2 for each in column)
    return (squares / (len(column) - 1)).sqrt()
