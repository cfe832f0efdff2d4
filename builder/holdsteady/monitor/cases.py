"""From signals to cases: what one disturbance would explain, whether it is answered, and when it began."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from holdsteady.arrays import Ints
from holdsteady.monitor.charted import Charted
from holdsteady.monitor.finding import Case, CaseState, Direction, Era, Panel, Signal
from holdsteady.monitor.gather import Gathered
from holdsteady.monitor.ids import case_form
from holdsteady.monitor.judge import order_of
from holdsteady.monitor.matching import answers
from holdsteady.project.settings import Characteristic
from holdsteady.spc.changepoint import likely_start

APART = 8  # points between two signals that may still be one case
GROSS = 5.0  # sigma: an outlier this far is worth a look even inside the baseline


@dataclass(frozen=True, slots=True, kw_only=True)
class Outside:
    """Single readings against the specification: how many per point lie outside, or None without one."""

    by_point: Ints | None
    readings: Ints


def group(signals: Sequence[Signal], era_of_point: Ints) -> list[list[Signal]]:
    """Gather signals of one era whose spans overlap or lie at most eight points apart, on any panel.

    Opposite directions on the location panel belong together only when they overlap. Returned by the
    earliest-fired signal, which stands first in each group.
    """
    ordered = sorted(signals, key=lambda s: (s.first_index, s.last_index))
    parent = list(range(len(ordered)))

    def root(index: int) -> int:
        while parent[index] != index:
            parent[index] = parent[parent[index]]
            index = parent[index]
        return index

    # Within a class, whatever is near enough is near the one that reaches furthest: one of each will do.
    reach: dict[tuple[int, str], int] = {}
    for index, signal in enumerate(ordered):
        era = int(era_of_point[signal.first_index])
        for kind in ("location-high", "location-low", "other"):
            other = reach.get((era, kind))
            if other is None:
                continue
            apart = signal.first_index - ordered[other].last_index
            if apart <= (0 if _opposed(signal, kind) else APART):
                parent[root(index)] = root(other)
        mine = (era, _class(signal))
        if mine not in reach or signal.last_index > ordered[reach[mine]].last_index:
            reach[mine] = index
    groups: dict[int, list[Signal]] = {}
    for index, signal in enumerate(ordered):
        groups.setdefault(root(index), []).append(signal)
    for members in groups.values():
        members.sort(key=order_of)
    return sorted(groups.values(), key=lambda g: (g[0].fired_index, g[0].id))


def cases(
    charted: Charted, signals: Sequence[Signal], panels: Mapping[str, Panel], outside: Outside
) -> tuple[tuple[Case, ...], tuple[Signal, ...]]:
    """Return the cases, by when they fired, and the signals with the case each belongs to."""
    found: list[Case] = []
    placed: list[Signal] = []
    for members in group(signals, charted.points.era):
        case = _case(charted, members, panels, outside)
        found.append(case)
        placed += [replace(signal, case=case.id) for signal in members]
    return tuple(found), tuple(sorted(placed, key=order_of))


def _case(charted: Charted, members: Sequence[Signal], panels: Mapping[str, Panel], outside: Outside) -> Case:
    points, settings = charted.points, charted.settings
    lead = members[0]
    first = min(s.first_index for s in members)
    last = max(s.last_index for s in members)
    aliases = tuple(case_form(s.id) for s in members)
    span = (_time(points, first), _time(points, last))
    reasons = tuple(
        entry
        for entry in charted.entries
        if answers(entry, name=charted.name, gauge=settings.gauge, aliases=aliases, span=span)
    )
    era = next(era for era in charted.eras if era.number == points.era[lead.fired_index])
    start = _start(panels[lead.panel], era, last, lead.direction)
    here = slice(first, last + 1)
    return Case(
        id=case_form(lead.id),
        aliases=aliases,
        state="answered" if reasons else _state(charted, members, panels),
        direction=lead.direction,
        panel=lead.panel,
        first_index=first,
        fired_index=lead.fired_index,
        last_index=last,
        ongoing=any(s.ongoing for s in members),
        signals=tuple(s.id for s in members),
        answered_by=reasons,
        start_index=start.index,
        start_low_index=start.low,
        start_high_index=start.high,
        shift=start.shift,
        shift_sigma=start.shift_sigma,
        outside_specification=None if outside.by_point is None else int(outside.by_point[here].sum()),
        readings=int(outside.readings[here].sum()),
        good_way=_good_way(lead, settings),
        gross=any(_gross(signal, panels[signal.panel]) for signal in members),
    )


@dataclass(frozen=True, slots=True)
class _Start:
    index: int | None = None
    low: int | None = None
    high: int | None = None
    shift: float | None = None
    shift_sigma: float | None = None


def _start(panel: Panel, era: Era, last: int, direction: Direction) -> _Start:
    """Return the likely start of a lasting step, where the data speak for one in the case's own direction."""
    if direction == "none":
        return _Start()
    where = era.start_index + np.flatnonzero(panel.judged[era.start_index : last + 1])
    if where.size == 0:
        return _Start()
    step = likely_start(panel.z[where])
    if (step.shift > 0) != (direction == "high"):
        return _Start()
    return _Start(
        index=int(where[step.start]),
        low=int(where[step.low]),
        high=int(where[step.high]),
        shift=step.shift * float(panel.sigma[where[-1]]),
        shift_sigma=step.shift,
    )


def _state(charted: Charted, members: Sequence[Signal], panels: Mapping[str, Panel]) -> CaseState:
    """Return the state of a case without an answer.

    Without times nothing is known to be over, so such a case stays open until it is answered.
    """
    context = charted.context
    last = max(s.last_index for s in members)
    last_time = _time(charted.points, last)
    if all(_inside_baseline(signal, panels[signal.panel]) for signal in members):
        return "open" if any(_gross(signal, panels[signal.panel]) for signal in members) else "baseline"
    if last_time is not None and not any(s.ongoing for s in members):
        if context.watch_from is not None and last_time < context.watch_from:
            return "historical"
        if last_time < context.as_of - context.attention:
            return "ended"
    return "open"


def _inside_baseline(signal: Signal, panel: Panel) -> bool:
    ends = [signal.first_index, signal.fired_index, signal.last_index]
    return bool(np.all(panel.in_baseline[ends]))


def _gross(signal: Signal, panel: Panel) -> bool:
    span = slice(signal.first_index, signal.last_index + 1)
    return bool(np.any(np.abs(panel.z[span][panel.judged[span]]) > GROSS))


def _good_way(lead: Signal, settings: Characteristic) -> bool:
    if settings.better is None or lead.panel == "spread":
        return False
    return (lead.direction == "high") == (settings.better == "higher") and lead.direction != "none"


def _class(signal: Signal) -> str:
    if signal.panel == "location" and signal.direction in ("high", "low"):
        return f"location-{signal.direction}"
    return "other"


def _opposed(signal: Signal, kind: str) -> bool:
    return {_class(signal), kind} == {"location-high", "location-low"}


def _time(points: Gathered, index: int) -> int | None:
    return None if points.time is None else int(points.time[index])
