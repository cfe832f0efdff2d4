"""The stage itself: the files of a project's sources become readings, with an account of every row."""

from __future__ import annotations

import datetime as dt
from collections import deque
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.intake.account import Ledger, accounts, file_lines
from holdsteady.intake.clock import Clock
from holdsteady.intake.demand import Demand, demand_of
from holdsteady.intake.file import Closed, Opened, close_file, judge, open_file
from holdsteady.intake.numbers import MarkEvidence, is_unproven
from holdsteady.intake.pool import gather
from holdsteady.intake.readings import FileAccount, Intake, Readings, SetAside
from holdsteady.intake.scan import Found, Scanner
from holdsteady.intake.select import members, take
from holdsteady.problems import Problem, SettingsError, Severity
from holdsteady.project.settings import Settings, Source

Progress = Callable[[str, int, int], None]


def read(
    folder: Path,
    settings: Settings,
    *,
    as_of: int,
    zone: ZoneInfo,
    progress: Progress | None = None,
) -> Intake:
    """Read all sources of a project.

    Parameters
    ----------
    folder: the project folder; globs and the names of files are below it.
    as_of: the moment everything is judged at, microseconds UTC; rows timed more than a day later are
        set aside.
    zone: the plant's zone, for times that carry none.
    progress: called with the stage's words, files done, and files in all.

    Raises
    ------
    SettingsError: no source matches any file, or a time format cannot be one.
    """
    _check_formats(settings)
    scanner = Scanner(folder, settings)
    found = [scanner.files(source.files) for source in settings.source]
    problems = [_no_files(source) for source, files in zip(settings.source, found, strict=True) if not files]
    if settings.source and not any(found):
        raise SettingsError(*problems)
    harvest = _Harvest(clock=Clock(zone, as_of), progress=progress, total=sum(len(files) for files in found))
    harvest.readings.update({one.id: () for one in settings.characteristic})
    harvest.problems += problems
    for source, files in zip(settings.source, found, strict=True):
        harvest.bring_in(demand_of(source, settings), files)
    harvest.set_aside += scanner.closed_folders()
    return Intake(
        readings=harvest.readings,
        files=tuple(harvest.accounts),
        set_aside=_in_order(harvest.set_aside),
        problems=tuple(harvest.problems),
        censored=harvest.censored,
    )


@dataclass(slots=True, kw_only=True)
class _Harvest:
    clock: Clock
    progress: Progress | None
    total: int
    done: int = 0
    readings: dict[str, tuple[Readings, ...]] = field(default_factory=dict)
    accounts: list[FileAccount] = field(default_factory=list)
    set_aside: list[SetAside] = field(default_factory=list)
    problems: list[Problem] = field(default_factory=list)
    censored: dict[str, int] = field(default_factory=dict)

    def bring_in(self, demand: Demand, found: Iterable[Found]) -> None:
        """Read the files of one source."""
        opened: deque[Opened] = deque()
        for one in found:
            opened.append(open_file(one, demand))
            self.done += 1
            if self.progress is not None:
                self.progress("Reading files", self.done, self.total)
        judgement = judge(opened)
        self.problems += _unproven_marks(opened, judgement.marks, demand.source)
        closed: list[Closed] = []
        while opened:  # what a file's first reading holds is let go as soon as it has become rows
            closed.append(close_file(opened.popleft(), judgement, demand, self.clock))
        pool = gather(closed, demand)
        ledger = Ledger(pool)
        for ask in demand.asks:
            if not ask.values:
                continue
            taken = take(ask, pool)
            ledger.enter(taken)
            self.readings[ask.characteristic.id] = members(ask, pool, taken)
            if taken.censored:
                self.censored[ask.characteristic.id] = taken.censored
        self.accounts += accounts(closed, ledger, demand)
        self.set_aside += file_lines(closed, demand)
        self.set_aside += [line for one in closed for line in one.rows_aside]
        self.set_aside += ledger.set_aside(closed)


def _in_order(lines: list[SetAside]) -> tuple[SetAside, ...]:
    """Sort by file and line; what two sources say alike of the same file is said once."""
    return tuple(
        sorted(dict.fromkeys(lines), key=lambda one: (one.file, one.line or 0, one.column, one.reason))
    )


def _no_files(source: Source) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        where=f"source.{source.id}.files",
        what=f"no file matches {', '.join(source.files)}",
        remedy="correct the globs, which are below the project folder, or put the files there",
    )


def _unproven_marks(files: Iterable[Opened], marks: MarkEvidence, source: Source) -> list[Problem]:
    if source.decimal is not None:
        return []
    unproven = [one.found.name for one in files if is_unproven(one.marks, marks)]
    if not unproven:
        return []
    return [
        Problem(
            severity=Severity.WARNING,
            where=unproven[0],
            what=f"a mark before three digits could be decimal or thousands ({len(unproven)} files)",
            remedy=f"set `decimal` of source '{source.id}'",
        )
    ]


def _check_formats(settings: Settings) -> None:
    faults = []
    for source in settings.source:
        if source.time_format is None:
            continue
        sample = dt.datetime(2026, 12, 31, 23, 59, 58, tzinfo=dt.UTC)
        try:
            dt.datetime.strptime(sample.strftime(source.time_format), source.time_format)  # noqa: DTZ007
        except ValueError as error:
            faults.append(
                Problem(
                    severity=Severity.ERROR,
                    where=f"source.{source.id}.time_format",
                    what=f"'{source.time_format}' is no format of a time: {error}",
                    remedy="write it with the codes of strptime, as in '%d.%m.%Y %H:%M:%S'",
                )
            )
    if faults:
        raise SettingsError(*faults)
