"""Sentences, word for word."""

from __future__ import annotations

from dataclasses import replace
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.made_findings import AS_OF, HOUR, all_findings, finding
from tests.site.made_site import Reader, made_site

from holdsteady.charts.picture import likely_start
from holdsteady.monitor.finding import Case, Direction, Finding, Signal
from holdsteady.project.durations import Duration
from holdsteady.site.case_lines import case_row, logbook_line
from holdsteady.site.headlines import details, first_details, first_sentence, headline, state_said
from holdsteady.site.labels import SiteLabels
from holdsteady.site.limits_lines import current_limits
from holdsteady.site.moments import Clock
from holdsteady.site.sentences import case_details, case_label, case_sentence, outside_said, reason_said
from holdsteady.site.words import rule_said, signal_said
from holdsteady.site.worklist import by_attention, tiers, why
from holdsteady.spc.rules import Rule

CLOCK = Clock(zone=ZoneInfo("Europe/Lisbon"), now=AS_OF)  # Tue 17 Mar 2026, 14:10


def with_case(  # one signal, one case, as a test wants them
    made: Finding,
    rule: str = "run-one-side",
    *,
    panel: str = "",
    direction: Direction = "high",
    first: int = 72,
    fired: int = 80,
    last: int = 89,
    ongoing: bool = True,
    **case: Any,
) -> tuple[Finding, Case]:
    panel = panel or made.panels[0].name
    signal = Signal(
        id="s-1",
        case="c-1",
        panel=panel,
        rule=rule,
        direction=direction,
        first_index=first,
        fired_index=fired,
        last_index=last,
        ongoing=ongoing,
    )
    given: dict[str, Any] = {
        "id": "c-1",
        "aliases": ("c-1",),
        "state": "open",
        "direction": direction,
        "panel": panel,
        "first_index": first,
        "fired_index": fired,
        "last_index": last,
        "ongoing": ongoing,
        "signals": ("s-1",),
        "answered_by": (),
        "start_index": first,
        "start_low_index": first - 2,
        "start_high_index": first + 1,
        "shift": 0.0041 if direction == "high" else -0.0041,
        "shift_sigma": 1.14 if direction == "high" else -1.14,
        "outside_specification": 0,
        "readings": 90,
        "good_way": False,
        "gross": False,
    }
    found = Case(**(given | case))
    return replace(made, signals=(signal,), cases=(found,), state="signalling"), found


BORE = finding("bore", title="Bore diameter")


@pytest.mark.parametrize(
    ("asked", "sentence"),
    [
        ({"direction": "low"}, "Bore diameter has run low since about 04:10 on Monday, by 0.004 mm."),
        ({}, "Bore diameter has run high since about 04:10 on Monday, by 0.004 mm."),
        ({"start_index": None}, "Bore diameter has run high since 04:10 on Monday, by 0.004 mm."),
        ({"shift": None}, "Bore diameter has run high since about 04:10 on Monday."),
        # A step the other way is not the size of this case.
        ({"shift": -0.0041}, "Bore diameter has run high since about 04:10 on Monday."),
        (
            {"ongoing": False, "last": 80, "direction": "low"},
            "Bore diameter ran low from about 04:10 to 20:10 on Monday, by 0.004 mm.",
        ),
        (
            {"ongoing": False, "last": 84},
            "Bore diameter ran high from about 04:10 on Monday to 04:10 on Tuesday, by 0.004 mm.",
        ),
        ({"rule": "trend"}, "Bore diameter has risen steadily since 04:10 on Monday."),
        (
            {"rule": "trend", "direction": "low", "ongoing": False, "last": 80},
            "Bore diameter fell steadily from 04:10 to 20:10 on Monday.",
        ),
        (
            {"rule": "alternating", "direction": "none"},
            "Bore diameter has gone up and down in turn since 04:10 on Monday.",
        ),
        (
            {"rule": "hugging", "direction": "none"},
            "Bore diameter has kept unusually close to its centre line since 04:10 on Monday.",
        ),
        (
            {"rule": "avoiding-centre", "direction": "none"},
            "Bore diameter has kept away from its centre line since 04:10 on Monday.",
        ),
        (
            {"panel": "spread", "rule": "outside-limits"},
            "Bore diameter has varied more since about 04:10 on Monday: range up by 0.004 mm.",
        ),
        (
            {"panel": "spread", "rule": "outside-limits", "direction": "low", "ongoing": False, "last": 80},
            "Bore diameter varied less from about 04:10 to 20:10 on Monday: range down by 0.004 mm.",
        ),
    ],
)
def test_what_a_case_says(asked: dict[str, Any], sentence: str) -> None:
    made, case = with_case(BORE, **asked)
    assert case_sentence(made, case, CLOCK).text == sentence
    assert headline(made, CLOCK).text == sentence


