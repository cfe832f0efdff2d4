"""The logbook: what people found, and when; read as it stands, never rewritten."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Kind = Literal["cause", "process-change", "measurement-fault", "note"]
Action = Literal["learn", "keep-sigma", "keep-limits"]


@dataclass(frozen=True, slots=True, kw_only=True)
class LogbookEntry:
    """One line of `logbook.csv`. Times are microseconds UTC; the span is half-open, [when, until).

    `until` is None where it was left empty: that moment alone. `characteristic` is a family's id,
    a member's name, `*`, or "". `line` counts from 1, the header is line 1.
    """

    line: int
    entered: int
    when: int
    until: int | None
    characteristic: str
    case: str
    gauge: str
    kind: Kind
    text: str
    action: str
    exclude: bool
    by: str
