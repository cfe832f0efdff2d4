"""The state of a characteristic in a word, and the flags beside it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from holdsteady.arrays import Bools, Ints
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
    if not any(row.limited and row.start_index < points.points <= row.stop_index for row in limits):
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
    points: Gathered, specification: Sequence[Specification], context: Context
) -> Bools | None:
    """Return which single readings lie outside the specification of their day (V,); None without one.

    Of a reading drawn at a limit it is known only that it lies even further out on that side.
    """
    if not specification:
        return None
    single, side, time = points.single, points.single_side, points.single_time
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
            outside |= here & (single < wanted.lower) & (side <= 0)
        if wanted.upper is not None:
            outside |= here & (single > wanted.upper) & (side >= 0)
    return outside


def flags(
    charted: Charted,
    now: Sequence[LimitsInForce],
    outside: Bools | None,
    doubts: Sequence[str],
    resolution: float | None,
) -> tuple[str, ...]:
    """Return what stands beside the state, in the order of the contract.

    `now` are the limits in force at the newest point, `outside` (V,) says which single readings lie outside
    the specification, `doubts` what differs since the limits came into force, `resolution` is the readings'
    step.
    """
    points = charted.points
    found = []
    if outside is not None:
        recent = _within_attention(points.single_time, outside, charted.context)
        if np.any(outside & charted.real[points.point_of] & recent):
            found.append("outside-specification")
    limited = [row for row in now if row.limited]
    if limited and all(row.kind == "provisional" for row in limited):
        found.append("provisional-limits")
    if doubts:
        found.append("doubtful-limits")
    if now and _gauge_doubtful(charted, now, resolution):
        found.append("doubtful-gauge")
    return tuple(found)


def limits_doubts(charted: Charted, panel: Panel, now: Sequence[LimitsInForce]) -> tuple[str, ...]:
    """Return in what the points since the limits came into force differ from those that set them, in words.

    `panel` is the one of the location, or the only one.
    """
    row = next((row for row in now if row.panel == panel.name and row.limited), None)
    if row is None:
        return ()
    points = charted.points
    mine = (points.era == row.era) & panel.judged & ~charted.excluded & (points.side == 0)
    baseline = mine & panel.in_baseline
    since = mine & ~panel.in_baseline
    since[: row.start_index] = False
    if not np.any(baseline):
        return ()
    # Both on one scale, whatever limits were in force: deviations of equal precision from one level.
    deviation = (panel.value - np.mean(panel.value[baseline])) * np.sqrt(points.n)
    return compare(deviation[baseline], deviation[since]).reasons


def _within_attention(time: Ints | None, like: Bools, context: Context) -> Bools:
    if time is None:
        return np.ones(like.size, dtype=np.bool_)
    return np.asarray(time >= context.as_of - context.attention)


def _gauge_doubtful(charted: Charted, now: Sequence[LimitsInForce], resolution: float | None) -> bool:
    """Whether the gauge is too coarse, or was found faulty of late."""
    context, gauge = charted.context, charted.settings.gauge
    sigma = next((row.sigma for row in now if row.sigma), None)
    if resolution is not None and sigma is not None and resolution > sigma:
        return True
    ranges = charted.values.get("spread")  # where the spread is s, it is zero with the range
    if ranges is not None:
        told = (charted.points.era == now[0].era) & charted.real & (charted.points.side == 0)
        known = ranges[told & ~np.isnan(ranges)]
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