def test_a_start_after_the_point_that_fired_is_no_start() -> None:
    made, case = with_case(BORE, ongoing=False, last=82, start_index=82, direction="low")
    assert (
        case_sentence(made, case, CLOCK).text
        == "Bore diameter ran low from 04:10 on Monday to 00:10 on Tuesday."
    )
    assert case_row(made, case, CLOCK, root="").shift == ""
    assert not any("sigma" in text or "began" in text for text in case_details(made, case, CLOCK))
    assert likely_start(case) is None
    made, case = with_case(BORE, start_index=80)
    assert likely_start(case) == (70, 73)
    assert "about" in case_sentence(made, case, CLOCK).text


def test_ends_that_read_alike_are_told_once() -> None:
    assert BORE.points is not None
    minute = AS_OF + np.arange(90, dtype=np.int64) * 100_000
    quick = replace(BORE, points=replace(BORE.points, time=minute))
    made, case = with_case(quick, ongoing=False, direction="low", last=85)
    assert case_sentence(made, case, CLOCK).text == (
        "Bore diameter ran low at 14:10 on Tuesday, by 0.004 mm."
    )
    assert case_details(made, case, CLOCK)[0].startswith("That is")
    made, case = with_case(quick, "trend", ongoing=False, last=85)
    assert case_sentence(made, case, CLOCK).text == "Bore diameter rose steadily at 14:10 on Tuesday."
    dated = replace(BORE, points=replace(BORE.points, time=minute - 200 * 24 * HOUR))
    made, case = with_case(dated, ongoing=False, direction="low", last=85)
    assert case_sentence(made, case, CLOCK).text.startswith("Bore diameter ran low on 29 August 2025, by")
    untimed = finding("glaze", chart="u", title="Glaze specks", unit="", timed=False)
    made, case = with_case(untimed, ongoing=False, first=80, fired=80, last=80, start_index=None, shift=None)
    assert case_sentence(made, case, CLOCK).text == "Glaze specks ran high at point 81."


def test_what_ended_unanswered_is_told_beside_no_open_signal() -> None:
    made, case = with_case(BORE, ongoing=False)
    past = replace(case, id="c-2", state="historical")
    ended = replace(case, state="ended")
    steady = replace(made, state="steady", cases=(ended, past))
    assert headline(steady, CLOCK).text == (
        "Bore diameter shows no open signal; one case ended without an answer."
    )
    two = replace(steady, cases=(ended, replace(ended, id="c-3")))
    assert headline(two, CLOCK).text.endswith("; two cases ended without an answer.")
    assert headline(replace(steady, cases=(past,)), CLOCK).text == "Bore diameter shows no open signal."
    assert headline(replace(steady, cases=()), CLOCK).text == "Bore diameter shows no signal."
    assert first_sentence([steady, BORE]).text == "No open signal among 2 characteristics."
    assert first_sentence([BORE, BORE]).text == "No signal among 2 characteristics."
    signalling = finding("x", state="signalling", shift=2.0)
    assert first_details([steady, signalling]) == ["1 shows no open signal."]


