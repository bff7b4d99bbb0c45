"""Rounding for people: published examples, ties, exponents, anything at all."""

from decimal import Decimal, localcontext

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from coldwork.statistics.rounding import counted, interval_ends, rounded, with_uncertainty


def test_the_guides_own_example() -> None:
    # JCGM 100:2008, 7.2.2: m = 100.021 47 g with a standard uncertainty of 0.35 mg.
    assert rounded(100.02147, 0.00035) == ("100.02147", "0.00035")


def test_the_guides_rule_for_two_digits() -> None:
    # JCGM 100:2008, 7.2.6: a resistance of 10.057 62 ohm with 27 mohm is given as 10.058 ohm.
    assert rounded(10.05762, 0.027) == ("10.058", "0.027")


@pytest.mark.parametrize(
    ("value", "u", "text"),
    # By hand, two digits of u and the value to the same place.
    [
        (183.127, 1.23, "183.1 ± 1.2"),
        (183.127, 12.3, "183 ± 12"),
        (183.127, 99.6, "180 ± 100"),
        (9.996, 0.0996, "10.00 ± 0.10"),
        (7.314e14, 4.2e13, "(7.31 ± 0.42)e14"),
        (9.9996e14, 4.2e12, "(1.0000 ± 0.0042)e15"),
        (123456.0, 2345.0, "(1.235 ± 0.023)e5"),
        (1.4335e-9, 2.1e-10, "(1.43 ± 0.21)e-9"),
        (0.0021, 0.00043, "0.00210 ± 0.00043"),
        (-0.04, 3.0, "0.0 ± 3.0"),
        (0.0, 4.2e13, "(0.0 ± 4.2)e13"),
        (0.0004, 0.02, "0.000 ± 0.020"),
    ],
)
def test_value_and_uncertainty(value: float, u: float, text: str) -> None:
    assert with_uncertainty(value, u) == text


@pytest.mark.parametrize("u", [None, 0.0, np.nan, np.inf])
@pytest.mark.parametrize(
    ("value", "text"),
    [
        (183.127, "183.1"),
        (12345.6, "12350"),
        (7.3141e14, "7.314e14"),
        (1.43351e-9, "1.434e-9"),
        (99999.6, "1.000e5"),
        (0.0, "0"),
        (-3.0, "-3.000"),
    ],
)
def test_four_digits_without_an_uncertainty(value: float, u: float | None, text: str) -> None:
    assert rounded(value, u) == (text, "")
    assert with_uncertainty(value, u) == text


@pytest.mark.parametrize("value", [np.nan, np.inf, -np.inf])
def test_what_is_no_number(value: float) -> None:
    assert rounded(value, 1.0) == ("", "")
    assert with_uncertainty(value, 1.0, "MPa") == "none"


def test_the_unit_follows() -> None:
    assert with_uncertainty(183.127, 1.23, "MPa") == "183.1 ± 1.2 MPa"
    assert with_uncertainty(183.127, None, "MPa") == "183.1 MPa"
    assert with_uncertainty(0.25, 0.01, "1") == "0.250 ± 0.010"


@pytest.mark.parametrize(
    ("lower", "upper", "u", "shown"),
    [
        (4.1e-5, 1.55e-3, 3.5e-4, ("0.00004", "0.00155")),  # both as the larger end asks for it
        (3.7e12, 1.02e15, None, ("0.003700e15", "1.020e15")),
        (0.0, 3.0e12, None, ("0", "3.000e12")),
        (-2.0e6, 10.0, 1e5, ("-2.00e6", "0.00e6")),
        (79.8, np.inf, 0.75, ("79.80", "")),
        (np.nan, np.nan, None, ("", "")),
    ],
)
def test_the_ends_of_an_interval_share_a_power_of_ten(
    lower: float, upper: float, u: float | None, shown: tuple[str, str]
) -> None:
    assert interval_ends(lower, upper, u) == shown


def test_nouns_go_with_their_number() -> None:
    assert [counted(n, "coupon") for n in (0, 1, 2)] == ["0 coupons", "1 coupon", "2 coupons"]


def test_takes_numpy_scalars() -> None:
    assert rounded(float(np.float64(183.127)), float(np.float64(1.23))) == ("183.1", "1.2")


@given(
    st.floats(allow_nan=False, allow_infinity=False),
    st.floats(min_value=5e-324, allow_infinity=False),
)
def test_any_pair_is_within_half_a_place(value: float, u: float) -> None:
    with localcontext(prec=2000):
        shown, spread = (Decimal(text) for text in rounded(value, u))
        exact = Decimal(repr(u))
        place = Decimal(1).scaleb(spread.adjusted() - 1)
        assert abs(spread - exact) <= place / 2
        assert abs(shown - Decimal(repr(value))) <= place / 2
