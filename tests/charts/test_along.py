"""The horizontal axis: the plant's clock, or the order where too many points share a time."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.charts.plain_labels import PlainLabels
from tests.charts.varied_findings import entry
from tests.made_findings import AS_OF, HOUR, finding

from holdsteady.arrays import Ints
from holdsteady.charts.along import along
from holdsteady.charts.data import page_data
from holdsteady.charts.static import static_chart
from holdsteady.monitor.finding import Finding, Points

UTC = ZoneInfo("UTC")
LABELS = PlainLabels(zone=UTC)


def timed(time: Ints | None) -> Finding:
    made = finding("bore", title="Bore diameter")
    assert made.points is not None
    return replace(made, points=replace(made.points, time=time))


def points(time: Ints | None) -> Points:
    made = timed(time).points
    assert made is not None
    return made


def shared(each: int) -> Ints:
    """Ninety points, so many at each time."""
    return AS_OF - (89 - np.arange(90, dtype=np.int64)) // each * 24 * HOUR


@pytest.mark.parametrize(("each", "is_timed"), [(1, True), (2, True), (3, False), (15, False), (90, False)])
def test_time_tells_points_apart_or_order_does(each: int, is_timed: bool) -> None:  # noqa: FBT001
    axis = along(points(shared(each)), UTC)
    assert axis.timed is is_timed
    assert axis.shared is not is_timed
    assert axis.moments is not None
    if not is_timed:
        assert np.array_equal(axis.place, np.arange(1, 91))


def test_without_times_nothing_is_shared() -> None:
    axis = along(points(None), UTC)
    assert (axis.timed, axis.shared, axis.moments) == (False, False, None)
    with pytest.raises(ValueError, match="no moments"):
        axis.at(np.array([AS_OF]))


def test_in_order_a_moment_stands_before_the_first_point_that_is_not_earlier() -> None:
    time = shared(15)
    axis = along(points(time), UTC)
    moments = np.array([time[0] - HOUR, time[0], time[15], time[15] + HOUR, time[-1] + HOUR])
    assert axis.at(moments).tolist() == [0.5, 0.5, 15.5, 30.5, 90.5]


def columns(made: Finding) -> dict[str, Any]:
    text = page_data(made, UTC, LABELS).decode("ascii")
    parsed: dict[str, Any] = json.loads(text[text.index(",") + 1 :].removesuffix(");\n"))
    return parsed


def test_the_live_chart_has_its_order_and_the_moments_to_read() -> None:
    time = shared(15)
    read = columns(replace(timed(time), logbook=(entry(4, 24, "New lot", hours=24),)))
    assert read["timed"] is False
    assert read["x"] == {"from": 1, "step": 1}
    assert read["moments"] == (time // 1000).tolist()
    # Written a day before the last date, until it: the last but one date's points and no others.
    assert [(e["from"], e["to"]) for e in read["entries"]] == [(60.5, 75.5)]
    assert read["words"]["order"] == "in order; many share a time"
    apart = columns(timed(shared(1)))
    assert apart["timed"] is True
    assert apart["moments"] is None


@pytest.mark.parametrize("each", [15, 90])
def test_the_picture_spreads_its_points_and_says_why(each: int) -> None:
    markup = static_chart(timed(shared(each)), UTC, LABELS)
    assert "in order; many share a time" in markup
    assert ">80<" in markup  # an order, not a date
    plain = static_chart(timed(shared(1)), UTC, LABELS)
    assert "in order" not in plain
    assert places(markup) == places(plain) > 80


def places(markup: str) -> int:
    """How many different places along the chart the ordinary points of the first panel have."""
    drawn = markup.split('class="dots" d="')[1].split('"', maxsplit=1)[0]
    return len({piece.split()[0] for piece in drawn.removeprefix("M").split("h0M")})
