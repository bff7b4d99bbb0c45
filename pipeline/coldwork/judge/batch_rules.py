"""Rules that look at the batch as a whole: its inputs."""

from typing import Final

from coldwork.inputs.method import Method
from coldwork.inputs.quantity import Input
from coldwork.rules.batch import SKEWED_INPUT
from coldwork.rules.findings import Findings

__all__ = ["judge_inputs", "skewed"]

_LATE: Final = ("hardening.", "material.", "line_energy.", "structure.")
_ANY_SIGN: Final = ("line_energy.core_energy",)  # a core may hold more or less than the field


def judge_inputs(findings: Findings, method: Method) -> None:
    """Find inputs after the dislocation stress that should be lognormal and are not.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    method : Method
        The batch's method.
    """
    for x in method.inputs.values():
        if skewed(x):
            findings.add_batch(
                SKEWED_INPUT,
                f"{x.name} is taken as {x.shape}; write it with factor = in place of u =",
                value=x.relative_u,
            )


def skewed(x: Input) -> bool:
    """Say whether an input that enters after the dislocation stress should be lognormal.

    Parameters
    ----------
    x : Input
        The input.

    Returns
    -------
    bool
        True for a positive one with u above a tenth of its value that is not lognormal.
    """
    late = x.name.startswith(_LATE) and x.name not in _ANY_SIGN
    limit = SKEWED_INPUT.limit or 0.0
    return late and x.shape != "lognormal" and x.value > 0.0 and x.relative_u > limit
