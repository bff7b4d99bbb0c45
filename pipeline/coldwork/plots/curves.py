"""Tensile and compression curves: whole, and about yield with elastic line and offset."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from coldwork.plots.columns import FloatArray, Frames, frame_of, numbers, texts
from coldwork.plots.context import Context
from coldwork.plots.grid import Caption, Cell, Remark, grid_pages
from coldwork.plots.names import counted, listed
from coldwork.plots.quantity import Scale
from coldwork.plots.sheet import Sheet
from coldwork.plots.style import BLUE, GREY, INK, PAPER, Dashes, Mark, house

__all__ = ["CurveRows", "draw"]

_OFFSET = 0.002  # of the proof stress that is drawn [1]
_DASHED: Dashes = (0, (5.0, 2.0))
_DOTTED: Dashes = (0, (1.2, 1.4))
_LINE = Mark("", 0.0, INK, INK)
_SLOPE = Mark("", 0.0, BLUE, BLUE)
_REST = Mark("", 0.0, GREY, GREY)
_PROOF = Mark("D", 4.6, PAPER, INK, 0.9)
_TOP = Mark("^", 4.8, INK, INK, 0.8)
_GRAVE = frozenset(
    (
        "too-few-points",
        "few-elastic-points",
        "ends-before-yield",
        "stress-impossible",
        "slope-impossible",
        "grip-slip",
        "extensometer-slip",
        "curve-without-geometry",
    )
)


@dataclass(frozen=True)
class CurveRows:
    """The rows of `tensile` that have a curve, in the order of the table.

    Attributes
    ----------
    table : DataFrame
        They, with a fresh index.
    ids : list of str, length n
        Their coupons.
    remarks : list of Remark, length n
        The rules that fired on each curve.
    without : list of str
        Coupons that have no curve.
    """

    table: pd.DataFrame
    ids: list[str]
    remarks: list[Remark]
    without: list[str]

    @classmethod
    def of(cls, frames: Frames) -> "CurveRows":
        """Take them from `tensile`."""
        table = frame_of(frames, "tensile")
        used = numbers(table, "points_used") > 0.0
        mine = table[used].reset_index(drop=True) if len(table) else table
        names = np.array(texts(table, "coupon_id"), dtype=object)
        remarks = [
            Remark(text.replace(";", ", "), grave=bool(_GRAVE & set(text.split(";"))))
            for text in texts(mine, "flags")
        ]
        return cls(mine, texts(mine, "coupon_id"), remarks, names[~used].tolist())

    def notes(self) -> list[str]:
        """Say which coupons have no curve."""
        return [f"No curve: {listed(self.without)}."] if self.without else []


@dataclass(frozen=True)
class _Ends:
    """Ends of the axes of all cells: strain and stress of the whole, strain about yield."""

    strain: float
    stress: float
    about_yield: float


def draw(frames: Frames, context: Context) -> list[Figure]:
    """Draw each curve whole, and its part about yield.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `tensile`; `curve_lines` with `coupon_id`, `part` (`whole` or `yield`), `strain`
        and `stress_mpa`; `curve_slopes` with `coupon_id` and `slope_mpa`.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where there is no curve.
    """
    lines = frame_of(frames, "curve_lines")
    with house():
        rows = CurveRows.of(frames)
        if not rows.ids or not len(lines):
            return []
        parts = {
            part: {
                str(name): group
                for name, group in lines[lines["part"] == part].groupby("coupon_id", sort=False)
            }
            for part in ("whole", "yield")
        }
        slopes = _slopes(frames, rows.ids)
        ends = _ends(lines, rows, slopes)
        captions = [
            Caption("stress [MPa]"),
            Caption("about yield", numbered=False),
        ]
        sheet = Sheet(
            "Curves, whole and about yield",
            context,
            [counted(len(rows.ids), "curve")],
            _key(rows),
            [*_NOTES, *rows.notes()],
        )
        figures = []
        pages = grid_pages(sheet, rows.ids, rows.remarks, captions, "engineering strain [%]")
        for figure, cells in pages:
            for cell in cells:
                name = rows.ids[cell.place]
                whole, about = (parts[part].get(name) for part in ("whole", "yield"))
                _draw(cell, rows.table, (whole, about), float(slopes[cell.place]), ends)
            figures.append(figure)
        return figures


_NOTES = (
    "Engineering stress and strain, the strain corrected for the toe. Grey: past the end of "
    "uniform strain, where nothing is evaluated. Curves are thinned for the picture; each pixel "
    "column keeps its extremes.",
)


def _slopes(frames: Frames, ids: Sequence[str]) -> FloatArray:
    table = frame_of(frames, "curve_slopes")
    known = dict(zip(texts(table, "coupon_id"), numbers(table, "slope_mpa"), strict=True))
    return np.array([known.get(name, np.nan) for name in ids], dtype=np.float64)


def _ends(lines: pd.DataFrame, rows: CurveRows, slopes: FloatArray) -> _Ends:
    """Fit the axes to what is trusted; to everything where nothing is."""
    sound = {name for name, remark in zip(rows.ids, rows.remarks, strict=True) if not remark.grave}
    trusted = lines[lines["coupon_id"].isin(sound)]
    shown = trusted if len(trusted) else lines
    with np.errstate(invalid="ignore", divide="ignore"):
        knee = numbers(rows.table, "proof_stress_0_2_mpa") / slopes + _OFFSET
    knee = knee[np.isfinite(knee)]
    about = 2.2 * float(knee.max()) if knee.size else 0.01
    stress, strain = numbers(shown, "stress_mpa"), numbers(shown, "strain")
    return _Ends(max(1.04 * float(np.nanmax(strain)), 1e-4), 1.08 * float(np.nanmax(stress)), about)


def _draw(
    cell: Cell,
    table: pd.DataFrame,
    parts: tuple[pd.DataFrame | None, pd.DataFrame | None],
    slope: float,
    ends: _Ends,
) -> None:
    row = table.iloc[[cell.place]]
    value = {name: float(numbers(row, name)[0]) for name in _NEEDED}
    each = zip(cell.panels, parts, (ends.strain, ends.about_yield), (4, 3), strict=True)
    for axes, part, end, ticks in each:
        Scale("", 1.0, 0.0, 100.0 * end).on(axes, ticks=ticks)
        Scale("", 1.0, 0.0, ends.stress).on(axes, upright=True, ticks=4)
        if part is not None:
            _draw_line(axes, part, value["elongation_at_maximum_force"])
    whole, about = cell.panels
    top = np.array([value["tensile_strength_mpa"]])
    _TOP.put(whole, np.array([100.0 * value["elongation_at_maximum_force"]]), top)
    if np.isfinite(slope):
        _draw_slope(about, slope, value["proof_stress_0_2_mpa"], ends)


_NEEDED = ("elongation_at_maximum_force", "tensile_strength_mpa", "proof_stress_0_2_mpa")


def _draw_line(axes: Axes, part: pd.DataFrame, end: float) -> None:
    strain, stress = 100.0 * numbers(part, "strain"), numbers(part, "stress_mpa")
    split = len(strain)
    if np.isfinite(end):
        beyond = np.flatnonzero(strain > 100.0 * end)
        split = int(beyond[0]) + 1 if beyond.size else split
    many = len(strain) > 400
    rest, used = slice(max(split - 1, 0), None), slice(split)
    for here, colour, wide in ((rest, GREY, 0.6), (used, INK, 0.8)):
        axes.plot(
            strain[here],
            stress[here],
            color=colour,
            linewidth=wide,
            rasterized=many,
            solid_joinstyle="round",
            zorder=2.5,
        )


def _draw_slope(axes: Axes, slope: float, proof: float, ends: _Ends) -> None:
    reach = ends.stress / slope
    for offset, dashes in ((0.0, _DASHED), (_OFFSET, _DOTTED)):
        axes.plot(
            [100.0 * offset, 100.0 * (offset + reach)],
            [0.0, ends.stress],
            color=BLUE,
            linewidth=0.9,
            linestyle=dashes,
            zorder=2.7,
        )
    if np.isfinite(proof):
        _PROOF.put(axes, np.array([100.0 * (_OFFSET + proof / slope)]), np.array([proof]))


def _key(rows: CurveRows) -> list[tuple[Artist, str]]:
    found: list[tuple[Artist, str]] = [
        (_LINE.sample(0.9), "curve"),
        (_REST.sample(0.9), "past uniform strain"),
        (_SLOPE.sample(1.0, _DASHED), "elastic line"),
        (_SLOPE.sample(1.0, _DOTTED), f"the same, offset by {100.0 * _OFFSET:g} %"),
    ]
    if np.isfinite(numbers(rows.table, "proof_stress_0_2_mpa")).any():
        found.append((_PROOF.sample(), "proof stress"))
    if np.isfinite(numbers(rows.table, "tensile_strength_mpa")).any():
        found.append((_TOP.sample(), "greatest force"))
    return found
