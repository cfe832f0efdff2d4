"""The np chart: the number of units with a property among a constant number.

References
----------
ISO 7870-2:2013. Shewhart, W. A. (1931), Economic Control of Quality of Manufactured Product (the idea of
three-sigma limits).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import attributes
from holdsteady.spc.result import Estimate, Lines


def estimate(count: Floats, size: Floats, use: Bools) -> Estimate:
    """Estimate the centre: the mean count n p of the used points; all (N,).

    Raises
    ------
    ValueError
        The sizes differ; a p chart serves there.
    """
    sizes = size[use & ~np.isnan(count) & ~np.isnan(size)]
    if len(sizes) and sizes.min() != sizes.max():
        raise ValueError("an np chart needs one size for all points; use a p chart where sizes differ")
    fraction = attributes.estimate(count, size, use, name="mean fraction", binomial=True)
    if not len(sizes):
        return fraction
    centre = float(sizes[0]) * fraction.centre
    return replace(fraction, centre=centre, figures=(*fraction.figures, ("mean count", centre, False)))


def lines(centre: float, size: Floats, width: float) -> Lines:
    """Lines for counts among `size` (N,) units: n p ± width * sqrt(n p (1 - p)).

    A lower limit not above 0 and an upper one not below n are none.
    """
    own = np.sqrt(np.maximum(centre * (1.0 - centre / size), 0.0))
    return attributes.lines(centre, own, np.ones(len(size)), width, highest=size)
