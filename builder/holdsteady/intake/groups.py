"""Rows that share the codes of one or several columns."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from holdsteady.arrays import Ints
from holdsteady.intake.columns import Codes

_LONGEST_BLOCK = 1 << 17
_FEWEST = 4_096  # rows for each code that make a block of them worth it
_MOST_COUNTED = 2**15  # what two signed bytes hold: sorted by radix, several times faster


@dataclass(frozen=True, slots=True, kw_only=True)
class Groups:
    """G groups of rows that share their codes: keys (G, columns), and the rows of each, ascending.

    The rows of group g are those from `starts[g]` to `starts[g + 1]`, (G + 1,), in `order`, (N,).
    """

    keys: Ints
    order: Ints
    starts: Ints

    def rows(self, index: int) -> Ints:
        """Return the rows of one group."""
        return self.order[self.starts[index] : self.starts[index + 1]]


def group(columns: Sequence[Codes]) -> Groups:
    """Group rows by the codes, (N,) each, they carry in one or several columns."""
    if columns[0].size == 0:
        none = np.zeros(0, dtype=np.int64)
        return Groups(keys=np.zeros((0, len(columns)), np.int64), order=none, starts=np.zeros(1, np.int64))
    lowest = [int(column.min()) for column in columns]
    widths = [int(column.max()) - low + 1 for column, low in zip(columns, lowest, strict=True)]
    if math.prod(widths) > _MOST_COUNTED:
        return _group_many(columns)
    combined: Codes = np.zeros(0, dtype=np.int16)
    for place, (column, low, width) in enumerate(zip(columns, lowest, widths, strict=True)):
        shifted = (column - column.dtype.type(low) if low else column).astype(np.int16, copy=False)
        combined = combined * np.int16(width) + shifted if place else shifted
    if combined.size > _LONGEST_BLOCK and combined.size > _FEWEST * math.prod(widths):
        counts, order = _ordered_in_blocks(combined, math.prod(widths))
    else:
        counts, order = np.bincount(combined), np.argsort(combined, kind="stable")
    present = np.flatnonzero(counts)
    keys = np.column_stack(np.unravel_index(present, widths)) + np.array(lowest)
    return Groups(keys=keys, order=order, starts=_starts(counts[present]))


def _ordered_in_blocks(codes: Codes, width: int) -> tuple[Ints, Ints]:
    """Count and sort codes below `width` block by block, each of which the processor's cache holds."""
    blocks = [codes[start : start + _LONGEST_BLOCK] for start in range(0, codes.size, _LONGEST_BLOCK)]
    counts = np.stack([np.bincount(block, minlength=width) for block in blocks])  # (blocks, width)
    totals = counts.sum(axis=0)
    before = np.cumsum(counts, axis=0) - counts + (np.cumsum(totals) - totals)  # where each part goes
    order = np.empty(codes.size, dtype=np.int64)
    for index, block in enumerate(blocks):
        rows = np.argsort(block, kind="stable")
        rows += index * _LONGEST_BLOCK
        taken = 0
        for code in np.flatnonzero(counts[index]).tolist():
            count, begin = int(counts[index, code]), int(before[index, code])
            order[begin : begin + count] = rows[taken : taken + count]
            taken += count
    return totals, order


def _group_many(columns: Sequence[Codes]) -> Groups:
    dense, keys = _dense(columns[0])
    for column in columns[1:]:
        inner, inner_keys = _dense(column)
        dense, both = _dense(dense * inner_keys.shape[0] + inner)
        pairs = both[:, 0]
        keys = np.column_stack((keys[pairs // inner_keys.shape[0]], inner_keys[pairs % inner_keys.shape[0]]))
    small = dense.astype(np.int16) if keys.shape[0] <= _MOST_COUNTED else dense
    starts = _starts(np.bincount(dense, minlength=keys.shape[0]))
    return Groups(keys=keys, order=np.argsort(small, kind="stable"), starts=starts)


def identified(columns: Sequence[npt.NDArray[Any]]) -> Ints:
    """Return a number for each row, (N,), that rows share when all their whole numbers are the same."""
    found = _numbered(columns[0])[0]
    for column in columns[1:]:
        inner, width = _numbered(column)
        found = _numbered(found * width + inner)[0]
    return found


def _numbered(column: npt.NDArray[Any]) -> tuple[Ints, int]:
    """Return numbers from 0, (N,), in the order in which the values come first, and how many there are."""
    encoded = pa.array(column.astype(np.int64, copy=False)).dictionary_encode()
    return np.asarray(np.from_dlpack(encoded.indices), dtype=np.int64), len(encoded.dictionary)


def _starts(counts: Ints) -> Ints:
    return np.concatenate((np.zeros(1, dtype=np.int64), np.cumsum(counts)))


def _dense(column: Codes) -> tuple[Ints, Ints]:
    """Return codes from 0 without holes, and the code, (G, 1), that each stands for."""
    wide = column.astype(np.int64, copy=False)
    lowest, highest = int(wide.min()), int(wide.max())
    if highest - lowest > 8 * wide.size + 1_000:
        keys, dense = np.unique(wide, return_inverse=True)
        return dense.reshape(-1).astype(np.int64), keys[:, None]
    present = np.bincount(wide - lowest, minlength=highest - lowest + 1) > 0
    keys = np.flatnonzero(present) + lowest
    return (np.cumsum(present) - 1)[wide - lowest], keys[:, None]
