"""Value and slope of a smooth curve at a place, through noisy points around it.

A window grows about the place until two further powers of x are needed; the curve is
then read from the polynomial that has them. Under noise the window is wide, and what
bends the curve within it is fitted, not smeared; without noise it shrinks to a few
points, and the error falls with their spacing.
"""

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument
from coldwork.statistics.noise import roughness

__all__ = ["BASE", "LEAST_POINTS", "LocalFit", "Window", "choose_window", "fit_window"]

FloatArray = NDArray[np.float64]

LEAST_POINTS: Final = 11  # in a window: the 5 coefficients and 6 degrees of freedom
BASE: Final = 2  # the order that a window is grown for; it is fitted with two more
_BLOCKS: Final = 64  # means that a window is fitted through
_GROWTH: Final = 1.25  # of a window from one try to the next
_STRIDE: Final = 3  # windows between two that are tried first
_CHANCE: Final = 1e-8  # that noise alone makes two further powers look needed
_ROUGH: Final = 4.0  # variance of residuals over that of their roughness: there is a corner
_COHERENT: Final = 8.0  # of the means at a time a lasting error may bend alike
_ENOUGH: Final = 48  # blocks in which that roughness can be told
_STEPS: Final = 30  # of Newton's, at most
_STANDS: Final = 1e-15  # relative step at which it stands
_BACK: Final = 3  # tries from there back to where nothing of it is left in the result


@dataclass(frozen=True)
class Window:
    """What a polynomial is fitted to.

    Attributes
    ----------
    start, stop : int
        Points, `stop` not included.
    centre : float
        The place. [unit of x]
    order : int
        Of the polynomial.
    least_block : int
        Points that are averaged at least, for noise that neighbours share.
    lasting : float
        Error of y that means do not lose. [unit of y]
    """

    start: int
    stop: int
    centre: float
    order: int
    least_block: int = 1
    lasting: float = 0.0


@dataclass(frozen=True)
class LocalFit:
    """A polynomial about a place.

    Attributes
    ----------
    centre, scale : float
        It goes in powers of t = (x - centre) / scale. [unit of x]
    coefficients : ndarray of float64, shape (order + 1,)
        From the constant up. [unit of y]
    covariance : ndarray of float64, shape (order + 1, order + 1)
        Theirs, from the scatter of block means about the polynomial.
    """

    centre: float
    scale: float
    coefficients: FloatArray
    covariance: FloatArray

    def value(self, x: float) -> float:
        """Give y [its unit] at x."""
        return float(self._powers(x) @ self.coefficients)

    def u_value(self, x: float) -> float:
        """Give the standard uncertainty of y [its unit] at x."""
        row = self._powers(x)
        return float(np.sqrt(row @ self.covariance @ row))

    def slope(self, x: float) -> float:
        """Give dy/dx [unit of y over unit of x] at x."""
        return float(self._first(x) @ self.coefficients)

    def u_slope(self, x: float) -> float:
        """Give the standard uncertainty of dy/dx [as `slope`] at x."""
        row = self._first(x)
        return float(np.sqrt(row @ self.covariance @ row))

    def bend(self, x: float) -> float:
        """Give the second derivative [unit of y over unit of x squared] at x."""
        return float(self._second(x) @ self.coefficients)

    def u_bend(self, x: float) -> float:
        """Give the standard uncertainty of the second derivative [as `bend`] at x."""
        row = self._second(x)
        return float(np.sqrt(row @ self.covariance @ row))

    def u_top(self, x: float) -> float:
        """Give the standard uncertainty of a top [unit of x] found at x.

        To second order in the uncertainty of the bend, by which the slope's is divided.
        """
        bend = abs(self.bend(x))
        more = 1.0 + 3.0 * (self.u_bend(x) / bend) ** 2
        return self.u_slope(x) / bend * float(np.sqrt(more))

    def root(self, slope: float, level: float, start: float) -> float:
        """Find x [its unit] near `start` where y = level + slope x, by Newton's steps.

        NaN where there is none within twice the window.
        """
        x = start
        for _ in range(_STEPS):
            steep = self.slope(x) - slope
            if steep == 0.0:
                return float("nan")
            step = (self.value(x) - level - slope * x) / steep
            x -= step
            if self._outside(x):
                return float("nan")
            if abs(step) <= _STANDS * max(abs(x), self.scale):
                break
        return x

    def top(self, start: float) -> float:
        """Find x [its unit] near `start` where the slope is zero, by Newton's steps.

        NaN where there is no top within twice the window.
        """
        x = start
        for _ in range(_STEPS):
            bend = self.bend(x)
            if not bend < 0.0:
                return float("nan")
            step = float(np.clip(self.slope(x) / bend, -self.scale, self.scale))
            x -= step
            if self._outside(x):
                return float("nan")
            if abs(step) <= _STANDS * max(abs(x), self.scale):
                break
        return x

    def _outside(self, x: float) -> bool:
        return not abs(x - self.centre) <= 2.0 * self.scale

    def _powers(self, x: float) -> FloatArray:
        t = (x - self.centre) / self.scale
        return np.asarray(t ** np.arange(self.coefficients.size), dtype=np.float64)

    def _second(self, x: float) -> FloatArray:
        t = (x - self.centre) / self.scale
        k = np.arange(self.coefficients.size)
        row = k * (k - 1) * t ** np.maximum(k - 2, 0) / self.scale**2
        return np.asarray(row, dtype=np.float64)

    def _first(self, x: float) -> FloatArray:
        t = (x - self.centre) / self.scale
        k = np.arange(self.coefficients.size)
        return np.asarray(k * t ** np.maximum(k - 1, 0) / self.scale, dtype=np.float64)


