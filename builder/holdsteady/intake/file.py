"""One file, from its bytes to a block of rows: opened, judged with the others of its source, closed."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from holdsteady.intake import careful, fast
from holdsteady.intake.block import ROW, Block, Judgement
from holdsteady.intake.clock import Clock
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout, detect, text_trouble, without_cut_character
from holdsteady.intake.lines import physical_lines, split_cells
from holdsteady.intake.numbers import Mark, MarkEvidence, choose_mark
from holdsteady.intake.readings import SetAside
from holdsteady.intake.scan import Found


@dataclass(frozen=True, slots=True, kw_only=True)
class Opened:
    """A file after its first reading, by exactly one of `table`, `records` and `trouble`, or empty."""

    found: Found
    size: int = 0
    layout: Layout | None = None
    table: fast.Table | None = None
    records: careful.Records | None = None
    trouble: str = ""

    @property
    def marks(self) -> MarkEvidence:
        """What the file's cells say about the decimal mark."""
        if self.records is not None:
            return self.records.marks
        return MarkEvidence() if self.layout is None else self.layout.marks


@dataclass(frozen=True, slots=True, kw_only=True)
class Closed:
    """A file after its source was judged: its usable rows, and the rows set aside as a whole."""

    found: Found
    size: int
    layout: Layout | None = None
    block: Block | None = None
    rows_aside: Sequence[SetAside] = ()
    trouble: str = ""


def open_file(found: Found, demand: Demand, *, hasty: bool = True) -> Opened:
    """Read a file for the first time; `hasty` says whether the fast way may be tried."""
    if found.trouble:
        return Opened(found=found, trouble=found.trouble)
    try:
        raw = found.path.read_bytes()
    except OSError as error:
        reason = f"cannot be read: {error.strerror or error}; see to its permissions"
        return Opened(found=found, trouble=reason)
    data = without_cut_character(raw)
    trouble = text_trouble(data)
    layout = None if trouble else detect(data, demand)
    if layout is None:
        return Opened(found=found, size=len(raw), trouble=trouble)
    mark = demand.source.decimal or choose_mark(layout.marks, layout.marks, layout.delimiter)
    table = fast.read(data, layout, demand, mark) if hasty else None
    records = careful.read(data, found.name, layout, demand) if table is None else None
    return Opened(found=found, size=len(raw), layout=layout, table=table, records=records)


def judge(files: Iterable[Opened]) -> Judgement:
    """Decide for a whole source what a single file may leave open."""
    marks = MarkEvidence()
    days = months = False
    for one in files:
        marks += one.marks
        reading = one.table or one.records
        stamps = None if reading is None else reading.stamps
        if stamps is not None:
            day_proof, month_proof = stamps.proof()
            days, months = days or day_proof, months or month_proof
    return Judgement(marks=marks, day_first=days if days != months else None)


def close_file(opened: Opened, judgement: Judgement, demand: Demand, clock: Clock) -> Closed:
    """Turn a file's first reading into its rows; one that was read fast may have to be read again."""
    layout = opened.layout
    if opened.table is not None and layout is not None:
        mark = demand.source.decimal or choose_mark(layout.marks, judgement.marks, layout.delimiter)
        table: fast.Table | None = opened.table
        if mark != opened.table.decimal:
            table = _again(opened, layout, demand, mark)
        block = None if table is None else fast.finish(table, judgement, demand, clock)
        if block is not None:
            return Closed(found=opened.found, size=opened.size, layout=layout, block=block)
        opened = open_file(opened.found, demand, hasty=False)
    if opened.records is None:
        return Closed(found=opened.found, size=opened.size, layout=opened.layout, trouble=opened.trouble)
    block, aside = careful.finish(opened.records, judgement, demand, clock)
    return Closed(found=opened.found, size=opened.size, layout=opened.layout, block=block, rows_aside=aside)


def _again(opened: Opened, layout: Layout, demand: Demand, mark: Mark) -> fast.Table | None:
    try:
        raw = opened.found.path.read_bytes()
    except OSError:
        return None
    return fast.read(without_cut_character(raw), layout, demand, mark) if len(raw) == opened.size else None


def texts_of(closed: Closed, places: Sequence[tuple[int, str]]) -> list[str]:
    """Return what is written at each line and column (or in the whole row) of a file's usable rows."""
    block, layout = closed.block, closed.layout
    if block is None or layout is None or not places:
        return [""] * len(places)
    if block.texts is not None:
        rows = np.searchsorted(block.line, [line for line, _ in places]).tolist()
        found = [block.texts[column][row].as_py() for row, (_, column) in zip(rows, places, strict=True)]
    else:
        found = _texts_in_lines(closed, layout, places)
    return [careful.shortened(text) for text in found]


def _texts_in_lines(closed: Closed, layout: Layout, places: Sequence[tuple[int, str]]) -> list[str]:
    try:
        lines, _ = physical_lines(closed.found.path.read_bytes().decode("utf-8", "replace"))
    except OSError:
        return [""] * len(places)
    result = []
    for line, column in places:
        text = lines[line - 1] if line <= len(lines) else ""
        if column != ROW:
            cells, _ = split_cells(text, layout.delimiter)
            place = layout.position[column]
            text = cells[place].strip() if place < len(cells) else ""
        result.append(text)
    return result
