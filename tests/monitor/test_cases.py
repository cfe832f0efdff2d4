"""From signals to cases: what belongs together, ids that stay, states, answers, likely start."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.made_readings import HOUR, START, context, entry, find

from holdsteady.monitor.cases import APART, group
from holdsteady.monitor.finding import Finding, Signal
from holdsteady.times import DAY

GIVEN = {"limits": [{"centre": 0.0, "sigma": 1.0}]}
NEAR = [0.5, -0.5]  # alternates about the centre: no run, no signal


def quiet(points: int) -> list[float]:
    return (NEAR * points)[:points]


def soon(points: int) -> int:
    """A moment an hour after the last of so many points."""
    return START + (points + 1) * HOUR


def signal(
    first: int, last: int, *, panel: str = "location", direction: str = "high", name: str = ""
) -> Signal:
    return Signal(
        id=f"s-{name or first}", case="", panel=panel, rule="outside-limits", direction=direction,  # type: ignore[arg-type]
        first_index=first, fired_index=first, last_index=last, ongoing=False,
    )  # fmt: skip


def spans(groups: list[list[Signal]]) -> list[list[tuple[int, int]]]:
    return [sorted((s.first_index, s.last_index) for s in members) for members in groups]


def test_signals_at_most_eight_points_apart_are_one_case() -> None:
    era = np.ones(100, dtype=np.int64)
    assert spans(group([signal(1, 3), signal(11, 12)], era)) == [[(1, 3), (11, 12)]]
    assert spans(group([signal(1, 3), signal(12, 12)], era)) == [[(1, 3)], [(12, 12)]]
    assert spans(group([signal(1, 3), signal(11, 12, panel="spread")], era)) == [[(1, 3), (11, 12)]]


def test_opposite_directions_of_the_location_panel_belong_together_only_when_they_overlap() -> None:
    era = np.ones(100, dtype=np.int64)
    assert len(group([signal(1, 3), signal(4, 6, direction="low")], era)) == 2
    assert len(group([signal(1, 4), signal(4, 6, direction="low")], era)) == 1
    assert len(group([signal(1, 3, panel="spread"), signal(4, 6, panel="spread", direction="low")], era)) == 1


def test_no_case_crosses_an_era() -> None:
    era = np.array([1] * 5 + [2] * 5)
    assert len(group([signal(4, 4), signal(5, 5)], era)) == 2


def naive_groups(signals: list[Signal]) -> list[list[tuple[int, int]]]:
    """Merge pairwise until nothing changes."""
    groups = [[s] for s in signals]

    def together(a: Signal, b: Signal) -> bool:
        low, high = sorted((a, b), key=lambda s: s.first_index)
        both = {a.panel, b.panel} == {"location"} and {a.direction, b.direction} == {"high", "low"}
        apart = high.first_index - low.last_index
        return apart <= (0 if both else 8)

    changed = True
    while changed:
        changed = False
        for i in range(len(groups)):
            for j in range(i + 1, len(groups)):
                if any(together(a, b) for a in groups[i] for b in groups[j]):
                    groups[i] += groups.pop(j)
                    changed = True
                    break
            if changed:
                break
    return sorted(spans(groups))


made_signals = st.builds(
    lambda first, length, panel, direction, number: signal(
        first,
        first + length,
        panel=panel,
        direction=direction,
        name=f"{first}.{length}.{panel}.{direction}.{number}",
    ),
    st.integers(0, 80),
    st.integers(0, 12),
    st.sampled_from(["location", "spread"]),
    st.sampled_from(["high", "low", "none"]),
    st.integers(0, 10**9),
)


@given(st.lists(made_signals, max_size=14))
@settings(max_examples=300, deadline=None)
def test_grouping_agrees_with_merging_pair_by_pair(signals: list[Signal]) -> None:
    assert sorted(spans(group(signals, np.ones(200, dtype=np.int64)))) == naive_groups(signals)
    assert APART == 8


def test_a_case_has_the_id_and_direction_of_its_earliest_fired_signal() -> None:
    finding = find([*quiet(10), *([1.0] * 9), 9.0], given=GIVEN)
    (case,) = finding.cases
    run, beyond = finding.signals
    assert (run.rule, run.first_index, run.fired_index) == ("run-one-side", 10, 18)
    assert case.id == "c-" + run.id[2:]
    assert case.aliases == (case.id, "c-" + beyond.id[2:])
    assert {s.case for s in finding.signals} == {case.id}


def test_the_likely_start_is_the_first_point_of_the_new_level() -> None:
    rng = np.random.default_rng(11)
    values = [*rng.normal(size=60), *rng.normal(2.5, 1.0, size=20)]
    finding = find(values, given=GIVEN)
    case = finding.cases[-1]
    assert case.start_index == pytest.approx(60, abs=1)
    assert case.start_low_index is not None
    assert case.start_high_index is not None
    assert case.start_low_index <= 60 <= case.start_high_index
    assert case.shift == pytest.approx(2.5, abs=0.7)
    assert case.shift_sigma == case.shift  # sigma is 1


def only_state(finding: Finding) -> str:
    (case,) = finding.cases
    return case.state


def test_states_of_a_case() -> None:
    over = [*quiet(10), 9.0, *quiet(10)]
    assert only_state(find([*quiet(10), 9.0], given=GIVEN)) == "open"  # ongoing, however old
    assert only_state(find(over, given=GIVEN, made=context(soon(21)))) == "open"
    assert only_state(find(over, given=GIVEN)) == "ended"
    assert only_state(find(over, given=GIVEN, made=context(watch_from=START + DAY))) == "historical"
    reason = entry(START + 11 * HOUR)
    assert (
        only_state(find(over, given=GIVEN, made=context(logbook=[reason], watch_from=START + DAY)))
        == "answered"
    )


def test_a_case_inside_the_baseline_is_no_work_unless_it_is_gross() -> None:
    mild, gross = quiet(40), quiet(40)
    mild[10], gross[10] = 4.0, 20.0  # mean moving range 1.08 and 1.9: 4.0 and 11.4 sigma
    limits_alone = {"rules": [{"rule": "outside-limits"}]}
    assert only_state(find(mild, given=limits_alone)) == "baseline"
    assert only_state(find(gross, given=limits_alone)) == "open"
    assert find(mild, given=limits_alone, made=context(soon(40))).state == "steady"


def test_without_times_a_case_stays_open_until_it_is_answered() -> None:
    over = [*quiet(10), 9.0, *quiet(40)]
    finding = find(over, given=GIVEN, timed=False)
    assert only_state(finding) == "open"
    answer = entry(START, characteristic="", case=finding.cases[0].id)
    assert only_state(find(over, given=GIVEN, timed=False, made=context(logbook=[answer]))) == "answered"


@pytest.mark.parametrize(
    ("line", "answered"),
    [
        (entry(START + 11 * HOUR), True),
        (entry(START + 10 * HOUR), False),
        (entry(START, until=START + 11 * HOUR), False),  # half-open: ends before the point
        (entry(START, until=START + 11 * HOUR + 1), True),
        (entry(START + 11 * HOUR, kind="measurement-fault"), True),
        (entry(START + 11 * HOUR, kind="note"), False),
        (entry(START + 11 * HOUR, characteristic="*"), False),
        (entry(START + 11 * HOUR, characteristic="", gauge="CMM-2"), True),
        (entry(START + 11 * HOUR, characteristic="", gauge="CMM-3"), False),
    ],
)  # fmt: skip
def test_which_lines_answer(line: object, answered: bool) -> None:  # noqa: FBT001
    values = [*quiet(10), 9.0, *quiet(10)]
    finding = find(values, given={**GIVEN, "gauge": "CMM-2"}, made=context(soon(21), logbook=[line]))  # type: ignore[list-item]
    assert only_state(finding) == ("answered" if answered else "open")
    assert finding.state == ("answered" if answered else "signalling")


def test_a_family_line_answers_no_member() -> None:
    values = [*quiet(10), 9.0, *quiet(10)]
    line = entry(START + 11 * HOUR)
    finding = find(
        values,
        given={**GIVEN, "each": ["press"]},
        name="bore[press=2]",
        made=context(soon(21), logbook=[line]),
    )
    assert only_state(finding) == "open"
    assert finding.logbook == (line,)


def test_a_line_that_names_only_a_case_may_exclude_its_points() -> None:
    noise = quiet(40)
    noise[10] = 20.0
    limits_alone = {"rules": [{"rule": "outside-limits"}]}
    (case,) = find(noise, given=limits_alone).cases
    line = entry(START + 11 * HOUR, characteristic="", case=case.id, exclude=True)
    finding = find(noise, given=limits_alone, made=context(logbook=[line]))
    assert finding.limits[0].excluded == 1
    assert finding.cases[0].state == "answered"


def test_cases_that_point_the_good_way_are_marked() -> None:
    values = [*quiet(10), 9.0, *quiet(30), -9.0]
    finding = find(values, given={**GIVEN, "better": "higher"})
    assert [(c.direction, c.good_way) for c in finding.cases] == [("high", True), ("low", False)]


def test_readings_outside_the_specification_are_counted_within_the_case() -> None:
    values = [9.0, *quiet(30), 9.0, 9.0]
    finding = find(values, given={**GIVEN, "specification": [{"upper": 8.0}]})
    assert [c.outside_specification for c in finding.cases] == [1, 2]


@given(
    st.lists(st.floats(-6, 6).map(lambda v: round(v, 2)), min_size=1, max_size=120),
    st.lists(st.floats(-6, 6).map(lambda v: round(v, 2)), min_size=1, max_size=40),
    st.sampled_from(["nelson", "western-electric"]),
)
@settings(max_examples=120, deadline=None)
def test_new_points_never_change_an_earlier_signal(
    before: list[float], after: list[float], rules: str
) -> None:
    names = {
        "nelson": ("outside-limits", "run-one-side", "trend", "alternating", "two-of-three", "four-of-five",
                   "hugging", "avoiding-centre"),
        "western-electric": ("outside-limits", "two-of-three", "four-of-five", "run-one-side"),
    }  # fmt: skip
    given_ = {**GIVEN, "rules": [{"rule": name} for name in names[rules]]}
    early = {s.id: s for s in find(before, given=given_).signals}
    late = {s.id: s for s in find([*before, *after], given=given_).signals}
    for identifier, one in early.items():
        other = late[identifier]
        assert (one.first_index, one.fired_index) == (other.first_index, other.fired_index)
        assert other.last_index == one.last_index or (one.ongoing and other.last_index > one.last_index)
