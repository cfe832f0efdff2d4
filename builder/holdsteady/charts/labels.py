"""The words a chart carries, asked of whoever writes sentences."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final, Protocol

from holdsteady.monitor.finding import Case, Era, Finding, Panel
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Specification

READING_WORDS: Final[Mapping[str, str]] = {
    "point": "point",
    "n": "n",
    "limits": "limits",
    "to": "to",
    "centre": "centre",
    "lower": "lower limit",
    "upper": "upper limit",
    "baseline": "in the baseline",
    "excluded": "left out of the limits by the logbook",
    "faulty": "measurement fault, not judged",
    "open": "incomplete, not judged",
    "below": "lies below: drawn at the least the gauge can tell, not used for the limits",
    "above": "lies above: drawn at the most the gauge can tell, not used for the limits",
    "beyond": "drawn at the edge: beyond this scale",
    "last": "last 60",
    "since": "since limits",
    "all": "all",
    "show": "Show",
    "order": "in order; many share a time",
    "hint": "arrow keys read the points",
}


class Labels(Protocol):
    """Words for the parts of a chart; every text may hold anything, it is escaped where it is used."""

    def panel(self, finding: Finding, panel: Panel) -> str:
        """Return what a panel draws: 'Mean of 5, mm'."""
        ...

    def era(self, finding: Finding, era: Era) -> str:
        """Return an era's limits in words: 'limits since 3 May, adopted by A. R.'."""
        ...

    def baseline(self, finding: Finding, era: Era) -> str:
        """Return the name of the stretch that an era's limits are estimated from."""
        ...

    def entry(self, finding: Finding, entry: LogbookEntry) -> str:
        """Return a line of the logbook, short."""
        ...

    def case(self, finding: Finding, case: Case) -> str:
        """Return a case in words: 'low since about Mon 07:00'."""
        ...

    def wanted(self, finding: Finding, panel: Panel, specification: Specification) -> tuple[str, ...]:
        """Return the specification in words, a few short lines for the margin."""
        ...

    def number(self, finding: Finding, panel: Panel, value: float) -> str:
        """Return a value of a panel without its unit."""
        ...

    def unit(self, finding: Finding, panel: Panel) -> str:
        """Return the unit behind a value, with the blank before it, or ''."""
        ...

    def decimals(self, finding: Finding, panel: Panel) -> int | None:
        """Return the decimals that values are read with; None for four significant digits."""
        ...

    @property
    def reading(self) -> Mapping[str, str]:
        """Words for reading a point and choosing a stretch; the keys of `READING_WORDS`."""
        ...
