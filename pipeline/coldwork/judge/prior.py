"""Rules about the deformation before the test: what is stated against what follows."""

from typing import Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork.intake.coupons import Coupons
from coldwork.rules import coupon as rules
from coldwork.rules.findings import Findings
from coldwork.rules.rule import Rule

__all__ = ["judge_prior"]

_Floats: TypeAlias = NDArray[np.float64]
_Pair: TypeAlias = tuple[_Floats, _Floats]

_STRAIN_REL: Final = 0.05  # what a strain may differ by, relative [1]
_STRAIN: Final = 0.01  # and by rounding [1]
_WORK_REL: Final = 0.2  # what a work may differ by, relative [1]


def judge_prior(
    findings: Findings, coupons: Coupons, stated: _Pair, found: _Pair, impossible: NDArray[np.bool_]
) -> None:
    """Hold the strain and the work that coupons.csv states against dimensions and curve.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    coupons : Coupons
        The list, n coupons.
    stated, found : tuple of ndarray, shape (n,)
        Strain [1] and work [J/m^3] as stated, and as they follow; NaN where there is none.
    impossible : ndarray of bool, shape (n,)
        Where dimensions give no strain.
    """
    _note(findings, coupons, rules.PRIOR_DIMENSIONS, impossible)
    limit = np.maximum(_STRAIN, _STRAIN_REL * found[0])
    apart = np.abs(stated[0] - found[0]) > limit
    _note(findings, coupons, rules.PRIOR_STRAIN_DIFFERS, apart, (stated[0], found[0]))
    apart = np.abs(stated[1] - found[1]) > _WORK_REL * found[1]
    _note(findings, coupons, rules.PRIOR_WORK_DIFFERS, apart, (stated[1], found[1]))


def _note(
    findings: Findings,
    coupons: Coupons,
    rule: Rule,
    fired: NDArray[np.bool_],
    pair: _Pair | None = None,
) -> None:
    where = np.flatnonzero(fired)
    findings.add(
        rule,
        where,
        value=None if pair is None else pair[0][where],
        limit=None if pair is None else pair[1][where],
        file=pa.array([coupons.sources[coupons.file[i]].path for i in where], pa.string()),
        line=coupons.line[where],
    )
