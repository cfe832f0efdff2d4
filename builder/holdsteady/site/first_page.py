"""The first page: what needs someone, then every characteristic as a row."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from markupsafe import Markup

from holdsteady.monitor.finding import Finding
from holdsteady.site.case_lines import OpenLine, open_line
from holdsteady.site.headlines import first_details, first_sentence, latest_value, leading_open, state_said
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted
from holdsteady.site.pictures import strip_picture
from holdsteady.site.sentences import Sentence, latest_index, open_cases, point_short
from holdsteady.site.words import STATE_ORDER, STATES, flag_short
from holdsteady.site.worklist import Work, by_attention, tiers

_MOST_LINES = 30  # of the worklist; the signals page has more
_ELSEWHERE = "Elsewhere"  # for characteristics that name no area, where others do


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One characteristic."""

    title: str
    href: str
    search: str
    area: str
    state: str
    state_said: str
    strip: Markup
    latest: str
    when: str
    open_cases: int
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Area:
    """The characteristics of one area."""

    name: str
    rows: tuple[Row, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class TierLines:
    """Characteristics with open cases that stand together, each with its most urgent one."""

    title: str
    lines: tuple[OpenLine, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Worklist:
    """What needs someone, the most urgent first, and what found no room."""

    tiers: tuple[TierLines, ...]
    rest: tuple[Work, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FirstPage:
    """What the first page shows."""

    sentence: Sentence
    details: tuple[str, ...]
    tiers: tuple[TierLines, ...]
    more: str  # "31 more characteristics", "" where all stand here
    areas: tuple[Area, ...]
    states: tuple[tuple[str, str], ...]


def first_page(findings: Sequence[Finding], clock: Clock) -> FirstPage:
    """Gather the first page."""
    grouped = by_attention(findings)
    named = any(area for area, _ in grouped)
    areas = []
    for area, members in grouped:
        name = area or (_ELSEWHERE if named else "")
        areas.append(Area(name=name, rows=tuple(_row(f, name, clock) for f in members)))
    present = {f.state for f in findings}
    work = worklist(findings, clock, most=_MOST_LINES)
    return FirstPage(
        sentence=first_sentence(findings), details=tuple(first_details(findings)),
        tiers=work.tiers, areas=tuple(areas),
        more=counted(len(work.rest), "more characteristic") if work.rest else "",
        states=tuple((state, STATES[state]) for state in STATE_ORDER if state in present),
    )  # fmt: skip


def worklist(findings: Sequence[Finding], clock: Clock, *, most: int, further: int = 0) -> Worklist:
    """Return tiers of at most so many lines in all, each with so many of its further cases told."""
    shown: list[TierLines] = []
    rest: list[Work] = []
    room = most
    for tier in tiers(findings):
        lines = tuple(open_line(work, clock, root="", further=further) for work in tier.work[:room])
        if lines:
            shown.append(TierLines(title=tier.title, lines=lines))
        rest += tier.work[room:]
        room -= len(lines)
    return Worklist(tiers=tuple(shown), rest=tuple(rest))


def _row(finding: Finding, area: str, clock: Clock) -> Row:
    settings = finding.settings
    index = latest_index(finding)
    searched = (finding.title, finding.name, area, settings.gauge, settings.owner, settings.unit)
    return Row(
        title=finding.title, href=f"characteristic/{finding.slug}.html", search=" ".join(searched).lower(),
        area=area,
        state=finding.state, state_said=state_said(finding, clock),
        strip=strip_picture(finding, leading_open(finding), width=210, height=24),
        latest=latest_value(finding), when="" if index is None else point_short(finding.points, index, clock),
        open_cases=len(open_cases(finding)),
        flags=tuple(said for flag in finding.flags if (said := flag_short(finding, flag))),
    )  # fmt: skip
