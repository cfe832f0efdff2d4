"""The words that charts ask for, written as the page around them writes."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from holdsteady.charts.labels import READING_WORDS
from holdsteady.monitor.finding import TOO_FEW, Case, Era, Finding, LimitsInForce, Panel
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Specification
from holdsteady.site import decimals
from holdsteady.site.moments import Clock
from holdsteady.site.sentences import case_label
from holdsteady.site.words import scale, statistic_name

_LONGEST = 48  # characters of a logbook line beside its mark
_SINGLE_PIECES = {"value", "count", "fraction", "rate"}


@dataclass(frozen=True, slots=True, kw_only=True)
class SiteLabels:
    """Words for the parts of a chart; see `holdsteady.charts.labels.Labels` for what each is."""

    clock: Clock

    def panel(self, finding: Finding, panel: Panel) -> str:
        """Return 'Mean of 5, mm'."""
        unit = "%" if panel.statistic == "fraction" else finding.settings.unit
        name = statistic_name(panel, finding.common_n)
        return f"{name}, {unit}" if unit else name

    def era(self, finding: Finding, era: Era) -> str:
        """Return 'new die · limits since 3 May, adopted by A. R.'."""
        parts = [_cut(era.entry.text)] if era.entry is not None else []
        rows = [row for row in finding.limits if row.era == era.number and row.stop_index > row.start_index]
        if rows:
            parts.append(self.limits(max(rows, key=lambda row: row.start_index)))
        return " · ".join(parts)

    def limits(self, row: LimitsInForce) -> str:
        """Return a set of limits in a few words: 'limits since 3 May, adopted by A. R.'."""
        if not row.limited:
            return "no limits yet" if row.note == TOO_FEW else f"no limits: {row.note}"
        if row.kind == "provisional":
            return "provisional limits"
        since = "" if row.in_force_from is None else f" since {self.clock.day(row.in_force_from)}"
        said = f"limits{since}, {row.kind}"
        return f"{said} by {row.by}" if row.by else said

    def baseline(self, finding: Finding, era: Era) -> str:
        """Return 'baseline, 25 points'."""
        rows = [row for row in finding.limits if row.era == era.number and row.points is not None]
        return f"baseline, {rows[-1].points} points" if rows else "baseline"

    def entry(self, finding: Finding, entry: LogbookEntry) -> str:  # noqa: ARG002  asked of every labeller
        """Return what was written, cut to what fits beside its mark."""
        return _cut(entry.text)

    def case(self, finding: Finding, case: Case) -> str:
        """Return 'low since about 07:00 on Monday'."""
        return case_label(finding, case, self.clock)

    def wanted(self, finding: Finding, panel: Panel, specification: Specification) -> tuple[str, ...]:
        """Return what is wanted, for the margin; on a chart of means, that it is meant for single pieces."""
        written = scale(finding, panel)
        if finding.settings.decimals is None:
            written = replace(written, decimals=decimals.of_wanted(specification, written.decimals))
        lower, upper = (
            None if v is None else written.bare(v) for v in (specification.lower, specification.upper)
        )
        if lower is not None and upper is not None:
            span = f"{lower} to {upper}"
        else:
            span = f"at least {lower}" if lower is not None else f"at most {upper}"
        single = panel.statistic in _SINGLE_PIECES
        return ("wanted", span) if single else ("wanted of", "single pieces", span)

    def number(self, finding: Finding, panel: Panel, value: float) -> str:
        """Return a value without its unit."""
        return scale(finding, panel).bare(value)

    def unit(self, finding: Finding, panel: Panel) -> str:
        """Return the unit with the blank before it."""
        return scale(finding, panel).with_unit("")

    def decimals(self, finding: Finding, panel: Panel) -> int | None:
        """Return the decimals values are read with; counts have none."""
        return decimals.of_panel(finding, panel)

    @property
    def reading(self) -> Mapping[str, str]:
        """Words for reading a point."""
        return READING_WORDS


def _cut(text: str) -> str:
    return text if len(text) <= _LONGEST else text[: _LONGEST - 1].rstrip() + "…"
