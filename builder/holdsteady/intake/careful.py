"""Reading a file line by line, with an account of every line that cannot be used."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
import pyarrow as pa

from holdsteady.arrays import Bools
from holdsteady.intake.block import ROW, Block, Judgement, Timing, timing
from holdsteady.intake.clock import Clock
from holdsteady.intake.columns import encoded, strings
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.last_line import is_cut
from holdsteady.intake.lines import QUOTE, Quoting, physical_lines, split_cells
from holdsteady.intake.numbers import MarkEvidence, Numbers, State, choose_mark, evidence, parse
from holdsteady.intake.readings import SetAside
from holdsteady.intake.times_text import Stamps
from holdsteady.intake.times_text import parse as parse_times

_LONGEST_TEXT = 1_000
_MOST_JOINED = 200
_DIGITS = str.maketrans("123456789", "000000000")


@dataclass(slots=True, kw_only=True)
class Records:
    """The rows of a file that have all their fields, and those that were set aside already.

    `line`, `text` and each of `columns` run over the same rows; cells are trimmed.
    """

    file: str
    layout: Layout
    line: list[int] = field(default_factory=list)
    text: list[str] = field(default_factory=list)
    columns: dict[str, list[str]] = field(default_factory=dict)
    set_aside: list[SetAside] = field(default_factory=list)
    marks: MarkEvidence = field(default_factory=MarkEvidence)
    stamps: Stamps | None = None

    def put_aside(self, line: int, text: str, reason: str, column: str = "") -> None:
        """List one row."""
        self.set_aside.append(
            SetAside(file=self.file, line=line, column=column, reason=reason, text=shortened(text))
        )


def shortened(text: str) -> str:
    """Return the text as it is listed: at most 1,000 characters."""
    return text if len(text) <= _LONGEST_TEXT else text[:_LONGEST_TEXT] + "…"


def read(data: bytes, file: str, layout: Layout, demand: Demand) -> Records:
    """Split a file's text into rows, joining quoted line ends and setting aside what is no whole row."""
    lines, ended = physical_lines(data.decode("utf-8").removeprefix("\ufeff"))
    records = Records(file=file, layout=layout)
    records.columns = {name: [] for name in demand.columns if name in layout.position}
    scanner = _Scanner(lines=lines, layout=layout, demand=demand)
    tails: list[str] = []  # the last cell of each row kept
    at, kept = layout.header_line, False
    while at < len(lines):
        row = scanner.row(at)
        kept = bool(row.reason or any(cell.strip() for cell in row.cells)) and _keep(records, row, at + 1)
        if kept:
            tails.append(row.cells[-1])
        at += row.taken
    if kept and not ended and is_cut(tails[-1], tails[:-1], timed=layout.names[-1] == demand.source.time):
        _drop_last(records)
    records.marks = _evidence(records, demand)
    if demand.source.time in records.columns:
        records.stamps = parse_times(strings(records.columns[demand.source.time]), demand.source.time_format)
    return records


def finish(
    records: Records, judgement: Judgement, demand: Demand, clock: Clock
) -> tuple[Block, list[SetAside]]:
    """Return the usable rows, and all rows that were set aside, in the order of their lines."""
    layout = records.layout
    decimal = demand.source.decimal or choose_mark(records.marks, judgement.marks, layout.delimiter)
    columns = {name: strings(cells) for name, cells in records.columns.items()}
    numbers = {
        name: parse(columns[name], decimal, demand.source.missing)
        for name in demand.numbers
        if name in columns
    }
    timed = None
    if records.stamps is not None:
        timed = timing(records.stamps, judgement, clock, demand.source.time_format)
    faults = _time_faults(records, timed, judgement, demand)
    if _are_units(records, numbers, demand, readable=timed is None or bool(timed.usable[:1].all())):
        faults[0] = ("units, not readings", "")
    usable = np.ones(len(records.line), dtype=np.bool_)
    usable[list(faults)] = False
    aside = Records(file=records.file, layout=layout, set_aside=list(records.set_aside))
    for row, (reason, column) in faults.items():
        aside.put_aside(records.line[row], records.text[row], reason, column)
    keep = pa.array(usable)
    block = Block(
        line=np.array(records.line, dtype=np.int64)[usable],
        time=None if demand.source.time is None else _times(timed, usable),
        numbers={
            name: Numbers(values=one.values[usable], state=one.state[usable]) for name, one in numbers.items()
        },
        labels={name: encoded(columns[name].filter(keep)) for name in demand.labels if name in columns},
        texts={name: cells.filter(keep) for name, cells in (*columns.items(), (ROW, strings(records.text)))},
        decimal=decimal,
        time_format="" if timed is None else timed.format,
    )
    aside.set_aside.sort(key=lambda one: one.line or 0)
    return block, aside.set_aside


