"""All usable rows of a source in one order, and quick ways to find those that carry given labels."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
import pyarrow as pa

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.block import Block
from holdsteady.intake.columns import codes, whole
from holdsteady.intake.demand import Demand
from holdsteady.intake.file import Closed
from holdsteady.intake.numbers import Numbers, State

Setting = str | int | float | bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Labels:
    """A column of text: codes, (N,), into `categories`; -1 where the file lacks the column."""

    codes: Ints
    categories: Sequence[str]


@dataclass(slots=True, kw_only=True)
class Pool:
    """N rows of F files, ordered by time, file and line.

    `file`, `line`, `time` are (N,); `has` says for each column which files have it, (F,).
    """

    files: tuple[str, ...]
    file: Ints
    line: Ints
    time: Ints | None
    numbers: dict[str, Numbers]
    labels: dict[str, Labels]
    has: dict[str, Bools]
    _groups: dict[tuple[str, ...], Groups] = field(default_factory=dict)
    _places: dict[str, dict[str, int]] = field(default_factory=dict)

    @property
    def size(self) -> int:
        """How many rows there are."""
        return self.line.size

    def rows_where(self, where: Mapping[str, Setting]) -> Ints:
        """Return the rows, ascending, whose labels are those of the settings."""
        if not where:
            return np.arange(self.size)
        names = tuple(sorted(where))
        if names not in self._groups:
            self._groups[names] = group([self.labels[name].codes for name in names])
        groups = self._groups[names]
        wanted = np.ones(groups.keys.shape[0], dtype=np.bool_)
        for place, name in enumerate(names):
            wanted &= np.isin(groups.keys[:, place], self._matching(name, where[name]))
        found = [groups.rows(int(index)) for index in np.flatnonzero(wanted)]
        if len(found) == 1:
            return found[0]
        return np.sort(np.concatenate([np.zeros(0, dtype=np.int64), *found]))

    def _matching(self, name: str, setting: Setting) -> list[int]:
        categories = self.labels[name].categories
        if isinstance(setting, bool):
            return [at for at, text in enumerate(categories) if text.lower() == str(setting).lower()]
        if isinstance(setting, str):
            if name not in self._places:
                self._places[name] = {text: at for at, text in enumerate(categories)}
            return [self._places[name].get(setting.strip(), len(categories))]
        return [at for at, text in enumerate(categories) if _equals(text, setting)]


@dataclass(frozen=True, slots=True, kw_only=True)
class Groups:
    """G groups of rows that share their codes: keys (G, columns), and the rows of each, ascending."""

    keys: Ints
    order: Ints
    starts: Ints

    def rows(self, index: int) -> Ints:
        """Return the rows of one group."""
        return self.order[self.starts[index] : self.starts[index + 1]]


def group(columns: Sequence[Ints]) -> Groups:
    """Group rows by the codes they carry in one or several columns."""
    dense, keys = _dense(columns[0])
    for column in columns[1:]:
        inner, inner_keys = _dense(column)
        both, both_keys = _dense(dense * inner_keys.shape[0] + inner)
        pairs = both_keys[:, 0]
        keys = np.column_stack((keys[pairs // inner_keys.shape[0]], inner_keys[pairs % inner_keys.shape[0]]))
        dense = both
    small = (
        dense.astype(np.uint16) if keys.shape[0] < 2**16 else dense
    )  # sorted by radix, several times faster
    starts = np.concatenate(([0], np.cumsum(np.bincount(dense, minlength=keys.shape[0]))))
    return Groups(keys=keys, order=np.argsort(small, kind="stable"), starts=starts.astype(np.int64))


def _dense(column: Ints) -> tuple[Ints, Ints]:
    """Return codes from 0 without holes, and the code, (G, 1), that each stands for."""
    if column.size == 0:
        return column, np.zeros((0, 1), dtype=np.int64)
    lowest, highest = int(column.min()), int(column.max())
    if highest - lowest > 8 * column.size + 1_000:
        keys, dense = np.unique(column, return_inverse=True)
        return dense.reshape(-1).astype(np.int64), keys[:, None]
    present = np.bincount(column - lowest, minlength=highest - lowest + 1) > 0
    keys = np.flatnonzero(present) + lowest
    return (np.cumsum(present) - 1)[column - lowest], keys[:, None]


def _equals(text: str, number: float) -> bool:
    try:
        return float(text.replace(",", ".", 1)) == number
    except ValueError:
        return False


def gather(files: Sequence[Closed], demand: Demand) -> Pool:
    """Put the rows of a source's files, given in the order of their paths, into one pool."""
    blocks = [(index, one.block) for index, one in enumerate(files) if one.block is not None]
    sizes = [block.line.size for _, block in blocks]
    pool = Pool(
        files=tuple(one.found.name for one in files),
        file=np.repeat(np.array([index for index, _ in blocks], dtype=np.int64), sizes),
        line=_joined([block.line for _, block in blocks]),
        time=None if demand.source.time is None else _joined([_time(block) for _, block in blocks]),
        numbers={name: _numbers(name, blocks) for name in demand.numbers},
        labels={name: _labels(name, blocks) for name in demand.labels},
        has={
            name: np.array(
                [one.layout is not None and name in one.layout.position for one in files], dtype=np.bool_
            )
            for name in (*demand.numbers, *demand.labels)
        },
    )
    return pool if pool.time is None else _in_order(pool, pool.time)


def _in_order(pool: Pool, time: Ints) -> Pool:
    if bool((np.diff(time) >= 0).all()):
        return pool
    order = np.argsort(time, kind="stable")
    return Pool(
        files=pool.files,
        file=pool.file[order],
        line=pool.line[order],
        time=time[order],
        numbers={
            name: Numbers(values=one.values[order], state=one.state[order])
            for name, one in pool.numbers.items()
        },
        labels={
            name: Labels(codes=one.codes[order], categories=one.categories)
            for name, one in pool.labels.items()
        },
        has=pool.has,
    )


def _time(block: Block) -> Ints:
    return np.zeros(block.line.size, dtype=np.int64) if block.time is None else block.time


def _joined(arrays: list[Ints]) -> Ints:
    return np.concatenate([np.zeros(0, dtype=np.int64), *arrays])


def _numbers(name: str, blocks: Sequence[tuple[int, Block]]) -> Numbers:
    values, states = [np.zeros(0)], [np.zeros(0, dtype=np.uint8)]
    for _, block in blocks:
        column = block.numbers.get(name)
        rows = block.line.size
        values.append(np.full(rows, np.nan) if column is None else column.values)
        states.append(np.full(rows, State.ABSENT, dtype=np.uint8) if column is None else column.state)
    return Numbers(values=np.concatenate(values), state=np.concatenate(states))


def _labels(name: str, blocks: Sequence[tuple[int, Block]]) -> Labels:
    chunks = [block.labels[name] for _, block in blocks if name in block.labels]
    if not chunks:
        return Labels(codes=np.full(sum(block.line.size for _, block in blocks), -1), categories=())
    joined, categories = codes(whole(pa.chunked_array(chunks)))
    if len(chunks) == len(blocks):
        return Labels(codes=joined, categories=categories)
    there = np.concatenate([np.full(block.line.size, name in block.labels) for _, block in blocks])
    result = np.full(there.size, -1, dtype=np.int64)
    result[there] = joined
    return Labels(codes=result, categories=categories)
