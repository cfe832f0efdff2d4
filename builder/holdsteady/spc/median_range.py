"""The chart of subgroup medians and ranges.

The standard error of the median is exact for normal readings at every n, not the large-sample
sqrt(pi / (2 n)).

References
----------
ISO 7870-2:2013 (median and range). David, H. A. & Nagaraja, H. N. (2003), Order Statistics, 3rd ed.
"""

from __future__ import annotations

import math

import numpy as np

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import within
from holdsteady.spc.constants import d2, d3, median_error
from holdsteady.spc.result import Estimate, Lines
from holdsteady.spc.subgroups import Subgroups


def estimate(groups: Subgroups, use: Bools, estimator: str | None = None) -> Estimate:
    """Estimate the centre, the mean of the used medians, and sigma of a single reading.

    Parameters
    ----------
    groups : G subgroups
    use : (G,) which of them are the baseline
    estimator : "mean-range" (when left out), "mean-s", "pooled" or "weighted"
    """
    centre = float(np.mean(groups.median[use])) if use.any() else math.nan
    return within.estimate(
        groups, use, centre=centre, centre_figure="mean of medians", estimator=estimator or "mean-range"
    )


def location(centre: float, sigma: float | None, n: Floats, width: float) -> Lines:
    """Lines for medians of `n` (N,) readings, with the exact standard error; centre alone without sigma."""
    return within.location_lines(centre, sigma, median_error(n), width)


def spread(sigma: float | None, n: Floats, width: float) -> Lines:
    """Lines for ranges of `n` (N,) readings: (d2 ± width * d3) * sigma; no lower limit unless above 0."""
    return within.spread_lines(n, sigma, lambda sizes: (d2(sizes), d3(sizes)), width)
