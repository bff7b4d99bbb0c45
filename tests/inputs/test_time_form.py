"""Forms of times that a layout declares, against Python's own reading of the same directives."""

from datetime import UTC, datetime, timedelta, timezone

import pyarrow as pa
import pyarrow.compute as pc
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.errors import InvalidArgument
from coldwork.inputs.time_form import time_form

FORMS = [
    "%d.%m.%Y %H:%M",
    "%m/%d/%Y %I:%M:%S %p",
    "%Y-%m-%dT%H:%M:%S.%f",
    "%d %b %Y %H:%M",
    "%B %d, %Y",
    "%d%m%Y %H:%M",
    "%y%m%d-%H%M%S",
    "%d.%m.%Y %H:%M:%S %z",
    "%Y/%m/%d",
    "on %d.%m.%Y at %H:%M (100%%)",
]
moments = st.datetimes(datetime(2000, 1, 1), datetime(2068, 12, 31)).map(  # noqa: DTZ001
    lambda moment: moment.replace(tzinfo=timezone(timedelta(hours=2)))
)


@pytest.mark.parametrize("form", FORMS)
@settings(deadline=None)
@given(moment=moments)
def test_reads_what_python_writes_in_the_same_form(form: str, moment: datetime) -> None:
    cell = moment.strftime(form)
    iso = time_form(form).iso(cell)
    assert iso is not None
    expected = datetime.strptime(cell, form)  # noqa: DTZ007
    assert datetime.fromisoformat(iso).replace(tzinfo=expected.tzinfo) == expected


@pytest.mark.parametrize("form", FORMS)
@settings(deadline=None)
@given(moment=moments)
def test_a_whole_column_at_once_gives_the_same(form: str, moment: datetime) -> None:
    made = time_form(form)
    if made.rewritten is None:
        return
    cell = moment.strftime(form)
    pattern = f"^{made.strict_pattern}$"
    column = pa.array([cell], pa.string())
    (found,) = pc.replace_substring_regex(
        column, pattern=pattern, replacement=made.rewritten
    ).to_pylist()
    assert found == made.iso(cell)


def test_digits_may_be_missing_where_nothing_is_glued() -> None:
    assert time_form("%d.%m.%Y %H:%M").iso("3.4.2026 9:05") == "2026-04-03T09:05"
    assert time_form("%d%m%Y").iso("342026") is None


@pytest.mark.parametrize(
    ("cell", "iso"),
    [
        ("12:05 AM", "2026-04-03T00:05"),
        ("12:05 PM", "2026-04-03T12:05"),
        ("1:05 pm", "2026-04-03T13:05"),
        ("0:05 PM", None),
        ("13:05 PM", None),
    ],
)
def test_half_days_are_those_of_the_clock(cell: str, iso: str | None) -> None:
    assert time_form("%Y-%m-%d %I:%M %p").iso(f"2026-04-03 {cell}") == iso


@pytest.mark.parametrize(
    "cell", ["", "03.04.2026", "03.04.2026 9:5", " 03.04.2026 09:05", "03/04/2026 09:05", "x"]
)
def test_another_form_is_none(cell: str) -> None:
    assert time_form("%d.%m.%Y %H:%M").iso(cell) is None


def test_a_year_of_two_digits_is_of_this_century() -> None:
    moment = datetime(2075, 4, 3, tzinfo=UTC)  # Python would say 1975
    assert time_form("%d.%m.%y").iso(f"{moment:%d.%m.%y}") == "2075-04-03"


@pytest.mark.parametrize(
    ("form", "words"),
    [
        ("", "the year"),
        ("%d.%m", "the year"),
        ("%Y", "the month"),
        ("%Y-%m", "the day"),
        ("%Y-%m-%d %M", "the hour"),
        ("%Y-%m-%d %H", "the minute"),
        ("%Y-%m-%d %H:%M:%M", "no piece twice"),
        ("%Y-%y-%m-%d", "the year"),
        ("%Y-%m-%d %I:%M", "%I and %p together"),
        ("%Y-%m-%d %H:%M %p", "%I and %p together"),
        ("%Y-%m-%d %H:%M %f", "the second"),
        ("%Y-%m-%d %z", "the hour"),
        ("%Y-%j", "%j is not known"),
        ("%Y-%m-%d %", "% is not known"),
    ],
)
def test_a_form_that_does_not_say_a_time_is_refused(form: str, words: str) -> None:
    with pytest.raises(InvalidArgument, match=words):
        time_form(form)
