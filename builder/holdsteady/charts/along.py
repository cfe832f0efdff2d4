"""Where points stand along a chart: at their times, or in their order where times do not tell them apart."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Floats, Ints
from holdsteady.monitor.finding import Points
from holdsteady.times import wall


@dataclass(frozen=True, slots=True, kw_only=True)
class Along:
    """The horizontal axis of N points.

    Attributes
    ----------
    timed: whether it is the plant's clock; else it counts points from 1.
    place: (N,) where each point stands: microseconds of the plant's clock, or its order.
    moments: (N,) microseconds of the plant's clock, on an axis of order too; None where there are no times.
    """

    timed: bool
    place: Floats
    moments: Ints | None

    @property
    def shared(self) -> bool:
        """Whether points have times, but too many share one to stand at them."""
        return self.moments is not None and not self.timed

    def at(self, moments: Ints) -> Floats:
        """Return where moments of the plant's clock stand, (M,).

        In order, that is before the first point that is not earlier.

        Raises
        ------
        ValueError: the points have no times.
        """
        if self.moments is None:
            raise ValueError("points without times have no moments")
        if self.timed:
            return moments.astype(np.float64)
        between: Floats = np.searchsorted(self.moments, moments, side="left").astype(np.float64) + 0.5
        return between


def along(points: Points, zone: ZoneInfo) -> Along:
    """Return the axis: of time, unless fewer than half of the points have times that differ, or none do."""
    count = len(points.n)
    order = np.arange(1, count + 1, dtype=np.float64)
    if points.time is None:
        return Along(timed=False, place=order, moments=None)
    moments = wall(points.time, zone)
    distinct = 1 + int(np.count_nonzero(np.diff(points.time)))
    apart = count < 2 or (distinct > 1 and 2 * distinct >= count)
    return Along(timed=apart, place=moments.astype(np.float64) if apart else order, moments=moments)
