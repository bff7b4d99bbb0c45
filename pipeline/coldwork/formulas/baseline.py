"""The part of the flow stress that dislocations do not carry: the grain's share."""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.formula import Formula
from coldwork.guards import not_negative, positive

__all__ = ["HALL_PETCH_STRESS", "hall_petch_stress", "hall_petch_stress_sensitivities"]


def hall_petch_stress(grain_size: ArrayLike, coefficient: ArrayLike) -> NDArray[np.float64]:
    r"""Compute the stress that grain boundaries add.

    .. math:: \sigma = k / \sqrt{D}

    Parameters
    ----------
    grain_size : array_like, shape (...)
        Grain size before the cold work, by linear intercept, :math:`D`. [m]
    coefficient : array_like, broadcast against `grain_size`
        :math:`k`. [Pa.m^0.5]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Stress, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any grain size is zero, negative or infinite, or a coefficient negative
        or infinite.

    Notes
    -----
    Cells and subgrains are dislocations and are counted as such: `grain_size` is the
    grain's alone. Holds from about a micrometre up (common practice).

    References
    ----------
    Hall, Proc. Phys. Soc. B 64 (1951) 747-753, doi:10.1088/0370-1301/64/9/303;
    Petch, J. Iron Steel Inst. 174 (1953) 25-28.
    """
    d, k = positive("grain_size", grain_size), not_negative("coefficient", coefficient)
    return np.asarray(k / np.sqrt(d))


def hall_petch_stress_sensitivities(
    grain_size: ArrayLike, coefficient: ArrayLike
) -> dict[str, NDArray[np.float64]]:
    """Differentiate `hall_petch_stress` by each argument.

    Parameters
    ----------
    grain_size, coefficient : array_like
        As for `hall_petch_stress`. [m], [Pa.m^0.5]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `hall_petch_stress` does.
    """
    stress = hall_petch_stress(grain_size, coefficient)
    d = np.asarray(grain_size, dtype=np.float64)
    return {
        "grain_size": np.asarray(-0.5 * stress / d),
        "coefficient": np.asarray(1.0 / np.sqrt(d)),
    }


HALL_PETCH_STRESS: Final = Formula(hall_petch_stress, hall_petch_stress_sensitivities)
