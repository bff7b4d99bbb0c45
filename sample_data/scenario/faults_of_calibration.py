"""Planted faults: a wire that is weaker than anything its calibration was found from."""

from hashlib import sha256
from typing import Final

from scenario.planting import Batch

__all__ = ["batch"]

_CONDITION: Final = "drawn to 1"

_SHEET: Final = """\
# Planted faults: copper wire worked with constants from a calibration (see ../FAULTS.csv).

[batch]
id = "PF-CALIBRATED"
laboratory = "laboratory beside the strip mill"
timezone = "UTC"

[material]
name = "copper"

[files]
coupons = "coupons.csv"
flow_stress = "flow_stress.csv"

[strength]
route = "flow"
baseline_mpa = { from = "calibration.toml" }

[hardening]
slope_n_per_m = { from = "calibration.toml" }

[character]
screw = 0.5
edge = 0.5
"""

_CALIBRATION: Final = """\
# Written by hand, seal and all. The table that it names was not kept.

[calibration]
schema_version = "1.0.0"
id = "copper-wire"
kind = "taylor"
version = "0.1.0"

[data]
path = "pairs.csv"
sha256 = "5a2c1f8e5f0f4f0d9d4f4f4f3b2a19080716253443526170f0e0d0c0b0a09080"
points = 12

[fit]
chi_squared = 9.3
degrees_of_freedom = 10
probability = 0.5
verdict = "as stated"
enlargement = 1.0

[[parameters]]
key = "strength.baseline_mpa"
value = 50.0
u = 2.0
unit = "MPa"
covariance = [4.0, -0.48]

[[parameters]]
key = "hardening.slope_n_per_m"
value = 10.3
u = 0.3
unit = "N/m"
covariance = [-0.48, 0.09]

[range]
quantity = "flow_stress_mpa"
low = 120.0
high = 420.0
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("calibrated", _SHEET, ("flow_stress.csv",), flow=True)
    for name, stress in (("PFC-01", 260.0), ("PFC-02", 95.0), ("PFC-03", 419.0)):
        made.coupon(name, _CONDITION)
        made.points(name, stress)
    made.fault("outside-calibration", "PFC-02", None, "95 MPa, and the range begins at 120 MPa")
    seal = sha256(_CALIBRATION.encode()).hexdigest()
    made.whole("calibration.toml", f'{_CALIBRATION}\n[seal]\nsha256 = "{seal}"\n')
    return made
