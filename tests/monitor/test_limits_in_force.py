"""Which limits a point is judged by: given, adopted, provisional, and what an era keeps."""

from __future__ import annotations

import datetime as dt

import numpy as np
import pytest
from tests.made_readings import HOUR, START, adopted, context, entry, find

QUIET = [10.0, 11.0, 9.0, 10.0, 11.0, 9.0, 10.0, 12.0, 9.0, 10.0]  # mean 10.1, mean moving range 14 / 9


def test_fewer_than_eight_points_give_the_median_alone() -> None:
    finding = find([3.0, 1.0, 2.0, 9.0, 2.0, 4.0, 5.0])
    assert finding.state == "gathering"
    (row,) = finding.limits
    assert (row.centre, row.sigma, row.lower, row.upper, row.note) == (
        3.0,
        None,
        None,
        None,
        "too few points",
    )
    assert not finding.panels[0].judged.any()
    assert finding.signals == ()


def test_provisional_limits_come_from_the_first_points_never_the_latest() -> None:
    finding = find(QUIET * 3 + [100.0], given={"baseline": {"points": 10}})
    location, spread = finding.limits
    assert location.kind == "provisional"
    assert location.points == 10
    assert location.centre == pytest.approx(np.mean(QUIET), rel=1e-12)
    # sigma = mean moving range * sqrt(pi) / 2 (definitions of the individuals chart)
    assert location.sigma == pytest.approx(14 / 9 * np.sqrt(np.pi) / 2, rel=1e-12)
    assert location.centre is not None
    assert location.sigma is not None
    assert location.upper == pytest.approx(location.centre + 3 * location.sigma, rel=1e-12)
    assert spread.upper == pytest.approx(3 * np.sqrt(2) * location.sigma, rel=1e-12)
    assert "provisional-limits" in finding.flags
    assert location.baseline_to == START + 10 * HOUR


def test_adopted_limits_judge_only_points_from_their_day_on() -> None:
    values = [*QUIET, 30.0, 30.0]
    before = find(values)
    later = START + 12 * HOUR
    lines = [adopted(later, 30.0, 1.0), adopted(later, 30.0, 1.0, panel="spread")]
    after = find(values, made=context(register=lines))
    kinds = {(row.panel, row.kind, row.start_index, row.stop_index) for row in after.limits}
    assert kinds == {
        ("location", "provisional", 0, 11),
        ("spread", "provisional", 0, 11),
        ("location", "adopted", 11, 12),
        ("spread", "adopted", 11, 12),
    }
    # The point before is judged as it was; only the one from that day on is judged anew.
    assert after.panels[0].met["outside-limits"][10] == before.panels[0].met["outside-limits"][10] == 1
    assert before.panels[0].met["outside-limits"][11] == 1
    assert after.panels[0].met["outside-limits"][11] == 0


def test_given_limits_hold_from_the_first_point_and_over_adopted_ones() -> None:
    lines = [adopted(START, 30.0, 1.0)]
    finding = find(
        [5.0, 6.0, 20.0], given={"limits": [{"centre": 5.0, "sigma": 1.0}]}, made=context(register=lines)
    )
    assert [row.kind for row in finding.limits] == ["given", "given"]
    assert finding.panels[0].met["outside-limits"].tolist() == [0, 0, 1]
    assert "provisional-limits" not in finding.flags


def test_dated_given_limits_leave_earlier_points_to_provisional_ones() -> None:
    from_ = dt.datetime.fromisoformat("2026-01-01T06:00:00")
    finding = find(QUIET, given={"limits": [{"centre": 5.0, "sigma": 1.0, "from": from_}]})
    assert [(r.kind, r.start_index, r.stop_index) for r in finding.limits if r.panel == "location"] == [
        ("provisional", 0, 5),
        ("given", 5, 10),
    ]


def test_register_lines_of_another_era_or_chart_do_not_count() -> None:
    lines = [adopted(START, 30.0, 1.0, era_from=START - 1), adopted(START, 30.0, 1.0, chart="mean-range")]
    assert {row.kind for row in find(QUIET, made=context(register=lines)).limits} == {"provisional"}


