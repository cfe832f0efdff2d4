"""From what a clock on the wall showed to moments in UTC, and which moments can be true."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Bools, Ints
from holdsteady.times import DAY, offsets

EARLIEST = (
    int((dt.datetime(1900, 1, 1, tzinfo=dt.UTC) - dt.datetime(1970, 1, 1, tzinfo=dt.UTC)).total_seconds())
    * 1_000_000
)
_MOST_DAYS = 400
_UTC_NAMES = ("UTC", "Etc/UTC", "Z", "Zulu", "Etc/Zulu", "Universal", "Etc/Universal")


@dataclass(slots=True)
class Clock:
    """The plant's zone and the moment that everything is judged at."""

    zone: ZoneInfo
    as_of: int
    _days: dict[int, int] = field(default_factory=dict)

    def too_early(self, moments: Ints) -> Bools:
        """Return which moments, (N,), lie before 1900."""
        return moments < EARLIEST

    def too_late(self, moments: Ints) -> Bools:
        """Return which moments, (N,), lie more than a day after the moment of judging."""
        return moments > self.as_of + DAY

    def to_utc(self, stamps: Ints, zoned: Bools) -> Ints:
        """Return the moments, (N,), of a file's rows in the order of its lines.

        Where `zoned`, a stamp is UTC already. A local time in the hour that a clock change skips takes
        the earlier offset. In the hour that it repeats, the clock stepping back from one row to the
        next starts the second pass.
        """
        if self.zone.key in _UTC_NAMES or stamps.size == 0 or zoned.all():
            return stamps
        before, after = self._offsets_around(stamps)
        result = stamps - np.where(zoned, 0, before)
        near = np.flatnonzero((before != after) & ~zoned)
        if near.size:
            result[near] = self._through_change(stamps, near, before[near], after[near])
        return result

    def only_offset(self, first: int, last: int) -> int | None:
        """Return the offset that holds for all local times from `first` to `last`; None where it changes."""
        if self.zone.key in _UTC_NAMES:
            return 0
        days = range(first // DAY - 1, last // DAY + 3)
        if len(days) > _MOST_DAYS:
            return None
        offset = self._offset(days[0])
        return offset if all(self._offset(day) == offset for day in days) else None

    def _offsets_around(self, stamps: Ints) -> tuple[Ints, Ints]:
        days = stamps // DAY
        first, last = int(days.min()), int(days.max())
        if last - first > 400_000:  # the calendar from 1900 on is far shorter
            return offsets(stamps - DAY, self.zone), offsets(stamps + DAY, self.zone)
        table = np.array([self._offset(day) for day in range(first - 1, last + 3)])
        return table[days - first], table[days - first + 3]

    def _offset(self, day: int) -> int:
        if day not in self._days:
            self._days[day] = int(offsets(np.array([day * DAY], dtype=np.int64), self.zone)[0])
        return self._days[day]

    def _through_change(self, stamps: Ints, near: Ints, before: Ints, after: Ints) -> Ints:
        local = stamps[near]
        early, late = local - before, local - after
        early_true = offsets(early, self.zone) == before
        late_true = offsets(late, self.zone) == after
        repeated = early_true & late_true
        result = np.where(late_true & ~early_true, late, early)
        # A run of rows in one repeated hour: consecutive rows, at most a day apart.
        next_to = (np.diff(near) == 1) & (np.abs(np.diff(local)) < DAY)
        starts = repeated & ~np.concatenate(([False], repeated[:-1] & next_to))
        back = np.concatenate(([False], np.diff(local) < 0)) & repeated & ~starts
        run = np.cumsum(starts)
        passes = np.cumsum(back)
        base = np.zeros(int(run.max(initial=0)) + 1, dtype=np.int64)
        base[run[starts]] = passes[starts]
        second = repeated & (passes - base[run] > 0)
        return np.where(second, late, result)
