"""The first usable row of a file beside what it was read as, for people to compare."""

from __future__ import annotations

from holdsteady.intake.block import Block
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.lines import split_cells
from holdsteady.intake.numbers import State
from holdsteady.intake.readings import MOST_NAMES, Example, ExampleCell

_LONGEST_LINE = 65_536  # bytes kept of a file's first row
_LONGEST_CELL = 200  # characters


def first_row(data: bytes, layout: Layout) -> str:
    """Return the line below the header, "" where it is longer than any row should be."""
    piece = data[layout.offset : layout.offset + _LONGEST_LINE]
    ends = [at for at in (piece.find(b"\n"), piece.find(b"\r")) if at >= 0]
    if not ends and len(piece) == _LONGEST_LINE:
        return ""
    return piece[: min(ends, default=len(piece))].decode("utf-8", "replace")


def header_of(layout: Layout | None) -> tuple[tuple[str, ...], int]:
    """Return a file's first names, cut where they are long, and how many names there are."""
    if layout is None:
        return (), 0
    return tuple(_cut(name) for name in layout.names[:MOST_NAMES]), len(layout.names)


def example_of(block: Block | None, layout: Layout | None, first: str, demand: Demand) -> Example | None:
    """Return the first usable row's cells in the columns that are asked for; None without such a row.

    `first` is the line below the header, which is that row where the file was read fast.
    """
    if block is None or layout is None or block.line.size == 0:
        return None
    fields = [] if block.texts is not None else split_cells(first, layout.delimiter)[0]
    cells = []
    for name in sorted((n for n in demand.columns if n in layout.position), key=layout.position.__getitem__):
        place = layout.position[name]
        if block.texts is not None:
            text = str(block.texts[name][0].as_py()) if name in block.texts else ""
        else:
            text = fields[place].strip() if place < len(fields) else ""
        cells.append(_cell(name, _cut(text), block, demand))
    return Example(line=int(block.line[0]), cells=tuple(cells))


def _cell(name: str, text: str, block: Block, demand: Demand) -> ExampleCell:
    stamped = (demand.source.time,) if isinstance(demand.source.time, str) else demand.source.time or ()
    if name in stamped:
        return ExampleCell(
            column=name, text=text, role="time", time=None if block.time is None else int(block.time[0])
        )
    if name not in block.numbers:
        return ExampleCell(column=name, text=text, role="label")
    numbers = block.numbers[name]
    known = numbers.state[0] == State.NUMBER
    return ExampleCell(
        column=name, text=text, role="number", number=float(numbers.values[0]) if known else None
    )


def _cut(text: str) -> str:
    return text if len(text) <= _LONGEST_CELL else text[:_LONGEST_CELL] + "…"
