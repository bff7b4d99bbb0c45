"""Plots of curves and of what they lead to: readable at 5, 35 and 60 coupons."""

import itertools
from collections.abc import Callable
from functools import cache

import numpy as np
import pytest
from matplotlib.figure import Figure
from tests.plots.curve_frames import GRAVE, curves
from tests.plots.drawn import Sheet, clashes, data_of, drawn
from tests.plots.frames import Batch
from tests.plots.test_sheets import _apart, _look

from coldwork.plots import draw_all, save
from coldwork.reduce.picture import thinned

SUBJECTS = ["curves", "hardening-rate", "density-along-strain", "energy-along-strain"]
CASES: dict[str, Callable[[], Batch]] = {
    "1": lambda: curves(1),
    "5": lambda: curves(5),
    "35": lambda: curves(35),
    "9 odd": lambda: curves(9, odd=True, strains=False, points=500),
}
EVERY = pytest.mark.parametrize("case", CASES)
MANY = {"60": lambda: curves(60).without("evolution")}  # takes long enough without


@cache
def figures(case: str) -> tuple[tuple[str, Figure], ...]:
    made = (CASES | MANY)[case]()
    return tuple(draw_all(made.frames, made.context))


@cache
def sheets(case: str) -> tuple[Sheet, ...]:
    """The first and the last page of each subject, drawn."""
    found = []
    for subject in SUBJECTS:
        mine = [(stem, figure) for stem, figure in figures(case) if stem.startswith(subject)]
        found += mine if len(mine) < 3 else [mine[0], mine[-1]]
    return tuple(drawn(stem, figure) for stem, figure in found)


def pages(case: str, subject: str) -> list[Sheet]:
    return [sheet for sheet in sheets(case) if sheet.stem.startswith(subject)]


def words(case: str, subject: str) -> list[str]:
    mine = [figure for stem, figure in figures(case) if stem.startswith(subject)]
    return [text.get_text() for figure in mine for text in figure.texts]


@EVERY
def test_there_are_four_subjects(case: str) -> None:
    found = dict.fromkeys(sheet.stem.rstrip("-0123456789") for sheet in sheets(case))
    assert list(found) == SUBJECTS


@EVERY
def test_no_text_stands_on_another(case: str) -> None:
    found = {sheet.stem: clashes(sheet.words) for sheet in sheets(case)}
    assert {stem: pairs for stem, pairs in found.items() if pairs} == {}


@EVERY
def test_no_text_leaves_the_figure(case: str) -> None:
    for sheet in sheets(case):
        wide, high = sheet.figure.get_size_inches() * sheet.figure.dpi
        out = [w.text for w in sheet.words if w.box[0] < 0 or w.box[2] > wide or w.box[3] > high]
        assert out == [], sheet.stem
        assert min(word.box[1] for word in sheet.words) > 0, sheet.stem


@EVERY
def test_no_panel_is_empty(case: str) -> None:
    for sheet in sheets(case):
        for axes in sheet.figure.axes:
            (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
            x, y = data_of(axes).T
            inside = (x >= left) & (x <= right) & (y >= bottom) & (y <= top)
            assert inside.sum() > 2, sheet.stem


@EVERY
def test_every_page_fits_a_screen_and_a_sheet_of_paper(case: str) -> None:
    for sheet in sheets(case):
        assert sheet.figure.get_figheight() < 13.0
        assert sheet.figure.get_figwidth() == 9.0


@EVERY
def test_samples_of_a_key_differ_without_colour(case: str) -> None:
    for sheet in sheets(case):
        looks = [_look(sample) for sample in sheet.figure.legends[0].legend_handles]
        for one, other in itertools.combinations(looks, 2):
            assert _apart(one, other), (sheet.stem, one, other)


@pytest.mark.parametrize(("case", "count"), [("5", 4), ("35", 34), ("60", 59)])
def test_every_curve_is_drawn_and_named(case: str, count: int) -> None:
    texts = words(case, "curves")
    named = [text for text in texts if text.startswith("CT")]
    assert len(named) == count
    assert len(set(named)) == count
    assert any(text.startswith("No curve: CT19-1.") for text in texts)


def test_sixty_curves_come_on_numbered_pages() -> None:
    stems = [stem for stem, _ in figures("60") if stem.startswith("curves")]
    assert stems == [f"curves-{i}" for i in range(1, len(stems) + 1)]
    assert 2 <= len(stems) <= 4


def test_a_curve_that_is_not_trusted_says_why() -> None:
    assert GRAVE.split(";")[0] in " ".join(words("5", "curves"))
    along = " ".join(words("5", "density"))
    assert "Not shown, curve not trusted: CT12-1" in along


def test_names_stand_as_they_are() -> None:
    found = " ".join(words("9 odd", "curves"))
    for name in ("=7/A ä<b>", "NA", "0012", "$x_1^2$ & $y$", "␣leading and trailing␣"):
        assert name in found


def test_axes_carry_their_units() -> None:
    for sheet, below, above in (
        (pages("5", "curves")[0], "engineering strain [%]", "stress [MPa]"),
        (pages("5", "hardening")[0], "true stress [MPa]", "hardening rate [MPa]"),
        (pages("5", "density")[0], "prior strain plus that of the test [1]", " m⁻²]"),
        (pages("5", "energy")[0], "prior strain plus that of the test [1]", "[J/g]"),
    ):
        assert below in sheet.texts
        assert any(above in text for text in sheet.texts)


def test_without_prior_strains_the_axis_is_that_of_the_test() -> None:
    page = pages("9 odd", "density")[0]
    assert "test strain [1]" in page.texts
    assert any(text.startswith("Not every coupon states its prior strain") for text in page.texts)


def test_all_cells_have_the_same_axes() -> None:
    for subject in SUBJECTS:
        panels = [figure.axes for stem, figure in figures("35") if stem.startswith(subject)]
        kinds = 1 if subject in SUBJECTS[1:3] else 2
        for kind in range(kinds):
            mine = [axes for page in panels for axes in page[kind::kinds]]
            assert len({(axes.get_xlim(), axes.get_ylim()) for axes in mine}) == 1


def test_the_offset_line_is_the_elastic_one_moved() -> None:
    axes = pages("5", "curves")[0].figure.axes[1]
    dashed = [line for line in axes.lines if line.get_linestyle() == "--"]
    one, other = (np.asarray(line.get_xydata()) for line in dashed)
    np.testing.assert_allclose(other[:, 0] - one[:, 0], 0.2)  # per cent
    np.testing.assert_allclose(other[:, 1], one[:, 1])


def test_an_extreme_of_ten_thousand_points_is_in_the_picture() -> None:
    made = curves(1)
    lines = made.frames["curve_lines"]
    whole = lines[lines["part"] == "whole"]
    assert len(whole) < 4 * 1000
    random = np.random.default_rng(1)
    x, y = np.linspace(0.0, 1.0, 10_000), random.standard_normal(10_000)
    assert {int(np.argmax(y)), int(np.argmin(y))} <= set(thinned(x, y, 100).tolist())


def test_sixty_curves_make_small_files() -> None:
    svg, png = save(figures("60")[0][1], "curves-1")
    assert len(svg) < 1_000_000
    assert len(png) < 1_000_000
