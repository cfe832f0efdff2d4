"""How readings become points: columns, sizes, clock time, wide rows, counts; eras and gaps."""

from __future__ import annotations

import datetime as dt
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.made_readings import HOUR, START, context, find, readings, settings

from holdsteady.monitor.gather import Gathered, gather, up_to
from holdsteady.monitor.kinds import choose
from holdsteady.times import SECOND, to_microseconds

NO_ERAS = np.zeros(0, dtype=np.int64)


def points(
    values: Any,
    given: dict[str, Any],
    *,
    eras: Any = NO_ERAS,
    zone: str = "UTC",
    as_of: int | None = None,
    **how: Any,
) -> Gathered:
    return gather(
        readings(values, **how),
        settings(**given),
        era_starts=np.asarray(eras, dtype=np.int64),
        as_of=context().as_of if as_of is None else as_of,
        zone=ZoneInfo(zone),
    )


def test_equal_values_next_to_each_other_are_one_subgroup() -> None:
    got = points([1, 2, 3, 4, 5], {"subgroup": {"column": "s"}}, subgroup=["a", "a", "b", "a", "a"])
    assert got.label == ("a", "b", "a")
    assert got.n.tolist() == [2, 1, 2]
    assert got.groups is not None
    assert got.groups.mean.tolist() == [1.5, 3.0, 4.5]
    assert got.time is not None
    assert got.time.tolist() == [START + 2 * HOUR, START + 3 * HOUR, START + 5 * HOUR]
    assert not got.open.any()


def test_subgroups_by_size_are_counted_anew_at_an_era_and_after_a_pause() -> None:
    by_era = points(range(7), {"subgroup": {"size": 2}}, eras=[START + 4 * HOUR])
    assert by_era.n.tolist() == [2, 1, 2, 2]
    assert by_era.era.tolist() == [1, 1, 2, 2]
    time = [START + HOUR * h for h in (1, 2, 3, 9, 10, 11, 12)]
    by_gap = points(range(7), {"subgroup": {"size": 2}, "gap": "3h"}, time=time)
    assert by_gap.n.tolist() == [2, 1, 2, 2]
    assert by_gap.segment.tolist() == [0, 0, 1, 1]


def test_the_newest_subgroup_is_open_while_incomplete() -> None:
    assert points(range(5), {"subgroup": {"size": 2}}).open.tolist() == [False, False, True]
    assert points(range(4), {"subgroup": {"size": 2}}).open.tolist() == [False, False]
    every: dict[str, Any] = {"subgroup": {"every": "2h"}}
    assert points(range(5), every, as_of=START + 5 * HOUR).open.tolist() == [False, False, True]
    assert points(range(5), every, as_of=START + 6 * HOUR).open.tolist() == [False, False, False]


def test_spans_of_time_are_cut_at_local_clock_hours() -> None:
    # Lisbon is on UTC in January: 01:00, 02:00, 03:00 fall into 0-2, 2-4, 2-4; Kolkata is 5:30 ahead.
    assert points(range(3), {"subgroup": {"every": "2h"}}).n.tolist() == [1, 2]
    assert points(range(3), {"subgroup": {"every": "2h"}}, zone="Asia/Kolkata").n.tolist() == [2, 1]


def test_spans_start_at_midnight_on_both_sides_of_a_clock_change() -> None:
    zone = ZoneInfo("Europe/Lisbon")
    first = to_microseconds(dt.date(2026, 3, 28), zone)
    time = [first + h * HOUR for h in range(72)]
    got = points(range(72), {"subgroup": {"every": "8h"}}, time=time, zone="Europe/Lisbon")
    assert got.n.tolist() == [8, 8, 8, 7, 8, 8, 8, 8, 8, 1]  # the night of 29 March is an hour shorter


def test_days_and_weeks_are_cut_at_local_midnight() -> None:
    assert points(range(50), {"subgroup": {"every": "1d"}}).n.tolist() == [23, 24, 3]
    got = points(range(24 * 9), {"subgroup": {"every": "1w"}})  # 1 January 2026 is a Thursday
    assert got.n.tolist() == [95, 121]


