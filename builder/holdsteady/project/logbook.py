"""The logbook: what people found, and when; read as it stands, never rewritten."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Literal, TypeVar, get_args
from zoneinfo import ZoneInfo

from holdsteady.problems import Problem
from holdsteady.project.csv_rows import CellError, Row, line_problem, read_moment, read_rows
from holdsteady.project.faults import nearest

Kind = Literal["cause", "process-change", "measurement-fault", "note"]
Action = Literal["learn", "keep-sigma", "keep-limits"]
KINDS: tuple[Kind, ...] = get_args(Kind)
ACTIONS: tuple[Action, ...] = get_args(Action)
COLUMNS = (
    "entered", "when", "until", "characteristic", "case", "gauge", "kind", "text", "action", "exclude", "by",
)  # fmt: skip
REQUIRED = ("when", "kind", "text")
Name = TypeVar("Name", bound=str)


@dataclass(frozen=True, slots=True, kw_only=True)
class LogbookEntry:
    """One line of `logbook.csv`. Times are microseconds UTC; the span is half-open, [when, until).

    `until` is None where it was left empty: that moment alone. `characteristic` is a family's id,
    a member's name, `*`, or "". `line` counts from 1, the header is line 1.
    """

    line: int
    entered: int
    when: int
    until: int | None
    characteristic: str
    case: str
    gauge: str
    kind: Kind
    text: str
    action: str
    exclude: bool
    by: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Logbook:
    """All lines of the logbook that could be read, in the order of the file, and what could not."""

    entries: tuple[LogbookEntry, ...] = ()
    problems: tuple[Problem, ...] = ()


def read_logbook(path: Path, zone: ZoneInfo) -> Logbook:
    """Read `logbook.csv`; one that is not there is empty.

    Times without an offset are local to `zone`; a date alone is its first instant. A line that cannot be
    read is a problem with its line, and costs nothing but itself.
    """
    table = read_rows(path, COLUMNS, REQUIRED)
    entries: list[LogbookEntry] = []
    problems = list(table.problems)
    for row in table.rows:
        try:
            entries.append(_entry(row, zone))
        except CellError as error:
            what, remedy = error.args
            problems.append(line_problem(path.name, row.line, what, remedy))
    return Logbook(entries=tuple(entries), problems=tuple(sorted(problems, key=lambda p: p.line or 0)))


def _entry(row: Row, zone: ZoneInfo) -> LogbookEntry:
    cell = dict(zip(COLUMNS, (text.strip() for text in row.cells), strict=True))
    for column in REQUIRED:
        if not cell[column]:
            raise CellError(f"`{column}` is empty", f"Fill in `{column}`.")
    when = read_moment("when", cell["when"], zone)
    until = read_moment("until", cell["until"], zone) if cell["until"] else None
    if until is not None and until <= when:
        raise CellError(
            "`until` is not after `when`", "Give a later `until`, or leave it empty for that moment alone."
        )
    kind = _one_of("kind", cell["kind"], KINDS)
    action = cell["action"]
    if kind == "process-change":
        action = _one_of("action", action or "learn", ACTIONS)
    return LogbookEntry(
        line=row.line,
        entered=read_moment("entered", cell["entered"], zone) if cell["entered"] else when,
        when=when,
        until=until,
        characteristic=cell["characteristic"],
        case=cell["case"],
        gauge=cell["gauge"],
        kind=kind,
        text=cell["text"],
        action=action,
        exclude=_yes(cell["exclude"]),
        by=cell["by"],
    )


def _one_of(column: str, text: str, allowed: tuple[Name, ...]) -> Name:
    for name in allowed:
        if text.lower() == name:
            return name
    guess = nearest(text, allowed)
    remedy = f"Did you mean '{guess}'?" if guess else f"Write one of {', '.join(allowed)}."
    raise CellError(f"`{column}` cannot be '{text}'", remedy)


def _yes(text: str) -> bool:
    if text.lower() in ("yes", "1", "true"):
        return True
    if text.lower() in ("", "no", "0", "false"):
        return False
    raise CellError(f"`exclude` cannot be '{text}'", "Write yes or no, or leave it empty.")
