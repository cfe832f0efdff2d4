"""What a characteristic's page and the first page open with: one sentence, and a few beneath it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

from holdsteady.monitor.finding import Case, Finding
from holdsteady.site.moments import Clock, duration
from holdsteady.site.numbers import grouped, known, listed, opened, spelled
from holdsteady.site.sentences import (
    Sentence,
    beyond,
    case_details,
    case_sentence,
    gathered,
    latest_index,
    open_cases,
    point_short,
    quoted,
    reason_said,
    why_no_limits,
)  # fmt: skip
from holdsteady.site.words import scale, statistic_said
from holdsteady.site.worklist import by_urgency


def first_sentence(findings: Sequence[Finding]) -> Sentence:
    """Return the first page's sentence, always with its denominator."""
    total = len(findings)
    wanting = _wanting(findings)
    if wanting:
        if total == 1:
            return Sentence(subject="", marked="The one characteristic needs someone now")
        return Sentence(
            subject="",
            marked=f"{opened(spelled(wanting))} of {_count(total)} characteristics",
            after=f" {_verb(wanting, 'needs', 'need')} someone now.",
        )
    without = _without(findings)
    after = f"; {listed(without)}." if without else "."
    if _quiet(findings):
        among = " in the one characteristic" if total == 1 else f" among {_count(total)} characteristics"
        return Sentence(subject=f"No {_open_signal(findings)}", before=among, after=after)
    none = (
        "The one characteristic needs no one"
        if total == 1
        else f"None of {_count(total)} characteristics needs someone"
    )
    return Sentence(subject=f"{none} now", after=after)


def first_details(findings: Sequence[Finding]) -> list[str]:
    """Return how the others stand, in the words of their states."""
    counts = Counter(f.state for f in findings)
    wanting = _wanting(findings)
    parts = []
    if counts["steady"] and not (wanting == 0 and _quiet(findings)):
        none = _open_signal([f for f in findings if f.state == "steady"])
        parts.append(f"{_count(counts['steady'])} {_verb(counts['steady'], 'shows', 'show')} no {none}")
    if good := sum(f.state == "signalling" and all(c.good_way for c in open_cases(f)) for f in findings):
        parts.append(f"{_count(good)} moved the good way")
    if counts["answered"]:
        parts.append(
            f"{_count(counts['answered'])} {_verb(counts['answered'], 'has', 'have')} a recorded reason"
        )
    if wanting:
        parts += _without(findings)
    return [f"{opened(listed(parts))}."] if parts else []


def headline(finding: Finding, clock: Clock) -> Sentence:
    """Return the sentence that answers whoever opens a characteristic's page."""
    worst = leading_case(finding)
    if finding.state == "signalling" and worst is not None:
        return case_sentence(finding, worst, clock)
    if finding.state == "answered" and worst is not None:
        said = case_sentence(finding, worst, clock)
        return Sentence(
            subject=said.subject, before=said.before, marked=said.marked,
            after=said.after.removesuffix(".") + "; a reason is recorded.",
        )  # fmt: skip
    title = finding.title
    if finding.state == "silent" and finding.silent_since is not None:
        return Sentence(
            subject=title, before=" has ", marked=f"sent no reading since {clock.said(finding.silent_since)}"
        )
    why = why_no_limits(finding)
    if finding.state == "gathering" or (finding.state == "not-computed" and why):
        waiting = f" is gathering points for its limits: {gathered(finding)}"
        return Sentence(subject=title, before=f" has no limits: {why}" if why else waiting)
    if finding.state == "not-computed":
        return Sentence(subject=title, before=" ", marked="cannot be computed", after=f": {finding.reason}.")
    ended = _ended(finding)
    return Sentence(
        subject=title, before=f" shows no {_open_signal([finding])}", after=f"; {ended}." if ended else "."
    )


def details(finding: Finding, clock: Clock) -> list[str]:
    """Return the sentences beneath the headline."""
    worst = leading_case(finding)
    if finding.state == "not-computed":
        remedy = [_sentence(finding.remedy)] if finding.remedy else []
        return ["Without limits it cannot signal.", *remedy] if why_no_limits(finding) else remedy
    if finding.state in {"signalling", "answered"} and worst is not None:
        said = [*case_details(finding, worst, clock), reason_said(worst)]
        if finding.state == "answered":
            said.append("That a reason is recorded does not say that it is fixed.")
        more = len(open_cases(finding)) - (worst.state == "open")
        if more:
            said.append(f"{opened(spelled(more))} more {'case is' if more == 1 else 'cases are'} open.")
        return said
    said = []
    if finding.state == "silent" and finding.settings.cadence is not None:
        said.append(
            f"A point is due every {duration(finding.settings.cadence.microseconds).removeprefix('1 ')}."
        )
    if latest := _latest(finding, clock):
        said.append(latest)
    if "outside-specification" in finding.flags:
        said.append("Still, a reading lies outside specification lately: the other question, further down.")
    return said


