"""Planted faults: temperatures that a strength cannot be brought from."""

from typing import Final

from scenario.planting import Batch

__all__ = ["batch"]

_CONDITION: Final = "rolled 20 %"
_STRESS: Final = 250.0

_SHEET: Final = """\
# Planted faults 12 (see ../FAULTS.csv): compression tests cold and warm, brought to 23 degrees.

[batch]
id = "PF-12"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"

[strength]
route = "flow"
baseline_mpa = { value = 50.0, u = 5.0 }

[temperature]
reference_c = 23.0
correction = "modulus"
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("cold-and-warm", _SHEET, ("flow_stress.csv",), flow=True)
    for name, kelvin in (
        ("PF12-01", "-196.0"),
        ("PF12-02", "200.0"),
        ("PF12-03", "-269.0"),
        ("PF12-04", "700.0"),
        ("PF12-05", "1200.0"),
    ):
        made.coupon(name, _CONDITION)
        made.points(name, _STRESS, temperature=kelvin)
    made.coupon("PF12-06", _CONDITION)
    made.points("PF12-06", _STRESS, temperature="200.0", last_temperature="23.0")
    made.fault("temperature-far", "PF12-03", None, "in liquid helium")
    made.fault("temperature-far", "PF12-04", None, "700 degrees, where copper melts at 1085")
    made.fault("no-shear-modulus", "PF12-05", None, "fahrenheit under the name of Celsius")
    made.fault("mixed-temperatures", "PF12-06", None, "two points at 200 degrees, one at 23")
    return made
