"""From readings to points: cutting at eras, gaps and subgroups; what each point is made of."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, Sides, frozen
from holdsteady.intake.readings import Readings
from holdsteady.project.settings import Characteristic
from holdsteady.spc.subgroups import Subgroups, summarise
from holdsteady.times import DAY, HOUR, wall

_FOUR_DAYS = 4 * DAY  # 1970-01-05 was a Monday: weeks are cut there


@dataclass(frozen=True, slots=True, kw_only=True)
class Gathered:
    """N points and what they are made of; `point_of` maps each of R values to its point.

    `single` holds every single reading of a variable, flat; for count data it is the counts. `side` and
    `single_side` tell what is a limit drawn for a reading: -1 that it lies below, 1 above, 0 a real value.
    """

    time: Ints | None
    label: tuple[str, ...]
    n: Floats
    file: Ints
    files: tuple[str, ...]
    line: Ints
    era: Ints
    segment: Ints
    open: Bools
    side: Sides
    single: Floats
    single_side: Sides
    single_time: Ints | None
    point_of: Ints
    groups: Subgroups | None  # of subgroup charts
    count: Floats | None  # of attribute charts
    size: Floats | None

    @property
    def points(self) -> int:
        """The number of points."""
        return int(self.n.size)


def gather(
    readings: Readings, settings: Characteristic, *, era_starts: Ints, as_of: int, zone: ZoneInfo
) -> Gathered:
    """Gather readings into points.

    Parameters
    ----------
    era_starts: (E - 1,) microseconds UTC, sorted: when each era but the first begins.
    as_of: the moment the build speaks of; a span of clock time that ends later is still open.

    An era starts at the first point not before its moment. Subgroups by size are counted anew at an
    era and after a pause longer than `gap`; by column, equal values next to each other are one.
    """
    rows = readings.values.shape[0]
    starts, is_open = _cut(readings, settings, era_starts, as_of, zone)
    stops = np.append(starts[1:], rows)
    last = stops - 1
    time = None if readings.time is None else readings.time[last]
    era = np.ones(starts.size, dtype=np.int64)
    if time is not None:
        era += np.searchsorted(era_starts, time, side="right")
    pauses = np.cumsum(_pauses(rows, readings.time, settings))
    segment = np.cumsum(np.diff(pauses[last] + era * rows, prepend=pauses[last][:1] + era[:1] * rows) != 0)
    point_of_row = np.repeat(np.arange(starts.size), stops - starts)
    attribute = settings.count is not None
    flat, present = readings.values.reshape(-1), ~np.isnan(readings.values.reshape(-1))
    width = readings.values.shape[1]
    point_of = np.repeat(point_of_row, width)[present]
    single = flat[present]
    groups = None
    n = np.bincount(point_of, minlength=starts.size).astype(np.float64)
    if not attribute and (width > 1 or settings.subgroup is not None):
        group_starts = np.searchsorted(point_of, np.arange(starts.size))
        groups = summarise(single, group_starts)
    single_side = np.zeros(single.size, dtype=np.int8)
    if readings.side is not None:
        single_side = readings.side.reshape(-1)[present]
    labels = ("",) * starts.size if readings.subgroup is None else _take(readings.subgroup, last)
    count = _sums(single, point_of, starts.size) if attribute else None
    size = None
    if readings.size is not None:
        size = _sums(readings.size, point_of_row, starts.size)
        n = size
    return Gathered(
        time=None if time is None else frozen(time.astype(np.int64)),
        label=labels,
        n=frozen(n),
        file=frozen(readings.file[last].astype(np.int64)),
        files=readings.files,
        line=frozen(readings.line[last].astype(np.int64)),
        era=frozen(era),
        segment=frozen(segment.astype(np.int64)),
        open=frozen(is_open),
        side=frozen(_side(single_side, point_of, starts.size)),
        single=frozen(single),
        single_side=frozen(single_side),
        single_time=None if readings.time is None else frozen(np.repeat(readings.time, width)[present]),
        point_of=frozen(point_of),
        groups=groups,
        count=None if count is None else frozen(count),
        size=None if size is None else frozen(size),
    )


def up_to(readings: Readings, as_of: int) -> Readings:
    """Return the readings timed up to a moment; all of them where the source has no times."""
    if readings.time is None or readings.time.size == 0 or readings.time[-1] <= as_of:
        return readings
    stop = int(np.searchsorted(readings.time, as_of, side="right"))
    return Readings(
        family=readings.family,
        name=readings.name,
        each=readings.each,
        time=readings.time[:stop],
        values=readings.values[:stop],
        size=None if readings.size is None else readings.size[:stop],
        subgroup=None if readings.subgroup is None else readings.subgroup[:stop],
        file=readings.file[:stop],
        files=readings.files,
        line=readings.line[:stop],
        side=None if readings.side is None else readings.side[:stop],
    )


def _side(single_side: Sides, point_of: Ints, points: int) -> Sides:
    """Return (N,) on which side of its limits a point's readings lie; of both, the one of most."""
    censored = np.flatnonzero(single_side)
    tendency = np.bincount(point_of[censored], weights=single_side[censored], minlength=points)
    balanced = np.zeros(points, dtype=np.bool_)
    balanced[point_of[censored]] = True
    balanced &= tendency == 0
    return np.where(balanced, np.int8(-1), np.sign(tendency)).astype(np.int8)


