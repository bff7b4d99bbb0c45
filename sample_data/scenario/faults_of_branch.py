"""Planted faults: a stress that the logarithmic law cannot carry."""

from typing import Final

from scenario.planting import Batch

__all__ = ["batch"]

_CONDITION: Final = "drawn to 1"

_SHEET: Final = """\
# Planted faults 8 (see ../FAULTS.csv): steel wire worked by the logarithmic law, with one stress
# that was entered in psi over a hundred.

[batch]
id = "PF-8"
laboratory = "laboratory beside the strip mill"
timezone = "UTC"

[material]
name = "alpha-iron"
shear_modulus_gpa = { value = 82.0, u = 2.0 }
burgers_vector_nm = 0.2482

[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"

[strength]
route = "flow"
baseline_mpa = { value = 150.0, u = 10.0 }

[hardening]
law = "logarithmic"
reference_density_per_m2 = 1e14
taylor_factor = { value = 2.75, u = 0.12 }
coefficient = { value = 0.30, factor = 1.2 }

[character]
screw = 0.5
edge = 0.5
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("past-the-branch", _SHEET, ("flow_stress.csv",), flow=True)
    for name, stress in (("PF8-01", 660.0), ("PF8-02", 6600.0)):
        made.coupon(name, _CONDITION)
        made.points(name, stress)
    made.fault("stress-past-branch", "PF8-02", None, "660 MPa with the decimal point lost")
    return made
