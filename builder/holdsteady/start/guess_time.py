"""Which column tells when, and how its days are written."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.columns import strings
from holdsteady.intake.times_text import AMBIGUOUS, NO_TIME, Family, Stamps, label
from holdsteady.intake.times_text import parse as parse_times
from holdsteady.start import words
from holdsteady.start.draft import Confidence, Guess
from holdsteady.start.facts import Facts, Table
from holdsteady.start.rows import Rows
from holdsteady.times import DAY, wall

_COUNTED = (Family.SECONDS, Family.MILLISECONDS)
_EARLIEST = -2_208_988_800_000_000  # 1900, as the reading of files has it
_ORDERED = 0.98
_CELL = re.compile(
    r"[0-9]{1,2}(?P<mark>[/-])[0-9]{1,2}[/-](?P<year>[0-9]{4}|[0-9]{2})"
    r"(?:(?P<gap>,?\ +|T)[0-9]{1,2}:[0-9]{2}(?P<second>:[0-9]{2})?(?P<fraction>\.[0-9]{1,6})?"
    r"(?P<half>\ ?[AaPp][Mm])?)?"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeGuess:
    """Where times stand.

    Attributes
    ----------
    columns: the time column, or date and time of day; empty where there is none.
    spoken_for: every column that tells a time, also those not chosen.
    time: (R,) microseconds by the plant's clock, `NO_TIME` where there is none.
    guesses, notes: what is written about it.
    """

    columns: tuple[str, ...]
    spoken_for: tuple[str, ...]
    time: Ints
    guesses: tuple[Guess, ...]
    notes: tuple[str, ...] = ()


def guess_time(table: Table, now: int, zone: ZoneInfo) -> TimeGuess:
    """Choose the time column of a source; `now` is in microseconds, later times count as none."""
    candidates = [one for one in table.facts.values() if _tells_time(one, now)]
    clocks = [one for one in table.facts.values() if one.clock]
    spoken_for = tuple(one.name for one in (*candidates, *clocks))
    if not candidates:
        note = "no column of times: rows keep the order of the files, and charts count 1, 2, 3 …"
        none = np.full(table.rows.count, NO_TIME)
        return TimeGuess(columns=(), spoken_for=spoken_for, time=none, guesses=(), notes=(note,))
    chosen = max(candidates, key=_fitness)
    columns, stamps = _with_clock(chosen, clocks, table.rows)
    family = stamps.main_family()
    day_first, order = _day_first(stamps, family, table.rows, now)
    time = stamps.resolved(family, day_first=day_first)
    time = np.where((time > now + DAY) | (time < _EARLIEST), NO_TIME, time)
    zoned = stamps.zoned & (time != NO_TIME)
    time[zoned] = wall(time[zoned], zone)
    others = [one.name for one in candidates if one is not chosen]
    why = f"{label(family, day_first=day_first)} in {_share(time != NO_TIME, chosen)} of its cells"
    why += f"; also times: {', '.join(others[:3])}" if others else ", the only column of times"
    first = Guess(
        key="time",
        value=columns if len(columns) > 1 else columns[0],
        confidence="likely" if others else "sure",
        why=why,
        rows=_two(table.rows, np.flatnonzero(time != NO_TIME)),
    )
    guesses = (first, *_format(order, table, columns, day_first))
    return TimeGuess(columns=columns, spoken_for=spoken_for, time=time, guesses=guesses)


def _fitness(one: Facts) -> tuple[bool, bool, int]:
    return _has_clock(one), words.names_one_of(one.name, words.TIME), one.filled


def _with_clock(chosen: Facts, clocks: Sequence[Facts], rows: Rows) -> tuple[tuple[str, ...], Stamps]:
    """Return the time column, with the one of the time of day where it holds days alone, and the stamps."""
    assert chosen.stamps is not None
    if clocks and not _has_clock(chosen):
        both = _joined(rows, chosen, clocks[0])
        if both is not None:
            return (chosen.name, clocks[0].name), both
    return (chosen.name,), chosen.stamps


def _share(which: Bools, facts: Facts) -> str:
    return f"{min(np.count_nonzero(which) / max(facts.filled, 1), 1):.0%}"


def _two(rows: Rows, at: Ints) -> tuple[str, ...]:
    return tuple(rows.shown(row) for row in at[:2].tolist())


def _tells_time(one: Facts, now: int) -> bool:
    if one.stamps is None or one.filled == 0:
        return False
    if not one.numeric:
        return True
    named = words.names_one_of(one.name, words.TIME)
    if one.family not in _COUNTED:
        return named
    times = one.stamps.first[one.stamps.first != NO_TIME]
    ordered = times.size < 2 or np.mean(np.diff(times) >= 0) >= _ORDERED
    return bool(np.all(times <= now + DAY)) and (named or bool(ordered and times.size > 8))


def _has_clock(one: Facts) -> bool:
    assert one.stamps is not None
    times = one.stamps.first[one.stamps.first != NO_TIME]
    times = times if times.size else one.stamps.second[one.stamps.second != NO_TIME]
    return bool(np.any(times % DAY != 0))


def _joined(rows: Rows, date: Facts, clock: Facts) -> Stamps | None:
    dates, clocks = (rows.cells[one.name].to_pylist() for one in (date, clock))
    joined = [f"{day} {hour}" if day and hour else "" for day, hour in zip(dates, clocks, strict=True)]
    stamps = parse_times(strings(joined))
    return stamps if stamps.main_family() is not Family.NONE else None


def _day_first(stamps: Stamps, family: Family, rows: Rows, now: int) -> tuple[bool | None, str]:
    """Return which way round days and months are, and what tells it: nothing, `proof` or `order`."""
    if family not in AMBIGUOUS:
        return None, ""
    days, months = stamps.proof()
    if days != months:
        return days, "proof"
    if days:
        return None, "contradiction"
    scores = [_disorder(stamps.resolved(family, day_first=way), rows, now) for way in (True, False)]
    if scores[0] == scores[1]:
        return None, "nothing"
    return scores[0] < scores[1], "order"


def _disorder(time: Ints, rows: Rows, now: int) -> tuple[int, int, int]:
    """Return what speaks against a reading: times to come, steps back within a file, and the span."""
    known = time != NO_TIME
    moments, file = time[known], rows.file[known]
    back = int(np.count_nonzero((np.diff(moments) < 0) & (np.diff(file) == 0)))
    span = int(moments.max() - moments.min()) // (7 * DAY) if moments.size else 0
    return int(np.count_nonzero(moments > now + DAY)), back, span


def _format(order: str, table: Table, columns: Sequence[str], day_first: bool | None) -> list[Guess]:  # noqa: FBT001
    """Return the format of the times where the files alone do not settle it."""
    if order in ("", "proof") or len(columns) != 1:
        return []
    facts = table.facts[columns[0]]
    formats = Counter(_format_of(text, day_first is not False) for text in facts.kinds[:5_000])
    best, count = formats.most_common(1)[0]
    if not best:
        return []
    rows = tuple(table.rows.shown(row) for row in range(min(2, table.rows.count)))
    if day_first is None:
        why = "day and month cannot be told apart: take the # away, or first exchange %d and %m"
        return [Guess(key="time_format", value=best, confidence="guess", why=why, rows=rows, offered=True)]
    turn = "day" if day_first else "month"
    why = f"no part above 12 proves it; read with the {turn} first the times stay in order"
    confidence: Confidence = "likely" if count == formats.total() else "guess"
    return [Guess(key="time_format", value=best, confidence=confidence, why=why, rows=rows)]


def _format_of(text: str, day_first: bool) -> str:  # noqa: FBT001
    match = _CELL.fullmatch(text)
    if match is None:
        return ""
    parts = ("%d", "%m") if day_first else ("%m", "%d")
    written = match["mark"].join((*parts, "%Y" if len(match["year"]) == 4 else "%y"))
    if match["gap"] is None:
        return written
    half = match["half"]
    clock = "%I:%M" if half else "%H:%M"
    clock += ":%S" if match["second"] else ""
    clock += ".%f" if match["fraction"] else ""
    return written + match["gap"] + clock + ("" if not half else " %p" if half.startswith(" ") else "%p")
