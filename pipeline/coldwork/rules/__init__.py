"""Every rule of quality control as an object, by what it looks at.

`RULES` holds them all, errors first, then warnings, then information; the order
is that of the `flags` column and of the bits of `Findings.bits`.
"""

from typing import Final

from coldwork.rules.batch import BATCH_RULES
from coldwork.rules.coupon import COUPON_RULES
from coldwork.rules.curve import CURVE_RULES
from coldwork.rules.reading import READING_RULES
from coldwork.rules.reasons import REASONS
from coldwork.rules.rule import Level, Reason, Rule

__all__ = ["REASONS", "RULES", "Level", "Reason", "Rule"]

RULES: Final[tuple[Rule, ...]] = tuple(
    sorted(
        (*READING_RULES, *COUPON_RULES, *CURVE_RULES, *BATCH_RULES),
        key=lambda rule: tuple(Level).index(rule.level),
    )
)
"""All rules; the sort is stable, so within a level: reading, coupon, curve, batch."""