def test_what_cannot_signal_is_counted_as_not_computed() -> None:
    made = finding("torque", title="Torque", n=100)
    row = replace(
        made.limits[0], kind="provisional", limited=False, lower=None, upper=None, sigma=None, points=25,
        note="no variation in the baseline",
    )  # fmt: skip
    stuck = replace(
        made, state="not-computed", limits=(row,), reason="no variation in the baseline",
        remedy="Give `limits`, or a `baseline` that holds some variation.",
    )  # fmt: skip
    assert first_sentence([stuck, BORE]).text == ("No signal among 2 characteristics; 1 cannot be computed.")
    page = Reader(made_site([stuck])["characteristic/torque.html"])
    assert page.one("figure", class_="chart")
    text = page.one("main").text
    assert page.one("h1").text == "Torque has no limits: no variation in its baseline."
    assert "Without limits it cannot signal. Give `limits`, or a `baseline`" in text
    assert "centre 12.000 mm; no limits (no variation in the baseline)" in text
    for wrong in ("provisional", "There is no lower limit", "gathering", "no signal"):
        assert wrong not in text, wrong


def test_one_point_is_told_with_its_value_and_its_limit() -> None:
    panel = BORE.panels[0]
    value = panel.value.copy()
    value[70], value[71] = 12.0213, 11.98
    bore = replace(BORE, panels=(replace(panel, value=value), BORE.panels[1]))
    made, case = with_case(bore, "outside-limits", first=70, fired=70, last=70, ongoing=False)
    assert (
        case_sentence(made, case, CLOCK).text
        == "Bore diameter stood at 12.021 mm, above its limit of 12.011 mm, at 00:10 on Monday."
    )
    assert case_label(made, case, CLOCK) == "above its limit at 00:10 on Monday"
    made, case = with_case(
        bore, "outside-limits", first=71, fired=71, last=71, ongoing=False, direction="low"
    )
    assert (
        case_sentence(made, case, CLOCK).text
        == "Bore diameter stood at 11.980 mm, below its limit of 11.989 mm, at 02:10 on Monday."
    )


def test_one_point_of_a_spread() -> None:
    spread = BORE.panels[1]
    value = spread.value.copy()
    value[70] = 0.0441
    bore = replace(BORE, panels=(BORE.panels[0], replace(spread, value=value)))
    made, case = with_case(bore, "outside-limits", panel="spread", first=70, fired=70, last=70, ongoing=False)
    assert (
        case_sentence(made, case, CLOCK).text
        == "Bore diameter varied more than its limits allow at 00:10 on Monday: "
        "range 0.044 mm, limit 0.040 mm."
    )


def test_attribute_charts_without_a_unit_and_without_times() -> None:
    rejects = finding("pinholes", chart="p", title="Pinhole rejects", unit="")
    made, case = with_case(rejects, "run-one-side", shift=0.0123)
    assert (
        case_sentence(made, case, CLOCK).text
        == "Pinhole rejects has run high since about 04:10 on Monday, by 1.2 percentage points."
    )
    untimed = finding("glaze", chart="u", title="Glaze specks", unit="", timed=False)
    made, case = with_case(untimed, "run-one-side", shift=0.0517)
    assert (
        case_sentence(made, case, CLOCK).text == "Glaze specks has run high since about point 73, by 0.052."
    )
    assert case_details(made, case, CLOCK)[0] == "Most likely it began between point 71 and point 74."


def test_details_of_a_case() -> None:
    made, case = with_case(BORE)
    assert case_details(made, case, CLOCK) == [
        "Most likely it began between 00:10 and 06:10.",
        "That is 1.1 sigma of the sample mean.",
        "None of its 90 readings is outside specification.",
    ]
    assert details(made, CLOCK)[-1] == "Nobody has recorded a reason."
    made, case = with_case(BORE, good_way=True, start_low_index=72, start_high_index=72)
    assert case_details(made, case, CLOCK)[0].startswith("That is")
    assert case_details(made, case, CLOCK)[-1] == "That is the good way."


@pytest.mark.parametrize(
    ("outside", "readings", "said"),
    [
        (None, 90, ""),
        (0, 90, "None of its 90 readings is outside specification."),
        (1, 90, "One of its 90 readings is outside specification."),
        (3, 90, "Three of its 90 readings are outside specification."),
        (20, 90, "20 of its 90 readings are outside specification."),
        (0, 1, "Its one reading is inside specification."),
        (1, 1, "Its one reading is outside specification."),
    ],
)
def test_readings_outside_specification(outside: int | None, readings: int, said: str) -> None:
    _, case = with_case(BORE, outside_specification=outside, readings=readings)
    assert outside_said(case) == said


