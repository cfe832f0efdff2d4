"""When points are due: the hours of the week in which a process runs, `mon-fri 06:00-22:00`."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from functools import lru_cache
from zoneinfo import ZoneInfo

from holdsteady.times import DAY, SECOND, to_datetime

_DAYS = ("monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday")
_MINUTE = 60 * SECOND
_WEEK = 7 * DAY
_MONDAY = 3 * DAY  # 1970-01-01 was a Thursday, three days after a Monday
_DAY_MINUTES = 1_440
_WEEK_MINUTES = 7 * _DAY_MINUTES
_PART = re.compile(
    r"\s*(?:(?P<first>[a-z]+)(?:\s*-\s*(?P<last>[a-z]+))?"
    r"|(?P<begin>[0-9]{1,2}:[0-9]{2})\s*-\s*(?P<end>[0-9]{1,2}:[0-9]{2}))\s*(?:,|(?=\s|[0-9]|$))"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Calendar:
    """Hours of the week by the plant's clock.

    `spans` are half-open, in minutes since Monday 00:00, sorted and disjoint.
    """

    spans: tuple[tuple[int, int], ...]

    def elapsed(self, start: int, end: int, zone: ZoneInfo) -> int:
        """Return the calendar time between two moments, all in microseconds; 0 when `end` is not later.

        It is the time during which the plant's clock showed an hour of the calendar: an hour that a
        clock change repeats counts twice, one that it skips not at all.
        """
        if end <= start:
            return 0
        total = 0
        piece_start, offset = start, _offset(start, zone)
        for at, offset_after in _changes_between(start, end, zone):
            total += self._up_to(at + offset) - self._up_to(piece_start + offset)
            piece_start, offset = at, offset_after
        return total + self._up_to(end + offset) - self._up_to(piece_start + offset)

    def moment_after(self, start: int, span: int, zone: ZoneInfo) -> int:
        """Return the first moment by which `span` (above 0) of calendar time has passed since `start`."""
        piece_start, offset, rest = start, _offset(start, zone), span
        end = start + _WEEK + span * _WEEK // self._week  # no calendar time takes longer to pass
        for at, offset_after in _changes_between(start, end + _WEEK, zone):
            passed = self._up_to(at + offset) - self._up_to(piece_start + offset)
            if passed >= rest:
                break
            rest -= passed
            piece_start, offset = at, offset_after
        return self._wall_at(self._up_to(piece_start + offset) + rest) - offset

    @property
    def _week(self) -> int:
        """Calendar time in a week, microseconds."""
        return sum(end - begin for begin, end in self.spans) * _MINUTE

    def _wall_at(self, passed: int) -> int:
        """Return the first moment of the plant's clock up to which so much calendar time has passed."""
        weeks, rest = divmod(passed, self._week)
        if rest == 0:  # reached at the end of the week before's last span
            weeks, rest = weeks - 1, self._week
        for begin, end in self.spans:
            length = (end - begin) * _MINUTE
            if rest <= length:
                return weeks * _WEEK + begin * _MINUTE + rest - _MONDAY
            rest -= length
        raise AssertionError("a week holds all its spans")

    def _up_to(self, wall: int) -> int:
        """Calendar time from a fixed Monday to a moment of the plant's clock; differences have meaning."""
        weeks, rest = divmod(wall + _MONDAY, _WEEK)
        part = sum(max(0, min(rest, end * _MINUTE) - begin * _MINUTE) for begin, end in self.spans)
        return weeks * self._week + part


ALWAYS = Calendar(spans=((0, _WEEK_MINUTES),))


def parse_calendar(text: str | None) -> Calendar:
    """Read a calendar; None means at all hours.

    Groups are separated by `;`. A group names days (`mon`, `mon,wed`, `fri-mon`; none: every day) and
    hours (`06:00-22:00`, several separated by commas; none: the whole day). Hours that end before they
    begin run into the next day. Days may follow hours after a comma: `mon 06:00-14:00, sat 08:00-12:00`.

    Raises
    ------
    ValueError
        saying which part cannot be read, and how it is written.
    """
    if text is None:
        return ALWAYS
    spans = [span for group in text.lower().replace("–", "-").split(";") for span in _group(group)]
    return Calendar(spans=_united(spans))


