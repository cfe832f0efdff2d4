"""Which readings belong together: by a label, by the bursts they come in, or by the clock."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Ints
from holdsteady.intake.times_text import NO_TIME
from holdsteady.start.draft import Confidence, Value
from holdsteady.start.structure import Runs, bursts, runs_of
from holdsteady.times import DAY, SECOND

_LARGEST = 25
_FEW_ALONE = 0.1
_FEW_RETURN = 0.02
_COMPLETE = 0.9
_DENSE = 12  # readings a day that are too many for a point each
_MANY = 300
_WANTED = 4  # readings in a span of the clock
_SPANS = {
    "15m": 900,
    "30m": 1_800,
    "1h": 3_600,
    "2h": 7_200,
    "4h": 14_400,
    "8h": 28_800,
    "12h": 43_200,
    "1d": 86_400,
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Grouping:
    """The value of `subgroup`, what it rests on, and the subgroups themselves; `typical` is one of them."""

    value: Value
    confidence: Confidence
    why: str
    runs: Runs

    @property
    def typical(self) -> int:
        """A subgroup of the commonest size."""
        return int(np.argmax(self.runs.sizes == self.runs.usual))


def guess_grouping(labels: Mapping[str, Ints], member: Ints, time: Ints, block: Ints) -> Grouping | None:
    """Decide on subgroups of readings; None where each stands for itself.

    Parameters
    ----------
    labels: column -> (R,) codes of the labels that have no other use.
    member: (R,) the chart of each reading. time: (R,) microseconds. block: (R,) unbroken stretches.
    """
    return _by_label(labels, member, time) or _by_bursts(member, time, block) or _by_clock(member, time)


def _by_label(labels: Mapping[str, Ints], member: Ints, time: Ints) -> Grouping | None:
    found: list[tuple[float, str, Runs]] = []
    for name, code in labels.items():
        runs = runs_of(code, member, time)
        if runs.sizes.size < 3 or not 2 <= np.median(runs.sizes) <= _LARGEST:
            continue
        alone = float(np.mean(runs.sizes == 1))
        if alone <= _FEW_ALONE and runs.returns <= _FEW_RETURN * runs.sizes.size:
            found.append((runs.share_of_usual, name, runs))
    if not found:
        return None
    share, name, runs = max(found, key=lambda one: one[0])
    low, high = int(runs.sizes.min()), int(runs.sizes.max())
    size = f"{low}" if low == high else f"{low} to {high}, mostly {runs.usual},"
    why = f"{runs.sizes.size} runs of equal {name}, {size} readings each, none returns later"
    return Grouping(
        value={"column": name}, confidence="sure" if share >= _COMPLETE else "likely", why=why, runs=runs
    )


def _by_bursts(member: Ints, time: Ints, block: Ints) -> Grouping | None:
    runs = bursts(member, time, block)
    if runs is None or not 2 <= runs.usual <= _LARGEST or runs.share_of_usual < _COMPLETE:
        return None
    share = f"{runs.share_of_usual:.0%} of them of {runs.usual}"
    why = f"readings come in bursts, {share}, with long pauses between"
    return Grouping(value={"size": runs.usual}, confidence="likely", why=why, runs=runs)


def _by_clock(member: Ints, time: Ints) -> Grouping | None:
    """Put single readings together where there are so many a day that each would say little by itself."""
    if time.size < _MANY or np.any(time == NO_TIME):
        return None
    _, a_day = np.unique(np.column_stack((member, time // DAY)), axis=0, return_counts=True)
    if np.median(a_day) < _DENSE:
        return None
    for text, seconds in _SPANS.items():
        span = seconds * SECOND
        key = np.column_stack((member, time // span))
        _, counts = np.unique(key, axis=0, return_counts=True)
        if np.median(counts) < _WANTED:
            continue
        of = np.unique(time // span, return_inverse=True)[1].reshape(-1)
        runs = runs_of(of.astype(np.int64), member, time)
        usual = np.median(counts)
        why = f"about {np.median(a_day):.0f} readings a day come one by one; {text} holds about {usual:.0f}"
        return Grouping(value={"every": text}, confidence="guess", why=why, runs=runs)
    return None