@pytest.mark.parametrize(
    ("rule", "direction", "length", "said"),
    [
        ("outside-limits", "high", 1, "one point above the upper limit"),
        ("outside-limits", "low", 3, "three points in a row below the lower limit"),
        ("run-one-side", "low", 9, "nine points in a row below the centre line"),
        ("run-one-side", "high", 18, "18 points in a row above the centre line"),
        ("trend", "high", 6, "six points in a row steadily rising"),
        ("trend", "low", 7, "seven points in a row steadily falling"),
        ("alternating", "none", 14, "fourteen points in a row going up and down in turn"),
        ("hugging", "none", 15, "fifteen points in a row within 1 sigma of the centre line"),
        ("avoiding-centre", "none", 8, "eight points in a row beyond 1 sigma, on either side"),
        ("two-of-three", "high", 3, "two of three points more than 2 sigma above the centre line"),
        (
            "four-of-five",
            "low",
            8,
            "four of five points more than 1 sigma below the centre line, over eight points",
        ),
    ],
)
def test_signals_in_words(rule: str, direction: Direction, length: int, said: str) -> None:
    counts = {"two-of-three": (2, 3), "four-of-five": (4, 5)}.get(rule, (1, 1))
    panel = replace(BORE.panels[0], rules=(Rule(name=rule, points=counts[0], of=counts[1]),))
    bore = replace(BORE, panels=(panel, BORE.panels[1]))
    made, _ = with_case(bore, rule, direction=direction, first=40, last=39 + length)
    assert signal_said(made, made.signals[0]) == said


def test_a_point_that_is_not_judged_does_not_count_in_a_run() -> None:
    judged = BORE.panels[0].judged.copy()
    judged[45] = False
    bore = replace(BORE, panels=(replace(BORE.panels[0], judged=judged), BORE.panels[1]))
    made, _ = with_case(bore, first=40, last=49)
    assert signal_said(made, made.signals[0]) == "nine points in a row above the centre line"


def test_a_signal_on_the_spread_names_what_it_is_of() -> None:
    made, _ = with_case(BORE, "outside-limits", panel="spread", first=40, last=40)
    assert signal_said(made, made.signals[0]) == "sample range: one point above the upper limit"


def test_rules_with_their_counts() -> None:
    run = Rule(name="run-one-side", points=8, of=8)
    assert rule_said(run, BORE.panels[0]) == "eight points in a row on one side of the centre line"


def test_a_run_of_counts_is_told_from_the_median_that_judges_it() -> None:
    stops = finding("stops", chart="c", unit="")
    run = Rule(name="run-one-side", points=9, of=9)
    assert rule_said(run, stops.panels[0]) == "nine points in a row on one side of the median"
    made, _ = with_case(stops, direction="low", first=40, fired=48, last=48)
    assert signal_said(made, made.signals[0]) == "nine points in a row below the median"


def test_headlines_by_state() -> None:
    said = {f.name: headline(f, CLOCK).text for f in all_findings()}
    assert said["bore[press=1]"] == "Bore diameter, press 1 shows no signal."
    assert (
        said["stops"] == "Press stops has run high since about 04:10 on Monday, by 3.6; a reason is recorded."
    )
    assert said["flow"] == "Flow at 1 bar has sent no reading since 14:10 on Tuesday."
    assert said["glaze"] == "Glaze specks is gathering points for its limits: 5 points; limits begin at 8."
    assert said["none"].endswith(" cannot be computed: no file matches press/*.csv.")
    # The row's own points count: of 25 in this era, two were left out or not taken, and so on.
    few = finding("few", title="Torque", state="gathering", n=25)
    few = replace(few, limits=(replace(few.limits[0], points=1),))
    assert (
        headline(few, CLOCK).text == "Torque is gathering points for its limits: 1 point; limits begin at 8."
    )
    assert state_said(few, CLOCK) == "gathering, 1 point; limits begin at 8"