def _times(timed: Timing | None, usable: Bools) -> np.ndarray[tuple[int], np.dtype[np.int64]]:
    return np.zeros(0, dtype=np.int64) if timed is None else timed.time[usable]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    cells: list[str]
    text: str
    taken: int  # physical lines
    reason: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Scanner:
    lines: Sequence[str]
    layout: Layout
    demand: Demand

    def row(self, at: int) -> _Row:
        """Return the row that begins at a line."""
        line = self.lines[at]
        if QUOTE not in line:
            return _Row(cells=line.split(self.layout.delimiter), text=line, taken=1)
        cells, quoting = split_cells(line, self.layout.delimiter)
        if quoting is Quoting.FINE:
            return _Row(cells=cells, text=line, taken=1)
        if quoting is Quoting.OPEN:
            joined = self._joined(at)
            if joined is not None:
                return joined
        return _Row(cells=[], text=line, taken=1, reason=quoting.value)

    def _joined(self, at: int) -> _Row | None:
        """Return a row with line ends inside quotes; None where a quote merely was not closed."""
        width = self.layout.width
        text = self.lines[at]
        for taken in range(2, min(_MOST_JOINED, len(self.lines) - at) + 1):
            line = self.lines[at + taken - 1]
            text = f"{text}\n{line}"
            if QUOTE not in line:
                continue
            cells, quoting = split_cells(text, self.layout.delimiter)
            if quoting is Quoting.OPEN:
                continue
            swallowed = self.lines[at + 1 : at + taken]
            fits = quoting is Quoting.FINE and len(cells) >= width
            if fits and not any(self._is_row(line, cells) for line in swallowed):
                return _Row(cells=cells, text=text, taken=taken)
            return None
        return None

    def _is_row(self, line: str, like: list[str]) -> bool:
        """Whether a line by itself is a row such as the one that would swallow it."""
        cells = line.split(self.layout.delimiter)
        if len(cells) != self.layout.width or len(cells) < 2:
            return False
        time = self.demand.source.time
        column = (
            time
            if time in self.layout.position
            else next((name for name in self.demand.numbers if name in self.layout.position), None)
        )
        if column is None:
            return True
        place = self.layout.position[column]
        shape, other = (one[place].strip().strip(QUOTE).translate(_DIGITS) for one in (cells, like))
        return "0" in shape and (shape == other or time not in self.layout.position)


def _keep(records: Records, row: _Row, line: int) -> bool:
    """Keep a row that has all its fields, set any other aside; says which."""
    reason = row.reason or _row_fault(row, records.layout)
    if reason:
        records.put_aside(line, row.text, reason)
        return False
    records.line.append(line)
    records.text.append(row.text)
    for name, cells in records.columns.items():
        cells.append(row.cells[records.layout.position[name]].strip())
    return True


def _row_fault(row: _Row, layout: Layout) -> str:
    if "\0" in row.text:
        return "holds NUL bytes"
    count, width = len(row.cells), layout.width
    if count < width or (count != len(layout.names) and any(cell.strip() for cell in row.cells[width:])):
        return f"{count} field{'s'[: count != 1]} where the header has {width}"
    if [cell.strip() for cell in row.cells[:width]] == list(layout.names[:width]):
        return "the header again"
    return ""


def _drop_last(records: Records) -> None:
    line, text = records.line.pop(), records.text.pop()
    for cells in records.columns.values():
        cells.pop()
    reason = "cut off: the last line has no end and its last cell is shorter than all others"
    records.put_aside(line, text, reason)


def _evidence(records: Records, demand: Demand) -> MarkEvidence:
    total = MarkEvidence()
    for name in demand.numbers:
        if name in records.columns:
            total += evidence(records.columns[name])
    return total


def _are_units(records: Records, numbers: dict[str, Numbers], demand: Demand, *, readable: bool) -> bool:
    """Whether the row below the header names units: no time, no number, not a digit to be read."""
    if not records.line or records.line[0] != records.layout.header_line + 1:
        return False
    if demand.source.time in records.columns:
        if readable:
            return False
    elif any(character.isdigit() for name in numbers for character in records.columns[name][0]):
        return False
    states = {int(one.state[0]) for one in numbers.values()}
    return State.NOT_A_NUMBER in states and states <= {State.NOT_A_NUMBER, State.EMPTY}


def _time_faults(
    records: Records, timed: Timing | None, judgement: Judgement, demand: Demand
) -> dict[int, tuple[str, str]]:
    """Return, by row, why it has no time, and the column at fault."""
    column = demand.source.time
    if column is None:
        return {}
    if timed is None:
        return dict.fromkeys(range(len(records.line)), (records.layout.fault(column), column))
    faults = {}
    cells = records.columns[column]
    for row in np.flatnonzero(~timed.usable).tolist():
        reason = timed.reason(judgement.day_first) if cells[row] else "no time"
        if timed.early[row]:
            reason = "before 1900"
        elif timed.late[row]:
            reason = "more than a day after the moment of this build"
        faults[row] = (reason, column)
    return faults
