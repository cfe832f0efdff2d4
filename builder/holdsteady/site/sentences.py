"""Each page's first sentence and the ones beneath it, built from a finding; nothing is computed here."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from holdsteady.monitor.finding import TOO_FEW, Case, Finding, Panel, Points
from holdsteady.monitor.limits import FEWEST
from holdsteady.project.logbook import LogbookEntry
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted, opened, plain, spelled
from holdsteady.site.words import SPREADS, panel_named, scale, statistic_said

# rule -> (while it lasts, once over): stories that are not a step have no likely start and no size
_FORMS = {
    "trend-high": ("has risen steadily", "rose steadily"),
    "trend-low": ("has fallen steadily", "fell steadily"),
    "trend": ("has moved steadily", "moved steadily"),
    "alternating": ("has gone up and down in turn", "went up and down in turn"),
    "hugging": ("has kept unusually close to its centre line", "kept unusually close to its centre line"),
    "avoiding-centre": ("has kept away from its centre line", "kept away from its centre line"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Sentence:
    """A sentence with the part that matters most marked; `subject` may become a link."""

    subject: str
    before: str = ""
    marked: str = ""
    after: str = "."

    @property
    def text(self) -> str:
        """The sentence as plain text."""
        return self.subject + self.before + self.marked + self.after


def case_sentence(finding: Finding, case: Case, clock: Clock) -> Sentence:
    """Return what a case says: 'Bore diameter has run low since about 07:00 on Monday, by 0.004 mm'."""
    panel = panel_named(finding, case.panel)
    rule = _earliest_rule(finding, case)
    if rule == "outside-limits" and case.first_index == case.last_index:
        return _one_point(finding, case, panel, clock)
    if rule in _FORMS:
        return _form(finding, case, rule, clock)
    return _shift(finding, case, panel, clock)


def shifted(finding: Finding, case: Case) -> bool:
    """Whether the case is told as a lasting change of level, with its size."""
    rule = _earliest_rule(finding, case)
    single = rule == "outside-limits" and case.first_index == case.last_index
    agrees = case.shift is not None and (case.shift > 0) == (case.direction == "high")
    # A step that lies after the point at which the rule was met cannot be what met it.
    explains = case.start_index is None or case.start_index <= case.fired_index
    return not single and rule not in _FORMS and agrees and explains


def case_label(finding: Finding, case: Case, clock: Clock) -> str:
    """Return a case in a few words, for the lane under a chart: 'low since about 07:00 on Monday'."""
    sentence = case_sentence(finding, case, clock)
    panel = panel_named(finding, case.panel)
    if case.first_index == case.last_index:
        side = "above" if case.direction == "high" else "below"
        return f"{side} its limit {_on(finding.points, case.first_index, clock)}"
    if panel.statistic in SPREADS and _earliest_rule(finding, case) not in _FORMS:
        return f"varied {sentence.marked}"
    return sentence.marked


def case_details(finding: Finding, case: Case, clock: Clock, *, specification: bool = True) -> list[str]:
    """Return what else is known of a case: when it may have begun, how large, which way.

    `specification` says whether its readings outside specification are told here.
    """
    panel = panel_named(finding, case.panel)
    details = []
    if case.start_low_index is not None and case.start_high_index is not None and shifted(finding, case):
        start = case.start_index if case.start_index is not None else case.first_index
        between = _between(finding.points, case.start_low_index, case.start_high_index, start, clock)
        if between:
            details.append(f"Most likely it began between {between}.")
    if case.shift_sigma is not None and shifted(finding, case):
        details.append(
            f"That is {plain(abs(case.shift_sigma), significant=2)} sigma of the {statistic_said(panel)}."
        )
    if specification and (outside := outside_said(case)):
        details.append(outside)
    if case.good_way:
        details.append("That is the good way.")
    return details


def outside_said(case: Case) -> str:
    """Return how many of a case's readings lie outside specification; '' without a specification."""
    outside, readings = case.outside_specification, case.readings
    if outside is None or readings == 0:
        return ""
    if readings == 1:
        return f"Its one reading is {'outside' if outside else 'inside'} specification."
    if outside == 0:
        return f"None of its {readings} readings is outside specification."
    verb = "is" if outside == 1 else "are"
    return f"{opened(spelled(outside))} of its {readings} readings {verb} outside specification."


def reason_said(case: Case) -> str:
    """Return what is recorded of a case: 'Nobody has recorded a reason'."""
    if not case.answered_by:
        return "Nobody has recorded a reason."
    return "A reason is recorded: " + "; ".join(quoted(entry) for entry in case.answered_by) + "."


def quoted(entry: LogbookEntry) -> str:
    """Return a logbook line's text with who wrote it."""
    return f"‘{entry.text}’" + (f" ({entry.by})" if entry.by else "")


def point_said(points: Points | None, index: int, clock: Clock) -> str:
    """Return a point's moment in a sentence; its number where the source has no time."""
    if points is None or points.time is None:
        return f"point {index + 1}"
    return clock.said(int(points.time[index]))


def point_short(points: Points | None, index: int, clock: Clock) -> str:
    """Return a point's moment in a table; its number where the source has no time."""
    if points is None or points.time is None:
        return f"point {index + 1}"
    return clock.short(int(points.time[index]))


