"""ISO 8601 times, held against the standard library's datetime and zoneinfo."""

from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import pyarrow as pa
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.intake.numbers import Parsed
from coldwork.intake.times import ABSENT, parse_times, time_hint

EPOCH = datetime(1970, 1, 1, tzinfo=UTC)
BERLIN = "Europe/Berlin"


def parsed(*texts: str, zone: str = "UTC") -> Parsed:
    return parse_times(pa.array(list(texts), pa.string()), zone)


def microseconds(time: datetime) -> int:
    return (time - EPOCH) // timedelta(microseconds=1)


# Examples of the forms of ISO 8601-1:2019, calendar date with time of day.
@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("2026-03-31T10:15:00Z", datetime(2026, 3, 31, 10, 15, tzinfo=UTC)),
        ("2026-03-31T10:15:00+02:00", datetime(2026, 3, 31, 8, 15, tzinfo=UTC)),
        ("2026-03-31T10:15:00-0530", datetime(2026, 3, 31, 15, 45, tzinfo=UTC)),
        ("2026-03-31T10:15+02", datetime(2026, 3, 31, 8, 15, tzinfo=UTC)),
        ("2026-03-31 10:15:30.25Z", datetime(2026, 3, 31, 10, 15, 30, 250000, tzinfo=UTC)),
        ("2026-03-31T10:15:30.1234567Z", datetime(2026, 3, 31, 10, 15, 30, 123456, tzinfo=UTC)),
        ("20260331T101500Z", datetime(2026, 3, 31, 10, 15, tzinfo=UTC)),
        ("2026-03-31", datetime(2026, 3, 31, tzinfo=UTC)),
        ("2026-03-31T10:15", datetime(2026, 3, 31, 10, 15, tzinfo=UTC)),
        ("2024-02-29T23:59:59", datetime(2024, 2, 29, 23, 59, 59, tzinfo=UTC)),
    ],
)
@pytest.mark.parametrize("company", [(), ("",), ("nonsense",), ("2026-01-01T00:00:00+01:00",)])
def test_takes_iso_8601(text: str, expected: datetime, company: tuple[str, ...]) -> None:
    times = parsed(*company, text)
    assert times.values[-1] == microseconds(expected)
    assert not times.bad[-1]


@pytest.mark.parametrize(
    "text",
    [
        "31.03.2026", "03/31/2026 10:15", "2026-02-30", "2025-02-29", "2026-03-31T24:00:00",
        "2026-03-31T10:15:60Z", "2026-13-01", "yesterday", "46112.5", "2026-03-31T10:15:00 CET",
        "2026-03-31T10:15:00+25:00", "0026-03-31", "9999-12-31T23:59:59Z", "2026-3-31", "10:15",
        "2026-03-31T10:15:00Zjunk", " 2026-03-31",
    ],
)  # fmt: skip
def test_refuses_what_is_no_time(text: str) -> None:
    times = parsed("2026-03-31T10:15:00Z", text)
    assert times.bad.tolist() == [False, True]
    assert times.values[1] == ABSENT
    assert len(time_hint(text, "UTC")) > 10


def test_an_empty_cell_is_absent() -> None:
    times = parsed("", "2026-03-31")
    assert times.absent.tolist() == [True, False]
    assert times.values[0] == ABSENT
    assert not times.bad.any()
    assert parsed().values.shape == (0,)


def test_a_time_without_a_zone_takes_the_sheets_zone() -> None:
    # Central European Summer Time is two hours ahead of UTC, winter time one.
    summer, winter = parsed("2026-07-01T12:00:00", "2026-01-01T12:00:00", zone=BERLIN).values
    assert summer == microseconds(datetime(2026, 7, 1, 10, tzinfo=UTC))
    assert winter == microseconds(datetime(2026, 1, 1, 11, tzinfo=UTC))


def test_a_zone_that_is_written_wins() -> None:
    times = parsed("2026-07-01T12:00:00Z", "2026-07-01T12:00:00", zone=BERLIN)
    assert times.values[0] - times.values[1] == 2 * 3600 * 1_000_000


def test_a_local_time_that_the_clocks_skip_or_repeat_is_bad() -> None:
    # In the European Union the clocks change at 01:00 UTC on the last Sundays of March and
    # October (Directive 2000/84/EC): 2026-03-29 and 2026-10-25.
    skipped = ["2026-03-29T02:00:00", "2026-03-29T02:30:00", "2026-03-29T02:59:59"]
    repeated = ["2026-10-25T02:00:00", "2026-10-25T02:59:59.999999"]
    sound = ["2026-03-29T01:59:59", "2026-03-29T03:00:00", "2026-10-25T01:59:59",
             "2026-10-25T03:00:00"]  # fmt: skip
    assert parsed(*skipped, *repeated, zone=BERLIN).bad.all()
    assert not parsed(*sound, zone=BERLIN).bad.any()
    assert "+hh:mm" in time_hint(skipped[0], BERLIN)
    assert not parsed("2026-10-25T02:30:00+02:00", zone=BERLIN).bad.any()


@settings(deadline=None, max_examples=200)
@given(
    st.lists(
        st.datetimes(datetime(1901, 1, 1), datetime(2199, 1, 1)),  # noqa: DTZ001 - local times
        min_size=1,
        max_size=6,
    ),
    st.sampled_from([BERLIN, "America/Sao_Paulo", "Australia/Lord_Howe", "Asia/Kathmandu", "UTC"]),
)
def test_agrees_with_the_zone_data(local: list[datetime], zone: str) -> None:
    times = parsed(*(time.isoformat() for time in local), zone=zone)
    for time, value, bad in zip(local, times.values, times.bad, strict=True):
        placed = time.replace(tzinfo=ZoneInfo(zone))
        once = placed.utcoffset() == placed.replace(fold=1).utcoffset()
        assert bad == (not once)
        assert bad or value == microseconds(placed.astimezone(UTC))


@settings(deadline=None, max_examples=100)
@given(st.datetimes(datetime(1901, 1, 1), datetime(2199, 1, 1), timezones=st.timezones()))  # noqa: DTZ001
def test_agrees_with_datetime_where_the_offset_is_written(time: datetime) -> None:
    text = time.isoformat()
    if text.count(":") <= 3:  # offsets with seconds (before standard time) are not ISO 8601
        assert parsed(text).values[0] == microseconds(datetime.fromisoformat(text))


def test_an_unknown_zone_is_not_taken_for_another() -> None:
    with pytest.raises(ZoneInfoNotFoundError):
        parsed("2026-01-01T12:00:00", zone="Europe/Atlantis")
