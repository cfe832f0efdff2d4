"""The use case: a project folder in, a published site out. Here stands the order of the stages."""

from __future__ import annotations

import datetime as dt
import stat
import time
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import asdict, dataclass, replace
from pathlib import Path

import numpy as np
import xxhash

from holdsteady import __version__
from holdsteady.intake.read import read
from holdsteady.intake.readings import Intake
from holdsteady.monitor.arrivals import arrivals, spans_of
from holdsteady.monitor.finding import Finding
from holdsteady.monitor.matching import concerns
from holdsteady.monitor.monitor import context_of, monitor_all
from holdsteady.monitor.register_use import unused
from holdsteady.problems import Problem, SettingsError, Severity
from holdsteady.project.faults import SETTINGS_FILE
from holdsteady.project.load import LOGBOOK_FILE, REGISTER_FILE, Project, load_project
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.output_folder import output_fault
from holdsteady.publish import held
from holdsteady.report import Report, counted
from holdsteady.site.render import draw
from holdsteady.site.tables import build_json, tables
from holdsteady.site.view import SiteView
from holdsteady.times import iso, to_microseconds

CACHE = ".holdsteady"  # in the project folder: what need not be made twice
INDEX = "index.html"
_BLOCK = 1 << 20

Progress = Callable[[str, int, int], None]
"""Told the stage, how much of it is done, and how much there is (0: not known)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Moment:
    """What a build stands at, microseconds UTC, and whether the clock decided it."""

    at: int
    by_clock: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class _Computed:
    project: Project
    intake: Intake
    findings: tuple[Finding, ...]
    view: SiteView
    problems: tuple[Problem, ...]


def build(
    folder: Path,
    *,
    out: Path | None = None,
    as_of: dt.datetime | dt.date | None = None,
    progress: Progress | None = None,
) -> Report:
    """Read a project, compute it, and publish its site.

    Parameters
    ----------
    folder: the project folder, with `holdsteady.toml`.
    out: where the site goes; left out: `output` under [site], below the project folder.
    as_of: the moment to stand at; left out: `as_of` under [site], else the clock, read once. Readings timed
        later, and lines of the logbook and the register entered later, are not looked at; they are no faults.
        A moment without a zone is in the site's; a bare date is its first instant.
    progress: told how far each stage is.

    Raises
    ------
    SettingsError: the settings cannot be used, or no file matches any source; nothing was published.
    RefusedFolderError: the output folder is somebody else's.
    SiteBusyError: another build holds the site.
    PublishError: the site could not be written.
    """
    seconds: dict[str, float] = {}
    project = load_project(folder)
    target = _output(project, out)
    moment = _moment(project, as_of)
    with held(target) as site:
        computed = _compute(project, moment, seconds, progress)
        computed, files = _site(computed, seconds, progress)
        with _timed(seconds, "publishing", progress):
            published = site.publish(files)
    return _report(computed, seconds, site.folder / INDEX, len(published.written))


def check(
    folder: Path, *, as_of: dt.datetime | dt.date | None = None, progress: Progress | None = None
) -> Report:
    """Do everything `build` does except publishing; for parameters and errors see there."""
    seconds: dict[str, float] = {}
    project = load_project(folder)
    computed = _compute(project, _moment(project, as_of), seconds, progress)
    computed, _ = _site(computed, seconds, progress, keep=False)
    return _report(computed, seconds, None, 0)


def unmatched(
    findings: Sequence[Finding], logbook: Sequence[LogbookEntry], as_of: int
) -> tuple[LogbookEntry, ...]:
    """Return the lines, of those entered up to `as_of`, that match no characteristic, gauge or case."""
    matched = {entry.line for finding in findings for entry in finding.logbook}
    return tuple(
        entry
        for entry in logbook
        if entry.entered <= as_of
        and entry.line not in matched
        # A characteristic that is not computed carries no lines, yet a line may name it.
        and not any(
            concerns(entry, name=f.name, family=f.settings.id, gauge=f.settings.gauge)
            for f in findings
            if f.points is None
        )
    )


def _compute(
    project: Project, moment: _Moment, seconds: dict[str, float], progress: Progress | None
) -> _Computed:
    as_of = moment.at
    with _timed(seconds, "reading"):
        intake = read(project.folder, project.settings, as_of=as_of, zone=project.zone, progress=progress)
        if not intake.files:
            raise SettingsError(
                Problem(
                    severity=Severity.ERROR,
                    where=SETTINGS_FILE,
                    what="no file matches the `files` of any source",
                    remedy=f"Give patterns that match files below {project.folder}.",
                )
            )
    with _timed(seconds, "computing"):
        findings = monitor_all(intake, project, as_of=as_of, progress=progress)
    register = [line for line in project.register.lines if line.adopted_at <= as_of]
    told = (*project.problems, *intake.problems, *unused(findings, register, REGISTER_FILE))
    problems = (*told, *map(_not_computed, _without_chart(findings)))
    view = SiteView(
        settings=project.settings.site,
        as_of=as_of,
        data_until=_data_until(findings),
        problems=told,
        register_check=project.register.last_check,
        unmatched=unmatched(findings, project.logbook.entries, as_of),
        # Where a past moment was asked for, what was entered since is no fault.
        ahead=tuple(e for e in project.logbook.entries if e.entered > as_of) if moment.by_clock else (),
        arrivals=arrivals(findings, spans_of(intake.readings, as_of), context_of(project, as_of)),
    )
    return _Computed(
        project=project,
        intake=intake,
        findings=findings,
        view=view,
        problems=tuple(dict.fromkeys(problems)),
    )


def _site(
    computed: _Computed, seconds: dict[str, float], progress: Progress | None, *, keep: bool = True
) -> tuple[_Computed, dict[str, bytes]]:
    """Return what was computed, as it could be shown, and every file of the site.

    `keep` says whether what was compiled may be kept in the project.
    """
    project, intake = computed.project, computed.intake
    with _timed(seconds, "pages", progress):
        drawn = draw(computed.findings, intake, computed.view, cache=project.folder / CACHE, keep=keep)
    computed = _as_drawn(computed, drawn.findings)
    with _timed(seconds, "tables", progress):
        recent = project.settings.site.points == "recent"
        files = drawn.files | tables(computed.findings, intake, zone=project.zone, recent=recent)
        digest = _input_digest(project.folder, intake)
    files["tables/build.json"] = build_json(_about(computed, digest, seconds))
    return computed, files


def _as_drawn(computed: _Computed, findings: tuple[Finding, ...]) -> _Computed:
    """Return what was computed with the findings as pages show them, and what that adds to the problems."""
    problems = (*computed.problems, *map(_not_computed, _without_chart(findings)))
    return replace(computed, findings=findings, problems=tuple(dict.fromkeys(problems)))


def _about(computed: _Computed, digest: str, seconds: Mapping[str, float]) -> dict[str, object]:
    """Return the content of `tables/build.json`; its seconds end where publishing begins."""
    register = computed.project.register
    zone = computed.project.zone
    now = to_microseconds(dt.datetime.now(dt.UTC).replace(microsecond=0), zone)
    return {
        "version": __version__,
        "when": iso(np.array([now]), zone)[0],
        "as_of": iso(np.array([computed.view.as_of]), zone)[0],
        "input_digest": digest,
        "register": "ok" if register.broken_at is None else "broken",
        "register_check": register.last_check,
        "counts": asdict(counted(computed.intake, computed.findings)),
        "seconds": {stage: round(spent, 3) for stage, spent in seconds.items()},
    }


def _input_digest(folder: Path, intake: Intake) -> str:
    """Return a digest of what was read: settings, logbook, register, and every measurement file."""
    whole = xxhash.xxh3_128()
    names = [SETTINGS_FILE, LOGBOOK_FILE, REGISTER_FILE, *sorted(account.file for account in intake.files)]
    for name in names:
        content = _file_digest(folder / name)
        if content is not None:
            whole.update(f"{name}\0{content}\n".encode("utf-8", "surrogateescape"))
    return whole.hexdigest()


def _file_digest(path: Path) -> str | None:
    try:
        if not stat.S_ISREG(path.stat().st_mode):
            return None
        digest = xxhash.xxh3_128()
        with path.open("rb") as stream:
            while block := stream.read(_BLOCK):
                digest.update(block)
    except OSError:
        return None  # it is missing, or intake has said already that it cannot be read
    return digest.hexdigest()


def _output(project: Project, out: Path | None) -> Path:
    if out is None:
        return project.output
    if fault := output_fault(project.folder, project.settings.source, out):
        what, remedy = fault
        raise SettingsError(Problem(severity=Severity.ERROR, where=f"--out {out}", what=what, remedy=remedy))
    return out


def _moment(project: Project, as_of: dt.datetime | dt.date | None) -> _Moment:
    chosen = as_of or project.settings.site.as_of
    at = to_microseconds(chosen or dt.datetime.now(dt.UTC), project.zone)
    return _Moment(at=at, by_clock=chosen is None)


def _data_until(findings: Sequence[Finding]) -> int | None:
    """Return the time of the newest reading that is shown."""
    times = [f.points.time for f in findings if f.points is not None and f.points.time is not None]
    return max((int(time[-1]) for time in times if len(time)), default=None)


def _without_chart(findings: Sequence[Finding]) -> list[Finding]:
    return [finding for finding in findings if finding.state == "not-computed"]


def _not_computed(finding: Finding) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        where=finding.name,
        what=f"not computed: {finding.reason}",
        remedy=finding.remedy,
    )


def _report(computed: _Computed, seconds: Mapping[str, float], index: Path | None, written: int) -> Report:
    return Report(
        counts=counted(computed.intake, computed.findings),
        files=computed.intake.files,
        problems=computed.problems,
        as_of=computed.view.as_of,
        seconds=dict(seconds),
        index=index,
        written=written,
        set_aside=computed.intake.set_aside,
        unmatched=computed.view.unmatched,
        arrivals=computed.view.arrivals,
        zone=computed.project.zone,
    )


@contextmanager
def _timed(seconds: dict[str, float], stage: str, progress: Progress | None = None) -> Iterator[None]:
    """Note how long a stage took; `progress` is told of one that does not tell by itself."""
    start = time.perf_counter()
    if progress is not None:
        progress(stage, 0, 1)
    yield
    if progress is not None:
        progress(stage, 1, 1)
    seconds[stage] = time.perf_counter() - start
