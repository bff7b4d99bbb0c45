"""Parallel lines: one slope for several groups of points, each group with its own height."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite, positive

__all__ = ["ParallelLines", "fit_parallel_lines"]

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class ParallelLines:
    """Lines y = a of the group + slope x; n points in g groups.

    What is linear in y is told by its derivatives, so that errors of any kind pass through.

    Attributes
    ----------
    slope : float
        Of all lines. [unit of y over unit of x]
    intercepts : ndarray of float64, shape (g,)
        At x = 0, in rising order of the group's number. [unit of y]
    intercept : float
        Their mean by the weights in each group. [unit of y]
    group : ndarray of int64, shape (n,)
        Place of each point's group in `intercepts`.
    slope_by_y, intercept_by_y : ndarray of float64, shape (n,)
        Derivatives of `slope` [1 over unit of x] and `intercept` [1] by each y.
    """

    slope: float
    intercepts: FloatArray
    intercept: float
    group: NDArray[np.int64]
    slope_by_y: FloatArray
    intercept_by_y: FloatArray


def fit_parallel_lines(
    group: ArrayLike, x: ArrayLike, y: ArrayLike, weights: ArrayLike
) -> ParallelLines:
    r"""Fit lines of one slope, the weighted squares of the residuals in y least.

    .. math:: \min_{a, s} \sum_i w_i (y_i - a_{g(i)} - s x_i)^2

    Parameters
    ----------
    group : array_like of int, shape (n,)
        Which group each point is in.
    x, y, weights : array_like, shape (n,)
        The points and how they compare. [any units]

    Returns
    -------
    ParallelLines
        Slope, intercepts, and how they go with each y.

    Raises
    ------
    InvalidArgument
        If no group has points at two x, a weight is zero or negative, or anything is
        infinite.

    References
    ----------
    Least squares with a factor and a covariate (analysis of covariance, common practice).
    """
    px, py = finite("x", x), finite("y", y)
    w = np.broadcast_to(positive("weights", weights), px.shape)
    _, place = np.unique(np.asarray(group), return_inverse=True)
    place = place.reshape(-1).astype(np.int64)
    total = np.bincount(place, w)
    mean_x = np.bincount(place, w * px) / total
    mean_y = np.bincount(place, w * py) / total
    inside = px - mean_x[place]
    each = np.bincount(place, w * inside**2)
    spread = float(each.sum())
    if not (each > np.finfo(float).eps * np.bincount(place, w * px**2)).any():
        message = "x must differ inside a group: no group has points at two places"
        raise InvalidArgument(message)
    by_y = w * inside / spread
    slope = float(by_y @ py)
    all_weights = float(w.sum())
    middle = float(np.sum(w * px)) / all_weights
    to_intercept = w / all_weights - middle * by_y
    return ParallelLines(
        slope,
        mean_y - slope * mean_x,
        float(to_intercept @ py),
        place,
        by_y,
        to_intercept,
    )
