"""Rules that look at a tensile or compression curve.

`reduce.tensile` decides where they fire, by what the reduction of the curve found. An
error says that no result of the curve may be trusted: ``tensile.csv`` and
``evolution.csv`` tell none, and where the curve gives the coupon's flow stress, the
coupon has no strength. Beside an indent route it empties nothing of the coupon.
"""

from typing import Final

from coldwork.rules.columns import STRENGTH_ON
from coldwork.rules.rule import Level, Rule

__all__ = [
    "BARRELLING",
    "CURVE_RULES",
    "CURVE_WITHOUT_GEOMETRY",
    "ENDS_BEFORE_YIELD",
    "EXTENSOMETER_OFF",
    "EXTENSOMETER_SLIP",
    "FEW_ELASTIC_POINTS",
    "FRICTION",
    "GRIP_SLIP",
    "LUEDERS_PLATEAU",
    "NO_MAXIMUM",
    "SATURATION",
    "SERRATIONS",
    "SLOPE_IMPOSSIBLE",
    "STRESS_IMPOSSIBLE",
    "TIME_BACKWARD",
    "TIME_STANDING",
    "TOO_FEW_POINTS",
    "UNLOADING_LOOP",
    "ZERO_OFFSET",
]

_ISO: Final = "ISO 6892-1 (from memory)"
_COMMON: Final = "common practice"

