r"""The line of hardening rate against stress, seen from the baseline.

A flow curve gives the line :math:`\theta = \theta_0 (1 - \sigma / \sigma_s)` of the whole
flow stress. Relation 6 wants it of the dislocation stress :math:`\sigma - \sigma_0`: the
same line, its constants counted from the baseline :math:`\sigma_0`.

References
----------
.. [1] Kocks and Mecking, Prog. Mater. Sci. 48 (2003) 171-273,
   doi:10.1016/S0079-6425(02)00003-8 (the plot and its line).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import finite, positive

__all__ = [
    "HARDENING_ABOVE_BASELINE",
    "SATURATION_ABOVE_BASELINE",
    "hardening_above_baseline",
    "hardening_above_baseline_sensitivities",
    "saturation_above_baseline",
    "saturation_above_baseline_sensitivities",
]


def hardening_above_baseline(
    initial_hardening: ArrayLike, saturation_stress: ArrayLike, baseline: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the hardening rate at no dislocation stress.

    .. math:: \theta_0' = \theta_0 (1 - \sigma_0 / \sigma_s)

    Parameters
    ----------
    initial_hardening : array_like, shape (...)
        Rate at no flow stress :math:`\theta_0`. [Pa]
    saturation_stress : array_like, broadcast against `initial_hardening`
        Flow stress at which the rate is gone :math:`\sigma_s`. [Pa]
    baseline : array_like, broadcast against `initial_hardening`
        Part of the flow stress that dislocations do not carry :math:`\sigma_0`. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\theta_0'`, at or below 0 where the baseline is not below saturation; NaN
        where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any hardening or saturation stress is zero, negative or infinite, or a
        baseline infinite.

    References
    ----------
    Kocks and Mecking, Prog. Mater. Sci. 48 (2003) 171-273 (the line; shifted here).
    """
    theta = positive("initial_hardening", initial_hardening)
    limit = positive("saturation_stress", saturation_stress)
    return np.asarray(theta * (1.0 - finite("baseline", baseline) / limit))


def hardening_above_baseline_sensitivities(
    initial_hardening: ArrayLike, saturation_stress: ArrayLike, baseline: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `hardening_above_baseline` by each argument.

    Parameters
    ----------
    initial_hardening, saturation_stress, baseline : array_like
        As for `hardening_above_baseline`. [Pa], [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1]

    Raises
    ------
    InvalidArgument
        As `hardening_above_baseline` does.
    """
    hardening_above_baseline(initial_hardening, saturation_stress, baseline)
    theta, limit, base = (
        np.asarray(x, dtype=np.float64) for x in (initial_hardening, saturation_stress, baseline)
    )
    return {
        "initial_hardening": np.asarray(1.0 - base / limit),
        "saturation_stress": np.asarray(theta * base / limit**2),
        "baseline": np.asarray(-theta / limit),
    }


def saturation_above_baseline(
    saturation_stress: ArrayLike, baseline: ArrayLike
) -> NDArray[np.float64]:
    r"""Compute the dislocation stress at which hardening is gone.

    .. math:: \sigma_s' = \sigma_s - \sigma_0

    Parameters
    ----------
    saturation_stress : array_like, shape (...)
        Flow stress at which it is gone :math:`\sigma_s`. [Pa]
    baseline : array_like, broadcast against `saturation_stress`
        Part of the flow stress that dislocations do not carry :math:`\sigma_0`. [Pa]

    Returns
    -------
    ndarray of float64, the broadcast shape
        :math:`\sigma_s'`, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any saturation stress is zero, negative or infinite, or a baseline infinite.

    References
    ----------
    Kocks and Mecking, Prog. Mater. Sci. 48 (2003) 171-273 (the line; shifted here).
    """
    limit = positive("saturation_stress", saturation_stress)
    return np.asarray(limit - finite("baseline", baseline))


def saturation_above_baseline_sensitivities(
    saturation_stress: ArrayLike, baseline: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `saturation_above_baseline` by each argument.

    Parameters
    ----------
    saturation_stress, baseline : array_like
        As for `saturation_above_baseline`. [Pa], [Pa]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [1]

    Raises
    ------
    InvalidArgument
        As `saturation_above_baseline` does.
    """
    one = np.ones_like(saturation_above_baseline(saturation_stress, baseline))
    return {"saturation_stress": one, "baseline": -one}


HARDENING_ABOVE_BASELINE: Final = Formula(
    hardening_above_baseline, hardening_above_baseline_sensitivities
)
SATURATION_ABOVE_BASELINE: Final = Formula(
    saturation_above_baseline, saturation_above_baseline_sensitivities
)
