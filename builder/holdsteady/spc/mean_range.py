"""The chart of subgroup means and ranges.

References
----------
Shewhart, W. A. (1931), Economic Control of Quality of Manufactured Product (three-sigma limits).
ISO 7870-2:2013. Tippett, L. H. C. (1925), Biometrika 17, 364-387 (d2, d3). Burr, I. W. (1969), Journal of
Quality Technology 1(3), 163-167 (unequal sizes).
"""

from __future__ import annotations

import numpy as np

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import within
from holdsteady.spc.constants import d2, d3
from holdsteady.spc.result import Estimate, Lines
from holdsteady.spc.subgroups import Subgroups


def estimate(groups: Subgroups, use: Bools, estimator: str | None = None) -> Estimate:
    """Estimate the centre, the grand mean of all used readings, and sigma of a single reading.

    Parameters
    ----------
    groups : G subgroups
    use : (G,) which of them are the baseline
    estimator : "mean-range" (when left out), "mean-s", "pooled" or "weighted"
    """
    return within.estimate(
        groups,
        use,
        centre=within.grand_mean(groups, use),
        centre_figure="grand mean",
        estimator=estimator or "mean-range",
    )


def location(centre: float, sigma: float | None, n: Floats, width: float) -> Lines:
    """Lines for means of `n` (N,) readings: centre ± width * sigma / sqrt(n); centre alone without sigma."""
    return within.location_lines(centre, sigma, 1.0 / np.sqrt(n), width)


def spread(sigma: float | None, n: Floats, width: float) -> Lines:
    """Lines for ranges of `n` (N,) readings: (d2 ± width * d3) * sigma; no lower limit unless above 0."""
    return within.spread_lines(n, sigma, lambda sizes: (d2(sizes), d3(sizes)), width)
