r"""What dislocations carry of a stress that they share with obstacles of another kind.

.. math:: (\sigma - \sigma_0)^q = \sigma_d^q + \sigma_p^q

Strong obstacles beside weak ones, few among many, add up with :math:`q = 1`; obstacles alike
in strength and density with :math:`q = 2`, as their numbers add; what lies between takes an
exponent between.

References
----------
.. [1] Kocks, Argon and Ashby, Prog. Mater. Sci. 19 (1975) 1-291 (sums of strengths; from
   memory).
.. [2] Ardell, Metall. Trans. A 16 (1985) 2131-2165, doi:10.1007/BF02670416 (the exponent;
   from memory).
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import xlogy

from coldwork.formulas.bounds import from_to
from coldwork.formulas.formula import Formula
from coldwork.guards import finite, not_negative, positive

__all__ = [
    "COMBINED_STRESS",
    "SUPERPOSED_STRESS",
    "combined_stress",
    "combined_stress_sensitivities",
    "superposed_stress",
    "superposed_stress_sensitivities",
]

FloatArray = NDArray[np.float64]


def superposed_stress(excess: ArrayLike, obstacle: ArrayLike, exponent: ArrayLike) -> FloatArray:
    r"""Compute the dislocation stress that is left beside an obstacle stress.

    .. math:: \sigma_d = \left((\sigma - \sigma_0)^q - \sigma_p^q\right)^{1/q}

    Parameters
    ----------
    excess : array_like, shape (...)
        Flow stress less baseline :math:`\sigma - \sigma_0`, of either sign. [Pa]
    obstacle : array_like, broadcast against `excess`
        What the obstacles would carry alone :math:`\sigma_p`; several make one by
        `combined_stress`. [Pa]
    exponent : array_like, broadcast against `excess`
        :math:`q`, from 1 to 2. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Dislocation stress :math:`\sigma_d`; NaN where an input is NaN, and where the excess
        is at or below the obstacle stress. [Pa]

    Raises
    ------
    InvalidArgument
        If any excess is infinite, an obstacle stress negative or infinite, or an exponent
        not from 1 to 2.

    Notes
    -----
    For q > 1 the slope grows without bound as the excess comes down to the obstacle stress,
    so that no first-order interval holds there: its ends are mapped instead (``interval``).
    The difference is taken through logarithms, so that it keeps its digits there.

    References
    ----------
    Kocks, Argon and Ashby, Prog. Mater. Sci. 19 (1975); Ardell, Metall. Trans. A 16 (1985)
    2131-2165 (from memory).

    Examples
    --------
    >>> print(round(float(superposed_stress(50e6, 30e6, 2.0)) / 1e6, 12))
    40.0
    """
    x, _, q, room = _room(excess, obstacle, exponent)
    return np.asarray(x * room ** (1.0 / q))


def superposed_stress_sensitivities(
    excess: ArrayLike, obstacle: ArrayLike, exponent: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `superposed_stress` by each argument.

    Parameters
    ----------
    excess, obstacle, exponent : array_like
        As for `superposed_stress`. [Pa], [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name, NaN where there is no stress. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `superposed_stress` does.
    """
    x, ratio, q, room = _room(excess, obstacle, exponent)
    left = room ** (1.0 / q)
    by_exponent = -np.log(room) / q - xlogy(ratio**q, ratio) / room
    missing = 0.0 * room  # a missing number to the power of 0 is 1 to numpy
    return {
        "excess": np.asarray(left ** (1.0 - q) + missing),
        "obstacle": np.asarray(-((ratio / left) ** (q - 1.0)) + missing),
        "exponent": np.asarray(x * left * by_exponent / q),
    }


def combined_stress(stress: ArrayLike, obstacle: ArrayLike, exponent: ArrayLike) -> FloatArray:
    r"""Compute the stress that two kinds of obstacle carry; undoes `superposed_stress`.

    .. math:: \left(\sigma_d^q + \sigma_p^q\right)^{1/q}

    Parameters
    ----------
    stress : array_like, shape (...)
        One of the two :math:`\sigma_d`. [Pa]
    obstacle : array_like, broadcast against `stress`
        The other :math:`\sigma_p`. [Pa]
    exponent : array_like, broadcast against `stress`
        :math:`q`, from 1 to 2. [1]

    Returns
    -------
    ndarray of float64, the broadcast shape
        Both together, NaN where an input is NaN. [Pa]

    Raises
    ------
    InvalidArgument
        If any stress is zero, negative or infinite, an obstacle stress negative or
        infinite, or an exponent not from 1 to 2.

    Notes
    -----
    Obstacle terms of one sheet, as of solutes and precipitates, come together one by one:
    the order does not matter.

    References
    ----------
    Kocks, Argon and Ashby, Prog. Mater. Sci. 19 (1975); Ardell, Metall. Trans. A 16 (1985)
    2131-2165 (from memory).
    """
    s, p, q = _checked(stress, obstacle, exponent)
    most = np.maximum(s, p)
    return np.asarray(most * ((s / most) ** q + (p / most) ** q) ** (1.0 / q))


def combined_stress_sensitivities(
    stress: ArrayLike, obstacle: ArrayLike, exponent: ArrayLike
) -> dict[str, FloatArray]:
    """Differentiate `combined_stress` by each argument.

    Parameters
    ----------
    stress, obstacle, exponent : array_like
        As for `combined_stress`. [Pa], [Pa], [1]

    Returns
    -------
    dict of str to ndarray
        By argument's name. [Pa per unit of the argument]

    Raises
    ------
    InvalidArgument
        As `combined_stress` does.
    """
    s, p, q = _checked(stress, obstacle, exponent)
    both = combined_stress(stress, obstacle, exponent)
    a, b = s / both, p / both  # a^q + b^q = 1
    by_exponent = xlogy(a**q, a) + xlogy(b**q, b)
    return {
        "stress": np.asarray(a ** (q - 1.0)),
        "obstacle": np.asarray(b ** (q - 1.0)),
        "exponent": np.asarray(both * by_exponent / q),
    }


def _room(
    excess: ArrayLike, obstacle: ArrayLike, exponent: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Give excess, obstacle over excess, exponent, and 1 less that ratio to its power."""
    x, p = finite("excess", excess), not_negative("obstacle", obstacle)
    q = from_to("exponent", exponent, 1.0, 2.0)
    above = np.where(x > p, x, np.nan)
    with np.errstate(divide="ignore"):
        room = -np.expm1(q * np.log1p((p - above) / above))
    return np.asarray(above), np.asarray(p / above), q, np.asarray(room)


def _checked(
    stress: ArrayLike, obstacle: ArrayLike, exponent: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    q = from_to("exponent", exponent, 1.0, 2.0)
    return positive("stress", stress), not_negative("obstacle", obstacle), q


COMBINED_STRESS: Final = Formula(combined_stress, combined_stress_sensitivities)
SUPERPOSED_STRESS: Final = Formula(superposed_stress, superposed_stress_sensitivities)
