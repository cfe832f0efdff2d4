"""Rules, signals and cases in plain loops."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from tests.naive_way_factors import binomial_medians, poisson_medians

if TYPE_CHECKING:
    from holdsteady.monitor.context import Context
    from holdsteady.project.logbook import LogbookEntry
    from holdsteady.project.settings import Characteristic

TIE = 1e-9  # sigmas
COUNTS = {
    "outside-limits": (1, 1), "two-of-three": (2, 3), "four-of-five": (4, 5), "run-one-side": (9, 9),
    "trend": (6, 6), "alternating": (14, 14), "hugging": (15, 15), "avoiding-centre": (8, 8),
}  # fmt: skip
ZONES = ("two-of-three", "four-of-five", "hugging", "avoiding-centre")


@dataclass(frozen=True, order=True)
class NaiveSignal:
    panel: str
    rule: str
    direction: str
    first: int
    fired: int
    last: int
    ongoing: bool


@dataclass
class NaiveCase:
    signals: list[NaiveSignal]
    first: int
    fired: int
    last: int
    ongoing: bool
    state: str = ""
    answered_by: list[int] = field(default_factory=list)  # lines of the logbook


@dataclass(frozen=True)
class Seen:
    """One judged point, as a rule sees it."""

    index: int
    value: float
    z: float
    sigma: float
    lower: float
    upper: float
    alike: bool  # sizes of the era up to here vary at most 2 : 1
    side: int  # +1 above the middle, -1 below, 0 on it
    expected: float  # count


def find_signals(points: Sequence[Any], panels: Sequence[Any], settings: Characteristic) -> list[NaiveSignal]:
    """Find every signal of every panel; fills `met` of the panels on the way."""
    signals = []
    for panel in panels:
        for name, needed, of in rules_of(panel.name, settings):
            panel.met[name] = [0] * len(points)
            for stretch in sorted({point.stretch for point in points}):
                seen = [
                    see(points, panel, i, settings)
                    for i, p in enumerate(points)
                    if p.stretch == stretch and panel.judged[i]
                ]
                newest = points[-1].stretch == stretch
                signals += stretches(panel, name, needed, of, seen, newest=newest)
    return sorted(signals)


def rules_of(panel: str, settings: Characteristic) -> list[tuple[str, int, int]]:
    counted = panel == "single"
    if settings.rules is None:
        names = ["outside-limits"] if panel != "location" else ["outside-limits", "run-one-side"]
        chosen = [(name, *COUNTS[name]) for name in names]
    else:
        chosen = []
        for rule in settings.rules:
            points, of = COUNTS[rule.rule]
            if rule.points is not None:
                points, of = rule.points, of if rule.rule in ("two-of-three", "four-of-five") else rule.points
            chosen.append((rule.rule, points, rule.of if rule.of is not None else of))
    if panel == "spread":
        chosen = [rule for rule in chosen if rule[0] == "outside-limits"]
        if settings.chart == "individuals" and settings.chart_options.get("moving_range_signals") is not True:
            chosen = []
    if counted:
        chosen = [rule for rule in chosen if rule[0] not in ZONES]
    return chosen


def see(points: Sequence[Any], panel: Any, index: int, settings: Characteristic) -> Seen:
    point, drawn, value = points[index], panel.lines[index], panel.value[index]
    z = (value - drawn.centre) / drawn.sigma
    side = 1 if z > TIE else -1 if z < -TIE else 0
    expected = math.inf
    if panel.name == "single":
        if settings.chart in ("p", "np"):
            p = drawn.centre if settings.chart == "p" else drawn.centre / point.size
            expected = min(point.size * p, point.size * (1 - p))
            low, high = binomial_medians(int(point.size), p)
        else:
            expected = drawn.centre * (point.size if settings.chart == "u" else 1)
            low, high = poisson_medians(expected)
        side = 0 if low == high == point.count else 1 if point.count >= high else -1
    sizes = [
        float(len(p.values)) if math.isnan(p.size) else p.size
        for p in points[: index + 1]
        if p.era == point.era
    ]
    alike = max(sizes) <= 2 * min(sizes)
    return Seen(index, value, z, drawn.sigma, drawn.lower, drawn.upper, alike, side, expected)


def stretches(
    panel: Any, name: str, needed: int, of: int, seen: list[Seen], *, newest: bool
) -> list[NaiveSignal]:
    """Apply one rule to one unbroken stretch of judged points."""
    signals = []
    for direction, word in ((1, "high"), (-1, "low"), (0, "none")):
        first = fired = last = -1  # positions in `seen`; -1 while nothing is met
        for position in [*range(len(seen)), None]:
            start = None if position is None else met_since(name, direction, needed, of, seen, position)
            if start is not None and position is not None:
                panel.met[name][seen[position].index] = direction or 2
                if fired < 0:
                    first, fired = start, position
                last = position
            elif fired >= 0:
                ongoing = newest and last == len(seen) - 1
                ends = seen[first].index, seen[fired].index, seen[last].index
                signals.append(NaiveSignal(panel.name, name, word, *ends, ongoing))
                fired = -1
    return signals


def met_since(name: str, direction: int, needed: int, of: int, seen: list[Seen], position: int) -> int | None:
    """Return the position of the first point that counts if the rule is met at a position, else None."""
    if name in ("trend", "alternating"):
        return steps_since(name, direction, needed, seen, position)
    counts = counting(name, direction)
    if counts is None or not counts(seen[position]):
        return None
    window = [i for i in range(max(0, position - of + 1), position + 1) if counts(seen[i])]
    return window[0] if len(window) >= needed else None


def counting(name: str, direction: int) -> Callable[[Seen], bool] | None:  # noqa: PLR0911
    """Say whether a point counts towards a rule in a direction; None where the rule has no such direction."""
    if name == "hugging":
        return (lambda s: abs(s.z) <= 1 + TIE) if direction == 0 else None
    if name == "avoiding-centre":
        return (lambda s: abs(s.z) > 1 + TIE) if direction == 0 else None
    if direction == 0:
        return None
    if name == "outside-limits":
        if direction > 0:
            return lambda s: s.value > s.upper + TIE * s.sigma
        return lambda s: s.value < s.lower - TIE * s.sigma
    if name == "run-one-side":
        return lambda s: s.side == direction and s.expected >= 5
    beyond = 2 if name == "two-of-three" else 1
    return lambda s: direction * s.z > beyond + TIE


def steps_since(name: str, direction: int, needed: int, seen: list[Seen], position: int) -> int | None:
    if (name == "trend") == (direction == 0) or position < needed - 1:
        return None
    window = seen[position - needed + 1 : position + 1]
    if not all(s.alike for s in window):
        return None
    steps = []
    for before, after in itertools.pairwise(window):
        step = after.value - before.value
        steps.append(0 if abs(step) <= TIE * after.sigma else 1 if step > 0 else -1)
    if name == "trend":
        return position - needed + 1 if all(step == direction for step in steps) else None
    turns = all(a * b == -1 for a, b in itertools.pairwise(steps))
    return position - needed + 1 if turns and steps[0] != 0 else None


# ------------------------------------------------------------------------------------------------ cases


def find_cases(
    points: Sequence[Any],
    panels: Sequence[Any],
    signals: list[NaiveSignal],
    name: str,
    settings: Characteristic,
    context: Context,
) -> list[NaiveCase]:
    """Join signals that one disturbance would explain, and say how each case stands."""
    groups: list[list[NaiveSignal]] = []
    for signal in signals:
        near = [group for group in groups if any(belong(points, signal, other) for other in group)]
        groups = [group for group in groups if group not in near]
        groups.append([signal, *(other for group in near for other in group)])
    cases = []
    for group in groups:
        case = NaiveCase(
            signals=sorted(group),
            first=min(s.first for s in group),
            fired=min(s.fired for s in group),
            last=max(s.last for s in group),
            ongoing=any(s.ongoing for s in group),
        )
        case.answered_by = [one.line for one in context.logbook if answers(one, points, case, name, settings)]
        case.state = case_state(points, panels, case, context)
        cases.append(case)
    return cases


def belong(points: Sequence[Any], a: NaiveSignal, b: NaiveSignal) -> bool:
    if points[a.fired].era != points[b.fired].era:
        return False
    overlap = a.first <= b.last and b.first <= a.last
    location = a.panel == b.panel == "location"
    if location and {a.direction, b.direction} == {"high", "low"}:
        return overlap
    return overlap or 0 < b.first - a.last <= 8 or 0 < a.first - b.last <= 8


def answers(
    entry: LogbookEntry, points: Sequence[Any], case: NaiveCase, name: str, settings: Characteristic
) -> bool:
    """Say whether a line that names no case answers this one."""
    if entry.kind not in ("cause", "measurement-fault") or entry.case:
        return False
    if entry.characteristic != name and (not entry.gauge or entry.gauge != settings.gauge):
        return False
    first, last = points[case.first].time, points[case.last].time
    if first is None or last is None:
        return False
    if entry.until is None:
        return bool(first <= entry.when <= last)
    return bool(entry.when <= last and entry.until > first)


def case_state(points: Sequence[Any], panels: Sequence[Any], case: NaiveCase, context: Context) -> str:
    if case.answered_by:
        return "answered"
    drawn = {panel.name: panel for panel in panels}
    if all(drawn[s.panel].in_baseline[i] for s in case.signals for i in (s.first, s.fired, s.last)):
        return "open" if gross(drawn, case) else "baseline"
    last = points[case.last].time
    if context.watch_from is not None and not case.ongoing and last is not None and last < context.watch_from:
        return "historical"
    if case.ongoing or last is None or last >= context.as_of - context.attention:
        return "open"
    return "ended"


def gross(drawn: dict[str, Any], case: NaiveCase) -> bool:
    for signal in case.signals:
        panel = drawn[signal.panel]
        for index in range(signal.first, signal.last + 1):
            if panel.judged[index]:
                line = panel.lines[index]
                if abs(panel.value[index] - line.centre) > (5 + TIE) * line.sigma:
                    return True
    return False