def _group(text: str) -> list[tuple[int, int]]:
    if not text.strip():
        raise ValueError("names no days and no hours")
    spans: list[tuple[int, int]] = []
    days: list[int] = []
    hours = 0
    position = 0
    while position < len(text.rstrip()):
        match = _PART.match(text, position)
        if match is None:
            raise ValueError(f"'{text[position:].strip()}' cannot be read as days and hours")
        position = match.end()
        if match["first"]:
            if hours:
                days, hours = [], 0
            days += _days(match["first"], match["last"])
        else:
            spans += _hours(match["begin"], match["end"], days or list(range(7)))
            hours += 1
    if not hours:
        spans += _hours("00:00", "24:00", days)
    return spans


def _days(first: str, last: str | None) -> list[int]:
    begin = _day(first)
    length = 0 if last is None else (_day(last) - begin) % 7
    return [(begin + step) % 7 for step in range(length + 1)]


def _day(name: str) -> int:
    found = [index for index, day in enumerate(_DAYS) if len(name) >= 3 and day.startswith(name)]
    if not found:
        raise ValueError(f"'{name}' is no day; days are {', '.join(day[:3] for day in _DAYS)}")
    return found[0]


def _hours(begin_text: str, end_text: str, days: list[int]) -> list[tuple[int, int]]:
    begin, end = _minutes(begin_text), _minutes(end_text)
    if begin in (end, _DAY_MINUTES):
        raise ValueError(f"'{begin_text}-{end_text}' is no span; the whole day is 00:00-24:00")
    length = end - begin if end > begin else end + _DAY_MINUTES - begin
    return [(day * _DAY_MINUTES + begin, day * _DAY_MINUTES + begin + length) for day in days]


def _minutes(text: str) -> int:
    hour, minute = (int(part) for part in text.split(":"))
    if minute > 59 or hour * 60 + minute > _DAY_MINUTES:
        raise ValueError(f"'{text}' is no time of day; times run from 00:00 to 24:00")
    return hour * 60 + minute


def _united(spans: list[tuple[int, int]]) -> tuple[tuple[int, int], ...]:
    wrapped = [(0, end - _WEEK_MINUTES) for _, end in spans if end > _WEEK_MINUTES]
    result: list[tuple[int, int]] = []
    for begin, end in sorted([(begin, min(end, _WEEK_MINUTES)) for begin, end in spans] + wrapped):
        if result and begin <= result[-1][1]:
            result[-1] = (result[-1][0], max(end, result[-1][1]))
        else:
            result.append((begin, end))
    return tuple(result)


def _offset(moment: int, zone: ZoneInfo) -> int:
    return (to_datetime(moment, zone).utcoffset() or dt.timedelta()) // dt.timedelta(microseconds=1)


def _changes_between(start: int, end: int, zone: ZoneInfo) -> list[tuple[int, int]]:
    years = range(to_datetime(start, zone).year - 1, to_datetime(end, zone).year + 2)
    return [(at, after) for year in years for at, after in _changes(year, zone) if start < at < end]


@lru_cache(maxsize=512)
def _changes(year: int, zone: ZoneInfo) -> tuple[tuple[int, int], ...]:
    """Return the moments of a year (UTC) at which the clock is changed, and the offset from then on."""
    epoch = dt.date(1970, 1, 1)
    first, last = ((dt.date(y, 1, 1) - epoch).days for y in (year, year + 1))
    changes = []
    before = _offset(first * DAY, zone)
    for day in range(first, last):
        after = _offset((day + 1) * DAY, zone)
        if after != before:
            changes.append((_bisected(day * DAY, (day + 1) * DAY, zone), after))
        before = after
    return tuple(changes)


def _bisected(low: int, high: int, zone: ZoneInfo) -> int:
    """Return the first whole second with the later offset."""
    before = _offset(low, zone)
    while high - low > SECOND:
        middle = (low + high) // (2 * SECOND) * SECOND
        if _offset(middle, zone) == before:
            low = middle
        else:
            high = middle
    return high
