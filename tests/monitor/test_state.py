"""The state of a characteristic, its flags, and the isolation of what cannot be computed."""

from __future__ import annotations

import datetime as dt
from typing import Any

import numpy as np
import pytest
from tests.made_readings import HOUR, START, adopted, context, entry, find

from holdsteady.monitor.ids import signal_id, slugs
from holdsteady.times import DAY

NOISE = np.random.default_rng(5).normal(size=60).tolist()
GIVEN: dict[str, Any] = {"limits": [{"centre": 0.0, "sigma": 1.0}]}


def test_steady_and_its_flag() -> None:
    finding = find(NOISE, given={"rules": [{"rule": "outside-limits"}]})
    assert (finding.state, finding.flags) == ("steady", ("provisional-limits",))


def test_silent_after_more_than_two_cadences() -> None:
    last = START + 60 * HOUR
    for hours, state in ((16, "steady"), (17, "silent")):
        made = context(last + hours * HOUR)
        assert find(NOISE, given={**GIVEN, "cadence": "8h"}, made=made).state == state
    assert find(NOISE, given=GIVEN, made=context(last + 900 * DAY)).state == "steady"


def test_silence_is_counted_in_calendar_time() -> None:
    friday = START + (24 + 15) * HOUR  # 2026-01-02 15:00
    time = [friday - (59 - i) * 600_000_000 for i in range(60)]
    given = {**GIVEN, "cadence": "8h", "calendar": "mon-fri 06:00-22:00"}
    monday = START + 4 * DAY
    assert (
        find(NOISE, given=given, time=time, made=context(monday + 15 * HOUR)).state == "steady"
    )  # 7 h + 9 h
    assert find(NOISE, given=given, time=time, made=context(monday + 16 * HOUR)).state == "silent"


def test_signalling_comes_before_silent() -> None:
    assert find([*NOISE, 9.0], given={**GIVEN, "cadence": "1h"}).state == "signalling"


def test_outside_specification_within_the_attention_span() -> None:
    given = {**GIVEN, "specification": [{"lower": -2.0}], "rules": [{"rule": "run-one-side"}]}
    values = [*NOISE[:10], -2.5, *NOISE[10:20]]
    soon = context(START + 24 * HOUR)
    assert find(values, given=given, made=soon).flags == ("outside-specification",)
    assert find(values, given=given).flags == ()
    fault = entry(START + 11 * HOUR, kind="measurement-fault", exclude=True)
    assert find(values, given=given, made=context(START + 24 * HOUR, logbook=[fault])).flags == ()


def test_a_specification_holds_from_its_day_on() -> None:
    dated = [{"upper": 5.0}, {"upper": 1.0, "from": dt.datetime.fromisoformat("2026-01-01T06:00:00")}]
    finding = find([2.0] * 10, given={**GIVEN, "specification": dated, "rules": [{"rule": "trend"}]})
    assert finding.summaries[0].outside_observed == 5


def test_limits_are_doubted_when_the_level_since_differs() -> None:
    rng = np.random.default_rng(8)
    values = [*rng.normal(size=25), *rng.normal(1.0, 1.0, size=40)]
    lines = [adopted(START + 26 * HOUR, 0.0, 1.0), adopted(START + 26 * HOUR, 0.0, 1.0, panel="spread")]
    assert "doubtful-limits" in find(values, made=context(register=lines)).flags
    steady = rng.normal(size=65).tolist()
    assert "doubtful-limits" not in find(steady, made=context(register=lines)).flags


def test_a_coarse_gauge_or_a_faulty_one_is_doubted() -> None:
    coarse = [round(v / 2) * 2.0 for v in NOISE]
    assert "doubtful-gauge" in find(coarse, given={"rules": [{"rule": "trend"}]}).flags
    fault = entry(START + 50 * HOUR, kind="measurement-fault", characteristic="", gauge="CMM-2")
    given = {**GIVEN, "gauge": "CMM-2"}
    assert (
        "doubtful-gauge" in find(NOISE, given=given, made=context(START + 61 * HOUR, logbook=[fault])).flags
    )
    assert "doubtful-gauge" not in find(NOISE, given=given, made=context(logbook=[fault])).flags


def test_moving_ranges_signal_only_when_asked() -> None:
    values = [0.0, 0.5] * 10 + [3.0, -2.9, 3.0]
    assert {s.panel for s in find(values, given=GIVEN).signals} <= {"location"}
    asked = find(values, given={**GIVEN, "chart_options": {"moving_range_signals": True}})
    assert "spread" in {s.panel for s in asked.signals}
    # 3 sqrt 2 sigma = 4.243; the customary limit d2 + 3 d3 = 3.686 sigma (definitions)
    assert asked.limits[1].upper == pytest.approx(3 * np.sqrt(2))
    customary = find(values, given={**GIVEN, "chart_options": {"moving_range_limit": "three-sigma"}})
    assert customary.limits[1].upper == pytest.approx(3.686, abs=5e-4)


