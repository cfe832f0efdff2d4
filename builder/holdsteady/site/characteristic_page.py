"""A characteristic's page: what it says first, then every number's origin."""

from __future__ import annotations

from dataclasses import dataclass

from markupsafe import Markup

from holdsteady.monitor.finding import Finding
from holdsteady.site import decimals
from holdsteady.site.case_lines import CaseRow, OpenLine, case_row, open_line
from holdsteady.site.data_page import LogbookRow, logbook_row
from holdsteady.site.headlines import details, headline
from holdsteady.site.limits_lines import LimitsRow, current_limits, estimate_lead, limits_table
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import Scale, opened
from holdsteady.site.point_rows import PointRow, flagged_rows, headings
from holdsteady.site.remarks import legend, remarks, rules_said, wanted
from holdsteady.site.sentences import Sentence
from holdsteady.site.words import CHARTS, CLASS_CAUTION, CLASSES, method_said
from holdsteady.site.worklist import Work, by_urgency, cautious

_MOST_CASES = 100  # rows; tables/cases.csv has all
_MOST_LINES = 30  # for the logbook, of the most urgent


@dataclass(frozen=True, slots=True, kw_only=True)
class Chart:
    """The chart of a page: what it binds, and the picture that stands until it does."""

    kind: str
    id: str
    src: str
    show: str  # the part that is shown first: "60", the last points, or "all"
    picture: Markup


@dataclass(frozen=True, slots=True, kw_only=True)
class Neighbour:
    """The page before or after, in the order of the first page."""

    title: str
    href: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Figures:
    """How limits are calculated from the latest era's baseline."""

    lead: str  # "" where these are the limits in force
    method: str
    figures: tuple[tuple[str, str], ...]
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class CharacteristicPage:
    """What a characteristic's page shows."""

    title: str
    state: str
    kicker: str
    sentence: Sentence
    details: tuple[str, ...]
    caution: str
    chart: Chart | None
    legend: str
    open_lines: tuple[OpenLine, ...]
    open_more: int
    reaction: str
    owner: str
    cases: tuple[CaseRow, ...]
    cases_more: int
    limits: tuple[tuple[str, str], ...]
    limits_table: tuple[LimitsRow, ...]
    rules: tuple[tuple[str, tuple[str, ...]], ...]
    refused_rules: tuple[str, ...]
    calculation: tuple[Figures, ...]
    wanted: tuple[tuple[str, str], ...]
    remarks: tuple[str, ...]
    logbook: tuple[LogbookRow, ...]
    panels: tuple[tuple[str, str], ...]  # how its column of values is headed, and that of their limits
    labelled: bool
    points: tuple[PointRow, ...]
    points_more: int
    points_href: str
    chart_name: str
    chart_href: str
    previous: Neighbour | None
    next: Neighbour | None


def characteristic_page(
    finding: Finding, chart: Chart | None, neighbours: tuple[Neighbour | None, Neighbour | None], clock: Clock
) -> CharacteristicPage:
    """Gather a characteristic's page."""
    settings = finding.settings
    cases = sorted(finding.cases, key=lambda c: (-c.last_index, c.id))
    urgent = by_urgency(finding)
    points, more = flagged_rows(finding, clock)
    statistic = "fraction" if finding.chart in {"p", "np"} else "value"
    unit = Scale(statistic=statistic, unit=settings.unit, decimals=decimals.of_reading(finding))
    return CharacteristicPage(
        title=finding.title, state=finding.state, kicker=_kicker(finding),
        sentence=headline(finding, clock),
        details=tuple(details(finding, clock)),
        caution=_caution(finding),
        chart=chart, legend=legend(finding) if finding.panels else "",
        open_lines=tuple(open_line(Work(finding, c), clock, root="../") for c in urgent[:_MOST_LINES]),
        open_more=max(len(urgent) - _MOST_LINES, 0),
        reaction=settings.reaction, owner=settings.owner,
        cases=tuple(case_row(finding, c, clock, root="../") for c in cases[:_MOST_CASES]),
        cases_more=max(len(cases) - _MOST_CASES, 0),
        limits=tuple(current_limits(finding, clock)), limits_table=limits_table(finding, clock),
        rules=rules_said(finding), refused_rules=tuple(_refused(finding)),
        calculation=tuple(
            Figures(
                lead="" if c.in_force else estimate_lead(finding, c),
                method=opened(method_said(c.method)), source=c.source,
                figures=tuple((name, unit.figure(value, unit=bearing)) for name, value, bearing in c.figures),
            )
            for c in finding.calculation
        ),
        wanted=wanted(finding, clock), remarks=remarks(finding),
        logbook=tuple(logbook_row(e, clock) for e in finding.logbook),
        panels=headings(finding),
        labelled=any(row.label for row in points), points=points,
        points_more=more,
        points_href=f"../tables/points/{finding.slug}.csv" if finding.points is not None else "",

        chart_name=CHARTS.get(finding.chart, finding.chart), chart_href=f"../methods.html#{finding.chart}",
        previous=neighbours[0], next=neighbours[1],
    )  # fmt: skip


def _caution(finding: Finding) -> str:
    if not cautious(finding):
        return ""
    return CLASS_CAUTION.format(kind=CLASSES[finding.settings.class_.strip().lower()])


def _kicker(finding: Finding) -> str:
    settings = finding.settings
    size = finding.common_n
    sample = (
        f"samples of {size:.0f}" if size is not None and size > 1 and finding.chart not in {"c", "u"} else ""
    )
    parts = (
        settings.area, f"gauge {settings.gauge}" if settings.gauge else "", sample,
        f"class {settings.class_}" if settings.class_ else "",
    )  # fmt: skip
    return " · ".join(part for part in parts if part)


def _refused(finding: Finding) -> list[str]:
    return [f"{rule}: {why}" for panel in finding.panels for rule, why in sorted(panel.refused_rules.items())]
