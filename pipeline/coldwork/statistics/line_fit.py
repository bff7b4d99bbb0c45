"""A straight line by weighted least squares, with the covariance of what it finds."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite, positive

__all__ = ["FittedLine", "fit_line"]

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class FittedLine:
    """A line, y = intercept + slope x.

    Attributes
    ----------
    value : ndarray of float64, shape (2,)
        Intercept and slope. [unit of y], [unit of y over unit of x]
    cofactor : ndarray of float64, shape (2, 2)
        Inverse of the normal matrix: the covariance, if the weights are 1/u^2. [products of
        those units, over the unit of weight times that of y squared]
    weighted_sum : float
        Of the squared residuals: chi-squared, if the weights are 1/u^2. [unit of weight times
        that of y squared]
    degrees_of_freedom : int
        Points less 2.
    """

    value: FloatArray
    cofactor: FloatArray
    weighted_sum: float
    degrees_of_freedom: int

    @property
    def intercept(self) -> float:
        """At x = 0. [unit of y]."""
        return float(self.value[0])

    @property
    def slope(self) -> float:
        """Rise by x. [unit of y over unit of x]."""
        return float(self.value[1])

    @property
    def residual_variance(self) -> float:
        """Of a point of weight 1 about the line, NaN for 2 points. [unit of y squared]."""
        freedom = self.degrees_of_freedom
        return self.weighted_sum / freedom if freedom else float("nan")

    @property
    def scattered(self) -> FloatArray:
        """Covariance where the weights say only how the points compare, shape (2, 2).

        The scatter about the line sets the scale. [products of the units of `value`]
        """
        return np.asarray(self.residual_variance * self.cofactor)

    @property
    def u(self) -> FloatArray:
        """Standard uncertainties from the scatter, shape (2,). [units of `value`]."""
        return np.asarray(np.sqrt(np.diagonal(self.scattered)))

    @property
    def u_stated(self) -> FloatArray:
        """Standard uncertainties if the weights are 1/u^2, shape (2,). [units of `value`]."""
        return np.asarray(np.sqrt(np.diagonal(self.cofactor)))

    @property
    def correlation(self) -> float:
        """Of intercept and slope, whatever sets the scale. [1]."""
        c = self.cofactor
        return float(c[0, 1] / np.sqrt(c[0, 0] * c[1, 1]))

    def at(self, x: ArrayLike) -> FloatArray:
        """Give y [its unit] on the line at x [its unit]."""
        return np.asarray(self.intercept + self.slope * np.asarray(x, dtype=np.float64))


def fit_line(x: ArrayLike, y: ArrayLike, weights: ArrayLike = 1.0) -> FittedLine:
    r"""Fit a line to points, the weighted squares of the residuals in y least.

    .. math:: \min_{a, s} \sum_i w_i (y_i - a - s x_i)^2

    Parameters
    ----------
    x, y : array_like, shape (n,), n of 2 or more
        The points, x without error. [any units]
    weights : array_like, broadcast against `x`
        :math:`w_i`: one over the square of u(y), or how the points compare. [any unit]

    Returns
    -------
    FittedLine
        Intercept and slope; `scattered` and `u` take the scale of the covariance from the
        points, `cofactor` and `u_stated` from the weights.

    Raises
    ------
    InvalidArgument
        If the points do not go in pairs, are fewer than 2, share one x, or a value is missing
        or infinite, or a weight zero, negative or infinite.

    Notes
    -----
    Normal equations about the weighted means, in which they are diagonal.

    References
    ----------
    JCGM 100:2008, H.3.2 (line by least squares, with variances and correlation).
    """
    a, b = finite("x", x), finite("y", y)
    if a.ndim != 1 or a.shape != b.shape or a.size < 2:
        message = f"x and y must be 2 points or more in pairs (shapes {a.shape} and {b.shape})"
        raise InvalidArgument(message)
    w = np.broadcast_to(positive("weights", weights), a.shape)
    for name, values in (("x", a), ("y", b), ("weights", w)):
        if np.isnan(values).any():
            message = f"{name} must be present ({int(np.isnan(values).sum())} of {a.size} missing)"
            raise InvalidArgument(message)
    total = w.sum()
    mean_x, mean_y = (w @ a) / total, (w @ b) / total
    dx, dy = a - mean_x, b - mean_y
    spread = w @ dx**2
    if not spread > 0.0:
        message = f"x must not be the same for all points (it is {a[0]:g})"
        raise InvalidArgument(message)
    slope = (w @ (dx * dy)) / spread
    residual = dy - slope * dx
    cofactor = np.array([[1.0 / total + mean_x**2 / spread, -mean_x / spread], [0.0, 1.0 / spread]])
    cofactor[1, 0] = cofactor[0, 1]
    return FittedLine(
        value=np.array([mean_y - slope * mean_x, slope]),
        cofactor=cofactor,
        weighted_sum=float(w @ residual**2),
        degrees_of_freedom=a.size - 2,
    )
