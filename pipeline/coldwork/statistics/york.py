"""A straight line through points with errors in both variables, correlated or not."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite, not_negative
from coldwork.statistics.line_fit import FittedLine, fit_line

__all__ = ["LEAST_POINTS", "YorkLine", "fit_york"]

FloatArray = NDArray[np.float64]

LEAST_POINTS: Final = 3  # two points lie on every line through them
_STEPS: Final = 500
_TOLERANCE: Final = 1e-14  # of the slope, relative [1]


@dataclass(frozen=True)
class YorkLine:
    """A line through n points, and how each point lies to it.

    Attributes
    ----------
    line : FittedLine
        Intercept and slope; `cofactor` and `u_stated` follow from the stated errors, `scattered`
        and `u` take the scale from the scatter; `weighted_sum` is chi-squared.
    residual : ndarray of float64, shape (n,)
        Of y from the line, over its standard uncertainty there. [1]
    leverage : ndarray of float64, shape (n,)
        Share of a point in its own place on the line; they sum to 2. [1]
    """

    line: FittedLine
    residual: FloatArray
    leverage: FloatArray


def fit_york(
    x: ArrayLike,
    y: ArrayLike,
    u_x: ArrayLike,
    u_y: ArrayLike,
    correlation: ArrayLike = 0.0,
) -> YorkLine:
    r"""Fit a line to points with errors in x and y: the likeliest one where they are normal.

    .. math::
        s = \frac{\sum W_i \beta_i V_i}{\sum W_i \beta_i U_i}, \qquad
        W_i = 1 / (u_{y,i}^2 + s^2 u_{x,i}^2 - 2 s r_i u_{x,i} u_{y,i})

    with U and V the distances from the weighted means and
    :math:`\beta_i = W_i [U_i u_y^2 + s V_i u_x^2 - (s U_i + V_i) r_i u_x u_y]`.

    Parameters
    ----------
    x, y : array_like, shape (n,), n of 3 or more
        The points. [any units]
    u_x, u_y : array_like, broadcast against `x`
        Their standard uncertainties; one of a point's two may be zero. [unit of x], [unit of y]
    correlation : array_like, broadcast against `x`
        :math:`r_i`, of the errors of a point's x and y; between -1 and 1. [1]

    Returns
    -------
    YorkLine
        The line and the points about it.

    Raises
    ------
    InvalidArgument
        If the points do not go in pairs, are fewer than 3 or share one x, a value is missing or
        infinite, an uncertainty is negative, both of a point's are zero, a correlation is not
        between -1 and 1, or the steps do not come to rest.

    Notes
    -----
    Standard errors are taken at the adjusted points, as the source does; to this order they are
    those of maximum likelihood. A point's weight turns with the slope, so the slope is found in
    steps, from the line of least squares in y.

    References
    ----------
    York, Evensen, Lopez Martinez, De Basabe Delgado, Am. J. Phys. 72 (2004) 367,
    doi:10.1119/1.1632486, equations (13a) to (13d) and the steps of section III (numbers
    from memory).
    """
    a, b, u_a, u_b, r = _checked(x, y, u_x, u_y, correlation)
    scale_x, scale_y = float(np.ptp(a)), float(np.abs(b).max()) or 1.0
    a0, b0 = float(a.mean()), float(b.mean())  # all sums are of distances, in units of order 1
    a, b = (a - a0) / scale_x, (b - b0) / scale_y
    u_a, u_b = u_a / scale_x, u_b / scale_y
    slope = fit_line(a, b).slope
    for _ in range(_STEPS):
        last, (slope, weight, mean_a, mean_b, place) = slope, _step(a, b, u_a, u_b, r, slope)
        if abs(slope - last) <= _TOLERANCE * (abs(slope) + 1e-3):
            break
    else:
        message = "the line does not come to rest: the points do not tell one slope from another"
        raise InvalidArgument(message)
    adjusted = mean_a + place
    centre = float(weight @ adjusted / weight.sum())
    off = adjusted - centre
    spread = 1.0 / float(weight @ off**2)
    residual = (b - mean_b) - slope * (a - mean_a)
    leverage = weight * (1.0 / weight.sum() + off**2 * spread)
    rise = scale_y / scale_x
    origin = centre * scale_x + a0  # where intercept and slope would not be correlated
    u_slope2 = spread * rise**2
    u_centre2 = scale_y**2 / float(weight.sum())
    value = slope * rise
    line = FittedLine(
        value=np.array([b0 + mean_b * scale_y - value * (a0 + mean_a * scale_x), value]),
        cofactor=np.array(
            [
                [u_centre2 + origin**2 * u_slope2, -origin * u_slope2],
                [-origin * u_slope2, u_slope2],
            ]
        ),
        weighted_sum=float(weight @ residual**2),
        degrees_of_freedom=a.size - 2,
    )
    return YorkLine(line, np.sqrt(weight) * residual, leverage)


def _step(
    x: FloatArray, y: FloatArray, u_x: FloatArray, u_y: FloatArray, r: FloatArray, slope: float
) -> tuple[float, FloatArray, float, float, FloatArray]:
    """Give the next slope, with weights, weighted means and adjusted places at the last one."""
    weight = 1.0 / (u_y**2 + slope**2 * u_x**2 - 2.0 * slope * r * u_x * u_y)
    total = weight.sum()
    mean_x, mean_y = float(weight @ x / total), float(weight @ y / total)
    dx, dy = x - mean_x, y - mean_y
    place = weight * (dx * u_y**2 + slope * dy * u_x**2 - (slope * dx + dy) * r * u_x * u_y)
    found = float((weight * place) @ dy / ((weight * place) @ dx))
    return found, weight, mean_x, mean_y, place


def _checked(
    x: ArrayLike, y: ArrayLike, u_x: ArrayLike, u_y: ArrayLike, correlation: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]:
    a, b = finite("x", x), finite("y", y)
    if a.ndim != 1 or a.shape != b.shape or a.size < LEAST_POINTS:
        message = (
            f"x and y must be {LEAST_POINTS} points or more in pairs"
            f" (shapes {a.shape} and {b.shape})"
        )
        raise InvalidArgument(message)
    u_a = np.broadcast_to(not_negative("u_x", u_x), a.shape)
    u_b = np.broadcast_to(not_negative("u_y", u_y), a.shape)
    r = np.broadcast_to(finite("correlation", correlation), a.shape)
    for name, values in (("x", a), ("y", b), ("u_x", u_a), ("u_y", u_b), ("correlation", r)):
        if np.isnan(values).any():
            message = f"{name} must be present ({int(np.isnan(values).sum())} of {a.size} missing)"
            raise InvalidArgument(message)
    if (np.abs(r) >= 1.0).any():
        message = f"correlation must be between -1 and 1 (found {r[np.abs(r) >= 1.0][0]:g})"
        raise InvalidArgument(message)
    exact = (u_a == 0.0) & (u_b == 0.0)
    if exact.any():
        message = f"u_x and u_y must not both be zero ({int(exact.sum())} of {a.size} points)"
        raise InvalidArgument(message)
    if not np.ptp(a) > 0.0:
        message = f"x must not be the same for all points (it is {a[0]:g})"
        raise InvalidArgument(message)
    return a, b, u_a, u_b, r