def choose_window(
    x: FloatArray,
    y: FloatArray,
    centre: float,
    between: tuple[int, int],
    alike: int = 1,
    lasting: float = 0.0,
    base: int = BASE,
) -> Window:
    """Grow a window about a place for as long as the curve in it is simple enough.

    Parameters
    ----------
    x : ndarray of float64, shape (n,)
        Abscissa, rising but for noise. [any unit]
    y : ndarray of float64, shape (n,)
        Ordinate. [any unit]
    centre : float
        The place. [unit of x]
    between : tuple of int
        Points that may be used, the end not included.
    alike : int
        Over how many points the noise is alike.
    lasting : float
        Error of y that means do not lose, such as that of a reading in steps; what bends
        no more than it is not fitted. [unit of y]
    base : int
        Order that the window is grown for: the polynomial has two more.

    Returns
    -------
    Window
        Points and order. Where fewer than `LEAST_POINTS` may be used, all of them and
        an order that they bear.

    Raises
    ------
    InvalidArgument
        If fewer than 3 points may be used.

    Notes
    -----
    The test is that of two nested polynomials (F at 1e-8); reading the larger one keeps
    what the test cannot see well below the standard uncertainty.

    References
    ----------
    Fan and Gijbels, Local Polynomial Modelling and Its Applications, Chapman and Hall
    1996 (local fits); Calonico, Cattaneo and Farrell, J. Am. Stat. Assoc. 113 (2018)
    767-779, doi:10.1080/01621459.2017.1285776 (a higher order than the window's).
    """
    low, high = between
    if high - low < 3:
        message = f"between must hold 3 points or more (it holds {high - low})"
        raise InvalidArgument(message)
    fewest = LEAST_POINTS + base - BASE
    if high - low <= fewest:
        return Window(low, high, centre, min(base + 2, (high - low - 1) // 2), 1, lasting)
    rising = np.maximum.accumulate(x[low:high])
    block = min(1 if alike == 1 else 2 * alike, (high - low) // fewest)
    least = fewest * block
    place = int(np.searchsorted(rising, centre))
    start = int(np.clip(place - least // 2, 0, high - low - least))
    window = Window(low + start, low + start + least, centre, base + 2, block, lasting)
    half = max(abs(centre - rising[start]), abs(rising[start + least - 1] - centre), 1e-300)
    ladder = _ladder(rising, window, half, low)
    failed = len(ladder)
    for k in range(0, len(ladder), _STRIDE):
        if _needs_more(x, y, ladder[k]):
            between_them = range(max(k - _STRIDE + 1, 0), k)
            failed = next((j for j in between_them if _needs_more(x, y, ladder[j])), k)
            break
    if failed == len(ladder):
        return ladder[-1] if ladder else window
    return ladder[failed - _BACK] if failed >= _BACK else window


def _ladder(rising: FloatArray, window: Window, half: float, low: int) -> list[Window]:
    """List windows about the centre of the first one, each wider, up to all points."""
    ladder: list[Window] = []
    while window.stop - window.start < rising.size:
        half *= _GROWTH
        start = low + int(np.searchsorted(rising, window.centre - half))
        stop = low + int(np.searchsorted(rising, window.centre + half, side="right"))
        window = replace(window, start=min(start, window.start), stop=max(stop, window.stop))
        ladder.append(window)
    return ladder


def fit_window(x: FloatArray, y: FloatArray, window: Window) -> LocalFit:
    """Fit the polynomial of a window.

    Parameters
    ----------
    x, y : ndarray of float64, shape (n,)
        As for `choose_window`. [any units]
    window : Window
        What to fit.

    Returns
    -------
    LocalFit
        The polynomial about the window's centre.

    Notes
    -----
    Through the means of up to 64 stretches of equal numbers of points, of powers of x as
    of y, which is exact for the polynomial; their scatter is that of the noise also
    where neighbouring points are alike.
    """
    basis, means, scale = _blocks(x, y, window)
    q, r = np.linalg.qr(basis)
    inverse = np.linalg.pinv(r)  # few different x bear fewer powers
    coefficients = inverse @ (q.T @ means)
    residual = means - basis @ coefficients
    freedom = means.size - coefficients.size
    few = freedom / (freedom - 2.0) if freedom > 4 else 3.0
    variance = few * float(residual @ residual) / max(freedom, 1)
    covariance = variance * inverse @ inverse.T
    if window.lasting > 0.0:  # it goes round once a step, and steps are 4.4 of it wide
        span = float(np.ptp(y[window.start : window.stop]))
        covariance[0, 0] += window.lasting**2 * min(1.0, 4.4 * window.lasting / max(span, 1e-300))
    return LocalFit(window.centre, scale, coefficients, covariance)


def _blocks(x: FloatArray, y: FloatArray, window: Window) -> tuple[FloatArray, FloatArray, float]:
    """Weighted means of the powers and of y over stretches of the window."""
    here = slice(window.start, window.stop)
    t = x[here] - window.centre
    scale = max(float(np.abs(t).max()), 1e-300)
    t = t / scale
    n = t.size
    count = min(max(n // window.least_block, window.order + 1), n, _BLOCKS)
    edges = np.arange(count) * n // count
    root = np.sqrt(np.diff(np.append(edges, n)))
    power = np.ones(n)
    columns = []
    for _ in range(window.order + 1):
        columns.append(np.add.reduceat(power, edges) / root)
        power = power * t
    return np.column_stack(columns), np.add.reduceat(y[here], edges) / root, scale


def _needs_more(x: FloatArray, y: FloatArray, window: Window) -> bool:
    """Whether the window's curve needs the two highest powers of its order, or still more."""
    basis, means, _ = _blocks(x, y, window)
    q, _ = np.linalg.qr(basis)
    part = q.T @ means
    residual = means - q @ part
    freedom = means.size - part.size
    rest = float(residual @ residual) / freedom
    enough = means.size >= _ENOUGH
    noise = roughness(residual) ** 2 if enough else rest
    size = (window.stop - window.start) / means.size
    steps = window.lasting**2 * size * max(1.0, means.size / _COHERENT)
    rounding = float(np.finfo(float).eps ** 2 * (means @ means))
    noise = max(noise, rounding, steps)
    further = 0.5 * freedom * (_CHANCE ** (-2.0 / freedom) - 1.0)  # F(2, freedom) by chance
    return float(part[-2:] @ part[-2:]) / 2.0 > further * noise or rest > _ROUGH * noise
