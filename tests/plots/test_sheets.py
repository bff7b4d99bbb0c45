"""Every plot of every case: nothing collides, nothing is empty, nothing is lost."""

import itertools
import subprocess
import sys
from xml.etree import ElementTree as ET

import matplotlib as mpl
import numpy as np
import pytest
from matplotlib.colors import to_rgb
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle
from tests.plots.drawn import CASES, Word, clashes, data_of, sheets
from tests.plots.frames import ODD_NAMES, batch

from coldwork.plots import Context, draw_all, save

SUBJECTS = ["readings", "density", "stored-energy", "uncertainty", "scatter", "drift"]
EVERY = pytest.mark.parametrize("case", CASES)


@pytest.mark.parametrize("case", ["1", "5", "35", "5 odd", "9 odd", "700, no names"])
def test_a_batch_has_its_six_plots(case: str) -> None:
    assert [sheet.stem for sheet in sheets(case)] == SUBJECTS


def test_two_hundred_coupons_come_on_numbered_pages_with_every_name() -> None:
    pages = [sheet for sheet in sheets("200 odd") if sheet.stem.startswith("readings")]
    assert [page.stem for page in pages] == [f"readings-{i}" for i in range(1, 5)]
    assert [f"page {i} of 4" in " ".join(page.texts) for i, page in enumerate(pages, 1)] == [
        True
    ] * 4
    named = [text for page in pages for text in page.texts if text.startswith("CU-")]
    assert named == [f"CU-{i:04d}" for i in range(len(ODD_NAMES), 200)]


def test_the_measure_of_clashes_sees_one() -> None:
    words = [Word("a", (0, 0, 20, 10)), Word("b", (18, 5, 40, 15)), Word("c", (41, 0, 60, 10))]
    assert clashes(words) == [("a", "b")]


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
def test_the_key_stands_outside_every_panel(case: str) -> None:
    for sheet in sheets(case):
        for axes in sheet.figure.axes:
            assert not sheet.legend.overlaps(axes.get_window_extent()), sheet.stem


@EVERY
def test_no_panel_is_empty(case: str) -> None:
    for sheet in sheets(case):
        for axes in sheet.figure.axes:
            (left, right), (bottom, top) = axes.get_xlim(), sorted(axes.get_ylim())
            x, y = data_of(axes).T
            inside = (x >= left) & (x <= right) & (y >= bottom) & (y <= top)
            assert inside.sum() > 2, sheet.stem


@EVERY
def test_each_figure_says_batch_title_and_units(case: str) -> None:
    batch_id = CASES[case]().context.batch_id
    for sheet in sheets(case):
        words = " ".join(sheet.texts)
        assert "Batch" in words
        assert batch_id[:6] in words
        labels = [axes.get_xlabel() for axes in sheet.figure.axes if axes.get_xlabel()]
        labels += [axes.get_ylabel() for axes in sheet.figure.axes if axes.get_ylabel()]
        labels += [text for text in sheet.texts if text.startswith("Share of")]
        assert labels, sheet.stem
        assert all("[" in text or "Place of" in text for text in labels), (sheet.stem, labels)
        assert str(sheet.figure.get_label()).split(",")[0].split(":")[0] in words


def test_the_picture_carries_its_title() -> None:
    sheet = sheets("5")[0]
    svg, png = save(sheet.figure, sheet.stem)
    title = ET.fromstring(svg).findtext("{*}title")  # noqa: S314 - our own file
    assert title == "Readings of each coupon: hardness HV10, batch CS-2026-31"
    assert title.encode() in png


def test_the_same_figure_gives_the_same_bytes() -> None:
    def render() -> list[tuple[str, bytes, bytes]]:
        made = CASES["flow"]()
        return [(stem, *save(figure, stem)) for stem, figure in draw_all(made.frames, made.context)]

    first = render()
    with mpl.rc_context({"font.size": 20.0, "axes.grid": True, "svg.fonttype": "none"}):
        assert render() == first  # whatever the user's own settings are
    assert all(b"<dc:date>" not in svg and b"Matplotlib v" not in svg for _, svg, _ in first)


@EVERY
def test_samples_of_a_key_differ_without_colour(case: str) -> None:
    for sheet in sheets(case):
        looks = [_look(sample) for sample in sheet.figure.legends[0].legend_handles]
        for one, other in itertools.combinations(looks, 2):
            assert _apart(one, other), (sheet.stem, one, other)


Look = tuple[str, str, float, float]


