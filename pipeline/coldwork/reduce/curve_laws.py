"""Laws of hardening fitted to a true curve, and the rate of hardening along it."""

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.formulas.formula import Formula
from coldwork.formulas.hardening_laws import HOLLOMON_STRESS, VOCE_STRESS
from coldwork.reduce.curve import Rate
from coldwork.statistics.least_squares import LeastSquares, fit_least_squares
from coldwork.statistics.local_polynomial import Window, choose_window, fit_window
from coldwork.statistics.noise import long_run_ratio

__all__ = [
    "HOLLOMON",
    "LEAST_FITTED_POINTS",
    "VOCE",
    "FittedLaw",
    "fit_hollomon",
    "fit_voce",
    "rate_along",
]

FloatArray = NDArray[np.float64]

VOCE: Final = ("yield_stress", "saturation_stress", "initial_hardening")
HOLLOMON: Final = ("coefficient", "exponent")
LEAST_FITTED_POINTS: Final = 12
_STEEPEST: Final = 5.0  # exponent of a power law to begin from
_HIGHEST: Final = 50.0  # logarithm of its coefficient, in Pa
_ANY_SIGN: Final = frozenset({"yield_stress"})  # every other parameter is positive
_LOGARITHM: Final = 200.0  # of a parameter, at most
_BLOCKS: Final = 2000  # means that a fit starts from
_PLACES: Final = 60  # along the curve where the rate is given
_KNOTS: Final = 8  # places whose windows are chosen; between them their width is interpolated


@dataclass(frozen=True)
class FittedLaw:
    """A law through the points of a true curve.

    Attributes
    ----------
    names : tuple of str
        Of the parameters.
    found : LeastSquares
        The fit; its covariance takes points as independent.
    like_neighbours : float
        Factor on the covariance for residuals that are alike next to each other. [1]
    by_strain : ndarray of float64, shape (n,)
        The law's derivative by strain at each point. [Pa]
    """

    names: tuple[str, ...]
    found: LeastSquares
    like_neighbours: float
    by_strain: FloatArray

    def shifts(self, stress: FloatArray, strain: FloatArray) -> FloatArray:
        """Give the change of the parameters, shape (p, k), for k small changes of the points.

        The changes of stress [Pa] and strain [1] have the shape (n, k).
        """
        jacobian = self.found.jacobian
        size = np.maximum(np.sqrt((jacobian**2).sum(axis=0)), 1e-300)
        scaled = jacobian / size
        wanted = scaled.T @ (stress - self.by_strain[:, None] * strain)
        return np.asarray(np.linalg.pinv(scaled.T @ scaled) @ wanted / size[:, None])


def fit_voce(stress: FloatArray, strain: FloatArray) -> FittedLaw | None:
    r"""Fit Voce's law, which is the line of rate against stress, integrated.

    Parameters
    ----------
    stress, strain : ndarray of float64, shape (n,)
        True stress and true plastic strain of the points to fit. [Pa], [1]

    Returns
    -------
    FittedLaw or None
        None where hardening does not slow down, so that there is no saturation, or
        fewer than `LEAST_FITTED_POINTS` are given.

    Notes
    -----
    It starts from the line itself, found without differentiating: the stress is linear in
    the strain and in its own integral, :math:`\sigma = c + \theta_0 \varepsilon -
    (\theta_0 / \sigma_s) \int \sigma d\varepsilon`.
    """
    if stress.size < LEAST_FITTED_POINTS:
        return None
    start = _integrated_line(stress, strain)
    return None if start is None else _fit(VOCE_STRESS, VOCE, stress, strain, start)


def fit_hollomon(stress: FloatArray, strain: FloatArray) -> FittedLaw | None:
    """Fit Hollomon's law.

    Parameters
    ----------
    stress, strain : ndarray of float64, shape (n,)
        True stress and true plastic strain of the points to fit, both positive. [Pa], [1]

    Returns
    -------
    FittedLaw or None
        None where the stress does not rise with the strain, or fewer than
        `LEAST_FITTED_POINTS` are given.
    """
    if stress.size < LEAST_FITTED_POINTS:
        return None
    x, y = np.log(strain), np.log(stress)
    exponent, level = np.polyfit(x, y, 1)
    if not 0.0 < exponent < _STEEPEST or not level < _HIGHEST:
        return None
    start = np.array([np.exp(level), exponent])
    return _fit(HOLLOMON_STRESS, HOLLOMON, stress, strain, start)