def test_a_process_change_starts_an_era_that_learns_anew() -> None:
    change = entry(START + 11 * HOUR, kind="process-change", action="learn", text="new die")
    finding = find(QUIET + [v + 50 for v in QUIET], made=context(logbook=[change]))
    assert [(e.number, e.start_index, e.stop_index) for e in finding.eras] == [(1, 0, 10), (2, 10, 20)]
    assert finding.signals == ()
    assert [round(r.centre or 0, 6) for r in finding.limits if r.panel == "location"] == [10.1, 60.1]


def test_keep_limits_and_keep_sigma() -> None:
    values = QUIET + [v * 2 for v in QUIET]
    at = START + 11 * HOUR
    kept = find(values, made=context(logbook=[entry(at, kind="process-change", action="keep-limits")]))
    first, second = [r for r in kept.limits if r.panel == "location"]
    assert (second.centre, second.sigma) == (first.centre, first.sigma)
    assert second.era == 2
    sigma_kept = find(values, made=context(logbook=[entry(at, kind="process-change", action="keep-sigma")]))
    first, second = [r for r in sigma_kept.limits if r.panel == "location"]
    assert second.centre == pytest.approx(20.2)
    assert second.sigma == first.sigma


def test_an_excluded_point_leaves_the_estimate_and_the_next_moves_in() -> None:
    values = [*QUIET[:5], 500.0, *QUIET[5:], 10.0]
    span = entry(START + 6 * HOUR, exclude=True)
    finding = find(values, made=context(logbook=[span]), given={"baseline": {"points": 10}})
    assert finding.limits[0].centre == pytest.approx(np.mean(QUIET))
    assert finding.limits[0].excluded == 1
    assert finding.limits[0].points == 10
    # Still drawn and judged: only the estimate leaves it out.
    assert finding.panels[0].met["outside-limits"][5] == 1
    # The ranges that touch it are not estimated from: 10 -> 10 -> 11 ... without 10|500 and 500|11.
    kept = np.abs(np.diff(QUIET))[[0, 1, 2, 3, 5, 6, 7, 8]]
    assert finding.limits[0].sigma == pytest.approx(kept.mean() * np.sqrt(np.pi) / 2)


def test_a_measurement_fault_is_neither_judged_nor_a_moving_range() -> None:
    values = [*QUIET[:5], 500.0, *QUIET[5:]]
    fault = entry(START + 6 * HOUR, kind="measurement-fault", exclude=True)
    finding = find(values, made=context(logbook=[fault]))
    assert finding.points is not None
    assert finding.points.faulty.tolist() == [i == 5 for i in range(11)]
    assert finding.signals == ()
    assert np.isnan(finding.panels[1].value[[5, 6]]).all()


def test_no_variation_gives_no_limits_and_says_so() -> None:
    finding = find([4.0] * 30)
    assert finding.state == "not-computed"
    assert finding.limits[0].centre == 4.0
    assert "no variation" in finding.limits[0].note


def test_a_baseline_span_holds_for_its_era_alone() -> None:
    baseline = {
        "from": dt.datetime.fromisoformat("2026-01-01T03:00:00"),
        "to": dt.datetime.fromisoformat("2026-01-01T13:00:00"),
    }
    finding = find([99.0, 99.0, *QUIET, 50.0], given={"baseline": baseline})
    assert finding.limits[0].centre == pytest.approx(np.mean(QUIET))
    assert finding.panels[0].in_baseline.tolist() == [False, False, *[True] * 10, False]


def test_a_line_for_one_panel_leaves_the_other_as_it_was() -> None:
    finding = find(QUIET, made=context(register=[adopted(START + 5 * HOUR, 10.0, 1.0)]))
    rows = {(row.panel, row.kind, row.start_index, row.stop_index) for row in finding.limits}
    assert rows == {
        ("location", "provisional", 0, 4),
        ("location", "adopted", 4, 10),
        ("spread", "provisional", 0, 10),
    }
    assert np.isfinite(finding.panels[1].upper).all()


