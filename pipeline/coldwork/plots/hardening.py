"""Hardening rate against true stress, with the line that gives theta_0 and sigma_s."""

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure

from coldwork.plots.columns import FloatArray, Frames, frame_of, numbers
from coldwork.plots.context import Context
from coldwork.plots.curves import CurveRows
from coldwork.plots.grid import Caption, Remark, grid_pages
from coldwork.plots.names import counted
from coldwork.plots.quantity import Scale
from coldwork.plots.sheet import Sheet
from coldwork.plots.style import BLUE, GREY, INK, PAPER, Dashes, Mark, house

__all__ = ["draw"]

_RATE = Mark("o", 2.0, PAPER, INK, 0.5)
_CONSIDERE = Mark("", 0.0, GREY, GREY)
_LINE = Mark("", 0.0, BLUE, BLUE)
_DASHED: Dashes = (0, (5.0, 2.0))
_DOTTED: Dashes = (0, (1.2, 1.4))
_NOTES = (
    "The line is fitted to the hardening rates and meets no stress at theta_0 and no rate at "
    "sigma_s, both of the whole flow stress; tensile.csv has them with the baseline taken off. "
    "Below the dotted line, where the rate is less than the stress, straining is not uniform.",
)


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw the hardening rate of each curve against its true stress.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `tensile`, and `curve_rates` with `coupon_id`, `stress_mpa`, `rate_mpa` and `u_mpa`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no curve has a rate.
    """
    rates = frame_of(frames, "curve_rates")
    with house():
        rows = CurveRows.of(frames)
        if not len(rates):
            return []
        each = {str(name): group for name, group in rates.groupby("coupon_id", sort=False)}
        theta = numbers(rows.table, "hardening_at_zero_stress_mpa")
        limit = numbers(rows.table, "stress_at_zero_hardening_mpa")
        chosen = [i for i, name in enumerate(rows.ids) if name in each]
        ends = _ends(numbers(rates, "stress_mpa"), numbers(rates, "rate_mpa"), theta, limit)
        sheet = Sheet(
            "Hardening rate against true stress",
            context,
            [counted(len(chosen), "curve")],
            _key(theta),
            [*_NOTES, *rows.notes()],
        )
        captions = [Caption("hardening rate [MPa]")]
        names = [rows.ids[i] for i in chosen]
        remarks = [_remark(float(theta[i]), float(limit[i])) for i in chosen]
        figures = []
        for figure, cells in grid_pages(sheet, names, remarks, captions, "true stress [MPa]"):
            for cell in cells:
                axes, i = cell.panels[0], chosen[cell.place]
                Scale("", 1.0, 0.0, ends[0]).on(axes, ticks=4)
                Scale("", 1.0, 0.0, ends[1]).on(axes, upright=True, ticks=4)
                mine = each[rows.ids[i]]
                _draw_rates(axes, *(numbers(mine, c) for c in ("stress_mpa", "rate_mpa", "u_mpa")))
                _draw_lines(axes, float(theta[i]), float(limit[i]), ends)
            figures.append(figure)
        return figures


def _remark(theta: float, limit: float) -> Remark:
    if not np.isfinite(theta) or not np.isfinite(limit):
        return Remark("no line")
    return Remark(f"{theta:.0f}, {limit:.0f} MPa")


def _ends(
    stress: FloatArray, rate: FloatArray, theta: FloatArray, limit: FloatArray
) -> tuple[float, float]:
    """Fit the axes to the lines where they are near the rates, and to most of those."""
    right = float(np.nanmax(stress))
    near = limit[np.isfinite(limit) & (limit > 0.0) & (limit < 2.0 * right)]
    top = float(np.nanpercentile(rate, 97.0))
    high = theta[np.isfinite(theta) & (theta > 0.0) & (theta < 3.0 * top)]
    return (
        1.08 * max(right, float(near.max()) if near.size else 0.0),
        1.12 * max(top, float(high.max()) if high.size else 0.0),
    )


def _draw_rates(axes: Axes, stress: FloatArray, rate: FloatArray, u: FloatArray) -> None:
    ends = np.stack([stress, rate - u, stress, rate + u], axis=-1).reshape(-1, 2, 2)
    known = np.isfinite(ends).all(axis=(1, 2))
    many = len(stress) > 60
    axes.add_collection(
        LineCollection(list(ends[known]), linewidths=0.5, colors=GREY, rasterized=many, zorder=2.0),
        autolim=False,
    )
    _RATE.put(axes, stress, rate, raster=True, scale=0.8 if many else 1.0)


def _draw_lines(axes: Axes, theta: float, limit: float, ends: tuple[float, float]) -> None:
    reach = min(ends)
    axes.plot([0.0, reach], [0.0, reach], color=GREY, linewidth=0.8, linestyle=_DOTTED, zorder=1.8)
    if np.isfinite(theta) and np.isfinite(limit):
        axes.plot(
            [0.0, limit], [theta, 0.0], color=BLUE, linewidth=1.1, linestyle=_DASHED, zorder=2.6
        )


def _key(theta: FloatArray) -> list[tuple[Artist, str]]:
    found: list[tuple[Artist, str]] = [
        (_RATE.sample(0.7, colour=GREY), "hardening rate, with its own standard uncertainty"),
    ]
    if np.isfinite(theta).any():
        found.append((_LINE.sample(1.1, _DASHED), "its line: theta_0, sigma_s beside the name"))
    found.append((_CONSIDERE.sample(0.9, _DOTTED), "rate equal to stress (Considère)"))
    return found
