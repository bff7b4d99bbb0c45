"""Numbers in sentences, held against the one-by-one rounding and the decimal module."""

from decimal import ROUND_HALF_EVEN, Decimal

import numpy as np
import pyarrow as pa
import pytest

from coldwork.judge.wording import number_texts, or_else, plain_number, scattered, sentence
from coldwork.statistics.rounding import rounded

NAN = np.nan


@pytest.mark.parametrize(
    ("value", "u", "text"),
    [
        (183.127, 1.23, "183.1"),  # JCGM 100:2008, 7.2.6: u to two digits, the value to match
        (10.05762, 0.027, "10.058"),  # the guide's own example there: 10.058 ohm
        (7.314e14, 4.2e13, "7.31e14"),
        (0.28, 0.03, "0.280"),
        (0.28, 0.0996, "0.28"),  # 0.0996 is 0.10
        (-0.28, 0.03, "-0.280"),
        (1234.0, 120.0, "1230"),
        (99999.0, 12.0, "99999"),
        (99999.6, 12.0, "1.00000e5"),
        (1.5e-9, 2e-11, "1.500e-9"),
        (0.2, NAN, "0.2000"),
        (0.2, 0.0, "0.2000"),
        (183.127, NAN, "183.1"),
        (0.0, 0.03, "0.000"),
        (0.0, 1e13, "0"),
        (0.0, NAN, "0"),
        (NAN, 0.1, None),
    ],
)
def test_numbers_as_a_person_writes_them(value: float, u: float, text: str | None) -> None:
    assert number_texts(np.array([value]), np.array([u])).to_pylist() == [text]


def test_agrees_with_rounding_one_by_one() -> None:
    rng = np.random.default_rng(20260731)
    value = 10.0 ** rng.uniform(-9, 18, 3000) * rng.choice([-1.0, 1.0], 3000)
    u = np.abs(value) * 10.0 ** rng.uniform(-6, -0.5, 3000)
    u[::10] = NAN
    expected = [rounded(float(y), float(s))[0] for y, s in zip(value, u, strict=True)]
    assert number_texts(value, u).to_pylist() == expected


def test_agrees_with_the_decimal_module() -> None:
    rng = np.random.default_rng(1)
    value = rng.uniform(1.0, 9.0, 500)
    found = number_texts(value, np.full(500, 0.0012)).to_pylist()
    place = Decimal("0.0001")
    assert found == [str(Decimal(y).quantize(place, ROUND_HALF_EVEN)) for y in value.tolist()]


def test_digits_are_added_until_a_value_differs_from_a_limit() -> None:
    value, u = np.array([0.0996, 0.09999, 0.1, 0.15]), np.full(4, 0.02)
    assert number_texts(value, u, [0.1]).to_pylist() == ["0.0996", "0.09999", "0.100", "0.150"]


def test_a_value_that_no_double_tells_from_the_limit_ends_the_search() -> None:
    close = np.nextafter(0.1, 1.0)
    text = number_texts(np.array([close]), np.array([0.02]), [0.1])[0].as_py()
    assert float(text) == pytest.approx(0.1)


@pytest.mark.parametrize(
    ("number", "text"),
    [(0.1, "0.1"), (1e15, "1e+15"), (300.0, "300"), (0.30000000000000004, "0.3")],
)
def test_numbers_of_the_sheet_stay_as_they_were_written(number: float, text: str) -> None:
    assert plain_number(number) == text


def test_sentences_are_joined_and_put_at_their_rows() -> None:
    words = sentence("a ", pa.array(["b", None]), "!")
    assert words.to_pylist() == ["a b!", None]
    assert or_else(words, "none").to_pylist() == ["a b!", "none"]
    rows = scattered(4, [(np.array([2, 0]), pa.array(["x", "y"])), (np.array([3]), words[:1])])
    assert rows.to_pylist() == ["y", None, "x", "a b!"]
    assert scattered(2, []).to_pylist() == [None, None]
