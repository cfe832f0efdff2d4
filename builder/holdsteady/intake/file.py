"""One file, from its bytes to a block of rows: opened, judged with the others of its source, closed."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
import pyarrow as pa

from holdsteady.intake import careful, fast
from holdsteady.intake.alike import Layouts
from holdsteady.intake.block import ROW, Block, Judgement
from holdsteady.intake.clock import Clock
from holdsteady.intake.content import Content, load, load_again
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.example import first_row
from holdsteady.intake.lines import split_cells, texts_of_lines
from holdsteady.intake.numbers import Mark, MarkEvidence, choose_mark
from holdsteady.intake.readings import SetAside
from holdsteady.intake.scan import Found


@dataclass(frozen=True, slots=True, kw_only=True)
class Opened:
    """A file after its first reading, by exactly one of `table`, `records` and `trouble`, or empty."""

    found: Found
    size: int = 0
    digest: int = 0
    encoding: str = ""
    layout: Layout | None = None
    table: fast.Table | None = None
    records: careful.Records | None = None
    trouble: str = ""
    first: str = ""  # the line below the header

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
    digest: int = 0
    encoding: str = ""
    layout: Layout | None = None
    block: Block | None = None
    rows_aside: Sequence[SetAside] = ()
    trouble: str = ""
    first: str = ""  # the line below the header


def open_file(found: Found, demand: Demand, *, layouts: Layouts | None = None, hasty: bool = True) -> Opened:
    """Read a file for the first time; `hasty` says whether the fast way may be tried.

    `layouts` knows how the files of the source seen before are laid out.
    """
    if found.trouble:
        return Opened(found=found, trouble=found.trouble)
    try:
        content = load(found.path, demand.source.encoding)
        return _parsed(found, content, demand, layouts or Layouts(demand), hasty=hasty)
    except (MemoryError, pa.ArrowException) as error:  # a line or a file beyond what can be held
        return Opened(found=found, trouble=f"cannot be read: {str(error) or 'it needs too much memory'}")


def _parsed(found: Found, content: Content, demand: Demand, layouts: Layouts, *, hasty: bool) -> Opened:
    layout = None if content.trouble else layouts.of(content.text)
    opened = Opened(
        found=found,
        size=content.size,
        digest=content.digest,
        encoding=content.encoding,
        layout=layout,
        trouble=content.trouble,
    )
    if layout is None:
        return opened
    mark = demand.source.decimal or choose_mark(layout.marks, layout.marks, layout.delimiter)
    table = fast.read(content.text, layout, demand, mark) if hasty and mark is not None else None
    records = careful.read(content.text, found.name, layout, demand) if table is None else None
    return replace(opened, table=table, records=records, first=first_row(content.text, layout))


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
            table = None if mark is None else _again(opened, layout, demand, mark)
        block = None if table is None else fast.finish(table, judgement, demand, clock)
        if block is not None:
            return replace(_closed(opened), block=block, first=opened.first)
        opened = open_file(opened.found, demand, hasty=False)
    if opened.records is None:
        return _closed(opened)
    block, aside = careful.finish(opened.records, judgement, demand, clock)
    return replace(_closed(opened), block=block, rows_aside=aside)


def _closed(opened: Opened) -> Closed:
    """Return a file without any row."""
    return Closed(
        found=opened.found,
        size=opened.size,
        digest=opened.digest,
        encoding=opened.encoding,
        layout=opened.layout,
        trouble=opened.trouble,
    )


def _again(opened: Opened, layout: Layout, demand: Demand, mark: Mark) -> fast.Table | None:
    encoding = demand.source.encoding
    content = load_again(opened.found.path, encoding, size=opened.size, digest=opened.digest)
    return None if content is None else fast.read(content.text, layout, demand, mark)


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
    content = load_again(closed.found.path, closed.encoding, size=closed.size, digest=closed.digest)
    if content is None:
        return [""] * len(places)
    result = []
    lines = texts_of_lines(content.text, [line for line, _ in places])
    for text, (_, column) in zip(lines, places, strict=True):
        if column == ROW:
            result.append(text)
        else:
            cells, _ = split_cells(text, layout.delimiter)
            place = layout.position[column]
            result.append(cells[place].strip() if place < len(cells) else "")
    return result
