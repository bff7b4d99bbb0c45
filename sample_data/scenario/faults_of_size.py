"""Planted faults: small indents whose size effect is fitted, or cannot be."""

from typing import Final

from scenario.metal import sized_hardness
from scenario.planting import Batch, Kind, five

__all__ = ["batch"]

_SHEET: Final = """\
# Planted faults: small indents, their size effect fitted (see ../FAULTS.csv).

[batch]
id = "PF-SMALL"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 5.0 }

[indentation]
size_effect = "fitted"
"""

_FORCES: Final = ("0.4903", "2.942", "19.61")
_BULK: Final = 80.0  # HV of a large indent
_DEPTH: Final = 3.0  # characteristic depth [um]


def _read(force: str) -> list[float]:
    return five(sized_hardness(float(force), _BULK, _DEPTH))


def batch() -> Batch:
    """Make the batch."""
    made = Batch("small-indents", _SHEET, ("indents.csv",))
    made.coupon("PFS-01", "rolled 10 %")
    for force in _FORCES:
        made.indents("PFS-01", Kind("HV", force), _read(force))
    made.reading("PFS-01", 16, {"force_n": "0.009807", "d1_um": "1.3", "d2_um": "1.3"})
    made.coupon("PFS-02", "rolled 10 %")
    small = {no: {"force_n": "0.04903"} for no in range(1, 6)}
    made.indents("PFS-02", Kind("HV", _FORCES[0]), _read(_FORCES[0]), small)
    made.coupon("PFS-03", "rolled 30 %")
    made.indents("PFS-03", Kind("HV", _FORCES[0]), _read(_FORCES[0]))
    made.fault("shallow-indent", "PFS-01", 16, "1.3 um wide, so 0.19 um deep")
    made.fault("size-effect-too-large", "PFS-02", None, "forces typed ten times too small")
    made.fault("size-effect-unfitted", "PFS-03", None, "one force alone in its condition")
    return made