def test_of_two_sets_in_force_the_one_adopted_later_counts() -> None:
    first = adopted(START + 8 * HOUR, 10.0, 1.0, adopted_at=START + 20 * HOUR)
    second = adopted(START + 5 * HOUR, 11.0, 1.0, line=3, adopted_at=START + 30 * HOUR)
    finding = find(QUIET, made=context(register=[first, second]))
    assert finding.panels[0].centre[[3, 4, 9]].tolist() == [pytest.approx(10.1), 11.0, 11.0]


def test_limits_that_are_kept_name_the_points_that_set_them() -> None:
    change = entry(START + 11 * HOUR, kind="process-change", action="keep-limits")
    finding = find(QUIET * 2, made=context(logbook=[change]))
    first, second = [row for row in finding.limits if row.panel == "location"]
    assert (second.baseline_from, second.baseline_to) == (first.baseline_from, first.baseline_to)
    assert second.note == "kept from the era before"
    assert finding.panels[0].in_baseline.tolist() == [True] * 10 + [False] * 10


def test_adopted_limits_keep_the_width_they_were_adopted_with() -> None:
    lines = [adopted(START, 10.0, 1.0, width=2.0)]
    finding = find(QUIET, made=context(register=lines), given={"width": 4.0})
    assert finding.panels[0].upper[0] == 12.0


def test_an_era_without_limits_passes_on_those_before_it() -> None:
    changes = [entry(START + 11 * HOUR, kind="process-change", action="learn")]
    changes.append(entry(START + 14 * HOUR, kind="process-change", action="keep-limits", line=3))
    finding = find(QUIET * 2, made=context(logbook=changes))
    rows = [row for row in finding.limits if row.panel == "location"]
    assert [row.limited for row in rows] == [True, False, True]
    assert (rows[2].centre, rows[2].sigma) == (rows[0].centre, rows[0].sigma)
    assert [calculation.in_force for calculation in finding.calculation] == [False]


def test_an_incomplete_subgroup_changes_no_limits() -> None:
    values = [*QUIET * 5, 10.0, 11.0]
    finding = find(values, given={"subgroup": {"size": 5}})
    assert finding.points is not None
    assert finding.points.open.tolist() == [False] * 10 + [True]
    location, spread = finding.limits_now
    assert (location.n, location.at_index, location.varies) == (5.0, 9, False)
    assert location.lower is not None
    assert location.lower == finding.panels[0].lower[9]
    assert spread.centre == finding.panels[1].centre[9]


@pytest.mark.parametrize(("chart", "size"), [("c", None), ("np", [50.0] * 22)])
def test_an_incomplete_subgroup_of_counts_is_no_other_size(chart: str, size: list[float] | None) -> None:
    sized = {} if size is None else {"size": "n"}
    given = {"count": "c", "chart": chart, "subgroup": {"size": 2}, **sized}
    finding = find([3.0, 4.0] * 10 + [2.0], given=given, size=None if size is None else size[:21])
    assert finding.state == "steady"


def test_limits_that_no_point_has_reached_are_not_in_force() -> None:
    finding = find(QUIET, made=context(register=[adopted(START + 90 * HOUR, 10.0, 1.0)]))
    assert [row.kind for row in finding.limits_now] == ["provisional", "provisional"]
    assert [(row.kind, row.centre) for row in finding.limits_waiting] == [("adopted", 10.0)]
    assert finding.panels[0].in_baseline.all()


def test_a_signal_before_a_process_change_does_not_go_on() -> None:
    values = [*QUIET * 3, 30.0, 30.0, 10.0]
    change = entry(START + 33 * HOUR, kind="process-change")
    finding = find(values, made=context(logbook=[change]), given={"baseline": {"points": 20}})
    assert [case.ongoing for case in finding.cases] == [False]
    assert finding.state == "gathering"
