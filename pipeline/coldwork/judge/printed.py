"""Means and scatters that instruments print, where the rows of their files disagree."""

from collections.abc import Sequence

import numpy as np

from coldwork.intake.printed import Printed
from coldwork.rules.batch import PRINTED_MEAN_DIFFERS
from coldwork.rules.findings import Findings

__all__ = ["judge_printed"]


def judge_printed(findings: Findings, printed: Sequence[Printed], files: Sequence[str]) -> None:
    """Note every printed number that is not ours, on its coupon or else on the batch.

    Parameters
    ----------
    findings : Findings
        Where they go.
    printed : sequence of Printed
        What the files say that their rows do not.
    files : sequence of str
        Names of the files.
    """
    for one in printed:
        found, name = one.found, files[one.file]
        value = abs(found.printed - found.ours) / found.limit
        if one.coupon < 0:
            words = f"{name}, line {found.line}: {found.words}"
            findings.add_batch(PRINTED_MEAN_DIFFERS, words, value)
            continue
        findings.add(
            PRINTED_MEAN_DIFFERS,
            np.array([one.coupon], dtype=np.int32),
            value=value,
            file=name,
            line=found.line,
            detail=found.words,
        )
