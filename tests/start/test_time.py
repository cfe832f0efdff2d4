"""The time column, and which way round its days are."""

from __future__ import annotations

from tests.start.tables import NOW_MICROSECONDS, UTC, noise, stamps, table_of

from holdsteady.intake.times_text import NO_TIME
from holdsteady.start.guess_time import TimeGuess, guess_time


def time_of(columns: dict[str, list[str]]) -> TimeGuess:
    return guess_time(table_of(columns), NOW_MICROSECONDS, UTC)


def keys(found: TimeGuess) -> dict[str, object]:
    return {guess.key: guess.value for guess in found.guesses if not guess.offered}


def test_the_only_column_of_times_is_sure() -> None:
    found = time_of({"v": noise(20), "stamp": stamps(20)})
    assert found.columns == ("stamp",)
    assert found.guesses[0].confidence == "sure"
    assert len(found.guesses[0].rows) == 2
    assert keys(found) == {"time": "stamp"}


def test_a_moment_goes_before_a_date_and_a_name_before_none() -> None:
    found = time_of(
        {"due": stamps(20, form="%Y-%m-%d"), "x": stamps(20), "measured": stamps(20), "v": noise(20)}
    )
    assert found.columns == ("measured",)
    assert found.guesses[0].confidence == "likely"
    assert set(found.spoken_for) == {"due", "x", "measured"}


def test_date_and_time_of_day_in_two_columns() -> None:
    date, clock = stamps(20, form="%d.%m.%Y"), stamps(20, form="%H:%M")
    found = time_of({"date": date, "clock": clock, "v": noise(20)})
    assert found.columns == ("date", "clock")
    assert keys(found) == {"time": ("date", "clock")}
    assert (found.time % 86_400_000_000 != 0).any()


def test_a_part_above_twelve_needs_no_format() -> None:
    found = time_of({"stamp": stamps(60, form="%d/%m/%Y %H:%M"), "v": noise(60)})
    assert keys(found) == {"time": "stamp"}
    assert "day/month/year" in found.guesses[0].why


def test_without_proof_the_order_of_the_rows_decides() -> None:
    days = [f"{day:02d}/{month:02d}/2025 06:00:00" for month in (2, 3, 4) for day in range(1, 13)]
    found = time_of({"stamp": days, "v": noise(36)})
    assert keys(found) == {"time": "stamp", "time_format": "%d/%m/%Y %H:%M:%S"}
    turned = [f"{month:02d}/{day:02d}/25" for month in (2, 3, 4) for day in range(1, 13)]
    found = time_of({"stamp": turned, "v": noise(36)})
    assert keys(found) == {"time": "stamp", "time_format": "%m/%d/%y"}
    assert found.guesses[1].confidence == "likely"


def test_where_nothing_tells_the_format_is_offered_not_set() -> None:
    found = time_of({"stamp": ["03/03/2025 06:00", "03/03/2025 07:00"], "v": ["1.5", "1.6"]})
    assert keys(found) == {"time": "stamp"}
    assert found.guesses[1].offered
    assert found.guesses[1].value == "%d/%m/%Y %H:%M"
    assert (found.time == NO_TIME).all()


def test_numbers_that_could_be_seconds_need_a_name_or_an_order() -> None:
    serials = [str(1_700_000_000 + (7 * index) % 20) for index in range(20)]
    assert time_of({"article": serials, "v": noise(20)}).columns == ()
    assert time_of({"time": serials, "v": noise(20)}).columns == ("time",)
    rising = [str(1_700_000_000 + 60 * index) for index in range(20)]
    assert time_of({"x": rising, "v": noise(20)}).columns == ("x",)


def test_without_times_it_says_so() -> None:
    found = time_of({"v": noise(20)})
    assert found.guesses == ()
    assert "no column of times" in found.notes[0]


def test_times_to_come_are_none() -> None:
    found = time_of({"stamp": [*stamps(20), "2031-01-01 00:00:00"], "v": noise(21)})
    assert found.time[-1] == NO_TIME
