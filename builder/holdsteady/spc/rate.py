"""The u chart: events for each unit of opportunity, sizes equal or not.

References
----------
ISO 7870-2:2013. Shewhart, W. A. (1931), Economic Control of Quality of Manufactured Product (the idea of
three-sigma limits).
"""

from __future__ import annotations

import numpy as np

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import attributes
from holdsteady.spc.result import Estimate, Lines


def estimate(count: Floats, size: Floats, use: Bools) -> Estimate:
    """Estimate the centre: the sum of counts over the sum of sizes of the used points; all (N,)."""
    return attributes.estimate(count, size, use, name="mean rate", binomial=False)


def lines(centre: float, size: Floats, width: float) -> Lines:
    """Lines for rates over `size` (N,) units: u ± width * sqrt(u / n). A lower limit not above 0 is none.

    The plotted value is count / size.
    """
    own = np.sqrt(centre / size)
    return attributes.lines(centre, own, size, width)
