"""What a person must know about an estimate: the rules that a batch would flag it by."""

from typing import Final

import numpy as np

from coldwork.inputs.method import Method
from coldwork.judge.coupon_rules import State, judge_coupons
from coldwork.judge.temperatures import judge_temperatures
from coldwork.rules import RULES, coupon
from coldwork.rules.findings import Findings
from coldwork.rules.rule import Level, Rule

__all__ = ["NOTHING", "UNJUDGED", "remarks"]

NOTHING: Final = np.array([np.nan])
_FIRST: Final = np.array([0], dtype=np.int64)
UNJUDGED: Final = State(
    coupon=_FIRST,
    route="flow",
    readings_used=np.array([5], dtype=np.int64),  # an estimate lacks no readings
    repeatability=np.zeros(1),
    scale=np.array([-1], dtype=np.int8),
    thickness=NOTHING,
    mean_diagonal=NOTHING,
    ball=NOTHING,
    stress=NOTHING,
    u_stress=NOTHING,
    upper_stress_end=NOTHING,
    unwinding=False,
    unwound=np.zeros(1, dtype=np.bool_),
    indented_stress=NOTHING,
    saturation_stress=np.nan,
    density=NOTHING,
    radius_ratio=NOTHING,
    stored_fraction=NOTHING,
)
"""State of one coupon of which nothing is known; no rule fires on it."""

_SAID: Final = {
    coupon.BELOW_BASELINE.id: "The strength is at or below the baseline: there is no density, and "
    "the upper ends are what the uncertainty allows.",
    coupon.BASELINE_CONTRADICTED.id: "The strength is below the baseline by more than the "
    "uncertainty allows: there is neither a density nor an upper end, and the baseline is too "
    "high for it.",
    coupon.INDENT_ADDS_STRAIN.id: "The state includes the strain that the indent itself put in. "
    "Say initial_hardening_mpa and saturation_stress_mpa of [indentation] to take it out.",
    coupon.GRAIN_SIZE_MISSING.id: "There is no baseline: it needs a grain size, which an estimate "
    "does not take. Say strength.baseline_mpa instead.",
    coupon.GRAIN_SIZE_MISSING_RADIUS.id: "There is no line energy: the outer radius is the grain "
    "size, which an estimate does not take. Say another line_energy.outer_radius.",
}


def remarks(method: Method, state: State, *, from_density: bool) -> str:
    """Tell what a batch would flag, a line each.

    Parameters
    ----------
    method : Method
        How the estimate was made.
    state : State
        What it came to.
    from_density : bool
        Whether it began with a density, which needs no strength.

    Returns
    -------
    str
        Empty where there is nothing to tell.
    """
    findings = Findings(1)
    judge_coupons(findings, state)
    if not from_density:
        temperature = np.array([method.test_temperature], dtype=np.float64)
        judge_temperatures(findings, method, _FIRST, temperature)
        if method.laws.baseline == "parts" and "strength.hall_petch_mpa_m05" in method.inputs:
            findings.add(coupon.GRAIN_SIZE_MISSING, _FIRST)
    if method.laws.outer_radius == "grain":
        findings.add(coupon.GRAIN_SIZE_MISSING_RADIUS, _FIRST)
    fired = [rule for rule in RULES if findings.has(rule)[0]]
    if coupon.BASELINE_CONTRADICTED in fired:
        fired.remove(coupon.BELOW_BASELINE)
    return "\n".join(_SAID.get(rule.id) or _sentence(rule) for rule in fired)


def _sentence(rule: Rule) -> str:
    ending = "; a batch would not publish what hangs on it" if rule.level is Level.ERROR else ""
    return f"{rule.level.value.capitalize()} {rule.id}: {rule.statement}{ending}."
