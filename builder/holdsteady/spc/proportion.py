"""The p chart: the fraction of units with a property, sizes equal or not.

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
    return attributes.estimate(count, size, use, name="mean fraction", binomial=True)


def lines(centre: float, size: Floats, width: float) -> Lines:
    """Lines for fractions of `size` (N,) units: p ± width * sqrt(p (1 - p) / n).

    A lower limit not above 0 and an upper one not below 1 are none. The plotted value is count / size.
    """
    own = np.sqrt(centre * (1.0 - centre) / size)
    return attributes.lines(centre, own, size, width, highest=1.0)
