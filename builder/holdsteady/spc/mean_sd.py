"""The chart of subgroup means and standard deviations, for any sizes, equal or not.

References
----------
Burr, I. W. (1969), Journal of Quality Technology 1(3), 163-167.
Mahmoud, M. A., Henderson, G. R., Epprecht, E. K. & Woodall, W. H. (2010), Journal of Quality Technology
42(4), 348-357. ISO 7870-2:2013.
"""

from __future__ import annotations

import numpy as np

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import within
from holdsteady.spc.constants import c4
from holdsteady.spc.result import Estimate, Lines
from holdsteady.spc.subgroups import Subgroups


def estimate(groups: Subgroups, use: Bools, estimator: str | None = None) -> Estimate:
    """Estimate the centre, the mean weighted by n, and sigma of a single reading.

    Parameters
    ----------
    groups : G subgroups
    use : (G,) which of them are the baseline
    estimator : "pooled" (when left out), "mean-s", "weighted" or "mean-range"
    """
    return within.estimate(
        groups,
        use,
        centre=within.grand_mean(groups, use),
        centre_figure="grand mean",
        estimator=estimator or "pooled",
    )


def location(centre: float, sigma: float | None, n: Floats, width: float) -> Lines:
    """Lines for means of `n` (N,) readings: centre ± width * sigma / sqrt(n); centre alone without sigma."""
    return within.location_lines(centre, sigma, 1.0 / np.sqrt(n), width)


def spread(sigma: float | None, n: Floats, width: float) -> Lines:
    """Lines for s of `n` (N,) readings: (c4 ± width * sqrt(1 - c4**2)) * sigma; no lower unless above 0."""
    return within.spread_lines(n, sigma, _factors, width)


def _factors(n: Floats) -> tuple[Floats, Floats]:
    mean = c4(n)
    return mean, np.sqrt(1.0 - mean**2)