@pytest.mark.parametrize(
    ("note", "said"),
    [
        ("no variation in the baseline", "no variation in its baseline"),
        ("no events in the baseline", "no events in its baseline"),
        ("every unit in the baseline counted", "every unit in its baseline counted"),
    ],
)
def test_a_baseline_that_allows_no_limits_is_not_told_as_gathering(note: str, said: str) -> None:
    made = finding("torque", title="Torque", state="gathering", n=100)
    row = replace(made.limits[0], points=25, note=note, estimator="mean-range")
    made = replace(made, limits=(row,))
    for state in ("gathering", "not-computed"):
        stuck = replace(made, state=state, reason=note, remedy="Give `limits`.")
        assert headline(stuck, CLOCK).text == f"Torque has no limits: {said}."
        assert state_said(stuck, CLOCK) == f"no limits: {said}"
    assert details(stuck, CLOCK) == ["Without limits it cannot signal.", "Give `limits`."]
    assert first_sentence([made, finding("s")]).text == (
        "No signal among 2 characteristics; 1 has a baseline that allows no limits."
    )
    assert SiteLabels(clock=CLOCK).limits(row) == f"no limits: {note}"
    origin = dict(current_limits(made, CLOCK))["Origin"]
    assert origin == "the baseline's centre; it allows no limits"


def test_beneath_a_steady_headline_stands_the_newest_point() -> None:
    steady = finding("bore", title="Bore diameter")
    value = float(steady.panels[0].value[-1])
    assert details(steady, CLOCK) == [
        f"Its latest sample mean is {value:.3f} mm (14:10); the limits there are 11.989 and 12.011 mm."
    ]
    flagged = replace(steady, flags=("outside-specification",))
    assert details(flagged, CLOCK)[-1].startswith("Still, a reading lies outside specification")


def test_silence_names_its_cadence() -> None:
    silent = finding("flow", title="Flow", state="silent", cadence=Duration("8h"))
    assert details(silent, CLOCK)[0] == "A point is due every 8 hours."
    daily = finding("flow", title="Flow", state="silent", cadence=Duration("1d"))
    assert details(daily, CLOCK)[0] == "A point is due every day."


def test_answers_are_quoted_and_never_called_more_than_recorded() -> None:
    (stops,) = [f for f in all_findings() if f.name == "stops"]
    assert reason_said(stops.cases[0]) == "A reason is recorded: ‘Binder lot 118 was too dry’ (A. R.)."
    assert details(stops, CLOCK)[-1] == "That a reason is recorded does not say that it is fixed."


def test_the_first_sentence_has_its_denominator() -> None:
    steady = [finding(f"s{i}") for i in range(3)]
    signalling = [finding(f"x{i}", state="signalling", shift=2.0) for i in range(2)]
    gathering = finding("g", state="gathering")
    silent = [finding(f"q{i}", state="silent") for i in range(2)]
    assert first_sentence(steady).text == "No signal among 3 characteristics."
    assert first_sentence(steady[:1]).text == "No signal in the one characteristic."
    assert (
        first_sentence([*steady, gathering, *silent]).text
        == "No signal among 6 characteristics; 2 have sent no data lately and 1 is gathering points."
    )
    assert first_sentence([*steady, *signalling]).text == "Two of 5 characteristics need someone now."
    assert first_sentence([*steady, signalling[0]]).text == "One of 4 characteristics needs someone now."
    assert first_sentence(signalling[:1]).text == "The one characteristic needs someone now."
    assert first_details([*steady, *signalling, gathering]) == ["3 show no signal and 1 is gathering points."]
    answered = finding("a", state="answered", shift=2.0, answered=True)
    assert first_sentence([*steady, answered]).text == "None of 4 characteristics needs someone now."
    assert first_details([*steady, answered]) == ["3 show no signal and 1 has a recorded reason."]
    assert first_sentence(all_findings()).text == "Two of 9 characteristics need someone now."
    assert first_details(all_findings()) == [
        (
            "3 show no signal, 1 has a recorded reason, 1 has sent no data lately, 1 cannot be computed and "
            "1 is gathering points."
        )
    ]


