"""Calendar time against a count of single minutes, clock changes included."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from holdsteady.project.calendar import ALWAYS, Calendar, parse_calendar

MINUTE = 60_000_000
DAY_MINUTES = 1440
ZONES = (
    "UTC",
    "Europe/Lisbon",
    "America/New_York",
    "Australia/Lord_Howe",
    "Africa/Casablanca",
    "Asia/Kolkata",
)
EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


def naive_elapsed(spans: list[tuple[int, int, int]], start: int, end: int, zone: ZoneInfo) -> int:
    """Count minutes one by one; a span is weekday, begin, end in minutes, past 24:00 into the next day."""
    count = 0
    for minute in range(start, end):
        local = (EPOCH + timedelta(minutes=minute)).astimezone(zone)
        clock = local.hour * 60 + local.minute
        count += any(
            (day == local.weekday() and begin <= clock < stop)
            or ((day + 1) % 7 == local.weekday() and clock + DAY_MINUTES < stop)
            for day, begin, stop in spans
        )
    return count


spans = st.lists(
    st.tuples(st.integers(0, 6), st.integers(0, 1439), st.integers(1, 1439)).map(
        lambda s: (s[0], s[1], s[1] + s[2])
    ),
    min_size=1,
    max_size=4,
)
DAYS = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")


def written(items: list[tuple[int, int, int]]) -> str:
    def clock(minutes: int) -> str:
        return f"{minutes // 60:02d}:{minutes % 60:02d}"

    return "; ".join(
        f"{DAYS[day]} {clock(begin)}-{clock(end if end <= DAY_MINUTES else end - DAY_MINUTES)}"
        for day, begin, end in items
    )


@given(
    spans,
    st.sampled_from(ZONES),
    st.datetimes(datetime(2025, 1, 1), datetime(2026, 12, 1)),  # noqa: DTZ001  counted as UTC below
    st.integers(0, 12_000),
)
@settings(max_examples=60, deadline=None)
def test_agrees_with_a_count_of_minutes(
    items: list[tuple[int, int, int]], zone_name: str, moment: datetime, length: int
) -> None:
    zone = ZoneInfo(zone_name)
    start = (moment.replace(tzinfo=UTC) - EPOCH) // timedelta(minutes=1)
    found = parse_calendar(written(items)).elapsed(start * MINUTE, (start + length) * MINUTE, zone)
    assert found == naive_elapsed(items, start, start + length, zone) * MINUTE


@pytest.mark.parametrize("zone_name", ZONES)
@pytest.mark.parametrize(
    "day", ["2026-03-07", "2026-03-28", "2026-10-24", "2026-10-31", "2026-04-04", "2026-02-14"]
)
def test_agrees_around_clock_changes(zone_name: str, day: str) -> None:
    items = [(5, 1380, 1380 + 200), (6, 60, 125), (6, 150, 200)]
    start = (datetime.fromisoformat(day).replace(tzinfo=UTC) - EPOCH) // timedelta(minutes=1)
    zone = ZoneInfo(zone_name)
    found = parse_calendar(written(items)).elapsed(start * MINUTE, (start + 2880) * MINUTE, zone)
    assert found == naive_elapsed(items, start, start + 2880, zone) * MINUTE


@given(st.integers(-(10**15), 2 * 10**15), st.integers(-(10**12), 10**15), st.sampled_from(ZONES))
@settings(max_examples=50, deadline=None)
def test_without_a_calendar_it_is_the_plain_difference(start: int, length: int, zone_name: str) -> None:
    assert ALWAYS.elapsed(start, start + length, ZoneInfo(zone_name)) == max(0, length)
    assert parse_calendar(None) == ALWAYS


@given(spans, st.lists(st.integers(0, 3 * 10**14), min_size=3, max_size=3))
@settings(max_examples=50, deadline=None)
def test_stretches_add_up(items: list[tuple[int, int, int]], moments: list[int]) -> None:
    a, b, c = sorted(1_700_000_000_000_000 + m for m in moments)
    calendar, zone = parse_calendar(written(items)), ZoneInfo("Europe/Lisbon")
    assert calendar.elapsed(a, b, zone) + calendar.elapsed(b, c, zone) == calendar.elapsed(a, c, zone)


def hours(*pairs: tuple[int, int]) -> Calendar:
    return Calendar(spans=tuple((begin * 60, end * 60) for begin, end in pairs))


@pytest.mark.parametrize(
    ("text", "calendar"),
    [
        ("mon-fri 06:00-22:00", hours((6, 22), (30, 46), (54, 70), (78, 94), (102, 118))),
        ("Mon,Wed 06:00-14:00", hours((6, 14), (54, 62))),
        ("mon, wed 6:00 - 14:00", hours((6, 14), (54, 62))),
        ("mon 06:00-14:00, sat 08:00-12:00", hours((6, 14), (128, 132))),
        ("mon 06:00-12:00,13:00-14:00", hours((6, 12), (13, 14))),
        ("monday–tuesday 06:00-14:00", hours((6, 14), (30, 38))),
        ("sat-mon 00:00-24:00", hours((0, 24), (120, 168))),
        ("sun 22:00-06:00", hours((0, 6), (166, 168))),
        ("mon-tue", hours((0, 48))),
        ("mon; tue 06:00-14:00", hours((0, 24), (30, 38))),
        ("06:00-12:00", hours(*((d * 24 + 6, d * 24 + 12) for d in range(7)))),
        ("mon 06:00-14:00; mon 14:00-22:00", hours((6, 22))),
        ("mon-sun 00:00-24:00", ALWAYS),
    ],
)
def test_forms(text: str, calendar: Calendar) -> None:
    assert parse_calendar(text) == calendar


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "names no days and no hours"),
        ("mon 06:00-14:00;", "names no days and no hours"),
        ("mon 6-14", "'6-14' cannot be read as days and hours"),
        ("mon-xyz 06:00-14:00", "'xyz' is no day; days are mon, tue, wed, thu, fri, sat, sun"),
        ("mon 06:00-25:00", "'25:00' is no time of day; times run from 00:00 to 24:00"),
        ("mon 06:60-12:00", "'06:60' is no time of day; times run from 00:00 to 24:00"),
        ("mon 06:00-06:00", "'06:00-06:00' is no span; the whole day is 00:00-24:00"),
        ("mon 24:00-06:00", "'24:00-06:00' is no span; the whole day is 00:00-24:00"),
        ("mon 06:00-14:00 and sun", "'and' is no day; days are mon, tue, wed, thu, fri, sat, sun"),
    ],
)
def test_what_cannot_be_read_is_said(text: str, message: str) -> None:
    with pytest.raises(ValueError) as caught:  # noqa: PT011  the whole message is compared
        parse_calendar(text)
    assert str(caught.value) == message
