"""Planted faults: what coupons.csv says of the rolling against dimensions and flow curve."""

from typing import Final

from scenario.metal import hardening_work, rolling_strain
from scenario.planting import HV10, Batch, five

__all__ = ["batch"]

_SHEET: Final = """\
# Planted faults: strain and work of the rolling (see ../FAULTS.csv).

[batch]
id = "PF-WORK"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 5.0 }

[indentation]
initial_hardening_mpa = { value = 1700.0, u = 80.0 }
saturation_stress_mpa = { value = 320.0, u = 10.0 }

[prior_work]
from = "voce"
"""

_BEFORE: Final = 2.5  # thickness [mm]
_AFTER: Final = 2.0
_HARDNESS: Final = 100.0


def batch() -> Batch:
    """Make the batch."""
    made = Batch("rolled-from", _SHEET, ("indents.csv",), more=("rolled_from_mm", "rolled_to_mm"))
    strain = rolling_strain(1.0 - _AFTER / _BEFORE)
    work = 50e6 * strain + hardening_work(0.0, strain, 1700e6, 320e6)
    strip = {"rolled_from_mm": f"{_BEFORE}", "rolled_to_mm": f"{_AFTER}"}
    said = {"prior_true_strain": f"{strain:.3f}", "prior_plastic_work_j_per_m3": f"{work:.3e}"}
    for name, cells in (
        ("PFW-01", strip),
        ("PFW-02", strip | said),
        ("PFW-03", strip | {"prior_true_strain": "0.200"}),
        ("PFW-04", strip | said | {"prior_plastic_work_j_per_m3": f"{1.5 * work:.3e}"}),
        ("PFW-05", {"rolled_from_mm": f"{_AFTER}", "rolled_to_mm": f"{_BEFORE}"}),
        ("PFW-06", {"rolled_from_mm": f"{_BEFORE}"}),
    ):
        made.coupon(name, "rolled 20 %", cells)
        made.indents(name, HV10, five(_HARDNESS))
    made.fault("prior-strain-differs", "PFW-03", None, "the reduction, and no strain")
    made.fault("prior-work-differs", "PFW-04", None, "half as much again")
    made.fault("prior-dimensions", "PFW-05", None, "before and after have changed places")
    made.fault("prior-dimensions", "PFW-06", None, "no thickness after")
    return made
