"""Numbers in declared signs and units: exact on the text, or refused; never another number."""

from decimal import Decimal, localcontext
from fractions import Fraction

import pyarrow as pa
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork import contracts
from coldwork.inputs.layout import Filled, Layout
from coldwork.inputs.layout_units import Step, step_between
from coldwork.intake.cells import decoded
from coldwork.intake.converting import Converter
from coldwork.intake.numbers import parse_floats
from coldwork.intake.text import REFUSED
from coldwork.intake.written_numbers import AMBIGUOUS, Signs, shifted

SAME = Step()
TO_UM = Step(Fraction(1000))


def layout(decimal: str | None, thousands: str | None = None, **changes: object) -> Layout:
    usual: dict[str, object] = {
        "path": "l.toml",
        "digest": "",
        "id": "l",
        "fills": "indents",
        "text": None,
        "workbook": None,
        "decimal": decimal,
        "thousands": thousands,
        "units_line": False,
        "ends_before": (),
        "absent": ("",),
        "times": None,
        "padded": False,
        "above": (),
        "columns": (),
        "constants": (),
    }
    return Layout(**(usual | changes))  # type: ignore[arg-type]


def converter(made: Layout, column: str, unit: str | None) -> Converter:
    field = contracts.load("in/indents").field(column)
    step = step_between(unit, field.unit or "1") if unit else SAME
    assert step is not None
    return Converter(field, Filled(column, "own", unit, step), made)


@pytest.mark.parametrize(
    ("decimal", "thousands", "cell", "text"),
    [
        (".", None, "183.1", "183.1"),
        (",", None, "183,1", "183.1"),
        (",", ".", "1.183,1", "1183.1"),
        (",", ".", "1.234", "1234"),
        (",", ".", "12.345.678,9", "12345678.9"),
        (".", ",", "-1,234.5", "-1234.5"),
        (",", " ", "1 234,5", "1234.5"),
        (",", " ", "1\N{NARROW NO-BREAK SPACE}234,5", "1234.5"),
        (".", "'", "1'234.5", "1234.5"),
        (".", "'", "1’234.5", "1234.5"),
        (",", ".", "1234,5", "1234.5"),  # without marks is fine
        (",", None, ",5", ".5"),
        (",", None, "1,2E-4", "1.2E-4"),
        (None, None, "12.5", "12.5"),
        (None, None, "0.182", "0.182"),  # no thousands begin with a zero
        (None, None, "1234.567", "1234.567"),
        (None, None, "1.234", AMBIGUOUS),
        (None, None, "-12,345", AMBIGUOUS),
    ],
)
def test_signs_are_those_that_are_declared(
    decimal: str | None, thousands: str | None, cell: str, text: str
) -> None:
    assert Signs(decimal, thousands).number(cell, SAME) == text


@pytest.mark.parametrize(
    ("decimal", "thousands", "cell"),
    [
        (".", None, "183,1"),
        (",", None, "183.1"),
        (",", None, "1.234"),
        (".", None, "1,234"),
        (",", ".", "1.23,4"),
        (",", ".", "1.2345"),
        (",", ".", "12345.678"),
        (",", ".", "0.123"),  # a decimal point, if anything
        (",", ".", "0.6"),
        (",", ".", "1.234.56"),
        (",", ".", "1,234.5"),
        (",", ".", "1.234E3"),
        (",", " ", "1 2345"),
        (",", " ", "1 234\N{NO-BREAK SPACE}567"),  # one mark a number
        (None, None, "12,5"),
        (None, None, "1.234.567"),
        (".", None, "+5"),
        (".", None, "1_000"),
        (".", None, "0x1F"),
        (".", None, "5."),
        (".", None, "12 HV"),
        (".", None, ">940"),
        (".", None, "nan"),
        (".", None, "inf"),
        (".", None, "٣"),
        (".", None, "1.2.3"),
        (".", None, ""),
        (".", None, " 5"),
        (".", None, "9" * 41),
    ],
)
def test_anything_else_is_refused(decimal: str | None, thousands: str | None, cell: str) -> None:
    signs = Signs(decimal, thousands)
    assert signs.number(cell, SAME) == REFUSED
    assert signs.number(cell, TO_UM) == REFUSED


@pytest.mark.parametrize(
    ("text", "places", "expected"),
    [
        ("0.1821", 3, "182.1"),
        ("0.18210", 3, "182.10"),
        ("183.1", -3, "0.1831"),
        ("183.1", 3, "183100"),
        (".5", 3, "500"),
        ("-0.00042", 3, "-0.42"),
        ("7", -3, "0.007"),
        ("0", 3, "0"),
        ("-0.0", -3, "-0.0000"),
        ("12.5", 0, "12.5"),
    ],
)
def test_a_power_of_ten_moves_the_point_digit_for_digit(
    text: str, places: int, expected: str
) -> None:
    assert shifted(text, places) == expected
    assert Decimal(expected) == Decimal(text).scaleb(places)


def test_182_micrometres_to_the_last_bit() -> None:
    # In binary 0.1821 * 1000 is 182.10000000000002.
    assert float(Signs(",", None).number("0,1821", TO_UM)) == 182.1 != 0.1821 * 1000


