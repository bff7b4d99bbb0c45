"""Names on plots: they fit, they differ where the names differ, the font can draw them."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path
from tests.plots.frames import ODD_NAMES

from coldwork.plots.names import (
    ELLIPSIS,
    FONT,
    counted,
    fitted,
    label_lines,
    listed,
    shown,
    signed_percent,
    told_apart,
    width,
    wrapped,
)

SIZE, ROOM = 7.5, 2.0  # pt, inch
NAME = st.text(st.characters(exclude_categories=["C", "Z"], include_characters=" "), max_size=120)


@pytest.mark.parametrize("text", ["CU-05-1", "Wii", "=7/A ä<b>", "10¹⁵ m⁻²", ""])
def test_width_is_that_of_the_outline(text: str) -> None:
    drawn, _, _ = text_to_path.get_text_width_height_descent(
        text, FontProperties(family=FONT, size=SIZE), ismath=False
    )
    assert width(text, SIZE) == pytest.approx(drawn / 72.0, rel=0.03, abs=1e-9)  # kerning left out


def test_shortening_keeps_both_ends() -> None:
    label = fitted("strip-" + "x" * 100 + "-left", SIZE, ROOM)
    assert label.startswith("strip-")
    assert label.endswith("-left")
    assert label.count(ELLIPSIS) == 1
    assert width(label, SIZE) <= ROOM


def test_a_name_that_fits_stays() -> None:
    assert fitted("=7/A ä<b>", SIZE, ROOM) == "=7/A ä<b>"


def test_names_that_differ_in_the_middle_show_where() -> None:
    labels = told_apart(["a" * 60 + "1" + "b" * 59, "a" * 60 + "2" + "b" * 59], SIZE, ROOM)
    assert "1" in labels[0]
    assert "2" in labels[1]


def test_names_that_nothing_short_tells_apart_get_their_place() -> None:
    a, b = "a" * 40, "b" * 40  # they differ in two far places, each shared with another one
    names = [f"{x}{a}{y}{b}" for x in ("1" + a, "2" + a) for y in ("3" + b, "4" + b)]
    labels = told_apart(names, SIZE, 1.0)
    assert len(set(labels)) == 4


@settings(max_examples=150, deadline=None)
@given(st.lists(NAME, min_size=1, max_size=8, unique=True))
def test_different_names_never_look_alike(names: list[str]) -> None:
    labels = told_apart(names, SIZE, ROOM)
    assert len(set(labels)) == len(names)
    assert all(width(label, SIZE) <= ROOM + 1e-9 for label in labels)


def test_the_odd_names_of_the_demo_all_differ() -> None:
    assert len(set(told_apart(ODD_NAMES, SIZE, ROOM))) == len(ODD_NAMES)


def test_what_the_font_lacks_is_written_as_its_code() -> None:
    assert shown("中-7") == "\\u4e2d-7"
    assert shown("a\u202eb") == "a\\u202eb"  # a change of direction prints as nothing
    assert shown("$x_1$ <ä> =") == "$x_1$ <ä> ="


def test_spaces_at_the_ends_are_seen() -> None:
    assert shown(" A  B ") == "␣A  B␣"
    assert shown("  ") == "␣␣"
    assert told_apart(["A", "A "], SIZE, ROOM) == ["A", "A␣"]


def test_a_name_and_the_code_of_another_do_not_meet() -> None:
    labels = told_apart(["中", "\\u4e2d"], SIZE, ROOM)
    assert labels[0] != labels[1]


def test_sentences_break_between_words() -> None:
    lines = wrapped("one two three four five six seven eight nine ten", SIZE, 1.0)
    assert " ".join(lines) == "one two three four five six seven eight nine ten"
    assert all(width(line, SIZE) <= 1.0 for line in lines)
    assert wrapped("", SIZE, 1.0) == []


def test_a_unit_stays_whole_on_a_line() -> None:
    lines = label_lines("Dislocation density [10¹⁵ m⁻²]", SIZE, 1.0)
    assert len(lines) == 2
    assert lines[-1].endswith("density\u00a0[10¹⁵\u00a0m⁻²]")


def test_words_for_numbers() -> None:
    assert [counted(n, "coupon") for n in (0, 1, 2)] == ["0 coupons", "1 coupon", "2 coupons"]
    assert listed(["a", "b", "c"], 2) == "a, b, and 1 more"
    assert listed(["a", "b"], 2) == "a, b"
    assert signed_percent(-5.06) == "−5.1 %"
