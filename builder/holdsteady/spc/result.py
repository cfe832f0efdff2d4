"""What the charts return: how sigma was estimated, and the lines to draw."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Floats, frozen

Figures = tuple[tuple[str, float, bool], ...]

NO_POINTS = "no points in the baseline"
NO_RANGES = "no ranges in the baseline"
NO_VARIATION = "no variation in the baseline"


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """Centre and sigma estimated from a baseline, with what a page needs to explain them.

    `sigma` is that of a single reading: None for attribute charts, or when `finding` says why it cannot
    be had. `figures` are (name, value, bears the unit), in the order of the calculation.
    """

    centre: float  # NaN when there is no point at all
    sigma: float | None
    estimator: str
    points: int  # that entered the centre
    dof: float | None  # effective degrees of freedom of sigma
    overall_sigma: float | None  # of all readings together, n - 1
    figures: Figures
    source: str
    finding: str  # "" or why the baseline gives no usable sigma


@dataclass(frozen=True, slots=True, kw_only=True)
class Lines:
    """Centre line, limits and sigma of the plotted statistic, point by point; NaN where there is none."""

    centre: Floats  # (N,)
    lower: Floats  # (N,)
    upper: Floats  # (N,)
    sigma: Floats  # (N,)


def lines(
    centre: Floats | float, lower: Floats | float, upper: Floats | float, sigma: Floats | float, *, size: int
) -> Lines:
    """Return lines of `size` points, each given as one number or point by point, set read-only."""
    spread = [
        frozen(np.broadcast_to(np.asarray(line, dtype=np.float64), size).copy())
        for line in (centre, lower, upper, sigma)
    ]
    return Lines(centre=spread[0], lower=spread[1], upper=spread[2], sigma=spread[3])
