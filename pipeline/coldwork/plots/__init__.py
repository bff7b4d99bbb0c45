"""The plots of a batch: published frames in, figures out, no file opened.

Each subject has a file with one function, `draw(frames, context)`. The frames are
the published tables by name, and beside them `scatter` and `coupons_in`.
"""

from collections.abc import Iterator

from matplotlib.figure import Figure

from coldwork.plots import (
    budget,
    curves,
    density,
    drift,
    evolution,
    hardening,
    readings,
    scatter,
    size_effect,
    stored_energy,
)
from coldwork.plots.columns import Frames
from coldwork.plots.context import Context
from coldwork.plots.style import save

__all__ = ["Context", "draw_all", "save"]

_SUBJECTS = (
    ("readings", readings.draw),
    ("density", density.draw),
    ("stored-energy", stored_energy.draw),
    ("uncertainty", budget.draw),
    ("scatter", scatter.draw),
    ("drift", drift.draw),
    ("size-effect", size_effect.draw),
    ("curves", curves.draw),
    ("hardening-rate", hardening.draw),
    ("density-along-strain", evolution.draw_density),
    ("energy-along-strain", evolution.draw_energy),
)


def draw_all(frames: Frames, context: Context) -> Iterator[tuple[str, Figure]]:
    """Draw every plot of a batch, one after the other.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        Published tables by name (`coupons`, `readings`, `set_aside`, `budget`,
        `decisions`, `quantities`, `flags`), columns in their contracts' units; `scatter`
        with `coupon_id`, `n`, `relative_s`, `pooled_relative_s`, `limit_relative_s`,
        `left_pool` and `group`; `coupons_in` with `coupon_id` and `prior_true_strain`.
        A batch whose small indents are corrected has `size_points`, `size_lines` and
        `size_conditions`, as `size_effect` says. A batch with curves has `tensile`,
        `evolution`, `curve_lines`, `curve_slopes` and `curve_rates` too, as `curves` and
        `hardening` say. A table that is not there is empty.
    context : Context
        The batch.

    Yields
    ------
    tuple of str and Figure
        File stem and figure. A subject that has nothing to show gives none; one on
        several pages numbers its stems from 1.
    """
    for subject, draw in _SUBJECTS:
        figures = draw(frames, context)
        digits = len(str(len(figures)))
        for number, figure in enumerate(figures, 1):
            yield subject if len(figures) == 1 else f"{subject}-{number:0{digits}d}", figure
