"""Errors of a coupon: what empties its quantities, and from which link of the chain on."""

from typing import Final

from coldwork.rules.columns import (
    BASELINE_ON,
    DENSITY_ON,
    ENERGY_ON,
    EVERYTHING,
    FRACTION_ON,
    STRENGTH_ON,
)
from coldwork.rules.rule import Level, Rule

__all__ = [
    "BAD_COUPON_CELL_NEEDED",
    "BAD_COUPON_CELL_NEEDED_RADIUS",
    "COUPON_ERRORS",
    "DENSITY_IMPOSSIBLE",
    "DENSITY_TOO_LOW",
    "GRAIN_SIZE_MISSING",
    "GRAIN_SIZE_MISSING_RADIUS",
    "MIXED_FORCES",
    "MIXED_SCALES",
    "MIXED_TEMPERATURES",
    "NO_FLOW_STRESS_AT_STRAIN",
    "NO_LINE_ENERGY",
    "NO_READINGS",
    "NO_SHEAR_MODULUS",
    "ROUTES_DISAGREE",
    "SCALE_WITHOUT_CONSTANTS",
    "SIZE_EFFECT_TOO_LARGE",
    "SIZE_EFFECT_UNFITTED",
    "STORED_FRACTION_IMPOSSIBLE",
    "STRESS_PAST_BRANCH",
]

_MEANING: Final = "definition of the quantity"