decimals = st.builds(
    lambda sign, whole, rest: f"{sign}{whole}" + (f".{rest}" if rest else ""),
    st.sampled_from(["", "-"]),
    st.from_regex(r"\A[0-9]{1,12}\Z"),
    st.from_regex(r"\A[0-9]{0,12}\Z"),
)
UNITS = [
    ("force_n", "kgf"), ("force_n", "gf"), ("force_n", "lbf"), ("force_n", "kN"),
    ("d1_um", "mm"), ("d1_um", "in"), ("x_mm", "um"), ("x_mm", "in"),
    ("hardness", "GPa"), ("hardness", "psi"), ("hardness", "ksi"), ("hardness", "N/mm2"),
    ("dwell_s", "min"), ("temperature_c", "K"), ("temperature_c", "F"),
]  # fmt: skip


@settings(deadline=None)
@given(decimals, st.sampled_from(UNITS), st.sampled_from([".", ","]))
def test_a_converted_number_is_the_nearest_double_to_the_exact_one(
    text: str, unit: tuple[str, str], sign: str
) -> None:
    column, written = unit
    step = step_between(written, contracts.load("in/indents").field(column).unit or "1")
    assert step is not None
    with localcontext(prec=60):
        exact = (
            Decimal(text) * Decimal(step.times.numerator) / Decimal(step.times.denominator)
            + Decimal(step.plus.numerator) / Decimal(step.plus.denominator)
        )  # fmt: skip
    found = converter(layout(sign), column, written).one(text.replace(".", sign))
    assert float(found) == float(exact)


@settings(deadline=None, max_examples=50)
@given(
    st.lists(decimals | st.just(""), min_size=1, max_size=30),
    st.sampled_from([("d1_um", "mm"), ("x_mm", "um"), ("force_n", "N"), ("force_n", "kgf")]),
    st.sampled_from([".", ","]),
)
def test_a_whole_column_at_once_gives_the_same_doubles(
    cells: list[str], unit: tuple[str, str], sign: str
) -> None:
    column, written = unit
    raw = pa.array([cell.replace(".", sign) for cell in cells], pa.string())
    one_by_one, at_once = (converter(layout(sign), column, written) for _ in range(2))
    at_once._many = True  # as in a column of very many distinct cells
    slow = parse_floats(decoded(one_by_one.convert(raw).cells)).values
    fast = parse_floats(decoded(at_once.convert(raw).cells)).values
    assert slow.tobytes() == fast.tobytes()


def test_exponents_and_steps_go_together() -> None:
    made = converter(layout(","), "d1_um", "mm")
    assert float(made.one("1,821e-1")) == 182.1
    assert made.one("1e999") not in ("", "inf")  # which the grammar refuses
    assert made.one("1e-999") not in ("0", "0.0")
    assert converter(layout("."), "force_n", "kgf").one("1e308") == REFUSED
    assert converter(layout("."), "force_n", "gf").one("1e-323") == REFUSED


@pytest.mark.parametrize(
    ("absent", "cell", "text"),
    [
        (("", "---"), "---", ""),
        (("", "---"), "", ""),
        (("---",), "", REFUSED),
        (("", "---"), "--", REFUSED),
        (("n.m.",), "n.m.", ""),
        (("",), "n.m.", REFUSED),
    ],
)
def test_only_what_is_declared_stands_for_no_value(
    absent: tuple[str, ...], cell: str, text: str
) -> None:
    made = converter(layout(",", absent=absent), "x_mm", None)
    assert made.one(cell) == text
    parsed = parse_floats(decoded(made.convert(pa.array([cell, "5"], pa.string())).cells))
    assert parsed.bad.tolist() == [text == REFUSED, False]
    assert parsed.absent.tolist() == [text == "", False]


def test_spaces_are_taken_off_only_where_cells_are_filled_up() -> None:
    assert converter(layout(",", padded=True), "x_mm", None).one("  5,5 ") == "5.5"
    assert converter(layout(","), "x_mm", None).one("  5,5 ") == REFUSED


def test_an_apostrophe_of_a_machine_stays() -> None:
    # Readers take one leading apostrophe from text: the tidy form's guard against formulas.
    made = converter(layout(","), "operator", None)
    assert made.convert(pa.array(["'x", "y'", "'"], pa.string())).cells.to_pylist() == [
        "''x",
        "y'",
        "''",
    ]


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        ("12.5", "say decimal = '.' or thousands = '.'"),
        ("1,2,3", "more than one decimal point"),
        ("12 HV", "leave out the unit"),
        (" 5", "padded = true"),
        ("", "list the empty cell under absent"),
        ("+5", "without the plus sign"),
    ],
)
def test_a_refused_cell_has_a_hint(cell: str, words: str) -> None:
    made = converter(layout(",", absent=("---",)), "x_mm", None)
    assert words in made.hint(cell)
    for fault in made.convert(pa.array([cell], pa.string())).faults:
        assert fault.of_raw
        assert fault.hint == made.hint


def test_both_readings_of_an_ambiguous_cell_are_spelled_out() -> None:
    made = converter(layout(None), "x_mm", None)
    assert made.convert(pa.array(["5", "1.234"], pa.string())).ambiguous == 1
    readings = made.ambiguity("1.234")
    assert readings is not None
    what, mend = readings
    assert "1.234 with a decimal point" in what
    assert "1234 with a point between thousands" in what
    assert "decimal = '.'" in mend


def test_both_readings_of_an_ambiguous_date_are_spelled_out() -> None:
    made = converter(layout("."), "measured_at", None)
    column = pa.array(["2026-04-03", "13/04/2026", "03/04/2026"], pa.string())
    assert made.convert(column).ambiguous == 2
    readings = made.ambiguity("03/04/2026 09:05")
    assert readings is not None
    assert "3 April and 4 March" in readings[0]
    assert made.ambiguity("04/04/2026") is None  # not two readings, and no ISO 8601 either