def test_a_case_of_the_good_way_asks_for_nobody() -> None:
    made, _ = with_case(BORE, good_way=True)
    assert first_sentence([made, finding("s")]).text == "None of 2 characteristics needs someone now."
    assert first_details([made, finding("s")]) == ["1 shows no signal and 1 moved the good way."]
    assert state_said(made, CLOCK) == "signalling, the good way"


def test_the_worklist_stands_in_tiers() -> None:
    def work(name: str, **asked: Any) -> Finding:
        settings: dict[str, Any] = {"class_": asked.pop("class_")} if "class_" in asked else {}
        return with_case(finding(name, title=name, **settings), **asked)[0]

    findings = [
        work("small", shift_sigma=0.6),
        work("large", shift_sigma=2.6),
        work("safe", class_="safety"),
        work("outside", outside_specification=3),
        work("over", ongoing=False),
        work("good", good_way=True),
    ]
    found = tiers(findings)
    assert [[w.finding.title for w in tier.work] for tier in found] == [
        ["safe", "outside"],
        ["large", "small"],
        ["over"],
        ["good"],
    ]
    assert why(found[0].work[0]) == "Class safety. Ongoing, 18 points. No reading outside specification."
    assert why(found[0].work[1]) == "Ongoing, 18 points. 3 of 90 readings outside specification."
    assert why(found[2].work[0]) == "Over again; 18 points. No reading outside specification."


def test_areas_that_need_someone_come_first_then_state_then_title() -> None:
    ordered = [(area, [f.name for f in members]) for area, members in by_attention(all_findings())]
    assert ordered == [
        ("Firing", ["burst", "peak"]),
        ("Pressing", ["bore[press=2]", "stops", "bore[press=1]"]),
        ("Inspection & <b>more</b>", ["none"]),
        ("Inspection", ["flow", "glaze", "pinholes"]),
    ]


def test_the_logbook_line_is_ready_to_paste() -> None:
    made, case = with_case(BORE)
    # Half-open and to the minute: what has come so far, and nothing of what comes later.
    assert (
        logbook_line(made, case, CLOCK)
        == "2026-03-17 14:10,2026-03-16 04:10,2026-03-17 14:11,bore,c-1,,cause,,,,"
    )
    over, case = with_case(BORE, ongoing=False, last=80)
    assert (
        logbook_line(over, case, CLOCK)
        == "2026-03-17 14:10,2026-03-16 04:10,2026-03-16 20:11,bore,c-1,,cause,,,,"
    )
    odd = replace(made, name='bore[lot=a,"b"]')
    assert ',"bore[lot=a,""b""]",c-1,' in logbook_line(odd, case, CLOCK)


def test_charts_are_labelled_in_the_words_of_the_page() -> None:
    labels = SiteLabels(clock=CLOCK)
    made, case = with_case(BORE, direction="low")
    assert labels.panel(made, made.panels[0]) == "Mean of 5, mm"
    assert labels.panel(made, made.panels[1]) == "Range of 5, mm"
    assert labels.era(made, made.eras[0]) == "limits since 13 Mar, adopted by A. R."
    assert labels.baseline(made, made.eras[0]) == "baseline, 25 points"
    assert labels.case(made, case) == "low since about 04:10 on Monday"
    assert labels.wanted(made, made.panels[0], made.specification[0]) == (
        "wanted of",
        "single pieces",
        "11.950 to 12.050",
    )
    rejects = finding("pinholes", chart="p", title="Pinhole rejects", unit="")
    assert labels.panel(rejects, rejects.panels[0]) == "Fraction, %"
    assert (
        labels.number(rejects, rejects.panels[0], 0.0224) + labels.unit(rejects, rejects.panels[0])
        == "2.240\u202f%"
    )
    made, case = with_case(BORE, "outside-limits", panel="spread")
    assert labels.case(made, case) == "varied more since about 04:10 on Monday"


def test_moments_near_the_data_are_named_by_weekday_only_while_that_is_plain() -> None:
    made, case = with_case(BORE, first=5)
    assert case_sentence(made, case, CLOCK).marked == "high since about 14:10 on 10 March"
    assert (
        case_sentence(made, case, replace(CLOCK, now=AS_OF - 24 * HOUR)).marked
        == "high since about 14:10 on Tuesday"
    )
