"""Spans of a characteristic's history: each deliberate process change begins one."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal, cast

import numpy as np

from holdsteady.arrays import Ints
from holdsteady.monitor.finding import Era
from holdsteady.project.logbook import LogbookEntry

Action = Literal["learn", "keep-sigma", "keep-limits"]


def changes(entries: Sequence[LogbookEntry]) -> tuple[LogbookEntry, ...]:
    """Return the process changes among logbook lines, by moment; of several at one moment the last counts."""
    by_moment = {e.when: e for e in sorted(entries, key=lambda e: e.line) if e.kind == "process-change"}
    return tuple(by_moment[when] for when in sorted(by_moment))


def eras(entries: Sequence[LogbookEntry], era_of_point: Ints) -> tuple[Era, ...]:
    """Return the eras that hold points; `era_of_point` (N,) counts from 1, by the changes before each point.

    Two changes with no point between them leave an era without points; it keeps its number and is left out.
    """
    found = []
    for number in np.unique(era_of_point).tolist():
        entry = entries[number - 2] if number > 1 else None
        start = int(np.searchsorted(era_of_point, number, side="left"))
        found.append(
            Era(
                number=number,
                start_index=start,
                stop_index=int(np.searchsorted(era_of_point, number, side="right")),
                from_time=None if entry is None else entry.when,
                entry=entry,
                action="learn" if entry is None else cast("Action", entry.action or "learn"),
            )
        )
    return tuple(found)
