"""Charts for each of what, which rows, which subgroups; cadence, calendar and gap."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from tests.start.tables import MONDAY, NOW_MICROSECONDS, UTC, noise, stamps, table_of

from holdsteady.start.draft import Guess
from holdsteady.start.guess_points import Points, guess_points
from holdsteady.start.guess_rhythm import guess_rhythm
from holdsteady.start.guess_time import guess_time
from holdsteady.start.structure import separation


def points_of(
    columns: Mapping[str, Any],
    labels: Sequence[str] = (),
    *,
    value: str = "v",
    counts: bool = False,
    files: list[int] | None = None,
) -> Points:
    table = table_of(columns, files=files)
    time = guess_time(table, NOW_MICROSECONDS, UTC).time
    return guess_points(table, labels, [table.facts[value].values], time, one_a_row=False, counts=counts)


def by_key(points: Points) -> dict[str, object]:
    return {guess.key: guess.value for guess in points.guesses}


def bursts(count: int, size: int, *, within: float = 0.01, between: float = 4) -> list[str]:
    """Stamps of `count` bursts of `size`, hours apart."""
    return [
        f"{np.datetime64(MONDAY) + np.timedelta64(round(3600 * (between * burst + within * one)), 's')}"
        for burst in range(count)
        for one in range(size)
    ]


def test_machines_have_a_chart_each() -> None:
    found = points_of({"stamp": stamps(60), "press": [1, 2, 3] * 20, "v": noise(60)}, ["press"])
    assert by_key(found) == {"each": ("press",)}
    (guess,) = found.guesses
    assert guess.confidence == "likely"
    assert [row.split(",")[-2] for row in guess.rows] == ["1", "2"]


def test_a_label_that_goes_with_the_file_is_one_too() -> None:
    found = points_of(
        {"stamp": stamps(60), "where": ["A"] * 30 + ["B"] * 30, "v": noise(60)},
        ["where"],
        files=[0] * 30 + [1] * 30,
    )
    assert by_key(found) == {"each": ("where",)}


def test_two_labels_that_say_the_same_are_one() -> None:
    columns = {"stamp": stamps(60), "press": [1, 2] * 30, "die": ["D7", "D9"] * 30, "v": noise(60)}
    found = points_of(columns, ["press", "die"])
    assert by_key(found) == {"each": ("press",)}
    assert "die goes with press" in found.notes[0]


def test_rows_of_two_kinds_that_alternate() -> None:
    mixed = [value for pair in zip(noise(30), noise(30, mean=12.05), strict=True) for value in pair]
    columns = {"stamp": stamps(60), "check": ["mixed", "release"] * 30, "v": mixed}
    assert by_key(points_of(columns, ["check"])) == {"each": ("check",)}
    assert by_key(points_of(columns | {"v": noise(60)}, ["check"])) == {}


def test_lots_that_follow_each_other_are_no_charts() -> None:
    shifted = noise(30) + noise(30, mean=12.05)
    columns = {"stamp": stamps(60), "lot": ["A"] * 30 + ["B"] * 30, "v": shifted}
    assert by_key(points_of(columns, ["lot"])) == {}


def test_who_measured_is_no_reason_for_a_chart() -> None:
    mixed = [value for pair in zip(noise(30), noise(30, mean=12.05), strict=True) for value in pair]
    found = points_of({"stamp": stamps(60), "operator": ["T", "U"] * 30, "v": mixed}, ["operator"])
    assert by_key(found) == {}
    assert "operator" in found.notes[0]


def test_trials_are_left_out() -> None:
    values, programme = noise(60), ["standard"] * 60
    for index in (10, 30, 50):
        values[index], programme[index] = "12.500", "trial"
    found = points_of({"stamp": stamps(60), "programme": programme, "v": values}, ["programme"])
    assert by_key(found) == {"where": {"programme": "standard"}}
    assert int(found.kept.sum()) == 57
    assert "trial" in found.guesses[0].rows[0]


def test_a_rare_label_at_the_same_level_stays_in() -> None:
    programme = ["standard"] * 57 + ["trial"] * 3
    found = points_of({"stamp": stamps(60), "programme": programme, "v": noise(60)}, ["programme"])
    assert by_key(found) == {}


def test_subgroups_by_a_column() -> None:
    columns = {"stamp": bursts(20, 5), "sample": [f"S{index // 5}" for index in range(100)], "v": noise(100)}
    found = points_of(columns, ["sample"])
    assert by_key(found) == {"subgroup": {"column": "sample"}}
    assert found.guesses[0].confidence == "sure"
    assert found.ends.tolist() == list(range(4, 100, 5))


def test_a_batch_of_two_checks_is_no_subgroup_within_each_check() -> None:
    mixed = [value for pair in zip(noise(30), noise(30, mean=12.05), strict=True) for value in pair]
    batch = [index // 2 for index in range(60)]
    columns = {"stamp": stamps(60), "batch": batch, "check": ["m", "r"] * 30, "v": mixed}
    assert by_key(points_of(columns, ["batch", "check"])) == {"each": ("check",)}


def test_a_label_that_returns_is_no_subgroup() -> None:
    columns = {"stamp": stamps(60), "tray": ["A", "A", "B", "B"] * 15, "v": noise(60)}
    assert "subgroup" not in by_key(points_of(columns, ["tray"]))


def test_subgroups_by_the_bursts_they_come_in() -> None:
    found = points_of({"stamp": bursts(30, 5), "v": noise(150)})
    assert by_key(found) == {"subgroup": {"size": 5}}


def test_a_few_readings_a_day_are_no_burst() -> None:
    assert by_key(points_of({"stamp": bursts(30, 3, within=4, between=24), "v": noise(90)})) == {}


def test_bursts_of_many_sizes_are_not_counted_off() -> None:
    stamps_ = [stamp for index, stamp in enumerate(bursts(60, 5)) if index % 7]
    assert by_key(points_of({"stamp": stamps_, "v": noise(len(stamps_))})) == {}


def test_many_single_readings_a_day_are_gathered_by_the_clock() -> None:
    rng = np.random.default_rng(5)
    seconds = np.sort(rng.uniform(0, 30 * 86_400, 720)).astype(int)
    times = [str(np.datetime64(MONDAY) + np.timedelta64(int(second), "s")) for second in seconds]
    found = points_of({"stamp": times, "v": noise(720)})
    assert list(by_key(found)) == ["subgroup"]
    (guess,) = found.guesses
    assert guess.value == {"every": "4h"}
    assert guess.confidence == "guess"


def cavities(levels: Sequence[float]) -> dict[str, Sequence[object]]:
    count = len(levels)
    rng = np.random.default_rng(7)
    values = [f"{12 + levels[index % count] + rng.normal(0, 0.01):.3f}" for index in range(40 * count)]
    return {
        "stamp": bursts(40, count),
        "sample": [f"S{index // count}" for index in range(40 * count)],
        "cavity": [1 + index % count for index in range(40 * count)],
        "v": values,
    }


def test_cavities_alike_are_one_subgroup() -> None:
    found = points_of(cavities([0, 0, 0, 0]), ["sample", "cavity"])
    assert by_key(found) == {"subgroup": {"column": "sample"}}
    assert "every cavity once" in found.notes[0]


def test_cavities_apart_have_a_chart_each() -> None:
    found = points_of(cavities([0, 0.03, 0, -0.02]), ["sample", "cavity"])
    assert by_key(found) == {"each": ("cavity",)}


def test_the_long_form_has_a_characteristic_for_each_name() -> None:
    rows = 90
    values = [noise(1, mean=(12, 80, 3.5)[index % 3], seed=index)[0] for index in range(rows)]
    columns = {"stamp": stamps(rows), "feature": ["bore", "mass", "wall"] * 30, "v": values}
    assert points_of(columns, ["feature"]).split == "feature"


def test_counts_are_not_gathered() -> None:
    found = points_of({"stamp": bursts(30, 5), "v": [index % 4 for index in range(150)]}, counts=True)
    assert by_key(found) == {}


def test_separation_is_in_standard_deviations_and_not_moved_by_wild_values() -> None:
    rng = np.random.default_rng(9)
    label = np.arange(2_000) % 2
    values = rng.normal(0, 2, 2_000) + 6 * label
    values[::100] = 1e6
    none = np.zeros(2_000, dtype=np.int64)
    # by construction: levels 6 apart, standard deviation 2
    assert 2.7 < separation(values, label, none) < 3.2
    assert separation(rng.normal(0, 2, 2_000), label, none) < 0.2
    assert separation(np.ones(2_000), label, none) == 0.0


def rhythm(stamps_: list[str], *, by_size: bool = False) -> dict[str, Guess]:
    table = table_of({"stamp": stamps_, "v": noise(len(stamps_))})
    time = guess_time(table, NOW_MICROSECONDS, UTC).time
    every, one = np.ones(time.size, dtype=np.bool_), np.zeros(time.size, dtype=np.int64)
    points = Points(guesses=(), notes=(), kept=every, member=one, ends=np.arange(time.size))
    return {guess.key: guess for guess in guess_rhythm(points, time, table.rows, by_size=by_size)}


def at(hours: list[float]) -> list[str]:
    return [str(np.datetime64(MONDAY) + np.timedelta64(round(3_600 * hour), "s")) for hour in hours]


WORKED = [24.0 * day + hour for day in range(60) if day % 7 < 5 for hour in (0, 3, 6, 9, 12, 15)]


def test_cadence_and_calendar_of_a_working_week() -> None:
    found = rhythm(at(WORKED))
    assert found["calendar"].value == "mon-fri 06:00-22:00"
    assert found["cadence"].value == "4h"
    assert "gap" not in found
    assert all(len(guess.rows) == 2 for guess in found.values())


def test_a_few_points_a_day_give_days_alone() -> None:
    found = rhythm(at([24.0 * day for day in range(60) if day % 7 < 5]))
    assert (found["calendar"].value, found["cadence"].value) == ("mon-fri", "1d")


def test_points_at_all_hours_have_no_calendar() -> None:
    found = rhythm(at([2.0 * index for index in range(600)]))
    assert {key: guess.value for key, guess in found.items()} == {"cadence": "2h"}


def test_a_closure_is_a_gap_and_a_weekend_is_none() -> None:
    found = rhythm(at(WORKED + [hour + 24 * 70 for hour in WORKED]))
    assert found["gap"].value == "3d"


def test_subgroups_counted_off_begin_anew_after_weekends() -> None:
    assert rhythm(at(WORKED), by_size=True)["gap"].value == "2d"


def test_too_few_points_say_nothing() -> None:
    assert rhythm(at([0, 8, 16])) == {}
