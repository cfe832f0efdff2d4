"""The data page: what was read from which file, what was set aside and why, what has not come."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.intake.readings import Intake
from holdsteady.monitor.finding import Finding
from holdsteady.problems import Problem, Severity
from holdsteady.project.logbook import LogbookEntry
from holdsteady.site.arrival_lines import ArrivalLines, arrival_lines
from holdsteady.site.aside_lines import Reason, reasons
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted, grouped
from holdsteady.site.source_lines import SourceFiles, sources
from holdsteady.site.view import SiteView
from holdsteady.site.words import KINDS

_IN_SIGHT, _LISTED = 10, 200  # corrected rows
_SEVERITIES = {Severity.ERROR: "error", Severity.WARNING: "warning", Severity.NOTE: "note"}


@dataclass(frozen=True, slots=True, kw_only=True)
class LogbookRow:
    """A line of the logbook."""

    line: int
    when: str
    kind: str
    text: str
    action: str
    by: str
    names: str
    excluded: bool
    entered: str


@dataclass(frozen=True, slots=True, kw_only=True)
class DataPage:
    """What the data page shows."""

    sentence: str
    detail: str
    not_computed: tuple[tuple[str, str, str, str], ...]  # title, href, reason, remedy
    problems: tuple[tuple[str, str, str, str], ...]  # severity, where, what, remedy
    arrivals: ArrivalLines
    unmatched: tuple[LogbookRow, ...]
    ahead: tuple[LogbookRow, ...]
    sources: tuple[SourceFiles, ...]
    reasons: tuple[Reason, ...]
    reasons_more: int
    corrected: int
    corrections: tuple[tuple[str, str], ...]  # the row that was corrected, and the one that counts instead
    corrections_folded: tuple[tuple[str, str], ...]
    register_check: str


def data_page(findings: Sequence[Finding], intake: Intake, view: SiteView, clock: Clock) -> DataPage:
    """Gather the data page."""
    rows = sum(f.rows for f in intake.files)
    aside = sum(f.set_aside for f in intake.files)
    kept = (
        "none was set aside"
        if aside == 0
        else f"{grouped(str(aside))} {'was' if aside == 1 else 'were'} set aside"
    )
    problems = dict.fromkeys((*view.problems, *intake.problems))
    by_reason, reasons_more = reasons(intake.set_aside)
    corrections = [(f"{c.file}:{c.line}", f"{c.by_file}:{c.by_line}") for c in intake.corrections]
    return DataPage(
        sentence=f"{counted(rows, 'row')} in {counted(len(intake.files), 'file')}; {kept}.",
        detail=_detail(intake),
        not_computed=tuple(
            (f.title, f"characteristic/{f.slug}.html", f.reason, f.remedy)
            for f in sorted(findings, key=lambda f: (f.title.casefold(), f.name)) if f.state == "not-computed"
        ),
        problems=tuple(_problem(p) for p in problems),
        arrivals=arrival_lines(view.arrivals, clock),
        unmatched=tuple(logbook_row(e, clock) for e in view.unmatched),
        ahead=tuple(logbook_row(e, clock, entered=True) for e in view.ahead),
        sources=sources(intake.files, clock),
        reasons=by_reason,
        reasons_more=reasons_more,
        corrected=sum(f.corrected for f in intake.files),
        corrections=tuple(corrections[:_IN_SIGHT]),
        corrections_folded=tuple(corrections[_IN_SIGHT:_LISTED]),
        register_check=view.register_check,
    )  # fmt: skip


def logbook_row(entry: LogbookEntry, clock: Clock, *, entered: bool = False) -> LogbookRow:
    """Return a logbook line written out; `entered` says whether to tell when it was entered."""
    when = clock.full(entry.when) if entry.until is None else clock.span(entry.when, entry.until)
    named = (entry.characteristic, entry.case, f"gauge {entry.gauge}" if entry.gauge else "")
    return LogbookRow(
        line=entry.line, when=when, kind=KINDS[entry.kind], text=entry.text, action=entry.action, by=entry.by,
        names=" · ".join(name for name in named if name), excluded=entry.exclude,
        entered=f"Entered {clock.full(entry.entered)}." if entered else "",
    )  # fmt: skip


def _detail(intake: Intake) -> str:
    """Return what became of the rows that were not set aside."""
    used, filtered, repeated, corrected = (
        sum(getattr(f, name) for f in intake.files) for name in ("used", "filtered", "repeated", "corrected")
    )
    said = [f"{grouped(str(used))} gave a reading to some characteristic"]
    if filtered:
        said.append(f"{grouped(str(filtered))} {_was(filtered)} asked for by none")
    if repeated:
        said.append(f"{grouped(str(repeated))} {_was(repeated)} there before")
    if corrected:
        said.append(f"{grouped(str(corrected))} {_was(corrected)} corrected by a newer row")
    return f"{'; '.join(said)}. Every row is accounted for."


def _problem(problem: Problem) -> tuple[str, str, str, str]:
    place = problem.where if problem.line is None else f"{problem.where}:{problem.line}"
    return (_SEVERITIES[problem.severity], place, problem.what, problem.remedy)


def _was(count: int) -> str:
    return "was" if count == 1 else "were"
