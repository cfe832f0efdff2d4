"""Readings gathered into subgroups: size, mean, median, range and standard deviation of each."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Floats, Ints, frozen


@dataclass(frozen=True, slots=True, kw_only=True)
class Subgroups:
    """G subgroups; `range` and `s` (n - 1) are NaN where a subgroup holds one reading."""

    n: Floats  # (G,) readings in each
    mean: Floats  # (G,)
    median: Floats  # (G,) mean of the two middle values where n is even
    range: Floats  # (G,)
    s: Floats  # (G,)


def summarise(values: Floats, starts: Ints) -> Subgroups:
    """Summarise consecutive readings by subgroup.

    Parameters
    ----------
    values : (R,) readings in order, none missing
    starts : (G,) where each subgroup starts; increasing, the first 0

    Raises
    ------
    ValueError
        `starts` does not begin with 0, does not increase, or passes the last reading.
    """
    _check(values, starts)
    if len(starts) == 0:
        empty = [frozen(np.empty(0)) for _ in range(5)]
        return Subgroups(n=empty[0], mean=empty[1], median=empty[2], range=empty[3], s=empty[4])
    n = np.diff(starts, append=len(values))
    lowest = np.minimum.reduceat(values, starts)
    highest = np.maximum.reduceat(values, starts)
    # Rounding can carry the mean of equal readings past them, which would make ties look like steps.
    mean = np.clip(np.add.reduceat(values, starts) / n, lowest, highest)
    deviation = values - np.repeat(mean, n)
    squares = np.add.reduceat(deviation * deviation, starts)
    spread = highest - lowest
    alone = n == 1
    s = np.where(spread > 0, np.sqrt(squares / np.where(alone, 1, n - 1)), 0.0)
    return Subgroups(
        n=frozen(n.astype(np.float64)),
        mean=frozen(mean),
        median=frozen(_medians(values, starts, n)),
        range=frozen(np.where(alone, np.nan, spread)),
        s=frozen(np.where(alone, np.nan, s)),
    )


def _check(values: Floats, starts: Ints) -> None:
    if len(starts) == 0:
        if len(values):
            raise ValueError("readings without a subgroup to belong to")
        return
    if starts[0] != 0 or (np.diff(starts) <= 0).any() or starts[-1] >= len(values):
        raise ValueError("starts must begin with 0 and increase, each below the number of readings")


def _medians(values: Floats, starts: Ints, n: Ints) -> Floats:
    if n.min() == n.max():
        ordered = np.sort(values.reshape(len(n), int(n[0])), axis=1).ravel()
    else:
        ordered = values[np.lexsort((values, np.repeat(np.arange(len(n)), n)))]
    medians: Floats = (ordered[starts + (n - 1) // 2] + ordered[starts + n // 2]) / 2.0
    return medians
