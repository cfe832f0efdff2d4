"""The signals page: the agenda of whoever meets about what is open, then everything else that signalled."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.monitor.finding import Case, CaseState, Finding
from holdsteady.site.case_lines import CaseRow, case_row
from holdsteady.site.first_page import TierLines, worklist
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted, grouped, opened, spelled
from holdsteady.site.sentences import open_cases
from holdsteady.site.words import CASE_STATES_EXPLAINED

_TABLES: tuple[tuple[CaseState, str], ...] = (
    ("answered", "Answered"),
    ("baseline", "In a baseline"),
    ("ended", "Ended without an answer"),
    ("historical", "Historical"),
    ("withdrawn", "Withdrawn"),
)
_MOST = 100  # rows of one table; tables/cases.csv has all
_MOST_BLOCKS = 200  # characteristics told in full; the others are named
_FURTHER = 5  # further cases of a characteristic that are told; its own page has all


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseTable:
    """Cases of one state, newest first."""

    title: str
    explained: str
    rows: tuple[CaseRow, ...]
    cut: str  # "The newest 100 of 2,684", "" where all stand here


@dataclass(frozen=True, slots=True, kw_only=True)
class Named:
    """A characteristic that found no room, with how many open cases it has."""

    title: str
    href: str
    count: int


@dataclass(frozen=True, slots=True, kw_only=True)
class SignalsPage:
    """What the signals page shows."""

    sentence: str
    tiers: tuple[TierLines, ...]
    further: bool  # whether some have more than one open case
    named: tuple[Named, ...]
    tables: tuple[CaseTable, ...]


def signals_page(findings: Sequence[Finding], clock: Clock) -> SignalsPage:
    """Gather the signals page."""
    work = worklist(findings, clock, most=_MOST_BLOCKS, further=_FURTHER)
    counts = [n for f in findings if (n := len(open_cases(f)))]
    tables = tuple(_table(findings, clock, state, title) for state, title in _TABLES)
    return SignalsPage(
        sentence=_sentence(counts, len(findings)), tiers=work.tiers, further=any(n > 1 for n in counts),
        named=tuple(
            Named(title=f.title, href=f"characteristic/{f.slug}.html", count=len(open_cases(f)))
            for f in (left.finding for left in work.rest)
        ),
        tables=tuple(t for t in tables if t.rows),
    )  # fmt: skip


def _sentence(counts: Sequence[int], total: int) -> str:
    """Return how many cases are open, from how many each characteristic with any has."""
    among = counted(total, "characteristic")
    count = sum(counts)
    if not count:
        return f"No case is open among {among}."
    said = f"{opened(spelled(count))} {'case is' if count == 1 else 'cases are'} open"
    if count == len(counts):
        return f"{said} among {among}."
    return f"{said} on {spelled(len(counts))} of {among}."


def _table(findings: Sequence[Finding], clock: Clock, state: CaseState, title: str) -> CaseTable:
    cases = [(f, c) for f in findings for c in f.cases if c.state == state]
    cases.sort(key=lambda fc: (-_moment(*fc), fc[0].name, fc[1].id))
    return CaseTable(
        title=title, explained=CASE_STATES_EXPLAINED[state],
        rows=tuple(case_row(f, c, clock, root="") for f, c in cases[:_MOST]),
        cut=f"The newest {_MOST} of {grouped(str(len(cases)))}" if len(cases) > _MOST else "",
    )  # fmt: skip


def _moment(finding: Finding, case: Case) -> int:
    """Return the case's last moment; without times its last point, so that the newest still comes first."""
    if finding.points is None or finding.points.time is None:
        return case.last_index
    return int(finding.points.time[case.last_index])
