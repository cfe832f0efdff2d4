"""Reading a clean file at full speed; any doubt, and the file is read with care instead."""

from __future__ import annotations

import functools
import re
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.csv as pa_csv

from holdsteady.arrays import Ints, frozen
from holdsteady.intake.block import Block, Judgement, timing
from holdsteady.intake.clock import Clock
from holdsteady.intake.columns import bytes_of, encoded, floats, integers, whole
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.last_line import is_cut, is_total
from holdsteady.intake.lines import Quoting, split_cells
from holdsteady.intake.numbers import Mark, Numbers, State, emptied, parse
from holdsteady.intake.times_text import Family, Stamps, label
from holdsteady.intake.times_text import parse as parse_times

_THREADS_FROM = 4_000_000  # bytes; below, threads cost more than they give
_LOOKED_AT = 16_384  # bytes before an unterminated end
_SHARED = 1 << 18  # lines
_QUOTE = ord('"')
_LINE_ENDS = (10, 13)
_TEXT = pa.string()
_LABEL = pa.dictionary(pa.int32(), pa.string())
_WALL = pa.timestamp("us")
_ZONED = pa.timestamp("us", "UTC")
_ISO = re.compile(
    rb"[0-9]{4}-[0-9]{2}-[0-9]{2}(?:[T ][0-9]{2}:[0-9]{2}(?::[0-9]{2}(?:\.[0-9]{1,6})?)?"
    rb"(?P<zone>Z|[+-][0-9]{2}(?::?[0-9]{2})?)?)?"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A clean file's columns, N rows, before its source is judged.

    ISO 8601 times are in `wall`, (N,): microseconds UTC where `zoned`, else of the clock on the wall.
    Times in any other form are in `stamps`.
    """

    line: Ints
    wall: Ints | None
    zoned: bool
    stamps: Stamps | None
    numbers: dict[str, Numbers]
    labels: dict[str, Any]
    decimal: Mark


def read(data: bytes, layout: Layout, demand: Demand, decimal: Mark) -> Table | None:
    """Read the rows below the header; None where anything could be otherwise than it seems."""
    if _doubtful(data, layout, demand):
        return None
    body = memoryview(data)[layout.offset : _end(data, layout.offset)]
    form = _time_type(data, layout, demand)
    columns = _columns(body, layout, demand, decimal, form)
    if columns is None and form != _TEXT:
        form = _TEXT  # what the parser of ISO times refuses may still be a time
        columns = _columns(body, layout, demand, decimal, form)
    if columns is None:
        return None
    if data.find(b'"', layout.offset) >= 0 and columns.num_rows != _lines(body):
        return None
    return _table(columns, layout, demand, decimal, form)


def _table(
    columns: pa.Table, layout: Layout, demand: Demand, decimal: Mark, form: pa.DataType
) -> Table | None:
    """Look at every column; None where a cell is not what it should be."""
    cells = {name: whole(columns.column(str(place))) for name, place in layout.position.items()}
    numbers = _numbers(cells, columns.num_rows, demand, decimal)
    labels = {name: _label(cells[name]) for name in demand.labels if name in cells}
    stamped = None if not demand.stamps else cells[demand.stamps[0]]
    if numbers is None or any(_holds_nul(label) for label in labels.values()):
        return None
    if _blank(numbers) if stamped is None else stamped.null_count:
        return None
    wall = stamps = None
    if stamped is not None and form == _TEXT:
        stamps = parse_times(stamped, demand.source.time_format)
    elif stamped is not None:
        wall = integers(stamped)
    first = layout.header_line + 1
    return Table(
        line=_counted(first, first + columns.num_rows),
        wall=wall,
        zoned=form == _ZONED,
        stamps=stamps,
        numbers=numbers,
        labels=labels,
        decimal=decimal,
    )


def finish(table: Table, judgement: Judgement, demand: Demand, clock: Clock) -> Block | None:
    """Return the rows with their times; None where a time is not what it should be."""
    time, words = None, ""
    if table.wall is not None:
        time = _moments(table.wall, clock, zoned=table.zoned)
        if time.size and (clock.too_early(time.min()) or clock.too_late(time.max())):
            return None
        words = label(Family.ISO, day_first=None) if time.size else ""
    elif table.stamps is not None:
        timed = timing(table.stamps, judgement, clock, demand.source.time_format)
        if not timed.usable.all():
            return None
        time, words = timed.time, timed.format
    return Block(
        line=table.line,
        time=time,
        numbers=table.numbers,
        labels=table.labels,
        texts=None,
        decimal=table.decimal,
        time_format=words,
    )


def _moments(wall: Ints, clock: Clock, *, zoned: bool) -> Ints:
    if zoned or wall.size == 0:
        return wall
    offset = clock.only_offset(int(wall.min()), int(wall.max()))
    if offset is None:
        return clock.to_utc(wall, np.zeros(wall.size, dtype=np.bool_))
    return wall - offset if offset else wall


def _counted(first: int, end: int) -> Ints:
    """Return the lines from `first` to `end`; files of usual length share them."""
    return _first_lines()[first:end] if end <= _SHARED else np.arange(first, end, dtype=np.int64)


@functools.cache
def _first_lines() -> Ints:
    return frozen(np.arange(_SHARED, dtype=np.int64))


def _doubtful(data: bytes, layout: Layout, demand: Demand) -> bool:
    return (
        len(demand.stamps) > 1
        or any(name not in layout.position for name in (*demand.stamps, *demand.source.key))
        or (len(layout.names) > len(layout.position) and b"\0" in data)
        or (b"\r" in data and data.count(b"\r") != data.count(b"\r\n"))
        or _odd_quotes(data, layout)
        or _cut_short(data, layout, demand)
        or (not demand.stamps and _ends_in_total(data, layout))
    )


def _odd_quotes(data: bytes, layout: Layout) -> bool:
    """Whether a quote stands anywhere but at a cell's edge or doubled, or is left open at the end."""
    if data.find(b'"', layout.offset) < 0:
        return False
    end = len(data.rstrip(b"\r\n"))
    last = data[max(data.rfind(b"\n", 0, end) + 1, layout.offset) : end].decode("utf-8", "replace")
    if split_cells(last, layout.delimiter)[1] is not Quoting.FINE:
        return True
    body = np.frombuffer(data, dtype=np.uint8)[layout.offset :]
    at = np.flatnonzero(body == _QUOTE)
    edges = np.array([ord(layout.delimiter), 10, 13], dtype=np.uint8)
    before = np.where(at == 0, np.uint8(10), body[at - 1])
    after = np.where(at == body.size - 1, np.uint8(10), body[np.minimum(at + 1, body.size - 1)])
    at_edge = np.isin(before, edges) | np.isin(after, edges)
    return not bool((at_edge | (before == _QUOTE) | (after == _QUOTE)).all())


def _ends_in_total(data: bytes, layout: Layout) -> bool:
    end = _end(data, layout.offset)
    start = max(data.rfind(b"\n", layout.offset, end) + 1, layout.offset)
    return is_total(split_cells(data[start:end].decode("utf-8", "replace"), layout.delimiter)[0])


def _cut_short(data: bytes, layout: Layout, demand: Demand) -> bool:
    """Whether an unterminated last line may be half a line."""
    start = max(layout.offset, len(data) - _LOOKED_AT)
    if len(data) <= layout.offset or data[-1] in _LINE_ENDS:
        return False
    rows = re.split(r"\r\n|\n", data[start:].decode("utf-8", "replace"))[start > layout.offset :]
    tails = [(split_cells(row, layout.delimiter)[0] or [""])[-1] for row in rows]
    if not tails:
        return True
    timed = layout.names[-1] in demand.stamps
    return is_cut(tails[-1], tails[:-1], timed=timed)


def _end(data: bytes, start: int) -> int:
    """Return where the rows end: blank lines at the end are none."""
    end = len(data)
    while end > start and data[end - 1] in _LINE_ENDS:
        end -= 1
    return end


def _lines(body: memoryview) -> int:
    return int(np.count_nonzero(np.frombuffer(body, dtype=np.uint8) == 10)) + 1 if len(body) else 0


def _time_type(data: bytes, layout: Layout, demand: Demand) -> pa.DataType:
    """Return what the times may be parsed as, by the first of them; ISO times have a parser of their own.

    It knows the forms of ISO 8601 that the strict reading of text knows too, days of the calendar
    included; where it refuses a cell, the column is read as text.
    """
    asked = (*demand.numbers, *demand.labels)
    if not demand.stamps or demand.source.time_format is not None or demand.stamps[0] in asked:
        return _TEXT
    end = data.find(b"\n", layout.offset)
    line = data[layout.offset : len(data) if end < 0 else end].rstrip(b"\r")
    cells = line.split(layout.delimiter.encode())
    place = layout.position[demand.stamps[0]]
    form = _ISO.fullmatch(cells[place].strip(b'"')) if place < len(cells) else None
    if form is None:
        return _TEXT
    return _WALL if form["zone"] is None else _ZONED


def _columns(
    body: memoryview, layout: Layout, demand: Demand, decimal: Mark, form: pa.DataType
) -> pa.Table | None:
    """Parse the columns that are asked for, named by their places; None where anything is not in order."""
    types = {
        str(place): form if name in demand.stamps else _type(name, demand)
        for name, place in layout.position.items()
    }
    if len(body) == 0:
        return pa.table({name: pa.array([], type=kind) for name, kind in types.items()})
    try:
        return pa_csv.read_csv(
            pa.py_buffer(body),
            read_options=pa_csv.ReadOptions(
                column_names=[str(index) for index in range(len(layout.names))],
                use_threads=len(body) > _THREADS_FROM,
            ),
            parse_options=pa_csv.ParseOptions(delimiter=layout.delimiter, ignore_empty_lines=False),
            convert_options=pa_csv.ConvertOptions(
                column_types=types,
                include_columns=list(types),
                null_values=["", *demand.source.missing],
                strings_can_be_null=False,
                decimal_point=decimal,
            ),
        )
    except pa.ArrowException:
        return None


def _type(name: str, demand: Demand) -> pa.DataType:
    if name in demand.numbers:
        return _TEXT if name in demand.labels else pa.float64()
    return _LABEL


def _numbers(
    cells: dict[str, pa.Array], count: int, demand: Demand, decimal: Mark
) -> dict[str, Numbers] | None:
    result = {}
    fine = np.zeros(count, dtype=np.uint8)
    for name in demand.numbers:
        if name not in cells:
            continue
        column = cells[name]
        if pa.types.is_string(column.type):
            numbers = parse(column, decimal, demand.source.missing)
            if np.any(numbers.state > State.EMPTY):
                return None
        else:
            values = floats(column)
            finite = np.isfinite(values)
            if np.count_nonzero(finite) != count - column.null_count:
                return None
            state = (~finite).astype(np.uint8) if column.null_count else fine
            numbers = Numbers(values=values, state=state)
            if demand.source.missing:
                numbers = emptied(numbers, demand.source.missing)
        result[name] = numbers
    return result


def _blank(numbers: dict[str, Numbers]) -> bool:
    """Whether some line may be blank: nothing is in any of its cells."""
    return not numbers or bool(np.all([one.state == State.EMPTY for one in numbers.values()], axis=0).any())


def _holds_nul(label: pa.DictionaryArray) -> bool:
    starts, data = bytes_of(label.dictionary)
    return not data[starts[0] : starts[-1]].all()


def _label(column: pa.Array) -> Any:
    return encoded(column) if pa.types.is_string(column.type) else column
