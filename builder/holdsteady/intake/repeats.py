"""The same reading twice: rows that share the key of their source, repeated or corrected by newer ones."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.block import Block
from holdsteady.intake.demand import Demand
from holdsteady.intake.file import Closed
from holdsteady.intake.groups import identified
from holdsteady.intake.numbers import State, States
from holdsteady.intake.pool import Pool
from holdsteady.intake.readings import Correction

MOST_LISTED = 1_000  # corrections of one source; all of them are counted


@dataclass(frozen=True, slots=True, kw_only=True)
class Repeats:
    """What became of the N rows of a pool because others share their key.

    `repeated` and `corrected` are (N,); no row is both. `corrected_rows`, (C,), are the places of the
    corrected ones, ascending, and `corrected_by`, (C,), those of the newer rows that stand in their place.
    """

    repeated: Bools
    corrected: Bools
    corrected_rows: Ints
    corrected_by: Ints

    def listed(self, pool: Pool) -> list[Correction]:
        """List the first corrections by file and line."""
        pairs = zip(self.corrected_rows[:MOST_LISTED].tolist(), self.corrected_by.tolist(), strict=False)
        return [
            Correction(
                file=pool.files[int(pool.ground.file[row])],
                line=int(pool.ground.line[row]),
                by_file=pool.files[int(pool.ground.file[by])],
                by_line=int(pool.ground.line[by]),
            )
            for row, by in pairs
        ]


def find(pool: Pool, demand: Demand, files: Sequence[Closed]) -> Repeats | None:
    """Judge the rows of a source by its key; None for a source without one.

    Of rows that share the key, the newest (by file, then by line) says what is true. The first row that
    says the same is the reading; a row that says something else is corrected; a row that says what one
    before it said is repeated. What a row says is judged on the columns that are used. Numbers and times
    are compared as such, text without the blanks around it; a row in whose key nothing stands is like no
    other.
    """
    if not demand.source.key:
        return None
    order, begins = _by_key(pool, demand, files)
    differs = np.zeros(order.size, dtype=np.bool_)
    for column in _content(pool, demand):
        cells = column[order]
        differs[1:] |= cells[1:] != cells[:-1]
    differs &= ~begins
    group = np.cumsum(begins) - 1
    disputed = np.zeros(group[-1] + 1 if group.size else 0, dtype=np.bool_)
    disputed[group[differs]] = True
    repeated, corrected = np.zeros(pool.size, dtype=np.bool_), np.zeros(pool.size, dtype=np.bool_)
    in_dispute = disputed[group]
    repeated[order[~begins & ~in_dispute]] = True
    rows, by = _settle(pool, demand, order[in_dispute], group[in_dispute], repeated)
    corrected[rows] = True
    ascending = np.argsort(rows, kind="stable")
    return Repeats(
        repeated=repeated,
        corrected=corrected,
        corrected_rows=rows[ascending],
        corrected_by=by[ascending],
    )


def _settle(pool: Pool, demand: Demand, rows: Ints, group: Ints, repeated: Bools) -> tuple[Ints, Ints]:
    """Judge groups of rows that do not all say the same: oldest first, one group after the other.

    Marks, in place, what is repeated; returns the rows that are corrected, and by which.
    """
    if rows.size == 0:
        return rows, rows
    said = identified([group, *(column[rows] for column in _content(pool, demand))])
    _, first, what = np.unique(said, return_index=True, return_inverse=True)
    earliest = first[what.reshape(-1)]  # where each row's words stood first; places in `rows`
    places = np.arange(rows.size)
    repeated[rows[earliest != places]] = True
    ends = np.flatnonzero(np.concatenate((group[1:] != group[:-1], [True])))
    newest = np.repeat(ends, np.diff(np.concatenate(([-1], ends))))
    wrong = np.flatnonzero((earliest == places) & (said != said[newest]))
    true_since = earliest[newest[wrong]]
    by = np.where(true_since > wrong, true_since, newest[wrong])
    return rows[wrong], rows[by]


def _by_key(pool: Pool, demand: Demand, files: Sequence[Closed]) -> tuple[Ints, Bools]:
    """Return the rows with a key, sorted by it and from old to new, and where the rows of each key begin."""
    columns, filled = _key(pool, demand)
    rows = _oldest_first(pool, demand, files)
    rows = rows[filled[rows]]
    key = identified(columns)[rows]
    sorting = np.argsort(key, kind="stable")
    key = key[sorting]
    return rows[sorting], np.concatenate((np.ones(min(key.size, 1), dtype=np.bool_), key[1:] != key[:-1]))


def _key(pool: Pool, demand: Demand) -> tuple[list[npt.NDArray[Any]], Bools]:
    """Return the columns, (N,) each, by which rows are told apart, and whether anything stands in them."""
    columns: list[npt.NDArray[Any]] = []
    filled = np.zeros(pool.size, dtype=np.bool_)
    for name in demand.source.key:
        if name in demand.numbers:
            columns += _cells(name, pool)
            filled |= pool.states(name) != State.EMPTY
        elif name in demand.labels:
            labels = pool.labels[name]
            columns.append(labels.codes)
            texts = np.array([bool(text) for text in labels.categories] or [False])
            filled |= texts[labels.codes]
        elif pool.ground.time is not None:
            columns.append(pool.ground.time)
            filled[:] = True
    return columns, filled


def _oldest_first(pool: Pool, demand: Demand, files: Sequence[Closed]) -> Ints:
    if demand.source.newest == "path":
        return np.arange(pool.size)
    dates = [_modified(one) for one in files]
    starts = pool.ground.starts.tolist()
    in_turn = sorted(range(len(files)), key=lambda index: (dates[index], index))
    return np.concatenate(
        [np.zeros(0, dtype=np.int64), *(np.arange(starts[index], starts[index + 1]) for index in in_turn)]
    )


def _modified(one: Closed) -> int:
    try:
        return one.found.path.stat().st_mtime_ns
    except OSError:
        return 0


def _content(pool: Pool, demand: Demand) -> Iterator[npt.NDArray[Any]]:
    """Go through the columns, (N,) each, that say what a row says."""
    if pool.ground.time is not None:
        yield pool.ground.time
    for name in demand.numbers:
        yield from _cells(name, pool)
    for name in dict.fromkeys(name for ask in demand.asks for name in ask.labels):
        yield pool.labels[name].codes


def _cells(name: str, pool: Pool) -> list[npt.NDArray[Any]]:
    """Return a column of numbers so that equal cells are equal: values as bits, states, and odd texts."""
    values = pool.values(name)
    bits = np.where(np.isnan(values), 0.0, values + 0.0).view(np.int64)  # -0.0 + 0.0 is 0.0
    if pool.is_clean(name):
        return [bits]
    state = pool.states(name)
    texts = _texts(name, pool, state)
    return [bits, state.astype(np.int64)] if texts is None else [bits, state.astype(np.int64), texts]


def _texts(name: str, pool: Pool, state: States) -> Ints | None:
    """Return codes, (N,), of what stands in cells that are no numbers; None where all are."""
    odd = (state > State.EMPTY) & (state != State.ABSENT)
    if not odd.any():
        return None
    codes = np.zeros(pool.size, dtype=np.int64)
    known: dict[str, int] = {}
    for block, start in zip(pool.blocks, pool.ground.starts.tolist(), strict=False):
        if block is None:
            continue
        places = np.flatnonzero(odd[start : start + block.line.size])
        if places.size == 0:
            continue
        cells = _written(name, block, places)
        codes[start + places] = [known.setdefault(text, len(known) + 1) for text in cells]
    return codes


def _written(name: str, block: Block, places: Ints) -> list[str]:
    if block.texts is None:
        return [""] * places.size  # read fast, and so without a cell that is no number
    texts: list[str] = block.texts[name].take(pa.array(places)).to_pylist()
    return texts
