"""Plain words for a chart that stands alone, as tests look at it."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final
from zoneinfo import ZoneInfo

from holdsteady.charts.labels import READING_WORDS
from holdsteady.monitor.finding import Case, Era, Finding, Panel
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Specification
from holdsteady.times import to_datetime

_MONTHS: Final = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
_SINGLE_PIECES: Final = frozenset({"value", "count", "fraction", "rate"})


@dataclass(frozen=True, slots=True, kw_only=True)
class PlainLabels:
    """Plain words, for a chart that stands alone."""

    zone: ZoneInfo

    def panel(self, finding: Finding, panel: Panel) -> str:
        """Return the statistic with its unit."""
        name = panel.statistic.replace("-", " ").capitalize()
        of = (
            f" of {finding.common_n:.0f}"
            if finding.common_n and panel.statistic in {"mean", "median", "range", "s"}
            else ""
        )
        unit = finding.settings.unit if panel.statistic != "fraction" else "%"
        return f"{name}{of}, {unit}" if unit else f"{name}{of}"

    def era(self, finding: Finding, era: Era) -> str:
        """Return the process change that began the era, and since when its latest limits are in force."""
        parts = [era.entry.text] if era.entry else []
        rows = [row for row in finding.limits if row.era == era.number]
        if (
            rows
            and rows[-1].sigma is None
            and rows[-1].lower is None
            and rows[-1].upper is None
            and not rows[-1].varies
        ):
            return " · ".join([*parts, "no limits yet"])
        if rows:
            last = rows[-1]
            since = "" if last.in_force_from is None else f" since {self._day(last.in_force_from)}"
            by = f" by {last.by}" if last.by else ""
            parts.append(f"limits{since}, {last.kind}{by}" if since else f"{last.kind} limits{by}")
        return " · ".join(parts)

    def baseline(self, finding: Finding, era: Era) -> str:  # noqa: ARG002  others may say more
        """Return 'baseline'."""
        return "baseline"

    def entry(self, finding: Finding, entry: LogbookEntry) -> str:  # noqa: ARG002
        """Return what was written."""
        return entry.text

    def case(self, finding: Finding, case: Case) -> str:
        """Return the direction and since when."""
        way = {"high": "high", "low": "low", "none": "unusual"}[case.direction]
        index = case.first_index if case.start_index is None else case.start_index
        points = finding.points
        if points is None or points.time is None:
            return f"{way} since about point {index + 1}"
        return f"{way} since about {self._day(int(points.time[index]))}"

    def wanted(self, finding: Finding, panel: Panel, specification: Specification) -> tuple[str, ...]:
        """Return 'wanted', of what, and the limits of the specification."""
        low, high = specification.lower, specification.upper
        texts = [None if value is None else self.number(finding, panel, value) for value in (low, high)]
        span = (
            f"{texts[0]} to {texts[1]}"
            if None not in texts
            else f"at least {texts[0]}"
            if texts[0]
            else f"at most {texts[1]}"
        )
        return ("wanted", span) if panel.statistic in _SINGLE_PIECES else ("wanted,", "single pieces", span)

    def number(self, finding: Finding, panel: Panel, value: float) -> str:
        """Return the number with the chart's decimals, or to four significant digits."""
        value *= 100 if panel.statistic == "fraction" else 1
        decimals = self.decimals(finding, panel)
        text = (
            f"{value:.4g}" if decimals is None or panel.statistic == "fraction" else f"{value:.{decimals}f}"
        )
        return text.replace("-", "−")

    def unit(self, finding: Finding, panel: Panel) -> str:
        """Return the unit with its blank."""
        if panel.statistic == "fraction":
            return "\u202f%"
        return f" {finding.settings.unit}" if finding.settings.unit else ""

    def decimals(self, finding: Finding, panel: Panel) -> int | None:
        """Return the settings' decimals; counts and fractions have none of their own."""
        return None if panel.statistic in {"count", "fraction", "rate"} else finding.settings.decimals

    @property
    def reading(self) -> Mapping[str, str]:
        """Return English words."""
        return READING_WORDS

    def _day(self, moment: int) -> str:
        at: dt.datetime = to_datetime(moment, self.zone)
        return f"{at.day} {_MONTHS[at.month - 1]}"
