"""How often points come, in which hours of the week, and which pauses are more than that."""

from __future__ import annotations

from dataclasses import replace
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Ints
from holdsteady.intake.times_text import NO_TIME
from holdsteady.project.calendar import parse_calendar
from holdsteady.start.draft import Guess
from holdsteady.start.guess_points import Points
from holdsteady.start.rows import Rows
from holdsteady.times import DAY, SECOND

_FEWEST = 20
_WEEKS = 21 * DAY
_DAYS = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")
_LADDER = {
    "10m": 600, "30m": 1_800, "1h": 3_600, "2h": 7_200, "4h": 14_400, "8h": 28_800, "12h": 43_200,
    "1d": 86_400, "2d": 172_800, "3d": 259_200, "5d": 432_000, "7d": 604_800, "14d": 1_209_600,
    "28d": 2_419_200,
}  # fmt: skip
_UTC = ZoneInfo("UTC")
_INSIDE = 0.98
_HOURLY = 4  # points a day from which their hours mean something
_MOST_PAUSES = 5_000


def guess_rhythm(points: Points, time: Ints, rows: Rows, *, by_size: bool) -> tuple[Guess, ...]:
    """Return `cadence`, `calendar` and `gap` where the times of the points show them.

    `time`, (R,), is by the plant's clock; `by_size` says whether subgroups are counted off, which must
    begin anew after each long pause.
    """
    ends = points.ends[time[points.ends] != NO_TIME]
    if ends.size < _FEWEST:
        return ()
    moments = time[ends]
    same = (np.diff(points.member[ends]) == 0) & (np.diff(rows.block[ends]) == 0) & (np.diff(moments) > 0)
    at = np.flatnonzero(same)
    if at.size < _FEWEST // 2:
        return ()
    pauses = (moments[at + 1] - moments[at]).astype(np.int64)
    _, a_day = np.unique(np.column_stack((points.member[ends], moments // DAY)), axis=0, return_counts=True)
    calendar = _calendar(moments, hourly=bool(np.median(a_day) >= _HOURLY))
    found = [_cadence(moments, at, calendar)]
    if calendar is not None:
        why = f"{_share_inside(calendar, moments):.0%} of the points lie then"
        found.append(Guess(key="calendar", value=calendar, confidence="likely", why=why))
    found.append(_gap(pauses, by_size=by_size))
    examples = {
        "cadence": int(np.argsort(pauses)[pauses.size // 2]), "gap": int(np.argmax(pauses)), "calendar": 0,
    }  # fmt: skip
    return tuple(
        replace(guess, rows=tuple(rows.shown(int(row)) for row in ends[at[examples[guess.key]] :][:2]))
        for guess in found
        if guess is not None
    )


def _cadence(moments: Ints, at: Ints, calendar: str | None) -> Guess | None:
    """Return the span within which nine of ten points follow, in the time of the calendar."""
    hours = parse_calendar(calendar)
    pairs = np.unique(np.column_stack((moments[at], moments[at + 1])), axis=0)[-_MOST_PAUSES:]
    due = np.array([hours.elapsed(int(start), int(end), _UTC) for start, end in pairs])
    usual = float(np.percentile(due, 90))
    cadence = next((text for text, seconds in _LADDER.items() if seconds * SECOND >= usual), None)
    if cadence is None:
        return None
    why = f"nine of ten points follow within {_span(usual)}" + (" of the calendar" if calendar else "")
    return Guess(key="cadence", value=cadence, confidence="likely", why=why)


def _calendar(moments: Ints, *, hourly: bool) -> str | None:
    """Return the days on which points come, and the hours where there are several a day."""
    if moments.size < 2 * _FEWEST or np.ptp(moments) < _WEEKS:
        return None
    weekday = (moments // DAY + 3) % 7
    counts = np.bincount(weekday, minlength=7)
    days = counts > 0.1 * counts.max()
    worked = np.isin(weekday, np.flatnonzero(days))
    low, high = np.percentile(moments[worked] % DAY // (3_600 * SECOND), [0.5, 99.5]).astype(int).tolist()
    whole_day = not hourly or high + 1 - low >= 20
    if whole_day and days.all():
        return None
    hours = "" if whole_day else f" {low:02d}:00-{high + 1:02d}:00"
    text = f"{_days(np.flatnonzero(days).tolist())}{hours}".strip()
    return text if _share_inside(text, moments) >= _INSIDE else None


def _days(days: list[int]) -> str:
    if len(days) == 7:
        return ""
    if len(days) > 2 and days == list(range(days[0], days[-1] + 1)):
        return f"{_DAYS[days[0]]}-{_DAYS[days[-1]]}"
    return ",".join(_DAYS[day] for day in days)


def _share_inside(calendar: str, moments: Ints) -> float:
    minute = (moments // (60 * SECOND) + 3 * 1_440) % (7 * 1_440)
    inside = np.zeros(moments.size, dtype=np.bool_)
    for begin, end in parse_calendar(calendar).spans:
        inside |= (minute >= begin) & (minute < end)
    return float(inside.mean())


def _gap(pauses: Ints, *, by_size: bool) -> Guess | None:
    """Return the pause that breaks runs: longer than the regular ones, where there are longer ones."""
    regular, longest = float(np.percentile(pauses, 99)), int(pauses.max())
    if by_size:
        weekly = pauses[pauses > 1.5 * DAY]
        if weekly.size >= 2:
            gap = max(
                (text for text, s in _LADDER.items() if s * SECOND < np.median(weekly)),
                key=_LADDER.__getitem__,
            )
            why = "subgroups are counted off anew after each pause as long as a weekend"
            return Guess(key="gap", value=gap, confidence="likely", why=why)
    gaps = [text for text, seconds in _LADDER.items() if seconds * SECOND > max(1.1 * regular, DAY)]
    if not gaps or longest < 2 * _LADDER[gaps[0]] * SECOND:
        return None
    why = f"the longest pause is {_span(longest)}, the regular ones up to {_span(regular)}"
    return Guess(key="gap", value=gaps[0], confidence="guess", why=why)


def _span(microseconds: float) -> str:
    minutes = microseconds / (60 * SECOND)
    if minutes < 90:
        return f"{minutes:.0f} minutes"
    return f"{minutes / 60:.1f} hours" if minutes < 48 * 60 else f"{minutes / 1_440:.1f} days"
