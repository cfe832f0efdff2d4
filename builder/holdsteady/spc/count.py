"""The c chart: the number of events in a constant opportunity.

References
----------
ISO 7870-2:2013. Shewhart, W. A. (1931), Economic Control of Quality of Manufactured Product (the idea of
three-sigma limits).
"""

from __future__ import annotations

import math

import numpy as np

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import attributes
from holdsteady.spc.result import Estimate, Lines


def estimate(count: Floats, use: Bools) -> Estimate:
    """Estimate the centre: the mean count of the used points; both (N,)."""
    return attributes.estimate(
        count, np.ones(len(count)), use, name="mean count", units_name="points", binomial=False
    )


def lines(centre: float, size: int, width: float) -> Lines:
    """Lines for `size` points: c ± width * sqrt(c). A lower limit not above 0 is none."""
    own = np.full(size, math.sqrt(centre))
    return attributes.lines(centre, own, np.ones(size), width)
