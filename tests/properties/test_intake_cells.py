"""Single cells against the standard library: numbers, times and local clocks."""

from __future__ import annotations

import datetime as dt
from decimal import Decimal, InvalidOperation
from zoneinfo import ZoneInfo

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from holdsteady.intake.clock import Clock
from holdsteady.intake.columns import strings
from holdsteady.intake.numbers import Mark, State, evidence, parse
from holdsteady.intake.times_text import NO_TIME
from holdsteady.intake.times_text import parse as parse_times

EPOCH = dt.datetime(1970, 1, 1)  # noqa: DTZ001
MARKS = st.sampled_from([".", ","])
GROUPERS = st.sampled_from(["other", "'", "’", " ", "\u00a0", "\u202f"])


@settings(max_examples=150, deadline=None)
@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1, max_size=20), MARKS)
def test_a_number_written_in_full_reads_back_to_the_bit(numbers: list[float], mark: Mark) -> None:
    read = parse(strings([repr(one).replace(".", mark) for one in numbers]), mark, ())
    assert (read.state == State.NUMBER).all()
    assert read.values.tolist() == numbers


@settings(max_examples=150, deadline=None)
@given(st.integers(-(10**12), 10**12), MARKS, GROUPERS)
def test_thousands_marks_in_threes(thousandths: int, mark: Mark, grouper: str) -> None:
    between = {".": ",", ",": "."}[mark] if grouper == "other" else grouper
    text = f"{Decimal(thousandths) / 1000:,.3f}".replace(".", "§").replace(",", between).replace("§", mark)
    read = parse(strings([text]), mark, ())
    assert read.state.tolist() == [State.NUMBER]
    assert read.values.tolist() == [float(Decimal(thousandths) / 1000)]


@settings(max_examples=300, deadline=None)
@given(st.text(alphabet="0123456789+-.eE xinfaNd_'<", max_size=8))
def test_nothing_is_a_number_that_decimal_would_refuse(text: str) -> None:
    """Decimal (of the standard library) knows more forms; what is read must be among its finite ones."""
    read = parse(strings([text]), ".", ())
    bare = text.strip()
    if read.state[0] == State.CENSORED:  # its value is the limit, which must be a number likewise
        assert bare.startswith("<")
        bare = bare[1:].strip()
    if read.state[0] in (State.NUMBER, State.CENSORED):
        ungrouped = bare.replace("'", "").replace(" ", "")
        assert np.isclose(read.values[0], float(Decimal(ungrouped)), rtol=1e-15, atol=0)
    else:
        assert np.isnan(read.values[0])
        try:
            finite = Decimal(bare).is_finite() and abs(float(bare)) < float("inf")
        except (InvalidOperation, ValueError, OverflowError):
            finite = False
        assert not finite or "_" in bare


def test_evidence_for_a_mark() -> None:
    cells = ["1.5", "0,123", "1.234", "1,234", "1.234,5", "1,234,567", "12", "x", "1'234,5", "<0.5"]
    found = evidence(cells)
    assert (found.dot, found.comma) == (3, 3)  # 1.5, <0.5, 1,234,567 — 0,123, 1.234,5, 1'234,5
    assert (found.lone_dot, found.lone_comma) == (1, 1)
    assert (found.grouping_dot, found.grouping_comma) == (1, 1)


PARTS = st.tuples(*(st.integers(0, top) for top in (33, 14, 2100, 25, 61, 61)))


@settings(max_examples=200, deadline=None)
@given(st.lists(PARTS, min_size=1, max_size=10), st.sampled_from("-./"), st.booleans())
def test_only_days_and_clocks_that_exist(parts: list[tuple[int, ...]], mark: str, year_first: bool) -> None:  # noqa: FBT001
    texts, expected = [], []
    for day, month, year, hour, minute, second in parts:
        calendar = [f"{year:04d}", f"{month:02d}", f"{day:02d}"]
        texts.append(
            f"{mark.join(calendar if year_first else calendar[::-1])} {hour:02d}:{minute:02d}:{second:02d}"
        )
        try:
            moment = dt.datetime(year, month, day, hour, minute, second)  # noqa: DTZ001
            expected.append((moment - EPOCH) // dt.timedelta(microseconds=1))
        except ValueError:
            expected.append(NO_TIME)
    assert parse_times(strings(texts)).first.tolist() == expected


@settings(max_examples=100, deadline=None)
@given(st.lists(st.text(alphabet="0123456789-:T./ Zapm+", max_size=22), max_size=10))
def test_any_text_is_read_or_refused_alone(texts: list[str]) -> None:
    together = parse_times(strings(texts))
    for index, text in enumerate(texts):
        alone = parse_times(strings([text]))
        assert alone.first[0] == together.first[index]
        assert alone.second[0] == together.second[index]
        assert alone.family[0] == together.family[index]


ZONES = st.sampled_from(["Europe/Lisbon", "America/New_York", "Australia/Lord_Howe", "Asia/Kathmandu", "UTC"])
WALLS = st.datetimes(dt.datetime(1975, 1, 1), dt.datetime(2035, 1, 1))  # noqa: DTZ001
CHANGES = st.builds(  # close to the changes of these zones
    lambda day, minutes: day + dt.timedelta(minutes=minutes),
    st.sampled_from(
        [
            dt.datetime(2025, month, day)  # noqa: DTZ001
            for month, day in ((3, 30), (10, 26), (3, 9), (11, 2), (4, 6), (10, 5))
        ]
    ),
    st.integers(-120, 360),
)


@settings(max_examples=300, deadline=None)
@given(ZONES, st.lists(WALLS | CHANGES, min_size=1, max_size=6))
def test_local_time_as_the_zone_database_has_it(zone: str, walls: list[dt.datetime]) -> None:
    """`fold=0` is the first pass of a repeated hour and the earlier offset of a skipped one (PEP 495)."""
    clock = Clock(ZoneInfo(zone), 0)
    for wall in walls:
        micros = np.array([(wall - EPOCH) // dt.timedelta(microseconds=1)], dtype=np.int64)
        expected = wall.replace(tzinfo=ZoneInfo(zone), fold=0).astimezone(dt.UTC).replace(tzinfo=None)
        result = clock.to_utc(micros, np.zeros(1, dtype=np.bool_))
        assert result.tolist() == [(expected - EPOCH) // dt.timedelta(microseconds=1)]


@settings(max_examples=60, deadline=None)
@given(ZONES, st.integers(1, 900), st.datetimes(dt.datetime(2024, 1, 1), dt.datetime(2025, 12, 31)))  # noqa: DTZ001
def test_a_clock_that_runs_on_comes_back(zone: str, step: int, start: dt.datetime) -> None:
    """At most 15 minutes apart, so that each pass of the shortest repeated span, 30 minutes, has a row."""
    moments = (start - EPOCH) // dt.timedelta(microseconds=1) + np.arange(3_000) * step * 1_000_000
    local = ZoneInfo(zone)
    walls = [
        (dt.datetime.fromtimestamp(m // 1_000_000, tz=local).replace(tzinfo=None) - EPOCH)
        // dt.timedelta(microseconds=1)
        + m % 1_000_000
        for m in moments.tolist()
    ]
    result = Clock(local, 0).to_utc(np.array(walls), np.zeros(len(walls), dtype=np.bool_))
    assume(result[0] == moments[0])  # a file that begins within the second pass shows no step back
    assert result.tolist() == moments.tolist()
