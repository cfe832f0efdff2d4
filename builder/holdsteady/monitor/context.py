"""What every characteristic of one build shares."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.register import RegisterLine


@dataclass(frozen=True, slots=True, kw_only=True)
class Context:
    """The moment a build speaks of, and what people had written until then. Times are microseconds UTC."""

    as_of: int
    zone: ZoneInfo
    watch_from: int | None
    attention: int
    logbook: tuple[LogbookEntry, ...]
    register: tuple[RegisterLine, ...]