def leading_open(finding: Finding) -> Case | None:
    """Return the most urgent open case, None without one."""
    return next(iter(by_urgency(finding)), None)


def leading_case(finding: Finding) -> Case | None:
    """Return the case a page opens with: the most urgent open one, else the newest answered one."""
    answered = (c for c in finding.cases if c.state == "answered")
    return leading_open(finding) or max(answered, key=lambda c: (c.last_index, c.id), default=None)


def state_said(finding: Finding, clock: Clock) -> str:
    """Return a state for a row, with what makes it so: 'silent since Fri 15:02'."""
    if finding.state == "silent" and finding.silent_since is not None:
        return f"silent since {clock.short(finding.silent_since)}"
    if finding.state in {"gathering", "not-computed"} and (why := why_no_limits(finding)):
        return f"no limits: {why}"
    if finding.state == "gathering":
        return f"gathering, {gathered(finding)}"
    if finding.state == "signalling" and all(c.good_way for c in open_cases(finding)):
        return "signalling, the good way"
    return finding.state.replace("-", " ")


def latest_value(finding: Finding) -> str:
    """Return the newest complete point's value with its unit, '' without one."""
    index = latest_index(finding)
    if index is None:
        return ""
    panel = finding.panels[0]
    return f"{beyond(finding, index)}{scale(finding, panel).value(float(panel.value[index]))}"


def answer_said(case: Case) -> str:
    """Return in a few words whether a reason is recorded: 'no reason recorded', 'answered: ‘…’'."""
    return f"answered: {quoted(case.answered_by[-1])}" if case.answered_by else "no reason recorded"


def _latest(finding: Finding, clock: Clock) -> str:
    index = latest_index(finding)
    if index is None:
        return ""
    panel = finding.panels[0]
    written = scale(finding, panel)
    lower, upper = float(panel.lower[index]), float(panel.upper[index])
    when = point_short(finding.points, index, clock)
    value = f"{beyond(finding, index)}{written.value(float(panel.value[index]))}"
    said = f"Its latest {statistic_said(panel)} is {value} ({when})"
    if known(lower) and known(upper):
        return f"{said}; the limits there are {written.bare(lower)} and {written.value(upper)}."
    if known(upper):
        return f"{said}; the upper limit there is {written.value(upper)}."
    if known(lower):
        return f"{said}; the lower limit there is {written.value(lower)}."
    return f"{said}; there are no limits{'' if why_no_limits(finding) else ' yet'}."


def _passed(finding: Finding) -> bool:
    """Whether cases of its history are still told, though none is open."""
    return any(case.state != "withdrawn" for case in finding.cases)


def _ended(finding: Finding) -> str:
    """Return how many cases ended without an answer; '' for none."""
    count = sum(case.state == "ended" for case in finding.cases)
    return f"{spelled(count)} {'case' if count == 1 else 'cases'} ended without an answer" if count else ""


def _open_signal(findings: Sequence[Finding]) -> str:
    """Return 'signal', or 'open signal' where a history holds signals that are open no more."""
    return "open signal" if any(_passed(f) for f in findings) else "signal"


def _wanting(findings: Sequence[Finding]) -> int:
    return sum(any(not case.good_way for case in open_cases(f)) for f in findings)


def _quiet(findings: Sequence[Finding]) -> bool:
    """Whether no characteristic shows a signal that counts now, be it answered or of the good way."""
    return not any(f.state in {"signalling", "answered"} for f in findings)


def _without(findings: Sequence[Finding]) -> list[str]:
    counts = Counter(f.state for f in findings)
    never = sum(f.state == "gathering" and why_no_limits(f) != "" for f in findings)
    parts = []
    if n := counts["silent"]:
        parts.append(f"{_count(n)} {_verb(n, 'has', 'have')} sent no data lately")
    if n := counts["not-computed"]:
        parts.append(f"{_count(n)} cannot be computed")
    if n := counts["gathering"] - never:
        parts.append(f"{_count(n)} {_verb(n, 'is', 'are')} gathering points")
    if never:
        having = _verb(never, "has a baseline that allows", "have baselines that allow")
        parts.append(f"{_count(never)} {having} no limits")
    return parts


def _verb(count: int, singular: str, plural: str) -> str:
    return singular if count == 1 else plural


def _count(count: int) -> str:
    return grouped(f"{count:d}")


def _sentence(text: str) -> str:
    return text if text.endswith((".", "!", "?")) else f"{text}."
