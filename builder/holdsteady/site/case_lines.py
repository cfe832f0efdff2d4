"""A case as pages list it: on the worklist, on the signals page, on its characteristic's page."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass

from markupsafe import Markup

from holdsteady.monitor.finding import Case, Finding
from holdsteady.site.headlines import answer_said
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import opened, plain, spelled
from holdsteady.site.pictures import strip_picture
from holdsteady.site.sentences import Sentence, case_details, case_sentence, point_short, quoted, shifted
from holdsteady.site.words import CASE_STATES, panel_named, scale, signal_said
from holdsteady.site.worklist import Work, why


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenLine:
    """An open case with everything needed to act on it."""

    case: str
    href: str
    strip: Markup
    sentence: Sentence
    details: tuple[str, ...]  # without how many readings are outside specification, which `why` tells
    why: str
    who: tuple[str, ...]  # area and owner, once where they are one
    answer: str
    reaction: str
    logbook_line: str
    more: str  # "six more open cases", "" without any
    further: tuple[tuple[str, str], ...] = ()  # of these the first few: case, what it says


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseRow:
    """A case in a table."""

    case: str
    title: str
    href: str
    state: str
    state_said: str
    said: str  # as a sentence
    said_here: str  # as a sentence on the page of its own characteristic
    signals: tuple[str, ...]
    first: str
    last: str
    shift: str
    answer: str


def open_line(work: Work, clock: Clock, *, root: str, further: int = 0) -> OpenLine:
    """Return an open case for the worklist; `root` leads from the page to the site's folder.

    `further` says how many of the characteristic's further open cases are told, each in a sentence.
    """
    finding, case = work.finding, work.case
    count = len(work.further)
    return OpenLine(
        case=case.id, href=f"{root}characteristic/{finding.slug}.html",
        strip=strip_picture(finding, case, width=230, height=34),
        sentence=case_sentence(finding, case, clock),
        details=tuple(case_details(finding, case, clock, specification=False)),
        why=why(work),
        who=_who(finding), answer=answer_said(case),
        reaction=finding.settings.reaction, logbook_line=logbook_line(finding, case, clock),
        more=f"{spelled(count)} more open {'case' if count == 1 else 'cases'}" if count else "",
        further=tuple((c.id, _said_here(case_sentence(finding, c, clock))) for c in work.further[:further]),
    )  # fmt: skip


def case_row(finding: Finding, case: Case, clock: Clock, *, root: str) -> CaseRow:
    """Return a case for a table, every signal of it in words."""
    sentence = case_sentence(finding, case, clock)
    signals = [s for s in finding.signals if s.id in case.signals]
    return CaseRow(
        case=case.id, title=finding.title, href=f"{root}characteristic/{finding.slug}.html", state=case.state,
        state_said=CASE_STATES[case.state], said=sentence.text,
        said_here=_said_here(sentence),
        signals=tuple(signal_said(finding, s) for s in sorted(signals, key=lambda s: (s.fired_index, s.id))),
        first=point_short(finding.points, case.first_index, clock),
        last="ongoing" if case.ongoing else point_short(finding.points, case.last_index, clock),
        shift=_shift(finding, case),
        answer="; ".join(quoted(entry) for entry in case.answered_by) or "none recorded",
    )  # fmt: skip


def _said_here(sentence: Sentence) -> str:
    """Return a sentence without its subject, which stands above it."""
    return opened((sentence.before + sentence.marked + sentence.after).strip())


def logbook_line(finding: Finding, case: Case, clock: Clock) -> str:
    """Return the line that answers a case, as `logbook.csv` takes it, its text left to write.

    It names the case and its span so far, whole minutes from the first point's to the one after the last
    point's, so that `exclude` put to yes takes these points and leaves what comes later in.
    """
    times = finding.points.time if finding.points is not None else None
    when = clock.now if times is None else int(times[case.first_index])
    until = "" if times is None else clock.written(int(times[case.last_index]), up=True)
    line = io.StringIO()
    csv.writer(line, lineterminator="").writerow(
        [
            clock.written(clock.now),
            clock.written(when),
            until,
            finding.name,
            case.id,
            "",
            "cause",
            "",
            "",
            "",
            "",
        ]
    )
    return line.getvalue()


def _who(finding: Finding) -> tuple[str, ...]:
    names = (finding.settings.area, finding.settings.owner)
    return tuple(dict.fromkeys(name for name in names if name))


def _shift(finding: Finding, case: Case) -> str:
    if case.shift is None or case.shift_sigma is None or not shifted(finding, case):
        return ""
    size = scale(finding, panel_named(finding, case.panel)).difference(case.shift)
    return f"{size}, {plain(abs(case.shift_sigma), significant=2)} sigma"
