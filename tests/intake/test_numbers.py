"""The number grammar, held against Python's own reading of the same text."""

import math
import re

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_array_equal

from coldwork.intake.numbers import hint, parse_counts, parse_floats

# The grammar as DESIGN and README state it, written down a second time.
GRAMMAR = re.compile(r"-?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")

ACCEPTED = ["183.1", "-0.5", "1e3", "1.2E-4", "0", "-0", "007", ".5", "-.5e1", "1E+5", "4.9e-324"]
REFUSED = [
    "1,5", "1_000", "0x1F", "١٢", "１２", "inf", "-inf", "Infinity", "nan", "NaN", ">940", "12 HV",
    "1.2.3", "1" * 400, "+1", " 1", "1 ", "1\t", "5.", "5.e3", "-", ".", "e5", "1e", "1e+", "--1",
    "1-2", "1e5.5", "0b1", "1d3", "12µm", "−5", "1 000", "1'000", "NA", "#REF!", "½", "1e999",
    "-1e999", "1e-400", "'183.1", "1\u00a0", "true", "1/2", "5%",
]  # fmt: skip
COMPANY = [[], ["183.1"], ["x"], [""], ["1e3", "", "2"]]


def cells(*texts: str) -> pa.StringArray:
    return pa.array(list(texts), pa.string())


@pytest.mark.parametrize("company", COMPANY)
@pytest.mark.parametrize("text", ACCEPTED)
def test_takes_a_number_whatever_stands_beside_it(text: str, company: list[str]) -> None:
    parsed = parse_floats(cells(*company, text))
    assert not parsed.bad[-1]
    assert not parsed.absent[-1]
    assert parsed.values[-1] == float(text)
    assert math.copysign(1.0, parsed.values[-1]) == math.copysign(1.0, float(text))


@pytest.mark.parametrize("company", COMPANY)
@pytest.mark.parametrize("text", REFUSED)
def test_refuses_what_is_no_number(text: str, company: list[str]) -> None:
    parsed = parse_floats(cells(*company, text))
    assert parsed.bad[-1]
    assert not parsed.absent[-1]
    assert np.isnan(parsed.values[-1])


@pytest.mark.parametrize("text", REFUSED)
def test_has_a_hint_for_what_is_no_number(text: str) -> None:
    assert len(hint(text)) > 10


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("1,5", "decimal comma"),
        ("12 HV", "unit"),
        ("12µm", "unit"),
        (">940", "bound"),
        ("1.2.3", "more than one"),
        ("١٢", "digits 0 to 9"),
        ("inf", "infinite"),
        ("nan", "empty"),
        ("1_000", "underscore"),
        ("0x1F", "decimal digits"),
        (" 1", "space"),
        ("+1", "plus"),
        ("'1", "apostrophe"),
        ("1" * 400, "40 characters"),
        ("1e999", "too large"),
        ("1e-400", "zero"),
        ("5.", "digit must follow"),
        ("1,234.5", "thousands"),
        ("1.234,5", "decimal point"),
        ("#REF!", "spreadsheet"),
        ("−5", "minus"),
    ],
)
def test_names_the_likely_slip(text: str, words: str) -> None:
    assert words in hint(text)


def test_an_empty_cell_is_absent_and_not_bad() -> None:
    parsed = parse_floats(cells("", "1", ""))
    assert_array_equal(parsed.absent, [True, False, True])
    assert not parsed.bad.any()
    assert np.isnan(parsed.values[[0, 2]]).all()


def test_no_cells_at_all() -> None:
    assert parse_floats(cells()).values.shape == (0,)
    assert parse_counts(cells()).values.shape == (0,)
    assert parse_floats(cells("", "")).absent.all()
    assert parse_counts(cells("", "")).absent.all()


def test_a_part_of_a_longer_array() -> None:
    # Arrow's slices keep the whole's buffers: offsets must be minded.
    whole = cells("x", "", "1.5", "", "2.5", "y")
    parsed = parse_floats(whole.slice(1, 4))
    assert_array_equal(parsed.absent, [True, False, True, False])
    assert_array_equal(parsed.values[[1, 3]], [1.5, 2.5])
    assert not parsed.bad.any()
    assert parse_floats(whole.slice(4)).bad.tolist() == [False, True]
    assert parse_counts(cells("x", "", "7", "8").slice(1)).values.tolist() == [-1, 7, 8]


@settings(deadline=None, max_examples=150)
@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1, max_size=8))
def test_gives_back_every_double_as_python_writes_it(numbers: list[float]) -> None:
    parsed = parse_floats(cells(*map(repr, numbers)))
    assert not parsed.bad.any()
    assert parsed.values.tobytes() == np.array(numbers).tobytes()  # to the last bit, and -0.0


@settings(deadline=None, max_examples=150)
@given(st.lists(st.from_regex(GRAMMAR, fullmatch=True), min_size=1, max_size=4))
def test_takes_the_whole_grammar(texts: list[str]) -> None:
    parsed = parse_floats(cells(*texts))
    for text, value, bad in zip(texts, parsed.values, parsed.bad, strict=True):
        expected = float(text)
        digits = re.split("[eE]", text)[0].strip("-0.")
        lost = math.isinf(expected) or (expected == 0.0 and digits != "")
        assert bad == (lost or len(text) > 40)
        assert bad or value == expected


@settings(deadline=None, max_examples=150)
@given(
    st.lists(
        st.one_of(st.text("0123456789.eE+-", max_size=8), st.text(max_size=6)),
        min_size=1,
        max_size=5,
    )
)
def test_takes_nothing_but_the_grammar(texts: list[str]) -> None:
    texts = [text.replace("\x00", "") for text in texts]
    parsed = parse_floats(cells(*texts))
    for text, value, bad, absent in zip(
        texts, parsed.values, parsed.bad, parsed.absent, strict=True
    ):
        assert absent == (text == "")
        if GRAMMAR.fullmatch(text) is None:
            assert bad == (text != "")
        elif not bad:
            assert value == float(text)


@pytest.mark.parametrize(
    ("text", "value"), [("0", 0), ("7", 7), ("0012", 12), ("1000000000", 10**9)]
)
def test_takes_a_count(text: str, value: int) -> None:
    parsed = parse_counts(cells(text, "3"))
    assert parsed.values.tolist() == [value, 3]
    assert parsed.values.dtype == np.int64


@pytest.mark.parametrize(
    "text", ["-1", "1.0", "1e3", "1000000001", "9" * 30, "+1", " 1", "0x1", "٣", "one", "1,0"]
)
def test_refuses_what_is_no_count(text: str) -> None:
    parsed = parse_counts(cells("5", text))
    assert parsed.bad.tolist() == [False, True]
    assert parsed.values.tolist() == [5, -1]
