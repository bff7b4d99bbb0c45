"""Constants of relation 6 that a curve offers to other batches, ready to paste.

The line of hardening rate against stress holds for the whole flow stress. Relation 6
wants it of the dislocation stress, so the baseline of this batch is taken off; what is
not known of the baseline goes into both constants, and correlates them.
"""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.formulas.kocks_mecking import (
    HARDENING_ABOVE_BASELINE,
    SATURATION_ABOVE_BASELINE,
)
from coldwork.reduce.curve import Fit
from coldwork.statistics.rounding import rounded

__all__ = ["Baseline", "Offered", "offered", "sheet_lines"]

FloatArray = NDArray[np.float64]

_NAMES: Final = ("initial_hardening", "saturation_stress")


@dataclass(frozen=True)
class Baseline:
    """A coupon's baseline stress.

    Attributes
    ----------
    value, u_own, u_shared : float
        NaN where there is none. [Pa]
    """

    value: float
    u_own: float
    u_shared: float


@dataclass(frozen=True)
class Offered:
    """theta_0 and sigma_s of relation 6, from one curve; both arrays of shape (2,).

    Attributes
    ----------
    values : ndarray, shape (2,)
        Initial hardening and saturation stress. [Pa]
    own, shared : ndarray, shape (2, 2)
        Covariance from the coupon's own errors, and from those that coupons share. [Pa2]
    """

    values: FloatArray
    own: FloatArray
    shared: FloatArray

    @property
    def u(self) -> FloatArray:
        """Standard uncertainties, shape (2,), in Pa."""
        return np.sqrt(np.diag(self.own + self.shared))

    @property
    def correlation(self) -> float:
        """Correlation of the errors of the two; 0 where one of them has none. [1]."""
        total = self.own + self.shared
        size = float(np.sqrt(total[0, 0] * total[1, 1]))
        return float(np.clip(total[0, 1] / size, -1.0, 1.0)) if size > 0.0 else 0.0


def offered(line: Fit | None, baseline: Baseline) -> Offered | None:
    """Take the baseline off the line of hardening rate against stress.

    Parameters
    ----------
    line : Fit or None
        `CurveResult.kocks_mecking`.
    baseline : Baseline
        Of the same coupon.

    Returns
    -------
    Offered or None
        None where there is no line, no baseline, or the line is used up by it: a
        hardening or a saturation stress of zero or less is none.
    """
    if line is None or not np.isfinite(baseline.value):
        return None
    whole = np.array([line.parameters[line.names.index(name)] for name in _NAMES])
    if not (whole > 0.0).all():
        return None
    given = dict(zip(_NAMES, whole, strict=True)) | {"baseline": baseline.value}
    some = {name: x for name, x in given.items() if name != "initial_hardening"}
    values = np.array(
        [HARDENING_ABOVE_BASELINE.value(**given), SATURATION_ABOVE_BASELINE.value(**some)]
    )
    if not (values > 0.0).all():
        return None
    slopes = [
        HARDENING_ABOVE_BASELINE.sensitivities(**given),
        SATURATION_ABOVE_BASELINE.sensitivities(**some),
    ]
    by_line = np.array([[float(s.get(name, 0.0)) for name in _NAMES] for s in slopes])
    by_baseline = np.array([float(s["baseline"]) for s in slopes])
    places = [line.names.index(name) for name in _NAMES]
    own = by_line @ line.covariance[np.ix_(places, places)] @ by_line.T
    own = own + np.outer(by_baseline, by_baseline) * baseline.u_own**2
    shared = np.outer(by_baseline, by_baseline) * baseline.u_shared**2
    for contribution in line.u_shared.values():
        step = by_line @ contribution[places]
        shared = shared + np.outer(step, step)
    return Offered(values, own, shared)


def sheet_lines(found: Offered, source: str) -> str:
    """Write the constants as lines for ``[indentation]`` of another batch sheet.

    Parameters
    ----------
    found : Offered
        From `offered`.
    source : str
        Where they come from.

    Returns
    -------
    str
        TOML, rounded as their uncertainties allow.
    """
    lines = ["[indentation]"]
    keys: Mapping[str, int] = {"initial_hardening_mpa": 0, "saturation_stress_mpa": 1}
    quoted = json.dumps(source, ensure_ascii=False)
    for key, i in keys.items():
        value, u = units.from_si(np.array([found.values[i], found.u[i]]), "MPa").tolist()
        told, told_u = rounded(value, u)
        spread = f", u = {told_u}" if told_u else ""
        lines.append(f"{key} = {{ value = {told}{spread}, source = {quoted} }}")
    return "\n".join(lines)
