"""The plot of choices: every choice a row, ratios and bands where they belong."""

import numpy as np
import pandas as pd
import pytest

from coldwork.plots.choices import draw
from coldwork.plots.context import Context

CONTEXT = Context("CS-1", "copper", "indent")
QUANTITIES = ("dislocation_density_per_m2", "stored_energy_j_per_g")


def frames(n: int, *, known: bool = True) -> dict[str, pd.DataFrame]:
    ratio = np.concatenate([[1.0], np.linspace(0.5, 2.0, n)]) if known else np.full(n + 1, np.nan)
    parts = [
        pd.DataFrame(
            {
                "choice_no": np.arange(n + 1),
                "quantity": quantity,
                "coupons": 35,
                "median_ratio": ratio,
                "least_ratio": 0.9 * ratio,
                "greatest_ratio": 1.1 * ratio,
                "relative_u": 0.25,
            }
        )
        for quantity in QUANTITIES
    ]
    return {"compare_choices": pd.concat(parts, ignore_index=True)}


@pytest.mark.parametrize(("n", "pages"), [(1, 1), (6, 1), (60, 2)])
def test_every_choice_is_a_row(n: int, pages: int) -> None:
    names = ["as the sheet says", *(f"choice {i}" for i in range(n))]
    figures = draw(frames(n), names, ["hardening.coefficient"], CONTEXT)
    assert len(figures) == pages
    words = [text.get_text() for figure in figures for text in figure.axes[0].texts]
    assert set(names) <= set(words)
    assert all(len(figure.axes) == 2 for figure in figures)


def test_the_band_is_one_with_its_u() -> None:
    (figure,) = draw(frames(3), ["own", "a", "b", "c"], ["hardening.coefficient"], CONTEXT)
    for axes in figure.axes:
        (band,) = axes.patches
        low, high = band.get_extents().transformed(axes.transData.inverted()).intervalx
        assert (round(low, 9), round(high, 9)) == (0.75, 1.25)


def test_nothing_known_gives_no_plot() -> None:
    assert draw(frames(2, known=False), ["own", "a", "b"], ["x"], CONTEXT) == []
    assert draw({}, [], [], CONTEXT) == []
