"""Rules that look at a coupon as a whole.

`judge.coupon_rules` decides where most of them fire; those about forces, scales and
points of a flow curve fire where readings are reduced.
"""

from typing import Final

from coldwork.rules.coupon_errors import (
    BAD_COUPON_CELL_NEEDED,
    BAD_COUPON_CELL_NEEDED_RADIUS,
    COUPON_ERRORS,
    DENSITY_IMPOSSIBLE,
    DENSITY_TOO_LOW,
    GRAIN_SIZE_MISSING,
    GRAIN_SIZE_MISSING_RADIUS,
    MIXED_FORCES,
    MIXED_SCALES,
    MIXED_TEMPERATURES,
    NO_FLOW_STRESS_AT_STRAIN,
    NO_LINE_ENERGY,
    NO_READINGS,
    NO_SHEAR_MODULUS,
    ROUTES_DISAGREE,
    SCALE_WITHOUT_CONSTANTS,
    SIZE_EFFECT_TOO_LARGE,
    SIZE_EFFECT_UNFITTED,
    STORED_FRACTION_IMPOSSIBLE,
    STRESS_PAST_BRANCH,
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
    "MIXED_TEMPERATURES",
    "NO_FLOW_STRESS_AT_STRAIN",
    "NO_LINE_ENERGY",
    "NO_READINGS",
    "NO_REPEATABILITY",
    "NO_SHEAR_MODULUS",
    "OUTSIDE_CALIBRATION",
    "PRIOR_DIMENSIONS",
    "PRIOR_STRAIN_DIFFERS",
    "PRIOR_WORK_DIFFERS",
    "ROUTES_DISAGREE",
    "SCALE_WITHOUT_CONSTANTS",
    "SCATTER",
    "SIZE_EFFECT_TOO_LARGE",
    "SIZE_EFFECT_UNFITTED",
    "STORED_FRACTION_IMPOSSIBLE",
    "STORED_FRACTION_UNUSUAL",
    "STRESS_PAST_BRANCH",
    "TEMPERATURE_FAR",
    "THIN_COUPON",
    "UNDER_FIVE_READINGS",
    "WEAK_SIGNAL",
]

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
TEMPERATURE_FAR: Final = Rule(
    "temperature-far",
    Level.WARNING,
    "the test was made below 77 kelvin, or above two thirds of the melting point in kelvin",
    -196.15,
    "Cel",
    "common practice: between the two the modulus falls by a straight line within some per cent",
    "Beyond them the modulus is not that of the line, and near the melting point dislocations"
    " move while the test lasts.",
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
OUTSIDE_CALIBRATION: Final = Rule(
    "outside-calibration",
    Level.WARNING,
    "the coupon lies outside the range of a calibration that it is worked with; value as place in"
    " that range, 0 at its lower and 1 at its upper end",
    0.0,
    "1",
    "ISO/IEC 17025:2017, 7.2.2.3 (range of a validated method; from memory)",
    "Outside its points a line is a guess, and its uncertainty does not say how bad a one.",
    upper=1.0,
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
PRIOR_DIMENSIONS: Final = Rule(
    "prior-dimensions",
    Level.WARNING,
    "the dimensions of the prior deformation give no strain: one of a pair is missing, or the"
    " metal would have grown thicker",
    None,
    None,
    "volume is kept in plastic deformation (common practice)",
    "Before and after may have changed places; no strain is taken from them.",
)
PRIOR_STRAIN_DIFFERS: Final = Rule(
    "prior-strain-differs",
    Level.WARNING,
    "the prior strain that is stated differs by more than 5 % from that of the dimensions;"
    " limit as the dimensions have it",
    None,
    "1",
    "R. von Mises, Nachr. Ges. Wiss. Goettingen (1913) 582; the 5 % are common practice",
    "It may be a reduction or a thickness strain and no equivalent one. What is stated is used.",
)
PRIOR_WORK_DIFFERS: Final = Rule(
    "prior-work-differs",
    Level.WARNING,
    "the prior plastic work that is stated differs by more than a fifth from that along the Voce"
    " curve; limit as the curve has it",
    None,
    "J/m3",
    "E. Voce, J. Inst. Met. 74 (1948) 537; the fifth is common practice",
    "Work, strain or curve is off, and the stored fraction with it. What is stated is used.",
)

COUPON_RULES: Final = (
    *COUPON_ERRORS,
    FEW_READINGS,
    THIN_COUPON,
    SCATTER,
    NO_REPEATABILITY,
    BELOW_BASELINE,
    BASELINE_CONTRADICTED,
    WEAK_SIGNAL,
    ABOVE_SATURATION,
    TEMPERATURE_FAR,
    FEW_CORE_RADII,
    OUTSIDE_CALIBRATION,
    BAD_COUPON_CELL,
    PRIOR_DIMENSIONS,
    PRIOR_STRAIN_DIFFERS,
    PRIOR_WORK_DIFFERS,
    UNDER_FIVE_READINGS,
    INDENT_ADDS_STRAIN,
    DENSITY_UNUSUAL,
    STORED_FRACTION_UNUSUAL,
)
