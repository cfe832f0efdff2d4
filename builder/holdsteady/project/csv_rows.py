"""Rows of the small tables that people keep by hand, with the line on which each begins."""

from __future__ import annotations

import csv
import datetime as dt
import io
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.problems import Problem, Severity
from holdsteady.project.faults import nearest
from holdsteady.times import to_microseconds

_NOT_UTF8 = re.compile("[\udc80-\udcff]")
_DELIMITERS = ",;\t"


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One row: its cells as they stand in the file, in the order of the columns asked for."""

    line: int
    cells: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """A table that was read, and what could not be: `lost` are the lines, 1 where nothing was read at all."""

    rows: tuple[Row, ...] = ()
    lost: tuple[int, ...] = ()
    problems: tuple[Problem, ...] = ()


class CellError(ValueError):
    """A cell, or a row of them, that cannot be used; the second argument is the remedy."""


def read_rows(path: Path, columns: Sequence[str], required: Sequence[str]) -> Rows:
    """Read a CSV file kept by hand; a file that is not there has no rows.

    UTF-8 with or without a byte order mark; comma, semicolon or tab; columns in any order, their names
    trimmed, in any case. Columns that are not there read as empty; blank lines are passed over. A line
    that cannot be read is a problem and costs nothing but itself.
    """
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        return Rows()
    except OSError as error:
        return _unread(path, f"cannot be read: {error.strerror}", "Give the right to read it.")
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return _unread(path, "is UTF-16, not UTF-8", "Save it as CSV in UTF-8.")
    text = data.decode("utf-8-sig", errors="surrogateescape")
    records = _Records(path.name, list(io.StringIO(text, newline="")))
    header = next(iter(records), None)
    if header is None:
        return Rows(lost=tuple(records.lost), problems=tuple(records.problems))
    names = [cell.strip().lower() for cell in header.cells]
    missing = [name for name in required if name not in names]
    if missing:
        what = f"has no column {', '.join(missing)}; nothing of the file was used"
        return _unread(path, what, f"Give it the header {','.join(columns)}.", header.line)
    problems = _odd_columns(path.name, names, columns, header.line)
    places = [names.index(name) if name in names else None for name in columns]
    records.width = len(names)
    rows = tuple(
        Row(
            line=row.line,
            cells=tuple("" if i is None or i >= len(row.cells) else row.cells[i] for i in places),
        )
        for row in records
    )
    return Rows(rows=rows, lost=tuple(records.lost), problems=(*problems, *records.problems))


class _Records:
    """Splits lines into records; each begins on a line of its own, and a broken one ends with that line."""

    def __init__(self, file: str, lines: list[str]) -> None:
        self.problems: list[Problem] = []
        self.lost: list[int] = []
        self.width: int | None = None
        self._file = file
        self._lines = lines
        self._next = 0
        self._delimiter = ","

    def __iter__(self) -> Iterator[Row]:
        while self._next < len(self._lines):
            index = self._next
            line = self._lines[index]
            if self.width is None:
                self._delimiter = max(_DELIMITERS, key=line.count)
            self._next = index + 1
            if not line.strip(f"{_DELIMITERS} \r\n"):
                continue
            cells, taken = self._record(index)
            if cells is None:
                self._refuse(
                    index, "its quotes do not match", 'Put the text between two ", and double those within.'
                )
            elif any(_NOT_UTF8.search(cell) for cell in cells):
                self._next = index + taken
                self._refuse(index, "it is not UTF-8", "Save the file as CSV in UTF-8.")
            elif self.width is not None and any(cell.strip() for cell in cells[self.width :]):
                what = f"it has {len(cells)} fields where the header has {self.width}"
                self._refuse(index, what, f"Put a text that holds '{self._delimiter}' between quotes.")
            else:
                self._next = index + taken
                yield Row(line=index + 1, cells=tuple(cells))

    def _record(self, index: int) -> tuple[list[str] | None, int]:
        reader = csv.reader(iter(self._lines[index:]), delimiter=self._delimiter, strict=True)
        try:
            return next(reader), reader.line_num
        except (csv.Error, StopIteration):
            return None, 1

    def _refuse(self, index: int, what: str, remedy: str) -> None:
        self.lost.append(index + 1)
        self.problems.append(line_problem(self._file, index + 1, what, remedy))


def line_problem(file: str, line: int, what: str, remedy: str) -> Problem:
    """Say that a line was left out, and why."""
    return Problem(
        severity=Severity.WARNING, where=file, what=f"this line is not used: {what}", remedy=remedy, line=line
    )


def read_moment(column: str, text: str, zone: ZoneInfo) -> int:
    """Return microseconds UTC of an ISO 8601 moment; without an offset it is local, a date its first instant.

    Raises
    ------
    CellError
        when the text is no moment.
    """
    try:
        return to_microseconds(dt.datetime.fromisoformat(text.strip()), zone)
    except (ValueError, OverflowError):
        remedy = "Write it as in 2026-03-17 14:10, or as a date alone."
        raise CellError(f"`{column}` is no date or time: '{text.strip()}'", remedy) from None


def _odd_columns(file: str, names: list[str], columns: Sequence[str], line: int) -> list[Problem]:
    problems = []
    for index, name in enumerate(names):
        if name in columns and name in names[:index]:
            what, remedy = f"column '{name}' stands there twice; the first is used", "Take one out."
        elif name and name not in columns:
            guess = nearest(name, columns)
            what = f"column '{name}' is not used"
            remedy = f"Did you mean '{guess}'?" if guess else f"Known here: {', '.join(columns)}."
        else:
            continue
        problems.append(Problem(severity=Severity.WARNING, where=file, what=what, remedy=remedy, line=line))
    return problems


def _unread(path: Path, what: str, remedy: str, line: int | None = None) -> Rows:
    problem = Problem(severity=Severity.WARNING, where=path.name, what=what, remedy=remedy, line=line)
    return Rows(lost=(line or 1,), problems=(problem,))
