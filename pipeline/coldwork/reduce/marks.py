"""Findings on the readings of a stretch, told to the batch and kept with each reading."""

from collections.abc import Sequence

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.reduce.readings import Readings
from coldwork.rules.bits import bit_of, blank
from coldwork.rules.findings import Findings
from coldwork.rules.rule import Rule

__all__ = ["Marks"]


class Marks:
    """Notes what fires where.

    Parameters
    ----------
    readings : Readings
        The stretch.
    findings : Findings
        The batch's findings; every note reaches them.
    files : sequence of str
        Names of the files that `readings` counts.

    Attributes
    ----------
    bits : ndarray of uint64, shape (n, words)
        Bit i is set where ``RULES[i]`` fired on the reading.
    """

    def __init__(self, readings: Readings, findings: Findings, files: Sequence[str]) -> None:
        self._readings = readings
        self._findings = findings
        self._files = files
        self.bits = blank(len(readings))

    def note(
        self,
        rule: Rule,
        fired: NDArray[np.bool_],
        value: NDArray[np.float64] | None = None,
        limit: NDArray[np.float64] | float | None = None,
    ) -> None:
        """Note a rule on the readings where it fired.

        Parameters
        ----------
        rule : Rule
            The rule.
        fired : ndarray of bool, shape (n,)
            Where.
        value : ndarray, shape (n,), optional
            What was found. [the rule's unit]
        limit : ndarray, shape (n,), or float, optional
            Where the rule's own limit is not the one that was used. [the rule's unit]
        """
        rows = np.flatnonzero(fired)
        if not rows.size:
            return
        self.bits[rows] |= bit_of(rule)
        r = self._readings
        self._findings.add(
            rule,
            r.coupon[rows],
            reading_no=r.number[rows],
            value=None if value is None else value[rows],
            limit=limit[rows] if isinstance(limit, np.ndarray) and limit.ndim else limit,
            file=pa.array(self._files, pa.string()).take(pa.array(r.file[rows], pa.int64())),
            line=r.lines[rows],
        )

    def note_coupons(
        self, rule: Rule, coupons: NDArray[np.int32], *, limit: float | None = None
    ) -> None:
        """Note a rule on coupons of the stretch as a whole.

        Parameters
        ----------
        rule : Rule
            The rule.
        coupons : ndarray of int32
            Rows of ``coupons.csv``.
        limit : float, optional
            Where the rule has none of its own. [the rule's unit]
        """
        self._findings.add(rule, coupons, limit=limit)
