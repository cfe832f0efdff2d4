"""Reading a file line by line, with an account of every line that cannot be used."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.block import ROW, Block, Judgement, Timing, timing
from holdsteady.intake.clock import Clock
from holdsteady.intake.columns import encoded, flags, whole
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.last_line import is_cut, is_total
from holdsteady.intake.lines import line_pieces, split_cells
from holdsteady.intake.numbers import (
    Mark,
    MarkEvidence,
    Numbers,
    State,
    choose_mark,
    evidence_of,
    parse,
    unclear,
)
from holdsteady.intake.readings import SetAside
from holdsteady.intake.rows import MOST_JOINED, Rows, Splitter
from holdsteady.intake.scale import scale_of
from holdsteady.intake.times_text import Stamps, one_column, together
from holdsteady.intake.times_text import parse as parse_times

_LONGEST_TEXT = 1_000
_UNITS = ("units, not readings", "")
_PIECE = 1 << 22
_MOST_TOTALS = 20


@dataclass(slots=True, kw_only=True)
class Records:
    """The N rows of a file that have all their fields, and those that were set aside already.

    `line`, (N,), `text` and each of `columns` (Arrow, in chunks) run over the same rows; cells are
    trimmed.
    """

    file: str
    layout: Layout
    line: Ints
    text: pa.ChunkedArray
    columns: dict[str, pa.ChunkedArray]
    set_aside: list[SetAside] = field(default_factory=list)
    marks: MarkEvidence = field(default_factory=MarkEvidence)
    stamps: Stamps | None = None

    def put_aside(self, line: int, text: str, reason: str, column: str = "") -> None:
        """List one row."""
        self.set_aside.append(
            SetAside(file=self.file, line=line, column=column, reason=reason, text=shortened(text))
        )

    def keep(self, rows: Bools) -> None:
        """Leave only some of the rows."""
        if rows.all():
            return
        mask = pa.array(rows)
        self.line, self.text = self.line[rows], self.text.filter(mask)
        for name in self.columns:  # one after the other, so that only one is held twice
            self.columns[name] = self.columns[name].filter(mask)


def shortened(text: str) -> str:
    """Return the text as it is listed: at most 1,000 characters."""
    return text if len(text) <= _LONGEST_TEXT else text[:_LONGEST_TEXT] + "…"


def read(data: bytes, file: str, layout: Layout, demand: Demand) -> Records:
    """Split a file's text into rows, joining quoted line ends and setting aside what is no whole row."""
    may_be_cut = not data.endswith((b"\n", b"\r"))
    nothing = pa.array([], type=pa.string())
    found = [rows if may_be_cut else replace(rows, last=nothing) for rows in _rows(data, layout, demand)]
    records = Records(
        file=file,
        layout=layout,
        line=np.concatenate([np.zeros(0, dtype=np.int64), *(rows.line for rows in found)]),
        text=pa.chunked_array([rows.text for rows in found], type=pa.string()),
        columns={
            name: pa.chunked_array([rows.columns[name] for rows in found], type=pa.string())
            for name in demand.columns
            if name in layout.position
        },
    )
    for rows in found:
        for line, text, reason in rows.faults:
            records.put_aside(line, text, reason)
    if found and may_be_cut:
        _drop(records, _cut_off(found, demand, layout))
    _drop(records, _totals(records, demand))
    records.marks = _evidence(records, demand)
    if demand.stamps and all(name in records.columns for name in demand.stamps):
        records.stamps = _stamps([records.columns[name] for name in demand.stamps], demand)
    return records


def _rows(data: bytes, layout: Layout, demand: Demand) -> Iterator[Rows]:
    """Yield the rows below the header piece by piece."""
    splitter = Splitter(layout=layout, demand=demand)
    left, first, skipped = pa.array([], type=pa.string()), 0, layout.header_line
    for piece, is_last in line_pieces(data, _PIECE):
        lines = pc.split_pattern(pa.array([piece], type=pa.string()), "\n").flatten()
        if piece.endswith(b"\n"):
            lines = lines[:-1]
        lines = pa.concat_arrays([left, lines]) if len(left) else lines
        dropped = min(skipped, len(lines))
        lines, skipped, first = lines[dropped:], skipped - dropped, first + dropped
        stop = len(lines) if is_last else max(len(lines) - MOST_JOINED, 0)
        taken = 0
        if stop:
            rows, taken = splitter.split(lines, stop, first)
            yield rows
        left, first = lines[taken:], first + taken


def _cut_off(found: Sequence[Rows], demand: Demand, layout: Layout) -> dict[int, str]:
    """Return the last row, and why, where it is only half of one."""
    if not found[-1].ends_in_row:
        return {}
    tails = pa.chunked_array([rows.last for rows in found], type=pa.string())
    others = (cell for chunk in tails[:-1].chunks for cell in chunk.to_pylist())
    if not is_cut(tails[-1].as_py(), others, timed=layout.names[-1] in demand.stamps):
        return {}
    reason = "cut off: the last line has no end and its last cell is shorter than all others"
    return {len(tails) - 1: reason}


def _totals(records: Records, demand: Demand) -> dict[int, str]:
    """Return the rows of totals at the end of a file; where rows have times, a total shows by having none."""
    found: dict[int, str] = {}
    if demand.stamps:
        return found
    for row in range(records.line.size - 1, max(records.line.size - _MOST_TOTALS, 0) - 1, -1):
        if not is_total(split_cells(records.text[row].as_py(), records.layout.delimiter)[0]):
            break
        found[row] = "a total, not a reading"
    return found


