"""Planted faults: indents and flow curve of one coupon that do not tell the same."""

from typing import Final

from scenario.planting import HV10, Batch, five

__all__ = ["batch"]

_CONDITION: Final = "rolled 20 %"
_POINTS: Final = "flow_stress.csv"
_HARDNESS: Final = 97.0
_STRESS: Final = 290.0  # which is what that hardness says, once both are unwound [MPa]

_SHEET: Final = """\
# Planted faults (see ../FAULTS.csv): hardness and compression of the same coupons, joined.

[batch]
id = "PF-TWO-ROUTES"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"
flow_stress = "flow_stress.csv"

[strength]
route = "both"
baseline_mpa = { value = 50.0, u = 5.0 }

[indentation]
constraint_factor = { value = 3.0, u = 0.15 }
representative_strain = { value = 0.08, u = 0.005 }
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0

[flow]
plastic_strain = 0.002
"""


def batch() -> Batch:
    """Make the batch: coupons of both routes, one of indents alone, one of a flow curve alone."""
    made = Batch("two-routes", _SHEET, ("indents.csv",), points=(_POINTS,))
    names = ["PF-TR-01", "PF-TR-02", "PF-TR-03", "PF-TR-04"]
    for name in names:
        made.coupon(name, _CONDITION)
    for name in names[:3]:
        made.indents(name, HV10, five(_HARDNESS))
    made.turn_to(_POINTS)
    made.points(names[0], _STRESS)
    made.points(names[1], 1.25 * _STRESS)
    made.points(names[3], 0.99 * _STRESS)
    made.fault(
        "routes-disagree", names[1], None, "the load cell of the press reads a quarter too high"
    )
    return made
