"""The rows of a source's files as they lie one after the other, and walks over them that suit the cache."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from holdsteady.arrays import Ints

_TOGETHER = 262_144  # rows of a column that the processor's cache holds


def joined(arrays: Sequence[npt.NDArray[Any]]) -> Ints:
    """Return whole numbers, one array after the other."""
    return np.concatenate([np.zeros(0, dtype=np.int64), *arrays])


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretch:
    """Some files that lie one after the other: `files` are their places, `rows` those of their rows."""

    files: slice
    rows: slice


@dataclass(slots=True, kw_only=True)
class Ground:
    """N rows of F files, in the order of files and lines.

    The rows of file f are those from `starts[f]` to `starts[f + 1]`, (F + 1,). `lines` and, where the
    source has times, `times` hold an array for each file.
    """

    starts: Ints
    lines: Sequence[Ints]
    times: Sequence[Ints] | None
    _file: Ints | None = None
    _line: Ints | None = None
    _time: Ints | None = None
    _stretches: Sequence[Stretch] = ()

    @property
    def size(self) -> int:
        """How many rows there are."""
        return int(self.starts[-1])

    @property
    def file(self) -> Ints:
        """Each row's file, (N,)."""
        if self._file is None:
            self._file = np.repeat(np.arange(self.starts.size - 1), np.diff(self.starts))
        return self._file

    @property
    def line(self) -> Ints:
        """Each row's line, (N,)."""
        if self._line is None:
            self._line = joined(self.lines)
        return self._line

    @property
    def time(self) -> Ints | None:
        """Each row's time, (N,)."""
        if self._time is None and self.times is not None:
            self._time = joined(self.times)
        return self._time

    @property
    def stretches(self) -> Sequence[Stretch]:
        """All rows, in stretches of whole files that are just long enough to be worth a step."""
        if not self._stretches:
            found, starts, first = [], self.starts.tolist(), 0
            for last in range(1, len(starts)):
                if starts[last] - starts[first] >= _TOGETHER or last == len(starts) - 1:
                    found.append(Stretch(files=slice(first, last), rows=slice(starts[first], starts[last])))
                    first = last
            self._stretches = found
        return self._stretches

    def shifts(self) -> Ints | None:
        """Return what to add to a row's place for its line, (F,); None where a file's lines have gaps."""
        first = np.zeros(len(self.lines), dtype=np.int64)
        for index, lines in enumerate(self.lines):
            if lines.size:
                first[index] = lines[0]
                if lines[-1] - lines[0] + 1 != lines.size:
                    return None
        return first - self.starts[:-1]
