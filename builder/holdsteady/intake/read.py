"""The stage itself: the files of a project's sources become readings, with an account of every row."""

from __future__ import annotations

import datetime as dt
import os
from collections import deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from functools import partial
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.intake.account import Ledger, accounts, file_lines
from holdsteady.intake.alike import Layouts
from holdsteady.intake.clock import Clock
from holdsteady.intake.demand import Ask, Demand, demand_of
from holdsteady.intake.file import Closed, Opened, close_file, judge, open_file
from holdsteady.intake.pool import Pool, gather
from holdsteady.intake.readings import Correction, FileAccount, Intake, Readings, SetAside
from holdsteady.intake.repeats import find
from holdsteady.intake.scan import Found, Scanner
from holdsteady.intake.select import Taken, members, take
from holdsteady.intake.unsettled import unsettled
from holdsteady.problems import Problem, SettingsError, Severity
from holdsteady.project.faults import SETTINGS_FILE
from holdsteady.project.settings import Settings, Source
from holdsteady.project.toml_lines import KeyPath, TomlLines

READERS = min(4, os.cpu_count() or 1)  # threads: parsing leaves Python's lock to others
_FEW = 4  # files not worth a thread
_MANY = 200_000  # rows worth one

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
    empty = [number for number, files in enumerate(found) if not files]
    problems = [_no_files(folder, settings.source[number], number) for number in empty]
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
        implausible=harvest.implausible,
        corrections=tuple(harvest.corrections),
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
    implausible: dict[str, int] = field(default_factory=dict)
    corrections: list[Correction] = field(default_factory=list)

    def bring_in(self, demand: Demand, found: Iterable[Found]) -> None:
        """Read the files of one source."""
        opened: deque[Opened] = deque()
        for one in _opened(tuple(found), demand):
            opened.append(one)
            self.done += 1
            if self.progress is not None:
                self.progress("Reading files", self.done, self.total)
        judgement = judge(opened)
        self.problems += unsettled(opened, judgement, demand.source)
        closed: list[Closed] = []
        while opened:  # what a file's first reading holds is let go as soon as it has become rows
            closed.append(close_file(opened.popleft(), judgement, demand, self.clock))
        pool = gather(closed, demand)
        repeats = find(pool, demand, closed)
        if repeats is not None:
            pool.kept = ~(repeats.repeated | repeats.corrected)
            self.corrections += repeats.listed(pool)
        ledger = Ledger(pool, repeats)
        for ask, taken in _taken(demand, pool):
            ledger.enter(taken)
            self.readings[ask.characteristic.id] = members(ask, pool, taken)
            if taken.censored:
                self.censored[ask.characteristic.id] = taken.censored
            if taken.implausible:
                self.implausible[ask.characteristic.id] = taken.implausible
        self.accounts += accounts(closed, ledger, demand)
        self.set_aside += file_lines(closed, demand)
        self.set_aside += [line for one in closed for line in one.rows_aside]
        self.set_aside += ledger.set_aside(closed)


def _opened(found: Sequence[Found], demand: Demand) -> Iterator[Opened]:
    """Open the files in their order, several at a time where there are many."""
    opening = partial(open_file, demand=demand, layouts=Layouts(demand))
    if len(found) < _FEW:
        yield from map(opening, found)
        return
    with ThreadPoolExecutor(max_workers=READERS) as readers:
        yield from readers.map(opening, found)


def _taken(demand: Demand, pool: Pool) -> Iterator[tuple[Ask, Taken]]:
    """Take from the rows what each characteristic asks for, several at a time where there are many rows."""
    asks = [ask for ask in demand.asks if ask.values]
    if pool.size < _MANY:
        yield from ((ask, take(ask, pool)) for ask in asks)
        return
    with ThreadPoolExecutor(max_workers=READERS) as takers:
        yield from zip(asks, takers.map(partial(take, pool=pool), asks), strict=True)


def _in_order(lines: list[SetAside]) -> tuple[SetAside, ...]:
    """Sort by file and line; what two sources say alike of the same file is said once."""
    return tuple(
        sorted(dict.fromkeys(lines), key=lambda one: (one.file, one.line or 0, one.column, one.reason))
    )


def _no_files(folder: Path, source: Source, number: int) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        where=SETTINGS_FILE,
        line=_line_of(folder, ("source", number, "files")),
        what=f"source '{source.id}': no file matches {', '.join(source.files)}",
        remedy="Correct `files`, whose patterns are below the project folder, or put the files there.",
    )


def _line_of(folder: Path, key: KeyPath) -> int | None:
    """Return the line of a key of the settings, None where they cannot be looked at again."""
    try:
        return TomlLines((folder / SETTINGS_FILE).read_text(encoding="utf-8-sig")).line(key)
    except (OSError, ValueError):
        return None


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
