"""Planted faults, third and fourth batch: what coupons.csv says, and where it is needed."""

from typing import Final

from scenario.planting import HBW, HK1, HV10, Batch, five

__all__ = ["baseline_batch", "radius_batch"]

_NUMBER: Final = 100.0
_CONDITION: Final = "rolled 30 %"

_BASELINE_SHEET: Final = """\
# Planted faults 3 (see ../FAULTS.csv): the baseline is made of a friction stress and a term in
# the grain size, so what coupons.csv says of the grains is needed; so is what it says of the
# plastic work, where a stored fraction is wanted. Brinell and Knoop have their constants here.

[batch]
id = "PF-3"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
friction_mpa = { value = 25.5, u = 8.0 }
hall_petch_mpa_m05 = { value = 0.11, u = 0.03 }

[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1

[indentation.HBW]
area = "projected"
constraint_factor = { value = 2.8, u = 0.15 }

[indentation.HK]
area = "projected"
constraint_factor = { value = 3.1, u = 0.2 }
representative_strain = { value = 0.08, u = 0.005 }
"""

_RADIUS_SHEET: Final = """\
# Planted faults 4 (see ../FAULTS.csv): the outer radius is the grain size, the Taylor coefficient
# is uncertain by a fifth and still called normal, and nothing takes the indent's strain out.

[batch]
id = "PF-4"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0 }

[indentation]
resolution_um = 0.1

[hardening]
law = "constant"
taylor_factor = { value = 3.06, u = 0.15 }
coefficient = { value = 0.30, u = 0.06 }

[line_energy]
outer_radius = "grain"
"""


def baseline_batch() -> Batch:
    """Make the batch whose baseline needs the grain size."""
    made = Batch("baseline", _BASELINE_SHEET, ("indents.csv",))
    for name, kind, number in (
        ("PF3-01", HV10, _NUMBER),
        ("PF3-02", HK1, _NUMBER),
        ("PF3-03", HBW, 0.92 * _NUMBER),
    ):
        made.coupon(name, _CONDITION)
        made.indents(name, kind, five(number))
    _coupon(made, "PF3-04", {"grain_size_um": ""})
    made.fault("grain-size-missing", "PF3-04", None, "no grain size")
    _coupon(made, "PF3-05", {"grain_size_um": "ca. 20"})
    made.fault("bad-coupon-cell-needed", "PF3-05", None, "the grain size reads 'ca. 20'")
    _coupon(made, "PF3-06", {"thickness_mm": "2,0"})
    made.fault("bad-coupon-cell", "PF3-06", None, "a decimal comma in the thickness")
    _coupon(made, "PF3-07", {"prior_plastic_work_j_per_m3": "96"})
    made.fault("stored-fraction-impossible", "PF3-07", None, "plastic work in MJ/m3")
    _coupon(made, "PF3-08", {"prior_plastic_work_j_per_m3": "4000000"})
    made.fault("stored-fraction-unusual", "PF3-08", None, "plastic work of a smaller reduction")
    made.coupon("PF3-09", "rolled 70 %")
    made.indents("PF3-09", HV10, five(1.25 * _NUMBER))
    made.fault("above-saturation", "PF3-09", None, "125 HV10, beyond the stated saturation")
    return made


def radius_batch() -> Batch:
    """Make the batch whose outer radius is the grain size."""
    made = Batch("outer-radius", _RADIUS_SHEET, ("indents.csv",))
    made.fault_of_sheet("skewed-input", "coefficient", "u a fifth of the value, shape normal")
    _coupon(made, "PF4-01", {})
    made.fault("indent-adds-strain", "PF4-01", None, "no theta_0 and sigma_s in the sheet")
    _coupon(made, "PF4-02", {"grain_size_um": ""})
    made.fault("grain-size-missing-radius", "PF4-02", None, "no grain size")
    _coupon(made, "PF4-03", {"grain_size_um": "20 um"})
    made.fault("bad-coupon-cell-needed-radius", "PF4-03", None, "a unit in the grain size")
    _coupon(made, "PF4-04", {"grain_size_um": "0.00002"})
    made.fault("no-line-energy", "PF4-04", None, "the grain size in metre: less than a core")
    _coupon(made, "PF4-05", {"grain_size_um": "0.001"})
    made.fault("few-core-radii", "PF4-05", None, "a grain of four Burgers vectors")
    return made


def _coupon(made: Batch, name: str, cells: dict[str, str]) -> None:
    made.coupon(name, _CONDITION, cells)
    made.indents(name, HV10, five(_NUMBER, turn=int(name[-2:])))
