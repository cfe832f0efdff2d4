"""Points known only by a limit: their own mark in the live chart's data and in the static picture."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from xml.etree import ElementTree as ET
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.charts.plain_labels import PlainLabels
from tests.made_findings import finding

from holdsteady.charts import picture
from holdsteady.charts.data import page_data
from holdsteady.charts.labels import READING_WORDS
from holdsteady.charts.static import static_chart
from holdsteady.monitor.finding import Finding
from holdsteady.site.headlines import latest_value
from holdsteady.site.moments import Clock
from holdsteady.site.point_rows import flagged_rows
from holdsteady.site.remarks import legend, remarks

ZONE = ZoneInfo("UTC")
LABELS = PlainLabels(zone=ZONE)
CLOCK = Clock(zone=ZONE, now=0)


def censored(at: Mapping[int, int] | None = None, *, shift: float = 0.0) -> Finding:
    """A chart of 90 points, some of them limits: `at` maps a point to -1 for below, 1 for above."""
    made = finding("bore", chart="individuals", shift=shift, state="signalling" if shift else "steady")
    assert made.points is not None
    side = np.zeros(90, dtype=np.int8)
    for index, value in (at or {}).items():
        side[index] = value
    return replace(made, points=replace(made.points, side=side), at_limit=int(np.count_nonzero(side)))


def test_each_side_has_a_mark_of_its_own_and_an_open_case_shows_through() -> None:
    made = censored({3: -1, 5: 1, 80: -1, 85: 1}, shift=2.0)
    marks = picture.marks(made, made.panels[0])
    assert marks[[3, 5]].tolist() == [picture.BELOW, picture.ABOVE]
    assert marks[[80, 85]].tolist() == [picture.RING_BELOW, picture.RING_ABOVE]
    assert picture.marks(made, made.panels[1])[[3, 5]].tolist() == [picture.HOLLOW] * 2


def test_a_measurement_fault_is_a_fault_before_all() -> None:
    made = censored({3: -1})
    assert made.points is not None
    faulty = np.arange(90) == 3
    made = replace(made, points=replace(made.points, faulty=faulty))
    assert picture.marks(made, made.panels[0])[3] == picture.FAULT


def test_the_static_picture_draws_a_bar_whose_stem_points_to_the_reading() -> None:
    svg = ET.fromstring(static_chart(censored({3: -1, 5: 1}), ZONE, LABELS))
    (bars,) = [e for e in svg.iter() if e.get("class") == "bar"]
    lines = [
        [tuple(map(float, end.split())) for end in piece.split("L")]
        for piece in (bars.get("d") or "").split("M")[1:]
    ]
    across, stems = lines[:2], lines[2:]
    assert all(a[1] == b[1] and abs(a[0] - b[0]) == pytest.approx(8, abs=0.11) for a, b in across)
    down, up = stems
    assert down[1][1] > down[0][1]
    assert up[1][1] < up[0][1]
    assert down[0][0] == pytest.approx((across[0][0][0] + across[0][1][0]) / 2, abs=0.11)


def test_the_live_chart_is_told_which_points_and_how_to_say_them() -> None:
    script = page_data(censored({3: -1, 5: 1, 80: -1}, shift=2.0), ZONE, LABELS).decode()
    location = script[script.index('"name":"location"') :]
    flagged = re.search(r'"flagged":\[([\d,]*)\],"marks":\[([\d,]*)\]', location)
    assert flagged is not None
    marks = dict(zip(flagged[1].split(","), flagged[2].split(","), strict=True))
    assert (marks["3"], marks["5"], marks["80"]) == ("5", "6", "7")
    assert READING_WORDS["below"] in script


def test_the_page_says_how_many_and_names_the_mark() -> None:
    made = replace(censored({3: -1, 5: -1}), censored=4, implausible=1)
    made = replace(made, settings=made.settings.model_copy(update={"plausible": _plausible(5, 20)}))
    said = remarks(made)
    assert (
        "2 readings beyond what the gauge can read were drawn at the least or most it can, "
        "and left out of the limits." in said
    )
    assert "4 readings beyond what the gauge can read were set aside." in said
    assert "1 reading not plausible (plausible is 5 to 20 mm) was set aside." in said
    assert "Bar with a stem" in legend(made)
    assert "Bar with a stem" not in legend(censored())


def _plausible(lower: float, upper: float) -> object:
    from holdsteady.project.settings import Plausible  # noqa: PLC0415

    return Plausible(lower=lower, upper=upper)


def test_a_count_of_all_members_says_so() -> None:
    made = replace(finding("bore"), censored=2)
    each = replace(made, settings=made.settings.model_copy(update={"each": ("press",)}))
    assert "were set aside, of all its members together." in " ".join(remarks(each))
    assert "members" not in " ".join(remarks(made))


def test_a_centre_that_leans_is_named() -> None:
    below = dict.fromkeys(range(9), -1)
    assert "is too high" in " ".join(remarks(censored(below)))
    assert "is too low" in " ".join(remarks(censored(dict.fromkeys(below, 1))))
    assert "is too" not in " ".join(remarks(censored(dict.fromkeys(range(8), -1))))
    assert "is too" not in " ".join(remarks(censored({**below, 50: 1})))


def test_values_are_written_with_their_sign() -> None:
    assert latest_value(censored({89: -1})).startswith("<\u202f")
    assert latest_value(censored({89: 1})).startswith(">\u202f")
    rows, _ = flagged_rows(censored({7: -1}), CLOCK)
    (row,) = [row for row in rows if row.number == 8]
    assert row.values[0][0].startswith("<\u202f")
    assert not row.values[1][0].startswith("<")
    assert "known only by the limit it lies beyond" in row.said


def test_many_do_not_push_the_signals_out_of_the_table() -> None:
    many = censored(dict.fromkeys(range(70), -1), shift=2.0)
    rows, more = flagged_rows(many, CLOCK)
    assert more == 0
    assert len(rows) == len(flagged_rows(censored(shift=2.0), CLOCK)[0])
