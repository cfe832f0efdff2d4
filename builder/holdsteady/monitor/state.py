"""The state of a characteristic in a word, and the flags beside it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.monitor.charted import Charted
from holdsteady.monitor.context import Context
from holdsteady.monitor.finding import Case, LimitsInForce, Panel, State
from holdsteady.monitor.gather import Gathered
from holdsteady.monitor.limits import FEWEST
from holdsteady.monitor.matching import touches
from holdsteady.project.calendar import parse_calendar
from holdsteady.project.settings import Characteristic, Specification
from holdsteady.spc.doubt import compare
from holdsteady.times import to_microseconds

_SILENT_AFTER = 2  # cadences
_ZERO_RANGES = 0.25


def state(
    cases: Sequence[Case],
    limits: Sequence[LimitsInForce],
    points: Gathered,
    silent_since: int | None,
    context: Context,
) -> State:
    """Return the first state that applies."""
    if any(case.state == "open" for case in cases):
        return "signalling"
    if silent_since is not None:
        return "silent"
    newest = [row for row in limits if row.start_index < points.points <= row.stop_index]
    if not any(row.lower is not None or row.upper is not None or row.varies for row in newest):
        return "gathering"
    if any(case.state == "answered" and _recent(case, points, context) for case in cases):
        return "answered"
    return "steady"


def silent_since(settings: Characteristic, last_time: int | None, context: Context) -> int | None:
    """Return the last reading's time where more than two cadences of calendar time have passed since."""
    if settings.cadence is None or last_time is None:
        return None
    passed = parse_calendar(settings.calendar).elapsed(last_time, context.as_of, context.zone)
    return last_time if passed > _SILENT_AFTER * settings.cadence.microseconds else None


def outside_specification(
    single: Floats, time: Ints | None, specification: Sequence[Specification], context: Context
) -> Bools | None:
    """Return which single readings lie outside the specification of their day (V,); None without one."""
    if not specification:
        return None
    outside = np.zeros(single.size, dtype=np.bool_)
    starts = [None if s.from_ is None else to_microseconds(s.from_, context.zone) for s in specification]
    for index, wanted in enumerate(specification):
        here = np.ones(single.size, dtype=np.bool_)
        if time is not None:
            if (start := starts[index]) is not None:
                here &= time >= start
            if index + 1 < len(starts) and (stop := starts[index + 1]) is not None:
                here &= time < stop
        if wanted.lower is not None:
            outside |= here & (single < wanted.lower)
        if wanted.upper is not None:
            outside |= here & (single > wanted.upper)
    return outside


def flags(
    charted: Charted,
    panels: Sequence[Panel],
    limits: Sequence[LimitsInForce],
    outside: Bools | None,
    resolution: float | None,
) -> tuple[str, ...]:
    """Return what stands beside the state, in the order of the contract.

    `outside` (V,) says which single readings lie outside the specification, `resolution` is their step.
    """
    points = charted.points
    newest = [row for row in limits if row.start_index < points.points <= row.stop_index]
    found = []
    if outside is not None:
        recent = _within_attention(points.single_time, outside, charted.context)
        if np.any(outside & charted.real[points.point_of] & recent):
            found.append("outside-specification")
    if newest and all(row.kind == "provisional" for row in newest):
        found.append("provisional-limits")
    if newest and _limits_doubtful(charted, panels[0], newest[0]):
        found.append("doubtful-limits")
    if newest and _gauge_doubtful(charted, panels, newest, resolution):
        found.append("doubtful-gauge")
    return tuple(found)


def _within_attention(time: Ints | None, like: Bools, context: Context) -> Bools:
    if time is None:
        return np.ones(like.size, dtype=np.bool_)
    return np.asarray(time > context.as_of - context.attention)


def _limits_doubtful(charted: Charted, panel: Panel, row: LimitsInForce) -> bool:
    """Whether the points since the limits came into force differ from those they were estimated from."""
    mine = (charted.points.era == row.era) & panel.judged & ~charted.excluded
    baseline = mine & panel.in_baseline
    since = mine & ~panel.in_baseline
    since[: row.start_index] = False
    if not np.any(baseline):
        return False
    # Both on one scale, whatever limits were in force: deviations of equal precision from one level.
    deviation = (panel.value - np.mean(panel.value[baseline])) * np.sqrt(charted.points.n)
    return compare(deviation[baseline], deviation[since]).doubtful


def _gauge_doubtful(
    charted: Charted,
    panels: Sequence[Panel],
    newest: Sequence[LimitsInForce],
    resolution: float | None,
) -> bool:
    """Whether the gauge is too coarse, or was found faulty of late."""
    context, gauge = charted.context, charted.settings.gauge
    sigma = next((row.sigma for row in newest if row.sigma), None)
    if resolution is not None and sigma is not None and resolution > sigma:
        return True
    for panel in panels:
        if panel.statistic in ("range", "moving-range"):
            known = panel.value[(charted.points.era == newest[0].era) & ~np.isnan(panel.value)]
            if known.size >= FEWEST and np.mean(known == 0) > _ZERO_RANGES:
                return True
    return bool(gauge) and any(
        entry.kind == "measurement-fault"
        and entry.gauge == gauge
        and touches(entry, context.as_of - context.attention, context.as_of)
        for entry in context.logbook
    )


def _recent(case: Case, points: Gathered, context: Context) -> bool:
    if case.ongoing or points.time is None:
        return True
    return int(points.time[case.last_index]) >= context.as_of - context.attention
