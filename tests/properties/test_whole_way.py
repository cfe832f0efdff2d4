"""The whole way from readings to cases against a second, naive implementation; and what must never change."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any, TypeVar

import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st
from tests.made_readings import HOUR, START
from tests.naive_way import NaivePanel, NaiveWay, whole_way
from tests.naive_way_projects import CHARTS, SUBGROUPED, Project, projects
from tests.naive_way_signals import NaiveCase, NaiveSignal

from holdsteady.monitor.finding import Case, Finding, Panel

VARIABLES = ("individuals", *SUBGROUPED)
OPPOSITE = {"high": "low", "low": "high", "none": "none"}


Test = TypeVar("Test", bound=Callable[..., None])


def few(examples: int) -> Callable[[Test], Test]:
    # To shrink a whole project takes minutes; add Phase.shrink when one has to be looked into.
    phases = (Phase.explicit, Phase.reuse, Phase.generate)
    checks = [HealthCheck.too_slow, HealthCheck.data_too_large, HealthCheck.filter_too_much]
    return settings(max_examples=examples, deadline=None, phases=phases, suppress_health_check=checks)


@pytest.mark.parametrize("chart", CHARTS)
@few(200)
@given(data=st.data())
def test_a_second_implementation_agrees_from_readings_to_cases(chart: str, data: st.DataObject) -> None:
    project = data.draw(projects((chart,)))
    finding = project.find()
    way = whole_way(project.readings, project.settings, project.context)
    if finding.points is None:
        assert finding.reason == "every subgroup holds a single reading"
        assert all(len(point.values) == 1 for point in way.points)
        return
    assert finding.points.n.tolist() == [weight(chart, point) for point in way.points]
    for mine, real in zip(way.panels, finding.panels, strict=True):
        compare_panel(mine, real, way)
    assert sorted(signals_of(finding)) == way.signals
    compare_cases(way.cases, finding)


def weight(chart: str, point: Any) -> float:
    return (
        float(point.size) if chart in ("p", "np", "u") else 1.0 if chart == "c" else float(len(point.values))
    )


def compare_panel(mine: NaivePanel, real: Panel, way: NaiveWay) -> None:
    assert mine.name == real.name
    same(mine.value, real.value, "value")
    drawn = [i for i, value in enumerate(mine.value) if not math.isnan(value)]
    for what in ("centre", "lower", "upper", "sigma"):
        same([getattr(mine.lines[i], what) for i in drawn], getattr(real, what)[drawn], f"{mine.name} {what}")
    assert mine.judged == real.judged.tolist(), mine.name
    limited = [i for i in drawn if mine.lines[i].sigma > 0]
    assert [mine.in_baseline[i] for i in limited] == real.in_baseline[limited].tolist(), mine.name
    for name, met in mine.met.items():
        got = real.met[name].tolist() if name in real.met else [0] * len(way.points)
        assert met == got, (mine.name, name)


def same(mine: list[float], real: Any, what: str) -> None:
    np.testing.assert_allclose(real, mine, rtol=1e-9, atol=1e-12, err_msg=what)


def signals_of(finding: Finding) -> list[NaiveSignal]:
    return [
        NaiveSignal(s.panel, s.rule, s.direction, s.first_index, s.fired_index, s.last_index, s.ongoing)
        for s in finding.signals
    ]


def compare_cases(mine: list[NaiveCase], finding: Finding) -> None:
    by_id = dict(zip([s.id for s in finding.signals], signals_of(finding), strict=True))
    assert len(by_id) == len(finding.signals)
    real = {tuple(sorted(by_id[i] for i in case.signals)): case for case in finding.cases}
    assert sorted(real) == sorted(tuple(case.signals) for case in mine)
    for case in mine:
        got = real[tuple(case.signals)]
        spans = (got.first_index, got.fired_index, got.last_index, got.ongoing)
        assert spans == (case.first, case.fired, case.last, case.ongoing)
        earliest = [s for s in finding.signals if s.id in got.signals and s.fired_index == case.fired]
        assert (got.id, got.direction, got.panel) in [
            ("c" + s.id[1:], s.direction, s.panel) for s in earliest
        ]
        assert all(s.case == got.id for s in finding.signals if s.id in got.signals)
        assert set(got.aliases) >= {"c" + i[1:] for i in got.signals} - {got.id}
        assert [one.line for one in got.answered_by] == case.answered_by
        assert got.state == case.state, case


@few(100)
@given(
    project=projects(VARIABLES),
    factor=st.sampled_from([0.5, 1.0, 3.0, 100.0]),
    shift=st.sampled_from([-10.0, 0.0, 0.75, 40.0]),
)
def test_another_unit_gives_the_same_signals_and_limits_in_that_unit(
    project: Project, factor: float, shift: float
) -> None:
    plain, moved = project.find(), project.moved(factor, shift).find()
    assert plain.signals == moved.signals
    assert [(c.id, c.state, c.signals) for c in plain.cases] == [
        (c.id, c.state, c.signals) for c in moved.cases
    ]
    for one, other in zip(plain.panels, moved.panels, strict=True):
        base = shift if one.name == "location" else 0.0
        for what in ("value", "centre", "lower", "upper"):
            close(getattr(other, what), getattr(one, what) * factor + base)
        close(other.sigma, one.sigma * factor)
        assert {name: met.tolist() for name, met in one.met.items()} == {
            name: met.tolist() for name, met in other.met.items()
        }


@few(100)
@given(project=projects(VARIABLES))
def test_a_mirror_swaps_the_directions_on_the_location_panel_alone(project: Project) -> None:
    plain, mirrored = project.find(), project.moved(-1.0, 0.0).find()
    swapped = [
        replace(s, direction=OPPOSITE[s.direction]) if s.panel == "location" else s for s in signals_of(plain)
    ]
    assert sorted(swapped) == sorted(signals_of(mirrored))
    assert sorted(spans_of(plain.cases)) == sorted(spans_of(mirrored.cases))
    for one, other in zip(plain.panels, mirrored.panels, strict=True):
        if one.name == "location":
            for what, opposite in (
                ("value", "value"),
                ("centre", "centre"),
                ("lower", "upper"),
                ("upper", "lower"),
            ):
                close(getattr(other, what), -getattr(one, opposite))
        else:
            for what in ("value", "centre", "lower", "upper", "sigma"):
                close(getattr(other, what), getattr(one, what))


def close(real: Any, expected: Any) -> None:
    np.testing.assert_allclose(real, expected, rtol=1e-9, atol=1e-9)


def spans_of(cases: tuple[Case, ...]) -> list[tuple[int, int, int, str, int]]:
    return [(c.first_index, c.fired_index, c.last_index, c.state, len(c.signals)) for c in cases]


@few(200)
@given(data=st.data())
def test_new_readings_never_change_an_earlier_signal_under_given_limits(data: st.DataObject) -> None:
    project = data.draw(projects(given_limits=True, least=2))
    way = whole_way(project.readings, project.settings, project.context)
    ends = [point.rows[-1] + 1 for point in way.points]
    if "size" in project.given.get("subgroup", {}):
        ends = list(
            range(1, len(project.values))
        )  # an incomplete one is open, so any reading may be the last
    stop = data.draw(st.sampled_from(ends)) if ends else 1
    before, after = project.cut(stop).find(), project.find()
    if before.points is None or after.points is None:
        return
    late = {signal.id: signal for signal in after.signals}
    for signal in before.signals:
        same_one = late[signal.id]
        for what in ("panel", "rule", "direction", "first_index", "fired_index"):
            assert getattr(same_one, what) == getattr(signal, what)
        assert same_one.last_index >= signal.last_index
        assert signal.ongoing or same_one.last_index == signal.last_index
        assert signal.ongoing or not same_one.ongoing
    settled = int((~before.points.open).sum())
    early = {signal.id for signal in before.signals}
    assert early == {signal.id for signal in after.signals if signal.fired_index < settled}


@few(100)
@given(data=st.data())
def test_an_answer_that_excludes_nothing_changes_no_number(data: st.DataObject) -> None:
    project = data.draw(projects(least=20))
    plain = project.find()
    if plain.points is None or not plain.cases or plain.points.time is None:
        return
    case = data.draw(st.sampled_from(plain.cases))
    line: dict[str, Any] = {
        "when": int(plain.points.time[case.last_index]),
        "kind": data.draw(st.sampled_from(["cause", "measurement-fault"])),
    }
    by_id = data.draw(st.booleans())
    if by_id:
        line |= {
            "case": data.draw(st.sampled_from(case.aliases)),
            "characteristic": "",
            "when": START - 500 * HOUR,
        }
    answered = replace(project, logbook=[*project.logbook, line]).find()
    assert numbers(plain) == numbers(answered)
    for one, other in zip(plain.cases, answered.cases, strict=True):
        assert (one.id, one.signals) == (other.id, other.signals)
        if one.id == case.id:
            assert other.state == "answered"
        elif by_id:
            assert other.state == one.state


@few(100)
@given(project=projects(given_limits=True, least=20), hour=st.integers(0, 120), length=st.integers(1, 30))
def test_excluding_points_changes_nothing_where_limits_are_given(
    project: Project, hour: int, length: int
) -> None:
    span = {
        "when": START + hour * HOUR,
        "until": START + (hour + length) * HOUR,
        "kind": "note",
        "exclude": True,
    }
    plain, excluding = project.find(), replace(project, logbook=[*project.logbook, span]).find()
    assert numbers(plain) == numbers(excluding)


def numbers(finding: Finding) -> Any:
    panels = [
        [
            getattr(panel, what).tobytes()
            for what in ("value", "centre", "lower", "upper", "sigma", "z", "judged")
        ]
        for panel in finding.panels
    ]
    return panels, finding.signals, [(c.id, c.signals, c.start_index, c.shift) for c in finding.cases]


@few(100)
@given(data=st.data())
def test_values_that_were_not_real_are_as_if_they_had_never_been(data: st.DataObject) -> None:
    project = data.draw(
        projects(("individuals", "p", "np", "c", "u"), given_limits=True, least=3, written=False)
    )
    given_ = {key: value for key, value in project.given.items() if key not in ("gap", "subgroup")}
    time = [START + HOUR * (row + 1) for row in range(len(project.values))]
    project = replace(project, given=given_, time=time, as_of=START + 1000 * HOUR)
    rows = data.draw(st.sets(st.integers(0, len(time) - 1), max_size=len(time) - 1))
    faults = [{"when": time[row], "kind": "measurement-fault", "exclude": True} for row in rows]
    faulty, without = replace(project, logbook=faults).find(), project.without(rows).find()
    kept = [row for row in range(len(time)) if row not in rows]
    expected = [
        replace(s, first=kept[s.first], fired=kept[s.fired], last=kept[s.last]) for s in signals_of(without)
    ]
    # A moving range has no place beside a value that was not real, so the two differ there and only there.
    assert [s for s in signals_of(faulty) if s.panel != "spread"] == [
        s for s in expected if s.panel != "spread"
    ]
