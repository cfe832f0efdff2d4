"""Which logbook lines concern a characteristic, and what they do to its points.

A line names a member (`bore[press=2]`), a family (`bore`), a gauge, or everything (`*`). All of these may
exclude points and begin an era; only a line that names the member itself, its gauge or a case answers.
"""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from holdsteady.arrays import Bools, Ints
from holdsteady.project.logbook import LogbookEntry

ANSWERS = ("cause", "measurement-fault")


def concerns(entry: LogbookEntry, *, name: str, family: str, gauge: str, cases: Iterable[str] = ()) -> bool:
    """Whether a line speaks of this characteristic; `cases` are the ids its cases go by."""
    if entry.characteristic in (name, family, "*"):
        return True
    if entry.gauge and not entry.characteristic and entry.gauge == gauge:
        return True
    return bool(entry.case) and entry.case in set(cases)


def answers(
    entry: LogbookEntry,
    *,
    name: str,
    gauge: str,
    aliases: Iterable[str],
    span: tuple[int | None, int | None],
) -> bool:
    """Whether a line answers a case that goes by `aliases` and lasted over `span`, both ends included."""
    if entry.kind not in ANSWERS:
        return False
    if entry.case and entry.case in set(aliases):
        return True
    named = entry.characteristic == name or (
        not entry.characteristic and bool(entry.gauge) and entry.gauge == gauge
    )
    first_time, last_time = span
    if not named or first_time is None or last_time is None:
        return False
    return touches(entry, first_time, last_time)


def touches(entry: LogbookEntry, first_time: int, last_time: int) -> bool:
    """Whether a line's half-open span, or its one moment, meets the closed span given."""
    if entry.until is None:
        return first_time <= entry.when <= last_time
    return entry.when <= last_time and entry.until > first_time


def covered(entry: LogbookEntry, time: Ints) -> Bools:
    """Return (N,) which points lie in a line's span."""
    if entry.until is None:
        return np.asarray(time == entry.when)
    return np.asarray((time >= entry.when) & (time < entry.until))


def excluded_points(entries: Iterable[LogbookEntry], time: Ints | None, points: int) -> tuple[Bools, Bools]:
    """Return which points are taken out of estimation, and which were no real values; both (N,)."""
    excluded = np.zeros(points, dtype=np.bool_)
    faulty = np.zeros(points, dtype=np.bool_)
    if time is None:
        return excluded, faulty
    for entry in entries:
        if entry.exclude:
            hit = covered(entry, time)
            excluded |= hit
            if entry.kind == "measurement-fault":
                faulty |= hit
    return excluded, faulty
