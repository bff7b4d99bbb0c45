"""Planted faults, fifth batch: flow curves of wire, and stresses that cannot be."""

from typing import Final

from scenario.planting import Batch

__all__ = ["batch"]

_CONDITION: Final = "drawn to 1"

_SHEET: Final = """\
# Planted faults 5 (see ../FAULTS.csv): flow curves of steel wire with points in the wrong place
# and stresses that slipped by a digit or lie on, below and far below the baseline.

[batch]
id = "PF-5"
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

[flow]
plastic_strain = 0.002

[hardening]
law = "constant"
taylor_factor = { value = 2.75, u = 0.12 }
coefficient = { value = 0.30, factor = 1.2 }

[character]
screw = 0.5
edge = 0.5
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("flow-curves", _SHEET, ("flow_stress.csv",), flow=True)
    _coupon(made, "PF5-01", 660.0)
    made.coupon("PF5-02", _CONDITION)
    made.points("PF5-02", 655.0, (0.0008, 0.0014, 0.0041))
    made.coupon("PF5-03", _CONDITION)
    made.points("PF5-03", 672.0, (0.0040, 0.0061, 0.0103))
    made.fault("no-flow-stress-at-strain", "PF5-03", None, "the curve begins at 0.004")
    _coupon(made, "PF5-04", 6600.0)
    made.fault("density-impossible", "PF5-04", None, "660 MPa with the decimal point lost")
    _coupon(made, "PF5-05", 2600.0)
    made.fault("density-unusual", "PF5-05", None, "a stress of patented rope wire")
    _near_the_baseline(made)
    made.coupon("PF5-10", "drawn to 1, straightened")
    made.points("PF5-10", 640.0, (0.0020,))
    made.fault("no-repeatability", "PF5-10", None, "one point, alone in its condition")
    return made


def _near_the_baseline(made: Batch) -> None:
    """Add stresses on both sides of the baseline of 150 MPa, which is uncertain by 10."""
    _coupon(made, "PF5-06", 175.0)
    made.fault("weak-signal", "PF5-06", None, "25 MPa above the baseline")
    _coupon(made, "PF5-07", 150.6)
    made.fault("density-too-low", "PF5-07", None, "0.6 MPa above the baseline")
    made.fault("weak-signal", "PF5-07", None, "0.6 MPa above the baseline")
    _coupon(made, "PF5-08", 147.0)
    made.fault("below-baseline", "PF5-08", None, "3 MPa below the baseline")
    _coupon(made, "PF5-09", 100.0)
    made.fault("below-baseline", "PF5-09", None, "50 MPa below the baseline")
    made.fault("baseline-contradicted", "PF5-09", None, "50 MPa below the baseline")


def _coupon(made: Batch, name: str, stress: float) -> None:
    made.coupon(name, _CONDITION)
    made.points(name, stress)
