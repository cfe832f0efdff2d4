"""The picture for paper: well-formed, inert, and showing every point that stands apart."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.charts.plain_labels import PlainLabels
from tests.charts.varied_findings import hostile, long, two_eras, varied
from tests.made_findings import all_findings

from holdsteady.charts import picture
from holdsteady.charts.sheet import fitted, text_width, thinned
from holdsteady.charts.static import static_chart
from holdsteady.charts.ticks import order_ticks, time_ticks
from holdsteady.monitor.finding import Finding
from holdsteady.times import DAY

UTC = ZoneInfo("UTC")
FINDINGS = {made.slug: made for made in all_findings()} | varied()
ALLOWED = {"svg", "path", "rect", "circle", "text"}


def drawn(made: Finding) -> ET.Element:
    return ET.fromstring(static_chart(made, UTC, PlainLabels(zone=UTC)))


def by_class(root: ET.Element, name: str) -> list[ET.Element]:
    return [element for element in root.iter() if name in element.get("class", "").split()]


@pytest.mark.parametrize("name", sorted(set(FINDINGS) - {"none"}))
def test_is_well_formed_inert_and_without_impossible_numbers(name: str) -> None:
    root = drawn(FINDINGS[name])
    width, height = (float(root.get(side, "nan")) for side in ("width", "height"))
    for element in root.iter():
        assert element.tag in ALLOWED
        assert not {key for key in element.attrib if key.startswith("on") or key in {"style", "href"}}
        places = " ".join(element.get(key, "") for key in ("d", "x", "y", "cx", "cy", "width", "height"))
        assert "nan" not in places
        assert "inf" not in places
        for key, most in (("x", width), ("cx", width), ("y", height), ("cy", height)):
            assert -6 <= float(element.get(key, "0")) <= most + 1


def test_no_points_no_picture() -> None:
    assert static_chart(FINDINGS["none"], UTC, PlainLabels(zone=UTC)) == ""


def test_every_point_that_stands_apart_is_drawn() -> None:
    made = two_eras()
    root = drawn(made)
    marks = np.concatenate([picture.marks(made, panel) for panel in made.panels])
    for name, mark in (
        ("ring", picture.RING),
        ("hollow", picture.HOLLOW),
        ("incomplete", picture.INCOMPLETE),
    ):
        assert len(by_class(root, name)) == np.count_nonzero(marks == mark) > 0
    assert len(by_class(root, "fault")) == np.count_nonzero(marks == picture.FAULT) == 2
    dots = "".join(element.get("d", "") for element in by_class(root, "dots"))
    assert dots.count("h0") == np.count_nonzero(marks == picture.POINT)


def test_provisional_limits_alone_are_dotted_and_each_case_has_a_bar() -> None:
    root = drawn(two_eras())
    assert [e.get("class") for e in by_class(root, "edge")] == ["edge", "edge provisional"] * 2
    assert sorted(e.get("class", "") for e in by_class(root, "case")) == [
        "case open", "case open", "case past", "case said",
    ]  # fmt: skip


def test_text_is_text() -> None:
    root = drawn(hostile())
    assert any("<img src=x" in (element.text or "") for element in root.iter("text"))


def test_five_thousand_points_stay_light() -> None:
    made = long(5_000)
    markup = static_chart(made, UTC, PlainLabels(zone=UTC))
    assert len(markup) < 80_000
    rings = len(re.findall('class="ring"', markup))
    assert rings == sum(np.count_nonzero(picture.in_open_case(made, panel)) for panel in made.panels)


@settings(max_examples=30, deadline=None)
@given(st.integers(2_001, 2_600), st.integers(0, 2**32 - 1))
def test_thinning_keeps_the_outline_and_all_that_is_flagged(count: int, seed: int) -> None:
    rng = np.random.default_rng(seed)
    y = np.round(rng.normal(size=count), int(rng.integers(0, 6)))  # with ties
    x = np.sort(rng.uniform(0.0, 300.0, size=count))
    keep = rng.random(count) < 0.01
    kept = thinned(x, y, keep)
    assert np.all(np.diff(kept) > 0)
    assert set(np.flatnonzero(keep)) <= set(kept.tolist())
    for bucket in range(151):
        inside = np.flatnonzero(x // 2 == bucket)
        part = [i for i in kept.tolist() if x[i] // 2 == bucket]
        if inside.size:
            assert {inside[0], inside[-1]} <= set(part)
            assert y[part].min() == y[inside].min()
            assert y[part].max() == y[inside].max()


def test_a_text_is_cut_to_its_room_or_left_out() -> None:
    text = "setter changed the shift pattern"
    assert fitted(text, 1_000) == text
    assert fitted(text, 100).endswith("…")
    assert text_width(fitted(text, 100)) <= 100
    assert fitted(text, 20) == ""


@pytest.mark.parametrize(
    "span", [1, 50_000, 10**6, 10**8, 10**10, DAY, 9 * DAY, 40 * DAY, 400 * DAY, 9_000 * DAY]
)
def test_ticks_are_few_in_order_and_inside(span: int) -> None:
    first = 1_773_756_600_123_456
    ticks = time_ticks(first, first + span, 7)
    places = [place for place, _ in ticks]
    assert places == sorted(set(places))
    assert len(ticks) <= 8
    assert all(first <= place <= first + span for place in places)
    assert len(ticks) >= (2 if span >= 10**8 else 0)


def test_ticks_stand_at_round_moments() -> None:
    day = int(np.datetime64("2026-03-10T05:00", "us").astype(np.int64))
    assert [text for _, text in time_ticks(day, day + 6 * DAY, 7)] == [
        "11 Mar", "12 Mar", "13 Mar", "14 Mar", "15 Mar", "16 Mar",
    ]  # fmt: skip
    assert [text for _, text in time_ticks(day, day + 300 * DAY, 7)] == ["May", "Jul", "Sep", "Nov", "2027"]
    assert [text for _, text in time_ticks(day, day + DAY // 2, 7)] == ["06:00", "09:00", "12:00", "15:00"]
    assert order_ticks(90, 7) == [(20.0, "20"), (40.0, "40"), (60.0, "60"), (80.0, "80")]
    assert order_ticks(1, 7) == [(1.0, "1")]