NO_READINGS: Final = Rule(
    "no-readings",
    Level.ERROR,
    "the coupon has no reading that could be used",
    1.0,
    "1",
    _MEANING,
    "Nothing was measured, so nothing is reported.",
    EVERYTHING,
)
MIXED_SCALES: Final = Rule(
    "mixed-scales",
    Level.ERROR,
    "the coupon was read on more than one hardness scale",
    1.0,
    "1",
    "ISO 18265:2013, introduction: no conversion between scales holds in general (from memory)",
    "Numbers of different scales have no common mean and no common constraint factor.",
    ("hardness", "hardness_scale", *STRENGTH_ON),
)
MIXED_FORCES: Final = Rule(
    "mixed-forces",
    Level.ERROR,
    "the coupon was read with more than one nominal force, and no size effect is modelled",
    1.0,
    "1",
    "W. D. Nix, H. Gao, J. Mech. Phys. Solids 46 (1998) 411",
    "Small indents read harder, so the mean over several forces belongs to none of them.",
    ("hardness", "hardness_scale", *STRENGTH_ON),
)
SIZE_EFFECT_UNFITTED: Final = Rule(
    "size-effect-unfitted",
    Level.ERROR,
    "no coupon of the condition was read with more than one force often enough to fit its size"
    " effect",
    None,
    None,
    "W. D. Nix, H. Gao, J. Mech. Phys. Solids 46 (1998) 411",
    "A line of H^2 over 1/h needs two depths in one coupon, and more indents than it has numbers.",
    STRENGTH_ON,
)
SIZE_EFFECT_TOO_LARGE: Final = Rule(
    "size-effect-too-large",
    Level.ERROR,
    "the size effect would account for all of the hardness; value as the hardness",
    None,
    "kgf/mm2",
    "W. D. Nix, H. Gao, J. Mech. Phys. Solids 46 (1998) 411",
    "H^2 less size strength over depth leaves nothing: force, strength or depth is wrong.",
    STRENGTH_ON,
)
MIXED_TEMPERATURES: Final = Rule(
    "mixed-temperatures",
    Level.ERROR,
    "the coupon was read at temperatures more than five kelvin apart",
    5.0,
    "K",
    "common practice: copper and iron lose some 0.2 % of their modulus in five kelvin",
    "Their mean belongs to no temperature that it could be brought from.",
    ("hardness", *STRENGTH_ON),
)
NO_SHEAR_MODULUS: Final = Rule(
    "no-shear-modulus",
    Level.ERROR,
    "the metal has no shear modulus at the temperature of the test; limit as the melting point",
    None,
    "Cel",
    "H. J. Frost, M. F. Ashby, Deformation-Mechanism Maps (1982), law of the modulus (from memory)",
    "Above the melting point, or where the line of the modulus comes down to nothing, a strength"
    " cannot be brought to the reference temperature.",
    STRENGTH_ON,
)
SCALE_WITHOUT_CONSTANTS: Final = Rule(
    "scale-without-constants",
    Level.ERROR,
    "the batch sheet gives no constants that turn this hardness scale into a flow stress",
    None,
    None,
    "D. Tabor, The Hardness of Metals (1951)",
    "A constraint factor and a representative strain hold for one scale, not for another.",
    STRENGTH_ON,
)
NO_FLOW_STRESS_AT_STRAIN: Final = Rule(
    "no-flow-stress-at-strain",
    Level.ERROR,
    "no points of the flow curve lie at the stated plastic strain or on both sides of it",
    None,
    "1",
    "common practice",
    "A flow curve is interpolated and never extrapolated.",
    STRENGTH_ON,
)
ROUTES_DISAGREE: Final = Rule(
    "routes-disagree",
    Level.ERROR,
    "indents and flow curve differ by more than the uncertainty of their difference;"
    " value as normalised error E_n",
    1.0,
    "1",
    "ISO 13528 and ISO/IEC 17043: |E_n| above 1 is unsatisfactory (from memory)",
    "One of the two is wrong, or a constant between them, and a mean of both would hide it;"
    " at a coverage of 95 % one honest pair in twenty comes out here.",
    STRENGTH_ON,
)
BAD_COUPON_CELL_NEEDED: Final = Rule(
    "bad-coupon-cell-needed",
    Level.ERROR,
    "a cell of coupons.csv that the baseline needs cannot be read",
    None,
    None,
    "contract of the table",
    "The baseline holds a term in this coupon's grain size, so there is no baseline.",
    BASELINE_ON,
)
BAD_COUPON_CELL_NEEDED_RADIUS: Final = Rule(
    "bad-coupon-cell-needed-radius",
    Level.ERROR,
    "a cell of coupons.csv that the outer radius needs cannot be read",
    None,
    None,
    "contract of the table",
    "The outer radius is this coupon's grain size, so there is no line energy.",
    ENERGY_ON,
)
GRAIN_SIZE_MISSING: Final = Rule(
    "grain-size-missing",
    Level.ERROR,
    "the coupon has no grain size, which the baseline needs",
    None,
    None,
    "E. O. Hall, Proc. Phys. Soc. B 64 (1951) 747; N. J. Petch, J. Iron Steel Inst. 174 (1953) 25",
    "The baseline holds a term in one over the root of this coupon's grain size.",
    BASELINE_ON,
)
GRAIN_SIZE_MISSING_RADIUS: Final = Rule(
    "grain-size-missing-radius",
    Level.ERROR,
    "the coupon has no grain size, which the outer radius needs",
    None,
    None,
    _MEANING,
    "The batch sheet takes the grain size as the outer radius of a dislocation's field.",
    ENERGY_ON,
)
DENSITY_IMPOSSIBLE: Final = Rule(
    "density-impossible",
    Level.ERROR,
    "the dislocation density is above what a crystal can hold",
    1e17,
    "m-2",
    "common practice: a mean spacing near ten Burgers vectors is no crystal any more",
    "Force, unit, baseline or Taylor coefficient must be wrong, so neither the density nor what"
    " follows from it is reported; the stresses stay, since they show where to look.",
    DENSITY_ON,
)
STRESS_PAST_BRANCH: Final = Rule(
    "stress-past-branch",
    Level.ERROR,
    "the dislocation stress is greater than any that the logarithmic law can carry",
    None,
    "MPa",
    "B. Devincre, L. Kubin, T. Hoc, Scripta Mater. 54 (2006) 741: alpha goes with"
    " ln(1/(b sqrt(rho))), and the stress has a maximum at b sqrt(rho) = 1/e",
    "The law holds for spacings far above the Burgers vector; beyond its maximum there is no"
    " density for the stress.",
    DENSITY_ON,
)
DENSITY_TOO_LOW: Final = Rule(
    "density-too-low",
    Level.ERROR,
    "the dislocation density is below what a metal holds even when fully annealed",
    1e10,
    "m-2",
    "annealed metals hold 1e10 to 1e12 per m2: D. Hull, D. J. Bacon, Introduction to"
    " Dislocations (2001)",
    "The strength cannot be told from the baseline, so no value is reported; the ends stay, as"
    " for a coupon below its baseline.",
    DENSITY_ON,
    ends_stay=True,
)
NO_LINE_ENERGY: Final = Rule(
    "no-line-energy",
    Level.ERROR,
    "the outer radius is not larger than the core radius, so there is no line energy",
    1.0,
    "1",
    "J. P. Hirth, J. Lothe, Theory of Dislocations (1982): E goes with ln(R / r0)",
    "Outside the core there is no elastic field left to hold energy.",
    ENERGY_ON,
)
STORED_FRACTION_IMPOSSIBLE: Final = Rule(
    "stored-fraction-impossible",
    Level.ERROR,
    "more energy is stored than plastic work was done",
    1.0,
    "1",
    "first law of thermodynamics",
    "Either the work in coupons.csv or the stored energy is wrong, so no energy is reported.",
    FRACTION_ON,
)

COUPON_ERRORS: Final = (
    NO_READINGS,
    MIXED_SCALES,
    MIXED_FORCES,
    SIZE_EFFECT_UNFITTED,
    SIZE_EFFECT_TOO_LARGE,
    MIXED_TEMPERATURES,
    NO_SHEAR_MODULUS,
    SCALE_WITHOUT_CONSTANTS,
    NO_FLOW_STRESS_AT_STRAIN,
    ROUTES_DISAGREE,
    BAD_COUPON_CELL_NEEDED,
    BAD_COUPON_CELL_NEEDED_RADIUS,
    GRAIN_SIZE_MISSING,
    GRAIN_SIZE_MISSING_RADIUS,
    DENSITY_IMPOSSIBLE,
    STRESS_PAST_BRANCH,
    DENSITY_TOO_LOW,
    NO_LINE_ENERGY,
    STORED_FRACTION_IMPOSSIBLE,
)
