"""The rows of one file that can be used, column by column, and what judging a whole source adds."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.clock import Clock
from holdsteady.intake.numbers import MarkEvidence, Numbers
from holdsteady.intake.times_text import AMBIGUOUS, NO_TIME, Family, Stamps, label

ROW = ""  # stands for the whole row where a column's name could


@dataclass(frozen=True, slots=True, kw_only=True)
class Judgement:
    """What the files of a source show together: the decimal mark, and which way round a/b/yyyy is."""

    marks: MarkEvidence
    day_first: bool | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """N rows of a file, each with all its fields and, where the source has one, a time.

    `line`, `time` are (N,), `time` in microseconds UTC. `texts` holds the cells as they are written
    (and whole rows under `ROW`) where the file was read with care; a file read fast has them in its lines.
    """

    line: Ints
    time: Ints | None
    numbers: dict[str, Numbers]
    labels: dict[str, Any]  # Arrow dictionary columns
    texts: dict[str, pa.StringArray] | None
    decimal: str
    time_format: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Timing:
    """The stamps of a file's rows turned into moments: each array (N,), the words for the format."""

    time: Ints
    unread: Bools
    early: Bools
    late: Bools
    family: Family
    format: str

    @property
    def usable(self) -> Bools:
        """Rows that have a time."""
        return ~(self.unread | self.early | self.late)

    def reason(self, day_first: bool | None) -> str:  # noqa: FBT001  three answers, not a switch
        """Say why a stamp could not be read."""
        if self.family in AMBIGUOUS and day_first is None:
            return "day and month cannot be told apart; set `time_format` of its source"
        if not self.format:
            return "no time that can be read; set `time_format` of its source"
        return f"no time in this file's format ({self.format})"


def timing(stamps: Stamps, judgement: Judgement, clock: Clock, given: str | None) -> Timing:
    """Turn stamps, in the order of a file's lines, into moments."""
    family = stamps.main_family()
    wall = stamps.resolved(family, day_first=judgement.day_first)
    unread = wall == NO_TIME
    time = np.full(wall.size, NO_TIME)
    time[~unread] = clock.to_utc(wall[~unread], stamps.zoned[~unread])
    return Timing(
        time=time,
        unread=unread,
        early=~unread & clock.too_early(time),
        late=~unread & clock.too_late(time),
        family=family,
        format=given or label(family, day_first=judgement.day_first),
    )
