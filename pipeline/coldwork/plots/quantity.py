"""Names, units and scales of the quantities on a plot's axes."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import floor, log10

import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import FuncFormatter, LogLocator, MaxNLocator, NullFormatter, ScalarFormatter

from coldwork.plots.columns import FloatArray
from coldwork.plots.names import shown

__all__ = ["Scale", "heading", "robust_limits", "scale_of", "written"]

_HEADINGS = {
    "hardness": ("Hardness", "kgf/mm²"),
    "flow_stress_mpa": ("Flow stress", "MPa"),
    "baseline_stress_mpa": ("Baseline stress", "MPa"),
    "dislocation_stress_mpa": ("Dislocation stress", "MPa"),
    "dislocation_density_per_m2": ("Dislocation density", "m⁻²"),
    "mean_spacing_nm": ("Mean spacing of dislocations", "nm"),
    "line_energy_j_per_m": ("Line energy", "J/m"),
    "stored_energy_j_per_m3": ("Stored energy in dislocations", "J/m³"),
    "stored_energy_j_per_mol": ("Stored energy in dislocations", "J/mol"),
    "stored_energy_j_per_g": ("Stored energy in dislocations", "J/g"),
    "temperature_rise_k": ("Temperature rise if the stored energy were released", "K"),
    "stored_fraction_of_work": ("Stored fraction of the plastic work", "1"),
    "plastic_work_j_per_m3": ("Plastic work of the test", "J/m³"),
}
_SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_WIDE = 50.0  # largest over middle value from which an axis is logarithmic


_FENCE = 4.0  # about six standard deviations of a normal distribution


@dataclass(frozen=True)
class Scale:
    """The axis of one quantity, the same on every page.

    Attributes
    ----------
    label : str
        Heading and unit.
    factor : float
        What the column's values are multiplied by on the axis. [1]
    low, high : float
        Ends of the axis. [column's unit times `factor`]
    logarithmic : bool
        Whether equal steps are equal ratios.
    """

    label: str
    factor: float
    low: float
    high: float
    logarithmic: bool = False

    def inside(self, end: int) -> float:
        """Give the place just inside the lower (0) or upper (1) end, for what lies beyond it."""
        room = 0.02 * (self.high - self.low)
        return self.high - room if end else self.low + room

    def on(self, axes: Axes, *, upright: bool = False, ticks: int = 8) -> None:
        """Set a panel's horizontal axis, or its upright one, to this scale."""
        axis = axes.yaxis if upright else axes.xaxis
        if self.logarithmic:
            (axes.set_yscale if upright else axes.set_xscale)("log")
            axis.set_major_locator(LogLocator(numticks=ticks + 1))
            axis.set_major_formatter(FuncFormatter(lambda x, _: f"10{_superscript(log10(x))}"))
            axis.set_minor_formatter(NullFormatter())
        else:
            axis.set_major_locator(MaxNLocator(ticks, steps=[1, 2, 2.5, 5, 10]))
            axis.set_major_formatter(ScalarFormatter(useOffset=False, useMathText=False))
        (axes.set_ylim if upright else axes.set_xlim)(self.low, self.high)


def heading(column: str) -> tuple[str, str]:
    """Give the heading and the unit of a published column."""
    return _HEADINGS.get(column, (shown(column), ""))


def scale_of(
    column: str, values: Sequence[FloatArray], *, detail: str = "", zero: bool = True
) -> Scale:
    """Fit an axis to a quantity.

    Parameters
    ----------
    column : str
        The quantity's column in `coupons.csv`.
    values : sequence of ndarray
        Everything that has to stand on the axis. [the column's unit]
    detail : str
        What follows the heading, such as the hardness scale.
    zero : bool
        Whether the axis begins at zero where zero is near.

    Returns
    -------
    Scale
        Logarithmic where half of the positive values lie below a fiftieth of the
        largest and none is negative.
    """
    title, unit = heading(column)
    title = f"{title} {detail}".strip()
    everything = np.concatenate([np.ravel(x) for x in values]) if values else np.empty(0)
    everything = everything[np.isfinite(everything)]
    positive = everything[everything > 0.0]
    if not positive.size:
        positive = np.ones(1)
    high = float(positive.max())
    if high / float(np.median(positive)) > _WIDE and not (everything < 0.0).any():
        low = max(float(positive.min()), high / 1e5)
        return Scale(f"{title} [{unit}]", 1.0, low / 1.4, high * 1.4, logarithmic=True)
    power = floor(log10(high)) if high >= 1e5 or high < 1e-2 else 0
    factor = 10.0**-power
    on_axis = everything * factor if everything.size else positive
    low, high = _padded(float(on_axis.min()), float(on_axis.max()))
    near = zero and on_axis.min() < 0.4 * on_axis.max()
    if on_axis.min() >= 0.0 and (near or low < 0.0):
        low = 0.0
    unit = f"10{_superscript(power)} {unit}".strip() if power else unit
    return Scale(f"{title} [{unit}]" if unit else title, factor, low, high)


def written(x: float) -> str:
    """Write a number as people do, large and small ones with a power of ten."""
    if x == 0.0 or 1e-3 <= abs(x) < 1e5:
        return f"{x:g}"
    mantissa, power = f"{x:e}".split("e")
    digits = f"{float(mantissa):g}"
    return (
        f"10{_superscript(int(power))}"
        if digits == "1"
        else f"{digits} × 10{_superscript(int(power))}"
    )


def robust_limits(values: FloatArray, always: FloatArray) -> tuple[float, float]:
    """Give the ends of an axis that one wild value does not spoil.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Points; what lies farther out from the middle half of them than four times
        its width is to be drawn at the edge.
    always : ndarray, shape (m,)
        What must lie inside.

    Returns
    -------
    tuple of float
        The two ends. [the unit of `values`]
    """
    good = values[np.isfinite(values)]
    must = always[np.isfinite(always)]
    if good.size:
        first, third = np.percentile(good, [25.0, 75.0])
        room = _FENCE * (third - first) or np.inf
        inside = (good >= first - room) & (good <= third + room)
        must = np.concatenate([must, good[inside]])
    if not must.size:
        return 0.0, 1.0
    return _padded(float(must.min()), float(must.max()))


def _padded(low: float, high: float) -> tuple[float, float]:
    room = 0.05 * (high - low) or 0.05 * abs(high) or 1.0
    return low - room, high + room


def _superscript(power: float) -> str:
    return str(round(power)).translate(_SUPERSCRIPTS)
