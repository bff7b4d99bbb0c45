"""What was done to the metal before the test: strain from dimensions, work along a curve."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import baseline_stress
from coldwork.formulas.formula import Formula
from coldwork.formulas.prior_work import (
    DRAWING_STRAIN,
    PRIOR_WORK,
    ROLLING_STRAIN,
    UPSETTING_STRAIN,
)
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.measured import Value, apply, value_of

__all__ = ["Prior", "prior_of", "with_prior", "work_of"]

_Floats = NDArray[np.float64]
_WAYS: Final[Mapping[str, tuple[Formula, str]]] = {
    "rolled": (ROLLING_STRAIN, "thickness"),
    "drawn": (DRAWING_STRAIN, "diameter"),
    "upset": (UPSETTING_STRAIN, "height"),
}


@dataclass(frozen=True)
class Prior:
    """What coupons.csv says of the prior deformation, and what follows from it; shape (n,).

    Attributes
    ----------
    strain, stated_strain : ndarray
        From dimensions, and as stated; NaN where there is none. [1]
    impossible : ndarray of bool
        Where a dimension lacks its partner, or the metal would have grown.
    work, stated_work : ndarray
        Along the curve, and as stated; NaN where there is none. [J/m^3]
    """

    strain: _Floats
    stated_strain: _Floats
    impossible: NDArray[np.bool_]
    work: _Floats
    stated_work: _Floats


def prior_of(method: Method, coupons: Coupons) -> Prior:
    """Compute what the dimensions and the curve say of each coupon.

    Parameters
    ----------
    method : Method
        Says whether there is a curve.
    coupons : Coupons
        As they were read.

    Returns
    -------
    Prior
        One row per coupon.
    """
    strain, impossible = _strain(coupons)
    stated = coupons.prior_true_strain
    inputs: dict[str, Value] = {name: x.value for name, x in method.inputs.items()}
    known = np.where(np.isnan(stated), strain, stated)
    work = value_of(work_of(method, inputs, known, coupons.grain_size))
    return Prior(strain, stated, impossible, work, coupons.prior_plastic_work)


def with_prior(coupons: Coupons, prior: Prior) -> Coupons:
    """Fill in the strain and the work that coupons.csv does not state."""
    strain, work = prior.stated_strain, prior.stated_work
    return replace(
        coupons,
        prior_true_strain=np.where(np.isnan(strain), prior.strain, strain),
        prior_plastic_work=np.where(np.isnan(work), prior.work, work),
        work_stated=np.isfinite(work),
    )


def work_of(
    method: Method, inputs: Mapping[str, Value], strain: _Floats, grain_size: Value
) -> Value:
    """Give the plastic work of a strain along the method's Voce curve.

    Parameters
    ----------
    method : Method
        Its laws.
    inputs : mapping of str to Value
        Inputs by their name in the sheet. [SI]
    strain : ndarray, shape (n,)
        Prior strain. [1]
    grain_size : Value, shape (n,)
        Prior grain, for the baseline. [m]

    Returns
    -------
    Value, shape (n,)
        Work; NaN where there is no curve. [J/m^3]
    """
    if method.laws.prior_work == "stated":
        return np.full(len(strain), np.nan)
    section = "prior_work" if method.laws.route == "flow" else "indentation"
    return apply(
        PRIOR_WORK,
        strain=strain,
        baseline=baseline_stress(method.laws, inputs, grain_size),
        initial_stress=inputs["prior_work.initial_stress_mpa"],
        initial_hardening=inputs[f"{section}.initial_hardening_mpa"],
        saturation_stress=inputs[f"{section}.saturation_stress_mpa"],
    )


def _strain(coupons: Coupons) -> tuple[_Floats, NDArray[np.bool_]]:
    """Add up the strains of all dimensions; NaN where there is none, or an impossible one."""
    n = len(coupons)
    total, any_of_them = np.zeros(n), np.zeros(n, dtype=bool)
    impossible = np.zeros(n, dtype=bool)
    blank = np.full(n, np.nan)
    for verb, (formula, noun) in _WAYS.items():
        first, last = (coupons.dimensions.get(f"{verb}_{end}_mm", blank) for end in ("from", "to"))
        given = np.isfinite(first) | np.isfinite(last)
        strain = formula.value(**{f"initial_{noun}": first, f"final_{noun}": last})
        impossible |= given & np.isnan(strain)
        total += np.where(given, strain, 0.0)
        any_of_them |= given
    return np.where(any_of_them, total, np.nan), impossible
