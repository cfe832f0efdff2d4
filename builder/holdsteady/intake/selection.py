"""The rows that a characteristic asks for, split into the members of `each`."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any, TypeVar

import numpy as np
import numpy.typing as npt

from holdsteady.arrays import Ints, frozen
from holdsteady.intake.ground import Ground, Stretch
from holdsteady.intake.groups import Groups

_FEWEST_IN_FILE = 16  # rows of a member and file, on average, that make counting cheaper than looking up
_FEWEST_IN_STEP = 256

Kind = TypeVar("Kind", bound=np.generic)
Step = tuple[Stretch, Sequence[tuple[int, int]]]
Patch = tuple[slice, Ints]


@dataclass(frozen=True, slots=True, kw_only=True)
class Selection:
    """R rows of a pool for M members, one member after the other, each by time, file and line.

    `time`, `file` and `line` are (R,); those of member m run from `starts[m]` to `starts[m + 1]`, (M + 1,).
    `each` gives every member's labels.

    Cells are fetched in the order in which they lie, which is nearly always that of time, and then put
    right: `places` are those of the rows in that order, `patches` the parts whose order differs, and their
    order. `whole` says that these are all rows of the pool as they lie. `steps` say, stretch by stretch of
    the pool, which parts of `places` lie in it, counted from its first row, so that cells can be fetched
    without leaving the cache; where there are none, cells are fetched from the whole column.
    """

    starts: Ints
    each: Sequence[dict[str, str]]
    time: Ints | None
    file: Ints
    line: Ints
    places: Ints
    patches: Sequence[Patch]
    whole: bool
    steps: Sequence[Step]

    @property
    def size(self) -> int:
        """How many rows there are."""
        return int(self.starts[-1])

    @property
    def rows(self) -> Ints:
        """The places, (R,), of the rows in the pool."""
        result = self.places.copy()
        for stretch, parts in self.steps:
            for begin, end in parts:
                result[begin:end] += stretch.rows.start
        return self._put_right(result)

    def of(self, column: npt.NDArray[Kind]) -> npt.NDArray[Kind]:
        """Return the selected cells, (R,), of a column of the pool, (N,)."""
        if self.whole:
            return self._put_right(column.copy())
        if not self.steps:
            return self._put_right(column[self.places])
        return self._walk(column.dtype, lambda stretch: column[stretch.rows])

    def of_pieces(self, pieces: Sequence[npt.NDArray[Kind]]) -> npt.NDArray[Kind] | None:
        """Return the selected cells of a column of an array a file; None where it must be joined."""
        if not pieces or not (self.whole or self.steps):
            return None
        if self.whole:
            return self._put_right(np.concatenate(pieces))
        longest = max(stretch.rows.stop - stretch.rows.start for stretch, _ in self.steps)
        scratch = np.empty(longest, dtype=pieces[0].dtype)

        def fetch(stretch: Stretch) -> npt.NDArray[Kind]:
            cells = scratch[: stretch.rows.stop - stretch.rows.start]
            return np.concatenate(pieces[stretch.files], out=cells)

        return self._walk(scratch.dtype, fetch)

    def _walk(self, kind: np.dtype[Kind], fetch: Callable[[Stretch], npt.NDArray[Any]]) -> npt.NDArray[Kind]:
        """Fetch cells from one stretch of the pool after the other."""
        result = np.empty(self.places.size, dtype=kind)
        for stretch, parts in self.steps:
            cells = fetch(stretch)
            for begin, end in parts:
                np.take(cells, self.places[begin:end], out=result[begin:end], mode="clip")
        return self._put_right(result)

    def _put_right(self, cells: npt.NDArray[Kind]) -> npt.NDArray[Kind]:
        for part, order in self.patches:
            cells[part] = cells[part][order]
        return cells


def select(rows: Ints, each: Sequence[dict[str, str]], groups: Groups | None, ground: Ground) -> Selection:
    """Order the rows, given ascending, by member, then time; `groups` are places among them."""
    starts = np.array([0, rows.size]) if groups is None else groups.starts
    whole = groups is None and rows.size == ground.size
    if groups is not None:
        rows = groups.order if rows.size == ground.size else rows[groups.order]
    cuts = _cuts(rows, starts, ground.starts)
    file, line = _where(rows, cuts, ground)
    steps = () if whole or cuts is None else _steps(cuts, rows.size, ground)
    found = Selection(
        starts=starts,
        each=each,
        time=None,
        file=file,
        line=line,
        places=_within(rows if groups is not None else rows.copy(), steps),
        patches=(),
        whole=whole,
        steps=steps,
    )
    time = None if ground.times is None else found.of_pieces(ground.times)
    if time is None and ground.time is not None:
        time = found.of(ground.time)
    patches = () if time is None else _patches(starts, time)
    for part, order in patches:
        for cells in (time, file, line):
            if cells is not None:
                cells[part] = cells[part][order]
    return replace(
        found,
        time=None if time is None else frozen(time),
        file=frozen(file),
        line=frozen(line),
        patches=patches,
    )


def _cuts(rows: Ints, starts: Ints, bounds: Ints) -> Ints | None:
    """Return where in each member's ascending rows each file begins, (M, F + 1); None if not worth it."""
    if rows.size == 0 or (starts.size - 1) * bounds.size * _FEWEST_IN_FILE > rows.size:
        return None
    members = pairwise(starts.tolist())
    return np.stack([start + np.searchsorted(rows[start:end], bounds) for start, end in members])


def _steps(cuts: Ints, count: int, ground: Ground) -> Sequence[Step]:
    if cuts.shape[0] * len(ground.stretches) * _FEWEST_IN_STEP > count:
        return ()
    result: list[Step] = []
    for stretch in ground.stretches:
        parts = cuts[:, [stretch.files.start, stretch.files.stop]].tolist()
        result.append((stretch, [(begin, end) for begin, end in parts if end > begin]))
    return result


def _within(rows: Ints, steps: Sequence[Step]) -> Ints:
    """Count the rows, in place, each from the first row of its step."""
    for stretch, parts in steps:
        for begin, end in parts:
            rows[begin:end] -= stretch.rows.start
    return rows


def _where(rows: Ints, cuts: Ints | None, ground: Ground) -> tuple[Ints, Ints]:
    """Return file and line of each row."""
    shifts = None if cuts is None else ground.shifts()
    if cuts is None or shifts is None:
        return ground.file[rows], ground.line[rows]
    counts = np.diff(cuts, axis=1).reshape(-1)
    members = cuts.shape[0]
    file = np.repeat(np.tile(np.arange(shifts.size), members), counts)
    line = np.repeat(np.tile(shifts, members), counts)
    line += rows
    return file, line


def _patches(starts: Ints, time: Ints) -> Sequence[Patch]:
    """Find where a member's rows are not in the order of time."""
    back = np.flatnonzero(time[1:] < time[:-1]) + 1
    back = back[~np.isin(back, starts)]
    found: list[Patch] = []
    for member in np.unique(np.searchsorted(starts, back, side="right") - 1).tolist():
        start, end = int(starts[member]), int(starts[member + 1])
        order = np.argsort(time[start:end], kind="stable")
        moved = np.flatnonzero(order != np.arange(end - start))
        first, last = int(moved[0]), int(moved[-1]) + 1
        found.append((slice(start + first, start + last), order[first:last] - first))
    return found
