"""What a build did: its account, its problems, how long it took, and what it answers to the shell."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.intake.readings import FileAccount, Intake, SetAside
from holdsteady.monitor.arrivals import Arrivals
from holdsteady.monitor.finding import Finding
from holdsteady.problems import Problem
from holdsteady.project.logbook import LogbookEntry

DONE, FAIL_ON_MET, NOT_COMPUTED = 0, 1, 3


@dataclass(frozen=True, slots=True, kw_only=True)
class Counts:
    """How much there was. `rows` adds up from the five outcomes; `states` counts characteristics."""

    files: int
    rows: int
    used: int
    filtered: int
    repeated: int
    corrected: int
    set_aside: int
    readings: int
    characteristics: int
    points: int
    states: Mapping[str, int]
    signals: int
    cases: int
    open_cases: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Report:
    """The outcome of one build or check.

    Attributes
    ----------
    counts: how much there was.
    files: the account of each file.
    problems: everything that was found wrong and did not stop the build.
    as_of: the moment the build stands at, microseconds UTC.
    seconds: stage -> seconds, in order.
    index: the page to open; None where nothing was published.
    written: how many files of the site were written; the others were right already.
    set_aside: every row, cell and file that could not be used.
    unmatched: logbook lines that match no characteristic, gauge or case.
    arrivals: members of `each` that are new or have gone, and what is late.
    zone: the plant's, in which moments are written.
    """

    counts: Counts
    files: tuple[FileAccount, ...]
    problems: tuple[Problem, ...]
    as_of: int
    seconds: Mapping[str, float]
    index: Path | None
    written: int
    set_aside: tuple[SetAside, ...] = ()
    unmatched: tuple[LogbookEntry, ...] = ()
    arrivals: Arrivals = field(default_factory=Arrivals)
    zone: ZoneInfo = field(default_factory=lambda: ZoneInfo("UTC"))

    def exit_code(self, *, fail_on_signalling: bool = False) -> int:
        """Return 1 where signals are to fail and there are some, 3 where one is not computed, else 0."""
        if fail_on_signalling and self.counts.states.get("signalling", 0):
            return FAIL_ON_MET
        return NOT_COMPUTED if self.counts.states.get("not-computed", 0) else DONE


def counted(intake: Intake, findings: Sequence[Finding]) -> Counts:
    """Return the counts of a build."""
    files = intake.files
    return Counts(
        files=len(files),
        rows=sum(f.rows for f in files),
        used=sum(f.used for f in files),
        filtered=sum(f.filtered for f in files),
        repeated=sum(f.repeated for f in files),
        corrected=sum(f.corrected for f in files),
        set_aside=sum(f.set_aside for f in files),
        readings=sum(f.readings for f in findings),
        characteristics=len(findings),
        points=sum(len(f.points.n) for f in findings if f.points is not None),
        states=dict(sorted(Counter(f.state for f in findings).items())),
        signals=sum(len(f.signals) for f in findings),
        cases=sum(len(f.cases) for f in findings),
        open_cases=sum(case.state == "open" for f in findings for case in f.cases),
    )
