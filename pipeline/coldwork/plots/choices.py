"""What other choices move: ratios to the sheet's own results, beside the u that these state."""

from collections.abc import Sequence
from typing import Final

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Patch

from coldwork.plots.columns import Frames, frame_of, numbers
from coldwork.plots.context import Context
from coldwork.plots.names import counted, told_apart
from coldwork.plots.quantity import Scale, scale_of
from coldwork.plots.rows import Panel, Rows, row_pages
from coldwork.plots.sheet import Sheet
from coldwork.plots.spans import MEAN, Spans, draw_spans
from coldwork.plots.style import FAINT, INK, Mark, Sizes, house

__all__ = ["draw"]

_PANELS: Final = {
    "dislocation_density_per_m2": "Density over the sheet's own [1]",
    "stored_energy_j_per_g": "Stored energy over the sheet's own [1]",
}
_NAME_ROOM: Final = 3.2  # for the name of a choice [inch]
_CAP: Final = Mark("|", 5.0, INK, INK, 0.9)


def draw(
    frames: Frames, names: Sequence[str], keys: Sequence[str], context: Context
) -> list[Figure]:
    """Draw a row for each choice: median and range of the ratio, over 1 -+ u.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        `compare_choices`.
    names : sequence of str
        Of the choices by their number.
    keys : sequence of str
        What they are the values of.
    context : Context
        The batch.

    Returns
    -------
    list of Figure
        Pages in order; none where no choice has a ratio.
    """
    table = frame_of(frames, "compare_choices")
    parts = {q: table[table["quantity"] == q] for q in _PANELS} if len(table) else {}
    spans, shares = [], []
    for part in parts.values():
        median, least, greatest = (
            numbers(part, f"{name}_ratio") for name in ("median", "least", "greatest")
        )
        unknown = np.full(len(part), np.nan)
        spans.append(Spans(median, least, greatest, unknown, unknown))
        shares.append(float(numbers(part, "relative_u")[0]))
    if not spans or not np.isfinite(spans[0].value[1:]).any():
        return []
    with house():
        labels = told_apart(list(names), Sizes.small, _NAME_ROOM)
        nothing = tuple("" for _ in names)
        rows = Rows(tuple(names), tuple(labels), nothing, nothing)
        coupons = int(numbers(table, "coupons").max())
        key: list[tuple[Artist, str]] = [
            (MEAN.sample(), "median of the coupons"),
            (_CAP.sample(0.9), "least to greatest"),
            (Patch(facecolor=FAINT, edgecolor="none"), "1 ± relative u of the sheet's own, median"),
        ]
        notes = ["Which choice is right is not told by how far it moves a result."]
        facts = [counted(coupons, "coupon"), f"choices of {' · '.join(keys)}"]
        sheet = Sheet("What other choices move", context, facts, key, notes)
        panels = [Panel(label) for label in _PANELS.values()]
        scales = [_scale(each, share) for each, share in zip(spans, shares, strict=True)]
        figures = []
        for page in row_pages(sheet, rows, np.arange(len(names)), panels):
            lines = np.arange(len(page.places), dtype=np.float64)
            for i, axes in enumerate(page.panels):
                scales[i].on(axes, ticks=5)
                _draw_band(axes, shares[i])
                here = spans[i].at(page.places)
                draw_spans(axes, here, lines)
                known = np.isfinite(here.value)
                page.put(MEAN, here.value[known], lines[known], panel=i)
            figures.append(page.figure)
        return figures


def _scale(spans: Spans, share: float) -> Scale:
    ends = np.array([1.0 - share, 1.0 + share])
    every = [spans.value, spans.lower, spans.upper, ends[ends > 0.0]]
    found = scale_of("", every, zero=False)
    return Scale("", 1.0, found.low / found.factor, found.high / found.factor, found.logarithmic)


def _draw_band(axes: Axes, share: float) -> None:
    low, _ = axes.get_xlim()
    if np.isfinite(share):
        axes.axvspan(max(1.0 - share, low), 1.0 + share, facecolor=FAINT, linewidth=0, zorder=0.2)
    axes.axvline(1.0, color=INK, linewidth=0.8, zorder=1.0)
