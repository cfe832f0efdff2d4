"""All usable rows of a source, and quick ways to find those that carry given labels."""

from __future__ import annotations

import threading
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.intake.block import Block
from holdsteady.intake.columns import Codes, joined_codes
from holdsteady.intake.demand import Demand
from holdsteady.intake.file import Closed
from holdsteady.intake.ground import Ground
from holdsteady.intake.groups import Groups, group
from holdsteady.intake.numbers import Numbers, State, States
from holdsteady.intake.selection import Selection, select

_FEW = 3  # settings of `where` for which grouping all rows is too much

Setting = str | int | float | bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Labels:
    """A column of text: codes, (N,), into `categories`; -1 where the file lacks the column."""

    codes: Codes
    categories: Sequence[str]


@dataclass(slots=True, kw_only=True)
class Pool:
    """N rows of F files, in the order of files and lines.

    `ground` is how they lie; `has` says for each column which files have it, (F,). `kept` are the rows,
    (N,), that are no repetition of others; None for all. Several threads may ask it at once.
    """

    files: tuple[str, ...]
    ground: Ground
    blocks: Sequence[Block | None]
    labels: Mapping[str, Labels]
    has: Mapping[str, Bools]
    asked: Mapping[tuple[str, ...], int]  # how many different settings `where` names these columns with
    kept: Bools | None = None
    _scratch: threading.local = field(default_factory=threading.local)
    _lock: threading.Lock = field(default_factory=threading.Lock)
    _clean: dict[str, bool] = field(default_factory=dict)
    _states: dict[str, States] = field(default_factory=dict)
    _groups: dict[tuple[str, ...], Groups] = field(default_factory=dict)
    _places: dict[str, dict[str, int]] = field(default_factory=dict)
    _selections: dict[object, Selection] = field(default_factory=dict)

    @property
    def size(self) -> int:
        """How many rows there are."""
        return self.ground.size

    def selected(self, name: str, chosen: Selection) -> Floats:
        """Return the selected cells, (R,), of a column of numbers, NaN where there is none."""
        found = chosen.of_pieces(self._pieces(name))
        return chosen.of(self.values(name)) if found is None else found

    def values(self, name: str) -> Floats:
        """Return a column of numbers, (N,), NaN where there is none; it stands until the next is asked for.

        One piece of memory serves all columns that a thread asks for, one after the other: fresh memory
        costs more than the copy.
        """
        held: dict[str, Floats] = self._scratch.__dict__
        if name not in held:
            values = held.popitem()[1] if held else np.empty(self.size)
            np.concatenate([np.empty(0), *self._pieces(name)], out=values)
            held[name] = values
        return held[name]

    def states(self, name: str) -> States:
        """Return what the cells of a column are, (N,)."""
        if name not in self._states:
            absent = np.uint8(State.ABSENT)
            pieces = [
                np.broadcast_to(absent, size) if numbers is None else numbers.state
                for numbers, size in self._numbers(name)
            ]
            self._states[name] = np.concatenate([np.empty(0, dtype=np.uint8), *pieces])
        return self._states[name]

    def bounds(self, name: str) -> tuple[float, float]:
        """Return the lowest and the highest number of a column that has no other cells."""
        pieces = [piece for piece in self._pieces(name) if piece.size]
        return (
            min((float(piece.min()) for piece in pieces), default=np.inf),
            max((float(piece.max()) for piece in pieces), default=-np.inf),
        )

    def _pieces(self, name: str) -> list[Floats]:
        return [
            np.broadcast_to(np.nan, size) if numbers is None else numbers.values
            for numbers, size in self._numbers(name)
        ]

    def is_clean(self, name: str) -> bool:
        """Whether every cell of a column is known to be a number."""
        if name not in self._clean:
            filled = [numbers for numbers, size in self._numbers(name) if size]
            self._clean[name] = all(one is not None and not one.state.any() for one in filled)
        return self._clean[name]

    def _numbers(self, name: str) -> list[tuple[Numbers | None, int]]:
        return [
            (None, 0) if block is None else (block.numbers.get(name), block.line.size)
            for block in self.blocks
        ]

    def selection(self, where: Mapping[str, Setting], each: Sequence[str]) -> Selection:
        """Return the rows whose labels are those of the settings, one member of `each` after the other."""
        key = (frozenset((name, type(value), value) for name, value in where.items()), tuple(each))
        with self._lock:
            if key not in self._selections:
                self._selections[key] = self._select(where, tuple(each))
            return self._selections[key]

    def _select(self, where: Mapping[str, Setting], each: tuple[str, ...]) -> Selection:
        rows = self.rows_where(where)
        named: list[dict[str, str]] = [{}]
        groups = None
        if each:
            whole = rows.size == self.size
            groups = group([_of(self.labels[name].codes, rows, whole=whole) for name in each])
            named = [
                {
                    name: self.labels[name].categories[code] if code >= 0 else ""
                    for name, code in zip(each, key, strict=True)
                }
                for key in groups.keys.tolist()
            ]
        return select(rows, named, groups, self.ground)

    def rows_where(self, where: Mapping[str, Setting]) -> Ints:
        """Return the rows, ascending, whose labels are those of the settings."""
        if not where:
            return np.arange(self.size) if self.kept is None else np.flatnonzero(self.kept)
        names = tuple(sorted(where))
        if self.asked.get(names, 0) <= _FEW:
            return self._looked_up(where)
        if names not in self._groups:
            self._groups[names] = group([self.labels[name].codes for name in names])
        groups = self._groups[names]
        wanted = np.ones(groups.keys.shape[0], dtype=np.bool_)
        for place, name in enumerate(names):
            wanted &= np.isin(groups.keys[:, place], self._matching(name, where[name]))
        found = [groups.rows(int(index)) for index in np.flatnonzero(wanted)]
        rows = found[0] if len(found) == 1 else np.sort(np.concatenate([np.zeros(0, dtype=np.int64), *found]))
        return rows if self.kept is None else rows[self.kept[rows]]

    def _looked_up(self, where: Mapping[str, Setting]) -> Ints:
        wanted = np.ones(self.size, dtype=np.bool_) if self.kept is None else self.kept.copy()
        for name, setting in where.items():
            labels = self.labels[name]
            matches = np.zeros(len(labels.categories) + 1, dtype=np.bool_)
            matches[[at for at in self._matching(name, setting) if at < len(labels.categories)]] = True
            wanted &= matches[labels.codes]  # a code of -1 is the last, which nothing matches
        return np.flatnonzero(wanted)

    def _matching(self, name: str, setting: Setting) -> list[int]:
        categories = self.labels[name].categories
        if isinstance(setting, bool):
            return [at for at, text in enumerate(categories) if text.lower() == str(setting).lower()]
        if isinstance(setting, str):
            if name not in self._places:
                self._places[name] = {text: at for at, text in enumerate(categories)}
            return [self._places[name].get(setting.strip(), len(categories))]
        return [at for at, text in enumerate(categories) if _equals(text, setting)]


