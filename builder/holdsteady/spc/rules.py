"""The eight rules; see the contract of this module in `find`."""

from __future__ import annotations

from dataclasses import dataclass

from holdsteady.arrays import Bools, Ints


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A rule with its counts: met by `points` of the last `of` points."""

    name: str
    points: int
    of: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretches:
    """Unbroken stretches over which a rule is met in one direction, S of them, sorted by `fired`.

    Indices are 0-based positions in the arrays handed in; `direction` is +1 high, -1 low, 0 none.
    `met` is (N,) int64: +1, -1 where met high, low; 2 where met without a direction; 0 where not met.
    """

    direction: Ints
    first: Ints
    fired: Ints
    last: Ints
    met: Ints
