"""The sheet that a plot stands on: title, batch, key and notes about the panels.

All places are worked out from the widths of the words beforehand, so that nothing
can run into anything else and no layout has to be searched for.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.legend import Legend

from coldwork.plots.context import Context
from coldwork.plots.names import fitted, shown, width, wrapped
from coldwork.plots.style import FAINT, GREY, INK, Sizes

__all__ = ["EDGE", "WIDTH", "Sheet", "add_panel", "open_sheet"]

WIDTH = 9.0  # of every figure [inch]
EDGE = 0.15  # left and right margin [inch]
_TITLE_HIGH, _FACT_HIGH, _KEY_HIGH, _NOTE_HIGH = 0.42, 0.17, 0.19, 0.155  # [inch]
_SAMPLE = 0.34  # width of a sample in the key [inch]
_SAMPLE_GAP, _COLUMN_GAP = 0.08, 0.3  # [inch]


@dataclass(frozen=True)
class Sheet:
    """The words around the panels of a figure.

    Attributes
    ----------
    title : str
        What is shown.
    context : Context or None
        The batch, where there is one.
    facts : sequence of str
        What else stands in the line under the title.
    key : sequence of (Artist, str)
        Samples and what they mean.
    notes : sequence of str
        Sentences below the panels.
    """

    title: str
    context: Context | None
    facts: Sequence[str]
    key: Sequence[tuple[Artist, str]]
    notes: Sequence[str]


def open_sheet(sheet: Sheet, inner: float) -> tuple[Figure, float]:
    """Start a figure with its title, key and notes.

    Parameters
    ----------
    sheet : Sheet
        The words.
    inner : float
        Height for the panels with all their labels. [inch]

    Returns
    -------
    tuple of Figure and float
        The figure, and the height above its lower edge at which `inner` begins. [inch]
    """
    room = WIDTH - 2.0 * EDGE
    facts = wrapped(" · ".join([*_batch(sheet.context), *sheet.facts]), Sizes.words, room)
    notes = [line for note in sheet.notes for line in wrapped(note, Sizes.small, room)]
    columns, key_lines = _key_shape([label for _, label in sheet.key], room)
    above_key = _TITLE_HIGH + _FACT_HIGH * len(facts)
    top = above_key + (_KEY_HIGH * key_lines + 0.05 if key_lines else 0.0)
    bottom = 0.12 + _NOTE_HIGH * len(notes)
    height = top + inner + bottom
    figure = Figure(figsize=(WIDTH, height))
    batch = f", batch {shown(sheet.context.batch_id)}" if sheet.context else ""
    figure.set_label(f"{sheet.title}{batch}")

    def write(text: str, down: float, size: float, colour: str, weight: str = "normal") -> None:
        at = (EDGE / WIDTH, 1.0 - down / height)
        figure.text(*at, text, va="baseline", fontsize=size, color=colour, fontweight=weight)

    write(sheet.title, 0.28, Sizes.title, INK, "bold")
    for i, line in enumerate(facts):
        write(line, 0.47 + _FACT_HIGH * i, Sizes.words, GREY)
    for i, line in enumerate(notes):
        write(line, height - bottom + 0.12 + _NOTE_HIGH * i, Sizes.small, GREY)
    if sheet.key:
        _add_key(figure, sheet.key, columns, 1.0 - (above_key + 0.04) / height)
    return figure, bottom


def add_panel(figure: Figure, left: float, bottom: float, wide: float, high: float) -> Axes:
    """Add a panel with a faint grid at a place on the figure, in inches."""
    whole_wide, whole_high = figure.get_size_inches()
    box = (left / whole_wide, bottom / whole_high, wide / whole_wide, high / whole_high)
    axes = figure.add_axes(box)
    axes.grid(color=FAINT, linewidth=0.4)
    return axes


def _batch(context: Context | None) -> list[str]:
    if context is None:
        return []
    name = fitted(shown(context.batch_id), Sizes.words, 3.5)
    metal = fitted(shown(context.material), Sizes.words, 2.0)
    return [f"Batch {name}", metal, f"{context.route} route{'s' * (context.route == 'both')}"]


def _key_shape(labels: Sequence[str], room: float) -> tuple[int, int]:
    widths = np.array([_SAMPLE + _SAMPLE_GAP + width(label, Sizes.words) for label in labels])
    for columns in range(len(labels), 1, -1):
        parts = np.array_split(widths, columns)
        if sum(part.max() for part in parts) + _COLUMN_GAP * (columns - 1) <= room:
            return columns, len(parts[0])
    return 1, len(labels)


def _add_key(figure: Figure, key: Sequence[tuple[Artist, str]], columns: int, top: float) -> None:
    em = Sizes.words / 72.0
    room = WIDTH - 2.0 * EDGE - _SAMPLE - _SAMPLE_GAP
    legend = Legend(
        figure,
        [sample for sample, _ in key],
        [fitted(label, Sizes.words, room) for _, label in key],
        loc="upper left",
        bbox_to_anchor=(EDGE / WIDTH, top),
        ncols=columns,
        borderpad=0.0,
        borderaxespad=0.0,
        handlelength=_SAMPLE / em,
        handletextpad=_SAMPLE_GAP / em,
        columnspacing=_COLUMN_GAP / em,
        labelspacing=0.5,
        numpoints=1,
    )
    figure.legends.append(legend)
