"""A calibration: its points and line, its residuals, and the ellipse of its two constants."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from coldwork.plots.columns import FloatArray
from coldwork.plots.quantity import Scale, written
from coldwork.plots.sheet import EDGE, WIDTH, Sheet, add_panel, open_sheet
from coldwork.plots.style import BLUE, FAINT, GREY, INK, PAPER, RED, Mark, house

__all__ = ["Constants", "Picture", "draw"]

_POINT = Mark("o", 4.0, PAPER, INK, 0.9)
_BAD = Mark("X", 6.0, RED, INK, 0.6)
_MIDDLE = Mark("P", 5.0, BLUE, BLUE, 0.4)
_LINE = Mark("", 0.0, BLUE, BLUE)
_LEFT, _WIDE, _GAP = EDGE + 0.75, 4.9, 0.95  # [inch]
_HIGH, _LOW, _BETWEEN = 3.3, 1.2, 0.12  # of the two panels on the left [inch]
_MANY = 60  # points, from which their marks are smaller


@dataclass(frozen=True)
class Constants:
    """The two constants of a line.

    Attributes
    ----------
    labels : tuple of str
        What they are, with unit.
    values : tuple of float
        Theirs. [units of the labels]
    covariance : ndarray, shape (2, 2)
        Theirs. [products of those]
    reach2 : float
        Square of the radius, in standard uncertainties, at which the ellipse holds the two with
        the coverage. [1]
    """

    labels: tuple[str, str]
    values: tuple[float, float]
    covariance: FloatArray
    reach2: float


@dataclass(frozen=True)
class Picture:
    """What is drawn of a calibration of n points.

    Attributes
    ----------
    title : str
        What is held against what.
    facts : sequence of str
        The line under the title.
    notes : sequence of str
        Sentences below.
    labels : tuple of str
        Of x and y, with unit.
    x, y, u_x, u_y, residual, leverage : ndarray, shape (n,)
        The points. [units of the labels], [1]
    bad : int or None
        Place of the one point that is to blame.
    line : tuple of float
        Intercept and slope. [units of the labels]
    line_covariance : ndarray, shape (2, 2)
        Theirs.
    k : float
        Standard uncertainties on each side of the line that hold it with 95 %. [1]
    constants : Constants or None
        Those of a line; None where there is one constant alone.
    """

    title: str
    facts: Sequence[str]
    notes: Sequence[str]
    labels: tuple[str, str]
    x: FloatArray
    y: FloatArray
    u_x: FloatArray
    u_y: FloatArray
    residual: FloatArray
    leverage: FloatArray
    bad: int | None
    line: tuple[float, float]
    line_covariance: FloatArray
    k: float
    constants: Constants | None


def draw(picture: Picture) -> Figure:
    """Draw a calibration.

    Parameters
    ----------
    picture : Picture
        What there is to draw.

    Returns
    -------
    Figure
        One page.
    """
    with house():
        sheet = Sheet(picture.title, None, picture.facts, _key(picture), picture.notes)
        figure, base = open_sheet(sheet, _HIGH + _LOW + _BETWEEN + 0.75)
        alone = picture.constants is None
        wide = WIDTH - _LEFT - EDGE if alone else _WIDE
        low = add_panel(figure, _LEFT, base + 0.5, wide, _LOW)
        high = add_panel(figure, _LEFT, base + 0.5 + _LOW + _BETWEEN, wide, _HIGH)
        span = _span(picture.x, picture.u_x)
        _draw_points(high, picture, span)
        _draw_residuals(low, picture, span)
        if picture.constants is not None:
            left = _LEFT + _WIDE + _GAP
            side = WIDTH - EDGE - left
            panel = add_panel(figure, left, base + 0.5 + _LOW + _BETWEEN + 0.45, side, side)
            _draw_ellipse(panel, picture.constants)
        return figure


def _key(picture: Picture) -> list[tuple[Artist, str]]:
    found: list[tuple[Artist, str]] = [
        (_POINT.sample(0.7, colour=GREY), "coupon, with its standard uncertainties"),
        (_LINE.sample(1.2), "fit, and where it lies with 95 %"),
    ]
    if picture.bad is not None:
        found.append((_BAD.sample(), "coupon that lies too far off"))
    if picture.constants is not None:
        found.append((_MIDDLE.sample(), "constants, and the ellipse that holds both with 95 %"))
    return found


def _span(values: FloatArray, u: FloatArray) -> tuple[float, float]:
    low, high = float((values - u).min()), float((values + u).max())
    room = 0.05 * (high - low) or 1.0
    return low - room, high + room


def _power(low: float, high: float) -> float:
    """Give what an axis is divided by, so that its numbers stay short."""
    size = max(abs(low), abs(high))
    return 1.0 if 1e-2 <= size < 1e5 else float(10.0 ** np.floor(np.log10(size)))


def _axis(axes: Axes, label: str, ends: tuple[float, float], *, upright: bool = False) -> None:
    """Set an axis with few ticks, its power of ten in the label."""
    power = _power(*ends)
    Scale("", 1.0, ends[0], ends[1]).on(axes, upright=upright, ticks=5)
    axis = axes.yaxis if upright else axes.xaxis
    if power != 1.0 and label:
        axis.set_major_formatter(lambda value, _: f"{value / power:g}")
        head, _, unit = label.rpartition(" [")
        label = f"{head} [{written(power)} {unit}"
    (axes.set_ylabel if upright else axes.set_xlabel)(label)


def _draw_points(axes: Axes, picture: Picture, span: tuple[float, float]) -> None:
    x, y, u_x, u_y = picture.x, picture.y, picture.u_x, picture.u_y
    over = np.linspace(*span, 200)
    level = picture.line[0] + picture.line[1] * over
    c = picture.line_covariance
    band = picture.k * np.sqrt(c[0, 0] + 2.0 * over * c[0, 1] + over**2 * c[1, 1])
    axes.fill_between(over, level - band, level + band, color=FAINT, linewidth=0.0, zorder=1.5)
    axes.plot(over, level, color=BLUE, linewidth=1.2, zorder=2.2)
    ends = np.concatenate(
        [
            np.stack([x - u_x, y, x + u_x, y], axis=-1).reshape(-1, 2, 2),
            np.stack([x, y - u_y, x, y + u_y], axis=-1).reshape(-1, 2, 2),
        ]
    )
    axes.add_collection(LineCollection(list(ends), linewidths=0.7, colors=GREY, zorder=2.5))
    _put(axes, picture, y)
    low, high = _span(y, u_y)
    _axis(axes, "", span)
    axes.set_xticklabels([])
    _axis(axes, picture.labels[1], (low, high), upright=True)


def _draw_residuals(axes: Axes, picture: Picture, span: tuple[float, float]) -> None:
    spread = np.sqrt(np.maximum(1.0 - picture.leverage, 1e-9))
    off = picture.residual / spread
    reach = 1.15 * max(2.6, float(np.abs(off).max()))
    for level in (-2.0, 0.0, 2.0):
        axes.axhline(level, color=GREY, linewidth=0.8 if level == 0.0 else 0.5, zorder=1.8)
    _put(axes, picture, off)
    _axis(axes, picture.labels[0], span)
    Scale("", 1.0, -reach, reach).on(axes, upright=True, ticks=4)
    axes.set_ylabel("residual / u")


def _put(axes: Axes, picture: Picture, y: FloatArray) -> None:
    good = np.ones(len(y), dtype=np.bool_)
    if picture.bad is not None:
        good[picture.bad] = False
        _BAD.put(axes, picture.x[[picture.bad]], y[[picture.bad]])
    scale = 0.6 if len(y) > _MANY else 1.0
    _POINT.put(axes, picture.x[good], y[good], scale=scale)


def _draw_ellipse(axes: Axes, constants: Constants) -> None:
    root = np.linalg.cholesky(constants.covariance)
    turn = np.linspace(0.0, 2.0 * np.pi, 241)
    circle = np.sqrt(constants.reach2) * np.stack([np.cos(turn), np.sin(turn)])
    ring = np.array(constants.values)[:, None] + root @ circle
    axes.plot(ring[0], ring[1], color=BLUE, linewidth=1.2, zorder=2.2)
    a, b = constants.values
    u_a, u_b = np.sqrt(np.diagonal(constants.covariance))
    cross = [[(a - u_a, b), (a + u_a, b)], [(a, b - u_b), (a, b + u_b)]]
    axes.add_collection(LineCollection(cross, linewidths=0.7, colors=GREY, zorder=2.4))
    _MIDDLE.put(axes, np.array([a]), np.array([b]))
    for upright, values in ((False, ring[0]), (True, ring[1])):
        room = 0.08 * float(np.ptp(values))
        ends = (float(values.min()) - room, float(values.max()) + room)
        _axis(axes, constants.labels[int(upright)], ends, upright=upright)
        (axes.yaxis if upright else axes.xaxis).set_major_locator(MaxNLocator(4))
