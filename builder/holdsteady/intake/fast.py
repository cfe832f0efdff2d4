"""Reading a clean file at full speed; any doubt, and the file is read with care instead."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.csv as pa_csv

from holdsteady.arrays import Ints
from holdsteady.intake.block import Block, Judgement, timing
from holdsteady.intake.clock import Clock
from holdsteady.intake.columns import encoded, floats, whole
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.last_line import is_cut
from holdsteady.intake.lines import Quoting, split_cells
from holdsteady.intake.numbers import Mark, Numbers, State, emptied, parse
from holdsteady.intake.times_text import Stamps
from holdsteady.intake.times_text import parse as parse_times

_THREADS_FROM = 4_000_000  # bytes; below, threads cost more than they give
_LOOKED_AT = 16_384  # bytes before an unterminated end
_QUOTE = ord('"')


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A clean file's columns before its source is judged."""

    line: Ints
    stamps: Stamps | None
    numbers: dict[str, Numbers]
    labels: dict[str, Any]
    decimal: Mark


def read(data: bytes, layout: Layout, demand: Demand, decimal: Mark) -> Table | None:
    """Read the rows below the header; None where anything could be otherwise than it seems."""
    if _doubtful(data, layout, demand):
        return None
    try:
        columns, count = _columns(data, layout, demand, decimal)
    except pa.ArrowException:
        return None
    ends = data.count(b"\n", layout.offset)
    if count != ends + (not data.endswith(b"\n") and len(data) > layout.offset):
        return None
    numbers = _numbers(columns, layout, demand, decimal)
    if numbers is None:
        return None
    stamps = None
    if demand.source.time is not None:
        stamps = parse_times(whole(columns[demand.source.time]), demand.source.time_format)
    elif not numbers or np.all([one.state == State.EMPTY for one in numbers.values()], axis=0).any():
        return None
    labels = {name: _label(whole(columns[name])) for name in demand.labels if name in layout.position}
    line = np.arange(count, dtype=np.int64) + (layout.header_line + 1)
    return Table(line=line, stamps=stamps, numbers=numbers, labels=labels, decimal=decimal)


def finish(table: Table, judgement: Judgement, demand: Demand, clock: Clock) -> Block | None:
    """Return the rows with their times; None where a time is not what it should be."""
    time, words = None, ""
    if table.stamps is not None:
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


def _doubtful(data: bytes, layout: Layout, demand: Demand) -> bool:
    time = demand.source.time
    return (
        (time is not None and time not in layout.position)
        or b"\0" in data
        or (b"\r" in data and data.count(b"\r") != data.count(b"\r\n"))
        or _odd_quotes(data, layout)
        or _cut_short(data, layout, demand)
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


def _cut_short(data: bytes, layout: Layout, demand: Demand) -> bool:
    """Whether an unterminated last line may be half a line."""
    start = max(layout.offset, len(data) - _LOOKED_AT)
    body = data[start:]
    if not body or body.endswith((b"\n", b"\r")):
        return False
    rows = re.split(r"\r\n|\n", body.decode("utf-8", "replace"))[start > layout.offset :]
    tails = [(split_cells(row, layout.delimiter)[0] or [""])[-1] for row in rows]
    if not tails:
        return True
    timed = layout.names[-1] == demand.source.time
    return is_cut(tails[-1], tails[:-1], timed=timed)


def _columns(
    data: bytes, layout: Layout, demand: Demand, decimal: Mark
) -> tuple[dict[str, pa.ChunkedArray], int]:
    needed = [name for name in demand.columns if name in layout.position]
    if len(data) <= layout.offset:
        empty = pa.chunked_array([], type=pa.string())
        return dict.fromkeys(needed, empty), 0
    types = {str(layout.position[name]): _type(name, demand) for name in needed}
    table = pa_csv.read_csv(
        pa.py_buffer(memoryview(data)[layout.offset :]),
        read_options=pa_csv.ReadOptions(
            column_names=[str(index) for index in range(len(layout.names))],
            use_threads=len(data) > _THREADS_FROM,
        ),
        parse_options=pa_csv.ParseOptions(delimiter=layout.delimiter),
        convert_options=pa_csv.ConvertOptions(
            column_types=types,
            include_columns=list(types),
            null_values=["", *demand.source.missing],
            strings_can_be_null=False,
            decimal_point=decimal,
        ),
    )
    return {name: table.column(str(layout.position[name])) for name in needed}, table.num_rows


def _type(name: str, demand: Demand) -> pa.DataType:
    if name == demand.source.time or (name in demand.numbers and name in demand.labels):
        return pa.string()
    return pa.float64() if name in demand.numbers else pa.dictionary(pa.int32(), pa.string())


def _numbers(
    columns: dict[str, pa.ChunkedArray], layout: Layout, demand: Demand, decimal: Mark
) -> dict[str, Numbers] | None:
    result = {}
    for name in demand.numbers:
        if name not in layout.position:
            continue
        column = whole(columns[name])
        if pa.types.is_string(column.type):
            numbers = parse(column, decimal, demand.source.missing)
            if np.any(numbers.state > State.EMPTY):
                return None
        else:
            values = floats(column)
            if np.count_nonzero(np.isfinite(values)) != len(column) - column.null_count:
                return None
            numbers = emptied(
                Numbers(values=values, state=np.isnan(values).astype(np.uint8)), demand.source.missing
            )
        result[name] = numbers
    return result


def _label(column: pa.Array) -> Any:
    return encoded(column) if pa.types.is_string(column.type) else column
