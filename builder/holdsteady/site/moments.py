"""Moments in words, in the site's zone, as short as the distance to the newest reading allows.

Months and days are written out here, because the names of the machine's locale must not reach a page.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from zoneinfo import ZoneInfo

from holdsteady.times import to_datetime

_DAYS = ("Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday")
_MONTHS = (
    "January", "February", "March", "April", "May", "June",
    "July", "August", "September", "October", "November", "December",
)  # fmt: skip
_NAMED_BY_WEEKDAY = 6  # days back in which a weekday names one day only
_CLOCK_MATTERS = 60  # days back in which the hour still helps someone to remember
_SPANS = ((86_400, "day"), (3_600, "hour"), (60, "minute"), (1, "second"))


def duration(microseconds: int) -> str:
    """Return a span of time in words: 28_800_000_000 is '8 hours', 129_600_000_000 '36 hours'."""
    seconds = max(round(microseconds / 1_000_000), 0)
    for size, name in _SPANS:
        # A day and a half reads better as 36 hours, a week and an hour as 7 days.
        if seconds >= 2 * size or (seconds % size == 0 and seconds > 0):
            count = round(seconds / size)
            return f"{count} {name}{'' if count == 1 else 's'}"
    return "0 seconds"


@dataclass(frozen=True, slots=True, kw_only=True)
class Clock:
    """Writes moments for a page whose data end at `now` (microseconds UTC)."""

    zone: ZoneInfo
    now: int

    def full(self, moment: int) -> str:
        """Return 'Tue 17 Mar 2026, 14:10'."""
        at = self._at(moment)
        return f"{_DAYS[at.weekday()][:3]} {at.day} {_MONTHS[at.month - 1][:3]} {at.year}, {_clock(at)}"

    def to_the_second(self, moment: int) -> str:
        """Return 'Tue 17 Mar 2026, 14:10:05', with a fraction where there is one."""
        at = self._at(moment)
        fraction = f".{at.microsecond:06d}".rstrip("0") if at.microsecond else ""
        return f"{self.full(moment)}:{at.second:02d}{fraction}"

    def short(self, moment: int) -> str:
        """Return '14:05' on the data's last day, 'Fri 15:02' in its week, '3 Mar 15:02', '3 Mar 2025'."""
        at = self._at(moment)
        back = self._days_back(at)
        if back == 0:
            return _clock(at)
        if 0 < back <= _NAMED_BY_WEEKDAY:
            return f"{_DAYS[at.weekday()][:3]} {_clock(at)}"
        if at.year == self._at(self.now).year:
            return f"{at.day} {_MONTHS[at.month - 1][:3]} {_clock(at)}"
        return self.day(moment)

    def day(self, moment: int) -> str:
        """Return '12 Jan', with the year where it is not the data's last."""
        at = self._at(moment)
        year = "" if at.year == self._at(self.now).year else f" {at.year}"
        return f"{at.day} {_MONTHS[at.month - 1][:3]}{year}"

    def said(self, moment: int) -> str:
        """Return the moment for a sentence: '07:00 on Monday', '06:00 on 9 March', '9 January'."""
        at = self._at(moment)
        day = self._day_said(at)
        if at.time() == dt.time() or not -1 <= self._days_back(at) <= _CLOCK_MATTERS:
            return day
        return f"{_clock(at)} on {day}"

    def on(self, moment: int) -> str:
        """Return the moment after a verb: 'at 07:00 on Monday', 'on 9 January'."""
        said = self.said(moment)
        return f"at {said}" if ":" in said else f"on {said}"

    def span(self, start: int, stop: int, *, joined: str = "to") -> str:
        """Return '07:00 to 09:00 on Monday', both in full where days differ, one where they are alike."""
        first, last = self._at(start), self._at(stop)
        if self.said(start) == self.said(stop):
            return self.said(start)
        if first.date() != last.date():
            return f"{self.said(start)} {joined} {self.said(stop)}"
        return f"{_clock(first)} {joined} {_clock(last)} on {self._day_said(first)}"

    def between(self, low: int, high: int, start: int) -> str:
        """Return '05:30 and 08:30', with the day where it is not that of `start`."""
        if len({self._at(moment).date() for moment in (low, high, start)}) == 1:
            first, last = _clock(self._at(low)), _clock(self._at(high))
            return first if first == last else f"{first} and {last}"
        return self.span(low, high, joined="and")

    def days(self, start: int, stop: int) -> str:
        """Return '12 Jan to 1 Feb'."""
        first, last = self.day(start), self.day(stop)
        return first if first == last else f"{first} to {last}"

    def written(self, moment: int, *, up: bool = False) -> str:
        """Return the moment as the logbook takes it, to the minute; `up` gives the minute after."""
        at = self._at(moment).replace(second=0, microsecond=0) + dt.timedelta(minutes=1 if up else 0)
        return at.strftime("%Y-%m-%d %H:%M")

    def machine(self, moment: int) -> str:
        """Return the moment as ISO 8601 with offset."""
        return self._at(moment).isoformat(timespec="seconds")

    def _at(self, moment: int) -> dt.datetime:
        return to_datetime(moment, self.zone)

    def _days_back(self, at: dt.datetime) -> int:
        return (self._at(self.now).date() - at.date()).days

    def _day_said(self, at: dt.datetime) -> str:
        if 0 <= self._days_back(at) <= _NAMED_BY_WEEKDAY:
            return _DAYS[at.weekday()]
        year = "" if at.year == self._at(self.now).year else f" {at.year}"
        return f"{at.day} {_MONTHS[at.month - 1]}{year}"


def _clock(at: dt.datetime) -> str:
    return f"{at.hour:02d}:{at.minute:02d}"
