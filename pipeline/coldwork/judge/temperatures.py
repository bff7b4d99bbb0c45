"""Rules about the temperature of a test, where a strength is brought to the reference."""

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.formulas.temperature import shear_modulus_at
from coldwork.inputs.method import Method
from coldwork.rules import coupon as rules
from coldwork.rules.findings import Findings

__all__ = ["judge_temperatures"]

_HIGHEST = 2.0 / 3.0  # of the melting point [1]


def judge_temperatures(
    findings: Findings,
    method: Method,
    coupon: NDArray[np.int64] | NDArray[np.int32],
    temperature: NDArray[np.float64],
) -> None:
    """Find tests at temperatures that relation 10 does not hold at.

    Parameters
    ----------
    findings : Findings
        Where it is told.
    method : Method
        The batch's method; nothing is found where it brings nothing to the reference.
    coupon : ndarray of int, shape (n,)
        Index of each coupon in the batch.
    temperature : ndarray, shape (n,)
        Mean temperature of its tests, NaN without any. [K]
    """
    if method.laws.temperature == "none":
        return
    melting = method.inputs["material.melting_point_k"].value
    modulus = shear_modulus_at(
        1.0,
        temperature,
        method.reference_temperature,
        method.inputs["material.shear_modulus_slope"].value,
        melting,
    )
    known = np.isfinite(temperature)
    none = known & np.isnan(modulus)
    celsius = units.from_si(temperature, "Cel")
    high = float(units.from_si(_HIGHEST * melting, "Cel"))
    low = rules.TEMPERATURE_FAR.limit or 0.0
    far = known & ~none & ((celsius < low) | (celsius > high))
    rows = np.flatnonzero(none)
    limit = float(units.from_si(melting, "Cel"))
    findings.add(rules.NO_SHEAR_MODULUS, coupon[rows], value=celsius[rows], limit=limit)
    rows = np.flatnonzero(far)
    passed = np.where(celsius[rows] < low, low, high)
    findings.add(rules.TEMPERATURE_FAR, coupon[rows], value=celsius[rows], limit=passed)
