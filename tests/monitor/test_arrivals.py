"""Members of `each` that are new or have gone, and readings that are overdue."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from tests.made_findings import finding
from tests.made_readings import HOUR, START, context, readings, settings

from holdsteady.monitor.arrivals import Arrivals, Span, arrivals, spans_of
from holdsteady.monitor.finding import Finding
from holdsteady.times import DAY

NOW = START + 60 * DAY  # Monday 2026-03-02 00:00 UTC


def member(press: str, **given: Any) -> Finding:
    """The bore of one press."""
    name = f"bore[press={press}]"
    kept = settings(each=("press",), **given)
    return replace(finding("bore"), name=name, slug=f"bore-press-{press}", title=name, settings=kept)


def came(spans: dict[str, tuple[int, int]], **given: Any) -> Arrivals:
    """Arrivals of presses that came from, to so many days before now."""
    findings = [member(press, **given) for press in spans]
    moments = {
        f"bore[press={press}]": Span(first=NOW - first * DAY, last=NOW - last * DAY)
        for press, (first, last) in spans.items()
    }
    return arrivals(findings, moments, context(NOW))


def changes(found: Arrivals) -> list[tuple[str, str]]:
    return [(one.name, one.change) for one in found.members]


def test_a_member_is_new_within_the_attention_span_and_others_are_older() -> None:
    found = came({"1": (60, 0), "2": (13, 0), "3": (15, 0)})
    assert changes(found) == [("bore[press=2]", "new")]
    assert found.members[0].since == NOW - 13 * DAY


def test_where_all_have_just_begun_none_is_new() -> None:
    assert changes(came({"1": (3, 0), "2": (2, 0)})) == []


def test_a_member_has_gone_when_others_still_come() -> None:
    found = came({"1": (60, 0), "2": (60, 14), "3": (60, 13)})
    assert changes(found) == [("bore[press=2]", "gone")]
    assert found.members[0].since == NOW - 14 * DAY


def test_where_all_are_quiet_none_has_gone() -> None:
    assert changes(came({"1": (60, 20), "2": (60, 30)})) == []


def test_a_slow_cadence_gives_a_member_longer() -> None:
    slow = {"1": (60, 0), "2": (60, 19), "3": (60, 21)}
    assert changes(came(slow, cadence="10d")) == [("bore[press=3]", "gone")]


def test_without_each_nothing_is_new_or_gone() -> None:
    made = replace(finding("bore"), settings=settings())
    found = arrivals([made], {"bore": Span(first=NOW - DAY, last=NOW - DAY)}, context(NOW))
    assert found == Arrivals()


def test_lateness_counts_calendar_time_and_the_latest_comes_first() -> None:
    # Due every 8 hours from Monday to Friday, 06:00 to 22:00; now it is the midnight before a Monday.
    friday = {"1": (2 + 4 / 24, 2 + 4 / 24), "2": (3, 3), "3": (30, 2 + 10 / 24)}
    findings = [member(press, cadence="8h", calendar="mon-fri 06:00-22:00") for press in friday]
    moments = {
        f"bore[press={p}]": Span(first=int(NOW - a * DAY), last=int(NOW - b * DAY))
        for p, (a, b) in friday.items()
    }
    found = arrivals(findings, moments, context(NOW))
    late = [(one.name, one.late // HOUR, (NOW - one.due) / HOUR) for one in found.lateness]
    # press 2: last on Friday 00:00, due at 14:00, 8 hours of Friday since then, Saturday and Sunday none;
    # press 3: last on Friday 14:00, due as the day ends at 22:00; press 1: last on Friday 20:00, six to go.
    assert late == [
        ("bore[press=2]", 8, 58),
        ("bore[press=1]", 0, -12),
        ("bore[press=3]", 0, 50),
    ]
    assert [one.name for one in found.late] == ["bore[press=2]"]


def test_without_cadence_nothing_is_late() -> None:
    assert came({"1": (60, 50)}).lateness == ()


def test_spans_reach_up_to_the_moment_and_leave_out_what_has_no_time() -> None:
    timed, untimed = readings([1.0, 2.0, 3.0]), readings([1.0], timed=False, name="mass")
    found = spans_of({"bore": (timed,), "mass": (untimed,), "none": ()}, START + 2 * HOUR)
    assert found == {"bore": Span(first=START + HOUR, last=START + 2 * HOUR)}
    assert spans_of({"bore": (timed,)}, START) == {}