def _look(sample: object) -> Look:
    """Shape, dashes or hatch, thickness [pt] and lightness [1] of a sample."""
    if isinstance(sample, Rectangle):
        return "bar", str(sample.get_hatch()), 1.0, _lightness(sample.get_facecolor())
    assert isinstance(sample, Line2D)
    line = str(sample.get_linestyle())
    marker = str(sample.get_marker())
    thick = float(sample.get_linewidth()) if line != "None" else 0.0
    colour = sample.get_color() if thick else sample.get_markerfacecolor()
    dashes = str(vars(sample)["_dash_pattern"]) if line == "--" else line
    tall = float(sample.get_markersize()) if marker == "|" else 0.0
    return marker, dashes, thick + tall, _lightness(colour)


def _apart(one: Look, other: Look) -> bool:
    shape = one[0] != other[0] or one[1] != other[1]
    return (
        shape or max(one[2], other[2]) > 1.8 * min(one[2], other[2]) or abs(one[3] - other[3]) > 0.2
    )


def _lightness(colour: object) -> float:
    r, g, b = to_rgb(colour)  # type: ignore[arg-type]
    return 0.2126 * r + 0.7152 * g + 0.0722 * b  # weights of ITU-R BT.709


@pytest.mark.parametrize("case", ["5 odd", "awkward"])
def test_names_stand_as_they_are(case: str) -> None:
    texts = {text for sheet in sheets(case) for text in sheet.texts}
    assert {"=7/A ä<b>", "NA", "0012", "$x_1^2$ & $y$"} <= texts
    for sheet in sheets(case):
        for text in sheet.figure.findobj(mpl.text.Text):
            assert not text.get_parse_math()


def test_what_is_missing_is_named_and_said() -> None:
    by_stem = {sheet.stem: " ".join(sheet.texts) for sheet in sheets("awkward")}
    for stem in ("density", "stored-energy-1"):
        for word in ("below-baseline", "baseline-contradicted", "no-readings", "no interval"):
            assert word in by_stem[stem].lower(), (stem, word)
    assert "mixed-forces" in by_stem["readings-1"]
    assert "Below-baseline: NA." in by_stem["density"]
    assert "No prior strain given, not shown: strip from" in by_stem["density"]
    assert "upper end of the interval only" in by_stem["density"]
    assert "1 row set aside belongs to no coupon" in by_stem["readings-1"]


def test_headings_speak_of_dislocations() -> None:
    for case in ("35", "flow", "awkward"):
        titles = [str(sheet.figure.get_label()) for sheet in sheets(case)]
        energy = [title for title in titles if "nergy" in title]
        assert energy
        assert all("tored energy in dislocations" in title for title in energy)


def test_nothing_comes_of_nothing() -> None:
    made = batch(5)
    context = Context("B", "copper", "indent")
    assert list(draw_all({}, context)) == []
    assert list(draw_all({name: x.iloc[:0] for name, x in made.frames.items()}, context)) == []
    empty = made.frames["coupons"][["coupon_id"]]
    assert list(draw_all({"coupons": empty}, made.context)) == []


@pytest.mark.parametrize(
    ("table", "stems"),
    [
        ("readings", ["density", "stored-energy", "uncertainty", "scatter"]),
        ("budget", ["readings", "density", "stored-energy", "scatter", "drift"]),
        ("scatter", ["readings", "density", "stored-energy", "uncertainty", "drift"]),
        ("decisions", SUBJECTS),
        ("coupons_in", SUBJECTS),
        ("set_aside", SUBJECTS),
    ],
)
def test_a_table_that_is_not_there_leaves_out_its_plot_alone(table: str, stems: list[str]) -> None:
    made = batch(5).without(table)
    assert [stem for stem, _ in draw_all(made.frames, made.context)] == stems


def test_many_readings_become_pixels() -> None:
    made = batch(50, readings=60).without("budget").without("scatter").without("decisions")
    svgs = {stem: save(figure, stem)[0] for stem, figure in draw_all(made.frames, made.context)}
    for stem in ("readings", "drift"):
        assert b"<image" in svgs[stem]
        assert len(svgs[stem]) < 1_500_000  # as outlines 3000 points come to several megabytes
    assert b"<image" not in svgs["stored-energy"]


def test_the_drawn_values_are_those_of_the_frame() -> None:
    made = batch(5)
    coupons = made.frames["coupons"]
    sheet = next(s for s in sheets("5") if s.stem == "stored-energy")
    (axes,) = sheet.figure.axes
    marks = [line for line in axes.lines if line.get_marker() in {"o", "s", "D"}]
    found = sorted(float(x) for line in marks for x in np.asarray(line.get_xdata()))
    np.testing.assert_allclose(found, np.sort(coupons["stored_energy_j_per_g"].to_numpy()))


def test_no_figure_window_is_needed() -> None:
    code = (
        "import sys, coldwork.plots as p;"
        "assert 'matplotlib.pyplot' not in sys.modules;"
        "print(list(p.draw_all({}, p.Context('B', 'copper', 'indent'))))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout == "[]\n"
