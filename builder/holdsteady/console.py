"""What a person at a terminal sees: how far a build is, what is wrong, and what it came to."""

from __future__ import annotations

import dataclasses
import shlex
import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from holdsteady.problems import HoldsteadyError, Problem
    from holdsteady.report import Counts, Report
    from holdsteady.start.start import Started

_SHOWN = 20  # problems; the data page lists them all
_STATES = ("signalling", "answered", "silent", "gathering", "steady", "not-computed")


@contextmanager
def progress(stream: TextIO | None = None) -> Iterator[Callable[[str, int, int], None] | None]:
    """Yield what stages report to: bars on a terminal, None where nobody watches."""
    stream = stream or sys.stderr
    if not stream.isatty():
        yield None
        return
    from rich.console import Console  # noqa: PLC0415  heavy, and only needed here
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn  # noqa: PLC0415

    with Progress(
        TextColumn("{task.description}"),
        BarColumn(),
        MofNCompleteColumn(),
        console=Console(file=stream),
        transient=True,
    ) as bars:
        tasks: dict[str, int] = {}

        def report(stage: str, done: int, total: int) -> None:
            if stage not in tasks:
                tasks[stage] = bars.add_task(stage[:1].upper() + stage[1:])
            bars.update(tasks[stage], completed=done, total=total or None)  # type: ignore[arg-type]

        yield report


def print_problems(problems: Sequence[Problem], stream: TextIO | None = None) -> None:
    """Write one line for each problem and one for its remedy."""
    stream = stream or sys.stderr
    for problem in problems[:_SHOWN]:
        _line(stream, str(problem))
        if problem.remedy:
            _line(stream, f"  {problem.remedy}")
    if len(problems) > _SHOWN:
        _line(stream, f"and {len(problems) - _SHOWN} more, all of them on the data page")


def print_all(problems: Sequence[Problem], stream: TextIO | None = None) -> None:
    """Write every problem: nothing is published that could list them."""
    for problem in problems:
        print_problems([problem], stream)


def print_errors(error: HoldsteadyError, stream: TextIO | None = None) -> None:
    """Write every problem of an error; those of a key are shown with the file that the key stands in."""
    from holdsteady.problems import SettingsError  # noqa: PLC0415
    from holdsteady.project.faults import SETTINGS_FILE  # noqa: PLC0415

    for problem in error.problems:
        keyed = (
            isinstance(error, SettingsError) and problem.line is not None and problem.where != SETTINGS_FILE
        )
        if keyed:
            what = f"{problem.where}: {problem.what}"
            problem = dataclasses.replace(problem, where=SETTINGS_FILE, what=what)  # noqa: PLW2901
        print_problems([problem], stream)


def print_fault(error: Exception, stream: TextIO | None = None) -> None:
    """Write that the program itself failed."""
    stream = stream or sys.stderr
    _line(stream, f"holdsteady failed: {type(error).__name__}: {error}")
    _line(stream, "  This is a fault of the program. Run it again with --debug, and report what it shows.")


def print_summary(report: Report, stream: TextIO | None = None) -> None:
    """Write what a build came to, and which page to open."""
    stream = stream or sys.stdout
    for line in summary(report.counts):
        _line(stream, line)
    _line(stream, f"Took {sum(report.seconds.values()):.1f} s.")
    if report.index is not None:
        _line(stream, f"Open {report.index}")


def summary(counts: Counts) -> list[str]:
    """Return the account of a build in a few lines."""
    states = [f"{counts.states[state]} {state}" for state in _STATES if counts.states.get(state)]
    outcomes = [
        f"{number:,} {word}"
        for number, word in (
            (counts.used, "used"),
            (counts.filtered, "filtered"),
            (counts.repeated, "repeated"),
            (counts.corrected, "corrected"),
            (counts.set_aside, "set aside"),
        )
        if number or word in ("used", "set aside")
    ]
    characteristics = _many(counts.characteristics, "characteristic")
    return [
        f"{_many(counts.files, 'file')}, {_many(counts.rows, 'row')}: {', '.join(outcomes)}.",
        f"{characteristics} with {_many(counts.readings, 'reading')}: {', '.join(states)}.",
        f"{_many(counts.signals, 'signal')} in {_many(counts.cases, 'case')}, {counts.open_cases:,} open.",
    ]


def print_accounting(report: Report, stream: TextIO | None = None) -> None:
    """Write what became of every row, what could not be used, and what has not come."""
    from holdsteady.accounting import accounting  # noqa: PLC0415

    stream = stream or sys.stdout
    for line in accounting(report):
        _line(stream, line)


def print_started(started: Started, stream: TextIO | None = None) -> None:
    """Write what was seen and guessed, where it was written, and what comes next."""
    from holdsteady.start.tell import told  # noqa: PLC0415

    stream = stream or sys.stdout
    for line in told(started.draft):
        _line(stream, line)
    _line(stream, f"Wrote {started.path}")
    _line(stream, f"Next: holdsteady build {shlex.quote(str(started.path.parent))}")


def _many(count: int, word: str) -> str:
    return f"{count:,} {word}{'' if count == 1 else 's'}"


def _line(stream: TextIO, text: str) -> None:
    # File names and settings are other people's text: nothing of it may steer the terminal.
    shown = "".join(c if c.isprintable() else c.encode("unicode_escape").decode() for c in text)
    encoding = getattr(stream, "encoding", None) or "utf-8"
    stream.write(shown.encode(encoding, "backslashreplace").decode(encoding) + "\n")