def rate_along(
    stress: FloatArray,
    strain: FloatArray,
    between: tuple[float, float],
    alike: int = 1,
    lasting: float = 0.0,
) -> Rate | None:
    """Smooth the hardening rate along a true curve, with its uncertainty.

    Parameters
    ----------
    stress, strain : ndarray of float64, shape (n,)
        True stress and true plastic strain. [Pa], [1]
    between : tuple of float
        True plastic strains from which to which. [1]
    alike : int
        Over how many points the noise is alike.
    lasting : float
        Error of the stress that means do not lose. [Pa]

    Returns
    -------
    Rate or None
        None where there are too few points between.
    """
    rising = np.maximum.accumulate(strain)
    first, last = (int(k) for k in np.searchsorted(rising, between))
    block = 1 if alike == 1 else 2 * alike
    least = LEAST_FITTED_POINTS * block
    if last - first < 3 * least:
        return None
    places = np.linspace(*between, _PLACES + 2)[1:-1]
    knots = np.linspace(*between, _KNOTS + 2)[1:-1]
    chosen = [choose_window(strain, stress, c, (first, last), alike, lasting) for c in knots]
    widths = [_half_width(strain, window, c) for window, c in zip(chosen, knots, strict=True)]
    half = np.exp(np.interp(places, knots, np.log(widths)))
    rows = []
    for centre, width in zip(places, half, strict=True):
        start = int(np.searchsorted(rising, centre - width))
        stop = int(np.searchsorted(rising, centre + width, side="right"))
        short = max(0, least - (stop - start))
        start = max(first, start - (short + 1) // 2)
        stop = min(last, max(stop, start + least))
        window = Window(min(start, stop - least), stop, float(centre), 4, block, lasting)
        fit = fit_window(strain, stress, window)
        rows.append((fit.value(centre), fit.slope(centre), fit.u_slope(centre)))
    values, slopes, us = np.array(rows).T
    return Rate(places, values, slopes, us)


def _half_width(strain: FloatArray, window: Window, centre: float) -> float:
    ends = strain[window.start], strain[window.stop - 1]
    return max(float(np.abs(np.array(ends) - centre).max()), 1e-12)


def _integrated_line(stress: FloatArray, strain: FloatArray) -> FloatArray | None:
    """Yield stress, saturation stress and initial hardening from the integrated line."""
    steps = np.diff(strain)
    area = np.concatenate([[0.0], np.cumsum(0.5 * (stress[1:] + stress[:-1]) * steps)])
    y, x, a = (_block_means(v, _BLOCKS) for v in (stress, strain, area))
    origin, length, height = float(x[0]), float(np.ptp(x)), float(np.abs(y).max())
    if length <= 0.0 or height <= 0.0:
        return None
    columns = np.column_stack([np.ones_like(x), (x - origin) / length, a / (height * length)])
    (c, slope, decay), *_ = np.linalg.lstsq(columns, y / height, rcond=None)
    if not (slope > 0.0 and decay < 0.0):
        return None
    theta, limit = slope * height / length, -slope / decay * height
    begin = c * height
    at_zero = limit - (limit - begin) * np.exp(min(theta * origin / limit, 50.0))
    return np.array([at_zero, limit, theta])


def _block_means(series: FloatArray, blocks: int) -> FloatArray:
    """Average a series over stretches of equal numbers of points, as many as it can bear."""
    n = series.size
    edges = np.arange(min(n, blocks)) * n // min(n, blocks)
    return np.asarray(np.add.reduceat(series, edges) / np.diff(np.append(edges, n)))


def _fit(
    law: Formula,
    names: tuple[str, ...],
    stress: FloatArray,
    strain: FloatArray,
    start: FloatArray,
) -> FittedLaw | None:
    """Fit a law, begun from block means; what must be positive is fitted by its logarithm."""
    if stress.size > 2 * _BLOCKS:
        means = [_block_means(v, _BLOCKS) for v in (stress, strain)]
        rough = _fit(law, names, means[0], means[1], start)
        start = start if rough is None else rough.found.parameters
    logged = np.array([name not in _ANY_SIGN for name in names])

    def unpacked(p: FloatArray) -> FloatArray:
        return np.where(logged, np.exp(np.clip(p, -_LOGARITHM, _LOGARITHM)), p)

    def model(p: FloatArray) -> FloatArray:
        return law.value(strain, *unpacked(p))

    def jacobian(p: FloatArray) -> FloatArray:
        values = unpacked(p)
        slopes = law.sensitivities(strain, *values)
        factors = np.where(logged, values, 1.0)
        columns = [slopes[name] * f for name, f in zip(names, factors, strict=True)]
        return np.column_stack([np.broadcast_to(c, strain.shape) for c in columns])

    positive = np.where(logged, start, 1.0)
    height = np.maximum(np.abs(start), 1e-3 * float(np.abs(stress).max()))
    first, scale = np.where(logged, np.log(positive), start), np.where(logged, 1.0, height)
    with np.errstate(over="ignore", invalid="ignore"):
        found = fit_least_squares(model, jacobian, stress, first, scale)
    values = unpacked(found.parameters)
    factors = np.where(logged, values, 1.0)
    if not found.converged or not np.isfinite(found.covariance).all():
        return None
    plain = replace(
        found,
        parameters=values,
        covariance=found.covariance * np.outer(factors, factors),
        jacobian=found.jacobian / factors,
    )
    residual = stress - law.value(strain, *values)
    slopes = law.sensitivities(strain, *values)
    return FittedLaw(names, plain, long_run_ratio(residual), slopes["strain"])