def gathered(finding: Finding) -> str:
    """Return how far an era has come towards limits: '5 points; limits begin at 8'."""
    row = next((row for row in finding.limits_now if not row.limited), None)
    return f"{counted(0 if row is None else row.points or 0, 'point')}; limits begin at {FEWEST}"


def why_no_limits(finding: Finding) -> str:
    """Return what in a full baseline allows no limits: 'no variation in its baseline'; else ''."""
    row = next((row for row in finding.limits_now if not row.limited), None)
    return "" if row is None or row.note == TOO_FEW else row.note.replace("the baseline", "its baseline")


def _form(finding: Finding, case: Case, rule: str, clock: Clock) -> Sentence:
    lasting, over = _FORMS.get(f"{rule}-{case.direction}", _FORMS[rule])
    if case.ongoing:
        since = point_said(finding.points, case.first_index, clock)
        return Sentence(subject=finding.title, before=" ", marked=f"{lasting} since {since}")
    span = _over(finding.points, case.first_index, case.last_index, clock)
    return Sentence(subject=finding.title, before=" ", marked=f"{over} {span}")


def _shift(finding: Finding, case: Case, panel: Panel, clock: Clock) -> Sentence:
    spread = panel.statistic in SPREADS
    high = case.direction == "high"
    likely = case.start_index is not None and case.start_index <= case.fired_index
    about = "about " if likely else ""
    start = case.start_index if case.start_index is not None and likely else case.first_index
    way = ("more" if high else "less") if spread else ("high" if high else "low")
    if case.ongoing:
        before = " has varied " if spread else " has run "
        marked = f"{way} since {about}{point_said(finding.points, start, clock)}"
    else:
        before = " varied " if spread else " ran "
        marked = f"{way} {_over(finding.points, start, case.last_index, clock, about=about)}"
    after = "."
    if case.shift is not None and shifted(finding, case):
        size = scale(finding, panel).difference(case.shift)
        what = f"{statistic_said(panel).removeprefix('sample ')} {'up' if high else 'down'} by"
        after = f": {what} {size}." if spread else f", by {size}."
    return Sentence(subject=finding.title, before=before, marked=marked, after=after)


def _one_point(finding: Finding, case: Case, panel: Panel, clock: Clock) -> Sentence:
    index = case.fired_index
    high = case.direction == "high"
    written = scale(finding, panel)
    beyond = panel.upper if high else panel.lower
    value, limit = written.apart(float(panel.value[index]), float(beyond[index]))
    when = _on(finding.points, index, clock)
    side = "above" if high else "below"
    if panel.statistic in SPREADS:
        way = "more" if high else "less"
        size = f"{statistic_said(panel).removeprefix('sample ')} {value}, limit {limit}"
        marked = f"{way} than its limits allow {when}"
        return Sentence(subject=finding.title, before=" varied ", marked=marked, after=f": {size}.")
    return Sentence(
        subject=finding.title, before=f" stood at {value}, ", marked=f"{side} its limit of {limit}, {when}"
    )


def _earliest_rule(finding: Finding, case: Case) -> str:
    own = [s for s in finding.signals if s.case == case.id or s.id in case.signals]
    earliest = min(own, key=lambda s: (s.fired_index, s.panel != case.panel, s.id), default=None)
    return earliest.rule if earliest else ""


def _on(points: Points | None, index: int, clock: Clock) -> str:
    if points is None or points.time is None:
        return f"at point {index + 1}"
    return clock.on(int(points.time[index]))


def _over(points: Points | None, start: int, stop: int, clock: Clock, *, about: str = "") -> str:
    """Return 'from 07:00 to 09:00 on Monday'; 'at 07:00 on Monday' where both ends read alike."""
    if points is None or points.time is None:
        if start == stop:
            return f"at {about}point {start + 1}"
        return f"from {about}point {start + 1} to point {stop + 1}"
    first, last = int(points.time[start]), int(points.time[stop])
    if clock.said(first) == clock.said(last):
        return clock.on(first)
    return f"from {about}{clock.span(first, last)}"


def _between(points: Points | None, low: int, high: int, start: int, clock: Clock) -> str:
    if low == high:
        return ""
    if points is None or points.time is None:
        return f"point {low + 1} and point {high + 1}"
    first, last = int(points.time[low]), int(points.time[high])
    text = clock.between(first, last, int(points.time[start]))
    return text if " and " in text else ""


def latest_index(finding: Finding) -> int | None:
    """Return the newest complete point that has a value, None without one."""
    if finding.points is None or not finding.panels:
        return None
    usable = np.flatnonzero(~np.isnan(finding.panels[0].value) & ~finding.points.open)
    return int(usable[-1]) if usable.size else None


def open_cases(finding: Finding) -> Sequence[Case]:
    """Return the open cases, newest first."""
    return sorted((c for c in finding.cases if c.state == "open"), key=lambda c: (-c.fired_index, c.id))


def beyond(finding: Finding, index: int) -> str:
    """Return '<' before a point drawn at a limit that its reading lies below, '>' above, else ''."""
    side = 0 if finding.points is None else int(finding.points.side[index])
    return "" if side == 0 else "<\u202f" if side < 0 else ">\u202f"
