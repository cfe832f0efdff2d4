"""Readings that are known only by a limit: drawn there, outside the estimation, judged where that is sure."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from tests.made_readings import context, readings, settings

from holdsteady.monitor.finding import Finding
from holdsteady.monitor.monitor import monitor

RNG = np.random.default_rng(5)
QUIET = (10 + RNG.normal(size=40)).round(2).tolist()
GIVEN = {"limits": ({"centre": 10.0, "sigma": 1.0},)}


def find(cells: Any, side: Any, **given: Any) -> Finding:
    """Compute cells of which some are limits: `side` is -1 for `<`, 1 for `>`, 0 for a value."""
    table = np.asarray(side, dtype=np.int8).reshape(len(cells), -1)
    made = readings(cells)
    made = type(made)(**{name: getattr(made, name) for name in made.__slots__ if name != "side"}, side=table)
    return monitor(made, settings(censored="at-limit", **given), context())


def met(finding: Finding, rule: str = "outside-limits") -> list[int]:
    return np.flatnonzero(finding.panels[0].met[rule]).tolist()


def test_limits_come_from_the_values_alone() -> None:
    values, side = list(QUIET), [0] * 40
    for index in (3, 4, 17):
        values[index], side[index] = 7.5, -1
    finding = find(values, side)
    # By plain loops over the definition: the first 25 values, and the ranges between neighbours among them.
    used = [i for i in range(40) if side[i] == 0][:25]
    ranges = [abs(values[i] - values[i - 1]) for i in used if i - 1 in used]
    row = next(row for row in finding.limits if row.panel == "location")
    assert row.centre == pytest.approx(sum(values[i] for i in used) / 25, rel=1e-12)
    assert row.sigma == pytest.approx(sum(ranges) / len(ranges) * math.sqrt(math.pi) / 2, rel=1e-12)
    assert row.points == 25
    assert np.flatnonzero(finding.panels[0].in_baseline).tolist() == used
    assert finding.at_limit == 3
    assert finding.points is not None
    assert finding.points.side.tolist() == side


def test_they_are_drawn_at_the_limit_and_have_no_moving_range() -> None:
    finding = find([10.0, 7.5, 10.2, 10.1], [0, -1, 0, 0], **GIVEN)
    assert finding.panels[0].value.tolist() == [10.0, 7.5, 10.2, 10.1]
    assert np.isnan(finding.panels[1].value).tolist() == [True, True, True, False]


def test_a_level_and_a_deviation_leave_them_out() -> None:
    finding = find(
        [10.0, 11.0, 5.0, 12.0], [0, 0, -1, 0], specification=({"lower": 6, "upper": 11.5},), **GIVEN
    )
    (summary,) = finding.summaries
    assert (summary.n, summary.censored, summary.mean, summary.sigma_total) == (3, 1, 11.0, 1.0)
    assert summary.outside_observed == 2  # 12.0, and the one that is known to lie below 5


@pytest.mark.parametrize(
    ("value", "side", "outside"),
    [(5.0, -1, 1), (7.0, -1, 0), (13.0, -1, 0), (13.0, 1, 1), (5.0, 1, 0), (5.0, 0, 1), (13.0, 0, 1)],
)
def test_outside_specification_is_said_only_where_it_is_known(value: float, side: int, outside: int) -> None:
    finding = find([10.0, value], [0, side], specification=({"lower": 6, "upper": 12},), **GIVEN)
    assert finding.summaries[0].outside_observed == outside


@pytest.mark.parametrize(
    ("value", "side", "signals"),
    [(5.0, -1, True), (15.0, 1, True), (15.0, -1, False), (5.0, 1, False), (15.0, 0, True)],
)
def test_a_signal_is_said_only_where_it_is_known(value: float, side: int, signals: bool) -> None:  # noqa: FBT001
    finding = find([*[10.0] * 10, value], [*[0] * 10, side], **GIVEN)
    assert met(finding) == ([10] if signals else [])
    assert bool(finding.panels[0].judged[10]) is signals


def test_a_run_goes_on_over_one_that_tells_no_side() -> None:
    values = [10.0, *[9.5] * 5, 11.0, *[9.5] * 4]
    real, below = [0] * 11, [*[0] * 6, -1, *[0] * 4]
    assert met(find(values, real, **GIVEN), "run-one-side") == []
    assert met(find(values, below, **GIVEN), "run-one-side") == [10]


def test_rules_that_need_the_value_itself_leave_them_out_and_say_so() -> None:
    values = [10.0, 10.1, 10.2, 10.3, 10.4, 10.5, 10.6]
    rising = find(values, [0] * 7, rules=({"rule": "trend"},), **GIVEN)
    assert met(rising, "trend") == [5, 6]
    finding = find(values, [0, 0, 0, 1, 0, 0, 0], rules=({"rule": "trend"}, {"rule": "hugging"}), **GIVEN)
    said = "it needs the value itself; 1 known only by a limit left out"
    assert finding.panels[0].refused_rules == {"trend": said, "hugging": said}
    assert met(finding, "trend") == [6]  # six of the seven rise


def test_the_step_of_the_gauge_is_told_by_values_alone() -> None:
    finding = find(
        [1.0, 2.0, 3.0, 4.0, 2.0, 2.05], [0, 0, 0, 0, 0, -1], limits=({"centre": 2.0, "sigma": 1.0},)
    )
    assert finding.resolution == 1.0


def test_a_subgroup_with_one_is_drawn_and_sets_no_limits() -> None:
    rng = np.random.default_rng(6)
    values = (10 + rng.normal(size=(30, 4))).round(2)
    side = np.zeros((30, 4), dtype=np.int8)
    values[2, 1], side[2, 1] = 8.0, -1
    values[5, :2], side[5, :2] = [8.0, 13.0], [-1, 1]
    finding = find(values, side, values=("a", "b", "c", "d"))
    assert finding.points is not None
    assert np.flatnonzero(finding.points.side).tolist() == [2, 5]
    used = [i for i in range(30) if i not in (2, 5)][:25]
    row = next(row for row in finding.limits if row.panel == "location")
    assert row.centre == pytest.approx(np.mean([values[i].mean() for i in used]), rel=1e-12)
    assert not finding.panels[1].judged[[2, 5]].any()
    assert finding.panels[0].value[2] == pytest.approx(values[2].mean())
    assert finding.at_limit == 3
