"""Planted faults in files as instruments leave them: a bench, a day's list, a workbook."""

from collections.abc import Mapping, Sequence
from datetime import datetime
from typing import Final

from scenario.planting import HV10, Batch, five
from scenario.workbook_file import Cell, Formula, Percentage, Trouble, workbook

__all__ = ["batch"]

_CONDITION: Final = "rolled 30 %"
_NUMBER: Final = 100.0  # HV10
_CLOSED: Final = "PF11-01"
_CUT: Final = "PF11-02"
_BOOK: Final = "PF11-03"

_SHEET: Final = """\
# Planted faults 11 (see ../FAULTS.csv): files as instruments leave them. A bench whose average is
# not that of its rows, a day's list that breaks off, and a workbook with all that is wrong
# with workbooks.

[batch]
id = "PF-11"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = [
    { path = "piece.txt", layout = "piece.toml" },
    { path = "day.txt", layout = "day.toml" },
    { path = "book.xlsx", layout = "book.toml" },
]

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0 }

[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1
"""

_PIECE_LAYOUT: Final = """\
# One text file a coupon, decimal commas, an average below the table.

[layout]
id = "piece"
fills = "indents"

[text]
encoding = "utf-8"
delimiter = ";"
decimal = ","
header_line = 3
ends_before = ["average"]

[above]
coupon_id = "piece:"

[columns]
indent_no = "no"
d1_um = "across"
d2_um = "along"

[constants]
scale = "HV"
force_n = 98.07
tester = "T1"
"""

_DAY_LAYOUT: Final = """\
# One text file a day; its last line is ended like every other.

[layout]
id = "day"
fills = "indents"

[text]
encoding = "utf-8"
delimiter = "tab"
decimal = "."
header_line = 1

[columns]
coupon_id = "Piece"
indent_no = "No"
d1_um = "Across"
d2_um = "Along"

[constants]
scale = "HV"
force_n = 98.07
tester = "T1"
"""

_BOOK_LAYOUT: Final = """\
# One sheet, one indent a row.

[layout]
id = "book"
fills = "indents"

[workbook]
sheet = "Indents"
first_row = 1

[columns]
coupon_id = "Piece"
indent_no = "No"
d1_um = "Across"
d2_um = "Along"
temperature_c = "Room"

[constants]
scale = "HV"
force_n = 98.07
tester = "T1"
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("instruments", _SHEET, ())
    for name in (_CLOSED, _CUT, _BOOK):
        made.coupon(name, _CONDITION)
    _piece(made)
    _day(made)
    _book(made)
    return made


def _diagonals(turn: int = 0) -> list[tuple[str, str]]:
    kinds = [HV10.cells(number) for number in five(_NUMBER, turn=turn)]
    return [(cells["d1_um"], cells["d2_um"]) for cells in kinds]


def _piece(made: Batch) -> None:
    """Write a bench's file; the average of the first column has two digits the wrong way round."""
    lines = ["bench record", f"piece:;{_CLOSED}", "no;across;along"]
    pairs = _diagonals()
    lines += [f"{no};{d1};{d2}" for no, (d1, d2) in enumerate(pairs, 1)]
    first, second = (sum(float(pair[side]) for pair in pairs) / len(pairs) for side in (0, 1))
    swapped = f"{first:.1f}"
    swapped = swapped[0] + swapped[2] + swapped[1] + swapped[3:]
    lines.append(f"average;{swapped};{second:.1f}")
    made.whole("piece.txt", "".join(f"{line}\n" for line in lines).replace(".", ","))
    made.whole("piece.toml", _PIECE_LAYOUT)
    planted = "two digits of the printed average changed places"
    made.fault_at("printed-mean-differs", ("piece.txt", len(lines)), planted, _CLOSED)


def _day(made: Batch) -> None:
    """Write a list of a day; a sixth row breaks off within its last number."""
    lines = ["Piece\tNo\tAcross\tAlong"]
    lines += [f"{_CUT}\t{no}\t{d1}\t{d2}" for no, (d1, d2) in enumerate(_diagonals(1), 1)]
    lines.append(f"{_CUT}\t6\t{_diagonals()[0][0]}\t43")
    made.whole("day.txt", "\n".join(lines))
    made.whole("day.toml", _DAY_LAYOUT)
    made.fault_at("cut-off", ("day.txt", len(lines)), "the file breaks off in a number", _CUT, "6")


def _book(made: Batch) -> None:
    """Write a workbook: five sound rows, then a row for each thing that goes wrong in one."""
    rows: list[list[Cell]] = [["Piece", "No", "Across", "Along", "Room"]]
    sound = [(float(d1), float(d2)) for d1, d2 in _diagonals(2)]
    rows += [[_BOOK, float(no), d1, d2, 23.0] for no, (d1, d2) in enumerate(sound, 1)]
    d1, d2 = sound[0]
    wrong: Mapping[str, tuple[Sequence[Cell], str]] = {
        "hidden-row": ((d1, d2, 23.0), "somebody hid the row"),
        "merged-cell": ((d1, d2, 23.0), "one diagonal over both columns"),
        "formula-without-value": ((Formula("D2"), d2, 23.0), "saved without being worked out"),
        "cell-error": ((Trouble("#N/A"), d2, 23.0), "a look-up that found nothing"),
        "date-in-cell": ((d1, datetime(2026, 5, 3), 23.0), "3-5 was typed"),  # noqa: DTZ001 - a cell
        "shown-otherwise": ((d1, d2, Percentage(0.23)), "23 was typed into a cell of percentages"),
    }
    places = {}
    for reason, (cells, planted) in wrong.items():
        rows.append([_BOOK, float(len(rows)), *cells])
        places[reason] = len(rows)
        number = str(len(rows) - 1)
        made.fault_at(reason, ("book.xlsx!Indents", len(rows)), planted, _BOOK, number)
    merged = (f"C{places['merged-cell']}:D{places['merged-cell']}",)
    made.whole("book.xlsx", workbook({"Indents": rows}, {places["hidden-row"]}, merged))
    made.whole("book.toml", _BOOK_LAYOUT)
