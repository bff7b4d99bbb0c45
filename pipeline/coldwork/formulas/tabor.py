"""Flow stress from the pressure under an indent."""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import finite, positive

__all__ = ["TABOR_FLOW_STRESS", "tabor_flow_stress", "tabor_flow_stress_sensitivities"]


def tabor_flow_stress(
    pressure: ArrayLike, intercept: ArrayLike, constraint_factor: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the flow stress at the coupon's strain plus the indent's own.

    .. math:: \sigma = (p - p_0) / C

    Parameters
    ----------
    pressure : array_like, shape (...)
        Pressure under the indent :math:`p`, over the area that
        `constraint_factor` is meant for. [Pa]
    intercept : array_like, broadcast against `pressure`
        Pressure at no flow stress :math:`p_0` of a calibration, else 0. [Pa]
    constraint_factor : array_like, broadcast against `pressure`
        Pressure over flow stress :math:`C`, near 3. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Flow stress, NaN where an input is NaN; at or below 0 where the pressure
        is not above the intercept. [Pa]

    Raises
    ------
    InvalidArgument
        If any pressure or constraint factor is zero, negative or infinite, or an
        intercept infinite.

    Notes
    -----
    For full plasticity: a metal whose yield strain is below about a hundredth of
    the indent's. Taking the pressure over the other area moves the flow stress of a
    Vickers indent by 7.9 %.

    References
    ----------
    Tabor, The Hardness of Metals, Oxford 1951: pressure over flow stress about 3 at
    8 % strain, as told in J. Mater. Sci. 55 (2020) 2661-2681.
    """
    p, c = positive("pressure", pressure), positive("constraint_factor", constraint_factor)
    return np.asarray((p - finite("intercept", intercept)) / c)


def tabor_flow_stress_sensitivities(
    pressure: ArrayLike, intercept: ArrayLike, constraint_factor: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `tabor_flow_stress` by each argument.

    Parameters
    ----------
    pressure, intercept, constraint_factor : array_like
        As for `tabor_flow_stress`. [Pa], [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `tabor_flow_stress` does.
    """
    stress = tabor_flow_stress(pressure, intercept, constraint_factor)
    c = np.asarray(constraint_factor, dtype=np.float64)
    return {
        "pressure": np.asarray(1.0 / c),
        "intercept": np.asarray(-1.0 / c),
        "constraint_factor": np.asarray(-stress / c),
    }


TABOR_FLOW_STRESS: Final = Formula(tabor_flow_stress, tabor_flow_stress_sensitivities)