TOO_FEW_POINTS: Final = Rule(
    "too-few-points",
    Level.ERROR,
    "the curve has too few points to be reduced",
    None,
    "1",
    _COMMON,
    "A slope, a yield and a hardening cannot be told from a handful of points.",
    STRENGTH_ON,
)
FEW_ELASTIC_POINTS: Final = Rule(
    "few-elastic-points",
    Level.ERROR,
    "too few points lie in the elastic part of the curve",
    None,
    "1",
    _ISO,
    "The elastic line is uncertain, and every strain and proof stress is taken from it; a"
    " stated slope helps.",
    STRENGTH_ON,
)
ENDS_BEFORE_YIELD: Final = Rule(
    "ends-before-yield",
    Level.ERROR,
    "the curve ends before the metal yields",
    None,
    "1",
    _ISO,
    "There is no plastic part, so nothing of it can be reported.",
    STRENGTH_ON,
)
STRESS_IMPOSSIBLE: Final = Rule(
    "stress-impossible",
    Level.ERROR,
    "the greatest stress of the curve is none that a metal has",
    None,
    "MPa",
    f"{_COMMON}: from lead to the strongest wire",
    "Force, section or unit must be wrong, such as a force in kN read as one in N.",
    STRENGTH_ON,
)
SLOPE_IMPOSSIBLE: Final = Rule(
    "slope-impossible",
    Level.ERROR,
    "the elastic slope of the curve is none that a metal has",
    None,
    "GPa",
    f"{_COMMON}: from half of lead's modulus to above that of iridium",
    "Extension, gauge length or unit must be wrong, or the strain is not that of the coupon.",
    STRENGTH_ON,
)
GRIP_SLIP: Final = Rule(
    "grip-slip",
    Level.ERROR,
    "the coupon slipped in its grips; value and limit as drop of stress",
    None,
    "MPa",
    _COMMON,
    "Travel holds the slip, and force, strain and rate jump with it: nothing that is taken from"
    " the whole curve holds.",
    STRENGTH_ON,
)
EXTENSOMETER_SLIP: Final = Rule(
    "extensometer-slip",
    Level.ERROR,
    "the extensometer slipped on the coupon",
    None,
    "1",
    f"{_COMMON}; ISO 9513 for its verification (from memory)",
    "The strain jumped where the force did not, so strains after the jump are wrong.",
    STRENGTH_ON,
)
CURVE_WITHOUT_GEOMETRY: Final = Rule(
    "curve-without-geometry",
    Level.ERROR,
    "coupons.csv does not give the coupon's gauge length and section, which its curve needs",
    None,
    None,
    f"{_ISO}: stress is force over S0, strain is extension over the gauge length",
    "A force and an extension say nothing about the metal without the coupon's dimensions.",
    STRENGTH_ON,
)
ZERO_OFFSET: Final = Rule(
    "zero-offset",
    Level.WARNING,
    "the force does not begin at zero, or does not come back to it",
    None,
    "MPa",
    _COMMON,
    "The strain is corrected by the toe of the curve; a force that is off is not.",
)
EXTENSOMETER_OFF: Final = Rule(
    "extensometer-off",
    Level.WARNING,
    "the extensometer was taken off or came off during the test",
    None,
    "1",
    _COMMON,
    "Strains end there; what needs a later one is not told.",
)
SATURATION: Final = Rule(
    "saturation",
    Level.WARNING,
    "a channel stood at its end while the test went on",
    None,
    "1",
    _COMMON,
    "The true course is not in the record; what needs it is not told.",
)
TIME_BACKWARD: Final = Rule(
    "time-backward",
    Level.WARNING,
    "the time runs back along the curve",
    None,
    "s",
    _COMMON,
    "Points may be out of order, or of two tests.",
)
TIME_STANDING: Final = Rule(
    "time-standing",
    Level.WARNING,
    "the time stands still along the curve",
    None,
    "1",
    _COMMON,
    "The record was filled up or written twice; strain rates are not told from there.",
)
NO_MAXIMUM: Final = Rule(
    "no-maximum",
    Level.WARNING,
    "the curve ends before its force is greatest; value as what it has fallen by, of the greatest",
    None,
    "1",
    "A. Considere, Ann. Ponts et Chaussees 9 (1885) 574: uniform strain ends at the greatest force",
    "The end of uniform strain was not reached; strength and elongation are at least what is told.",
)
BARRELLING: Final = Rule(
    "barrelling",
    Level.WARNING,
    "the pressed coupon is barrelled; value as final section over that of even straining",
    None,
    "1",
    "ASTM E9 (from memory); common practice",
    "Straining was uneven, and force over the mean section overstates the stress.",
)
FRICTION: Final = Rule(
    "friction",
    Level.WARNING,
    "the pressed coupon is of a shape in which friction at its ends tells, or it may buckle;"
    " value and limit as height over diameter",
    None,
    "1",
    "ASTM E9, proportions of specimens (from memory)",
    "Friction at the ends adds to the force on a short coupon, and a long one bends.",
)
UNLOADING_LOOP: Final = Rule(
    "unloading-loop",
    Level.INFORMATION,
    "the coupon was unloaded and loaded again; value and limit as fall of stress",
    None,
    "MPa",
    _COMMON,
    "The loop is left out of the flow curve.",
)
SERRATIONS: Final = Rule(
    "serrations",
    Level.INFORMATION,
    "the curve is serrated; value and limit as number of drops",
    None,
    "1",
    "A. Portevin, F. Le Chatelier, C. R. Acad. Sci. 176 (1923) 507 (from memory)",
    "Solutes age the dislocations during the test: it is the metal, not the machine.",
)
LUEDERS_PLATEAU: Final = Rule(
    "lueders-plateau",
    Level.INFORMATION,
    "the curve has a yield plateau; value as its strain",
    None,
    "1",
    _ISO,
    "Strain is uneven along the plateau, and the stress there is that of the moving front.",
)

CURVE_RULES: Final = (
    TOO_FEW_POINTS,
    FEW_ELASTIC_POINTS,
    ENDS_BEFORE_YIELD,
    STRESS_IMPOSSIBLE,
    SLOPE_IMPOSSIBLE,
    GRIP_SLIP,
    EXTENSOMETER_SLIP,
    CURVE_WITHOUT_GEOMETRY,
    ZERO_OFFSET,
    EXTENSOMETER_OFF,
    SATURATION,
    TIME_BACKWARD,
    TIME_STANDING,
    NO_MAXIMUM,
    BARRELLING,
    FRICTION,
    UNLOADING_LOOP,
    SERRATIONS,
    LUEDERS_PLATEAU,
)
