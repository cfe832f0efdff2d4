"""The whole way from readings to cases once more, in plain loops: clear rather than fast.

It is written from the definitions of the charts and rules alone and shares no code with what it checks, but
for the types that go in. Points are numbered from 0. A number that is not there is NaN.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace

from tests.naive_way_limits import Basis, Line, learn, line, median_only
from tests.naive_way_points import NaivePoint, gather, mark, moment
from tests.naive_way_signals import NaiveCase, NaiveSignal, find_cases, find_signals

from holdsteady.intake.readings import Readings
from holdsteady.monitor.context import Context
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.register import RegisterLine
from holdsteady.project.settings import Characteristic

NAN = math.nan
SIZED = ("p", "np", "u")
COUNTED = ("p", "np", "u", "c")


@dataclass
class NaivePanel:
    name: str
    value: list[float]
    lines: list[Line]
    in_baseline: list[bool]
    judged: list[bool]
    kind: list[str]
    met: dict[str, list[int]] = field(default_factory=dict)


@dataclass
class NaiveWay:
    points: list[NaivePoint]
    panels: list[NaivePanel]
    signals: list[NaiveSignal]
    cases: list[NaiveCase]


def whole_way(readings: Readings, settings: Characteristic, context: Context) -> NaiveWay:
    """Go the whole way for one characteristic whose `chart` is set."""
    concerning = [one for one in context.logbook if concerns(one, readings, settings)]
    changes = sorted((one for one in concerning if one.kind == "process-change"), key=lambda one: one.when)
    if readings.time is None:
        changes = []
    points = gather(readings, settings, context, [one.when for one in changes])
    mark(points, concerning)
    panels = judge(points, readings, settings, context, changes)
    signals = find_signals(points, panels, settings)
    cases = find_cases(points, panels, signals, readings.name, settings, context)
    return NaiveWay(points, panels, signals, cases)


def concerns(entry: LogbookEntry, readings: Readings, settings: Characteristic) -> bool:
    if entry.characteristic in ("*", readings.name, readings.family):
        return True
    return entry.gauge != "" and entry.gauge == settings.gauge


def judge(
    points: list[NaivePoint],
    readings: Readings,
    settings: Characteristic,
    context: Context,
    changes: list[LogbookEntry],
) -> list[NaivePanel]:
    """Draw each panel: values, the limits in force at each point, and whether the point is judged."""
    chart = settings.chart
    assert chart is not None
    names = ["single"] if chart in COUNTED else ["location", "spread"]
    values = {name: [statistic(points, index, chart, name) for index in range(len(points))] for name in names}
    panels = {}
    for name in names:
        empty = [Line() for _ in points]
        panels[name] = NaivePanel(
            name, values[name], empty, [False] * len(points), [False] * len(points), [""] * len(points)
        )
    before: dict[str, Basis] = {}
    for era in sorted({point.era for point in points}):
        inside = [index for index, point in enumerate(points) if point.era == era]
        change = changes[era - 1] if era else None
        own = era_limits(
            points, inside, values, settings, context, change.action if change else "learn", before
        )
        lines = [one for one in context.register if serves(one, readings.name, settings, change)]
        show_adopted_baseline(points, inside, lines, settings, context)
        last: dict[str, Basis] = {}
        for name in names:
            for index in inside:
                basis = in_force(points[index], name, settings, context, lines, own[name])
                fill(panels[name], points, index, basis, settings)
                last[name] = basis
        # An era without limits of its own leaves what was known before it.
        before = {name: one if one.full else before.get(name, one) for name, one in last.items()}
    return list(panels.values())


def statistic(points: list[NaivePoint], index: int, chart: str, panel: str) -> float:  # noqa: PLR0911
    point = points[index]
    x = point.values
    if chart == "individuals":
        return x[0] if panel == "location" else moving_range(points, index)
    if chart in ("p", "u"):
        return point.count / point.size
    if chart in ("np", "c"):
        return point.count
    if panel == "location":
        return middle(x) if chart == "median-range" else math.fsum(x) / len(x)
    if len(x) == 1:
        return NAN
    if chart == "mean-sd":
        mean = math.fsum(x) / len(x)
        return math.sqrt(math.fsum((v - mean) ** 2 for v in x) / (len(x) - 1))
    return max(x) - min(x)


def moving_range(points: list[NaivePoint], index: int) -> float:
    if index == 0:
        return NAN
    point, before = points[index], points[index - 1]
    if point.stretch != before.stretch or point.faulty or before.faulty:
        return NAN
    return abs(point.values[0] - before.values[0])


def middle(values: list[float]) -> float:
    ordered = sorted(values)
    half = len(ordered) // 2
    if len(ordered) % 2:
        return ordered[half]
    return (ordered[half - 1] + ordered[half]) / 2


def era_limits(
    points: list[NaivePoint],
    inside: list[int],
    values: dict[str, list[float]],
    settings: Characteristic,
    context: Context,
    action: str,
    before: dict[str, Basis],
) -> dict[str, Basis]:
    """Return the limits an era brings by itself: learned from its baseline, or kept from the era before."""
    for index in baseline(points, inside, settings, context):
        points[index].baseline = True
    chosen = [index for index in inside if points[index].baseline]
    kept = all(basis.full for basis in before.values()) and bool(before)
    if action == "keep-limits" and kept:
        for index in chosen:
            points[index].baseline = False
        return {name: basis.as_kind("provisional") for name, basis in before.items()}
    usable = [index for index in inside if points[index].usable]
    learnt = {}
    if len(chosen) >= 8:
        learnt = learn(points, chosen, values, settings, before if action == "keep-sigma" and kept else {})
    if learnt and all(basis.full for basis in learnt.values()):
        return learnt
    bare = median_only(usable, values)
    if learnt:  # the baseline is full, only it does not vary: its centre stays
        first = next(iter(values))
        bare[first] = replace(bare[first], centre=learnt[first].centre)
    return bare


def baseline(
    points: list[NaivePoint], inside: list[int], settings: Characteristic, context: Context
) -> list[int]:
    usable = [index for index in inside if points[index].usable]
    begin, end = settings.baseline.from_, settings.baseline.to
    if begin is not None and end is not None and points[inside[0]].time is not None:
        start, stop = moment(begin, context), moment(end, context)
        covered = [index for index, point in enumerate(points) if start <= (point.time or 0) < stop]
        if covered and covered[0] in inside:
            return [index for index in usable if index in covered]
    return usable[: settings.baseline.points]


def serves(entry: RegisterLine, name: str, settings: Characteristic, change: LogbookEntry | None) -> bool:
    """Say whether an adopted set is for this characteristic, chart and era."""
    begin = change.when if change else None
    return entry.characteristic == name and entry.chart == settings.chart and entry.era_from == begin


def show_adopted_baseline(
    points: list[NaivePoint],
    inside: list[int],
    lines: list[RegisterLine],
    settings: Characteristic,
    context: Context,
) -> None:
    """Where an era has adopted limits, its baseline is the points that set the latest of them.

    Sets that given limits cover from their first day on count for nothing; one still to come counts.
    """
    latest = None
    last = points[inside[-1]].time or 0
    for entry in lines:
        names = [one.in_force_from for one in lines if one.in_force_from > entry.in_force_from]
        until = min([*names, *given_from(settings, context)], default=last + 1)
        judges = any(entry.in_force_from <= (points[i].time or 0) < until for i in inside)
        if not judges and entry.in_force_from <= last:
            continue
        if latest is None or entry.in_force_from > latest.in_force_from:
            latest = entry
    if latest is None or latest.baseline_from is None or latest.baseline_to is None:
        return
    for index in inside:
        point = points[index]
        point.baseline = point.usable and latest.baseline_from <= (point.time or 0) <= latest.baseline_to


def given_from(settings: Characteristic, context: Context) -> list[int]:
    return [0 if one.from_ is None else moment(one.from_, context) for one in settings.limits]


def in_force(
    point: NaivePoint,
    panel: str,
    settings: Characteristic,
    context: Context,
    lines: list[RegisterLine],
    own: Basis,
) -> Basis:
    """Return what a point is judged by: given limits, else the latest adopted ones, else its era's own."""
    given = None
    for limits in settings.limits:
        if limits.from_ is None or (point.time is not None and moment(limits.from_, context) <= point.time):
            given = limits
    if given is not None:
        centre = given.centre if panel != "spread" else None
        return Basis(kind="given", centre=centre, sigma=given.sigma, width=settings.width, full=True)
    adopted = None
    for entry in lines:
        if entry.panel == panel and point.time is not None and entry.in_force_from <= point.time:
            adopted = entry
    if adopted is not None:
        centre = adopted.centre if panel != "spread" else None
        return Basis(kind="adopted", centre=centre, sigma=adopted.sigma, width=adopted.width, full=True)
    return own


def fill(
    panel: NaivePanel, points: list[NaivePoint], index: int, basis: Basis, settings: Characteristic
) -> None:
    point, value = points[index], panel.value[index]
    panel.kind[index] = basis.kind
    panel.lines[index] = line(panel.name, basis, len(point.values), point.size, settings)
    panel.judged[index] = (
        not (math.isnan(value) or point.faulty or point.open) and panel.lines[index].sigma > 0
    )
    inside = point.baseline and basis.kind != "given"
    if panel.name == "spread" and settings.chart == "individuals":
        inside = inside and index > 0 and points[index - 1].baseline
    panel.in_baseline[index] = inside and not math.isnan(value)