def _drop(records: Records, rows: Mapping[int, str]) -> None:
    """Set rows aside as a whole."""
    if not rows:
        return
    for row, reason in rows.items():
        records.put_aside(int(records.line[row]), records.text[row].as_py(), reason)
    kept = np.ones(records.line.size, dtype=np.bool_)
    kept[list(rows)] = False
    records.keep(kept)


def _stamps(columns: Sequence[pa.ChunkedArray], demand: Demand) -> Stamps:
    parts = zip(*(column.chunks for column in columns), strict=True)
    return together([parse_times(one_column(part), demand.source.time_format) for part in parts])


def _evidence(records: Records, demand: Demand) -> MarkEvidence:
    total = MarkEvidence()
    for name in demand.numbers:
        if name in records.columns:
            scale = scale_of(name, demand)
            for chunk in records.columns[name].chunks:
                total += evidence_of(chunk, scale)
    return total


def finish(
    records: Records, judgement: Judgement, demand: Demand, clock: Clock
) -> tuple[Block, list[SetAside]]:
    """Return the usable rows, and all rows that were set aside, in the order of their lines.

    The records are left with the usable rows alone: memory that large files need twice is not there.
    """
    decimal = demand.source.decimal or choose_mark(records.marks, judgement.marks, records.layout.delimiter)
    numbers = {
        name: _numbers(records.columns[name], decimal, demand.source.missing)
        for name in demand.numbers
        if name in records.columns
    }
    timed = None
    if records.stamps is not None:
        timed = timing(records.stamps, judgement, clock, demand.source.time_format)
    at_fault, why = _time_faults(records, timed, judgement, demand)
    if _are_units(records, numbers, readable=timed is None or bool(timed.usable[:1].all())):
        at_fault, why = np.union1d([0], at_fault), [_UNITS, *why[int(at_fault[:1].tolist() == [0]) :]]
    usable = np.ones(records.line.size, dtype=np.bool_)
    usable[at_fault] = False
    aside = records.set_aside
    texts = records.text.filter(pa.array(~usable)).to_pylist()
    for line, text, (reason, column) in zip(records.line[at_fault].tolist(), texts, why, strict=True):
        records.put_aside(line, text, reason, column)
    records.keep(usable)
    columns = records.columns
    block = Block(
        line=records.line,
        time=None if not demand.stamps else _times(timed, usable),
        numbers={
            name: Numbers(values=one.values[usable], state=one.state[usable]) for name, one in numbers.items()
        },
        labels={name: whole(encoded(columns[name])) for name in demand.labels if name in columns},
        texts={**columns, ROW: records.text},
        decimal=decimal or "",
        time_format="" if timed is None else timed.format,
    )
    aside.sort(key=lambda one: one.line or 0)
    return block, aside


def _numbers(cells: pa.ChunkedArray, decimal: Mark | None, missing: tuple[str, ...]) -> Numbers:
    parts = [
        unclear(one, missing) if decimal is None else parse(one, decimal, missing) for one in cells.chunks
    ]
    return Numbers(
        values=np.concatenate([np.zeros(0), *(part.values for part in parts)]),
        state=np.concatenate([np.zeros(0, dtype=np.uint8), *(part.state for part in parts)]),
    )


def _times(timed: Timing | None, usable: Bools) -> Ints:
    return np.zeros(0, dtype=np.int64) if timed is None else timed.time[usable]


def _are_units(records: Records, numbers: dict[str, Numbers], *, readable: bool) -> bool:
    """Whether the row below the header names units: no time, no number, not a digit to be read."""
    if not records.line.size or any((one.line or 0) < records.line[0] for one in records.set_aside):
        return False
    if records.stamps is not None:
        if readable:
            return False
    elif any(character.isdigit() for name in numbers for character in records.columns[name][0].as_py()):
        return False
    states = {int(one.state[0]) for one in numbers.values()}
    said = {State.NOT_A_NUMBER, State.WITH_UNIT, State.UNCLEAR_MARK}
    return bool(states & {State.NOT_A_NUMBER, State.UNCLEAR_MARK}) and states <= said | {State.EMPTY}


def _time_faults(
    records: Records, timed: Timing | None, judgement: Judgement, demand: Demand
) -> tuple[Ints, list[tuple[str, str]]]:
    """Return the rows without a time or key, ascending, and of each why, and the column at fault."""
    lost = next((one for one in (*demand.stamps, *demand.source.key) if one not in records.columns), None)
    if lost is not None:
        return np.arange(records.line.size), [(records.layout.fault(lost), lost)] * records.line.size
    if timed is None:
        return np.zeros(0, dtype=np.int64), []
    rows = np.flatnonzero(~timed.usable)
    column = demand.stamps[0]
    unread = (timed.reason(judgement.day_first), column)  # one for all: there may be millions
    early, late = ("before 1900", column), ("more than a day after the moment of this build", column)
    why = [
        early if is_early else late if is_late else unread
        for is_early, is_late in zip(timed.early[rows].tolist(), timed.late[rows].tolist(), strict=True)
    ]
    for name in reversed(demand.stamps):
        empty = flags(pc.equal(records.columns[name].take(pa.array(rows)).combine_chunks(), ""))
        for place in np.flatnonzero(empty).tolist():
            why[place] = ("no time", name)
    return rows, why
