"""Non-linear least squares with the covariance of what it finds."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import least_squares

from coldwork.errors import InvalidArgument
from coldwork.guards import finite, positive

__all__ = ["LeastSquares", "fit_least_squares"]

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class LeastSquares:
    """What a fit came to.

    Attributes
    ----------
    parameters : ndarray of float64, shape (p,)
        Values. [the model's units]
    covariance : ndarray of float64, shape (p, p)
        From the residuals: s^2 (J^T J)^-1.
    jacobian : ndarray of float64, shape (n, p)
        Derivative of the model at each point by each parameter, there.
    residual_sum_of_squares : float
        Of observed less model. [unit of y squared]
    residual_sd : float
        Root of that over the degrees of freedom. [unit of y]
    degrees_of_freedom : int
        Points less parameters.
    converged : bool
        Whether the steps came to rest.
    """

    parameters: FloatArray
    covariance: FloatArray
    jacobian: FloatArray
    residual_sum_of_squares: float
    residual_sd: float
    degrees_of_freedom: int
    converged: bool

    @property
    def u(self) -> FloatArray:
        """Standard uncertainties [the parameters' units], shape (p,)."""
        return np.asarray(np.sqrt(np.diagonal(self.covariance)))


def fit_least_squares(
    model: Callable[[FloatArray], FloatArray],
    jacobian: Callable[[FloatArray], FloatArray],
    y: ArrayLike,
    start: ArrayLike,
    scale: ArrayLike,
) -> LeastSquares:
    r"""Fit a model to points by the smallest sum of squared residuals.

    .. math:: \min_p \sum_i (y_i - f_i(p))^2

    Parameters
    ----------
    model : callable
        Parameters, shape (p,), to the model at each point, shape (n,). [unit of y]
    jacobian : callable
        Parameters to its derivatives, shape (n, p).
    y : array_like, shape (n,)
        Observed. [any unit]
    start : array_like, shape (p,)
        Where to begin. [the parameters' units]
    scale : array_like, shape (p,)
        How large each parameter typically is. [the parameters' units]

    Returns
    -------
    LeastSquares
        Parameters with covariance.

    Raises
    ------
    InvalidArgument
        If there are no more points than parameters, a value is infinite, or a scale is
        not positive.

    References
    ----------
    More, in Numerical Analysis, Springer LNM 630 (1978) 105-116,
    doi:10.1007/BFb0067700 (Levenberg-Marquardt as it is used here).
    """
    observed, first = finite("y", y), finite("start", start)
    if observed.size <= first.size:
        message = f"y must have more points than parameters ({observed.size} for {first.size})"
        raise InvalidArgument(message)

    def residual(parameters: FloatArray) -> FloatArray:
        return np.asarray(model(parameters) - observed)

    found = least_squares(
        residual,
        first,
        jac=jacobian,
        method="lm",
        x_scale=positive("scale", scale),
        xtol=1e-13,
        ftol=1e-13,
        gtol=1e-13,
        max_nfev=400,
    )
    slopes = np.asarray(jacobian(found.x), dtype=np.float64)
    freedom = observed.size - first.size
    rss = float(found.fun @ found.fun)
    size = np.maximum(np.sqrt((slopes**2).sum(axis=0)), 1e-300)
    r = np.linalg.qr(slopes / size, mode="r")
    inverse = np.linalg.pinv(r) / size[:, None]
    return LeastSquares(
        parameters=np.asarray(found.x, dtype=np.float64),
        covariance=rss / freedom * (inverse @ inverse.T),
        jacobian=slopes,
        residual_sum_of_squares=rss,
        residual_sd=float(np.sqrt(rss / freedom)),
        degrees_of_freedom=freedom,
        converged=bool(found.success),
    )
