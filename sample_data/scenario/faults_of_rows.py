"""Planted faults, first batch: every reason for which a reading is set aside, and odd names."""

from typing import Final

from scenario.planting import HBW, HV10, Batch, five

__all__ = ["batch"]

_FIRST: Final = "indents-1.csv"
_SECOND: Final = "indents-2.csv"

_FORMULA: Final = "=7/A ä<b>"  # names that a careless program would run, drop or shorten
_NOTHING: Final = "NA"
_ZEROS: Final = "0012"
_BALL: Final = "PF1-B"

_SHEET: Final = """\
# Planted faults 1 (see ../FAULTS.csv): readings that cannot be used, each for a reason of its
# own, on coupons with names that a careless program would run, drop or shorten. Two files
# of indents, a blank line, and one reading that the head of the laboratory took out.

[batch]
id = "PF-1"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = ["indents-1.csv", "indents-2.csv"]
exclusions = "exclusions.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0 }

[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1

[indentation.HBW]
area = "projected"
constraint_factor = { value = 2.8, u = 0.15 }
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("set-aside", _SHEET, (_FIRST, _SECOND))
    for name in (_FORMULA, _NOTHING, _ZEROS):
        made.coupon(name, "rolled 30 %")
    made.coupon(_BALL, "rolled 30 %, ball")
    _cells(made)
    _excluded(made)
    _rows(made)
    made.turn_to(_SECOND)
    _scales(made)
    return made


def _numbers(number: float = 100.0) -> list[float]:
    return [*five(number), *five(number, turn=2)[:3]]


def _cells(made: Batch) -> None:
    """Cells that are no number, no time, empty or out of range."""
    changes = {
        2: {"d1_um": "431,7"},
        4: {"d1_um": "n/a", "dwell_s": "12 s"},
        7: {"d2_um": "-429.6"},
    }
    made.indents(_FORMULA, HV10, _numbers(), changes)
    made.fault("not-a-number", _FORMULA, 2, "a decimal comma in d1_um")
    made.fault("not-a-number", _FORMULA, 4, "n/a in d1_um, and a unit in dwell_s too")
    made.fault("out-of-range", _FORMULA, 7, "a negative diagonal")
    changes = {
        1: {"force_n": ""},
        3: {"measured_at": "31.07.2026 09:15"},
        6: {"d1_um": "", "d2_um": ""},
    }
    made.indents(_NOTHING, HV10, _numbers(), changes)
    made.fault("required-empty", _NOTHING, 1, "no force")
    made.fault("bad-time", _NOTHING, 3, "a time that is not ISO 8601")
    made.fault("required-empty", _NOTHING, 6, "neither diagonals nor a hardness")
    made.fault("under-five-readings", _NOTHING, None, "four of eight readings are left")


def _excluded(made: Batch) -> None:
    table = made.table(
        "exclusions.csv", ("coupon_id", "reading_no", "excluded_by", "excluded_at", "reason")
    )
    table.add(
        {
            "coupon_id": _NOTHING,
            "reading_no": "8",
            "excluded_by": "head of laboratory",
            "excluded_at": "2026-07-31T10:40:00+02:00",
            "reason": "the indent lies across a scratch, see the micrograph in the day book",
        }
    )
    made.fault("excluded", _NOTHING, 8, "exclusions.csv names it")


def _rows(made: Batch) -> None:
    """Rows that are torn, repeat a number, or belong to no coupon; and a blank line."""
    made.indents(_ZEROS, HV10, _numbers()[:6])
    line = made.reading(_ZEROS, 6, HV10.cells(99.2))
    place = (made.file, line)
    made.fault_at("repeated-reading", place, "a second indent numbered 6", _ZEROS, "6")
    made.line("")
    place = (made.file, made.line("0012,7,HV,98.07,430.1"))
    made.fault_at("row-width", place, "the row breaks off after five cells")
    made.reading(_ZEROS, 8, HV10.cells(100.4))
    place = (made.file, made.reading("0013", 1, HV10.cells(101.0)))
    made.fault_at("unlisted-coupon", place, "coupons.csv has no 0013", "0013", "1")


def _scales(made: Batch) -> None:
    """Indents of a ball: without the ball, wider than the ball, of an unknown scale."""
    changes = {
        2: {"ball_mm": ""},
        4: {"d1_um": "2610.0", "d2_um": "2590.0"},
        6: {"scale": "HRB"},
    }
    made.indents(_BALL, HBW, _numbers(92.0), changes)
    made.fault("ball-missing", _BALL, 2, "no ball_mm")
    made.fault("impossible-indent", _BALL, 4, "diameters wider than the ball of 2.5 mm")
    made.fault("unknown-scale", _BALL, 6, "HRB is no scale of this work")