def _cut(
    readings: Readings, settings: Characteristic, era_starts: Ints, as_of: int, zone: ZoneInfo
) -> tuple[Ints, Bools]:
    """Return where each point's rows start, and which points are still open."""
    rows = readings.values.shape[0]
    subgroup = settings.subgroup
    if subgroup is None:
        return np.arange(rows), np.zeros(rows, dtype=np.bool_)
    if subgroup.column is not None:
        assert readings.subgroup is not None
        text = np.array(readings.subgroup, dtype=object)
        starts = _changes(text[1:] != text[:-1])
        return starts, np.zeros(starts.size, dtype=np.bool_)
    if subgroup.size is not None:
        return _cut_by_size(readings, settings, era_starts, subgroup.size)
    assert subgroup.every is not None
    return _cut_by_clock(readings, subgroup.every.microseconds, as_of, zone)


def _cut_by_size(
    readings: Readings, settings: Characteristic, era_starts: Ints, size: int
) -> tuple[Ints, Bools]:
    rows = readings.values.shape[0]
    block = np.cumsum(_pauses(rows, readings.time, settings))
    if readings.time is not None:
        block = block + rows * np.searchsorted(era_starts, readings.time, side="right")
    block_starts = _changes(np.diff(block) != 0)
    within = np.arange(rows) - np.repeat(block_starts, np.diff(np.append(block_starts, rows)))
    starts = np.flatnonzero(within % size == 0)
    is_open = np.zeros(starts.size, dtype=np.bool_)
    is_open[-1] = rows - starts[-1] < size
    return starts, is_open


def _cut_by_clock(readings: Readings, every: int, as_of: int, zone: ZoneInfo) -> tuple[Ints, Bools]:
    if readings.time is None:
        raise ValueError("a subgroup by span of time needs a source with a time column")
    local = wall(readings.time, zone)
    if every < DAY:  # cut from each midnight on, so that the cuts stay at the same hours every day
        day, clock = local // DAY, local % DAY
        bucket = day * (DAY // every + 1) + clock // every
        if every <= HOUR:  # the hour that a clock change repeats is another one
            bucket = bucket * 2 + (np.cumsum(np.diff(local - readings.time, prepend=0) != 0) % 2)
        end = local - clock + np.minimum((clock // every + 1) * every, DAY)
    else:
        bucket = (local - _FOUR_DAYS) // every
        end = (bucket + 1) * every + _FOUR_DAYS
    starts = _changes(np.diff(bucket) != 0)
    is_open = np.zeros(starts.size, dtype=np.bool_)
    is_open[-1] = readings.time[-1] + (end[-1] - local[-1]) > as_of
    return starts, is_open


def _pauses(rows: int, time: Ints | None, settings: Characteristic) -> Bools:
    """Return (R,) True at a reading that follows a pause longer than `gap`."""
    if time is None or settings.gap is None:
        return np.zeros(rows, dtype=np.bool_)
    return np.diff(time, prepend=time[:1]) > settings.gap.microseconds


def _changes(changed: Bools) -> Ints:
    return np.concatenate(([0], np.flatnonzero(changed) + 1)).astype(np.int64)


def _take(texts: tuple[str, ...], index: Ints) -> tuple[str, ...]:
    return tuple(texts[i] for i in index.tolist())


def _sums(values: Floats, point_of: Ints, points: int) -> Floats:
    return np.bincount(point_of, weights=values, minlength=points).astype(np.float64)
