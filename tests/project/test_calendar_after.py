"""The moment by which so much calendar time has passed: the inverse of counting it."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from holdsteady.project.calendar import parse_calendar
from holdsteady.times import to_microseconds

LISBON = ZoneInfo("Europe/Lisbon")
HOUR = 3_600_000_000
TEXTS = (
    None,
    "mon-fri 06:00-22:00",
    "sat",
    "fri 22:00-06:00",
    "mon 06:00-14:00, sat 08:00-12:00",
    "00:00-03:00",
)


def at(text: str, zone: ZoneInfo = LISBON) -> int:
    return to_microseconds(dt.datetime.fromisoformat(text), zone)


@pytest.mark.parametrize(
    ("start", "hours", "calendar", "due"),
    [
        ("2026-03-17 14:00", 8, None, "2026-03-17 22:00"),
        ("2026-03-17 14:00", 8, "mon-fri 06:00-22:00", "2026-03-17 22:00"),
        ("2026-03-17 15:00", 8, "mon-fri 06:00-22:00", "2026-03-18 07:00"),
        ("2026-03-20 15:00", 8, "mon-fri 06:00-22:00", "2026-03-23 07:00"),  # over a weekend
        ("2026-03-21 12:00", 1, "mon-fri 06:00-22:00", "2026-03-23 07:00"),  # from outside the calendar
        ("2026-03-28 22:00", 8, None, "2026-03-29 07:00"),  # the clock skips an hour
        ("2026-10-24 22:00", 8, None, "2026-10-25 05:00"),  # the clock repeats an hour
        ("2026-03-17 14:00", 200, "sat", "2026-05-16 08:00"),  # eight whole Saturdays and eight hours
    ],
)
def test_when_so_much_calendar_time_has_passed(
    start: str, hours: int, calendar: str | None, due: str
) -> None:
    """Counted by hand on a calendar of 2026; Portugal's clock changes on 29 March and 25 October."""
    moment = parse_calendar(calendar).moment_after(at(start), hours * HOUR, LISBON)
    assert dt.datetime.fromtimestamp(moment / 1e6, LISBON).strftime("%Y-%m-%d %H:%M") == due


@settings(max_examples=60, deadline=None)
@given(
    start=st.integers(at("2025-01-01 00:00"), at("2026-12-31 00:00")),
    span=st.integers(1, 2_000 * HOUR),
    text=st.sampled_from(TEXTS),
    zone=st.sampled_from(["Europe/Lisbon", "UTC", "Australia/Lord_Howe", "America/New_York"]),
)
def test_it_is_the_first_moment_by_which_the_time_has_passed(
    start: int, span: int, text: str | None, zone: str
) -> None:
    calendar, where = parse_calendar(text), ZoneInfo(zone)
    moment = calendar.moment_after(start, span, where)
    assert calendar.elapsed(start, moment, where) == span
    assert calendar.elapsed(start, moment - 1, where) < span