def test_runs_of_counts_are_refused_below_an_expected_count_of_five() -> None:
    rules = [{"rule": "outside-limits"}, {"rule": "run-one-side"}]
    few = find([4] * 12, given={"count": "c", "limits": [{"centre": 3.0}], "rules": rules})
    assert few.signals == ()
    assert few.panels[0].refused_rules == {"run-one-side": "the expected count is below 5"}
    assert [rule.name for rule in few.panels[0].rules] == ["outside-limits"]
    nearly_all = {"count": "c", "size": "n", "limits": [{"centre": 0.995}], "rules": rules}
    assert "run-one-side" in find([200] * 12, given=nearly_all, size=[200] * 12).panels[0].refused_rules
    many = find([9] * 12, given={"count": "c", "limits": [{"centre": 7.0}], "rules": rules})
    assert [s.rule for s in many.signals] == ["run-one-side"]


def test_zone_rules_do_not_apply_to_spread_panels() -> None:
    finding = find([[1, 2], [2, 1]] * 10, given={"values": ["a", "b"], "rules": [{"rule": "two-of-three"}]})
    assert list(finding.panels[1].refused_rules) == ["two-of-three"]


def test_overdispersion_and_the_ratio_of_sigmas_are_read_out() -> None:
    rng = np.random.default_rng(3)
    binomial = rng.binomial(500, 0.05, size=60).tolist()
    sigma_z = find(binomial, given={"count": "c", "size": "n"}, size=[500] * 60).overdispersion
    assert sigma_z == pytest.approx(1.0, abs=0.25)
    drifting = np.cumsum(rng.normal(size=60)).tolist()
    ratio = find(drifting, given={"rules": [{"rule": "trend"}], "baseline": {"points": 60}}).sigma_ratio
    assert ratio is not None
    assert ratio > 1.5


def test_ids_depend_on_nothing_but_their_own() -> None:
    one = signal_id("bore", "location", "run-one-side", "low", "1767225600000000", 0)
    assert one == signal_id("bore", "location", "run-one-side", "low", "1767225600000000", 0)
    assert (
        len({signal_id("bore", "location", "run-one-side", "low", str(i), 0) for i in range(20_000)})
        == 20_000
    )
    assert one.startswith("s-")
    assert len(one) == 10


def test_slugs_are_safe_and_unique() -> None:
    names = ["bore[press=2]", "Bore", "bore", "con", "düse[x=ä]", "a[b=c d]", "a[b=c-d]", "x" * 200, "[]"]
    got = slugs(names)
    assert got[0] == "bore-press-2"
    assert len({slug.lower() for slug in got}) == len(names)
    assert all(len(slug) <= 80 and slug.isascii() and slug != "con" for slug in got)
    assert slugs(["bore"]) == ["bore"]
    assert slugs(names)[1] == slugs(["bore", "Bore"])[1]


def test_a_measurement_fault_tells_nothing_of_the_gauges_step() -> None:
    values = [round(v, 1) for v in NOISE]
    values[30] = 99.987
    assert find(values).resolution == pytest.approx(0.001)
    fault = entry(START + 31 * HOUR, kind="measurement-fault", exclude=True)
    assert find(values, made=context(logbook=[fault])).resolution == pytest.approx(0.1)


def test_doubts_say_what_differs() -> None:
    rng = np.random.default_rng(8)
    values = [*rng.normal(size=25), *rng.normal(1.0, 1.0, size=40)]
    given = {"rules": [{"rule": "trend"}]}
    assert find(values, given=given).doubts == ("the level differs from the baseline's",)
    assert find(values[:40], given=given).doubts == ()


def test_dispersion_is_shown_where_limits_are_given_too() -> None:
    counts = np.random.default_rng(3).binomial(500, 0.05, size=60).tolist()
    given = {"count": "c", "size": "n", "limits": [{"centre": 0.05}]}
    assert find(counts, given=given, size=[500] * 60).overdispersion == pytest.approx(1.0, abs=0.25)


def test_a_full_baseline_without_variation_is_not_computed_and_says_what_to_do() -> None:
    finding = find([0] * 40 + [20] * 20, given={"count": "c", "size": "n"}, size=[20] * 60)
    assert (finding.state, finding.reason) == ("not-computed", "no events in the baseline")
    assert finding.remedy == "Give `limits`, or a `baseline` that holds some variation."
    assert finding.points is not None
    assert find([5.0] * 40 + [9.0] * 20).state == "not-computed"
    assert find([5.0] * 20).state == "gathering"  # later points may still vary


def test_variation_that_is_but_rounding_is_none() -> None:
    assert find([0.3, 0.1 + 0.2] * 20).state == "not-computed"


def test_limits_beyond_what_can_be_are_limits_all_the_same() -> None:
    finding = find([1, 0, 2, 1] * 10, given={"count": "c", "size": "n"}, size=[2] * 40)
    assert finding.state == "steady"
    assert (finding.limits[0].lower, finding.limits[0].upper) == (None, None)


def test_slugs_stay_apart_whatever_the_names() -> None:
    names = ["a-b", "a_b"]
    names.append(slugs(names)[0])
    assert len(set(slugs(names))) == 3
