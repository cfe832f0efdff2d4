"""The signals page: the agenda of whoever meets about what is open, then everything else that signalled."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.monitor.finding import Case, CaseState, Finding
from holdsteady.site.case_lines import CaseRow, case_row
from holdsteady.site.first_page import TierLines, tier_lines
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted, opened, spelled
from holdsteady.site.words import CASE_STATES_EXPLAINED

_TABLES: tuple[tuple[CaseState, str], ...] = (
    ("answered", "Answered"),
    ("baseline", "In a baseline"),
    ("ended", "Ended without an answer"),
    ("historical", "Historical"),
    ("withdrawn", "Withdrawn"),
)
_MOST = 200  # rows of one table; tables/cases.csv has all


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseTable:
    """Cases of one state, newest first."""

    title: str
    explained: str
    rows: tuple[CaseRow, ...]
    more: int


@dataclass(frozen=True, slots=True, kw_only=True)
class SignalsPage:
    """What the signals page shows."""

    sentence: str
    tiers: tuple[TierLines, ...]
    tables: tuple[CaseTable, ...]


def signals_page(findings: Sequence[Finding], clock: Clock) -> SignalsPage:
    """Gather the signals page."""
    lines = tier_lines(findings, clock, root="")
    count = sum(len(tier.lines) for tier in lines)
    among = counted(len(findings), "characteristic")
    if count:
        sentence = f"{opened(spelled(count))} {'case is' if count == 1 else 'cases are'} open among {among}."
    else:
        sentence = f"No case is open among {among}."
    tables = tuple(_table(findings, clock, state, title) for state, title in _TABLES)
    return SignalsPage(sentence=sentence, tiers=lines, tables=tuple(t for t in tables if t.rows))


def _table(findings: Sequence[Finding], clock: Clock, state: CaseState, title: str) -> CaseTable:
    cases = [(f, c) for f in findings for c in f.cases if c.state == state]
    cases.sort(key=lambda fc: (-_moment(*fc), fc[0].name, fc[1].id))
    return CaseTable(
        title=title, explained=CASE_STATES_EXPLAINED[state],
        rows=tuple(case_row(f, c, clock, root="") for f, c in cases[:_MOST]), more=max(len(cases) - _MOST, 0),
    )  # fmt: skip


def _moment(finding: Finding, case: Case) -> int:
    """Return the case's last moment; without times its last point, so that the newest still comes first."""
    if finding.points is None or finding.points.time is None:
        return case.last_index
    return int(finding.points.time[case.last_index])
