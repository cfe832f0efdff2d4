"""Moments and numbers as pages write them."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st

from holdsteady.site.moments import Clock, duration
from holdsteady.site.numbers import Scale, counted, grouped, listed, plain, spelled
from holdsteady.times import to_microseconds

LISBON = ZoneInfo("Europe/Lisbon")


def at(text: str) -> int:
    return to_microseconds(dt.datetime.fromisoformat(text), LISBON)


CLOCK = Clock(zone=LISBON, now=at("2026-03-17T14:10"))  # a Tuesday


@pytest.mark.parametrize(
    ("moment", "short", "said"),
    [
        ("2026-03-17T14:05", "14:05", "14:05 on Tuesday"),
        ("2026-03-16T07:00", "Mon 07:00", "07:00 on Monday"),
        ("2026-03-11T15:02", "Wed 15:02", "15:02 on Wednesday"),
        ("2026-03-10T15:02", "10 Mar 15:02", "15:02 on 10 March"),  # a week back, its weekday names two days
        ("2026-03-16T00:00", "Mon 00:00", "Monday"),
        ("2026-01-02T08:30", "2 Jan 08:30", "2 January"),
        ("2025-12-31T08:30", "31 Dec 2025", "31 December 2025"),
    ],
)
def test_moments_are_as_short_as_their_distance_allows(moment: str, short: str, said: str) -> None:
    assert CLOCK.short(at(moment)) == short
    assert CLOCK.said(at(moment)) == said


def test_moments_are_written_in_the_zone_of_the_plant() -> None:
    assert CLOCK.full(at("2026-03-17T14:10")) == "Tue 17 Mar 2026, 14:10"
    tokyo = Clock(zone=ZoneInfo("Asia/Tokyo"), now=CLOCK.now)
    assert tokyo.full(CLOCK.now) == "Tue 17 Mar 2026, 23:10"
    assert CLOCK.machine(CLOCK.now) == "2026-03-17T14:10:00+00:00"


def test_spans_name_a_common_day_once() -> None:
    assert CLOCK.span(at("2026-03-16T07:00"), at("2026-03-16T09:00")) == "07:00 to 09:00 on Monday"
    assert CLOCK.span(at("2026-03-15T22:00"), at("2026-03-16T09:00")) == "22:00 on Sunday to 09:00 on Monday"
    monday = at("2026-03-16T07:00")
    assert CLOCK.between(at("2026-03-16T05:30"), at("2026-03-16T08:30"), monday) == "05:30 and 08:30"
    assert (
        CLOCK.between(at("2026-03-15T22:00"), at("2026-03-16T08:30"), monday)
        == "22:00 on Sunday and 08:30 on Monday"
    )


def test_a_logbook_moment_is_cut_to_the_minute_and_rounded_up_on_request() -> None:
    assert CLOCK.written(at("2026-03-16T07:00:35")) == "2026-03-16 07:00"
    assert CLOCK.written(at("2026-03-16T07:00:35"), up=True) == "2026-03-16 07:01"


@pytest.mark.parametrize(
    ("seconds", "said"),
    [
        (1, "1 second"),
        (90, "90 seconds"),
        (7_200, "2 hours"),
        (28_800, "8 hours"),
        (86_400, "1 day"),
        (129_600, "36 hours"),
        (1_209_600, "14 days"),
    ],
)
def test_durations_in_words(seconds: int, said: str) -> None:
    assert duration(seconds * 1_000_000) == said


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.0, "0"),
        (3.0, "3"),
        (12.0041, "12.00"),
        (0.00361, "0.003610"),
        (1118.26, "1118"),
        (20434.0, "20\u202f434"),
        (-0.5, "−0.5000"),
        (1.5e-9, "1.500e−09"),
        (-0.0, "0"),
    ],
)
def test_plain_numbers_have_four_significant_digits(value: float, text: str) -> None:
    assert plain(value) == text


def test_values_carry_decimals_and_unit() -> None:
    bore = Scale(statistic="mean", unit="mm", decimals=3)
    assert bore.value(12.0) == "12.000 mm"
    assert bore.bare(0.0004) == "0.0004"  # never a zero that it is not
    assert bore.bare(0.0) == bore.bare(-0.0) == "0.000"
    assert bore.value(-1.25) == "−1.250 mm"
    assert bore.difference(-0.0041) == "0.004 mm"
    assert Scale(statistic="mean").value(12.3456) == "12.35"


def test_fractions_are_percent_and_differ_by_percentage_points() -> None:
    rejects = Scale(statistic="fraction", unit="", decimals=1)
    assert rejects.value(0.0224) == "2.2\u202f%"
    assert rejects.difference(0.0123) == "1.2 percentage points"
    assert Scale(statistic="fraction").value(0.5) == "50\u202f%"


def test_counts_stay_whole_and_estimated_differences_short() -> None:
    stops = Scale(statistic="count", unit="a shift", decimals=2)
    assert stops.value(5.0) == "5 a shift"
    assert stops.difference(3.612) == "3.6 a shift"


def test_figures_of_a_calculation_have_no_fewer_decimals_than_a_reading() -> None:
    bore = Scale(statistic="value", unit="mm", decimals=3)
    assert bore.figure(12.00139, unit=True) == "12.0014 mm"
    assert bore.figure(12.0, unit=True) == "12.000 mm"
    assert bore.figure(0.0080412, unit=True) == "0.008041 mm"
    assert bore.figure(0.0004, unit=True) == "0.0004 mm"
    assert bore.figure(2.32593, unit=False) == "2.326"
    assert Scale(statistic="value").figure(160.0, unit=False) == "160"
    rejects = Scale(statistic="fraction")
    assert rejects.figure(0.02087, unit=True) == "2.087\u202f%"
    assert rejects.figure(0.875, unit=True) == "87.5\u202f%"
    assert rejects.figure(6460.0, unit=False) == "6460"


def test_what_rounds_alike_is_written_apart() -> None:
    length = Scale(statistic="mean", unit="mm", decimals=2)
    assert length.apart(249.8961, 249.8974) == ("249.896 mm", "249.897 mm")
    assert length.apart(249.85, 249.90) == ("249.85 mm", "249.90 mm")


@given(st.floats(allow_nan=False, allow_infinity=False, width=32), st.integers(0, 6))
def test_no_number_is_ever_written_as_a_zero_that_it_is_not(value: float, decimals: int) -> None:
    text = Scale(statistic="mean", decimals=decimals).bare(value)
    assert (not any(digit in text.partition("e")[0] for digit in "123456789")) == (value == 0)


def test_counted_and_spelled() -> None:
    assert [spelled(n) for n in (1, 9, 15, 18)] == ["one", "nine", "fifteen", "18"]
    assert counted(1, "reading") == "1 reading"
    assert counted(12_000, "reading") == "12\u202f000 readings"
    assert listed(["a", "b", "c"]) == "a, b and c"
    assert grouped("-1234567.5") == "−1\u202f234\u202f567.5"
