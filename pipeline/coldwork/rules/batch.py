"""Rules that look at a batch: its testers and its inputs."""

from typing import Final

from coldwork.rules.rule import Level, Rule

__all__ = [
    "BATCH_RULES",
    "PRINTED_MEAN_DIFFERS",
    "SKEWED_INPUT",
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

BATCH_RULES: Final = (TESTER_OUT_OF_DATE, TESTER_UNKNOWN, SKEWED_INPUT, PRINTED_MEAN_DIFFERS)
