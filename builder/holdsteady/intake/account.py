"""What became of every row: used, filtered, repeated, corrected or set aside, file by file."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from typing import NamedTuple

import numpy as np

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.block import ROW
from holdsteady.intake.demand import Demand
from holdsteady.intake.example import example_of, header_of
from holdsteady.intake.file import Closed, texts_of
from holdsteady.intake.numbers import REASONS, State
from holdsteady.intake.pool import Pool
from holdsteady.intake.readings import FileAccount, SetAside
from holdsteady.intake.repeats import Repeats
from holdsteady.intake.select import Taken


@dataclass(slots=True)
class Ledger:
    """Collects what the characteristics of a source take from its rows; masks are (N,)."""

    pool: Pool
    repeats: Repeats | None = None
    used: Bools = field(init=False)
    unreadable: Bools = field(init=False)
    lacking: Bools = field(init=False)
    _whole: set[int] = field(default_factory=set)
    _faults: set[tuple[int, str, int]] = field(default_factory=set)
    _lacks: dict[int, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.used, self.unreadable, self.lacking = (
            np.zeros(self.pool.size, dtype=np.bool_) for _ in range(3)
        )

    def enter(self, taken: Taken) -> None:
        """Note what one characteristic took, and what it could not read."""
        if taken.usable is None:
            if id(taken.selection) in self._whole:
                return
            self._whole.add(id(taken.selection))
        if taken.usable is None and taken.selection.size == self.pool.size:
            self.used[:] = True
        else:
            self.used[taken.rows] = True
        self.unreadable[taken.fault_rows] = True
        self.lacking[taken.lacking] = True
        columns = [taken.columns[place] for place in taken.fault_columns.tolist()]
        self._faults.update(zip(taken.fault_rows.tolist(), columns, taken.fault_states.tolist(), strict=True))
        for row, column in zip(taken.lacking.tolist(), taken.lacks, strict=True):
            self._lacks.setdefault(row, column)

    @property
    def lost(self) -> Bools:
        """Rows that somebody asked for and nobody could use."""
        return ~self.used & (self.unreadable | self.lacking)

    def set_aside(self, files: Sequence[Closed]) -> list[SetAside]:
        """List every cell that could not be read, and every row that its file's missing column cost."""
        ground = self.pool.ground
        entries = [(row, column, REASONS[State(state)]) for row, column, state in self._faults]
        for row in np.flatnonzero(self.lacking & ~self.used & ~self.unreadable).tolist():
            column = self._lacks[row]
            layout = files[int(ground.file[row])].layout
            entries.append((row, ROW, "" if layout is None else layout.fault(column)))
        by_file: dict[int, list[tuple[int, str, str, str]]] = defaultdict(list)
        for row, column, reason in entries:
            named = self._lacks[row] if column == ROW else column
            file, line = int(ground.file[row]), int(ground.line[row])
            by_file[file].append((line, column, reason, named))
        result = []
        for file, places in sorted(by_file.items()):
            places.sort()
            texts = texts_of(files[file], [(line, column) for line, column, _, _ in places])
            result += [
                SetAside(file=files[file].found.name, line=line, column=named, reason=reason, text=text)
                for (line, _, reason, named), text in zip(places, texts, strict=True)
            ]
        return result


def accounts(files: Sequence[Closed], ledger: Ledger, demand: Demand) -> list[FileAccount]:
    """Return the account of each file."""
    pool = ledger.pool
    repeats = ledger.repeats
    none = np.zeros(0 if repeats is not None else pool.size, dtype=np.bool_)
    masks = (
        ledger.used,
        none if repeats is None else repeats.repeated,
        none if repeats is None else repeats.corrected,
        ledger.lost,
    )
    counts = zip(*(_per_file(pool.ground.starts, mask) for mask in masks), strict=True)
    return [_account(one, _Counts(*count), demand) for one, count in zip(files, counts, strict=True)]


def _per_file(starts: Ints, mask: Bools) -> list[int]:
    bounds = starts.tolist()
    return [int(np.count_nonzero(mask[start:end])) for start, end in pairwise(bounds)]


class _Counts(NamedTuple):
    """The usable rows of a file by what became of them, but for those that nobody asked for."""

    used: int
    repeated: int
    corrected: int
    lost: int


def _account(one: Closed, counts: _Counts, demand: Demand) -> FileAccount:
    block, layout = one.block, one.layout
    usable = 0 if block is None else block.line.size
    timed = block is not None and block.time is not None and block.time.size > 0
    delimiter = "" if layout is None or one.trouble else layout.delimiter
    header, columns = header_of(None if one.trouble else layout)
    return FileAccount(
        file=one.found.name,
        source=demand.source.id,
        bytes=one.size,
        rows=usable + len(one.rows_aside),
        used=counts.used,
        filtered=usable - sum(counts),
        repeated=counts.repeated,
        corrected=counts.corrected,
        set_aside=counts.lost + len(one.rows_aside),
        encoding="" if one.trouble else one.encoding,
        delimiter="tab" if delimiter == "\t" else delimiter,
        decimal="" if block is None else block.decimal,
        time_format="" if block is None else block.time_format,
        first_time=int(block.time.min()) if block is not None and timed and block.time is not None else None,
        last_time=int(block.time.max()) if block is not None and timed and block.time is not None else None,
        header=header,
        columns=columns,
        example=example_of(block, layout, one.first, demand),
    )


def file_lines(files: Sequence[Closed], demand: Demand) -> list[SetAside]:
    """List whole-file trouble, and each column of some characteristic that a file with rows lacks."""
    result = []
    for one in files:
        name = one.found.name
        if one.trouble:
            result.append(SetAside(file=name, line=None, column="", reason=one.trouble, text=""))
        if one.block is None or one.layout is None or one.block.line.size + len(one.rows_aside) == 0:
            continue
        if any(name not in one.layout.position for name in (*demand.stamps, *demand.source.key)):
            continue
        for column in (*one.layout.missing, *one.layout.twice):
            reason = one.layout.fault(column)
            result.append(SetAside(file=name, line=None, column=column, reason=reason, text=""))
    return result