def test_a_wide_row_is_a_subgroup_and_an_empty_cell_makes_it_smaller() -> None:
    got = points([[1, 2, 3], [4, np.nan, 6]], {"values": ["a", "b", "c"]})
    assert got.n.tolist() == [3, 2]
    assert got.groups is not None
    assert got.groups.mean.tolist() == [2.0, 5.0]
    assert got.point_of.tolist() == [0, 0, 0, 1, 1]


def test_counts_of_a_subgroup_are_summed() -> None:
    got = points([1, 2, 3], {"count": "c", "size": "n", "subgroup": {"size": 2}}, size=[10, 20, 30])
    assert got.count is not None
    assert got.size is not None
    assert got.count.tolist() == [3, 3]
    assert got.size.tolist() == [30, 30]
    assert got.n.tolist() == [30, 30]


def test_a_pause_breaks_runs_and_moving_ranges() -> None:
    time = [START + HOUR * h for h in (1, 2, 3, 4, 5, 30, 31, 32, 33)]
    values = [1.0] * 9
    given: dict[str, Any] = {"limits": [{"centre": 0.0, "sigma": 1.0}]}
    assert len(find(values, given=given, time=time).signals) == 1
    broken = find(values, given={**given, "gap": "5h"}, time=time)
    assert broken.signals == ()
    assert np.isnan(broken.panels[1].value).tolist() == [i in (0, 5) for i in range(9)]


def test_readings_after_the_moment_the_build_speaks_of_are_left_out() -> None:
    cut = up_to(readings(range(5)), START + 3 * HOUR + SECOND)
    assert cut.values[:, 0].tolist() == [0, 1, 2]
    assert up_to(readings(range(5), timed=False), START).line.size == 5


@pytest.mark.parametrize(
    ("values", "given", "how", "chart"),
    [
        (range(30), {}, {}, "individuals"),
        (range(30), {"subgroup": {"size": 5}}, {}, "mean-range"),
        (range(30), {"subgroup": {"size": 9}}, {}, "mean-sd"),
        (range(6), {"subgroup": {"column": "s"}}, {"subgroup": ["a", "a", "a", "b", "b", "c"]}, "mean-sd"),
        ([[1, 2], [3, np.nan]], {"values": ["a", "b"]}, {}, "mean-range"),
        (range(6), {"count": "c"}, {}, "c"),
        (range(6), {"count": "c", "size": 50}, {"size": [50] * 6}, "p"),
    ],
)  # fmt: skip
def test_the_chart_that_fits_is_chosen(
    values: Any, given: dict[str, Any], how: dict[str, Any], chart: str
) -> None:
    assert choose(settings(**given), points(values, given, **how)).name == chart


def test_a_later_subgroup_of_another_size_does_not_change_the_chart() -> None:
    labels = [c for c in "abcdefgh" for _ in range(3)] + ["i"]
    given = {"subgroup": {"column": "s"}, "baseline": {"points": 8}}
    assert choose(settings(**given), points(range(25), given, subgroup=labels)).name == "mean-range"


def test_a_varying_size_is_an_error_that_points_to_the_chart_that_allows_it() -> None:
    np_chart = find([1] * 9, given={"count": "c", "size": "n", "chart": "np"}, size=[50] * 8 + [60])
    assert np_chart.state == "not-computed"
    assert np_chart.reason == "the size varies from 50 to 60, and np needs one size"
    assert np_chart.remedy == 'Set chart = "p".'
    c_chart = find([1] * 9, given={"count": "c", "subgroup": {"column": "s"}}, subgroup=list("aabbccdde"))
    assert c_chart.remedy == 'Set chart = "u", and `size`.'


def test_the_hour_that_a_clock_change_repeats_is_another_one() -> None:
    zone = ZoneInfo("Europe/Lisbon")
    midnight = to_microseconds(dt.datetime(2026, 10, 25, 0, 0), zone)  # noqa: DTZ001  local
    time = [midnight + quarter * HOUR // 4 for quarter in range(16)]
    hourly = points(range(16), {"subgroup": {"every": "1h"}}, time=time, zone="Europe/Lisbon")
    assert hourly.n.tolist() == [4, 4, 4, 4]
