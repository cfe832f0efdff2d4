"""The columns a page binds: shape, numbers, words, and that nothing written by people gets out."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.charts.plain_labels import PlainLabels
from tests.charts.varied_findings import HOSTILE, hostile, one_point, two_eras, unequal, varied
from tests.made_findings import all_findings, finding

from holdsteady.charts.data import page_data
from holdsteady.charts.labels import READING_WORDS
from holdsteady.monitor.finding import Finding

LISBON = ZoneInfo("Europe/Lisbon")
FINDINGS = {made.slug: made for made in all_findings()} | varied()


def script(made: Finding, zone: ZoneInfo = LISBON) -> bytes:
    return page_data(made, zone, PlainLabels(zone=zone))


def columns(made: Finding, zone: ZoneInfo = LISBON) -> dict[str, Any]:
    text = script(made, zone).decode("ascii")
    head = f"holdsteady.data({json.dumps(made.slug)},"
    assert text.startswith(head)
    assert text.endswith(");\n")
    parsed: dict[str, Any] = json.loads(text.removeprefix(head).removesuffix(");\n"))
    return parsed


@pytest.mark.parametrize("name", sorted(FINDINGS))
def test_is_ascii_without_markup_and_holds_only_finite_numbers(name: str) -> None:
    content = script(FINDINGS[name])
    assert content.isascii()
    assert not set(b"<>&") & set(content)
    assert b"NaN" not in content
    assert b"Infinity" not in content
    columns(FINDINGS[name])


@pytest.mark.parametrize("name", sorted(FINDINGS))
def test_is_the_same_bytes_each_time(name: str) -> None:
    assert script(FINDINGS[name]) == script(FINDINGS[name])


def test_columns_are_as_long_as_the_points_and_missing_values_are_null() -> None:
    made = varied()["wild"]
    read = columns(made)
    values = read["panels"][0]["value"]
    assert read["count"] == len(values) == 90
    assert [i for i, v in enumerate(values) if v is None] == [70, 71, 72]
    assert values[60] == 4_000.0
    assert values[5] == made.panels[0].value[5]


def test_times_are_milliseconds_of_the_plants_clock() -> None:
    # The European Union's summer time begins at 01:00 UTC on the last Sunday of March, in 2026 the 29th
    # (Directive 2000/84/EC): clocks in Lisbon go from 01:00 to 02:00.
    made = finding("bore", n=60)
    assert made.points is not None
    before = int(np.datetime64("2026-03-29T00:30", "us").astype(np.int64))
    time = before + np.arange(60) * 3_600_000_000
    read = columns(replace(made, points=replace(made.points, time=time)))
    assert read["x"][0] == before // 1000
    assert read["x"][1] - read["x"][0] == 2 * 3_600_000
    assert read["x"][2] - read["x"][1] == 3_600_000


def test_evenly_spaced_times_are_start_and_step_and_untimed_points_count_from_one() -> None:
    assert columns(finding("bore"))["x"]["step"] == 2 * 3_600_000
    untimed = columns(finding("bore", timed=False))
    assert untimed["x"] == {"from": 1, "step": 1}
    assert untimed["timed"] is False
    assert untimed["entries"] == []


def test_only_what_differs_from_an_ordinary_point_is_listed() -> None:
    panel = columns(two_eras(n=140))["panels"][0]
    marks = dict(zip(panel["flagged"], panel["marks"], strict=True))
    assert marks[30] == 2  # left out
    assert marks[31] == 3  # a fault
    assert marks[139] == 4  # incomplete, though the case is open there
    assert {i for i, mark in marks.items() if mark == 1} == set(range(122, 139))


def test_points_of_an_answered_case_are_ordinary() -> None:
    panel = columns(finding("stops", chart="c", shift=1.8, answered=True))["panels"][0]
    assert 1 not in panel["marks"]


def test_limits_are_stretches_unless_they_vary() -> None:
    constant, varying = columns(two_eras()), columns(unequal("p"))
    assert [row["dotted"] for row in constant["limits"] if row["panel"] == 0] == [False, True]
    assert constant["panels"][0]["columns"] is None
    assert varying["limits"][0]["upper"] is None
    assert len(varying["panels"][0]["columns"]["upper"]) == 90
    assert None in columns(unequal("mean-sd"))["panels"][1]["columns"]["lower"]


def test_no_limits_says_so_without_numbers() -> None:
    read = columns(one_point())
    assert [row["drawn"] for row in read["limits"]] == [False, False]
    assert read["panels"][1]["value"] == [None]


def test_the_specification_is_in_words_for_single_pieces_on_a_chart_of_means() -> None:
    assert columns(finding("bore"))["wanted"]["lines"] == ["wanted,", "single pieces", "11.950 to 12.050"]
    assert columns(finding("peak", chart="individuals"))["wanted"]["lines"][0] == "wanted"
    assert columns(finding("stops", chart="c"))["wanted"] is None


def test_an_entry_that_began_an_era_is_told_once() -> None:
    read = columns(two_eras())
    assert "new die" in read["eras"][1]["text"]
    assert all(entry["text"] != "new die" for entry in read["entries"])


def test_hostile_text_arrives_as_it_is() -> None:
    read = columns(hostile())
    assert read["entries"][0]["text"] == HOSTILE
    assert read["label"][0] == HOSTILE
    assert set(read["words"]) == set(READING_WORDS)


def test_a_finding_without_points_gives_empty_columns() -> None:
    read = columns(FINDINGS["none"])
    assert read["count"] == 0
    assert read["panels"] == []
