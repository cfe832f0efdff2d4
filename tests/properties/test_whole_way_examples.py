"""Small projects on which two implementations once differed, decided by the definitions."""

from __future__ import annotations

from typing import Any

import pytest
from tests.made_readings import HOUR, START, adopted, context, entry, find
from tests.naive_way_projects import moment

GIVEN: dict[str, Any] = {"limits": [{"centre": 0.0, "sigma": 1.0}]}
QUIET = [1.0, -1.0] * 15
LIMITS_ALONE: dict[str, Any] = {"rules": [{"rule": "outside-limits"}]}


def at(hour: int) -> int:
    return START + hour * HOUR


def test_a_signal_is_over_once_the_gap_is_exceeded() -> None:
    # Runs go on over a missing point unless the gap is exceeded: no later range can prolong this signal.
    options = {**GIVEN, "gap": "5h", "chart_options": {"moving_range_signals": True}}
    finding = find([0.0, 0.0, 5.0, 5.0], given=options, time=[at(1), at(2), at(3), at(20)])
    spread = [s for s in finding.signals if s.panel == "spread"]
    assert [(s.fired_index, s.last_index, s.ongoing) for s in spread] == [(2, 2, False)]


def test_a_signal_is_over_once_a_new_era_has_begun() -> None:
    # No signal crosses an era's start, even while the new era has too few points to be judged.
    change = entry(at(32), kind="process-change")
    finding = find([*QUIET, 30.0, 0.0], given=LIMITS_ALONE, made=context(logbook=[change]))
    assert [(s.fired_index, s.ongoing) for s in finding.signals] == [(30, False)]


def test_adopted_limits_keep_the_width_they_were_adopted_with() -> None:
    # The register's width belongs to the set: changing the settings re-judges nothing.
    line = adopted(at(0), 0.0, 1.0, width=2.0)
    location = find([0.0] * 3, given={"width": 3.0}, made=context(register=[line])).panels[0]
    assert location.upper.tolist() == pytest.approx([2.0] * 3)


def test_an_era_keeps_the_limits_that_were_in_force_when_it_began() -> None:
    change = entry(at(31), kind="process-change", action="keep-limits")
    never_reached = adopted(at(500), 99.0, 1.0)
    location = find([*QUIET, 0.0], given={}, made=context(logbook=[change], register=[never_reached])).panels[
        0
    ]
    assert location.centre[-1] == pytest.approx(location.centre[0])
    dated = {"limits": [{"centre": 99.0, "sigma": 1.0, "from": moment(744)}]}
    location = find([*QUIET, 0.0], given=dated, made=context(logbook=[change])).panels[0]
    assert location.centre[-1] == pytest.approx(location.centre[0])


def test_no_point_of_an_era_that_keeps_its_limits_is_a_baseline_point() -> None:
    change = entry(at(31), kind="process-change", action="keep-limits")
    finding = find([*QUIET, 0.0, 7.0, 0.0], given=LIMITS_ALONE, made=context(at(40), logbook=[change]))
    assert not finding.panels[0].in_baseline[30:].any()
    assert [case.state for case in finding.cases] == ["open"]


def test_a_point_judged_by_given_limits_is_no_baseline_point() -> None:
    given = {**LIMITS_ALONE, "limits": [{"centre": 0.0, "sigma": 1.0, "from": moment(10)}]}
    finding = find([*QUIET[:15], 4.0, *QUIET[:14]], given=given, made=context(at(40)))
    assert not finding.panels[0].in_baseline[9:].any()
    assert [case.state for case in finding.cases] == ["open"]


def test_given_limits_from_the_start_leave_no_baseline_even_with_adopted_ones_to_come() -> None:
    finding = find(QUIET, given=GIVEN, made=context(register=[adopted(at(500), 0.0, 1.0)]))
    assert not finding.panels[0].in_baseline.any()


def test_a_signal_that_began_before_the_baseline_is_not_inside_it() -> None:
    span = {"from": moment(7), "to": moment(33)}
    given = {"baseline": span, "rules": [{"rule": "hugging", "points": 10}]}
    finding = find([*[0.0] * 10, *[2.0, -2.0] * 11], given=given, made=context(at(40)))
    (case,) = finding.cases
    assert (case.first_index, case.fired_index, case.state) == (0, 9, "open")


def test_a_gross_case_in_the_baseline_is_open_in_an_earlier_era_too() -> None:
    change = entry(at(31), kind="process-change")
    values = [*QUIET[:29], 40.0, *QUIET]
    given = {**LIMITS_ALONE, "baseline": {"points": 30}}
    finding = find(values, given=given, made=context(at(5000), logbook=[change], watch_from=at(4000)))
    assert [case.state for case in finding.cases] == ["open"]


def test_a_value_that_was_not_real_makes_no_case_gross() -> None:
    fault = entry(at(5), kind="measurement-fault", exclude=True, characteristic="*")  # which answers nothing
    values = [*[2.0] * 4, 90.0, *[2.0] * 5, *[-1.0, 1.0, -3.0, 0.0] * 4]
    given = {"rules": [{"rule": "run-one-side"}], "baseline": {"points": 30}}
    (case,) = find(values, given=given, made=context(at(27), logbook=[fault])).cases
    assert (case.first_index, case.last_index, case.state) == (0, 9, "baseline")
