"""How readings follow each other: members, bursts, runs of equal labels, levels that differ."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.intake.times_text import NO_TIME
from holdsteady.times import SECOND

_MAD = 1.4826  # median absolute deviation to standard deviation, for normal data
_FEWEST = 8
_CONTRAST = 8.0  # how much longer the pause after a burst is than those inside it
_INSIDE = 3_600 * SECOND  # pauses longer than this are never inside a burst


@dataclass(frozen=True, slots=True, kw_only=True)
class Runs:
    """Runs of readings that belong together, in the order of time within each member.

    `sizes`, (K,), are their lengths; `run`, (R,), says to which each reading belongs, counted in that
    order; `returns` counts runs whose label had ended before.
    """

    sizes: Ints
    run: Ints
    returns: int = 0

    @property
    def usual(self) -> int:
        """The commonest size."""
        return int(np.bincount(self.sizes).argmax()) if self.sizes.size else 0

    @property
    def share_of_usual(self) -> float:
        """How many of the runs have it."""
        return float(np.mean(self.sizes == self.usual)) if self.sizes.size else 0.0


def in_order(member: Ints, time: Ints) -> Ints:
    """Return the order of rows, (R,), by member, then time, then place."""
    return np.lexsort((np.arange(member.size), time, member)).astype(np.int64)


def combine(codes: list[Ints], count: int) -> Ints:
    """Return one number for each combination of labels, (R,)."""
    if not codes:
        return np.zeros(count, dtype=np.int64)
    _, member = np.unique(np.column_stack(codes), axis=0, return_inverse=True)
    return member.reshape(-1).astype(np.int64)


def runs_of(label: Ints, member: Ints, time: Ints) -> Runs:
    """Return the runs of equal labels within each member."""
    order = in_order(member, time)
    of, who = label[order], member[order]
    runs = _cut(
        np.concatenate((np.ones(min(of.size, 1), bool), (np.diff(of) != 0) | (np.diff(who) != 0))), order
    )
    starts = np.cumsum(runs.sizes) - runs.sizes
    pairs = np.unique(np.column_stack((who[starts], of[starts])), axis=0)
    return Runs(sizes=runs.sizes, run=runs.run, returns=int(starts.size - len(pairs)))


def _cut(new: Bools, order: Ints) -> Runs:
    starts = np.flatnonzero(new)
    run = np.zeros(order.size, dtype=np.int64)
    run[order] = np.cumsum(new) - 1
    return Runs(sizes=np.diff(np.append(starts, order.size)), run=run)


def bursts(member: Ints, time: Ints, block: Ints) -> Runs | None:
    """Return the bursts in which readings come, a pause after each; None where they come evenly.

    The pause that ends a burst is found where the pauses, sorted, jump the most.
    """
    order = in_order(member, time)
    when, who, stretch = time[order], member[order], block[order]
    if when.size < 2 * _FEWEST or np.any(when == NO_TIME):
        return None
    pause = np.diff(when)
    same = (np.diff(who) == 0) & (np.diff(stretch) == 0)
    logs = np.sort(np.log(np.maximum(pause[same], SECOND)))
    low, high = int(logs.size * 0.3), int(logs.size * 0.97)
    if high - low < 2:
        return None
    jump = int(np.argmax(np.diff(logs[low:high]))) + low
    if logs[jump + 1] - logs[jump] < np.log(_CONTRAST) or logs[jump] > np.log(_INSIDE):
        return None
    ends = (pause > np.exp((logs[jump] + logs[jump + 1]) / 2)) | ~same
    return _cut(np.concatenate(([True], ends)), order)


def separation(values: Floats, label: Ints, within: Ints) -> float:
    """Return how far the levels of a label lie apart, in standard deviations of a single reading.

    Medians and their absolute deviations, so that a few wild values decide nothing; levels of `within`
    are taken out first. Labels with fewer than eight readings are left out; what as many groups of
    such sizes would show by chance is taken off.
    """
    known = np.isfinite(values)
    values, label, within = values[known], label[known], within[known]
    if values.size < 2 * _FEWEST:
        return 0.0
    centred = values - _medians(values, within)[within]
    level = _medians(centred, label)
    counts = np.bincount(label)
    large = np.flatnonzero(counts >= _FEWEST)
    if large.size < 2:
        return 0.0
    kept = np.isin(label, large)
    sigma = _MAD * float(np.median(np.abs(centred[kept] - level[label[kept]])))
    span = float(np.ptp(level[large]))
    if sigma == 0:
        return float("inf") if span > 0 else 0.0
    chance = 1.25 * 2 * np.sqrt(2 * np.log(large.size)) / np.sqrt(float(counts[large].min()))
    return max(0.0, span / sigma - float(chance))


def _medians(values: Floats, label: Ints) -> Floats:
    result = np.zeros(int(label.max()) + 1 if label.size else 0)
    order = np.argsort(label, kind="stable")
    edges = np.searchsorted(label[order], np.arange(result.size + 1))
    for code in range(result.size):
        part = values[order[edges[code] : edges[code + 1]]]
        result[code] = float(np.median(part)) if part.size else 0.0
    return result


def is_once_in_each(label: Ints, runs: Runs) -> bool:
    """Whether (nearly) every run holds each label at most once, and most runs more than one reading."""
    if label.size == 0:
        return False
    _, counts = np.unique(np.column_stack((runs.run, label)), axis=0, return_counts=True)
    return bool(np.mean(counts == 1) > 0.95 and np.median(runs.sizes) > 1)
