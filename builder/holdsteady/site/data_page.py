"""The data page: what was read from which file, what was set aside and why, what was not computed."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.intake.readings import FileAccount, Intake, SetAside
from holdsteady.monitor.finding import Finding
from holdsteady.problems import Problem, Severity
from holdsteady.project.logbook import LogbookEntry
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted, grouped
from holdsteady.site.view import SiteView
from holdsteady.site.words import KINDS

_MOST_SET_ASIDE = 200  # lines; tables/set-aside.csv has all
_FEW_FILES = 12  # of one source, shown without being asked for
_MOST_FILES = 500  # of one source; tables/files.csv has all
_LONGEST = 160  # characters of a line's text
_DELIMITERS = {",": "comma", ";": "semicolon", "tab": "tab", "\t": "tab", "|": "bar", " ": "blank"}
_SEVERITIES = {Severity.ERROR: "error", Severity.WARNING: "warning", Severity.NOTE: "note"}


@dataclass(frozen=True, slots=True, kw_only=True)
class FileRow:
    """One file's account, written out."""

    file: str
    detected: str
    reach: str
    rows: str
    used: str
    filtered: str
    repeated: str
    corrected: str
    set_aside: str
    odd: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceFiles:
    """The files of one source."""

    source: str
    summary: str
    detected: str  # what was detected, where it is the same for all files
    files: tuple[FileRow, ...]  # in sight: all of a few, else those with something set aside
    folded: tuple[FileRow, ...]
    more: int


@dataclass(frozen=True, slots=True, kw_only=True)
class AsideRow:
    """A row, cell or file that could not be used."""

    place: str
    column: str
    reason: str
    text: str


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


@dataclass(frozen=True, slots=True, kw_only=True)
class DataPage:
    """What the data page shows."""

    sentence: str
    detail: str
    not_computed: tuple[tuple[str, str, str, str], ...]  # title, href, reason, remedy
    problems: tuple[tuple[str, str, str, str], ...]  # severity, where, what, remedy
    unmatched: tuple[LogbookRow, ...]
    sources: tuple[SourceFiles, ...]
    reasons: tuple[tuple[str, str], ...]
    set_aside: tuple[AsideRow, ...]
    set_aside_more: int
    register_check: str


def data_page(findings: Sequence[Finding], intake: Intake, view: SiteView, clock: Clock) -> DataPage:
    """Gather the data page."""
    rows = sum(f.rows for f in intake.files)
    aside = sum(f.set_aside for f in intake.files)
    used = sum(f.used for f in intake.files)
    kept = (
        "none was set aside"
        if aside == 0
        else f"{grouped(str(aside))} {'was' if aside == 1 else 'were'} set aside"
    )
    reasons = Counter(item.reason for item in intake.set_aside)
    ranked = sorted(reasons.items(), key=lambda item: (-item[1], item[0]))
    problems = dict.fromkeys((*view.problems, *intake.problems))
    return DataPage(
        sentence=f"{counted(rows, 'row')} in {counted(len(intake.files), 'file')}; {kept}.",
        detail=f"{grouped(str(used))} gave a reading to some characteristic. Every row is accounted for.",
        not_computed=tuple(
            (f.title, f"characteristic/{f.slug}.html", f.reason, f.remedy)
            for f in sorted(findings, key=lambda f: (f.title.casefold(), f.name)) if f.state == "not-computed"
        ),
        problems=tuple(_problem(p) for p in problems),
        unmatched=tuple(logbook_row(e, clock) for e in view.unmatched),
        sources=_sources(intake.files, clock),
        reasons=tuple((reason, grouped(str(count))) for reason, count in ranked),
        set_aside=tuple(_aside(item) for item in intake.set_aside[:_MOST_SET_ASIDE]),
        set_aside_more=max(len(intake.set_aside) - _MOST_SET_ASIDE, 0),
        register_check=view.register_check,
    )  # fmt: skip


def logbook_row(entry: LogbookEntry, clock: Clock) -> LogbookRow:
    """Return a logbook line written out."""
    when = clock.full(entry.when) if entry.until is None else clock.span(entry.when, entry.until)
    named = (entry.characteristic, entry.case, f"gauge {entry.gauge}" if entry.gauge else "")
    return LogbookRow(
        line=entry.line, when=when, kind=KINDS[entry.kind], text=entry.text, action=entry.action, by=entry.by,
        names=" · ".join(name for name in named if name), excluded=entry.exclude,
    )  # fmt: skip


def _sources(files: Sequence[FileAccount], clock: Clock) -> tuple[SourceFiles, ...]:
    grouped_files: dict[str, list[FileAccount]] = defaultdict(list)
    for file in sorted(files, key=lambda f: (f.source, f.file)):
        grouped_files[file.source].append(file)
    return tuple(_source(source, members, clock) for source, members in grouped_files.items())


def _source(source: str, files: Sequence[FileAccount], clock: Clock) -> SourceFiles:
    # Files with something set aside come first, so that a cut list never hides the ones that matter.
    ordered = sorted(files, key=lambda f: (f.set_aside == 0, f.file))
    rows, used, aside = (sum(getattr(f, name) for f in files) for name in ("rows", "used", "set_aside"))
    listed = tuple(_file(f, clock) for f in ordered[:_MOST_FILES])
    few = len(listed) <= _FEW_FILES
    detected = {f.detected for f in listed}
    return SourceFiles(
        source=source,
        summary=f"{counted(len(files), 'file')}, {counted(rows, 'row')}: "
        f"{grouped(str(used))} used, {grouped(str(aside))} set aside",
        detected=detected.pop() if len(detected) == 1 else "",
        files=tuple(f for f in listed if few or f.odd),
        folded=tuple(f for f in listed if not few and not f.odd),
        more=max(len(files) - _MOST_FILES, 0),
    )


def _file(file: FileAccount, clock: Clock) -> FileRow:
    detected = [file.encoding, _DELIMITERS.get(file.delimiter, file.delimiter), file.time_format]
    if file.decimal:
        detected.insert(
            2, f"decimal {_DELIMITERS.get(file.decimal, 'point') if file.decimal != '.' else 'point'}"
        )
    reach = ""
    if file.first_time is not None and file.last_time is not None:
        reach = f"{clock.short(file.first_time)} to {clock.short(file.last_time)}"
    counts = (file.rows, file.used, file.filtered, file.repeated, file.corrected, file.set_aside)
    rows, used, filtered, repeated, corrected, set_aside = (grouped(str(n)) for n in counts)
    return FileRow(
        file=file.file, detected=" · ".join(part for part in detected if part) or "nothing read",
        reach=reach, rows=rows,
        used=used, filtered=filtered, repeated=repeated, corrected=corrected, set_aside=set_aside,
        odd=file.set_aside > 0,
    )  # fmt: skip


def _aside(item: SetAside) -> AsideRow:
    text = item.text if len(item.text) <= _LONGEST else item.text[:_LONGEST] + "…"
    place = item.file if item.line is None else f"{item.file}:{item.line}"
    return AsideRow(place=place, column=item.column, reason=item.reason, text=text)


def _problem(problem: Problem) -> tuple[str, str, str, str]:
    place = problem.where if problem.line is None else f"{problem.where}:{problem.line}"
    return (_SEVERITIES[problem.severity], place, problem.what, problem.remedy)
