"""Rules that look at a batch: its testers and its inputs."""

from typing import Final

from coldwork.rules.rule import Level, Rule

__all__ = [
    "BATCH_RULES",
    "PRINTED_MEAN_DIFFERS",
    "SKEWED_INPUT",
    "TESTER_CHECK_MISSING",
    "TESTER_CHECK_OUT_OF_LIMITS",
    "TESTER_CHECK_TOO_OLD",
    "TESTER_OUT_OF_DATE",
    "TESTER_UNKNOWN",
]

TESTER_OUT_OF_DATE: Final = Rule(
    "tester-out-of-date",
    Level.WARNING,
    "the reading was taken after its tester's calibration had run out; value in days after",
    0.0,
    "d",
    "ISO/IEC 17025:2017, 6.4",
    "The stated bias of the tester is no longer known to hold.",
)
TESTER_UNKNOWN: Final = Rule(
    "tester-unknown",
    Level.WARNING,
    "the batch sheet lists testers, and the reading names none of them",
    None,
    None,
    "ISO/IEC 17025:2017, 6.4",
    "The tester's bias is neither corrected nor counted in the uncertainty.",
)
TESTER_CHECK_MISSING: Final = Rule(
    "tester-check-missing",
    Level.WARNING,
    "the tester was not checked on a reference block on the day of the reading; value in days"
    " since the last check",
    0.0,
    "d",
    "ISO 6507-1:2018, informative annex on verification by the user (from memory)",
    "Whatever happened to the tester since its last check is not seen.",
)
TESTER_CHECK_TOO_OLD: Final = Rule(
    "tester-check-too-old",
    Level.WARNING,
    "the tester's last check lies further back than the sheet allows, or there is none; value and"
    " limit in days",
    7.0,
    "d",
    "common practice",
    "The bias that was taken out and its uncertainty may no longer hold.",
)
TESTER_CHECK_OUT_OF_LIMITS: Final = Rule(
    "tester-check-out-of-limits",
    Level.WARNING,
    "the tester's last check found a bias or a spread outside the limits of the sheet",
    None,
    None,
    "ISO 6507-1:2018, informative annex on verification by the user (from memory)",
    "The tester was not fit for use when the reading was taken.",
)
SKEWED_INPUT: Final = Rule(
    "skewed-input",
    Level.WARNING,
    "a positive input is uncertain by more than a tenth of its value and is not lognormal;"
    " value as standard uncertainty over value",
    0.1,
    "1",
    "common practice",
    "The interval's tails then come out as 2 and 7 % where 5 is meant.",
)
PRINTED_MEAN_DIFFERS: Final = Rule(
    "printed-mean-differs",
    Level.WARNING,
    "a mean or scatter that the file prints is not that of its rows; value in times what rounding"
    " allows",
    1.0,
    "1",
    "common practice",
    "A row may be lost, changed or read in another unit than the machine meant.",
)

BATCH_RULES: Final = (
    TESTER_OUT_OF_DATE,
    TESTER_UNKNOWN,
    TESTER_CHECK_MISSING,
    TESTER_CHECK_TOO_OLD,
    TESTER_CHECK_OUT_OF_LIMITS,
    SKEWED_INPUT,
    PRINTED_MEAN_DIFFERS,
)
