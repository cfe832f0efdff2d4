"""From readings to points in plain loops: subgroups, eras, pauses, and what the logbook takes out."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

from holdsteady.intake.readings import Readings
from holdsteady.monitor.context import Context
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Characteristic, Moment

NAN = math.nan


@dataclass
class NaivePoint:
    """One point: the readings in it, and what the calendar and the logbook say of it."""

    rows: list[int]
    values: list[float]
    count: float = NAN
    size: float = NAN
    time: int | None = None
    label: str = ""
    era: int = 0
    stretch: int = 0
    excluded: bool = False
    faulty: bool = False
    open: bool = False
    baseline: bool = False

    @property
    def usable(self) -> bool:
        return not (self.excluded or self.faulty or self.open)


def gather(
    readings: Readings, settings: Characteristic, context: Context, changes: Sequence[int]
) -> list[NaivePoint]:
    """Make points of the readings up to the moment the build speaks of."""
    time = readings.time
    rows = [row for row in range(len(readings.line)) if time is None or time[row] <= context.as_of]
    gap = settings.gap.microseconds if settings.gap is not None else None
    groups: list[list[int]] = []
    for position, row in enumerate(rows):
        before = rows[position - 1] if position else None
        if before is None or begins_point(readings, settings, context, changes, gap, groups[-1], before, row):
            groups.append([])
        groups[-1].append(row)
    points = [make_point(readings, settings, group) for group in groups]
    place(points, readings, changes, gap)
    if points:
        points[-1].open = is_open(points[-1], settings, context)
    return points


def begins_point(  # noqa: PLR0917
    readings: Readings,
    settings: Characteristic,
    context: Context,
    changes: Sequence[int],
    gap: int | None,
    group: list[int],
    before: int,
    row: int,
) -> bool:
    how = settings.subgroup
    if how is None:
        return True
    if how.column is not None:
        assert readings.subgroup is not None
        return readings.subgroup[row] != readings.subgroup[before]
    if how.size is not None:
        if len(group) == how.size:
            return True
        if readings.time is None:
            return False
        earlier, later = int(readings.time[before]), int(readings.time[row])
        return any(earlier < when <= later for when in changes) or (gap is not None and later - earlier > gap)
    assert how.every is not None
    assert readings.time is not None
    every = how.every.microseconds // 1_000_000
    return clock_span(int(readings.time[row]), every, context) != clock_span(
        int(readings.time[before]), every, context
    )


def clock_span(time: int, every: int, context: Context) -> tuple[int, int]:
    """Return the local day and the span within it; spans divide the day."""
    local = datetime.fromtimestamp(time // 1_000_000, tz=UTC).astimezone(context.zone)
    seconds = local.hour * 3600 + local.minute * 60 + local.second
    return local.toordinal(), seconds // every


def make_point(readings: Readings, settings: Characteristic, group: list[int]) -> NaivePoint:
    values = []
    for row in group:
        values += [float(value) for value in readings.values[row] if not math.isnan(value)]
    point = NaivePoint(rows=group, values=values)
    if settings.count is not None:
        point.count = math.fsum(values)
        point.size = 1.0
        if readings.size is not None:
            point.size = math.fsum(float(readings.size[row]) for row in group)
    if readings.time is not None:
        point.time = int(readings.time[group[-1]])
    if (
        settings.subgroup is not None
        and settings.subgroup.column is not None
        and readings.subgroup is not None
    ):
        point.label = readings.subgroup[group[-1]]
    return point


def place(points: list[NaivePoint], readings: Readings, changes: Sequence[int], gap: int | None) -> None:
    """Number the eras (by the process changes that have begun) and the unbroken stretches."""
    stretch = 0
    for index, point in enumerate(points):
        if readings.time is None or point.time is None:
            continue
        point.era = sum(1 for when in changes if when <= point.time)
        if index:
            path = [points[index - 1].rows[-1], *point.rows]
            pauses = [int(readings.time[b] - readings.time[a]) for a, b in itertools.pairwise(path)]
            if point.era != points[index - 1].era or (gap is not None and max(pauses) > gap):
                stretch += 1
        point.stretch = stretch


def is_open(point: NaivePoint, settings: Characteristic, context: Context) -> bool:
    how = settings.subgroup
    if how is None or how.column is not None:
        return False
    if how.size is not None:
        return len(point.rows) < how.size
    assert how.every is not None
    assert point.time is not None
    every = how.every.microseconds // 1_000_000
    return clock_span(context.as_of, every, context) == clock_span(point.time, every, context)


def mark(points: list[NaivePoint], logbook: list[LogbookEntry]) -> None:
    """Mark what the logbook takes out of the estimation of limits, and what was no real value."""
    for point in points:
        for entry in logbook:
            if entry.exclude and point.time is not None and within(point.time, entry):
                point.excluded = True
                point.faulty = point.faulty or entry.kind == "measurement-fault"


def within(time: int, entry: LogbookEntry) -> bool:
    if entry.until is None:
        return time == entry.when
    return entry.when <= time < entry.until


def moment(when: Moment, context: Context) -> int:
    local = datetime(when.year, when.month, when.day, tzinfo=context.zone)
    if isinstance(when, datetime):
        local = when if when.tzinfo is not None else when.replace(tzinfo=context.zone)
    return round(local.timestamp()) * 1_000_000