def _of(codes: Codes, rows: Ints, *, whole: bool) -> Codes:
    return codes if whole else codes[rows]


def _equals(text: str, number: float) -> bool:
    try:
        return float(text.replace(",", ".", 1)) == number
    except ValueError:
        return False


def gather(files: Sequence[Closed], demand: Demand) -> Pool:
    """Put the rows of a source's files, given in the order of their paths, into one pool."""
    blocks = [one.block for one in files]
    none = np.zeros(0, dtype=np.int64)
    sizes = np.array([0 if block is None else block.line.size for block in blocks], dtype=np.int64)
    there = [block for block in blocks if block is not None]
    wheres = {tuple(sorted(ask.characteristic.where.items())) for ask in demand.asks}
    return Pool(
        files=tuple(one.found.name for one in files),
        ground=Ground(
            starts=np.concatenate((np.zeros(1, dtype=np.int64), np.cumsum(sizes))),
            lines=[none if block is None else block.line for block in blocks],
            times=[none if block is None else _time(block) for block in blocks] if demand.stamps else None,
        ),
        blocks=blocks,
        labels={name: _labels(name, there) for name in demand.labels},
        has={
            name: np.array(
                [one.layout is not None and name in one.layout.position for one in files], dtype=np.bool_
            )
            for name in (*demand.numbers, *demand.labels)
        },
        asked=Counter(tuple(name for name, _ in where) for where in wheres),
    )


def _time(block: Block) -> Ints:
    return np.zeros(block.line.size, dtype=np.int64) if block.time is None else block.time


def _labels(name: str, blocks: Sequence[Block]) -> Labels:
    codes, categories = joined_codes([block.labels.get(name, block.line.size) for block in blocks])
    return Labels(codes=codes, categories=categories)
