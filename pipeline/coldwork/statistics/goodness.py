"""Whether points lie about a fit as their stated uncertainties let expect, and which does not."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import chdtrc, ndtri

from coldwork.errors import InvalidArgument
from coldwork.guards import finite

__all__ = ["TOO_BAD", "TOO_GOOD", "Goodness", "bad_point", "goodness"]

FloatArray = NDArray[np.float64]

TOO_BAD: Final = 0.025  # chance of more scatter, below which the errors are stated too small [1]
TOO_GOOD: Final = 0.975  # and above which they are stated too large [1]
_BAD_POINT: Final = 0.01  # chance that any of n honest points is named [1]


@dataclass(frozen=True)
class Goodness:
    """How a fit's scatter compares with the stated uncertainties.

    Attributes
    ----------
    chi_squared : float
        Sum of the squared residuals, each over its variance. [1]
    degrees_of_freedom : int
        Points less parameters. [1]
    probability : float
        Chance of a larger chi-squared where all is as stated. [1]
    """

    chi_squared: float
    degrees_of_freedom: int
    probability: float

    @property
    def verdict(self) -> str:
        """Say ``as stated``, ``too bad`` or ``too good``."""
        if self.probability < TOO_BAD:
            return "too bad"
        return "too good" if self.probability > TOO_GOOD else "as stated"

    @property
    def enlargement(self) -> float:
        """Factor on the stated uncertainties: above 1 exactly where the fit is too bad [1]."""
        if self.verdict != "too bad":
            return 1.0
        return float(np.sqrt(self.chi_squared / self.degrees_of_freedom))


def goodness(chi_squared: float, degrees_of_freedom: int) -> Goodness:
    r"""Judge a fit by its chi-squared.

    .. math:: P = P(\chi^2_\nu > \chi^2)

    Parameters
    ----------
    chi_squared : float
        Of the fit. [1]
    degrees_of_freedom : int
        :math:`\nu`, 1 or more. [1]

    Returns
    -------
    Goodness
        With its probability.

    Raises
    ------
    InvalidArgument
        If chi-squared is negative or not finite, or the degrees of freedom are below 1.

    References
    ----------
    Birge, Phys. Rev. 40 (1932) 207, doi:10.1103/PhysRev.40.207 (the ratio by which
    uncertainties grow where a fit is too bad); that they do not shrink where it is too good
    is common practice.
    """
    if degrees_of_freedom < 1 or not 0.0 <= chi_squared < np.inf:
        message = (
            "a fit is judged by a chi-squared of 0 or more over 1 degree of freedom or more"
            f" ({chi_squared:g} over {degrees_of_freedom})"
        )
        raise InvalidArgument(message)
    return Goodness(
        float(chi_squared), degrees_of_freedom, float(chdtrc(degrees_of_freedom, chi_squared))
    )


def bad_point(residual: ArrayLike, leverage: ArrayLike) -> int | None:
    r"""Name the one point that lies too far from a fit, if there is one.

    .. math:: |t_i| = |e_i| / \sqrt{1 - h_i} > z(1 - 0.01 / 2n)

    Parameters
    ----------
    residual : array_like, shape (n,)
        :math:`e_i`, each over its stated standard uncertainty. [1]
    leverage : array_like, shape (n,)
        :math:`h_i`, share of a point in its own place on the fit. [1]

    Returns
    -------
    int or None
        Its place. None for three points or fewer, which all lie alike; where no point
        passes; and where, without the farthest, the rest is too bad still: then the errors
        of all are stated too small, and no single point is to blame.

    Raises
    ------
    InvalidArgument
        If a value is infinite.

    References
    ----------
    Cook and Weisberg, Residuals and Influence in Regression (1982), 2.2 (from memory); a
    chance of 1 % shared by the n points after Bonferroni, common practice.
    """
    e, h = finite("residual", residual), finite("leverage", leverage)
    n = e.size
    if n < 4:
        return None
    with np.errstate(divide="ignore", invalid="ignore"):
        t2 = np.where(h < 1.0 - 1e-9, e**2 / (1.0 - h), 0.0)
    worst = int(np.argmax(t2))
    if t2[worst] <= ndtri(1.0 - _BAD_POINT / (2.0 * n)) ** 2:
        return None
    rest = max(0.0, float(e @ e) - float(t2[worst]))  # what is left when it is taken out
    return worst if chdtrc(n - 3, rest) >= TOO_BAD else None
