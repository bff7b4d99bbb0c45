"""Planted faults: a tester whose daily checks were skipped, forgotten or bad."""

from datetime import datetime, timedelta
from typing import Final

from scenario.planting import HV10, Batch, five
from scenario.tables import YARD_TIME, clock

__all__ = ["batch"]

_SHEET: Final = """\
# Planted faults: daily checks of a tester (see ../FAULTS.csv).

[batch]
id = "PF-CHECKED"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"
verification = "verification.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 5.0 }

[[testers]]
id = "T1"
bias_from = "verification"
"""

_COLUMNS: Final = (
    *("tester", "block_id", "certified_hardness", "u_certified_hardness", "hardness"),
    *("measured_at", "operator"),
)
_DAYS: Final = {0: 0.004, 1: 0.006, 4: 0.045, 5: 0.003}  # days after the first, and bias found
_PATTERN: Final = (-0.004, 0.003, 0.006, -0.003, -0.002)


def batch() -> Batch:
    """Make the batch."""
    made = Batch("checked", _SHEET, ("indents.csv",))
    first = datetime(2026, 7, 1, 8, 0, tzinfo=YARD_TIME)
    table = made.table("verification.csv", _COLUMNS)
    for day, bias in _DAYS.items():
        for i, spread in enumerate(_PATTERN):
            table.add(
                {
                    "tester": "T1",
                    "block_id": "B-100",
                    "certified_hardness": "100.4",
                    "u_certified_hardness": "0.5",
                    "hardness": f"{100.4 * (1.0 + bias + spread):.2f}",
                    "measured_at": clock(first + timedelta(days=day, minutes=i)),
                    "operator": "operator-1",
                }
            )
    for name, day in (("PFV-01", 1), ("PFV-02", 2), ("PFV-03", 4), ("PFV-04", 20)):
        made.coupon(name, f"rolled, tested on day {day}")
        at = first + timedelta(days=day, hours=3)
        changes = {no: {"measured_at": clock(at + timedelta(minutes=no))} for no in range(1, 6)}
        made.indents(name, HV10, five(90.0), changes)
    for no in range(1, 6):
        made.fault("tester-check-missing", "PFV-02", no, "no check on that day, one the day before")
        made.fault("tester-check-out-of-limits", "PFV-03", no, "that day's check was 4.5 % high")
        made.fault("tester-check-too-old", "PFV-04", no, "15 days after the last check")
    return made
