"""Rules that look at a coupon as a whole.

`judge.coupon_rules` decides where most of them fire; those about forces, scales and
points of a flow curve fire where readings are reduced.
"""

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
    "ABOVE_SATURATION",
    "BAD_COUPON_CELL",
    "BAD_COUPON_CELL_NEEDED",
    "BAD_COUPON_CELL_NEEDED_RADIUS",
    "BASELINE_CONTRADICTED",
    "BELOW_BASELINE",
    "COUPON_RULES",
    "DENSITY_IMPOSSIBLE",
    "DENSITY_TOO_LOW",
    "DENSITY_UNUSUAL",
    "FEW_CORE_RADII",
    "FEW_READINGS",
    "GRAIN_SIZE_MISSING",
    "GRAIN_SIZE_MISSING_RADIUS",
    "INDENT_ADDS_STRAIN",
    "MIXED_FORCES",
    "MIXED_SCALES",
    "NO_FLOW_STRESS_AT_STRAIN",
    "NO_LINE_ENERGY",
    "NO_READINGS",
    "NO_REPEATABILITY",
    "SCALE_WITHOUT_CONSTANTS",
    "SCATTER",
    "STORED_FRACTION_IMPOSSIBLE",
    "STORED_FRACTION_UNUSUAL",
    "THIN_COUPON",
    "UNDER_FIVE_READINGS",
    "WEAK_SIGNAL",
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

FEW_READINGS: Final = Rule(
    "few-readings",
    Level.WARNING,
    "the coupon has fewer than three readings",
    3.0,
    "1",
    "common practice",
    "With two readings neither an outlier nor a gradient can be seen.",
)
THIN_COUPON: Final = Rule(
    "thin-coupon",
    Level.WARNING,
    "the coupon is too thin for its indents; value and limit in diagonals",
    1.5,
    "1",
    "ISO 6507-1 (text of 1997): 1.5 d; HBW 8 h: ISO 6506-1 (from memory);"
    " HK a third of the long diagonal, ten depths: common practice",
    "The anvil below carries part of the force, and the hardness reads wrong.",
)
SCATTER: Final = Rule(
    "scatter",
    Level.WARNING,
    "the readings scatter more than those of the other coupons of their group;"
    " value and limit as ratio of variances",
    None,
    "1",
    "F test at 1 % over the coupons of the group: the rule of W. G. Cochran, Ann. Eugenics 11"
    " (1941) 47, where numbers of readings are equal (ISO 5725-2)",
    "The coupon is uneven or was badly read: it leaves the pool and keeps its own scatter.",
)
NO_REPEATABILITY: Final = Rule(
    "no-repeatability",
    Level.WARNING,
    "there is nothing to judge the scatter of the readings by",
    None,
    None,
    "JCGM 100:2008, 4.2",
    "One reading and no pool give no standard deviation: the own uncertainty, the total and the"
    " interval are empty, not zero.",
)
BELOW_BASELINE: Final = Rule(
    "below-baseline",
    Level.WARNING,
    "the dislocation stress is zero or less: the coupon is not stronger than its baseline",
    0.0,
    "MPa",
    "G. I. Taylor, Proc. R. Soc. A 145 (1934) 362: density goes with the square of the stress",
    "There is no density for such a stress, only an upper end; half of fully annealed coupons"
    " come out here.",
)
BASELINE_CONTRADICTED: Final = Rule(
    "baseline-contradicted",
    Level.WARNING,
    "even the upper end of the dislocation stress is zero or less",
    0.0,
    "MPa",
    "common practice; about 2 % of honest annealed coupons come out here",
    "The stated baseline is higher than this coupon allows, so there is no upper end either.",
)
WEAK_SIGNAL: Final = Rule(
    "weak-signal",
    Level.WARNING,
    "the standard uncertainty of the dislocation stress is a quarter of it or more",
    0.25,
    "1",
    "common practice",
    "The density goes with the square of the stress, so its interval is wide and lopsided.",
)
ABOVE_SATURATION: Final = Rule(
    "above-saturation",
    Level.WARNING,
    "the dislocation stress has reached the stated saturation stress, so nothing is unwound",
    None,
    "MPa",
    "E. Voce, J. Inst. Met. 74 (1948) 537",
    "At saturation a strain adds no strength; above it the stated constants are contradicted.",
)
FEW_CORE_RADII: Final = Rule(
    "few-core-radii",
    Level.WARNING,
    "the outer radius is less than five core radii",
    5.0,
    "1",
    "common practice",
    "The energy then hangs on the core radius, which elasticity does not give.",
)
BAD_COUPON_CELL: Final = Rule(
    "bad-coupon-cell",
    Level.WARNING,
    "a cell of coupons.csv cannot be read and counts as absent",
    None,
    None,
    "contract of the table",
    "The method does not need it, but somebody meant to give it.",
)

UNDER_FIVE_READINGS: Final = Rule(
    "under-five-readings",
    Level.INFORMATION,
    "the coupon has fewer than five readings",
    5.0,
    "1",
    "common practice: five readings, as in the verification of a tester (ISO 6507-2)",
    "Five readings show most of a coupon's scatter.",
)
INDENT_ADDS_STRAIN: Final = Rule(
    "indent-adds-strain",
    Level.INFORMATION,
    "the state that is reported includes the strain that the indent itself put in",
    None,
    None,
    "D. Tabor, Proc. R. Soc. A 192 (1948) 247",
    "Density and energy are those below the indent and higher than before the test.",
)
DENSITY_UNUSUAL: Final = Rule(
    "density-unusual",
    Level.INFORMATION,
    "the dislocation density is outside what annealed to heavily worked metals hold",
    1e12,
    "m-2",
    "common practice",
    "It can be right, and it is worth a look.",
    upper=2e16,
)
STORED_FRACTION_UNUSUAL: Final = Rule(
    "stored-fraction-unusual",
    Level.INFORMATION,
    "the stored fraction of the plastic work is outside what is commonly found",
    0.002,
    "1",
    "M. B. Bever, D. L. Holt, A. L. Titchener, Prog. Mater. Sci. 17 (1973) 5 (from memory)",
    "Work, baseline or Taylor coefficient may be off.",
    upper=0.15,
)

COUPON_RULES: Final = (
    NO_READINGS,
    MIXED_SCALES,
    MIXED_FORCES,
    SCALE_WITHOUT_CONSTANTS,
    NO_FLOW_STRESS_AT_STRAIN,
    BAD_COUPON_CELL_NEEDED,
    BAD_COUPON_CELL_NEEDED_RADIUS,
    GRAIN_SIZE_MISSING,
    GRAIN_SIZE_MISSING_RADIUS,
    DENSITY_IMPOSSIBLE,
    DENSITY_TOO_LOW,
    NO_LINE_ENERGY,
    STORED_FRACTION_IMPOSSIBLE,
    FEW_READINGS,
    THIN_COUPON,
    SCATTER,
    NO_REPEATABILITY,
    BELOW_BASELINE,
    BASELINE_CONTRADICTED,
    WEAK_SIGNAL,
    ABOVE_SATURATION,
    FEW_CORE_RADII,
    BAD_COUPON_CELL,
    UNDER_FIVE_READINGS,
    INDENT_ADDS_STRAIN,
    DENSITY_UNUSUAL,
    STORED_FRACTION_UNUSUAL,
)
